/* observe: history, fields, record and the comparison of two runs. A front that is prescribed
   follows its series to round-off, so rows are checked against the series itself. */
#include "observe.h"

#include "make_attempt.h"

static made m;
static trial t;

#define FOLLOWS 1e-9 /* K: T(H(T)) = T */

static const double x[] = {0, 60, 60, 150}, y[] = {400, 460, 700, 610};

/* Two stages of 100 s and 50.5 s; the front follows the table (jump at 60 s) and then a sine. */
static void plate(void) {
  make_case(&m, "plate");
  add_layer(&m, add_material(&m, 40, 8000, 500), 0.05, 0);
  start_at(&m, 400);
  add_stage(&m, 100, prescribed(rows(4, x, y)), convects(200, constant(300)));
  add_stage(&m, 50.5, prescribed(wave(500, 100, 70, 0)), insulated());
  add_point(&m, 0, 0);
  add_point(&m, 0.02, 0);
  add_column(&m, COLUMN_PLACE, face_place(0), 0);
}

static double front_at(double time) {
  series first = rows(4, x, y), second = wave(500, 100, 70, 0);
  return time <= 100 ? series_before(&first, time) : series_value(&second, time - 100);
}

static const history *run(void) {
  make_attempt(&t, &m, 200, 1300, 16);
  run_attempt(&t, 0.05);
  return &t.attempt->observer.history;
}

Test(observe, history_has_every_instant_and_the_ends_of_stages_once) {
  plate();
  history_every(&m, 10);
  const history *h = run();
  /* 0, 10, ... 150, of which 100 is an end, and 150.5 */
  cr_assert_eq(h->rows, 17);
  cr_assert_eq(h->columns, 1);
  for (int i = 0; i < h->rows; i++) {
    double time = i < 16 ? 10 * i : 150.5;
    cr_assert_float_eq(h->time[i], time, 1e-9);
    cr_assert_float_eq(h->value[i], i ? front_at(time) : 400, FOLLOWS, "at %g: %.12g", time,
                       h->value[i]);
  }
  free_attempt(&t);
}

Test(observe, a_row_at_a_jump_is_just_before_it) {
  static const double times[] = {60, 100};
  plate();
  history_at(&m, 2, times);
  const history *h = run();
  cr_assert_eq(h->rows, 3);
  cr_assert_float_eq(h->value[0], 460, FOLLOWS, "%.9g", h->value[0]);
  cr_assert_float_eq(h->value[1], 660, FOLLOWS, "end of the table's stage");
  free_attempt(&t);
}

Test(observe, instants_are_told_in_order_and_once_whatever_was_asked) {
  static const double times[] = {80, 20, 20, 500, 5, 20, 0};
  plate();
  history_at(&m, 7, times);
  m.the_case.output.history.at.count = 8;
  m.at[7] = (instant){.time = NAN, .end_of_stage = 0};
  const history *h = run();
  static const double expected[] = {0, 5, 20, 80, 100, 150.5};
  cr_assert_eq(h->rows, 6, "%d", h->rows);
  for (int i = 0; i < 6; i++) cr_assert_float_eq(h->time[i], expected[i], 1e-9);
  free_attempt(&t);
}

Test(observe, no_history_unless_asked) {
  plate();
  cr_assert_eq(run()->rows, 0);
  cr_assert_eq(t.attempt->observer.fields, 0);
  free_attempt(&t);
}

Test(observe, columns_are_places_heat_flows_and_series) {
  static const double times[] = {10, 50, 90};
  plate();
  m.the_case.series.count = 2;
  m.named[0] = (named_series){.name = "own", .series = wave(7, 2, 40, 0)};
  m.named[1] = (named_series){.name = "log", .series = rows(4, x, y)};
  m.named[1].series.from_case_start = true;
  add_column(&m, COLUMN_SERIES, (place){0}, 0);
  add_column(&m, COLUMN_SERIES, (place){0}, 1);
  add_column(&m, COLUMN_HEAT_FLOW, (place){0}, 1);
  add_column(&m, COLUMN_PLACE, face_place(1), 0);
  history_at(&m, 3, times);
  const history *h = run();
  cr_assert_eq(h->columns, 5);
  series log = rows(4, x, y);
  for (int i = 0; i < 3; i++) {
    const double *row = h->value + 5 * i;
    cr_assert_float_eq(row[1], 7 + 2 * sin(2 * M_PI * times[i] / 40), 1e-12);
    cr_assert_float_eq(row[2], series_before(&log, times[i]), 1e-12);
    cr_assert_float_eq(row[3], 200 * (300 - row[4]), 1e-6, "the law of convection");
  }
  const double *row = h->value + 5 * 4; /* the end of the case */
  cr_assert_float_eq(row[1], 7 + 2 * sin(2 * M_PI * 50.5 / 40), 1e-12, "from the stage's start");
  cr_assert_eq(row[2], 610, "from the start of the case");
  cr_assert_eq(row[3], 0);
  free_attempt(&t);
}

Test(observe, fields_are_the_nodes_at_their_times) {
  static const double times[] = {60, 33.3};
  plate();
  fields_at(&m, 2, times);
  m.the_case.output.fields.at.count = 3;
  m.field_at[2] = (instant){.time = NAN, .end_of_stage = 1};
  run();
  const observer *o = &t.attempt->observer;
  cr_assert_eq(o->fields, 3);
  static const double expected[] = {33.3, 60, 150.5};
  for (int k = 0; k < 3; k++) {
    const field *f = &o->field[k];
    cr_assert_float_eq(f->time, expected[k], 1e-9);
    cr_assert_eq(f->nodes, t.attempt->mesh.nodes);
    cr_assert_float_eq(f->temperature[0], front_at(expected[k]), FOLLOWS);
    for (int i = 0; i < f->nodes; i++) cr_assert_eq(f->position[i], t.attempt->mesh.position[i]);
  }
  double slope, last = property_temperature(&t.property[0], t.attempt->stepper.state[5], &slope);
  cr_assert_eq(o->field[2].temperature[5], last);
  free_attempt(&t);
}

Test(observe, every_field_has_the_ends_of_stages_too) {
  plate();
  m.the_case.output.fields.times = OUTPUT_EVERY;
  m.the_case.output.fields.every = 50;
  run();
  static const double expected[] = {0, 50, 100, 150, 150.5};
  cr_assert_eq(t.attempt->observer.fields, 5);
  for (int k = 0; k < 5; k++)
    cr_assert_float_eq(t.attempt->observer.field[k].time, expected[k], 1e-9);
  free_attempt(&t);
}

/* ---- limits ---- */

static status try_attempt(void) {
  memset(&t, 0, sizeof t);
  arena_init(&t.memory, 0);
  cr_assert_eq(properties_build(&m.the_case, 200, 1300, &t.property, &t.memory, &t.fault),
               STATUS_OK);
  t.plan.cells = 16;
  for (int i = 0; i < LIMIT_LAYERS; i++) t.plan.end_cell[i][0] = t.plan.end_cell[i][1] = INFINITY;
  status s = attempt_new(&t.attempt, &m.the_case, &t.plan, t.property, 1, NULL, &t.fault);
  free_attempt(&t);
  return s;
}

Test(observe, outputs_have_a_limit_that_may_be_met) {
  plate();
  m.the_case.stages.count = 1;
  m.stage[0].lasts = LIMIT_OUTPUTS - 1;
  history_every(&m, 1);
  cr_assert_eq(try_attempt(), STATUS_OK);
  m.stage[0].lasts = LIMIT_OUTPUTS;
  cr_assert_eq(try_attempt(), STATUS_BEYOND_LIMIT);
  cr_assert_str_eq(t.fault.at, "/output/history");

  plate();
  m.the_case.output.fields.times = OUTPUT_EVERY;
  m.the_case.output.fields.every = 100.0 / (LIMIT_FIELD_VALUES / 17 - 10);
  m.the_case.stages.count = 1;
  m.the_case.output.history.times = OUTPUT_NONE;
  cr_assert_eq(try_attempt(), STATUS_BEYOND_LIMIT);
  cr_assert_str_eq(t.fault.at, "/output/fields");
}

Test(observe, longest_is_the_sum_of_lasts_and_limits) {
  plate();
  cr_assert_float_eq(case_longest(&m.the_case), 150.5, 1e-12);
  condition_node node = leaf(UNTIL_RISES_TO, face_place(0), 600, 0);
  end_stage_by(&m, 1, &node, 0, 777);
  cr_assert_float_eq(case_longest(&m.the_case), 877, 1e-12);
  add_stage(&m, 0, insulated(), insulated());
  cr_assert_float_eq(case_longest(&m.the_case), 877, 1e-12);
}

/* ---- record and comparison ---- */

Test(observe, the_record_is_rising_within_its_stages_and_thinned) {
  plate();
  m.stage[1].faces.condition[0].temperature = wave(500, 100, 1.6, 0);
  m.stage[1].lasts = 200; /* at most 0.1 s a step: 2000 steps */
  run();
  const record *r = &t.attempt->observer.record;
  int of_stage[2] = {0};
  for (int i = 0; i < r->rows; i++) {
    of_stage[r->row[i].stage]++;
    if (i && r->row[i].stage == r->row[i - 1].stage) cr_assert_gt(r->row[i].t, r->row[i - 1].t);
  }
  cr_assert_gt(t.attempt->outcome.steps, 2000);
  cr_assert_leq(of_stage[1], MOST_RECORD_ROWS);
  cr_assert_gt(of_stage[1], MOST_RECORD_ROWS / 3);
  cr_assert_float_eq(r->row[r->rows - 1].t, 200, 1e-9, "the end of a stage is always kept");
  /* the column of the point on the front holds the series */
  series sine = wave(500, 100, 1.6, 0);
  bool found = false;
  for (int k = 0; k < r->columns; k++) {
    double last = r->value[(size_t)(r->rows - 1) * r->columns + k];
    double before = r->value[(size_t)(r->rows - 2) * r->columns + k];
    found |= fabs(last - series_value(&sine, 200)) < FOLLOWS &&
             fabs(before - series_value(&sine, r->row[r->rows - 2].t)) < FOLLOWS;
  }
  cr_assert(found);
  free_attempt(&t);
}

/* A twin on half of the nodes, compared with the fine run. */
static attempt *twin_of(trial *fine, double tolerance) {
  attempt *twin;
  double durations[LIMIT_STAGES];
  fault f;
  for (int i = 0; i < m.the_case.stages.count; i++)
    durations[i] = fine->attempt->outcome.stage[i].end - fine->attempt->outcome.stage[i].start;
  cr_assert_eq(
      attempt_new(&twin, &m.the_case, &fine->plan, fine->property, 2, &fine->attempt->observer, &f),
      STATUS_OK);
  cr_assert_eq(attempt_run(twin, tolerance, durations, NULL, 0, 1, &f), STATUS_OK);
  return twin;
}

Test(observe, the_difference_is_the_largest_of_points_rows_and_fields) {
  static const double times[] = {5, 20, 90, 140};
  plate();
  history_at(&m, 4, times);
  add_column(&m, COLUMN_PLACE, whole_place(PLACE_MEAN), 0);
  fields_at(&m, 4, times);
  run();
  attempt *twin = twin_of(&t, 0.4);
  const observer *fine = &t.attempt->observer, *coarse = &twin->observer;
  double least = 0;
  for (int i = 0; i < fine->history.rows * 2; i++)
    least = fmax(least, fabs(fine->history.value[i] - coarse->history.value[i]));
  for (int k = 0; k < 4; k++)
    for (int i = 0; i < coarse->field[k].nodes; i++)
      least =
          fmax(least, fabs(coarse->field[k].temperature[i] - fine->field[k].temperature[2 * i]));
  double told = observe_difference(fine, coarse);
  cr_assert_gt(least, 0.01);
  cr_assert_geq(told, least);
  cr_assert_lt(told, 60, "no comparison across a jump: %g", told);
  attempt_free(twin);
  free_attempt(&t);
}

/* Right after a shock the mean differs by what the half cell at the front holds; the record does
   not look so early, but a row of the history that was asked for does. */
Test(observe, an_early_row_counts_however_early) {
  static const double times[] = {0.01};
  plate();
  m.the_case.output.history.of.count = 0;
  m.the_case.stages.count = 1;
  m.stage[0].faces.condition[0] = prescribed(constant(700));
  add_column(&m, COLUMN_PLACE, whole_place(PLACE_MEAN), 0);
  history_at(&m, 1, times);
  const history *h = run();
  attempt *twin = twin_of(&t, 0.4);
  double of_row = fabs(h->value[0] - twin->observer.history.value[0]);
  cr_assert_gt(of_row, 1.01 * twin->observer.difference, "%g, record %g", of_row,
               twin->observer.difference);
  cr_assert_eq(observe_difference(&t.attempt->observer, &twin->observer), of_row);
  attempt_free(twin);
  free_attempt(&t);
}

Test(observe, a_run_compared_with_itself_does_not_differ) {
  plate();
  history_every(&m, 7);
  run();
  attempt *twin;
  fault f;
  static const double durations[] = {100, 50.5};
  cr_assert_eq(attempt_new(&twin, &m.the_case, &t.plan, t.property, 1, &t.attempt->observer, &f),
               STATUS_OK);
  cr_assert_eq(attempt_run(twin, 0.05, durations, NULL, 0, 1, &f), STATUS_OK);
  cr_assert_eq(observe_difference(&t.attempt->observer, &twin->observer), 0);
  attempt_free(twin);
  free_attempt(&t);
}

/* The error of an end by `until` comes from the twin's value at the fine run's moment. */
Test(observe, the_twin_tells_its_value_at_the_end_of_the_fine_run) {
  plate();
  m.the_case.stages.count = 1;
  condition_node node = leaf(UNTIL_RISES_TO, whole_place(PLACE_MEAN), 430, 0);
  end_stage_by(&m, 1, &node, 0, 777);
  run();
  const until_end *end = &t.attempt->observer.ends[0];
  cr_assert(end->known);
  cr_assert_gt(end->rate, 0);
  attempt *twin = twin_of(&t, 0.4);
  double slope, sum = 0;
  for (int i = 0; i < twin->mesh.nodes; i++)
    sum +=
        twin->mesh.volume[i] * property_temperature(&t.property[0], twin->stepper.state[i], &slope);
  cr_assert_float_eq(twin->observer.end_difference[0], fabs(sum / 0.05 - 430), 1e-6);
  attempt_free(twin);
  free_attempt(&t);
}

Test(observe, ranges_are_seen_and_leaving_the_table_is_noticed) {
  plate();
  run();
  const observer *o = &t.attempt->observer;
  cr_assert_not(o->beyond_table);
  cr_assert_geq(o->most[0], 699);
  cr_assert_leq(o->most[0], 700 + 1e-9);
  cr_assert_lt(o->least[0], 402);
  free_attempt(&t);
  make_attempt(&t, &m, 350, 650, 16);
  run_attempt(&t, 0.05);
  cr_assert(t.attempt->observer.beyond_table);
  free_attempt(&t);
}

Test(observe, figures_are_fed_with_every_step) {
  plate();
  add_figure(&m, "peak", face_place(0));
  add_figure(&m, "lowest", face_place(0));
  run();
  figure_value peak = {0}, lowest = {0};
  observer *o = &t.attempt->observer;
  figure_kind_named("peak")->finish(&o->run[0], &peak);
  figure_kind_named("lowest")->finish(&o->run[1], &lowest);
  cr_assert(peak.found && lowest.found);
  cr_assert_float_eq(peak.value, 700, 1e-6);
  cr_assert_float_eq(peak.when, 60, 1e-3);
  /* the start; the sine's own lowest, 400 at 52.5 s of its stage, is not reached */
  cr_assert_float_eq(lowest.value, 400, 1e-6);
  free_attempt(&t);
}

Test(observe, a_stage_over_at_once_is_an_instant) {
  plate();
  condition_node node = leaf(UNTIL_RISES_TO, whole_place(PLACE_HOTTEST), 399, 0);
  m.the_case.stages.count = 1;
  end_stage_by(&m, 1, &node, 0, 777);
  add_stage(&m, 50.5, prescribed(wave(500, 100, 70, 0)), insulated());
  history_every(&m, 10);
  const history *h = run();
  cr_assert(t.attempt->observer.started_true[0]);
  cr_assert_eq(h->time[0], 0);
  cr_assert_eq(h->time[1], 10);
  cr_assert_float_eq(h->value[0], 400, FOLLOWS);
  cr_assert_eq(h->rows, 7);
  free_attempt(&t);
}
