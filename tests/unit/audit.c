/* Headers looked at without a socket; the attacks over sockets are in tests/service. Sources: RFC
   9112 sections 3.2, 6.1, 6.3; W3C Trace Context, section 3.2. */
#include "audit.h"

#include <criterion/criterion.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static request make(const char *target, const char *version, int count, const char *const *pairs) {
  request q = {.method = METHOD_GET, .version = version, .target = target, .header_count = count};
  for (int i = 0; i < count; i++)
    q.headers[i] = (header_field){pairs[2 * i], pairs[2 * i + 1], strlen(pairs[2 * i]),
                                  strlen(pairs[2 * i + 1])};
  return q;
}

static int judge(const char *target, const char *name, const char *value) {
  const char *pairs[] = {"Host", "plant:8080", name, value};
  request q = make(target, "HTTP/1.1", name ? 2 : 1, pairs);
  const char *why = "";
  int status = audit_request(&q, &why);
  cr_assert_eq(status == 0, why == NULL, "a refusal has a reason, %d", status);
  return status;
}

Test(audit, usual_requests_pass) {
  cr_assert_eq(judge("/v1/jobs?state=done&label=lot%3aB7", NULL, NULL), 0);
  cr_assert_eq(judge("http://plant/v1/jobs", "Accept", "text/csv, */*;q=0.1"), 0);
  cr_assert_eq(judge("/", "Content-Length", "0"), 0);
  cr_assert_eq(judge("/", "Transfer-Encoding", "Chunked"), 0);
  cr_assert_eq(judge("/", "Expect", "100-Continue"), 0);
  cr_assert_eq(judge("/", "X-Note", "caf\xc3\xa9\tbar"), 0,
               "bytes above ASCII are data in a value");
  const char *pairs[] = {"Host", "[::1]:8080"};
  request q = make("/", "HTTP/1.1", 1, pairs);
  const char *why;
  cr_assert_eq(audit_request(&q, &why), 0, "an IPv6 host");
  q = make("/", "HTTP/1.0", 0, pairs);
  cr_assert_eq(audit_request(&q, &why), 0, "HTTP/1.0 needs no host");
}

Test(audit, lists_may_come_in_several_headers) {
  const char *pairs[] = {"Host", "a",      "Accept", "text/csv", "Accept",
                         "*/*",  "Prefer", "x",      "Prefer",   "y"};
  request q = make("/", "HTTP/1.1", 5, pairs);
  const char *why;
  cr_assert_eq(audit_request(&q, &why), 0);
}

Test(audit, single_headers_come_once_however_they_are_spelt) {
  static const char *const single[] = {
      "Host",         "Content-Length", "Transfer-Encoding", "Expect",
      "Content-Type", "Authorization",  "Idempotency-Key",   "Content-Encoding"};
  for (size_t i = 0; i < sizeof single / sizeof single[0]; i++) {
    char upper[32];
    snprintf(upper, sizeof upper, "%s", single[i]);
    for (char *c = upper; *c; c++)
      if (*c >= 'a' && *c <= 'z') *c = (char)(*c - 32);
    const char *pairs[] = {single[i], "1", upper, "1"};
    request q = make("/", "HTTP/1.1", 2, pairs);
    const char *why;
    cr_assert_eq(audit_request(&q, &why), 400, "%s twice", single[i]);
  }
}

Test(audit, targets) {
  static const char *const bad[] = {"",       "healthz", "*",    "/a b",    "/a\x01",
                                    "/a\x7f", "/a\xff",  "/%00", "/%1f",    "/%7f",
                                    "/a#b",   "/a\\b",   "/<",   "ftp://a/"};
  for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++)
    cr_assert_eq(judge(bad[i], NULL, NULL), 400, "target \"%s\"", bad[i]);
  char *longest = malloc(8194);
  memset(longest, 'a', 8193);
  longest[0] = '/';
  longest[8193] = '\0';
  cr_assert_eq(judge(longest, NULL, NULL), 414);
  longest[8192] = '\0';
  cr_assert_eq(judge(longest, NULL, NULL), 0);
  free(longest);
}

Test(audit, framing) {
  cr_assert_eq(judge("/", "Content-Length", "1e3"), 400);
  cr_assert_eq(judge("/", "Content-Length", " 3"), 400);
  cr_assert_eq(judge("/", "Content-Length", "1234567890123456789"), 400,
               "more than a size_t may hold");
  cr_assert_eq(judge("/", "Content-Length", "123456789012345678"), 0);
  cr_assert_eq(judge("/", "Transfer-Encoding", "gzip"), 501);
  cr_assert_eq(judge("/", "Transfer-Encoding", "chunked, chunked"), 501);
  cr_assert_eq(judge("/", "Expect", "100-continue, x"), 417);
  cr_assert_eq(judge("/", "Content-Length ", "3"), 400);
}

Test(audit, trace_context) {
  const char *good = "00-4bf92f3577b34da6a3ce929d0e0e4736-00f067aa0ba902b7-01";
  cr_assert(audit_traceparent(good));
  cr_assert(audit_traceparent("cc-4bf92f3577b34da6a3ce929d0e0e4736-00f067aa0ba902b7-01-later"));
  static const char *const bad[] = {"",
                                    "00",
                                    "00-4bf92f3577b34da6a3ce929d0e0e4736-00f067aa0ba902b7-0",
                                    "00-4bf92f3577b34da6a3ce929d0e0e4736-00f067aa0ba902b7-01-x",
                                    "00-4BF92F3577B34DA6A3CE929D0E0E4736-00f067aa0ba902b7-01",
                                    "ff-4bf92f3577b34da6a3ce929d0e0e4736-00f067aa0ba902b7-01",
                                    "00-00000000000000000000000000000000-00f067aa0ba902b7-01",
                                    "00-4bf92f3577b34da6a3ce929d0e0e4736-0000000000000000-01",
                                    "00_4bf92f3577b34da6a3ce929d0e0e4736-00f067aa0ba902b7-01",
                                    "cc-4bf92f3577b34da6a3ce929d0e0e4736-00f067aa0ba902b7-01later"};
  for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++)
    cr_assert_not(audit_traceparent(bad[i]), "\"%s\"", bad[i]);
}
