/* symmetry.c: is a case its own mirror image? */
#include "symmetry.h"

#include "shape.h"

#include <string.h>

static bool same_number(double a, double b) {
  return a == b || (a != a && b != b);
}

static bool same_table(const table *a, const table *b) {
  if (a->count != b->count) return false;
  for (int i = 0; i < a->count; i++)
    if (a->x[i] != b->x[i] || a->y[i] != b->y[i]) return false;
  return true;
}

static bool same_series(const series *a, const series *b) {
  if (a->kind != b->kind || a->from_case_start != b->from_case_start) return false;
  switch (a->kind) {
  case SERIES_NONE: return true;
  case SERIES_CONSTANT: return a->value == b->value;
  case SERIES_TABLE: return same_table(&a->table, &b->table);
  case SERIES_SINE:
    return a->value == b->value && a->amplitude == b->amplitude && a->period == b->period &&
           a->phase == b->phase;
  case SERIES_FIRE: return a->curve == b->curve;
  }
  return false;
}

static bool same_coefficient(const coefficient *a, const coefficient *b) {
  if (a->by_surface_temperature != b->by_surface_temperature) return false;
  return a->by_surface_temperature ? same_table(&a->over_temperature, &b->over_temperature)
                                   : same_series(&a->over_time, &b->over_time);
}

static bool same_condition(const face_condition *a, const face_condition *b) {
  if (a->kind != b->kind) return false;
  if (a->kind == FACE_INSULATED) return true;
  if (a->kind == FACE_PRESCRIBED) return same_series(&a->temperature, &b->temperature);
  if (a->has_convection != b->has_convection || a->has_radiation != b->has_radiation) return false;
  if (!same_series(&a->flux, &b->flux)) return false;
  if (a->has_convection && !(same_coefficient(&a->h, &b->h) && same_series(&a->medium, &b->medium)))
    return false;
  return !a->has_radiation || (a->emissivity == b->emissivity && a->view_factor == b->view_factor &&
                               same_series(&a->surroundings, &b->surroundings));
}

static bool same_layer(const layer *a, const layer *b) {
  if (a->material != b->material || a->thickness != b->thickness ||
      !same_number(a->start, b->start))
    return false;
  if (!a->heat_generation || !b->heat_generation) return a->heat_generation == b->heat_generation;
  return same_series(a->heat_generation, b->heat_generation);
}

bool case_is_symmetric(const heat_case *c) {
  const part *p = &c->part;
  if (p->shape->dimensions != 1 || p->shape->power != 0 || c->start.kind == START_PROFILE)
    return false;
  int count = p->layers.count;
  for (int i = 0; i < count; i++) {
    if (!same_layer(&p->layers.items[i], &p->layers.items[count - 1 - i])) return false;
    if (i + 1 < count && p->layers.items[i].contact != p->layers.items[count - 2 - i].contact)
      return false;
  }
  if (c->start.kind == START_STEADY &&
      !same_condition(&c->start.faces.condition[0], &c->start.faces.condition[1]))
    return false;
  for (int i = 0; i < c->stages.count; i++) {
    const faces *f = &c->stages.items[i].faces;
    if (!same_condition(&f->condition[0], &f->condition[1])) return false;
  }
  return true;
}
