/* json_out: numbers carry what their error supports, and everything written is JSON (RFC 8259),
   judged by a general JSON library and by the C library's strtod. */
#include "json_out.h"

#include <criterion/criterion.h>
#include <jansson.h>
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char *shown(double value, double error) {
  static buffer b;
  buffer_clear(&b);
  json_out_number(&b, value, error);
  return b.failed ? "failed" : b.bytes;
}

static const char *shown_error(double error) {
  static buffer b;
  buffer_clear(&b);
  json_out_error(&b, error);
  return b.bytes;
}

Test(json_out, rounds_to_a_hundredth_of_the_error) {
  cr_assert_str_eq(shown(851.234567, 0.12), "851.235"); /* 0.0012: three decimals */
  cr_assert_str_eq(shown(12855.4321, 4), "12855.43");
  cr_assert_str_eq(shown(-3.14159265, 0.002), "-3.14159");
}

Test(json_out, is_never_coarser_than_six_digits) {
  cr_assert_str_eq(shown(851.234567, 1000), "851.235");
  cr_assert_str_eq(shown(851.234567, INFINITY), "851.235");
  cr_assert_str_eq(shown(1.23456789e-3, 5), "0.00123457");
  cr_assert_str_eq(shown(35123456.78, 1e6), "35123500");
}

Test(json_out, no_error_means_twelve_digits) {
  cr_assert_str_eq(shown(0.1234567890123456, 0), "0.123456789012");
  cr_assert_str_eq(shown(60, NAN), "60");
  cr_assert_str_eq(shown(1.0 / 3, 0), "0.333333333333");
}

Test(json_out, never_more_than_fifteen_digits) {
  cr_assert_str_eq(shown(2500.1, 1e-30), "2500.1");
  cr_assert_str_eq(shown(0.1 + 0.2, 1e-30), "0.3");
}

Test(json_out, zero_has_no_sign) {
  cr_assert_str_eq(shown(0.0, 0.5), "0");
  cr_assert_str_eq(shown(-0.0, 0.5), "0");
  cr_assert_str_eq(shown(-1.1368683772161603e-13, 0.05), "0"); /* round-off of 273.15 K */
}

Test(json_out, large_and_small_have_an_exponent) {
  cr_assert_str_eq(shown(1e15, 0), "1e15");
  cr_assert_str_eq(shown(999999999999999.0, 1), "999999999999999");
  cr_assert_str_eq(shown(-1.5e-12, 0), "-1.5e-12");
  cr_assert_str_eq(shown(1e-5, 0), "0.00001");
  cr_assert_str_eq(shown(1e22, 0), "1e22");
  cr_assert_str_eq(shown(5e-324, 0), "4.94065645841e-324");
}

Test(json_out, what_is_not_finite_fails_and_stays_failed) {
  const double values[] = {NAN, INFINITY, -INFINITY};
  for (int i = 0; i < 3; i++) {
    buffer b;
    buffer_init(&b, 0);
    cr_assert_not(json_out_number(&b, values[i], 0.5));
    cr_assert(b.failed);
    cr_assert_not(json_out_number(&b, 1, 0.5));
    cr_assert_eq(b.length, 0);
    buffer_free(&b);
  }
}

Test(json_out, errors_are_rounded_up_to_three_digits) {
  cr_assert_str_eq(shown_error(0.12), "0.12");
  cr_assert_str_eq(shown_error(0.12341), "0.124");
  cr_assert_str_eq(shown_error(9.9911), "10");
  cr_assert_str_eq(shown_error(0), "0");
  cr_assert_str_eq(shown_error(1.0001e-12), "1.01e-12");
}

/* A reproducible stream of numbers over many sizes (Marsaglia's xorshift, 2003). */
static double next_number(uint64_t *state, double least_exponent, double most_exponent) {
  double part[2];
  for (int i = 0; i < 2; i++) {
    *state ^= *state << 13;
    *state ^= *state >> 7;
    *state ^= *state << 17;
    part[i] = (double)(*state >> 11) / 9007199254740992.0;
  }
  return (part[1] < 0.5 ? -1 : 1) *
         pow(10, least_exponent + part[0] * (most_exponent - least_exponent));
}

/* Reading back must give the value within half of the step that was promised: a hundredth of the
   error, the sixth digit where that is finer, the fifteenth where that is coarser; and within the
   round-off of one product (2^-53). */
Test(json_out, reads_back_within_its_step) {
  uint64_t state = 20260101;
  for (int i = 0; i < 200000; i++) {
    double value = next_number(&state, -18, 18), size = fabs(value);
    double error = fabs(next_number(&state, -6, 4));
    if (size < 1e-6 * error) continue;
    char *end;
    const char *text = shown(value, error);
    double back = strtod(text, &end);
    cr_assert_eq(*end, '\0');
    double step = fmax(fmin(error / 100, size * 1e-5), size * 1e-14);
    cr_assert_leq(fabs(back - value), step / 2 + size * 2.3e-16, "%.17g with error %g became %s",
                  value, error, text);
  }
}

Test(json_out, numbers_are_json) {
  uint64_t state = 7;
  for (int i = 0; i < 20000; i++) {
    const char *text = shown(next_number(&state, -300, 300), fabs(next_number(&state, -12, 12)));
    json_t *parsed = json_loads(text, JSON_DECODE_ANY, NULL);
    cr_assert_not_null(parsed, "%s", text);
    json_decref(parsed);
  }
}

static void check_string(const char *text, const char *expected) {
  buffer b;
  buffer_init(&b, 0);
  json_out_string(&b, text);
  cr_assert_not(b.failed);
  json_t *parsed = json_loads(b.bytes, JSON_DECODE_ANY, NULL);
  cr_assert_not_null(parsed, "%s", b.bytes);
  cr_assert_str_eq(json_string_value(parsed), expected);
  json_decref(parsed);
  buffer_free(&b);
}

Test(json_out, strings_come_back_as_they_were) {
  const char *const texts[] = {"",
                               "soak",
                               "a \"quoted\" \\ word",
                               "tab\tline\nreturn\r",
                               "\x01\x1f",
                               "\x7f",
                               "caf\xC3\xA9 \xE2\x82\xAC \xF0\x9F\x94\xA5",
                               "/slash/",
                               "20 \xC2\xB0"};
  for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++) check_string(texts[i], texts[i]);
}

/* Sequences that RFC 3629 forbids: a lone continuation, overlong, a surrogate, beyond U+10FFFF, cut
 * off. */
Test(json_out, bytes_that_are_no_text_are_replaced) {
  check_string("a\x80z", "a\xEF\xBF\xBDz");
  check_string("\xC0\xAF", "\xEF\xBF\xBD\xEF\xBF\xBD");
  check_string("\xED\xA0\x80", "\xEF\xBF\xBD\xEF\xBF\xBD\xEF\xBF\xBD");
  check_string("\xF4\x90\x80\x80", "\xEF\xBF\xBD\xEF\xBF\xBD\xEF\xBF\xBD\xEF\xBF\xBD");
  check_string("cut \xE2\x82", "cut \xEF\xBF\xBD\xEF\xBF\xBD");
}

Test(buffer, stops_at_its_limit_and_says_so) {
  buffer b;
  buffer_init(&b, 10);
  buffer_text(&b, "0123456789");
  cr_assert_not(b.failed);
  buffer_text(&b, "x");
  cr_assert(b.failed);
  cr_assert_str_eq(b.bytes, "0123456789");
  buffer_clear(&b);
  cr_assert_not(b.failed);
  buffer_format(&b, "%s-%d", "abc", 42);
  cr_assert_str_eq(b.bytes, "abc-42");
  buffer_format(&b, "%s", "too long for it");
  cr_assert(b.failed);
  cr_assert_str_eq(b.bytes, "abc-42");
  buffer_free(&b);
}

Test(buffer, grows_far_beyond_its_first_size) {
  buffer b;
  buffer_init(&b, 0);
  for (int i = 0; i < 100000; i++) buffer_format(&b, "%05d", i);
  cr_assert_not(b.failed);
  cr_assert_eq(b.length, 500000);
  cr_assert_eq(strncmp(b.bytes + 5 * 77777, "77777", 5), 0);
  buffer_free(&b);
}
