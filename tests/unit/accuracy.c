/* accuracy: the error that is stated holds against exact series; what cannot be met is refused with
   what can; tables grow with the temperatures; control is asked all along. */
#include "accuracy.h"

#include "exact.h"
#include "make_case.h"

#include <criterion/criterion.h>
#include <pthread.h>

static made m;

/* ---- against exact solutions ---- */

#define CONDUCTIVITY 40.0
#define RHO_C        4e6
#define RADIUS       0.05

static const char *const names[] = {"plate", "cylinder", "sphere"};
static const double depth[] = {0, 0.3, 0.8, 1}; /* of the radius */

/* A body of 1000 K put into 300 K; the plate by its half, insulated at its middle. Histories from a
   Fourier number of 0.002 on. */
static void cooled(int power, double bi, double error) {
  static double times[20];
  double second = RADIUS * RADIUS * RHO_C / CONDUCTIVITY; /* of Fourier number 1 */
  make_case(&m, names[power]);
  add_layer(&m, add_material(&m, CONDUCTIVITY, 8000, RHO_C / 8000), RADIUS, 0);
  start_at(&m, 1000);
  add_stage(&m, 1.2 * second, insulated(), convects(bi * CONDUCTIVITY / RADIUS, constant(300)));
  for (int i = 0; i < 4; i++) {
    add_point(&m, depth[i] * RADIUS, 0);
    add_column(&m, COLUMN_PLACE, point_place(i), 0);
  }
  for (int i = 0; i < 20; i++) times[i] = second * 0.002 * pow(600, i / 19.0);
  history_at(&m, 20, times);
  m.the_case.numerical_error = error;
}

static double true_error(const history *h, int power, double bi) {
  double most = 0;
  for (int row = 0; row < h->rows; row++)
    for (int i = 0; i < 4; i++) {
      double fo = h->time[row] * CONDUCTIVITY / (RHO_C * RADIUS * RADIUS);
      double exact = 300 + 700 * exact_ratio(power, bi, depth[i], fo);
      most = fmax(most, fabs(h->value[row * 4 + i] - exact));
    }
  return most;
}

Test(accuracy, the_error_stated_holds_against_exact_series) {
  static const double numbers[] = {0.1, 1, 50}, errors[] = {2, 0.5, 0.05, 0.005};
  for (int power = 0; power < 3; power++)
    for (int b = 0; b < 3; b++)
      for (int e = 0; e < 4; e++) {
        accuracy a;
        fault f;
        cooled(power, numbers[b], errors[e]);
        status s = accuracy_run(&a, &m.the_case, NULL, &f);
        cr_assert_eq(s, STATUS_OK, "%s", s ? f.is : "");
        double error = true_error(&a.fine->observer.history, power, numbers[b]);
        /* the tables of straight lines and T(H) are exact to 1e-9 K */
        cr_assert_leq(error, a.estimate + 1e-9, "%s, Bi %g, %g K: error %g, estimate %g",
                      names[power], numbers[b], errors[e], error, a.estimate);
        cr_assert_leq(a.estimate, errors[e]);
        accuracy_free(&a);
      }
}

Test(accuracy, the_fine_run_is_told_and_the_twin_has_half_of_its_cells) {
  accuracy a;
  fault f;
  cooled(0, 1, 0.5);
  cr_assert_eq(accuracy_run(&a, &m.the_case, NULL, &f), STATUS_OK);
  cr_assert_eq(a.fine->mesh.nodes - 1, a.plan.cells);
  cr_assert_eq(2 * (a.coarse->mesh.nodes - 1), a.plan.cells);
  cr_assert_eq(a.coarse->outcome.stage[0].end, a.fine->outcome.stage[0].end);
  cr_assert_eq(a.estimate, observe_difference(&a.fine->observer, &a.coarse->observer));
  cr_assert_geq(a.runs, 2);
  accuracy_free(&a);
}

/* A flux into an insulated plate: after the start-up T = T0 + q t/(rho c L) + q L/k (x^2/(2 L^2) -
   1/6), x from the insulated side (Carslaw & Jaeger, 2nd ed. 1959, 3.8). The temperatures leave
   what starts and surroundings span by far. */
Test(accuracy, tables_grow_with_the_temperatures) {
  accuracy a;
  fault f;
  double q = 4e5, end = 800, length = 0.04;
  make_case(&m, "plate");
  add_layer(&m, add_material(&m, CONDUCTIVITY, 8000, RHO_C / 8000), length, 0);
  start_at(&m, 300);
  add_stage(&m, end, insulated(), heated(constant(q)));
  add_point(&m, 0, 0);
  add_point(&m, length, 0);
  status s = accuracy_run(&a, &m.the_case, NULL, &f);
  cr_assert_eq(s, STATUS_OK, "%s", s ? f.is : "");
  double mean = 300 + q * end / (RHO_C * length), slope;
  const property *p = &a.properties[0];
  const double *state = a.fine->stepper.state;
  int last = a.fine->stepper.nodes - 1;
  double cold = property_temperature(p, state[0], &slope);
  double hot = property_temperature(p, state[last], &slope);
  cr_assert_float_eq(cold, mean - q * length / CONDUCTIVITY / 6, a.estimate);
  cr_assert_float_eq(hot, mean + q * length / CONDUCTIVITY / 3, a.estimate);
  cr_assert(a.to >= hot && a.from <= 300);
  cr_assert_not(a.fine->observer.beyond_table);
  accuracy_free(&a);
}

/* ---- refusals ---- */

static void must_fail(status with, const char *at, const char *words) {
  accuracy a;
  fault f = {0};
  cr_assert_eq(accuracy_run(&a, &m.the_case, NULL, &f), with, "%s", f.is);
  cr_assert_eq(f.status, with);
  cr_assert_str_eq(f.at, at);
  cr_assert_not_null(strstr(f.is, words), "%s", f.is);
  accuracy_free(&a);
}

static void driven(double flux, double lasts) {
  make_case(&m, "plate");
  add_layer(&m, add_material(&m, CONDUCTIVITY, 8000, RHO_C / 8000), 0.04, 0);
  start_at(&m, 300);
  add_stage(&m, lasts, insulated(), heated(constant(flux)));
}

Test(accuracy, more_heat_taken_out_than_there_is_is_refused) {
  driven(-1e5, 5000);
  must_fail(STATUS_NOT_FINITE, "/stages", "absolute zero");
}

Test(accuracy, a_temperature_that_runs_away_is_refused) {
  driven(1e8, 1e4);
  must_fail(STATUS_NOT_FINITE, "/stages", "runs away");
}

/* A look 2 um deep at 1 us after a shock: the finest mesh of the ladder is too coarse for it. */
static void shocked(double error) {
  static const double look[] = {1e-6};
  make_case(&m, "plate");
  add_layer(&m, add_material(&m, CONDUCTIVITY, 8000, RHO_C / 8000), 0.1, 0);
  start_at(&m, 300);
  add_stage(&m, 3600, prescribed(constant(1000)), insulated());
  add_point(&m, 2e-6, 0);
  add_column(&m, COLUMN_PLACE, point_place(0), 0);
  history_at(&m, 1, look);
  m.the_case.numerical_error = error;
}

Test(accuracy, what_cannot_be_met_is_refused_with_what_can) {
  accuracy a;
  fault f = {0};
  shocked(FINEST_NUMERICAL_ERROR);
  cr_assert_eq(accuracy_run(&a, &m.the_case, NULL, &f), STATUS_ERROR_NOT_MET);
  cr_assert_str_eq(f.at, "/numerical_error");
  cr_assert(isfinite(f.could_be_met) && f.could_be_met > FINEST_NUMERICAL_ERROR, "%g",
            f.could_be_met);
  accuracy_free(&a);
  /* the word is kept: told in two digits and with a margin of 5 % */
  shocked(f.could_be_met);
  cr_assert_eq(accuracy_run(&a, &m.the_case, NULL, &f), STATUS_OK, "%s", f.is);
  cr_assert_leq(a.estimate, m.the_case.numerical_error);
  accuracy_free(&a);
}

/* ---- the error of a figure ---- */

static void finish_both(const accuracy *a, int i, figure_value *fine, figure_value *coarse) {
  const figure_kind *k = a->the_case->figures.items[i].kind;
  *fine = *coarse = (figure_value){0};
  k->finish(&a->fine->observer.run[i], fine);
  k->finish(&a->coarse->observer.run[i], coarse);
}

Test(accuracy, the_error_of_a_figure_is_at_least_what_two_runs_differ_by) {
  accuracy a;
  fault f;
  figure_value fine, coarse;
  cooled(0, 1, 0.5);
  add_figure(&m, "time_to", point_place(0))->falls_to = 700;
  add_figure(&m, "time_to", point_place(0))->falls_to = 290; /* never */
  add_figure(&m, "lowest", point_place(3));
  cr_assert_eq(accuracy_run(&a, &m.the_case, NULL, &f), STATUS_OK);
  for (int i = 0; i < 3; i++) {
    finish_both(&a, i, &fine, &coarse);
    double error = accuracy_figure_error(&a, i, &fine, &coarse);
    cr_assert_eq(fine.found, i != 1);
    if (!fine.found) cr_assert(isnan(error), "no value, no error");
    if (!fine.found) continue;
    cr_assert(isfinite(error) && error > 0, "agreement by chance is no exactness");
    cr_assert_geq(error, fabs(fine.value - coarse.value));
  }
  /* found in one run only: the place's error tells what it is worth */
  finish_both(&a, 2, &fine, &coarse);
  coarse.found = false;
  double error = accuracy_figure_error(&a, 2, &fine, &coarse);
  cr_assert(error > 0 && error <= a.estimate, "%g", error);
  fine.sensitivity = 0;
  cr_assert_eq(accuracy_figure_error(&a, 2, &fine, &coarse), INFINITY);
  accuracy_free(&a);
}

/* ---- control ---- */

typedef struct controller {
  int calls, allowed;
  double last;
} controller;

static status go_on(void *self, double fraction) {
  controller *c = self;
  cr_assert(fraction >= 0 && fraction <= 1, "%g", fraction);
  cr_assert_geq(fraction, c->last - 1e-12, "progress falls from %g to %g", c->last, fraction);
  c->last = fraction;
  return c->calls++ < c->allowed ? STATUS_OK : STATUS_CANCELLED;
}

Test(accuracy, control_is_asked_in_every_run_and_obeyed_in_each) {
  accuracy a;
  fault f;
  controller c = {.allowed = 1 << 30};
  solve_control control = {go_on, &c};
  cooled(2, 50, 0.005);
  cr_assert_eq(accuracy_run(&a, &m.the_case, &control, &f), STATUS_OK);
  int calls = c.calls;
  cr_assert_gt(a.runs, 2, "refined at least once");
  cr_assert_gt(calls, 10);
  accuracy_free(&a);
  for (int k = 0; k < calls; k += 1 + calls / 37) {
    c = (controller){.allowed = k};
    cr_assert_eq(accuracy_run(&a, &m.the_case, &control, &f), STATUS_CANCELLED);
    cr_assert_eq(c.calls, k + 1, "not asked again");
    cr_assert_eq(f.status, STATUS_CANCELLED);
    accuracy_free(&a);
  }
}

/* ---- threads ---- */

static void *solve_alone(void *out) {
  fault f;
  if (solve_case(&m.the_case, NULL, out, &f)) *(heat_result **)out = NULL;
  return NULL;
}

Test(accuracy, many_threads_give_the_same_bits) {
  enum { THREADS = 4 };
  pthread_t thread[THREADS];
  heat_result *result[THREADS], *alone;
  cooled(1, 1, 0.05);
  solve_alone(&alone);
  cr_assert_not_null(alone);
  for (int i = 0; i < THREADS; i++)
    cr_assert_eq(pthread_create(&thread[i], NULL, solve_alone, &result[i]), 0);
  for (int i = 0; i < THREADS; i++) {
    cr_assert_eq(pthread_join(thread[i], NULL), 0);
    cr_assert_not_null(result[i]);
    cr_assert_eq(result[i]->history.rows, alone->history.rows);
    cr_assert_arr_eq(result[i]->history.value, alone->history.value,
                     (size_t)alone->history.rows * 4 * sizeof(double));
    heat_result_free(result[i]);
  }
  heat_result_free(alone);
}
