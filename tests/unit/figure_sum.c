/* Figures that are integrals: lethality, equivalent_age, accumulated, maturity. */
#include "course.h"

static const double f0_a[][2] = {{0, 111}, {900, 111}};
static const double f0_b[][2] = {{0, 121.1}, {720, 121.1}};
static const double f0_c[][2] = {{0, 100}, {600, 121.1}, {1080, 121.1}, {1980, 80}};

static double f0_minutes(course *k, int steps) {
  figure *f = course_figure(k, "lethality");
  course_stage(k, k->rows[2 * (k->count - 1)], steps);
  f->reference = celsius(121.1);
  f->z = 10;
  figure_value v = course_run(k, 0);
  cr_assert(v.found);
  return v.value / 60;
}

/* Reference case R79: F0 = integral of 10^((T - 121.1)/10) dt; exact integrals of straight pieces.
 */
Test(lethality, f0_of_three_schedules) {
  static const int steps[] = {1, 11, 100, 1111};
  for (int i = 0; i < COUNT_OF(steps); i++) {
    course a = course_from(f0_a), b = course_from(f0_b), c = course_from(f0_c);
    check_close(f0_minutes(&a, steps[i]), 1.465855831433716, 2e-6);
    check_close(f0_minutes(&b, steps[i]), 12, 1e-9);
    check_close(f0_minutes(&c, steps[i]), 11.62718376404783, 2e-5);
  }
}

Test(lethality, is_right_to_a_millionth) {
  /* straight from 0 to 300 degC in one step: z/ln 10 / rate (10^((300 - ref)/z) - 10^(-ref/z)) */
  static const double line[][2] = {{0, 0}, {1000, 300}};
  course k = course_from(line);
  double exact = 10 / log(10) / 0.3 * (pow(10, (300 - 121.1) / 10) - pow(10, -12.11));
  check_close(f0_minutes(&k, 1) * 60 / exact, 1, 1e-6);
}

Test(lethality, half_degree_changes_it_by_its_sensitivity) {
  course k = course_from(f0_b);
  figure *f = course_figure(&k, "lethality");
  course_stage(&k, 720, 10);
  f->reference = celsius(121.1);
  f->z = 10;
  check_close(course_run(&k, 0).sensitivity, 720 * log(10) / 10, 0.5);
}

Test(lethality, inside_a_step) {
  course k = course_from(f0_c);
  figure *f = course_figure(&k, "lethality");
  course_stage(&k, 1980, 1);
  f->reference = celsius(121.1);
  f->z = 10;
  course_begin(&k);
  segment s = {.t0 = 0,
               .t1 = 1980,
               .stage_begins = true,
               .value = course_value,
               .sample = course_sample,
               .self = &k};
  double heating = 10 / log(10) / (21.1 / 600) * (1 - pow(10, -2.11));
  check_close(f->kind->value_at(&k.run[0], &s, 600), heating, 1e-5 * heating);
  check_close(f->kind->value_at(&k.run[0], &s, 1080), heating + 480, 1e-5 * heating);
  cr_expect_eq(f->kind->value_at(&k.run[0], &s, 0), 0);
  free(k.run[0].self);
}

static const double curing[][2] = {{0, 20}, {43200, 45}, {129600, 25}, {302400, 15}};

static double maturity_hours(double datum, int steps) {
  course k = course_from(curing);
  figure *f = course_figure(&k, "maturity");
  course_stage(&k, 302400, steps);
  f->datum = celsius(datum);
  cr_expect_eq(f->kind->dimension(f, &k.c), DIMENSION_MATURITY);
  return course_run(&k, 0).value;
}

/* Reference case R83: ASTM C1074 equations (Nurse-Saul) for a piecewise-linear temperature. */
Test(maturity, temperature_time_factor) {
  static const int steps[] = {1, 21, 700};
  for (int i = 0; i < COUNT_OF(steps); i++) {
    check_close(maturity_hours(0, steps[i]), 2190, 0.01);
    check_close(maturity_hours(-10, steps[i]), 3030, 0.01);
  }
}

Test(maturity, nothing_is_gained_below_the_datum) {
  /* above 25 degC: from 8640 s up to 45 degC at 43200 s and back to 25 at 129600 s: triangles */
  static const int steps[] = {1, 21, 700};
  for (int i = 0; i < COUNT_OF(steps); i++)
    check_close(maturity_hours(25, steps[i]), 0.5 * 20 * (129600 - 8640) / 3600, 0.01);
}

/* Common practice: 7 days at 20 degC above -10 degC are 5040 degC.h. */
Test(maturity, seven_days) {
  static const double hold[][2] = {{0, 20}, {604800, 20}};
  course k = course_from(hold);
  figure *f = course_figure(&k, "maturity");
  course_stage(&k, 604800, 3);
  f->datum = celsius(-10);
  check_close(course_run(&k, 0).value, 5040, 1e-6);
}

/* Reference case R83: Q = E/R = 5000 K, reference 23 degC. */
Test(equivalent_age, of_a_piecewise_linear_temperature) {
  static const int steps[] = {1, 21, 700};
  for (int i = 0; i < COUNT_OF(steps); i++) {
    course k = course_from(curing);
    figure *f = course_figure(&k, "equivalent_age");
    course_stage(&k, 302400, steps[i]);
    f->activation_energy = 5000 * GAS_CONSTANT;
    f->reference = celsius(23);
    check_close(course_run(&k, 0).value / 3600, 110.71515159831912, 1e-4);
  }
}

static double accumulated(double temperature) {
  static const double x[] = {273.15 + 100, 273.15 + 120, 273.15 + 130}, y[] = {0.01, 1, 4};
  double hold[][2] = {{0, temperature}, {100, temperature}};
  course k = course_from(hold);
  figure *f = course_figure(&k, "accumulated");
  course_stage(&k, 100, 3);
  f->rate = (table){3, x, y};
  cr_expect_eq(f->kind->dimension(f, &k.c), DIMENSION_NUMBER);
  return course_run(&k, 0).value;
}

Test(accumulated, is_straight_in_the_logarithm_and_holds_beyond) {
  check_close(accumulated(100), 1, 1e-9);
  check_close(accumulated(110), 10, 1e-9);
  check_close(accumulated(120), 100, 1e-9);
  check_close(accumulated(125), 200, 1e-9);
  check_close(accumulated(90), 1, 1e-9);
  check_close(accumulated(500), 400, 1e-9);
}

Test(accumulated, over_a_ramp_with_kinks) {
  /* each piece: width / rate x (y1 - y0)/ln(y1/y0), ends held */
  static const double x[] = {273.15 + 100, 273.15 + 120, 273.15 + 130}, y[] = {0.01, 1, 4};
  static const double line[][2] = {{0, 80}, {600, 140}};
  static const int steps[] = {1, 7, 333};
  double exact = 200 * 0.01 + 200 * 0.99 / log(100) + 100 * 3 / log(4) + 100 * 4;
  for (int i = 0; i < COUNT_OF(steps); i++) {
    course k = course_from(line);
    figure *f = course_figure(&k, "accumulated");
    course_stage(&k, 600, steps[i]);
    f->rate = (table){3, x, y};
    check_close(course_run(&k, 0).value / exact, 1, 1e-6);
  }
}

Test(accumulated, wants_rates_above_zero) {
  static const double x[] = {300, 400}, good[] = {1, 2}, bad[] = {0, 2};
  course k = course_from(f0_a);
  figure *f = course_figure(&k, "accumulated");
  const char *member = NULL;
  f->rate = (table){2, x, good};
  cr_expect_null(f->kind->check(f, &k.c, &member));
  f->rate = (table){2, x, bad};
  cr_expect_not_null(f->kind->check(f, &k.c, &member));
  cr_expect_str_eq(member, "rate");
}

Test(sums, count_only_the_stages_of_during) {
  static const int outer[] = {0, 2};
  course k = course_from(f0_b);
  figure *f = course_figure(&k, "lethality");
  course_stage(&k, 100, 3);
  course_stage(&k, 300, 3);
  course_stage(&k, 720, 3);
  f->reference = celsius(121.1);
  f->z = 10;
  f->during = (stage_set){2, outer};
  check_close(course_run(&k, 0).value, 520, 1e-6);
}

Test(sums, of_a_steady_state_have_no_answer) {
  course k = course_from(f0_b);
  figure *f = course_figure(&k, "maturity");
  course_steady(&k);
  f->datum = 200;
  check_missing(course_run(&k, 0), "steady");
}

Test(sums, too_large_for_a_number_have_no_answer) {
  course k = course_from(f0_b);
  figure *f = course_figure(&k, "lethality");
  course_stage(&k, 720, 3);
  f->reference = 100;
  f->z = 0.1;
  check_missing(course_run(&k, 0), "too large");
}

Test(sums, a_hold_asks_for_nothing_beside_the_samples) {
  course k = course_from(f0_b);
  figure *f = course_figure(&k, "lethality");
  course_stage(&k, 720, 50);
  f->reference = celsius(121.1);
  f->z = 10;
  course_run(&k, 0);
  cr_expect_eq(k.asked, 0);
}

Test(sums, are_of_temperatures_only) {
  static const char *const names[] = {"lethality", "equivalent_age", "accumulated", "maturity",
                                      "tempering"};
  for (int i = 0; i < COUNT_OF(names); i++) {
    course k = course_from(f0_b);
    figure *f = course_figure(&k, names[i]);
    const char *member = NULL;
    f->of.place.kind = PLACE_SECTION_DIFFERENCE;
    cr_expect_not_null(f->kind->check(f, &k.c, &member), "%s", names[i]);
    cr_expect_str_eq(member, "of");
  }
}
