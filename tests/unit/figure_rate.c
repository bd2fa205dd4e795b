/* The rate figure: fastest rise and fall over a moving window, and the mean rate between two
 * values. */
#include "course.h"

static figure_value fastest(course *k, int direction, double over) {
  figure *f = course_figure(k, "rate");
  f->direction = direction;
  f->over = over;
  return course_run(k, 0);
}

static const double ramps[][2] = {{0, 0}, {100, 100}, {160, 280}, {300, 290}, {400, 40}, {500, 40}};

Test(rate, of_straight_ramps_hardly_depends_on_the_steps) {
  static const int steps[] = {5, 50, 500, 5000, 50000};
  for (int i = 0; i < COUNT_OF(steps); i++) {
    course up = course_from(ramps), down = course_from(ramps);
    course_stage(&up, 500, steps[i]);
    course_stage(&down, 500, steps[i]);
    figure_value rise = fastest(&up, DIRECTION_RISE, 20), fall = fastest(&down, DIRECTION_FALL, 20);
    check_close(rise.value, 3, 1e-3);
    cr_expect(rise.when >= 109.9 && rise.when <= 150.1, "rise at %g", rise.when);
    check_close(fall.value, 2.5, 1e-3);
    cr_expect(fall.when >= 309.9 && fall.when <= 390.1, "fall at %g", fall.when);
  }
}

Test(rate, windows_are_one_second_falling_and_one_minute_rising_unless_given) {
  course up = course_from(ramps), down = course_from(ramps);
  course_stage(&up, 500, 50);
  course_stage(&down, 500, 50);
  figure_value rise = fastest(&up, DIRECTION_RISE, NAN), fall = fastest(&down, DIRECTION_FALL, NAN);
  check_close(rise.value, 3, 1e-3); /* the ramp of 3 K/s is just one minute long */
  check_close(rise.when, 130, 0.5);
  check_close(rise.sensitivity, 2.0 / 60, 1e-12);
  check_close(fall.value, 2.5, 1e-9);
  check_close(fall.sensitivity, 2, 1e-12);
}

/* Quench of a lumped body after a hold: v = 60 + 800 exp(-(t - 100)/tau). */
#define TAU 12.0
static double quench(const course *k, int stage_index, double t) {
  (void)k;
  return stage_index == 0 ? 860 : 60 + 800 * exp(-(t - 100) / TAU);
}

Test(rate, fastest_fall_of_an_exponential_begins_with_it) {
  /* exact: the window that begins with the quench, 800 (1 - exp(-w/tau))/w */
  static const double windows[] = {0.1, 1, 5, 30};
  static const int steps[] = {40, 4000};
  for (int i = 0; i < COUNT_OF(windows); i++)
    for (int j = 0; j < COUNT_OF(steps); j++) {
      course k = course_of(quench);
      course_stage(&k, 100, 10);
      course_stage(&k, 200, steps[j]);
      double exact = 800 * (1 - exp(-windows[i] / TAU)) / windows[i];
      figure_value v = fastest(&k, DIRECTION_FALL, windows[i]);
      check_close(v.value, exact, 1e-9 * exact);
      check_close(v.when, 100 + windows[i] / 2, 1e-9);
    }
}

/* A core that begins slowly: d/dt of a Gaussian fall has its maximum inside. */
static double core(const course *k, int stage_index, double t) {
  (void)k;
  (void)stage_index;
  return 500 - 400 * erf((t - 250) / 40);
}

Test(rate, fastest_fall_inside_a_smooth_course) {
  /* exact: the window with its middle at 250 s: 800 erf(w/80)/w */
  static const double windows[] = {1, 20, 60};
  static const int steps[] = {37, 113, 1001};
  for (int i = 0; i < COUNT_OF(windows); i++)
    for (int j = 0; j < COUNT_OF(steps); j++) {
      course k = course_of(core);
      course_stage(&k, 500, steps[j]);
      double exact = 800 * erf(windows[i] / 80) / windows[i];
      figure_value v = fastest(&k, DIRECTION_FALL, windows[i]);
      check_close(v.value, exact, 2e-4 * exact);
      check_close(v.when, 250, 0.5);
    }
}

Test(rate, fastest_just_before_the_end_of_a_stage) {
  /* v = 900 - (t/10)^2 up to 100 s, then held: the last window, (2 x 100 - w)/100 */
  static const double rows[][2] = {{0, 0}, {50, -10}, {100, -110}, {200, -110}};
  course k = course_from(rows);
  course_stage(&k, 100, 7);
  course_stage(&k, 200, 7);
  check_close(fastest(&k, DIRECTION_FALL, 3.3).value, 2, 1e-9);
}

Test(rate, a_gap_in_during_is_not_bridged) {
  static const int outer[] = {0, 2};
  course k = course_from(ramps);
  figure *f = course_figure(&k, "rate");
  course_stage(&k, 100, 20);
  course_stage(&k, 300, 20);
  course_stage(&k, 500, 20);
  f->over = 10;
  f->during = (stage_set){2, outer};
  check_close(course_run(&k, 0).value, 1, 1e-9);
}

Test(rate, of_a_fall_in_a_rise_is_zero) {
  static const double up[][2] = {{0, 0}, {100, 100}};
  course k = course_from(up);
  course_stage(&k, 100, 10);
  figure_value v = fastest(&k, DIRECTION_FALL, 5);
  cr_assert(v.found);
  cr_expect_eq(v.value, 0);
}

Test(rate, shorter_than_the_window_has_no_answer) {
  static const double up[][2] = {{0, 0}, {50, 100}};
  course k = course_from(up);
  course_stage(&k, 50, 10);
  check_missing(fastest(&k, DIRECTION_RISE, NAN), "shorter than the window");
}

Test(rate, of_a_steady_state_has_no_answer) {
  course k = course_from(ramps);
  course_steady(&k);
  check_missing(fastest(&k, DIRECTION_RISE, NAN), "steady");
}

/* ---- between two values ---- */

static figure_value mean_rate(const double *rows, int count, double from, double to) {
  course k = {.value = course_rows, .rows = rows, .count = count};
  figure *f = course_figure(&k, "rate");
  course_stage(&k, rows[2 * (count - 1)], 130);
  f->from = celsius(from);
  f->to = celsius(to);
  return course_run(&k, 0);
}

Test(rate, mean_between_two_values_is_that_of_the_first_crossings) {
  static const double twice[] = {0, 850, 50, 450, 100, 850, 200, 450};
  check_close(mean_rate(twice, 4, 800, 500).value, 8, 1e-4);
  check_close(mean_rate(twice, 4, 500, 800).value, 8, 1e-4);
}

Test(rate, mean_between_two_values_that_are_not_passed) {
  static const double down[] = {0, 850, 50, 600};
  check_missing(mean_rate(down, 2, 900, 500), "never crosses");
  check_missing(mean_rate(down, 2, 800, 500), "never reaches");
}

Test(rate, check) {
  course k = course_from(ramps);
  figure *f = course_figure(&k, "rate");
  const char *member = NULL;
  cr_expect_null(f->kind->check(f, &k.c, &member));
  f->from = 300;
  cr_expect_not_null(f->kind->check(f, &k.c, &member));
  cr_expect_str_eq(member, "to");
  f->to = 300;
  cr_expect_not_null(f->kind->check(f, &k.c, &member));
  f->to = 400;
  cr_expect_null(f->kind->check(f, &k.c, &member));
  f->over = 5;
  cr_expect_not_null(f->kind->check(f, &k.c, &member));
  cr_expect_str_eq(member, "over");
}
