/* conduction.c: V dH/dt = F(t, H) for a one-dimensional section, with the exact Jacobian. */
#include "conduction.h"

#include <string.h>

int conduction_init(conduction *c, const mesh *m, arena *memory) {
  memset(c, 0, sizeof *c);
  c->mesh = m;
  size_t n = (size_t)m->nodes;
  double **arrays[] = {&c->potential, &c->slope, &c->lower, &c->diagonal, &c->upper, &c->by_time};
  for (int i = 0; i < COUNT_OF(arrays); i++)
    if (!(*arrays[i] = arena_array(memory, n, sizeof(double)))) return -1;
  return 0;
}

bool conduction_prescribes(const conduction *c, int end) {
  return c->condition[end] && c->condition[end]->kind == FACE_PRESCRIBED;
}

static int end_node(const mesh *m, int end) {
  return end ? m->nodes - 1 : 0;
}

static const property *end_property(const mesh *m, int end) {
  return m->layer[end ? m->layers - 1 : 0].property;
}

void conduction_prescribe(const conduction *c, double t, double *state, double rate[2]) {
  for (int end = 0; end < 2; end++) {
    rate[end] = 0;
    if (!conduction_prescribes(c, end)) continue;
    face_state at;
    const property *p = end_property(c->mesh, end);
    face_at(c->condition[end], c->stage_start, c->from, c->to, t, &at);
    double *h = &state[end_node(c->mesh, end)], slope;
    *h = property_enthalpy(p, at.prescribed);
    property_temperature(p, *h, &slope);
    if (at.prescribed_slope != 0 && slope > 0) rate[end] = at.prescribed_slope / slope;
  }
}

double conduction_generation(const conduction *c, const mesh_layer *l, double t, double *slope) {
  double value = 0;
  *slope = 0;
  if (!l->generation) return 0;
  if (c->at_rest) return series_last(l->generation, 0);
  double origin = l->generation->from_case_start ? c->stage_start : 0;
  series_within(l->generation, c->from + origin, c->to + origin, t + origin, &value, slope);
  return value;
}

static void generate(conduction *c, const mesh_layer *l, double t, double *rate, bool linearise) {
  double slope, value = conduction_generation(c, l, t, &slope);
  if (value == 0 && slope == 0) return;
  const double *volume = c->mesh->volume;
  for (int i = l->first; i <= l->last; i++) {
    rate[i] += volume[i] * value;
    c->heat[HEAT_GENERATED] += volume[i] * value;
    if (!linearise) continue;
    c->by_time[i] += volume[i] * slope;
    c->heat_by_time[HEAT_GENERATED] += volume[i] * slope;
  }
}

/* Flow between the last node of a layer and the first of the next, by their temperatures. */
static void cross_interface(conduction *c, int layer, const double *state, double *rate,
                            bool linearise) {
  const mesh *m = c->mesh;
  int a = m->layer[layer].last, b = a + 1;
  double slope_a, slope_b;
  double ta = property_temperature(m->layer[layer].property, state[a], &slope_a);
  double tb = property_temperature(m->layer[layer + 1].property, state[b], &slope_b);
  double g = m->conductance[a], q = g * (ta - tb);
  rate[a] -= q;
  rate[b] += q;
  if (!linearise) return;
  c->diagonal[a] -= g * slope_a;
  c->upper[a] = g * slope_b;
  c->lower[b] = g * slope_a;
  c->diagonal[b] -= g * slope_b;
}

static void cross_surface(conduction *c, int end, double t, const double *state, double *rate,
                          bool linearise) {
  const face_condition *condition = c->condition[end];
  c->heat[end] = c->heat_by_time[end] = c->heat_by_state[end] = 0;
  c->heat_node[end] = end_node(c->mesh, end);
  if (!condition || condition->kind != FACE_EXCHANGE) return;
  face_state at;
  int node = end_node(c->mesh, end);
  double slope, temperature = property_temperature(end_property(c->mesh, end), state[node], &slope);
  face_at(condition, c->stage_start, c->from, c->to, t, &at);
  face_flux q = face_exchange(condition, &at, temperature);
  double area = c->mesh->area[end];
  c->heat[end] = area * q.flux;
  rate[node] += area * q.flux;
  if (!linearise) return;
  c->heat_by_state[end] = area * q.by_temperature * slope;
  c->heat_by_time[end] = area * q.by_time;
  c->diagonal[node] += c->heat_by_state[end];
  c->by_time[node] += c->heat_by_time[end];
}

/* A prescribed node leaves the unknowns: its balance tells the heat through the surface, all but
   what its own half cell stores, which the march adds from the change of H. */
static void hold_node(conduction *c, int end, double t, double *state_rate, bool linearise) {
  const mesh *m = c->mesh;
  int node = end_node(m, end), inner = end ? node - 1 : node + 1;
  c->heat[end] = -state_rate[node];
  c->heat_node[end] = inner;
  state_rate[node] = 0;
  if (!linearise) return;
  double link = m->conductance[end ? inner : node], slope = c->slope[node];
  face_state at;
  double by_enthalpy;
  const property *p = end_property(m, end);
  face_at(c->condition[end], c->stage_start, c->from, c->to, t, &at);
  /* dtheta/dt of the node = k dT/dt; slope is dtheta/dH = k dT/dH */
  property_temperature(p, c->held[end], &by_enthalpy);
  double theta_rate = by_enthalpy > 0 ? slope / by_enthalpy * at.prescribed_slope : 0;
  c->by_time[inner] += link * theta_rate;
  c->heat_by_time[end] = link * theta_rate - c->by_time[node];
  c->heat_by_state[end] = -link * c->slope[inner];
  c->by_time[node] = 0;
  c->diagonal[node] = 0;
  c->upper[node] = c->lower[node] = 0;
  if (end)
    c->upper[inner] = 0;
  else
    c->lower[inner] = 0;
}

static void conduct(conduction *c, const mesh_layer *l, double *rate, bool linearise) {
  const double *g = c->mesh->conductance, *theta = c->potential, *slope = c->slope;
  double left = 0;
  for (int i = l->first; i < l->last; i++) {
    double right = g[i] * (theta[i + 1] - theta[i]);
    rate[i] = right - left;
    left = right;
  }
  rate[l->last] = -left;
  if (!linearise) return;
  for (int i = l->first; i <= l->last; i++) {
    double before = i > l->first ? g[i - 1] : 0, after = i < l->last ? g[i] : 0;
    c->lower[i] = i > l->first ? before * slope[i - 1] : 0;
    c->upper[i] = i < l->last ? after * slope[i + 1] : 0;
    c->diagonal[i] = -(before + after) * slope[i];
    c->by_time[i] = 0;
  }
}

static void evaluate(conduction *c, double t, const double *state, double *rate, bool linearise) {
  const mesh *m = c->mesh;
  c->heat[HEAT_GENERATED] = c->heat_by_time[HEAT_GENERATED] = 0;
  for (int i = 0; i < m->layers; i++) {
    const mesh_layer *l = &m->layer[i];
    property_potentials(l->property, l->last - l->first + 1, state + l->first,
                        c->potential + l->first, linearise ? c->slope + l->first : NULL);
    conduct(c, l, rate, linearise);
    generate(c, l, t, rate, linearise);
  }
  for (int i = 0; i + 1 < m->layers; i++) cross_interface(c, i, state, rate, linearise);
  for (int end = 0; end < 2; end++) {
    cross_surface(c, end, t, state, rate, linearise);
    if (!conduction_prescribes(c, end)) continue;
    c->held[end] = state[end_node(m, end)];
    hold_node(c, end, t, rate, linearise);
  }
}

void conduction_rates(conduction *c, double t, const double *state, double *rate) {
  evaluate(c, t, state, rate, false);
}

void conduction_linearise(conduction *c, double t, const double *state, double *rate) {
  evaluate(c, t, state, rate, true);
}

void conduction_temperatures(const mesh *m, const double *state, double *temperature) {
  for (int i = 0; i < m->layers; i++) {
    const mesh_layer *l = &m->layer[i];
    property_temperatures(l->property, l->last - l->first + 1, state + l->first,
                          temperature + l->first);
  }
}

double conduction_content(const mesh *m, const double *state) {
  double sum = 0;
  for (int i = 0; i < m->nodes; i++) sum += m->volume[i] * state[i];
  return sum;
}

void conduction_state(const mesh *m, const double *temperature, double *state) {
  for (int i = 0; i < m->layers; i++) {
    const mesh_layer *l = &m->layer[i];
    for (int node = l->first; node <= l->last; node++)
      state[node] = property_enthalpy(l->property, temperature[node]);
  }
}
