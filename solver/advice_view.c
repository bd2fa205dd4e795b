/* advice_view.c: the case seen stage by stage before it runs: when a stage may begin, what its
   faces are taken towards, how hot the part may be by then. */
#include "advice.h"
#include "elementary.h"
#include "physics.h"
#include "shape.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>

void advise(advice *a, const char *at, const char *is, ...) {
  if (a->count >= LIMIT_WARNINGS) return;
  warning *w = &a->list[a->count++];
  snprintf(w->at, sizeof w->at, "%s", at);
  va_list arguments;
  va_start(arguments, is);
  vsnprintf(w->is, sizeof w->is, is, arguments);
  va_end(arguments);
}

void stage_mark(stage_marks *m, int index) {
  if (!m->count) m->first = index;
  if (!m->in[index]) m->count++;
  m->in[index] = true;
}

void advice_name_stages(const advice *a, const stage_marks *m, char *text, size_t size) {
  enum { NAMED = 3 };
  int used = snprintf(text, size, m->count == 1 ? "stage" : "stages"), named = 0;
  for (int i = 0; i < a->c->stages.count && named < NAMED; i++) {
    if (!m->in[i] || used < 0 || (size_t)used >= size) continue;
    used += snprintf(text + used, size - (size_t)used, "%s \"%s\"", named ? "," : "",
                     a->c->stages.items[i].name);
    named++;
  }
  if (m->count > named && used > 0 && (size_t)used < size)
    snprintf(text + used, size - (size_t)used, " and %d more", m->count - named);
}

bool advice_has_face(const heat_case *c, int face) {
  const shape *s = c->part.shape;
  return face != 0 || s->power == 0 || s->hollow(&c->part);
}

bool advice_range(const advice *a, const series *s, int index, double *least, double *most) {
  if (s->kind == SERIES_NONE) return false;
  const stage_view *v = &a->stage[index];
  double from = s->from_case_start ? v->earliest : 0;
  double to = s->from_case_start ? v->latest + v->horizon : v->horizon;
  series_range(s, from, to, least, most);
  return true;
}

static double at_end(const advice *a, const series *s, int index) {
  const stage_view *v = &a->stage[index];
  return series_value(s, s->from_case_start ? v->latest + v->horizon : v->horizon);
}

static void take_sink(advice *a, int index, const series *s) {
  stage_view *v = &a->stage[index];
  double least, most;
  if (!advice_range(a, s, index, &least, &most)) return;
  v->coldest_sink = fmin(v->coldest_sink, least);
  v->hottest_sink = fmax(v->hottest_sink, most);
  v->hottest_sink_at_end = fmax(v->hottest_sink_at_end, at_end(a, s, index));
}

static void take_face(advice *a, int index, const face_condition *f) {
  if (f->kind == FACE_INSULATED) return;
  a->stage[index].exchanges = true;
  if (f->kind == FACE_PRESCRIBED) take_sink(a, index, &f->temperature);
  if (f->kind != FACE_EXCHANGE) return;
  if (f->has_convection) take_sink(a, index, &f->medium);
  if (f->has_radiation) take_sink(a, index, &f->surroundings);
}

static double hottest_start(const advice *a) {
  const start *s = &a->c->start;
  double hottest = NAN;
  if (s->kind == START_UNIFORM) hottest = s->temperature;
  if (s->kind == START_PROFILE)
    for (int i = 0; i < s->profile.count; i++) hottest = fmax(hottest, s->profile.y[i]);
  if (s->kind == START_STEADY)
    for (int i = 0; i < s->faces.count; i++) {
      const face_condition *f = &s->faces.condition[i];
      if (f->kind == FACE_PRESCRIBED) hottest = fmax(hottest, series_value(&f->temperature, 0));
      if (f->kind == FACE_EXCHANGE && f->has_convection)
        hottest = fmax(hottest, series_value(&f->medium, 0));
      if (f->kind == FACE_EXCHANGE && f->has_radiation)
        hottest = fmax(hottest, series_value(&f->surroundings, 0));
    }
  for (int i = 0; i < a->c->part.layers.count; i++)
    hottest = fmax(hottest, a->c->part.layers.items[i].start);
  return hottest;
}

/* Largest level that the stage's own condition asks of a temperature (heating by flux has no sink);
 * for falling the level that it ends at. NAN if it asks none. */
static double asked(const stage *g, until_kind kind) {
  double level = NAN;
  for (int i = 0; g->end == STAGE_UNTIL && i < g->until.count; i++) {
    const condition_node *n = &g->until.nodes[i];
    bool temperature = !n->of.is_figure && n->of.place.kind != PLACE_SECTION_DIFFERENCE;
    if (temperature && n->kind == kind) level = fmax(level, n->level);
  }
  return level;
}

static double least_coefficient(const advice *a, int index, const coefficient *h) {
  double least = 0, most;
  if (!h->by_surface_temperature)
    return advice_range(a, &h->over_time, index, &least, &most) ? least : 0;
  least = h->over_temperature.y[0];
  for (int i = 1; i < h->over_temperature.count; i++) least = fmin(least, h->over_temperature.y[i]);
  return least;
}

/* Best heat transfer of all faces, radiation made linear between `hot` and the sink, W/(m2.K). */
static double strongest_exchange(const advice *a, int index, double hot) {
  const faces *f = &a->c->stages.items[index].faces;
  double mean = 0.5 * (hot + a->stage[index].hottest_sink_at_end), best = 0;
  for (int i = 0; i < f->count; i++) {
    const face_condition *one = &f->condition[i];
    if (one->kind == FACE_INSULATED || !advice_has_face(a->c, i)) continue;
    if (one->kind == FACE_PRESCRIBED) return INFINITY;
    double h = one->has_convection ? least_coefficient(a, index, &one->h) : 0;
    if (one->has_radiation)
      h += 4 * one->emissivity * one->view_factor * STEFAN_BOLTZMANN * mean * mean * mean;
    best = fmax(best, h);
  }
  return best;
}

/* Time in which the part comes nearer by a factor e: lumped from the surface inwards (half of the
 * section on each side), and conduction of a slab, L^2/(2.5 alpha) (4/pi^2, rounded). */
static double cooling_time(const advice *a, int index, double hot) {
  const part *p = &a->c->part;
  const material *m = &a->c->materials.items[p->layers.items[0].material];
  double origin, half = 0.5 * p->shape->extent(p, &origin);
  double capacity = curve_value(&m->density, hot) * curve_value(&m->specific_heat, hot);
  double inside = capacity * half * half / (2.5 * curve_value(&m->conductivity, hot));
  return inside + capacity * half / strongest_exchange(a, index, hot);
}

/* How hot the part may still be when the stage ends: an estimate that only advice relies on. */
static double hottest_after(const advice *a, int index) {
  const stage *g = &a->c->stages.items[index];
  const stage_view *v = &a->stage[index];
  double hot = fmax(v->hottest_before, fmax(v->hottest_sink, asked(g, UNTIL_RISES_TO)));
  double sink = v->hottest_sink_at_end, falls_to = asked(g, UNTIL_FALLS_TO);
  if (isfinite(falls_to)) return falls_to;
  if (g->end != STAGE_LASTS || !(hot > sink) || !a->c->part.layers.count) return hot;
  return sink + (hot - sink) * elementary_exp(-v->horizon / cooling_time(a, index, hot));
}

static double horizon_of(const stage *g) {
  return g->end == STAGE_LASTS ? g->lasts : g->end == STAGE_UNTIL ? g->time_limit : 0;
}

void advice_look(advice *a) {
  double earliest = 0, latest = 0, hottest = hottest_start(a);
  for (int i = 0; i < a->c->stages.count; i++) {
    const stage *g = &a->c->stages.items[i];
    stage_view *v = &a->stage[i];
    *v = (stage_view){.earliest = earliest, .latest = latest, .horizon = horizon_of(g)};
    v->coldest_sink = v->hottest_sink = v->hottest_sink_at_end = NAN;
    v->hottest_before = hottest;
    for (int f = 0; f < g->faces.count; f++)
      if (advice_has_face(a->c, f)) take_face(a, i, &g->faces.condition[f]);
    hottest = hottest_after(a, i);
    if (g->end == STAGE_LASTS) earliest += v->horizon;
    latest += v->horizon;
  }
}
