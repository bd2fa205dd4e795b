/* advice.c: what a plant engineer would say of a case before it runs, where a wrong answer would
   look right: the part and its faces. Times and targets are in advice_schedule.c. */
#include "advice.h"
#include "physics.h"
#include "shape.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#define EUTECTOID (727 + ZERO_CELSIUS) /* A1 of the iron-carbon diagram */
#define RADIATION_COUNTS                                                                           \
  (500 + ZERO_CELSIUS) /* common practice: above it radiation is no correction */

enum { POINTER = 96, NAMES = 160 };

static bool same_series(const series *a, const series *b) {
  if (a->kind != b->kind) return false;
  if (a->kind == SERIES_TABLE) return a->table.x == b->table.x;
  return a->kind == SERIES_NONE || a->value == b->value;
}

static bool same_condition(const face_condition *a, const face_condition *b) {
  return a->kind == b->kind && a->assumed == b->assumed && a->furnace == b->furnace &&
         a->has_convection == b->has_convection && a->has_radiation == b->has_radiation &&
         same_series(&a->temperature, &b->temperature) && same_series(&a->flux, &b->flux) &&
         same_series(&a->medium, &b->medium) && same_series(&a->surroundings, &b->surroundings) &&
         same_series(&a->h.over_time, &b->h.over_time) &&
         a->h.over_temperature.x == b->h.over_temperature.x;
}

/* "/stages/2/faces/outer"; one condition for all faces was written once, so it has no face in its
 * pointer. */
static void face_pointer(const heat_case *c, int stage, int face, char at[POINTER]) {
  const faces *f = &c->stages.items[stage].faces;
  bool same = true;
  for (int i = 0; i < f->count; i++) same &= same_condition(&f->condition[i], &f->condition[face]);
  if (same)
    snprintf(at, POINTER, "/stages/%d/faces", stage);
  else
    snprintf(at, POINTER, "/stages/%d/faces/%s", stage, c->part.shape->faces[face]);
}

static void material_pointer(const heat_case *c, int layer, char at[POINTER]) {
  if (c->part.material >= 0 && c->part.layers.count == 1)
    snprintf(at, POINTER, "/part/material");
  else
    snprintf(at, POINTER, "/part/layers/%d/material", layer);
}

/* ---- materials ---- */

/* A stage in which the part as a whole comes from above A1 to below it. */
static bool cools_through_transformation(const stage_view *v) {
  double hottest = fmax(v->hottest_before, v->hottest_sink);
  return v->horizon > 0 && hottest > EUTECTOID && v->hottest_sink_at_end < EUTECTOID;
}

static void advise_on_heating_curve(advice *a, int layer, const material *m) {
  int first = 0;
  while (first < a->c->stages.count && !cools_through_transformation(&a->stage[first])) first++;
  if (first == a->c->stages.count) return;
  char at[POINTER];
  material_pointer(a->c, layer, at);
  advise(a, at,
         "%s holds the heat of transformation as on heating, near 735 degC; from stage \"%s\" on "
         "the part "
         "cools, where it comes lower: for a quench use austenite",
         m->name, a->c->stages.items[first].name);
}

static void advise_on_materials(advice *a) {
  const heat_case *c = a->c;
  for (int i = 0; i < c->part.layers.count; i++) {
    const material *m = &c->materials.items[c->part.layers.items[i].material];
    if (m->traits & MATERIAL_HEATING_ONLY) advise_on_heating_curve(a, i, m);
    if (!(m->traits & MATERIAL_LIQUID) || (m->traits & MATERIAL_MELTS)) continue;
    char at[POINTER];
    material_pointer(c, i, at);
    advise(a, at,
           "layer \"%s\" is a liquid: only conduction is computed, which is too slow where it is "
           "stirred or moves "
           "by itself",
           c->part.layers.items[i].name);
  }
}

/* ---- the part ---- */

/* The size called "length" where the shape has one for advice; NAN if it has none or it is not
 * given. */
static double part_length(const part *p) {
  const object_type *sizes = &p->shape->sizes;
  for (int i = 0; i < sizes->count; i++)
    if (!strcmp(sizes->parameters[i].name, "length"))
      return *(const double *)((const char *)p + sizes->parameters[i].offset);
  return NAN;
}

static void advise_on_length(advice *a) {
  const part *p = &a->c->part;
  double origin, thickness = p->shape->extent(p, &origin), diameter = 2 * (origin + thickness);
  double length = part_length(p);
  if (length < 2 * diameter)
    advise(a, "/part/length",
           "the cylinder is shorter than two diameters (%.4g mm long, %.4g mm in diameter): its "
           "ends count, but a long "
           "one without ends is computed; the real part is faster",
           length * 1e3, diameter * 1e3);
}

static void advise_on_bore(advice *a) {
  const heat_case *c = a->c;
  double origin;
  c->part.shape->extent(&c->part, &origin);
  double bore = 2 * origin;
  stage_marks sees = {0}, exchanges = {0};
  for (int i = 0; i < c->stages.count; i++) {
    const face_condition *f = &c->stages.items[i].faces.condition[0];
    if (f->kind == FACE_EXCHANGE && f->has_radiation && !f->furnace) stage_mark(&sees, i);
    if (f->kind == FACE_EXCHANGE && (f->has_radiation || f->has_convection))
      stage_mark(&exchanges, i);
  }
  char at[POINTER], names[NAMES];
  if (sees.count) {
    face_pointer(c, sees.first, 0, at);
    advice_name_stages(a, &sees, names, sizeof names);
    advise(a, at,
           "in %s the bore sees the surroundings, but most of what it sees is itself: take a "
           "view_factor below 1 "
           "or leave its radiation out",
           names);
  }
  if (exchanges.count && bore < 0.5 * part_length(&c->part))
    advise(a, "/part/bore",
           "the bore, %.4g mm, is narrower than half of its length, %.4g mm: what flows and "
           "radiates hardly reaches its middle, where the exchange is less than on the outside",
           bore * 1e3, part_length(&c->part) * 1e3);
}

/* ---- faces ---- */

static void advise_on_assumed_face(advice *a, int face) {
  stage_marks marks = {0};
  for (int i = 0; i < a->c->stages.count; i++)
    if (a->stage[i].exchanges && a->c->stages.items[i].faces.condition[face].assumed)
      stage_mark(&marks, i);
  if (!marks.count) return;
  char at[POINTER], names[NAMES];
  snprintf(at, sizeof at, "/stages/%d/faces", marks.first);
  advice_name_stages(a, &marks, names, sizeof names);
  advise(a, at,
         "face \"%s\" is not named in %s: it is taken as insulated while others exchange heat",
         a->c->part.shape->faces[face], names);
}

static bool gas_convection_alone(const advice *a, int stage, const face_condition *f) {
  double least, most;
  if (f->kind != FACE_EXCHANGE || !f->has_convection || f->has_radiation) return false;
  if (f->h.by_surface_temperature || !advice_range(a, &f->h.over_time, stage, &least, &most))
    return false;
  return most < GAS_COEFFICIENT;
}

/* Convection to a gas, nothing radiated, and either side may be hot. */
static bool forgets_radiation(const advice *a, int stage, const face_condition *f) {
  double least, most;
  if (!gas_convection_alone(a, stage, f) || !advice_range(a, &f->medium, stage, &least, &most))
    return false;
  return fmax(most, a->stage[stage].hottest_before) > RADIATION_COUNTS;
}

static void advise_on_radiation(advice *a, int face) {
  stage_marks marks = {0};
  for (int i = 0; i < a->c->stages.count; i++)
    if (forgets_radiation(a, i, &a->c->stages.items[i].faces.condition[face]))
      stage_mark(&marks, i);
  if (!marks.count) return;
  char at[POINTER], names[NAMES];
  face_pointer(a->c, marks.first, face, at);
  advice_name_stages(a, &marks, names, sizeof names);
  advise(a, at,
         "face \"%s\" has convection but no radiation in %s, above 500 degC, where radiation "
         "carries most of the heat",
         a->c->part.shape->faces[face], names);
}

static void advise_on_faces(advice *a) {
  int count = a->c->stages.count ? a->c->stages.items[0].faces.count : 0;
  for (int face = 0; face < count; face++) {
    if (!advice_has_face(a->c, face)) continue;
    advise_on_assumed_face(a, face);
    advise_on_radiation(a, face);
  }
}

int case_advice(const heat_case *c, warning *list, int count) {
  advice a = {.c = c, .list = list, .count = count};
  advice_look(&a);
  bool round = c->part.shape->dimensions == 1 && c->part.shape->power > 0;
  advise_on_materials(&a);
  if (round && c->part.shape->power == 1) advise_on_length(&a);
  if (round && advice_has_face(c, 0)) advise_on_bore(&a);
  advise_on_faces(&a);
  advise_on_targets(&a);
  advise_on_transfer(&a);
  advise_on_logs(&a);
  return a.count;
}
