/* exchange.c: requests and replies without a socket. */
#include "exchange.h"

#include "problem.h"

#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

enum { WORTH_COMPRESSING = 1024 }; /* bytes: less fits one packet anyway */

void request_free(request *q) {
  free(q->path);
  buffer_free(&q->body);
  q->path = q->query = NULL;
}

static int hex_digit(char c) {
  if (c >= '0' && c <= '9') return c - '0';
  if (c >= 'a' && c <= 'f') return c - 'a' + 10;
  if (c >= 'A' && c <= 'F') return c - 'A' + 10;
  return -1;
}

/* Percent-decodes length bytes into out (which has room for them and a NUL). False for a broken or
 * a zero escape. */
static bool decode(const char *text, size_t length, bool plus_is_space, char *out) {
  size_t n = 0;
  for (size_t i = 0; i < length; i++) {
    char c = text[i];
    if (c == '%') {
      int high = i + 2 < length ? hex_digit(text[i + 1]) : -1;
      int low = i + 2 < length ? hex_digit(text[i + 2]) : -1;
      if (high < 0 || low < 0 || (high == 0 && low == 0)) return false;
      c = (char)(high * 16 + low);
      i += 2;
    } else if (c == '+' && plus_is_space) {
      c = ' ';
    }
    out[n++] = c;
  }
  out[n] = '\0';
  return true;
}

/* Where the path begins: a target may be whole ("http://host/path"), RFC 9112 section 3.2.2. */
static const char *path_in(const char *target) {
  if (strncasecmp(target, "http://", 7) != 0) return target;
  const char *path = strpbrk(target + 7, "/?");
  return path ? path : "/";
}

int request_split_target(request *q) {
  const char *path = path_in(q->target);
  size_t path_length = strcspn(path, "?");
  const char *query = path[path_length] == '?' ? path + path_length + 1 : "";
  size_t query_length = strlen(query);
  q->path = malloc(path_length + query_length + 2);
  if (!q->path) return -2;
  q->query = q->path + path_length + 1;
  memcpy(q->query, query, query_length + 1);
  q->path[0] = '\0';
  return decode(path, path_length, false, q->path) ? 0 : -1;
}

static bool is_named(const header_field *h, const char *name) {
  return strlen(name) == h->name_length && strncasecmp(h->name, name, h->name_length) == 0;
}

const char *request_header(const request *q, const char *name) {
  for (int i = 0; i < q->header_count && i < MOST_HEADERS; i++)
    if (is_named(&q->headers[i], name)) return q->headers[i].value ? q->headers[i].value : "";
  return NULL;
}

bool request_list_header(const request *q, const char *name, char *out, size_t size) {
  size_t used = 0;
  bool found = false;
  for (int i = 0; i < q->header_count && i < MOST_HEADERS; i++) {
    if (!is_named(&q->headers[i], name)) continue;
    int n = snprintf(out + used, size - used, "%s%s", found ? ", " : "",
                     q->headers[i].value ? q->headers[i].value : "");
    if (n < 0 || (size_t)n >= size - used) return false;
    used += (size_t)n;
    found = true;
  }
  return found;
}

/* The next "name=value" of a query; false at its end. */
static bool next_parameter(const char **at, const char **name, size_t *name_length,
                           const char **value, size_t *value_length) {
  while (**at == '&') ++*at;
  if (!**at) return false;
  size_t whole = strcspn(*at, "&");
  *name = *at;
  *name_length = strcspn(*at, "=&");
  *value = *at + *name_length + (*name_length < whole ? 1 : 0);
  *value_length = (size_t)(*at + whole - *value);
  *at += whole;
  return true;
}

bool request_parameter(const request *q, const char *name, char *out, size_t size) {
  const char *at = q->query, *given, *value;
  size_t given_length, length;
  while (next_parameter(&at, &given, &given_length, &value, &length))
    if (given_length == strlen(name) && strncmp(given, name, given_length) == 0)
      return length < size && decode(value, length, true, out);
  return false;
}

bool request_unknown_parameter(const request *q, const char *const *known, char *out, size_t size) {
  const char *at = q->query, *name, *value;
  size_t name_length, length;
  while (next_parameter(&at, &name, &name_length, &value, &length)) {
    bool is_known = false;
    for (int i = 0; known[i]; i++)
      is_known |= strlen(known[i]) == name_length && strncmp(known[i], name, name_length) == 0;
    if (is_known) continue;
    snprintf(out, size, "%.*s", (int)name_length, name);
    return true;
  }
  return false;
}

void reply_init(reply *r) {
  memset(r, 0, sizeof *r);
  buffer_init(&r->body, 0);
}

/* Drops the content, own or held. */
static void drop_content(reply *r) {
  buffer_free(&r->body);
  if (r->release) r->release(r->release_self, r->hold);
  r->held = NULL;
  r->held_length = 0;
  r->release = NULL;
}

void reply_free(reply *r) {
  drop_content(r);
}

void reply_header_set(reply *r, const char *name, const char *value, ...) {
  int i = 0;
  while (i < r->header_count && strcasecmp(r->headers[i].name, name) != 0) i++;
  if (i == MOST_REPLY_HEADERS) return;
  if (i == r->header_count) r->header_count++;
  r->headers[i].name = name;
  va_list arguments;
  va_start(arguments, value);
  vsnprintf(r->headers[i].value, sizeof r->headers[i].value, value, arguments);
  va_end(arguments);
}

const char *reply_content(const reply *r, size_t *length) {
  *length = r->held ? r->held_length : r->body.length;
  const char *bytes = r->held ? r->held : r->body.bytes;
  return bytes ? bytes : "";
}

bool reply_compresses(const reply *r) {
  size_t length;
  reply_content(r, &length);
  return r->compress && length >= WORTH_COMPRESSING;
}

void reply_problem(reply *r, int status, const char *detail) {
  drop_content(r);
  r->status = status;
  r->type = "application/problem+json";
  problem_write(&r->body, status, detail, NULL);
}

method method_of(const char *text) {
  if (strcmp(text, "GET") == 0) return METHOD_GET;
  if (strcmp(text, "HEAD") == 0) return METHOD_HEAD;
  if (strcmp(text, "POST") == 0) return METHOD_POST;
  if (strcmp(text, "DELETE") == 0) return METHOD_DELETE;
  return METHOD_OTHER;
}
