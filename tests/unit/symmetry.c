/* symmetry: a plate that is its own mirror image is found, and half of it answers as the whole
 * does. */
#include "symmetry.h"

#include "make_attempt.h"

static made m;

/* Two or three layers with contacts and generation; a shock and a quench. */
static void plate(int layers) {
  static series generation;
  static const double x[] = {0, 200, 200, 900}, y[] = {500, 700, 1100, 600};
  generation = wave(1e5, 5e4, 700, 0);
  make_case(&m, "plate");
  int a = add_material(&m, 1, 7800, 1), b = add_material(&m, 3, 2500, 900);
  set_linear(&m, a, OF_CONDUCTIVITY, 55, -0.03);
  set_linear(&m, a, OF_SPECIFIC_HEAT, 440, 0.4);
  add_layer(&m, a, 0.012, 0);
  if (layers == 3) add_layer(&m, b, 0.02, 2e-4)->heat_generation = &generation;
  add_layer(&m, a, 0.012, 2e-4);
  start_at(&m, 320);
  face_condition heating = furnace(80, 0.7, rows(4, x, y));
  add_stage(&m, 900, heating, heating);
  add_stage(&m, 100, convects(900, constant(310)), convects(900, constant(310)));
  double width = layers == 3 ? 0.044 : 0.024;
  add_point(&m, 0.005, 0);
  add_point(&m, width - 0.005, layers - 1);
  add_point(&m, width, layers - 1);
  add_point(&m, layers == 3 ? 0.029 : 0.0135, 1);
  for (int i = 0; i < 4; i++) add_column(&m, COLUMN_PLACE, point_place(i), 0);
  static const place_kind kinds[] = {PLACE_COLDEST, PLACE_HOTTEST, PLACE_MEAN,
                                     PLACE_SECTION_DIFFERENCE, PLACE_MID_WALL};
  for (int i = 0; i < 5; i++) add_column(&m, COLUMN_PLACE, whole_place(kinds[i]), 0);
  add_column(&m, COLUMN_PLACE, (place){PLACE_MEAN, 0, layers - 1}, 0);
  add_column(&m, COLUMN_HEAT_FLOW, (place){0}, 0);
  add_column(&m, COLUMN_HEAT_FLOW, (place){0}, 1);
  add_column(&m, COLUMN_HEAT_FLOW, (place){0}, -1);
  history_every(&m, 37);
  static const double looks[] = {150, 850, 930};
  fields_at(&m, 3, looks);
}

static attempt *run(trial *t, int cells, bool halved) {
  memset(t, 0, sizeof *t);
  arena_init(&t->memory, 0);
  cr_assert_eq(properties_build(&m.the_case, 280, 1200, &t->property, &t->memory, &t->fault),
               STATUS_OK);
  t->plan.cells = cells;
  t->plan.halved = halved;
  for (int i = 0; i < LIMIT_LAYERS; i++) t->plan.end_cell[i][0] = t->plan.end_cell[i][1] = INFINITY;
  cr_assert_eq(attempt_new(&t->attempt, &m.the_case, &t->plan, t->property, 1, NULL, &t->fault),
               STATUS_OK);
  run_attempt(t, 0.1);
  return t->attempt;
}

/* The whole is asked for through a profile that says the same as the uniform start. */
static void name_it_asymmetric(void) {
  static const double x[] = {0, 1}, y[] = {320, 320};
  cr_assert(case_is_symmetric(&m.the_case));
  m.the_case.start = (start){.kind = START_PROFILE, .profile = {2, x, y}};
  cr_assert_not(case_is_symmetric(&m.the_case));
}

/* Round-off of sums taken in another order, carried through some hundred steps of equal length. */
#define SAME(a, b)                                                                                 \
  cr_assert_float_eq(a, b, 1e-9 * fmax(fabs(a), 1), "%.15g, %.15g", (double)(a), (double)(b))

static void halves_agree(int layers, int half_cells) {
  static trial half_trial, full_trial;
  plate(layers);
  attempt *half = run(&half_trial, half_cells, true);
  name_it_asymmetric();
  attempt *full = run(&full_trial, 2 * half_cells, false);
  cr_assert_eq(mesh_whole_nodes(&half->mesh), full->mesh.nodes);
  for (int l = 0; l < half->mesh.layers; l++) {
    int whole = full->mesh.layer[l].last - full->mesh.layer[l].first;
    int shared = half->mesh.middle_shared && l == half->mesh.layers - 1 ? 2 : 1;
    int own = half->mesh.layer[l].last - half->mesh.layer[l].first;
    cr_assert_eq(shared * own, whole, "layer %d: %d x %d cells against %d", l, shared, own, whole);
  }
  cr_assert_eq(half->outcome.steps, full->outcome.steps, "%d, %d", half->outcome.steps,
               full->outcome.steps);

  const history *a = &half->observer.history, *b = &full->observer.history;
  cr_assert_eq(a->rows, b->rows);
  cr_assert_gt(a->rows, 25);
  int columns = a->columns;
  for (int i = 0; i < a->rows; i++) {
    SAME(a->time[i], b->time[i]);
    for (int k = 0; k < columns; k++) {
      double scale = k >= columns - 3 ? 1e5 : 1; /* W/m2; K */
      cr_assert_float_eq(a->value[i * columns + k], b->value[i * columns + k],
                         1e-9 * fmax(scale, fabs(b->value[i * columns + k])),
                         "row %d column %d: %.12g, %.12g", i, k, a->value[i * columns + k],
                         b->value[i * columns + k]);
    }
  }
  cr_assert_eq(half->observer.fields, full->observer.fields);
  for (int k = 0; k < half->observer.fields; k++) {
    const field *f = &half->observer.field[k], *g = &full->observer.field[k];
    cr_assert_eq(f->nodes, g->nodes);
    for (int i = 0; i < f->nodes; i++) {
      cr_assert_float_eq(f->position[i], g->position[i], 1e-15);
      SAME(f->temperature[i], g->temperature[i]);
    }
  }
  const double *p = half->stepper.heat, *q = full->stepper.heat;
  cr_assert_float_eq(p[HEAT_FIRST], q[HEAT_FIRST], 1e-9 * full->outcome.heat_moved);
  cr_assert_float_eq(p[HEAT_FIRST], q[HEAT_LAST], 1e-9 * full->outcome.heat_moved);
  cr_assert_float_eq(2 * p[HEAT_GENERATED], q[HEAT_GENERATED], 1e-9 * full->outcome.heat_moved);
  cr_assert_float_eq(2 * half->outcome.final_content, full->outcome.final_content,
                     1e-9 * full->outcome.final_content);
  free_attempt(&half_trial);
  free_attempt(&full_trial);
}

Test(symmetry, half_of_three_layers_is_the_whole) {
  halves_agree(3, 24);
}

Test(symmetry, half_of_two_layers_with_a_contact_between_is_the_whole) {
  halves_agree(2, 12);
}

Test(symmetry, solved_either_way_within_the_errors_stated) {
  heat_result *half, *full;
  fault f;
  plate(3);
  m.the_case.numerical_error = 0.2;
  cr_assert_eq(solve_case(&m.the_case, NULL, &half, &f), STATUS_OK, "%s", f.is);
  name_it_asymmetric();
  cr_assert_eq(solve_case(&m.the_case, NULL, &full, &f), STATUS_OK, "%s", f.is);
  cr_assert_not_null(strstr(half->numerics.method, "symmetry"));
  cr_assert_null(strstr(full->numerics.method, "symmetry"));
  double allowed = half->numerics.error_estimate + full->numerics.error_estimate;
  for (int i = 0; i < half->history.rows; i++)
    for (int k = 0; k < half->history.columns - 3; k++) {
      double a = half->history.value[i * half->history.columns + k];
      double b = full->history.value[i * full->history.columns + k];
      cr_assert_float_eq(a, b, allowed, "row %d column %d: %g, %g", i, k, a, b);
    }
  const energy_balance *p = &half->energy, *q = &full->energy;
  cr_assert_eq(p->absorbed[0], p->absorbed[1]);
  /* the heat of 0.2 K in 44 mm of steel, against some 1e7 J/m2 */
  cr_assert_float_eq(p->absorbed[0], q->absorbed[0], 0.2 * 0.044 * 5e6);
  cr_assert_float_eq(p->stored, q->stored, 0.2 * 0.044 * 5e6);
  cr_assert_float_eq(p->generated, q->generated, 1e-9 * fabs(q->generated));
  heat_result_free(half);
  heat_result_free(full);
}

/* ---- what breaks the symmetry ---- */

typedef void change(void);

static void thicker(void) {
  m.layer[2].thickness *= 1 + 1e-12;
}
static void other_material(void) {
  m.layer[2].material = 1;
}
static void other_contact(void) {
  m.layer[0].contact = 3e-4;
}
static void one_starts_hot(void) {
  m.layer[2].start = 321;
}
static void one_generates(void) {
  static series g;
  g = constant(1);
  m.layer[0].heat_generation = &g;
}
static void second_stage_differs(void) {
  m.stage[1].faces.condition[1].h.over_time.value = 901;
}
static void other_emissivity(void) {
  m.stage[0].faces.condition[1].emissivity = 0.71;
}
static void other_view(void) {
  m.stage[0].faces.condition[0].view_factor = 0.9;
}
static void other_medium(void) {
  m.stage[0].faces.condition[1].medium = constant(500);
}
static void other_surroundings(void) {
  m.stage[0].faces.condition[1].surroundings = constant(5);
}
static void extra_flux(void) {
  m.stage[1].faces.condition[0].flux = constant(1);
}
static void insulated_back(void) {
  m.stage[1].faces.condition[1] = insulated();
}
static void from_a_log(void) {
  m.stage[0].faces.condition[1].medium.from_case_start = true;
}
static void other_sine(void) {
  m.stage[1].faces.condition[0].medium = wave(300, 5, 100, 0);
  m.stage[1].faces.condition[1].medium = wave(300, 5, 100, 1e-9);
}
static void other_h_table(void) {
  static const double x[] = {300, 400}, y[] = {10, 20}, z[] = {10, 21};
  for (int i = 0; i < 2; i++) m.stage[1].faces.condition[i].h.by_surface_temperature = true;
  m.stage[1].faces.condition[0].h.over_temperature = (table){2, x, y};
  m.stage[1].faces.condition[1].h.over_temperature = (table){2, x, z};
}
static void steady_start_differs(void) {
  m.the_case.start.kind = START_STEADY;
  m.the_case.start.faces =
      (faces){.count = 2, .condition = {prescribed(constant(400)), prescribed(constant(401))}};
}

Test(symmetry, any_difference_of_the_sides_breaks_it) {
  static change *const changes[] = {thicker,
                                    other_material,
                                    other_contact,
                                    one_starts_hot,
                                    one_generates,
                                    other_emissivity,
                                    other_view,
                                    other_medium,
                                    other_surroundings,
                                    extra_flux,
                                    insulated_back,
                                    from_a_log,
                                    other_sine,
                                    other_h_table,
                                    steady_start_differs,
                                    second_stage_differs};
  for (int i = 0; i < COUNT_OF(changes); i++) {
    plate(3);
    cr_assert(case_is_symmetric(&m.the_case));
    changes[i]();
    cr_assert_not(case_is_symmetric(&m.the_case), "change %d", i);
  }
}

Test(symmetry, equal_series_in_different_memory_are_equal) {
  static const double x1[] = {0, 10}, y1[] = {300, 400}, x2[] = {0, 10}, y2[] = {300, 400};
  static series g1, g2;
  plate(3);
  m.stage[0].faces.condition[0] = prescribed(rows(2, x1, y1));
  m.stage[0].faces.condition[1] = prescribed(rows(2, x2, y2));
  cr_assert(case_is_symmetric(&m.the_case));
  g1 = g2 = constant(5);
  m.layer[0].heat_generation = &g1;
  m.layer[2].heat_generation = &g2;
  cr_assert(case_is_symmetric(&m.the_case));
  m.the_case.start.kind = START_STEADY;
  m.the_case.start.faces =
      (faces){.count = 2, .condition = {prescribed(constant(400)), prescribed(constant(400))}};
  cr_assert(case_is_symmetric(&m.the_case));
}

Test(symmetry, rounds_have_none) {
  make_case(&m, "cylinder");
  add_layer(&m, add_material(&m, 40, 8000, 500), 0.05, 0);
  start_at(&m, 300);
  add_stage(&m, 10, insulated(), insulated());
  cr_assert_not(case_is_symmetric(&m.the_case));
}
