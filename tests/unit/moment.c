/* Moments as RFC 3339 writes them. The seconds are those that `date -u -d ... +%s` of GNU coreutils
   gives; 2000-02-29 and 1900-03-01 hold the rule of leap years. */
#include "reader.h"

#include <criterion/criterion.h>

static const struct {
  const char *text;
  double seconds;
} moments[] = {{"1970-01-01T00:00:00Z", 0},          {"2031-03-04T06:10:00+01:00", 1930367400},
               {"2031-03-04T05:10:00Z", 1930367400}, {"2031-03-04T00:10:00-05:00", 1930367400},
               {"2000-02-29T12:00:00Z", 951825600},  {"1900-03-01T00:00:00Z", -2203891200},
               {"2024-12-31T23:59:60Z", 1735689600}, {"2026-03-01t06:30:00.250z", 1772346600.25}};

Test(moment, reads_offsets_and_leap_years) {
  for (int i = 0; i < COUNT_OF(moments); i++) {
    double seconds = -1;
    cr_expect(read_rfc3339(moments[i].text, &seconds), "%s", moments[i].text);
    cr_expect_float_eq(seconds, moments[i].seconds, 1e-6, "%s is %.3f", moments[i].text, seconds);
  }
}

Test(moment, refuses_what_is_none) {
  static const char *const texts[] = {"",
                                      "2031-03-04",
                                      "2031-03-04T06:10:00",
                                      "2031-03-04T06:10Z",
                                      "2031-3-4T06:10:00Z",
                                      "2031-02-29T06:10:00Z",
                                      "1900-02-29T00:00:00Z",
                                      "2031-13-01T00:00:00Z",
                                      "2031-00-01T00:00:00Z",
                                      "2031-04-31T00:00:00Z",
                                      "2031-03-04T24:00:00Z",
                                      "2031-03-04T06:60:00Z",
                                      "2031-03-04T06:10:61Z",
                                      "2031-03-04T06:10:00+0100",
                                      "2031-03-04T06:10:00+24:00",
                                      "2031-03-04T06:10:00.Z",
                                      "2031-03-04T06:10:00Z ",
                                      "2031-03-04T06:10:00+01:0",
                                      "yesterday"};
  for (int i = 0; i < COUNT_OF(texts); i++) {
    double seconds = 42;
    cr_expect_not(read_rfc3339(texts[i], &seconds), "%s", texts[i]);
    cr_expect_eq(seconds, 42, "%s", texts[i]);
  }
}
