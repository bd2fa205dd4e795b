/* audit.c: the headers and target of a request, before its body is read. */
#include "audit.h"

#include <string.h>
#include <strings.h>

enum { LONGEST_TARGET = 8192 };

/* Two of these in one request make two readers see two requests. */
static const char *const single_headers[] = {"host",
                                             "content-length",
                                             "transfer-encoding",
                                             "content-type",
                                             "content-encoding",
                                             "expect",
                                             "authorization",
                                             "idempotency-key",
                                             "content-range",
                                             "range",
                                             "if-none-match",
                                             "proxy-connection",
                                             NULL};

static bool is_token_character(unsigned char c) {
  return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') ||
         (c && strchr("!#$%&'*+-.^_`|~", c));
}

static int audit_target(const char *target, const char **why) {
  size_t length = strlen(target);
  *why = "the address is longer than 8192 bytes";
  if (length > LONGEST_TARGET) return 414;
  *why = "the address holds a byte that must be percent-encoded";
  for (const char *c = target; *c; c++)
    if ((unsigned char)*c <= ' ' || (unsigned char)*c >= 0x7f || strchr("\"<>\\^`{|}", *c))
      return 400;
  *why = "the address does not begin with a slash";
  if (target[0] != '/' && strncasecmp(target, "http://", 7) != 0) return 400;
  *why = "the address holds a fragment";
  if (strchr(target, '#')) return 400;
  *why = "the address holds an encoded control character";
  for (const char *c = strchr(target, '%'); c; c = strchr(c + 1, '%'))
    if ((c[1] == '0' || c[1] == '1') || (c[1] == '7' && (c[2] == 'f' || c[2] == 'F'))) return 400;
  return 0;
}

static int audit_field(const header_field *h, const char **why) {
  *why = "a header has no name";
  if (h->name_length == 0) return 400;
  *why = "a header's name holds a character that is not allowed there";
  for (size_t i = 0; i < h->name_length; i++)
    if (!is_token_character((unsigned char)h->name[i])) return 400;
  *why = "a header's value holds a control character";
  for (size_t i = 0; i < h->value_length; i++)
    if (((unsigned char)h->value[i] < ' ' && h->value[i] != '\t') || h->value[i] == 0x7f)
      return 400;
  return 0;
}

static int count_of(const request *q, const char *name) {
  int count = 0;
  for (int i = 0; i < q->header_count; i++)
    if (strlen(name) == q->headers[i].name_length &&
        strncasecmp(name, q->headers[i].name, q->headers[i].name_length) == 0)
      count++;
  return count;
}

static int audit_framing(const request *q, const char **why) {
  const char *length = request_header(q, "content-length");
  const char *coding = request_header(q, "transfer-encoding");
  *why = "Content-Length and Transfer-Encoding do not go together";
  if (length && coding) return 400;
  *why = "Content-Length must be a number of bytes";
  if (length && (!*length || strlen(length) > 18 || length[strspn(length, "0123456789")] != '\0'))
    return 400;
  *why = "Transfer-Encoding needs HTTP/1.1";
  if (coding && strcmp(q->version, "HTTP/1.1") != 0) return 400;
  *why = "the only transfer coding read here is chunked";
  if (coding && strcasecmp(coding, "chunked") != 0) return 501;
  *why = "the only expectation met here is 100-continue";
  const char *expect = request_header(q, "expect");
  if (expect && strcasecmp(expect, "100-continue") != 0) return 417;
  return 0;
}

static int audit_host(const request *q, const char **why) {
  const char *host = request_header(q, "host");
  *why = "HTTP/1.1 needs a Host header";
  if (!host) return strcmp(q->version, "HTTP/1.1") == 0 ? 400 : 0;
  *why = "the Host header is not a host and a port";
  if (!*host) return 400;
  for (const char *c = host; *c; c++)
    if (!is_token_character((unsigned char)*c) && !strchr(":[]()=;,", *c)) return 400;
  return strchr(host, ',') ? 400 : 0;
}

int audit_request(const request *q, const char **why) {
  int status = 0;
  *why = "the version of HTTP is not 1.0 or 1.1";
  if (strcmp(q->version, "HTTP/1.1") != 0 && strcmp(q->version, "HTTP/1.0") != 0) return 505;
  *why = "more than 64 headers";
  if (q->header_count > MOST_HEADERS) return 431;
  if ((status = audit_target(q->target, why)) != 0) return status;
  for (int i = 0; i < q->header_count; i++)
    if ((status = audit_field(&q->headers[i], why)) != 0) return status;
  *why = "a header that may come once came more than once";
  for (int i = 0; single_headers[i]; i++)
    if (count_of(q, single_headers[i]) > 1) return 400;
  if ((status = audit_framing(q, why)) != 0) return status;
  if ((status = audit_host(q, why)) != 0) return status;
  *why = NULL;
  return 0;
}

static bool is_hex(const char *text, size_t length) {
  return strspn(text, "0123456789abcdef") >= length;
}

bool audit_traceparent(const char *value) {
  if (strlen(value) < 55 || value[2] != '-' || value[35] != '-' || value[52] != '-') return false;
  if (!is_hex(value, 2) || !is_hex(value + 3, 32) || !is_hex(value + 36, 16) ||
      !is_hex(value + 53, 2))
    return false;
  if (strncmp(value, "ff", 2) == 0 || strspn(value + 3, "0") >= 32 || strspn(value + 36, "0") >= 16)
    return false;
  return value[55] == '\0' || (value[55] == '-' && strncmp(value, "00", 2) != 0);
}
