/* make_case.h: heat cases built in C for the unit tests. A `made` holds all that its case points
   to, so it must stay where it is; make one static or on the stack of the test. SI and kelvin. */
#ifndef CORESOAK_TESTS_MAKE_CASE_H
#define CORESOAK_TESTS_MAKE_CASE_H

#include "case.h"
#include "figure.h"
#include "limit.h"
#include "shape.h"

#include <math.h>
#include <string.h>

enum { MADE_MATERIALS = 4, MADE_PIECES = 24, MADE_LAYERS = 6, MADE_STAGES = 6, MADE_ITEMS = 24 };

typedef struct made {
  heat_case the_case;
  material material[MADE_MATERIALS];
  piece piece[MADE_MATERIALS][3][MADE_PIECES]; /* k, density, c */
  latent_heat latent[MADE_MATERIALS][4];
  layer layer[MADE_LAYERS];
  stage stage[MADE_STAGES];
  condition_node node[MADE_STAGES][8];
  point point[MADE_ITEMS];
  column column[MADE_ITEMS];
  instant at[MADE_ITEMS], field_at[MADE_ITEMS];
  figure figure[8];
  named_series named[2];
} made;

enum { OF_CONDUCTIVITY, OF_DENSITY, OF_SPECIFIC_HEAT };

/* ---- series and conditions ---- */

static inline series constant(double value) {
  return (series){.kind = SERIES_CONSTANT, .value = value};
}

static inline series rows(int count, const double *x, const double *y) {
  return (series){.kind = SERIES_TABLE, .table = {count, x, y}};
}

static inline series wave(double mean, double amplitude, double period, double phase) {
  return (series){
      .kind = SERIES_SINE, .value = mean, .amplitude = amplitude, .period = period, .phase = phase};
}

static inline face_condition insulated(void) {
  return (face_condition){.kind = FACE_INSULATED};
}

static inline face_condition prescribed(series temperature) {
  return (face_condition){.kind = FACE_PRESCRIBED, .temperature = temperature};
}

static inline face_condition heated(series flux) {
  return (face_condition){.kind = FACE_EXCHANGE, .flux = flux};
}

static inline face_condition convects(double h, series medium) {
  return (face_condition){.kind = FACE_EXCHANGE,
                          .has_convection = true,
                          .h = {.over_time = constant(h)},
                          .medium = medium};
}

static inline face_condition radiates(double emissivity, series surroundings) {
  return (face_condition){.kind = FACE_EXCHANGE,
                          .has_radiation = true,
                          .emissivity = emissivity,
                          .view_factor = 1,
                          .surroundings = surroundings};
}

static inline face_condition furnace(double h, double emissivity, series temperature) {
  face_condition c = convects(h, temperature);
  c.has_radiation = c.furnace = true;
  c.emissivity = emissivity;
  c.view_factor = 1;
  c.surroundings = temperature;
  return c;
}

/* ---- the case ---- */

static inline void make_case(made *m, const char *shape_name) {
  memset(m, 0, sizeof *m);
  heat_case *c = &m->the_case;
  c->part.shape = shape_named(shape_name);
  for (int i = 0; i < MOST_SIZES; i++) c->part.sizes[i] = NAN;
  c->part.material = 0;
  c->part.layers.items = m->layer;
  c->materials.items = m->material;
  c->stages.items = m->stage;
  c->points.items = m->point;
  c->figures.items = m->figure;
  c->series.items = m->named;
  c->numerical_error = USUAL_NUMERICAL_ERROR;
}

static inline curve *made_curve(made *m, int of_material, int which) {
  material *a = &m->material[of_material];
  return which == OF_CONDUCTIVITY ? &a->conductivity
         : which == OF_DENSITY    ? &a->density
                                  : &a->specific_heat;
}

static inline void add_piece(made *m, int of_material, int which, piece given) {
  curve *c = made_curve(m, of_material, which);
  piece *items = m->piece[of_material][which];
  items[c->count] = given;
  c->pieces = items;
  c->count++;
}

static inline void set_constant(made *m, int of_material, int which, double value) {
  made_curve(m, of_material, which)->count = 0;
  add_piece(m, of_material, which, (piece){.from = 1, .to = 5000, .poly = {value}});
}

/* value = a + b (T - 273.15 K) everywhere. */
static inline void set_linear(made *m, int of_material, int which, double a, double b) {
  made_curve(m, of_material, which)->count = 0;
  add_piece(m, of_material, which, (piece){.from = 1, .to = 5000, .poly = {a, b}});
}

static inline int add_material(made *m, double k, double density, double specific_heat) {
  int i = m->the_case.materials.count++;
  m->material[i] = (material){.name = "matter",
                              .title = "",
                              .source = "",
                              .revision = "",
                              .valid_from = -INFINITY,
                              .valid_to = INFINITY,
                              .max_service = NAN};
  m->material[i].latent.items = m->latent[i];
  set_constant(m, i, OF_CONDUCTIVITY, k);
  set_constant(m, i, OF_DENSITY, density);
  set_constant(m, i, OF_SPECIFIC_HEAT, specific_heat);
  return i;
}

static inline void add_latent(made *m, int of_material, double heat, double from, double to) {
  m->latent[of_material][m->material[of_material].latent.count++] = (latent_heat){heat, from, to};
}

/* Carbon steel of EN 1993-1-2:2005, 3.4.1.2 (specific heat, its rational pieces included)
   and 3.4.1.3 (conductivity), density 7850 kg/m3 (3.2.2). */
static inline int add_fire_code_steel(made *m) {
  int i = add_material(m, 1, 7850, 1);
  double zero = 273.15;
  made_curve(m, i, OF_CONDUCTIVITY)->count = made_curve(m, i, OF_SPECIFIC_HEAT)->count = 0;
  add_piece(m, i, OF_CONDUCTIVITY, (piece){20 + zero, 800 + zero, {54, -3.33e-2}, 0, 0});
  add_piece(m, i, OF_CONDUCTIVITY, (piece){800 + zero, 1200 + zero, {27.3}, 0, 0});
  add_piece(m, i, OF_SPECIFIC_HEAT,
            (piece){20 + zero, 600 + zero, {425, 7.73e-1, -1.69e-3, 2.22e-6}, 0, 0});
  add_piece(m, i, OF_SPECIFIC_HEAT, (piece){600 + zero, 735 + zero, {666}, -13002, 738});
  add_piece(m, i, OF_SPECIFIC_HEAT, (piece){735 + zero, 900 + zero, {545}, 17820, 731});
  add_piece(m, i, OF_SPECIFIC_HEAT, (piece){900 + zero, 1200 + zero, {650}, 0, 0});
  return i;
}

/* The next layer outwards; the one before it gets `contact` towards this one. */
static inline layer *add_layer(made *m, int of_material, double thickness, double contact) {
  static const char *const names[MADE_LAYERS] = {"layer_1", "layer_2", "layer_3",
                                                 "layer_4", "layer_5", "layer_6"};
  int i = m->the_case.part.layers.count++;
  m->layer[i] =
      (layer){.name = names[i], .material = of_material, .thickness = thickness, .start = NAN};
  if (i > 0) m->layer[i - 1].contact = contact;
  return &m->layer[i];
}

static inline void set_bore(made *m, double diameter) {
  m->the_case.part.sizes[1] = diameter;
}

static inline void start_at(made *m, double temperature) {
  m->the_case.start = (start){.kind = START_UNIFORM, .temperature = temperature};
}

static inline stage *add_stage(made *m, double lasts, face_condition first, face_condition last) {
  static const char *const names[MADE_STAGES] = {"one", "two", "three", "four", "five", "six"};
  int i = m->the_case.stages.count++;
  m->stage[i] = (stage){.name = names[i],
                        .end = lasts > 0 ? STAGE_LASTS : STAGE_STEADY,
                        .steady = !(lasts > 0),
                        .lasts = lasts,
                        .time_limit = NAN};
  m->stage[i].faces.count = 2;
  m->stage[i].faces.condition[0] = first;
  m->stage[i].faces.condition[1] = last;
  return &m->stage[i];
}

static inline condition_node leaf(until_kind kind, place of, double level, double band) {
  return (condition_node){.kind = kind, .of = {.place = of}, .level = level, .band = band};
}

/* Makes the last stage end by a condition. */
static inline void end_stage_by(made *m, int count, const condition_node *nodes, double held_for,
                                double time_limit) {
  int i = m->the_case.stages.count - 1;
  memcpy(m->node[i], nodes, (size_t)count * sizeof *nodes);
  m->stage[i].end = STAGE_UNTIL;
  m->stage[i].until = (until){.count = count, .nodes = m->node[i], .held_for = held_for};
  m->stage[i].time_limit = time_limit;
}

static inline place point_place(int index) {
  return (place){.kind = PLACE_POINT, .index = index, .layer = -1};
}

static inline place whole_place(place_kind kind) {
  return (place){.kind = kind, .layer = -1};
}

static inline place face_place(int face) {
  return (place){.kind = PLACE_FACE, .index = face, .layer = -1};
}

/* A point, also a column of the history. */
static inline int add_point(made *m, double coordinate, int in_layer) {
  static const char *const names[MADE_ITEMS] = {"a", "b", "c", "d", "e", "f", "g", "h",
                                                "i", "j", "k", "l", "m", "n", "o", "p",
                                                "q", "r", "s", "t", "u", "v", "w", "x"};
  int i = m->the_case.points.count++;
  m->point[i] = (point){.name = names[i], .at = {.coordinate = {coordinate}, .layer = in_layer}};
  return i;
}

static inline int add_column(made *m, column_kind kind, place of, int index) {
  output_request *r = &m->the_case.output.history;
  int i = r->of.count++;
  m->column[i] = (column){.kind = kind, .name = "column", .place = of, .index = index};
  r->of.items = m->column;
  return i;
}

/* A figure of a kind that takes a place; its other members are unset. */
static inline figure *add_figure(made *m, const char *kind, place of) {
  static const char *const names[] = {"f1", "f2", "f3", "f4", "f5", "f6", "f7", "f8"};
  int i = m->the_case.figures.count++;
  m->figure[i] = (figure){.name = names[i],
                          .kind = figure_kind_named(kind),
                          .of = {.place = of},
                          .rises_to = NAN,
                          .falls_to = NAN,
                          .above = NAN,
                          .below = NAN,
                          .from = NAN,
                          .to = NAN,
                          .over = NAN,
                          .face = -1};
  return &m->figure[i];
}

static inline void history_every(made *m, double every) {
  m->the_case.output.history.times = OUTPUT_EVERY;
  m->the_case.output.history.every = every;
}

static inline void history_at(made *m, int count, const double *times) {
  output_request *r = &m->the_case.output.history;
  r->times = OUTPUT_AT;
  r->at.count = count;
  r->at.items = m->at;
  for (int i = 0; i < count; i++) m->at[i] = (instant){.time = times[i], .end_of_stage = -1};
}

static inline void fields_at(made *m, int count, const double *times) {
  output_request *r = &m->the_case.output.fields;
  r->times = OUTPUT_AT;
  r->at.count = count;
  r->at.items = m->field_at;
  for (int i = 0; i < count; i++) m->field_at[i] = (instant){.time = times[i], .end_of_stage = -1};
}

#endif
