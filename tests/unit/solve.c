/* solve: the whole way from a case to its result: energy, ends of stages, figures, verdict,
   warnings; the same bits every time; clean failure when memory runs out at any point. */
#include "solve.h"

#include "count_memory.h"
#include "exact.h"
#include "make_case.h"

#include <criterion/criterion.h>

static made m;
static const char *const names[] = {"plate", "cylinder", "sphere"};

static heat_result *solved(void) {
  heat_result *result;
  fault f;
  status s = solve_case(&m.the_case, NULL, &result, &f);
  cr_assert_eq(s, STATUS_OK, "%s", s ? f.is : "");
  return result;
}

#define CONDUCTIVITY 40.0
#define RHO_C        4e6
#define RADIUS       0.05
#define SECOND       (RADIUS * RADIUS * RHO_C / CONDUCTIVITY) /* of Fourier number 1 */

/* A body of 1000 K in a medium of 300 K; the plate by its half. */
static void cooled(int power, double bi, double fourier) {
  make_case(&m, names[power]);
  add_layer(&m, add_material(&m, CONDUCTIVITY, 8000, RHO_C / 8000), RADIUS, 0);
  start_at(&m, 1000);
  add_stage(&m, fourier * SECOND, insulated(), convects(bi * CONDUCTIVITY / RADIUS, constant(300)));
  for (int i = 0; i < 3; i++) {
    add_point(&m, RADIUS * i / 2, 0);
    add_column(&m, COLUMN_PLACE, point_place(i), 0);
  }
  add_column(&m, COLUMN_HEAT_FLOW, (place){0}, 1);
  history_every(&m, fourier * SECOND / 20);
  static double half[1];
  half[0] = fourier * SECOND / 2;
  fields_at(&m, 1, half);
}

/* Fourier number at which the centre has the ratio. */
static double exact_fourier(int power, double bi, double ratio) {
  double low = 1e-3, high = 100;
  for (int i = 0; i < 80; i++) {
    double middle = 0.5 * (low + high);
    if (exact_ratio(power, bi, 0, middle) > ratio)
      low = middle;
    else
      high = middle;
  }
  return low;
}

/* ---- energy ---- */

/* Cooled down to the medium, a body has given up its volume x rho c x 700 K, in J/m2, J/m and J. */
Test(solve, heat_absorbed_is_in_the_unit_of_the_shape) {
  double volume[] = {RADIUS, M_PI * RADIUS * RADIUS, 4.0 / 3 * M_PI * pow(RADIUS, 3)};
  for (int power = 0; power < 3; power++) {
    cooled(power, 5, 40);
    heat_result *r = solved();
    double exact = -700 * RHO_C * volume[power];
    cr_assert_float_eq(r->energy.absorbed[1], exact, 1e-9 * fabs(exact), "%s", names[power]);
    cr_assert_float_eq(r->energy.stored, exact, 1e-9 * fabs(exact));
    cr_assert_eq(r->energy.absorbed[0], 0);
    cr_assert_eq(r->energy.generated, 0);
    cr_assert_lt(r->energy.balance_error, 1e-10);
    heat_result_free(r);
  }
}

Test(solve, energy_of_generation_and_prescribed_faces_balances) {
  static series generation;
  generation = wave(2e5, 1e5, 900, 0);
  static const double x[] = {0, 100, 100, 900}, y[] = {400, 500, 900, 600};
  for (int power = 0; power < 3; power++) {
    make_case(&m, names[power]);
    int i = add_fire_code_steel(&m);
    set_bore(&m, 0.04);
    add_layer(&m, i, 0.02, 0)->heat_generation = &generation;
    add_layer(&m, i, 0.01, 1e-4);
    start_at(&m, 300);
    add_stage(&m, 1000, prescribed(rows(4, x, y)), furnace(25, 0.8, constant(1100)));
    m.the_case.numerical_error = 2;
    heat_result *r = solved();
    const energy_balance *e = &r->energy;
    double moved = fabs(e->absorbed[0]) + fabs(e->absorbed[1]) + e->generated;
    cr_assert_float_eq(e->stored, e->absorbed[0] + e->absorbed[1] + e->generated, 1e-10 * moved);
    cr_assert_lt(e->balance_error, 1e-10);
    double inner = power ? 0.02 : 0, outer = inner + 0.02;
    double volume = power == 0   ? 0.02
                    : power == 1 ? M_PI * (outer * outer - inner * inner)
                                 : 4.0 / 3 * M_PI * (pow(outer, 3) - pow(inner, 3));
    double turns = 1000.0 / 900,
           g = 2e5 * 1000 + 1e5 * 900 / (2 * M_PI) * (1 - cos(2 * M_PI * turns));
    /* a sine over some hundred steps of order 4 */
    cr_assert_float_eq(e->generated, g * volume, 1e-6 * g * volume);
    heat_result_free(r);
  }
}

/* ---- stages ---- */

Test(solve, the_error_of_an_end_holds_against_the_exact_time) {
  static const double errors[] = {1, 0.1};
  for (int power = 0; power < 3; power++)
    for (int e = 0; e < 2; e++) {
      double bi = 2, exact = SECOND * exact_fourier(power, bi, 0.5);
      cooled(power, bi, 1);
      condition_node node = leaf(UNTIL_FALLS_TO, point_place(0), 650, 0);
      end_stage_by(&m, 1, &node, 0, 100 * SECOND);
      m.the_case.output.history.times = OUTPUT_NONE;
      m.the_case.numerical_error = errors[e];
      heat_result *r = solved();
      const stage_result *s = &r->stage[0];
      cr_assert_eq(s->ended_by, ENDED_UNTIL);
      cr_assert_leq(fabs(s->end - exact), s->end_error + 1e-6 * exact,
                    "%s at %g K: end %.9g, exact %.9g, error stated %g", names[power], errors[e],
                    s->end, exact, s->end_error);
      cr_assert_lt(s->end_error, 0.02 * exact);
      heat_result_free(r);
    }
}

Test(solve, stages_join_and_say_how_they_ended) {
  cooled(0, 1, 1);
  m.stage[0].lasts = 100;
  add_stage(&m, 1, insulated(), convects(100, constant(300)));
  condition_node node = leaf(UNTIL_FALLS_TO, point_place(2), 300.5, 0);
  end_stage_by(&m, 1, &node, 0, 50);
  add_stage(&m, 1, insulated(), convects(100, constant(300)));
  condition_node at_once = leaf(UNTIL_FALLS_TO, point_place(2), 2000, 0);
  end_stage_by(&m, 1, &at_once, 0, 50);
  add_stage(&m, 0, insulated(), convects(100, constant(300)));
  heat_result *r = solved();
  cr_assert_eq(r->stages, 4);
  static const stage_ended by[] = {ENDED_LASTS, ENDED_TIME_LIMIT, ENDED_UNTIL, ENDED_STEADY};
  static const double ends[] = {100, 150, 150, 150};
  for (int i = 0; i < 4; i++) {
    cr_assert_eq(r->stage[i].ended_by, by[i]);
    cr_assert_float_eq(r->stage[i].end, ends[i], 1e-9);
    cr_assert_eq(r->stage[i].end_error, 0);
  }
  bool true_at_start = false, by_limit = false;
  for (int i = 0; i < r->warnings; i++) {
    by_limit |=
        !strcmp(r->warning[i].at, "/stages/1/until") && strstr(r->warning[i].is, "time_limit");
    true_at_start |=
        !strcmp(r->warning[i].at, "/stages/2/until") && strstr(r->warning[i].is, "true");
  }
  cr_assert(by_limit && true_at_start, "both are warned of");
  heat_result_free(r);
}

Test(solve, a_steady_case_is_an_instant_with_figures) {
  make_case(&m, "plate");
  add_layer(&m, add_material(&m, 0.5, 500, 900), 0.1, 0);
  m.the_case.start.kind = START_PER_LAYER;
  add_stage(&m, 0, prescribed(constant(1000)), convects(10, constant(300)));
  add_point(&m, 0.05, 0);
  add_figure(&m, "peak", point_place(0));
  add_figure(&m, "heat_flow", (place){0})->face = 0;
  heat_result *r = solved();
  double flux = 700 / (0.1 / 0.5 + 1.0 / 10);
  cr_assert_float_eq(r->figure[0].value.value, 1000 - flux * 0.05 / 0.5, 1e-6);
  cr_assert_float_eq(r->figure[1].value.value, flux, 1e-6 * flux);
  cr_assert_eq(r->stage[0].end, 0);
  cr_assert_lt(r->energy.balance_error, 1e-10);
  heat_result_free(r);
}

/* ---- figures and verdict ---- */

Test(solve, the_error_of_a_time_holds_against_the_exact_time) {
  for (int power = 0; power < 3; power++) {
    double exact = SECOND * exact_fourier(power, 2, 0.4);
    cooled(power, 2, 3);
    add_figure(&m, "time_to", point_place(0))->falls_to = 300 + 700 * 0.4;
    heat_result *r = solved();
    const figure_result *g = &r->figure[0];
    cr_assert(g->value.found);
    cr_assert_leq(fabs(g->value.value - exact), g->error, "%s: %.9g, exact %.9g, error stated %g",
                  names[power], g->value.value, exact, g->error);
    cr_assert_lt(g->error, 0.02 * exact);
    heat_result_free(r);
  }
}

static verdict verdict_of(double at_least, double at_most, double *margin) {
  static requirement need;
  need = (requirement){at_least, at_most, -1};
  cooled(0, 1, 0.5);
  add_figure(&m, "lowest", point_place(2))->require = &need;
  heat_result *r = solved();
  verdict v = r->verdict;
  cr_assert_eq(r->figure[0].met, v == VERDICT_MEETS || r->figure[0].margin >= 0);
  *margin = r->figure[0].margin;
  heat_result_free(r);
  return v;
}

Test(solve, verdict_weighs_margins_against_their_errors) {
  double margin, lowest = 300 + 700 * exact_ratio(0, 1, 1, 0.5);
  cr_assert_eq(verdict_of(lowest - 10, INFINITY, &margin), VERDICT_MEETS);
  cr_assert_float_eq(margin, 10, 0.5);
  cr_assert_eq(verdict_of(-INFINITY, lowest + 7, &margin), VERDICT_MEETS);
  cr_assert_float_eq(margin, 7, 0.5);
  cr_assert_eq(verdict_of(lowest - 10, lowest + 4, &margin), VERDICT_MEETS);
  cr_assert_float_eq(margin, 4, 0.5, "the nearer bound");
  cr_assert_eq(verdict_of(lowest + 10, INFINITY, &margin), VERDICT_MISSES);
  cr_assert_float_eq(margin, -10, 0.5);
  cr_assert_eq(verdict_of(lowest, INFINITY, &margin), VERDICT_CLOSE);
  cooled(0, 1, 0.5);
  heat_result *r = solved();
  cr_assert_eq(r->verdict, VERDICT_NONE);
  heat_result_free(r);
}

Test(solve, a_required_figure_without_a_value_misses) {
  static requirement need = {.at_least = 1, .at_most = NAN, .which = -1};
  cooled(0, 1, 0.5);
  figure *g = add_figure(&m, "time_to", point_place(0));
  g->falls_to = 290;
  g->require = &need;
  heat_result *r = solved();
  cr_assert_not(r->figure[0].value.found);
  cr_assert_not(r->figure[0].met);
  cr_assert_eq(r->verdict, VERDICT_MISSES);
  heat_result_free(r);
}

/* ---- the answer ---- */

Test(solve, histories_and_fields_outlive_the_run) {
  cooled(1, 1, 0.5);
  heat_result *r = solved();
  cr_assert_eq(r->history.columns, 4);
  cr_assert_eq(r->history.rows, 21);
  cr_assert_eq(r->fields, 1);
  for (int i = 0; i < r->history.rows; i++) {
    double fo = r->history.time[i] / SECOND;
    cr_assert_float_eq(fo, 0.025 * i, 1e-9);
    double exact = i ? 300 + 700 * exact_ratio(1, 1, 0, fo) : 1000;
    cr_assert_float_eq(r->history.value[4 * i], exact, r->numerics.error_estimate + 1e-9);
  }
  const field *f = &r->field[0];
  cr_assert_eq(f->nodes, r->numerics.unknowns);
  for (int i = 0; i < f->nodes; i++) {
    double exact = 300 + 700 * exact_ratio(1, 1, f->position[i] / RADIUS, 0.25);
    cr_assert_float_eq(f->temperature[i], exact, r->numerics.error_estimate + 1e-9);
  }
  cr_assert_gt(r->numerics.steps, 10);
  cr_assert_geq(r->numerics.runs, 2);
  cr_assert_leq(r->numerics.error_estimate, m.the_case.numerical_error);
  heat_result_free(r);
  heat_result_free(NULL);
}

/* Everything that happens in a shop: three stages, events, a quench by surface temperature, latent
 * heat. */
static void shop_case(void) {
  static const double hot[] = {330, 570, 770, 920, 1130}, h[] = {350, 900, 1900, 1300, 450};
  static const double x[] = {0, 1200}, y[] = {300, 1100};
  static requirement need = {.at_least = 600, .at_most = NAN, .which = -1};
  make_case(&m, "cylinder");
  int a = add_fire_code_steel(&m), b = add_material(&m, 3, 2500, 900);
  add_latent(&m, b, 60e3, 640, 660);
  set_bore(&m, 0.03);
  add_layer(&m, b, 0.004, 0);
  add_layer(&m, a, 0.02, 2e-4);
  start_at(&m, 300);
  add_stage(&m, 1, convects(5, constant(300)), furnace(25, 0.8, rows(2, x, y)));
  condition_node node = leaf(UNTIL_RISES_TO, whole_place(PLACE_COLDEST), 800, 0);
  end_stage_by(&m, 1, &node, 60, 36000);
  add_stage(&m, 20, insulated(), convects(12, constant(300)));
  stage *quench = add_stage(&m, 300, insulated(), convects(0, constant(330)));
  quench->faces.condition[1].h.by_surface_temperature = true;
  quench->faces.condition[1].h.over_temperature = (table){5, hot, h};
  add_point(&m, 0.03, 1);
  add_column(&m, COLUMN_PLACE, point_place(0), 0);
  add_column(&m, COLUMN_PLACE, whole_place(PLACE_SECTION_DIFFERENCE), 0);
  add_column(&m, COLUMN_HEAT_FLOW, (place){0}, 1);
  history_every(&m, 60);
  m.the_case.output.fields.times = OUTPUT_EVERY;
  m.the_case.output.fields.every = 1000;
  add_figure(&m, "peak", whole_place(PLACE_HOTTEST));
  figure *f = add_figure(&m, "time_at_temperature", whole_place(PLACE_COLDEST));
  f->above = 750;
  f->require = &need;
  m.the_case.numerical_error = 3;
}

static void check_same_bits(const heat_result *a, const heat_result *b) {
  size_t values = (size_t)a->history.rows * (size_t)a->history.columns;
  cr_assert_eq(a->history.rows, b->history.rows);
  cr_assert_arr_eq(a->history.time, b->history.time, (size_t)a->history.rows * sizeof(double));
  cr_assert_arr_eq(a->history.value, b->history.value, values * sizeof(double));
  cr_assert_eq(a->fields, b->fields);
  for (int i = 0; i < a->fields; i++)
    cr_assert_arr_eq(a->field[i].temperature, b->field[i].temperature,
                     (size_t)a->field[i].nodes * sizeof(double));
  cr_assert_eq(a->figures, b->figures);
  for (int i = 0; i < a->figures; i++) {
    cr_assert_eq(a->figure[i].value.value, b->figure[i].value.value);
    cr_assert_eq(a->figure[i].error, b->figure[i].error);
  }
  cr_assert_arr_eq(a->energy.absorbed, b->energy.absorbed, 2 * sizeof(double));
  cr_assert_eq(a->energy.stored, b->energy.stored);
  cr_assert_eq(a->numerics.error_estimate, b->numerics.error_estimate);
  cr_assert_eq(a->numerics.steps, b->numerics.steps);
  cr_assert_eq(a->warnings, b->warnings);
  for (int i = 0; i < a->warnings; i++) cr_assert_str_eq(a->warning[i].is, b->warning[i].is);
}

Test(solve, the_same_case_gives_the_same_bits) {
  shop_case();
  heat_result *a = solved();
  /* other memory in between */
  cooled(2, 1, 0.5);
  heat_result *other = solved();
  shop_case();
  heat_result *b = solved();
  cr_assert_gt(a->history.rows, 10);
  cr_assert_gt(a->figures, 1);
  check_same_bits(a, b);
  heat_result_free(a);
  heat_result_free(b);
  heat_result_free(other);
}

/* ---- failures ---- */

/* The nth call of the allocator fails, n = 0, 1, 2, ... until none does: a clean word, nothing
 * lost. */
static int fail_each_allocation(const heat_result *expected, int step) {
  for (int n = 0;; n += step) {
    heat_result *result = (heat_result *)&m;
    fault f = {0};
    int out = allocations_out;
    allocations = 0;
    fail_at = n;
    status s = solve_case(&m.the_case, NULL, &result, &f);
    fail_at = -1;
    if (s == STATUS_OK) {
      cr_assert_leq(allocations, n, "a failure was swallowed at call %d", n);
      check_same_bits(result, expected);
      heat_result_free(result);
      cr_assert_eq(allocations_out, out);
      return n;
    }
    cr_assert_eq(s, STATUS_NO_MEMORY, "call %d: %s, %s", n, status_message(s), f.is);
    cr_assert_eq(f.status, STATUS_NO_MEMORY);
    cr_assert_null(result);
    cr_assert_eq(allocations_out, out, "call %d: %d blocks lost", n, allocations_out - out);
  }
}

Test(solve, every_allocation_may_fail_once) {
  shop_case();
  heat_result *expected = solved();
  cr_assert_gt(fail_each_allocation(expected, 1), 8);
  heat_result_free(expected);
}

Test(solve, every_allocation_of_a_refined_case_may_fail_once) {
  cooled(2, 50, 1);
  m.the_case.numerical_error = 0.02;
  heat_result *expected = solved();
  cr_assert_gt(expected->numerics.runs, 2);
  cr_assert_gt(fail_each_allocation(expected, 1), 12);
  heat_result_free(expected);
}

static status stop(void *self, double fraction) {
  (void)fraction;
  ++*(int *)self;
  return STATUS_OUT_OF_TIME;
}

Test(solve, what_control_answers_is_what_is_returned) {
  int calls = 0;
  solve_control control = {stop, &calls};
  heat_result *result = (heat_result *)&m;
  fault f;
  shop_case();
  int out = allocations_out;
  cr_assert_eq(solve_case(&m.the_case, &control, &result, &f), STATUS_OUT_OF_TIME);
  cr_assert_eq(calls, 1);
  cr_assert_null(result);
  cr_assert_eq(allocations_out, out);
  cr_assert_eq(solve_case(&m.the_case, &control, &result, NULL), STATUS_OUT_OF_TIME);
}

Test(solve, a_bad_property_is_told_and_nothing_is_lost) {
  heat_result *result;
  fault f;
  cooled(0, 1, 1);
  set_linear(&m, 0, OF_SPECIFIC_HEAT, 100, -1);
  int out = allocations_out;
  cr_assert_eq(solve_case(&m.the_case, NULL, &result, &f), STATUS_BAD_ARGUMENT);
  cr_assert_null(result);
  cr_assert_not_null(strstr(f.is, "matter"), "%s", f.is);
  cr_assert_eq(allocations_out, out);
}

Test(solve, too_many_outputs_are_refused_at_their_place) {
  heat_result *result;
  fault f;
  cooled(0, 1, 1);
  history_every(&m, SECOND / (LIMIT_OUTPUTS + 10.0));
  cr_assert_eq(solve_case(&m.the_case, NULL, &result, &f), STATUS_BEYOND_LIMIT);
  cr_assert_str_eq(f.at, "/output/history");
}

/* ---- the cost ---- */

Test(solve, the_cost_grows_with_what_is_asked) {
  solve_cost loose, fine, longer;
  fault f;
  cooled(0, 1, 1);
  cr_assert_eq(solve_estimate(&m.the_case, &loose, &f), STATUS_OK);
  m.the_case.numerical_error = 0.01;
  cr_assert_eq(solve_estimate(&m.the_case, &fine, &f), STATUS_OK);
  cr_assert_gt(fine.unknowns, loose.unknowns);
  cr_assert_gt(fine.steps, loose.steps);
  cr_assert_gt(fine.seconds, loose.seconds);
  cr_assert_float_eq(loose.outputs, 21, 1e-9);
  add_stage(&m, 100, insulated(), insulated());
  cr_assert_eq(solve_estimate(&m.the_case, &longer, &f), STATUS_OK);
  cr_assert_gt(longer.steps, fine.steps);
  set_linear(&m, 0, OF_SPECIFIC_HEAT, 100, -1);
  cr_assert_eq(solve_estimate(&m.the_case, &longer, &f), STATUS_BAD_ARGUMENT);
}

Test(solve, the_cost_is_of_the_right_size) {
  solve_cost cost;
  fault f;
  shop_case();
  cr_assert_eq(solve_estimate(&m.the_case, &cost, &f), STATUS_OK);
  heat_result *r = solved();
  double work = (double)r->numerics.unknowns * r->numerics.steps;
  /* a rough word before solving: within a factor of 20 */
  double ratio = cost.unknowns * cost.steps / work;
  cr_assert(ratio > 0.05 && ratio < 20, "told %g, was %g", cost.unknowns * cost.steps, work);
  heat_result_free(r);
}
