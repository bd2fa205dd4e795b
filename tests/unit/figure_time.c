/* Figures that are times: time_to, time_at_temperature, time_between; and the crossings under them.
 */
#include "course.h"

/* ---- crossings of a segment ---- */

static double wave(const course *k, int stage_index, double t) {
  (void)k;
  (void)stage_index;
  return 900 + 50 * sin(2 * M_PI * t / 100);
}

static int crossings_in(course *k, double t0, double t1, double level, int direction,
                        double times[SEGMENT_SAMPLES]) {
  segment s = {.t0 = t0, .t1 = t1, .value = course_value, .sample = course_sample, .self = k};
  return segment_crossings(&s, 0, level, direction, times);
}

Test(crossings, several_in_one_segment) {
  course k = course_of(wave);
  double times[SEGMENT_SAMPLES];
  /* sin x = 0.5 at 30 and 150 degrees: 8.333 s and 41.667 s, and again one period later */
  cr_assert_eq(crossings_in(&k, 0, 110, 925, 0, times), 3);
  check_close(times[0], 100.0 / 12, 1e-7);
  check_close(times[1], 500.0 / 12, 1e-7);
  check_close(times[2], 100 + 100.0 / 12, 1e-7);
  cr_assert_eq(crossings_in(&k, 0, 110, 925, 1, times), 2);
  cr_assert_eq(crossings_in(&k, 0, 110, 925, -1, times), 1);
  check_close(times[0], 500.0 / 12, 1e-7);
}

static const double ramp[][2] = {{0, 0}, {100, 100}, {200, 100}, {300, 0}};

Test(crossings, at_the_common_end_of_two_segments_is_counted_once) {
  course k = course_from(ramp);
  double times[SEGMENT_SAMPLES];
  int count = 0;
  for (int i = 0; i < 10; i++) {
    int now = crossings_in(&k, i * 10, i * 10 + 10, celsius(50), 0, times);
    if (now) check_close(times[0], 50, 1e-9);
    count += now;
  }
  cr_expect_eq(count, 1);
}

Test(crossings, flat_at_the_level_is_reached_and_not_left) {
  course k = course_from(ramp);
  double times[SEGMENT_SAMPLES];
  cr_expect_eq(crossings_in(&k, 110, 190, celsius(100), 0, times), 0);
  cr_expect_eq(crossings_in(&k, 50, 150, celsius(100), 1, times), 1);
  check_close(times[0], 100, 10.001); /* the samples stand 20 s apart; the corner lies between */
  cr_expect_eq(crossings_in(&k, 150, 250, celsius(100), -1, times), 0);
}

/* ---- time_to ---- */

Test(time_to, rises_to_a_value) {
  course k = course_from(ramp);
  figure *f = course_figure(&k, "time_to");
  course_stage(&k, 300, 7);
  f->rises_to = celsius(75);
  figure_value v = course_run(&k, 0);
  cr_assert(v.found);
  check_close(v.value, 75, 1e-5);
  check_close(v.sensitivity, 1, 1e-6); /* 1 K/s */
}

Test(time_to, is_the_first_time_only) {
  course k = course_of(wave);
  figure *f = course_figure(&k, "time_to");
  course_stage(&k, 400, 41);
  f->falls_to = 880;
  check_close(course_run(&k, 0).value, 50 + asin(0.4) / (2 * M_PI) * 100, 1e-5);
}

Test(time_to, true_at_the_start_is_zero) {
  course k = course_from(ramp);
  figure *f = course_figure(&k, "time_to");
  course_stage(&k, 300, 7);
  f->falls_to = celsius(0);
  figure_value v = course_run(&k, 0);
  cr_assert(v.found);
  cr_expect_eq(v.value, 0);
}

Test(time_to, never) {
  course k = course_from(ramp);
  figure *f = course_figure(&k, "time_to");
  course_stage(&k, 300, 7);
  f->rises_to = celsius(101);
  check_missing(course_run(&k, 0), "never rises");
}

Test(time_to, reaches_a_level_that_is_held_but_for_round_off) {
  static const double held[][2] = {{0, 0}, {100, 849.9999999}, {300, 849.9999999}};
  course k = course_from(held);
  figure *f = course_figure(&k, "time_to");
  course_stage(&k, 300, 30);
  f->rises_to = celsius(850);
  check_close(course_run(&k, 0).value, 100, 1e-5);
}

Test(time_to, counts_only_the_stages_of_during) {
  static const int third[] = {2};
  course k = course_from(ramp);
  figure *f = course_figure(&k, "time_to");
  course_stage(&k, 100, 5);
  course_stage(&k, 210, 5);
  course_stage(&k, 300, 5);
  f->rises_to = celsius(50);
  f->during = (stage_set){1, third};
  check_close(course_run(&k, 0).value, 210, 1e-9); /* it is above 50 when the third stage begins */
}

Test(time_to, a_jump_at_a_stage_is_seen) {
  static const int both[] = {0, 1};
  course k = course_from(ramp);
  figure *f = course_figure(&k, "time_to");
  course_stage(&k, 100, 5);
  course_stage(&k, 300, 5);
  f->falls_to = celsius(30);
  f->rises_to = NAN;
  f->during = (stage_set){2, both};
  k.rows = (const double[]){50, 90, 100, 90, 100.0, 20, 300, 20};
  k.count = 4;
  check_close(course_run(&k, 0).value, 100, 20.001);
}

Test(time_to, of_a_steady_state_has_no_answer) {
  course k = course_from(ramp);
  figure *f = course_figure(&k, "time_to");
  course_steady(&k);
  f->rises_to = celsius(-10);
  check_missing(course_run(&k, 0), "steady");
}

Test(time_to, ignores_a_steady_state_after_other_stages) {
  course k = course_from(ramp);
  figure *f = course_figure(&k, "time_to");
  course_stage(&k, 90, 5);
  course_steady(&k);
  f->rises_to = celsius(91);
  check_missing(course_run(&k, 0), "never");
}

Test(time_to, of_an_accumulating_figure) {
  course k = course_from(ramp);
  figure *f = course_figure(&k, "time_to"), *sum = course_figure(&k, "time_at_temperature");
  course_stage(&k, 300, 7);
  sum->above = celsius(50);
  f->of = (target){.is_figure = true, .figure = 1};
  f->rises_to = 20;
  check_close(course_run(&k, 0).value, 70, 1e-4);
}

Test(time_to, check_wants_exactly_one) {
  course k = course_from(ramp);
  figure *f = course_figure(&k, "time_to"), *other = course_figure(&k, "peak");
  const char *member = NULL;
  cr_expect_not_null(f->kind->check(f, &k.c, &member));
  f->rises_to = 300;
  cr_expect_null(f->kind->check(f, &k.c, &member));
  f->falls_to = 300;
  cr_expect_not_null(f->kind->check(f, &k.c, &member));
  cr_expect_str_eq(member, "falls_to");
  f->falls_to = NAN;
  f->of = (target){.is_figure = true, .figure = 1};
  cr_expect_not_null(f->kind->check(f, &k.c, &member), "%s does not accumulate", other->name);
  cr_expect_str_eq(member, "of");
}

/* ---- time_at_temperature ---- */

static double dwell(double above, double below, int count, const int *during, int stages) {
  course k = course_of(wave);
  figure *f = course_figure(&k, "time_at_temperature");
  course_stage(&k, 100, 9);
  course_stage(&k, 120, 3);
  course_stage(&k, 300, 17);
  f->above = above;
  f->below = below;
  f->count = count;
  if (during) f->during = (stage_set){stages, during};
  figure_value v = course_run(&k, 0);
  cr_assert(v.found);
  return v.value;
}

Test(time_at_temperature, total_of_three_waves) {
  check_close(dwell(925, NAN, COUNT_TOTAL, NULL, 0), 100, 1e-4);
  check_close(dwell(NAN, 925, COUNT_TOTAL, NULL, 0), 200, 1e-4);
}

Test(time_at_temperature, between_two_temperatures) {
  double once = (asin(0.5) - asin(0.2)) / (2 * M_PI) * 100;
  check_close(dwell(910, 925, COUNT_TOTAL, NULL, 0), 6 * once, 1e-3);
  check_close(dwell(910, 925, COUNT_LONGEST, NULL, 0), once, 1e-4);
}

Test(time_at_temperature, longest_goes_on_across_steps_and_stages) {
  check_close(dwell(925, NAN, COUNT_LONGEST, NULL, 0), 100.0 / 3, 1e-4);
  check_close(dwell(NAN, 925, COUNT_LONGEST, NULL, 0), 200.0 / 3, 1e-4);
}

Test(time_at_temperature, a_gap_in_during_breaks_it) {
  static const int without_second[] = {0, 2}, neighbours[] = {0, 1};
  /* above 925 from 108.33 to 141.67: of that the third stage has 21.67 s */
  check_close(dwell(925, NAN, COUNT_TOTAL, without_second, 2), 100 - 11.6666667, 1e-4);
  check_close(dwell(925, NAN, COUNT_LONGEST, without_second, 2), 100.0 / 3, 1e-4);
  /* below 925 from 41.67 to 108.33 goes on into the second stage */
  check_close(dwell(NAN, 925, COUNT_LONGEST, neighbours, 2), 200.0 / 3, 1e-4);
}

Test(time_at_temperature, flat_at_the_level_counts) {
  static const double held[][2] = {{0, 0}, {100, 850}, {300, 850}, {400, 0}};
  course k = course_from(held);
  figure *f = course_figure(&k, "time_at_temperature");
  course_stage(&k, 400, 40);
  f->above = celsius(850);
  figure_value v = course_run(&k, 0);
  check_close(v.value, 200, 1e-5);
}

Test(time_at_temperature, never_is_zero) {
  cr_expect_eq(dwell(951, NAN, COUNT_TOTAL, NULL, 0), 0);
}

Test(time_at_temperature, sum_inside_a_step_is_that_of_the_whole) {
  course k = course_of(wave);
  figure *f = course_figure(&k, "time_at_temperature");
  course_stage(&k, 100, 1);
  f->above = 925;
  course_begin(&k);
  segment s = {.t0 = 0,
               .t1 = 100,
               .stage_begins = true,
               .value = course_value,
               .sample = course_sample,
               .self = &k};
  check_close(f->kind->value_at(&k.run[0], &s, 0), 0, 0);
  check_close(f->kind->value_at(&k.run[0], &s, 30), 30 - 100.0 / 12, 1e-5);
  check_close(f->kind->value_at(&k.run[0], &s, 100), 100.0 / 3, 1e-5);
  check_close(f->kind->value_at(&k.run[0], &s, 30), 30 - 100.0 / 12,
              1e-5); /* it left the state alone */
  free(k.run[0].self);
}

/* ---- time_between ---- */

static figure_value between(const double *rows, int count, int steps, double from, double to) {
  course k = {.value = course_rows, .rows = rows, .count = count};
  figure *f = course_figure(&k, "time_between");
  course_stage(&k, rows[2 * (count - 1)], steps);
  f->from = celsius(from);
  f->to = celsius(to);
  return course_run(&k, 0);
}

Test(time_between, is_from_the_last_crossing_of_from_that_is_followed_by_to) {
  static const double twice[] = {0, 850, 10, 780, 30, 860, 90, 400, 100, 810, 110, 700};
  /* 860 to 400 in 60 s: 7.6667 K/s; 800 at 37.826, 500 at 76.957; after 100 s it leaves 800 but
   * never reaches 500 */
  check_close(between(twice, 6, 220, 800, 500).value, 300 / (460.0 / 60), 2e-3);
}

Test(time_between, starts_exactly_at_from) {
  static const double down[] = {0, 800, 100, 400};
  check_close(between(down, 2, 7, 800, 500).value, 75, 1e-5);
}

Test(time_between, ends_exactly_at_to) {
  static const double down[] = {0, 850, 100, 500};
  check_close(between(down, 2, 9, 800, 500).value, 300 / 3.5, 1e-5);
}

Test(time_between, counts_from_where_a_hold_at_from_is_left) {
  static const double held[] = {0, 900, 10, 800, 50, 800, 80, 500, 100, 400};
  check_close(between(held, 5, 100, 800, 500).value, 30, 1e-5);
}

Test(time_between, upwards) {
  static const double up[] = {0, 20, 100, 120};
  figure_value v = between(up, 2, 3, 30, 90);
  check_close(v.value, 60, 1e-5);
  check_close(v.sensitivity, 2, 1e-6);
}

Test(time_between, says_what_is_missing) {
  static const double down[] = {0, 850, 100, 600};
  check_missing(between(down, 2, 9, 900, 500), "never crosses");
  check_missing(between(down, 2, 9, 800, 500), "never reaches");
}

/* H. S. Carslaw & J. C. Jaeger, Conduction of Heat in Solids, 2nd ed., 3.11: plate in a medium,
   convection; the roots of z tan z = Bi. Plate of 25 mm, 28 W/(m.K), 7700 kg/m3, 640 J/(kg.K), 180
   W/(m2.K), 1000 to 20 degC. */
static double series_root(double biot, int n) {
  double a = n * M_PI, b = n * M_PI + M_PI / 2 - 1e-12;
  for (int i = 0; i < 200; i++) {
    double m = (a + b) / 2;
    if (m * tan(m) > biot)
      b = m;
    else
      a = m;
  }
  return (a + b) / 2;
}

static double plate_in_air(double t, double x_over_l) {
  double half = 0.0125, biot = 180 * half / 28, fourier = 28 / (7700.0 * 640) * t / (half * half),
         sum = 0;
  for (int n = 0; n < 12; n++) {
    double z = series_root(biot, n);
    sum += 4 * sin(z) / (2 * z + sin(2 * z)) * cos(z * x_over_l) * exp(-z * z * fourier);
  }
  return celsius(20 + 980 * sum);
}

static double plate_centre(const course *k, int stage_index, double t) {
  (void)k;
  (void)stage_index;
  return plate_in_air(t, 0);
}

static double plate_surface(const course *k, int stage_index, double t) {
  (void)k;
  (void)stage_index;
  return plate_in_air(t, 1);
}

/* Reference case R85: 170.62544 s at the centre and at the surface, root of the exact series. */
Test(time_between, cooling_time_800_to_500_of_a_plate) {
  double (*course_at[2])(const course *, int, double) = {plate_centre, plate_surface};
  for (int i = 0; i < 2; i++) {
    course k = course_of(course_at[i]);
    figure *f = course_figure(&k, "time_between");
    course_stage(&k, 400, 60);
    f->from = celsius(800);
    f->to = celsius(500);
    check_close(course_run(&k, 0).value, 170.62544307527793, 1e-4);
  }
}
