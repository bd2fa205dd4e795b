/* Preferences of callers. Sources: RFC 9110 sections 12.5.1 (Accept, with its own
 * example), 12.5.3, 13.1.2; RFC 7240. */
#include "negotiate.h"

#include <criterion/criterion.h>
#include <math.h>

static const char *const two[] = {"application/json", "text/csv", NULL};

Test(negotiate, no_accept_takes_the_first) {
  cr_assert_eq(negotiate_media(NULL, two), 0);
  cr_assert_eq(negotiate_media("  ", two), 0);
  cr_assert_eq(negotiate_media("*/*", two), 0);
}

Test(negotiate, the_higher_weight_wins) {
  cr_assert_eq(negotiate_media("text/csv;q=0.9, application/json;q=0.8", two), 1);
  cr_assert_eq(negotiate_media("text/csv ; q=0.2,application/*", two), 0);
  cr_assert_eq(negotiate_media("TEXT/CSV", two), 1);
}

Test(negotiate, the_closest_range_gives_the_weight) {
  cr_assert_eq(negotiate_media("*/*, application/json;q=0", two), 1);
  cr_assert_eq(negotiate_media("text/*;q=0.3, text/csv;q=0, application/json;q=0.1", two), 0);
}

/* RFC 9110 section 12.5.1: the weights of its example: text/plain 0.7 or more, text/html 0.3,
 * image/jpeg 0.5. */
Test(negotiate, the_example_of_the_standard) {
  static const char *const html_or_picture[] = {"text/html", "image/jpeg", NULL};
  static const char *const plain_or_picture[] = {"image/jpeg", "text/plain", NULL};
  const char *accept = "text/*;q=0.3, text/plain;q=0.7, text/plain;format=flowed, */*;q=0.5";
  cr_assert_eq(negotiate_media(accept, html_or_picture), 1);
  cr_assert_eq(negotiate_media(accept, plain_or_picture), 1);
}

Test(negotiate, nothing_acceptable) {
  cr_assert_eq(negotiate_media("image/png", two), -1);
  cr_assert_eq(negotiate_media("text/csv;q=0", two), -1);
  cr_assert_eq(negotiate_media("text/csv;q=many", two), -1);
  cr_assert_eq(negotiate_media("application/json2", two), -1);
}

Test(negotiate, gzip) {
  cr_assert(negotiate_gzip("gzip"));
  cr_assert(negotiate_gzip("br, GZIP;q=0.5"));
  cr_assert(negotiate_gzip("*"));
  cr_assert_not(negotiate_gzip(NULL));
  cr_assert_not(negotiate_gzip(""));
  cr_assert_not(negotiate_gzip("gzip;q=0"));
  cr_assert_not(negotiate_gzip("*;q=0, br"));
  cr_assert_not(negotiate_gzip("gzip;q=0.5, identity;q=0.9"));
}

Test(negotiate, content_type) {
  cr_assert(media_type_is("application/json", "application/json"));
  cr_assert(media_type_is("Application/Json ;charset=UTF-8", "application/json"));
  cr_assert(media_type_is("application/json; x=\"a;b\"; charset=\"utf-8\"", "application/json"));
  cr_assert_not(media_type_is(NULL, "application/json"));
  cr_assert_not(media_type_is("", "application/json"));
  cr_assert_not(media_type_is("application/jsonp", "application/json"));
  cr_assert_not(media_type_is("application/json; charset=latin1", "application/json"));
}

Test(negotiate, prefer) {
  preference p = negotiate_prefer("respond-async, wait=10");
  cr_assert(p.respond_async);
  cr_assert_float_eq(p.wait, 10, 0);
  p = negotiate_prefer("return=minimal; foo=\"some, parameter\", Wait=5");
  cr_assert_not(p.respond_async);
  cr_assert_float_eq(p.wait, 5, 0);
  cr_assert(isnan(negotiate_prefer(NULL).wait));
  cr_assert(isnan(negotiate_prefer("wait=").wait));
  cr_assert(isnan(negotiate_prefer("wait=-3").wait));
  cr_assert(isnan(negotiate_prefer("waiting=3").wait));
  cr_assert_float_eq(negotiate_prefer("wait=1, wait=9").wait, 1, 0, "the first counts");
}

Test(negotiate, none_match) {
  cr_assert(negotiate_none_match("\"a\", \"b\"", "\"b\""));
  cr_assert(negotiate_none_match("W/\"b\"", "\"b\""));
  cr_assert(negotiate_none_match("*", "\"b\""));
  cr_assert(negotiate_none_match("\"a,b\"", "\"a,b\""));
  cr_assert_not(negotiate_none_match(NULL, "\"b\""));
  cr_assert_not(negotiate_none_match("b", "\"b\""));
  cr_assert_not(negotiate_none_match("\"bb\"", "\"b\""));
}
