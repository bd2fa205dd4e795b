/* The tempering parameter as a continuous sum. */
#include "course.h"

static double tempered(course *k, int steps) {
  figure *f = course_figure(k, "tempering");
  course_stage(k, k->rows[2 * (k->count - 1)], steps);
  f->constant = 20;
  figure_value v = course_run(k, 0);
  cr_assert(v.found);
  return v.value;
}

static double by_definition(double temperature, double hours) {
  return celsius(temperature) * (20 + log10(hours)) / 1000;
}

/* Reference case R81: Hollomon & Jaffe 1945, (T + 273.15)/1000 (20 + log10 t). */
Test(tempering, at_constant_temperature) {
  static const double a[][2] = {{0, 600}, {7200, 600}}, b[][2] = {{0, 650}, {3600, 650}};
  static const double c[][2] = {{0, 570.937825748286}, {36000, 570.937825748286}};
  static const int steps[] = {1, 10, 1000};
  for (int i = 0; i < COUNT_OF(steps); i++) {
    course ka = course_from(a), kb = course_from(b), kc = course_from(c);
    check_close(tempered(&ka, steps[i]), 17.725844340714005, 1e-9);
    check_close(tempered(&kb, steps[i]), 18.463, 1e-9);
    check_close(tempered(&kc, steps[i]), 17.725844340714005,
                1e-9); /* 10 h at 570.94 degC do the same */
  }
}

/* Common practice: a second equal temper after cooling is one of twice the time, 17.99. */
Test(tempering, a_second_temper_after_cooling_adds_its_time) {
  static const double twice[][2] = {{0, 600},     {7200, 600},  {7201, 20},  {20000, 20},
                                    {20001, 600}, {27201, 600}, {27202, 20}, {30000, 20}};
  course k = course_from(twice);
  double value = tempered(&k, 3000);
  check_close(value, 17.99, 0.005);
  check_close(value, by_definition(600, 4), 1e-3); /* the flanks of 1 s add a little */
}

/* Two hot stages: the first is turned into the time at the second temperature that gives the same
 * parameter. */
Test(tempering, earlier_time_becomes_equal_time) {
  static const double steps_of[][2] = {{0, 550}, {36000, 550}, {36000.001, 600}, {43200, 600}};
  course k = course_from(steps_of);
  figure *f = course_figure(&k, "tempering");
  f->constant = 20;
  course_stage(&k, 36000, 20);
  course_stage(&k, 36000.001, 1);
  course_stage(&k, 43200, 20);
  double equal = pow(10, by_definition(550, 10) * 1000 / celsius(600) - 20);
  check_close(course_run(&k, 0).value, by_definition(600, equal + 2), 1e-6);
}

/* Along a ramp dP/dt = T/ln 10 10^(C - P/T), integrated here by the classical Runge-Kutta method in
   small steps from the parameter after the first 10 s. */
static double by_runge_kutta(double t0, double p, double t1, double (*temperature)(double),
                             int steps) {
  double h = (t1 - t0) / steps;
  for (int i = 0; i < steps; i++) {
    double rate[4], at[4] = {0, 0.5, 0.5, 1};
    for (int j = 0; j < 4; j++) {
      double q = j ? p + at[j] * h * rate[j - 1] : p, kelvin = temperature(t0 + (i + at[j]) * h);
      rate[j] = kelvin / log(10) * pow(10, 20 - q / kelvin) / 3600;
    }
    p += h / 6 * (rate[0] + 2 * rate[1] + 2 * rate[2] + rate[3]);
  }
  return p;
}

static const double ramp[][2] = {{0, 300}, {10, 300}, {3010, 650}, {6010, 300}};

static double ramp_temperature(double t) {
  return t < 10     ? celsius(300)
         : t < 3010 ? celsius(300 + (t - 10) / 3000 * 350)
                    : celsius(650 - (t - 3010) / 3000 * 350);
}

Test(tempering, along_ramps) {
  static const int steps[] = {6, 60, 601, 6010};
  double p = by_definition(300, 10.0 / 3600) * 1000;
  p = by_runge_kutta(10, p, 3010, ramp_temperature, 300000);
  p = by_runge_kutta(3010, p, 6010, ramp_temperature, 300000);
  for (int i = 0; i < COUNT_OF(steps); i++) {
    course k = course_from(ramp);
    check_close(tempered(&k, steps[i]) / (p / 1000), 1, steps[i] < 60 ? 2e-4 : 5e-6);
  }
}

Test(tempering, only_rises_and_is_the_same_inside_a_step) {
  course k = course_from(ramp);
  figure *f = course_figure(&k, "tempering");
  course_stage(&k, 6010, 1);
  f->constant = 20;
  course_begin(&k);
  segment s = {.t0 = 2000,
               .t1 = 6000,
               .stage_begins = true,
               .value = course_value,
               .sample = course_sample,
               .self = &k};
  double before = -INFINITY;
  for (int n = 0; n < 41; n++) {
    double t = 2000 + 100 * n;
    double now = f->kind->value_at(&k.run[0], &s, t);
    cr_expect(now >= before, "%g after %g at %g s", now, before, t);
    before = now;
  }
  f->kind->observe(&k.run[0], &s);
  figure_value v;
  f->kind->finish(&k.run[0], &v);
  check_close(v.value, before, 1e-12);
  free(k.run[0].self);
}

Test(tempering, extremes_of_temperature_stay_numbers) {
  static const double wild[][2] = {{0, -272},   {100, -272}, {101, 3000},
                                   {200, 3000}, {201, -272}, {300, -272}};
  course k = course_from(wild);
  double value = tempered(&k, 300);
  cr_expect(isfinite(value));
  check_close(value, by_definition(3000, 99.0 / 3600), 0.05);
}

Test(tempering, the_other_constant) {
  static const double hold[][2] = {{0, 600}, {7200, 600}};
  course k = course_from(hold);
  figure *f = course_figure(&k, "tempering");
  course_stage(&k, 7200, 4);
  f->constant = 18;
  check_close(course_run(&k, 0).value, celsius(600) * (18 + log10(2)) / 1000, 1e-9);
}

Test(tempering, of_a_steady_state_has_no_answer) {
  course k = course_from(ramp);
  course_figure(&k, "tempering");
  course_steady(&k);
  check_missing(course_run(&k, 0), "steady");
}
