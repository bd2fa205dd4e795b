/* Requests and replies without a socket. */
#include "exchange.h"

#include <criterion/criterion.h>
#include <stdlib.h>
#include <string.h>

static request split(const char *target, int outcome) {
  request q = {.target = target};
  cr_assert_eq(request_split_target(&q), outcome, "%s", target);
  return q;
}

Test(exchange, target) {
  static const struct {
    const char *target, *path, *query;
  } cases[] = {{"/v1/jobs", "/v1/jobs", ""},
               {"/v1/jobs?a=1&b=2", "/v1/jobs", "a=1&b=2"},
               {"/%41%62c?x=%20", "/Abc", "x=%20"},
               {"http://h/p?q", "/p", "q"},
               {"HTTP://h", "/", ""},
               {"http://h?q", "", "q"},
               {"/a+b", "/a+b", ""},
               {"/a?b?c", "/a", "b?c"}};
  for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
    request q = split(cases[i].target, 0);
    cr_assert_str_eq(q.path, cases[i].path);
    cr_assert_str_eq(q.query, cases[i].query);
    request_free(&q);
  }
  static const char *const broken[] = {"/%", "/%4", "/%4g", "/%00", "/a%"};
  for (size_t i = 0; i < sizeof broken / sizeof broken[0]; i++) {
    request q = split(broken[i], -1);
    request_free(&q);
  }
}

Test(exchange, parameters) {
  static const char *const known[] = {"at", "limit", NULL};
  char value[16];
  request q = split("/x?at=20%2C150&&limit=3&empty=&flag&plus=a+b", 0);
  cr_assert(request_parameter(&q, "at", value, sizeof value));
  cr_assert_str_eq(value, "20,150");
  cr_assert(request_parameter(&q, "empty", value, sizeof value) && value[0] == '\0');
  cr_assert(request_parameter(&q, "flag", value, sizeof value) && value[0] == '\0');
  cr_assert(request_parameter(&q, "plus", value, sizeof value));
  cr_assert_str_eq(value, "a b");
  cr_assert_not(request_parameter(&q, "a", value, sizeof value));
  cr_assert_not(request_parameter(&q, "at", value, 5), "too long for its place");
  cr_assert(request_unknown_parameter(&q, known, value, sizeof value));
  cr_assert_str_eq(value, "empty");
  request_free(&q);
}

Test(exchange, headers) {
  request q = {
      .header_count = 3,
      .headers = {{"Accept", "a", 6, 1}, {"ACCEPT", "b", 6, 1}, {"X-Nothing", NULL, 9, 0}}};
  char all[16];
  cr_assert_str_eq(request_header(&q, "accept"), "a");
  cr_assert_str_eq(request_header(&q, "x-nothing"), "");
  cr_assert_null(request_header(&q, "accep"));
  cr_assert(request_list_header(&q, "accept", all, sizeof all));
  cr_assert_str_eq(all, "a, b");
  cr_assert_not(request_list_header(&q, "accept", all, 4), "too long for its place");
  cr_assert_not(request_list_header(&q, "prefer", all, sizeof all));
}

static int released;

static void release(void *self, void *hold) {
  cr_assert_eq(self, &released);
  cr_assert_eq(hold, &released);
  released++;
}

Test(exchange, a_problem_replaces_what_was_held_and_keeps_headers) {
  reply r;
  size_t length;
  reply_init(&r);
  r.held = "bytes";
  r.held_length = 5;
  r.release = release;
  r.release_self = r.hold = &released;
  cr_assert_str_eq(reply_content(&r, &length), "bytes");
  reply_header_set(&r, "Location", "/v1/jobs/%d", 7);
  reply_header_set(&r, "location", "/v1/jobs/%d", 8);
  reply_problem(&r, 404, "gone");
  cr_assert_eq(released, 1);
  cr_assert_eq(r.header_count, 1);
  cr_assert_str_eq(r.headers[0].value, "/v1/jobs/8");
  cr_assert(strstr(reply_content(&r, &length), "\"status\": 404"));
  reply_free(&r);
  cr_assert_eq(released, 1, "and is let go once");
}

Test(exchange, small_content_is_not_worth_compressing) {
  reply r;
  reply_init(&r);
  r.compress = true;
  for (int i = 0; i < 1023; i++) buffer_text(&r.body, "x");
  cr_assert_not(reply_compresses(&r));
  buffer_text(&r.body, "x");
  cr_assert(reply_compresses(&r));
  r.compress = false;
  cr_assert_not(reply_compresses(&r));
  reply_free(&r);
}
