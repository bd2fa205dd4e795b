/* watch.c: values of places along a step, by the method's own interpolant. */
#include "watch.h"

#include "shape.h"

#include <math.h>
#include <string.h>

/* ---- the section as a whole ---- */

static status make_section(watch *w, arena *memory, fault *f) {
  const mesh *m = w->mesh;
  int whole = mesh_whole_nodes(m);
  double *position = arena_array(memory, (size_t)whole, sizeof(double));
  double *volume = arena_array(memory, (size_t)whole, sizeof(double));
  w->whole = arena_array(memory, (size_t)whole, sizeof(double));
  if (!position || !volume || !w->whole) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  for (int i = 0; i < whole; i++) {
    int node = i < m->nodes ? i : whole - 1 - i;
    position[i] = i < m->nodes ? m->position[i] : m->width - m->position[node];
    volume[i] = m->volume[node] * (m->middle_shared && i == m->nodes - 1 ? 2 : 1);
  }
  w->section = (section){.nodes = whole, .position = position, .volume = volume, .power = m->power};
  return STATUS_OK;
}

status watch_init(watch *w, const heat_case *c, const mesh *m, arena *memory, fault *f) {
  memset(w, 0, sizeof *w);
  w->the_case = c;
  w->mesh = m;
  size_t n = (size_t)m->nodes;
  w->trace = arena_array(memory, MOST_TRACES, sizeof *w->trace);
  w->scratch = arena_array(memory, n, sizeof(double));
  w->state = arena_array(memory, n, sizeof(double));
  for (int j = 0; j < SEGMENT_SAMPLES; j++)
    if (!(w->nodes[j] = arena_array(memory, n, sizeof(double))))
      return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  if (!w->trace || !w->scratch || !w->state) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  return make_section(w, memory, f);
}

/* ---- traces ---- */

static mesh_spot node_spot(int node) {
  return (mesh_spot){.first = node, .count = 1, .weight = {1}, .low = node, .high = node};
}

static mesh_spot middle_spot(const watch *w, place_kind kind) {
  double origin, extent = w->the_case->part.shape->extent(&w->the_case->part, &origin);
  bool axis = kind == PLACE_CENTER && w->mesh->power;
  location at = {.coordinate = {axis ? 0 : origin + extent / 2}};
  double outer = origin;
  for (int i = 0; i < w->the_case->part.layers.count; i++) {
    outer += w->the_case->part.layers.items[i].thickness;
    at.layer = i;
    if (at.coordinate[0] <= outer) break;
  }
  return mesh_locate(w->mesh, &at);
}

static void place_trace(watch *w, trace *t, const place *p) {
  const mesh *m = w->mesh;
  t->is_spot = true;
  switch (p->kind) {
  case PLACE_POINT: t->spot = mesh_locate(m, &w->the_case->points.items[p->index].at); return;
  case PLACE_FACE: t->spot = node_spot(p->index && !m->halved ? m->nodes - 1 : 0); return;
  case PLACE_CENTER:
  case PLACE_MID_WALL: t->spot = middle_spot(w, p->kind); return;
  case PLACE_COLDEST:
  case PLACE_HOTTEST:
  case PLACE_MEAN:
  case PLACE_SECTION_DIFFERENCE: break;
  }
  t->is_spot = false;
  t->first = 0;
  t->last = m->nodes - 1;
  if (p->layer >= 0) {
    const mesh_layer *l = &m->layer[mesh_layer_of(m, p->layer)];
    t->first = l->first;
    t->last = l->last;
  }
  t->volume = mesh_volume(m, t->first, t->last);
}

static bool same_request(const trace_request *a, const trace_request *b) {
  if (a->kind != b->kind) return false;
  if (a->kind != TRACE_PLACE) return a->face == b->face;
  if (a->place.kind != b->place.kind || a->place.layer != b->place.layer) return false;
  bool indexed = a->place.kind == PLACE_POINT || a->place.kind == PLACE_FACE;
  return !indexed || a->place.index == b->place.index;
}

int watch_request(watch *w, const trace_request *request) {
  for (int i = 0; i < w->count; i++)
    if (same_request(&w->trace[i].request, request)) return i;
  if (w->count == MOST_TRACES) return -1;
  trace *t = &w->trace[w->count];
  t->request = *request;
  if (request->kind == TRACE_PLACE) place_trace(w, t, &request->place);
  return w->count++;
}

int watch_add_place(watch *w, const place *p) {
  trace_request request = {.kind = TRACE_PLACE, .place = *p};
  return watch_request(w, &request);
}

double watch_place(const trace *t, const mesh *m, const double *temperature) {
  if (t->is_spot) return mesh_spot_value(&t->spot, temperature);
  double least = INFINITY, most = -INFINITY, sum = 0;
  for (int i = t->first; i <= t->last; i++) {
    double v = temperature[i];
    least = v < least ? v : least;
    most = v > most ? v : most;
    sum += m->volume[i] * v;
  }
  switch (t->request.place.kind) {
  case PLACE_COLDEST: return least;
  case PLACE_HOTTEST: return most;
  case PLACE_SECTION_DIFFERENCE: return most - least;
  default: return sum / t->volume;
  }
}

/* ---- heat ---- */

static double end_heat_flow(const watch *w, int end, double t) {
  conduction *c = w->s->system;
  const face_condition *condition = c->condition[end];
  const mesh *m = w->mesh;
  if (!condition || condition->kind == FACE_INSULATED) return 0;
  int node = end ? m->nodes - 1 : 0, inner = end ? node - 1 : node + 1;
  const property *p = m->layer[end ? m->layers - 1 : 0].property;
  double slope, h = w->still ? w->s->state[node] : stepper_node(w->s, node, t);
  double temperature = property_temperature(p, h, &slope);
  face_state at;
  face_at(condition, c->stage_start, c->from, c->to, t, &at);
  if (condition->kind == FACE_EXCHANGE)
    return m->area[end] * face_exchange(condition, &at, temperature).flux;
  double next = w->still ? w->s->state[inner] : stepper_node(w->s, inner, t);
  double unused, storing = slope > 0 ? m->volume[node] * at.prescribed_slope / slope : 0;
  double link = m->conductance[end ? inner : node];
  double made = conduction_generation(c, &m->layer[end ? m->layers - 1 : 0], t, &unused);
  double inward = property_potential(p, h, &unused) - property_potential(p, next, &unused);
  return link * inward + storing - m->volume[node] * made;
}

static double heat_of(watch *w, const trace *tr, double t) {
  const mesh *m = w->mesh;
  double sum = 0;
  for (int face = 0; face < 2; face++) {
    if (tr->request.face >= 0 && tr->request.face != face) continue;
    int end = m->halved ? 0 : face;
    if (tr->request.kind == TRACE_HEAT_FLOW)
      sum += end_heat_flow(w, end, t);
    else
      sum += w->still ? w->s->heat[end] : stepper_heat(w->s, end, t);
  }
  return sum * m->whole;
}

/* ---- along a step ---- */

void watch_step(watch *w, stepper *s, double start, bool still) {
  w->s = s;
  w->start = start;
  w->still = still;
  memset(w->have, 0, sizeof w->have);
}

static double spot_value(watch *w, const trace *tr, double t) {
  const mesh_spot *spot = &tr->spot;
  const mesh *m = w->mesh;
  int layer = 0;
  while (m->layer[layer].last < spot->first) layer++;
  for (int i = spot->first; i < spot->first + spot->count; i++) {
    double slope, h = w->still ? w->s->state[i] : stepper_node(w->s, i, t);
    w->scratch[i] = property_temperature(m->layer[layer].property, h, &slope);
  }
  return mesh_spot_value(spot, w->scratch);
}

static void temperatures_at(watch *w, double t, double *out) {
  if (w->still)
    memcpy(w->state, w->s->state, (size_t)w->mesh->nodes * sizeof(double));
  else
    stepper_nodes(w->s, t, w->state);
  conduction_temperatures(w->mesh, w->state, out);
}

double watch_value(watch *w, int trace, double t) {
  const struct trace *tr = &w->trace[trace];
  if (tr->request.kind != TRACE_PLACE) return heat_of(w, tr, t);
  if (tr->is_spot) return spot_value(w, tr, t);
  temperatures_at(w, t, w->scratch);
  return watch_place(tr, w->mesh, w->scratch);
}

static double sample_time(const watch *w, int j) {
  if (w->still) return w->s->t;
  return j == SEGMENT_SAMPLES - 1 ? w->s->t + w->s->h
                                  : w->s->t + w->s->h * j / (SEGMENT_SAMPLES - 1);
}

double watch_sample(watch *w, int trace, int j) {
  const struct trace *tr = &w->trace[trace];
  double t = sample_time(w, j);
  if (tr->request.kind != TRACE_PLACE) return heat_of(w, tr, t);
  if (tr->is_spot && !w->have[j]) return spot_value(w, tr, t);
  if (!w->have[j]) temperatures_at(w, t, w->nodes[j]);
  w->have[j] = true;
  return watch_place(tr, w->mesh, w->nodes[j]);
}

const double *watch_profile(watch *w, double t) {
  const mesh *m = w->mesh;
  temperatures_at(w, t, w->scratch);
  for (int i = 0; i < w->section.nodes; i++)
    w->whole[i] = w->scratch[i < m->nodes ? i : w->section.nodes - 1 - i];
  return w->whole;
}

static double segment_value(const segment *g, int trace, double t) {
  watch *w = g->self;
  return watch_value(w, trace, t - w->start);
}

static double segment_sample(const segment *g, int trace, int j) {
  return watch_sample(g->self, trace, j);
}

static const double *segment_profile(const segment *g, double t) {
  watch *w = g->self;
  return watch_profile(w, t - w->start);
}

segment watch_segment(watch *w, int stage, bool begins, bool ends) {
  double t0 = w->start + w->s->t;
  return (segment){.t0 = t0,
                   .t1 = w->still ? t0 : t0 + w->s->h,
                   .stage = stage,
                   .stage_begins = begins,
                   .stage_ends = ends,
                   .value = segment_value,
                   .sample = segment_sample,
                   .profile = segment_profile,
                   .section = &w->section,
                   .self = w};
}
