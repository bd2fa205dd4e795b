/* march: stages in a row, breaks and jumps landed on, cancellation, the energy balance recomputed,
   and no call of the allocator between the first and the last step. */
#include "march.h"

#include "accuracy.h"
#include "count_memory.h"
#include "make_attempt.h"
#include "make_run.h"

static made m;
static run r;

/* ---- a watch that only writes down ---- */

enum { MOST_NOTES = 20000 };

typedef struct notes {
  int steps, jumps, stages, rests, ended;
  double end[MOST_NOTES]; /* of steps, from the start of the case */
  double jump[64], start[8];
  double begun;        /* of the stage under way */
  double flux_heat[2]; /* J through both faces, by Simpson's rule along the interpolant */
  bool integrate;
} notes;

static void note_begin(void *self, int stage, double start, stepper *s) {
  notes *n = self;
  (void)s;
  cr_assert_eq(stage, n->stages);
  n->start[n->stages++] = n->begun = start;
}

static bool never_at_start(void *self, stepper *s) {
  (void)self;
  (void)s;
  return false;
}

static double never(void *self, stepper *s) {
  (void)self;
  (void)s;
  return INFINITY;
}

/* Heat flow into the part through an exchanging end at stage time t of the step tried. */
static double flow_at(stepper *s, int end, double t) {
  const mesh *g = s->system->mesh;
  int node = end ? g->nodes - 1 : 0;
  face_state at;
  const face_condition *c = s->system->condition[end];
  if (!c) return 0;
  face_at(c, s->system->stage_start, s->system->from, s->system->to, t, &at);
  double slope, surface = property_temperature(g->layer[end ? g->layers - 1 : 0].property,
                                               stepper_node(s, node, t), &slope);
  return g->area[end] * face_exchange(c, &at, surface).flux;
}

static void note_step(void *self, stepper *s, bool ends) {
  notes *n = self;
  cr_assert_lt(n->steps, MOST_NOTES);
  n->end[n->steps++] = n->begun + s->t + s->h;
  n->ended += ends;
  for (int end = 0; n->integrate && end < 2; end++)
    for (int k = 0; k < 4; k++) { /* four panels a step */
      double a = s->t + s->h * k / 4, b = s->t + s->h * (k + 1) / 4;
      n->flux_heat[end] +=
          (b - a) / 6 *
          (flow_at(s, end, a) + 4 * flow_at(s, end, 0.5 * (a + b)) + flow_at(s, end, b));
    }
}

static void note_jump(void *self, double t) {
  notes *n = self;
  n->jump[n->jumps++] = n->begun + t;
}

static void note_rest(void *self, stepper *s, double start) {
  notes *n = self;
  (void)s;
  (void)start;
  n->rests++;
}

static march_outcome outcome;

static status march_with(notes *n, double tolerance, const double *durations,
                         const solve_control *control, fault *f) {
  march_watch w = {.self = n,
                   .begins = note_begin,
                   .fulfilled_at_start = never_at_start,
                   .event = never,
                   .accepted = note_step,
                   .jumped = note_jump,
                   .rests = note_rest};
  march_request q = {.the_case = &m.the_case,
                     .tolerance = tolerance,
                     .durations = durations,
                     .watch = &w,
                     .control = control,
                     .progress_from = 0.25,
                     .progress_to = 0.75};
  return march(&q, &r.stepper, &outcome, f);
}

static void run_with(notes *n, double tolerance) {
  fault f;
  status s = march_with(n, tolerance, NULL, NULL, &f);
  cr_assert_eq(s, STATUS_OK, "%s", s ? f.is : "");
}

static bool lands_on(const notes *n, double t) {
  for (int i = 0; i < n->steps; i++)
    if (fabs(n->end[i] - t) <= 1e-9 * (1 + t)) return true;
  return false;
}

/* ---- breaks, jumps, stages ---- */

static const double jump_x[] = {0, 100, 100, 333.3, 400}, jump_y[] = {500, 520, 900, 400, 450};

static void plate(face_condition first, double lasts) {
  make_case(&m, "plate");
  add_layer(&m, add_material(&m, 40, 8000, 500), 0.04, 0);
  start_at(&m, 300);
  add_stage(&m, lasts, first, insulated());
}

static void ready(void) {
  make_tables(&r, &m, 200, 1500, 256);
  make_mesh(&r, &m, 12, 1, false);
  make_stepper(&r);
}

Test(march, lands_on_every_break_and_starts_anew_at_jumps_only) {
  face_condition faces[] = {convects(300, rows(5, jump_x, jump_y)),
                            prescribed(rows(5, jump_x, jump_y))};
  for (int k = 0; k < 2; k++) {
    static notes n;
    memset(&n, 0, sizeof n);
    plate(faces[k], 700);
    ready();
    run_with(&n, 0.2);
    for (int i = 1; i < 5; i++) cr_assert(lands_on(&n, jump_x[i]), "%g", jump_x[i]);
    cr_assert_eq(n.jumps, 2, "the start and the jump, not the kinks: %d", n.jumps);
    cr_assert_eq(n.jump[0], 0);
    cr_assert_eq(n.jump[1], 100);
    cr_assert_float_eq(n.end[n.steps - 1], 700, 0);
    cr_assert_eq(n.ended, 1);
    for (int i = 1; i < n.steps; i++) cr_assert_gt(n.end[i], n.end[i - 1]);
    free_run(&r);
  }
}

Test(march, breaks_of_generation_and_of_logs_count_too) {
  static series generation;
  static const double x[] = {0, 222, 222, 500}, y[] = {1e5, 1e5, 9e5, 0};
  static notes n;
  memset(&n, 0, sizeof n);
  generation = rows(4, x, y);
  plate(convects(300, constant(400)), 150);
  m.layer[0].heat_generation = &generation;
  add_stage(&m, 600, convects(50, rows(5, jump_x, jump_y)), insulated());
  m.stage[1].faces.condition[0].medium.from_case_start = true;
  ready();
  run_with(&n, 0.2);
  cr_assert(lands_on(&n, 150));
  cr_assert(lands_on(&n, 333.3), "of the log, from the start of the case");
  cr_assert(lands_on(&n, 150 + 222), "of the generation, from the start of the stage");
  cr_assert(lands_on(&n, 750));
  free_run(&r);
  generation.from_case_start = true;
  memset(&n, 0, sizeof n);
  ready();
  run_with(&n, 0.2);
  cr_assert(lands_on(&n, 222) && lands_on(&n, 500));
  cr_assert_not(lands_on(&n, 150 + 222));
  /* 150 s + 72 s at 1e5 W/m3, then from 9e5 down to 0 over 278 s, in 0.04 m */
  double generated = 0.04 * (222 * 1e5 + 278 * 9e5 / 2);
  cr_assert_float_eq(r.stepper.heat[HEAT_GENERATED], generated, 1e-10 * generated);
  free_run(&r);
}

Test(march, stages_follow_each_other) {
  static notes n;
  memset(&n, 0, sizeof n);
  plate(convects(300, constant(700)), 100);
  add_stage(&m, 50.5, convects(1000, constant(300)), insulated());
  add_stage(&m, 7, insulated(), insulated());
  ready();
  run_with(&n, 0.2);
  static const double ends[] = {100, 150.5, 157.5};
  cr_assert_eq(n.stages, 3);
  cr_assert_eq(n.ended, 3);
  for (int i = 0; i < 3; i++) {
    cr_assert_float_eq(outcome.stage[i].end, ends[i], 1e-12);
    cr_assert_float_eq(outcome.stage[i].start, i ? ends[i - 1] : 0, 1e-12);
    cr_assert_float_eq(n.start[i], i ? ends[i - 1] : 0, 1e-12);
    cr_assert_eq(outcome.stage[i].ended_by, ENDED_LASTS);
    cr_assert(lands_on(&n, ends[i]));
  }
  cr_assert_eq(outcome.steps, n.steps);
  free_run(&r);
}

Test(march, imposed_durations_go_before_the_stages_own) {
  static notes n;
  memset(&n, 0, sizeof n);
  condition_node node = leaf(UNTIL_RISES_TO, whole_place(PLACE_MEAN), 350, 0);
  static const double durations[] = {321, 12};
  fault f;
  plate(convects(300, constant(700)), 100);
  end_stage_by(&m, 1, &node, 0, 5000);
  add_stage(&m, 50, convects(1000, constant(300)), insulated());
  ready();
  cr_assert_eq(march_with(&n, 0.2, durations, NULL, &f), STATUS_OK);
  cr_assert_eq(outcome.stage[0].end, 321);
  cr_assert_float_eq(outcome.stage[1].end, 333, 1e-12);
  free_run(&r);
}

/* ---- the start ---- */

Test(march, a_profile_keeps_its_mean_temperature) {
  /* 700 K up to 15 mm, then falls to 400 K at 40 mm: a jump is two rows at one depth */
  static const double x[] = {0, 0.015, 0.015, 0.04}, y[] = {700, 700, 600, 400};
  fault f;
  plate(insulated(), 10);
  m.the_case.start = (start){.kind = START_PROFILE, .profile = {4, x, y}};
  ready();
  cr_assert_eq(march_start(&m.the_case, &r.stepper, &f), STATUS_OK);
  double sum = 0;
  for (int i = 0; i < r.mesh.nodes; i++)
    sum += r.mesh.volume[i] * temperature_at(&r, r.stepper.state, i);
  double exact = 0.015 * 700 + 0.025 * 500;
  /* the cell with the jump is sampled in 16 parts: 100 K x 1/32 of a cell of 40/12 mm */
  cr_assert_float_eq(sum, exact, 100 * 0.04 / 12 / 32);
  cr_assert_float_eq(temperature_at(&r, r.stepper.state, 0), 700, 1e-9);
  free_run(&r);
}

Test(march, a_layer_of_its_own_start_goes_first) {
  fault f;
  plate(insulated(), 10);
  add_layer(&m, 0, 0.01, 1e-3)->start = 555;
  ready();
  cr_assert_eq(march_start(&m.the_case, &r.stepper, &f), STATUS_OK);
  cr_assert_float_eq(temperature_at(&r, r.stepper.state, 0), 300, 1e-9);
  cr_assert_float_eq(temperature_at(&r, r.stepper.state, r.mesh.nodes - 1), 555, 1e-9);
  free_run(&r);
}

Test(march, a_steady_start_is_the_steady_state_of_its_faces) {
  fault f;
  plate(convects(300, constant(700)), 10);
  m.the_case.start.kind = START_STEADY;
  m.the_case.start.faces =
      (faces){.count = 2, .condition = {prescribed(constant(900)), convects(1000, constant(400))}};
  ready();
  cr_assert_eq(march_start(&m.the_case, &r.stepper, &f), STATUS_OK);
  double flux = 500 / (0.04 / 40 + 1.0 / 1000);
  cr_assert_float_eq(temperature_at(&r, r.stepper.state, 0), 900, 1e-8);
  cr_assert_float_eq(temperature_at(&r, r.stepper.state, r.mesh.nodes - 1), 400 + flux / 1000,
                     1e-8);
  free_run(&r);
}

/* ---- energy ---- */

/* Every kind of condition, two shapes of latent heat, generation, contact, jumps. */
static void eventful(const char *name, int variant) {
  static series generation;
  generation = wave(2e5, 1e5, 900, 0);
  make_case(&m, name);
  int a = add_fire_code_steel(&m), b = add_material(&m, 2, 2500, 900);
  add_latent(&m, b, 80e3, 600, variant ? 602 : 600);
  set_bore(&m, 0.03);
  add_layer(&m, a, 0.02, 0);
  add_layer(&m, b, 0.015, 2e-4)->heat_generation = &generation;
  start_at(&m, 320);
  face_condition shocked =
      variant ? prescribed(rows(5, jump_x, jump_y)) : convects(800, rows(5, jump_x, jump_y));
  add_stage(&m, 500, shocked, furnace(30, 0.8, constant(1200)));
  add_stage(&m, 300, heated(constant(2e4)), prescribed(constant(800)));
  add_stage(&m, 200, convects(2500, constant(310)), radiates(0.9, constant(300)));
}

/* Heat content of the body by volumes and by the integral of the curves themselves. */
static double content_by_hand(void) {
  double sum = 0;
  for (int l = 0; l < r.mesh.layers; l++)
    for (int i = r.mesh.layer[l].first; i <= r.mesh.layer[l].last; i++)
      sum += r.mesh.volume[i] * r.stepper.state[i];
  return sum;
}

Test(march, what_enters_is_what_is_stored) {
  static const char *const names[] = {"plate", "cylinder", "sphere"};
  for (int s = 0; s < 3; s++)
    for (int variant = 0; variant < 2; variant++) {
      static notes n;
      fault f;
      memset(&n, 0, sizeof n);
      eventful(names[s], variant);
      make_tables(&r, &m, 200, 1500, 512);
      make_mesh(&r, &m, 24, 1, false);
      make_stepper(&r);
      cr_assert_eq(march_start(&m.the_case, &r.stepper, &f), STATUS_OK);
      double before = content_by_hand();
      run_with(&n, 0.5);
      double stored = content_by_hand() - before;
      const double *q = r.stepper.heat;
      double given = q[HEAT_FIRST] + q[HEAT_LAST] + q[HEAT_GENERATED];
      /* to be below 1e-10 of the heat that moved, at any tolerance */
      cr_assert_float_eq(given, stored, 1e-10 * outcome.heat_moved, "%s %d: %.15g against %.15g",
                         names[s], variant, given, stored);
      cr_assert_float_eq(outcome.final_content - outcome.initial_content, stored,
                         1e-12 * outcome.heat_moved);
      free_run(&r);
    }
}

/* The heat told by the method against Simpson's rule over the flux along the steps: an integral of
   the same flow by other means, equal within the steps' tolerance. */
Test(march, heat_told_is_the_integral_of_the_flux) {
  static notes n;
  memset(&n, 0, sizeof n);
  n.integrate = true;
  make_case(&m, "cylinder");
  set_bore(&m, 0.03);
  add_layer(&m, add_fire_code_steel(&m), 0.02, 0);
  start_at(&m, 320);
  add_stage(&m, 900, convects(400, rows(5, jump_x, jump_y)), furnace(30, 0.8, constant(1100)));
  ready();
  run_with(&n, 0.001);
  for (int end = 0; end < 2; end++)
    cr_assert_float_eq(n.flux_heat[end], r.stepper.heat[end], 1e-6 * outcome.heat_moved,
                       "%.12g against %.12g", n.flux_heat[end], r.stepper.heat[end]);
  free_run(&r);
}

Test(march, a_constant_flux_gives_flux_times_area_times_time) {
  static notes n;
  memset(&n, 0, sizeof n);
  plate(heated(constant(3e4)), 1000);
  ready();
  run_with(&n, 0.5);
  cr_assert_float_eq(r.stepper.heat[HEAT_FIRST], 3e7, 1e-12 * 3e7);
  cr_assert_eq(r.stepper.heat[HEAT_LAST], 0);
  free_run(&r);
}

/* ---- accuracy of steps ---- */

Test(march, error_follows_the_tolerance) {
  double surface[3];
  static const double tolerances[] = {1, 0.05, 1e-5};
  for (int k = 0; k < 3; k++) {
    static notes n;
    memset(&n, 0, sizeof n);
    plate(convects(1500, rows(5, jump_x, jump_y)), 360);
    ready();
    run_with(&n, tolerances[k]);
    surface[k] = temperature_at(&r, r.stepper.state, 0);
    free_run(&r);
  }
  /* errors of steps add up, but a diffusing body forgets: a few tolerances */
  cr_assert_float_eq(surface[0], surface[2], 3 * tolerances[0]);
  cr_assert_float_eq(surface[1], surface[2], 3 * tolerances[1]);
}

Test(march, a_sine_is_not_stepped_over) {
  static notes n;
  memset(&n, 0, sizeof n);
  plate(convects(1, wave(400, 50, 160, 0)),
        1600); /* hardly felt: the error alone would allow more */
  ready();
  run_with(&n, 1);
  for (int i = 1; i < n.steps; i++) cr_assert_leq(n.end[i] - n.end[i - 1], 10 + 1e-9);
  free_run(&r);
}

/* ---- control ---- */

typedef struct controller {
  int calls, allowed;
  status then;
  double last;
  notes *notes;
  int steps_when_stopped;
} controller;

static status go_on(void *self, double fraction) {
  controller *c = self;
  cr_assert(fraction >= 0.25 && fraction <= 0.75, "%g", fraction);
  cr_assert_geq(fraction, c->last);
  c->last = fraction;
  if (c->calls++ < c->allowed) return STATUS_OK;
  c->steps_when_stopped = c->notes->steps;
  return c->then;
}

Test(march, cancellation_returns_at_once_and_says_where) {
  static const status reasons[] = {STATUS_CANCELLED, STATUS_OUT_OF_TIME};
  for (int k = 0; k < 4; k++) {
    static notes n;
    memset(&n, 0, sizeof n);
    controller c = {.allowed = k, .then = reasons[k % 2], .notes = &n};
    solve_control control = {go_on, &c};
    fault f = {0};
    plate(convects(1500, rows(5, jump_x, jump_y)), 360);
    add_stage(&m, 500, convects(3000, wave(400, 50, 16, 0)), insulated());
    ready();
    cr_assert_eq(march_with(&n, 0.01, NULL, &control, &f), reasons[k % 2]);
    cr_assert_eq(n.steps, c.steps_when_stopped, "no step after the word");
    cr_assert_eq(c.calls, k + 1);
    cr_assert_eq(f.status, reasons[k % 2]);
    cr_assert_eq(f.stage, n.stages - 1);
    cr_assert(f.time >= n.begun && f.time <= 860);
    free_run(&r);
  }
}

Test(march, control_is_asked_often) {
  static notes n;
  memset(&n, 0, sizeof n);
  controller c = {.allowed = 1 << 20, .notes = &n};
  solve_control control = {go_on, &c};
  fault f;
  plate(convects(1500, wave(400, 50, 16, 0)), 2000);
  ready();
  cr_assert_eq(march_with(&n, 0.1, NULL, &control, &f), STATUS_OK);
  cr_assert_gt(n.steps, 1000);
  cr_assert_geq(c.calls, n.steps / 16);
  free_run(&r);
}

Test(march, a_value_that_is_not_finite_names_stage_and_time) {
  static notes n;
  memset(&n, 0, sizeof n);
  fault f = {0};
  plate(convects(300, constant(400)), 100);
  add_stage(&m, 50, heated(constant(NAN)), insulated());
  ready();
  cr_assert_eq(march_with(&n, 0.2, NULL, NULL, &f), STATUS_NOT_FINITE);
  cr_assert_eq(f.stage, 1);
  cr_assert_float_eq(f.time, 100, 1e-6);
  cr_assert_not_null(strstr(f.is, "two"), "%s", f.is);
  free_run(&r);
}

static void count_only(void *self, stepper *s, bool ends) {
  (void)s;
  (void)ends;
  ++*(int *)self;
}

static void begin_only(void *self, int stage, double start, stepper *s) {
  (void)self;
  (void)stage;
  (void)start;
  (void)s;
}

Test(march, steps_have_a_limit) {
  int steps = 0;
  march_watch w = {.self = &steps,
                   .begins = begin_only,
                   .fulfilled_at_start = never_at_start,
                   .event = never,
                   .accepted = count_only};
  march_request q = {.the_case = &m.the_case, .tolerance = 1, .watch = &w};
  fault f = {0};
  plate(convects(10, wave(400, 5, 1.6, 0)), 0.1 * LIMIT_STEPS * 1.01);
  make_tables(&r, &m, 200, 1500, 16);
  make_mesh(&r, &m, 4, 1, false);
  make_stepper(&r);
  cr_assert_eq(march(&q, &r.stepper, &outcome, &f), STATUS_BEYOND_LIMIT);
  cr_assert_geq(steps, LIMIT_STEPS - 1);
  cr_assert_leq(steps, LIMIT_STEPS + 1);
  cr_assert_eq(f.stage, 0);
  free_run(&r);
}

/* ---- steady ---- */

Test(march, a_steady_stage_is_told_and_takes_no_time) {
  static notes n;
  memset(&n, 0, sizeof n);
  plate(convects(300, constant(700)), 100);
  add_stage(&m, 0, convects(300, constant(700)), convects(100, constant(300)));
  ready();
  run_with(&n, 0.2);
  cr_assert_eq(n.rests, 1);
  cr_assert(outcome.rested);
  cr_assert_lt(outcome.rest_residual, 1e-10);
  cr_assert_eq(outcome.stage[1].ended_by, ENDED_STEADY);
  cr_assert_eq(outcome.stage[1].end, outcome.stage[1].start);
  double flux = 400 / (1.0 / 300 + 0.04 / 40 + 1.0 / 100);
  cr_assert_float_eq(temperature_at(&r, r.stepper.state, 0), 700 - flux / 300, 1e-8);
  free_run(&r);
}

/* ---- memory ---- */

typedef struct spy {
  const march_watch *inner;
  int at_first, at_last, steps;
} spy;

static void spy_begins(void *self, int stage, double start, stepper *s) {
  spy *y = self;
  y->inner->begins(y->inner->self, stage, start, s);
}

static bool spy_at_start(void *self, stepper *s) {
  spy *y = self;
  return y->inner->fulfilled_at_start(y->inner->self, s);
}

static double spy_event(void *self, stepper *s) {
  spy *y = self;
  return y->inner->event(y->inner->self, s);
}

static void spy_accepted(void *self, stepper *s, bool ends) {
  spy *y = self;
  if (!y->steps++) y->at_first = allocations;
  y->inner->accepted(y->inner->self, s, ends);
  y->at_last = allocations;
}

static void spy_jumped(void *self, double t) {
  spy *y = self;
  y->inner->jumped(y->inner->self, t);
}

Test(march, nothing_is_allocated_between_the_first_and_the_last_step) {
  static const double looks[] = {0, 33, 120, 121, 480, 700};
  static trial t;
  eventful("cylinder", 1);
  add_point(&m, 0.02, 0);
  add_point(&m, 0.036, 1);
  add_column(&m, COLUMN_PLACE, point_place(0), 0);
  add_column(&m, COLUMN_PLACE, whole_place(PLACE_SECTION_DIFFERENCE), 0);
  add_column(&m, COLUMN_HEAT_FLOW, (place){0}, 1);
  history_every(&m, 10);
  fields_at(&m, 6, looks);
  condition_node node = leaf(UNTIL_FALLS_TO, whole_place(PLACE_COLDEST), 400, 0);
  end_stage_by(&m, 1, &node, 5, 900);
  add_figure(&m, "peak", whole_place(PLACE_HOTTEST));
  add_figure(&m, "at", point_place(1));
  make_attempt(&t, &m, 200, 1500, 24);
  spy y = {.inner = &t.attempt->observer.march};
  march_watch w = {.self = &y,
                   .begins = spy_begins,
                   .fulfilled_at_start = spy_at_start,
                   .event = spy_event,
                   .accepted = spy_accepted,
                   .jumped = spy_jumped};
  march_request q = {.the_case = &m.the_case, .tolerance = 0.1, .watch = &w};
  int before = allocations;
  status s = march(&q, &t.attempt->stepper, &t.attempt->outcome, &t.fault);
  cr_assert_eq(s, STATUS_OK, "%s", s ? t.fault.is : "");
  cr_assert_gt(before, 0, "the counter counts");
  cr_assert_gt(y.steps, 200);
  cr_assert_eq(y.at_last, y.at_first);
  cr_assert_eq(allocations, before, "nor anywhere else in a march");
  cr_assert_gt(t.attempt->observer.history.rows, 60);
  cr_assert_geq(t.attempt->observer.fields, 6);
  free_attempt(&t);
}
