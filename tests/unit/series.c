/* series: values against time, their breaks and one-sided limits; the nominal fire curves against
   EN 1991-1-2:2002, 3.2. */
#include "series.h"

#include "make_case.h"

#include <criterion/criterion.h>

/* Rises, jumps up at 10 (three rows: only first and last count), falls, jumps down at 30, holds. */
static const double x[] = {0, 10, 10, 10, 20, 30, 30};
static const double y[] = {100, 200, 999, 500, 400, 300, 50};
static const series stepped = {.kind = SERIES_TABLE, .table = {7, x, y}};

Test(series, constant_holds_everywhere) {
  series s = constant(350);
  double value, slope, least, most;
  cr_assert_eq(series_value(&s, -1e9), 350);
  cr_assert_eq(series_before(&s, 1e9), 350);
  series_within(&s, 0, 1, 0.5, &value, &slope);
  cr_assert_eq(value, 350);
  cr_assert_eq(slope, 0);
  cr_assert_eq(series_next_break(&s, 0), INFINITY);
  cr_assert_eq(series_longest_step(&s), INFINITY);
  cr_assert_eq(series_last(&s, 3), 350);
  series_range(&s, 0, 5, &least, &most);
  cr_assert(least == 350 && most == 350);
}

Test(series, table_is_linear_between_rows_and_holds_at_the_ends) {
  cr_assert_eq(series_value(&stepped, -5), 100);
  cr_assert_eq(series_value(&stepped, 0), 100);
  cr_assert_float_eq(series_value(&stepped, 5), 150, 1e-13);
  cr_assert_float_eq(series_value(&stepped, 15), 450, 1e-13);
  cr_assert_float_eq(series_value(&stepped, 25), 350, 1e-13);
  cr_assert_eq(series_value(&stepped, 31), 50);
  cr_assert_eq(series_last(&stepped, 0), 50);
}

Test(series, a_jump_has_a_value_after_and_a_value_before) {
  cr_assert_eq(series_value(&stepped, 10), 500);
  cr_assert_eq(series_before(&stepped, 10), 200);
  cr_assert_eq(series_value(&stepped, 30), 50);
  cr_assert_eq(series_before(&stepped, 30), 300);
  cr_assert_eq(series_value(&stepped, 20), 400);
  cr_assert_eq(series_before(&stepped, 20), 400);
}

Test(series, a_jump_in_the_first_row) {
  static const double tx[] = {0, 0, 1}, ty[] = {20, 80, 90};
  series s = rows(3, tx, ty);
  double value, slope;
  cr_assert_eq(series_before(&s, 0), 20);
  cr_assert_eq(series_value(&s, 0), 80);
  series_within(&s, 0, 1, 0, &value, &slope);
  cr_assert_eq(value, 80);
  cr_assert_float_eq(slope, 10, 1e-13);
}

Test(series, inside_an_interval_both_ends_are_one_sided_limits) {
  static const double from[] = {0, 10, 20, 30}, to[] = {10, 20, 30, 40};
  static const double first[] = {100, 500, 400, 50}, last[] = {200, 400, 300, 50};
  for (int i = 0; i < 4; i++) {
    double value, slope;
    series_within(&stepped, from[i], to[i], from[i], &value, &slope);
    cr_assert_float_eq(value, first[i], 1e-12);
    series_within(&stepped, from[i], to[i], to[i], &value, &slope);
    cr_assert_float_eq(value, last[i], 1e-12);
    cr_assert_float_eq(slope, (last[i] - first[i]) / 10, 1e-12);
  }
}

Test(series, breaks_are_rows_strictly_later) {
  cr_assert_eq(series_next_break(&stepped, -1), 0);
  cr_assert_eq(series_next_break(&stepped, 0), 10);
  cr_assert_eq(series_next_break(&stepped, 9.999), 10);
  cr_assert_eq(series_next_break(&stepped, 10), 20);
  cr_assert_eq(series_next_break(&stepped, 30), INFINITY);
}

Test(series, one_row_is_a_constant) {
  static const double tx[] = {7}, ty[] = {42};
  series s = rows(1, tx, ty);
  cr_assert_eq(series_value(&s, 0), 42);
  cr_assert_eq(series_value(&s, 7), 42);
  cr_assert_eq(series_value(&s, 8), 42);
  cr_assert_eq(series_before(&s, 7), 42);
}

Test(series, sine_by_its_definition_and_with_its_slope) {
  series s = wave(300, 20, 3600, 0.7);
  for (double t = -5000; t < 9000; t += 137) {
    double value, slope, step = 1;
    double exact = 300 + 20 * sin(2 * M_PI * t / 3600 + 0.7);
    cr_assert_float_eq(series_value(&s, t), exact, 1e-11, "round-off of an angle below 20");
    series_within(&s, t - 1, t + 1, t, &value, &slope);
    double by_difference = (series_value(&s, t + step) - series_value(&s, t - step)) / (2 * step);
    /* central difference: (2 pi/3600)^3 x 20/6 = 2e-8 */
    cr_assert_float_eq(slope, by_difference, 3e-8);
  }
  cr_assert_eq(series_longest_step(&s), 225);
  double least, most;
  series_range(&s, 0, 10, &least, &most);
  cr_assert(least == 280 && most == 320);
}

typedef struct nominal {
  fire_curve curve;
  double minutes, celsius;
} nominal;

/* Values to 0.1 degC. Standard curve: the table printed with ISO 834-1:1999, 6.1.1 (also
   EN 1363-1); hydrocarbon and external: worked by hand from EN 1991-1-2:2002, eq. 3.6 and 3.5. */
static const nominal nominals[] = {
    {FIRE_STANDARD, 0, 20},        {FIRE_STANDARD, 5, 576.4},    {FIRE_STANDARD, 10, 678.4},
    {FIRE_STANDARD, 15, 738.6},    {FIRE_STANDARD, 30, 841.8},   {FIRE_STANDARD, 60, 945.3},
    {FIRE_STANDARD, 90, 1006.0},   {FIRE_STANDARD, 120, 1049.0}, {FIRE_STANDARD, 180, 1109.7},
    {FIRE_STANDARD, 240, 1152.8},  {FIRE_HYDROCARBON, 0, 20},    {FIRE_HYDROCARBON, 5, 947.7},
    {FIRE_HYDROCARBON, 120, 1100}, {FIRE_EXTERNAL, 0, 20},       {FIRE_EXTERNAL, 5, 588.5},
    {FIRE_EXTERNAL, 60, 680},
};

Test(series, fire_curves_have_the_values_of_the_standards) {
  for (size_t i = 0; i < sizeof nominals / sizeof nominals[0]; i++) {
    series s = {.kind = SERIES_FIRE, .curve = nominals[i].curve};
    double celsius = series_value(&s, nominals[i].minutes * 60) - 273.15;
    cr_assert_float_eq(celsius, nominals[i].celsius, 0.051, "curve %d at %g min: %g, not %g",
                       nominals[i].curve, nominals[i].minutes, celsius, nominals[i].celsius);
  }
}

Test(series, fire_curves_hold_before_the_fire_and_know_their_slope) {
  for (int curve = FIRE_STANDARD; curve <= FIRE_EXTERNAL; curve++) {
    series s = {.kind = SERIES_FIRE, .curve = (fire_curve)curve};
    cr_assert_float_eq(series_value(&s, -10), 293.15, 1e-12);
    double value, slope, step = 0.01;
    for (double t = 1; t < 1e4; t *= 1.7) {
      series_within(&s, 0, 2e4, t, &value, &slope);
      double by_difference = (series_value(&s, t + step) - series_value(&s, t - step)) / (2 * step);
      /* second order, and values of 1e3 K known to 1e-13: 1e-11/0.01 */
      cr_assert_float_eq(slope, by_difference, 1e-5 * fabs(slope) + 2e-9);
      cr_assert_eq(value, series_value(&s, t));
    }
  }
}

Test(series, range_holds_every_value_of_the_interval) {
  double least, most;
  series_range(&stepped, 2, 8, &least, &most);
  cr_assert_float_eq(least, 120, 1e-12);
  cr_assert_float_eq(most, 180, 1e-12);
  series_range(&stepped, 5, 15, &least, &most);
  cr_assert_leq(least, 150);
  cr_assert_geq(most, 500);
  series_range(&stepped, 12, 1e9, &least, &most);
  cr_assert_eq(least, 50);
  cr_assert_float_eq(most, 480, 1e-12);
  series_range(&stepped, 40, 50, &least, &most);
  cr_assert(least == 50 && most == 50);
}

Test(series, last_value_is_what_a_steady_state_uses) {
  series sine = wave(300, 20, 3600, M_PI / 2), fire = {.kind = SERIES_FIRE};
  cr_assert_float_eq(series_last(&sine, 0), 320, 1e-12);
  cr_assert_float_eq(series_last(&fire, 0), 293.15, 1e-12);
}

Test(series, fire_curve_names_match_their_numbers) {
  cr_assert_str_eq(fire_curve_names[FIRE_STANDARD], "standard");
  cr_assert_str_eq(fire_curve_names[FIRE_HYDROCARBON], "hydrocarbon");
  cr_assert_str_eq(fire_curve_names[FIRE_EXTERNAL], "external");
  cr_assert_null(fire_curve_names[3]);
}
