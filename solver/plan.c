/* plan.c: how fine, from the case alone. */
#include "plan.h"

#include "observe.h"
#include "shape.h"
#include "symmetry.h"

#include <math.h>

static const int ladder[] = {12,  16,  24,  32,  48,   64,   96,   128, 192,
                             256, 384, 512, 768, 1024, 1536, 2048, 3072};

#define USUAL_GRADING                                                                              \
  0.3 /* end cell over mean cell at a face that exchanges heat: halves the error for nothing */
#define FIRST_TOLERANCE 0.15 /* of the numerical error, per step */
#define END_CELL_OVER_PENETRATION                                                                  \
  0.09 /* with USUAL_CELLS: end cell over sqrt(diffusivity x shortest time of interest) */
#define NARROW_PEAK 4.0
#define USUAL_CELLS 24.0

int plan_rung(double cells) {
  for (int i = 0; i < COUNT_OF(ladder); i++)
    if (ladder[i] >= cells) return ladder[i];
  return ladder[COUNT_OF(ladder) - 1];
}

/* ---- reach ---- */

static void widen(double value, double *from, double *to) {
  if (value < *from) *from = value;
  if (value > *to) *to = value;
}

static void widen_by_series(const series *s, double from_time, double to_time, double *from,
                            double *to) {
  double least, most;
  if (s->kind == SERIES_NONE) return;
  series_range(s, from_time, to_time, &least, &most);
  widen(least, from, to);
  widen(most, from, to);
}

static void widen_by_faces(const faces *f, double span, double whole, double *from, double *to) {
  for (int i = 0; i < f->count; i++) {
    const face_condition *k = &f->condition[i];
    const series *s[3] = {k->kind == FACE_PRESCRIBED ? &k->temperature : NULL,
                          k->kind == FACE_EXCHANGE && k->has_convection ? &k->medium : NULL,
                          k->kind == FACE_EXCHANGE && k->has_radiation ? &k->surroundings : NULL};
    for (int j = 0; j < 3; j++)
      if (s[j]) widen_by_series(s[j], 0, s[j]->from_case_start ? whole : span, from, to);
  }
}

void plan_range(const heat_case *c, double *from, double *to) {
  *from = INFINITY;
  *to = -INFINITY;
  double whole = case_longest(c);
  if (c->start.kind == START_UNIFORM) widen(c->start.temperature, from, to);
  if (c->start.kind == START_PROFILE)
    for (int i = 0; i < c->start.profile.count; i++) widen(c->start.profile.y[i], from, to);
  if (c->start.kind == START_STEADY) widen_by_faces(&c->start.faces, 0, 0, from, to);
  for (int i = 0; i < c->part.layers.count; i++)
    if (isfinite(c->part.layers.items[i].start)) widen(c->part.layers.items[i].start, from, to);
  for (int i = 0; i < c->stages.count; i++) {
    const stage *g = &c->stages.items[i];
    double span = g->end == STAGE_LASTS   ? g->lasts
                  : g->end == STAGE_UNTIL ? g->time_limit
                                          : LIMIT_DURATION;
    widen_by_faces(&g->faces, span, g->end == STAGE_STEADY ? LIMIT_DURATION : whole, from, to);
  }
  if (!(*from <= *to)) *from = *to = 293.15;
  double margin = 2 + 0.02 * (*to - *from);
  *from = fmax(*from - margin, 0.0);
  *to += margin;
}

/* ---- end cells ---- */

/* Shortest time after the start of a stage that anybody looks at. */
static double first_look(const heat_case *c, const stage *g, double diffusion_time) {
  double span = g->end == STAGE_LASTS ? g->lasts : fmin(g->time_limit, diffusion_time);
  double look = EARLIEST_SHARE * span;
  const output_request *r = &c->output.history;
  if (r->times == OUTPUT_EVERY) look = fmin(look, r->every);
  return look;
}

static double strongest_flux(const face_condition *k, double reach) {
  if (k->kind == FACE_PRESCRIBED) return INFINITY;
  if (k->kind != FACE_EXCHANGE) return 0;
  double q = 0, least, most;
  if (k->flux.kind != SERIES_NONE) {
    series_range(&k->flux, 0, 1e9, &least, &most);
    q += fmax(fabs(least), fabs(most));
  }
  if (k->has_convection) {
    most = 0;
    if (k->h.by_surface_temperature)
      for (int i = 0; i < k->h.over_temperature.count; i++)
        most = fmax(most, k->h.over_temperature.y[i]);
    else
      series_range(&k->h.over_time, 0, 1e9, &least, &most);
    q += most * reach;
  }
  if (k->has_radiation) {
    series_range(&k->surroundings, 0, 1e9, &least, &most);
    double hottest = fmax(most, least + reach);
    q += k->emissivity * k->view_factor * 5.67e-8 * hottest * hottest * hottest * hottest;
  }
  return q;
}

/* End cell at a surface: fine enough for the first look after the sharpest change, no finer than
   the error asked needs under the strongest flux. */
static double surface_cell(const heat_case *c, int face, const property *p, double thickness) {
  double diffusivity = p->largest_conductivity / p->reference_capacity, cell = INFINITY;
  double reach = p->to - p->from, diffusion_time = thickness * thickness / diffusivity;
  for (int i = 0; i < c->stages.count; i++) {
    const stage *g = &c->stages.items[i];
    const face_condition *k = &g->faces.condition[face];
    if (g->end == STAGE_STEADY || k->kind == FACE_INSULATED) continue;
    double look = END_CELL_OVER_PENETRATION * sqrt(diffusivity * first_look(c, g, diffusion_time));
    double gentle = c->numerical_error * p->smallest_conductivity / strongest_flux(k, reach);
    cell = fmin(cell, fmax(look, gentle));
  }
  return cell;
}

static bool jumps_at_start(const heat_case *c, int first) {
  const layer *a = &c->part.layers.items[first], *b = a + 1;
  return (isfinite(a->start) || isfinite(b->start)) && !(a->start == b->start);
}

static double interface_cell(const heat_case *c, const property *p) {
  if (c->stages.items[0].end == STAGE_STEADY) return INFINITY;
  double diffusivity = p->largest_conductivity / p->reference_capacity;
  return END_CELL_OVER_PENETRATION *
         sqrt(diffusivity * first_look(c, &c->stages.items[0], INFINITY));
}

void plan_end_cells(march_plan *p, const heat_case *c, const property *properties) {
  int count = c->part.layers.count;
  bool solid = !c->part.shape->hollow(&c->part);
  for (int i = 0; i < count; i++) {
    const layer *l = &c->part.layers.items[i];
    const property *own = &properties[l->material];
    p->end_cell[i][0] = p->end_cell[i][1] = INFINITY;
    double usual = USUAL_GRADING * l->thickness / p->cells, finer = USUAL_CELLS / p->cells;
    if (i > 0 && jumps_at_start(c, i - 1))
      p->end_cell[i][0] = fmin(usual, finer * interface_cell(c, own));
    if (i + 1 < count && jumps_at_start(c, i))
      p->end_cell[i][1] = fmin(usual, finer * interface_cell(c, own));
    if (i == 0 && !solid)
      p->end_cell[i][0] = fmin(usual, finer * surface_cell(c, 0, own, l->thickness));
    if (i == count - 1 && !p->halved)
      p->end_cell[i][1] = fmin(usual, finer * surface_cell(c, 1, own, l->thickness));
  }
}

/* A narrow peak of heat capacity passes through the mesh node by node and makes temperatures
 * ripple. */
static bool has_peak(const heat_case *c, const property *properties) {
  for (int i = 0; i < c->part.layers.count; i++) {
    const property *p = &properties[c->part.layers.items[i].material];
    if (p->peak_capacity > NARROW_PEAK * p->reference_capacity) return true;
  }
  return false;
}

void plan_first(march_plan *p, const heat_case *c, const property *properties) {
  double error = c->numerical_error;
  p->halved = case_is_symmetric(c);
  p->cells = plan_rung(error >= 0.3 ? 24 : error >= 0.05 ? 32 : 48);
  if (c->part.layers.count > 2) p->cells = plan_rung(p->cells * 1.5);
  if (has_peak(c, properties)) p->cells = plan_rung(p->cells * 2);
  p->tolerance = FIRST_TOLERANCE * error;
  plan_end_cells(p, c, properties);
}
