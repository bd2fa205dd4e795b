/* mesh.c: nodes, volumes and conductances of a one-dimensional section.

   Cell sizes inside a layer follow w(u) = g_first^((1-u)^2) g_last^(u^2), u = 0..1 across the
   layer, so that cells shrink smoothly towards an end that exchanges heat. */
#include "mesh.h"

#include "elementary.h"
#include "limit.h"
#include "shape.h"

#include <math.h>
#include <string.h>

enum { FEWEST_CELLS = 4 }; /* of a layer: its coarse twin still has an inner node */

#define LEAST_SHARE      0.125 /* of the cells in any layer: a finer plan is finer everywhere */
#define SMALLEST_GRADING 1e-5

/* ---- cells of one layer ---- */

static void cell_weights(double *weight, int cells, double log_first, double log_last) {
  double sum = 0;
  for (int i = 0; i < cells; i++) {
    double u = (i + 0.5) / cells;
    weight[i] = elementary_exp(log_first * (1 - u) * (1 - u) + log_last * u * u);
    sum += weight[i];
  }
  for (int i = 0; i < cells; i++) weight[i] /= sum;
}

/* Logarithms of the two gradings such that the end cells have the sizes wanted (as shares of the
 * layer). */
static void find_grading(double *weight, int cells, const double wanted[2], double grading[2]) {
  double floor_ = elementary_log(SMALLEST_GRADING);
  grading[0] = grading[1] = 0;
  for (int sweep = 0; sweep < 40; sweep++) {
    cell_weights(weight, cells, grading[0], grading[1]);
    double moved = 0;
    for (int end = 0; end < 2; end++) {
      double have = weight[end ? cells - 1 : 0];
      double next = grading[end] + elementary_log(fmin(wanted[end], 1) / have);
      next = fmin(0, fmax(floor_, next));
      moved = fmax(moved, fabs(next - grading[end]));
      grading[end] = next;
    }
    if (moved < 1e-3) break;
  }
  cell_weights(weight, cells, grading[0], grading[1]);
}

/* ---- geometry ---- */

static double power_of(double r, int power) {
  return power == 0 ? 1 : power == 1 ? r : r * r;
}

/* Integral of A(r) dr between two radii. */
static double volume_between(double a, double b, int power) {
  if (power == 0) return b - a;
  if (power == 1) return 0.5 * (b - a) * (b + a);
  return (b - a) * (b * b + b * a + a * a) / 3;
}

/* 1/integral of dr/A(r); in the innermost layer of a solid body the mean-radius form, exact for a
 * parabola. */
static double conductance_between(double a, double b, int power, bool around_axis) {
  double middle = 0.5 * (a + b);
  if (power == 0) return 1 / (b - a);
  if (around_axis) return power_of(middle, power) / (b - a);
  return power == 1 ? 1 / elementary_log(b / a) : a * b / (b - a);
}

/* ---- shares of the layers ---- */

static int even_at_least(double cells, int least) {
  int n = 2 * (int)(cells / 2 + 0.5);
  return n < least ? least : n;
}

static int computed_layers(const heat_case *c, bool halved) {
  return halved ? (c->part.layers.count + 1) / 2 : c->part.layers.count;
}

static double computed_thickness(const heat_case *c, int layer, bool halved) {
  int count = c->part.layers.count;
  double whole = c->part.layers.items[layer].thickness;
  return halved && count % 2 && layer == count / 2 ? whole / 2 : whole;
}

/* Diffusion length of a layer: thickness / sqrt(diffusivity). */
static double layer_weight(const heat_case *c, const property *properties, int layer, bool halved) {
  const struct layer *l = &c->part.layers.items[layer];
  const property *p = &properties[l->material];
  return computed_thickness(c, layer, halved) /
         sqrt(p->largest_conductivity / p->reference_capacity);
}

static void share_cells(int *cells, const heat_case *c, const mesh_plan *plan,
                        const property *properties) {
  int layers = computed_layers(c, plan->halved);
  double sum = 0;
  int whole = plan->halved ? 2 * plan->cells : plan->cells;
  int fewest = even_at_least(whole * LEAST_SHARE, FEWEST_CELLS);
  for (int i = 0; i < layers; i++) sum += layer_weight(c, properties, i, plan->halved);
  for (int i = 0; i < layers; i++)
    cells[i] =
        even_at_least(plan->cells * layer_weight(c, properties, i, plan->halved) / sum, fewest);
}

/* ---- building ---- */

static status take_arrays(mesh *m, int nodes, int layers, arena *memory, fault *f) {
  m->nodes = nodes;
  m->layers = layers;
  m->position = arena_array(memory, (size_t)nodes, sizeof(double));
  m->volume = arena_array(memory, (size_t)nodes, sizeof(double));
  m->conductance = arena_array(memory, (size_t)nodes, sizeof(double));
  m->contact = arena_array(memory, (size_t)nodes, sizeof(bool));
  m->layer = arena_array(memory, (size_t)layers, sizeof *m->layer);
  if (!m->position || !m->volume || !m->conductance || !m->contact || !m->layer)
    return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  return STATUS_OK;
}

static void place_nodes(double *position, double from, double thickness, const double *weight,
                        int cells, int keep_every) {
  double at = 0;
  position[0] = from;
  for (int i = 1; i <= cells; i++) {
    at += weight[i - 1];
    if (i % keep_every == 0) position[i / keep_every] = from + thickness * at;
  }
  position[cells / keep_every] = from + thickness;
}

static void fill_layer(mesh *m, const mesh_layer *l, bool around_axis) {
  for (int i = l->first; i <= l->last; i++) {
    double left = i > l->first ? 0.5 * (m->position[i - 1] + m->position[i]) : m->position[i];
    double right = i < l->last ? 0.5 * (m->position[i] + m->position[i + 1]) : m->position[i];
    m->volume[i] = volume_between(left, right, m->power);
    if (i < l->last)
      m->conductance[i] = conductance_between(m->position[i], m->position[i + 1], m->power,
                                              around_axis && l->first == 0);
  }
}

static void join_layers(mesh *m, int node, double resistance) {
  double conductance = resistance > 0 ? 1 / resistance : LARGEST_CONTACT_CONDUCTANCE;
  if (conductance > LARGEST_CONTACT_CONDUCTANCE) conductance = LARGEST_CONTACT_CONDUCTANCE;
  m->conductance[node] = conductance * power_of(m->position[node], m->power);
  m->contact[node] = true;
}

status mesh_build(mesh *m, const heat_case *c, const mesh_plan *plan, const property *properties,
                  arena *memory, fault *f) {
  memset(m, 0, sizeof *m);
  static const double wholes[3] = {1, 6.283185307179586476925, 12.56637061435917295385};
  int cells[LIMIT_LAYERS], nodes = 0, layers = computed_layers(c, plan->halved), most = 0;
  share_cells(cells, c, plan, properties);
  for (int i = 0; i < layers; i++) {
    nodes += cells[i] / plan->keep_every + 1;
    if (cells[i] > most) most = cells[i];
  }
  if (nodes > LIMIT_NODES)
    return fail(f, STATUS_BEYOND_LIMIT, "", "the section would take %d nodes; the limit is %d",
                nodes, LIMIT_NODES);
  status bad = take_arrays(m, nodes, layers, memory, f);
  double *weight = arena_array(memory, (size_t)most, sizeof(double));
  if (bad) return bad;
  if (!weight) return fail(f, STATUS_NO_MEMORY, "", "out of memory");

  double at, extent = c->part.shape->extent(&c->part, &at);
  m->power = c->part.shape->power;
  m->whole = wholes[m->power];
  m->halved = plan->halved;
  m->whole_layers = c->part.layers.count;
  m->middle_shared = plan->halved && m->whole_layers % 2;
  m->solid = !c->part.shape->hollow(&c->part);
  m->width = at + extent;
  for (int i = 0, node = 0; i < layers; i++) {
    const struct layer *given = &c->part.layers.items[i];
    double thickness = computed_thickness(c, i, plan->halved), grading[2];
    double wanted[2] = {plan->end_cell[i][0] / thickness, plan->end_cell[i][1] / thickness};
    find_grading(weight, cells[i], wanted, grading);
    m->layer[i] = (mesh_layer){.first = node,
                               .last = node + cells[i] / plan->keep_every,
                               .material = given->material,
                               .layer = i,
                               .property = &properties[given->material],
                               .generation = given->heat_generation,
                               .start = given->start};
    place_nodes(m->position + node, at, thickness, weight, cells[i], plan->keep_every);
    fill_layer(m, &m->layer[i], m->solid);
    node = m->layer[i].last + 1;
    at += thickness;
    if (i + 1 < layers) join_layers(m, node - 1, given->contact);
  }
  m->area[0] = m->solid && m->power ? 0 : power_of(m->position[0], m->power);
  m->area[1] = power_of(m->position[nodes - 1], m->power);
  return STATUS_OK;
}

/* ---- places ---- */

int mesh_layer_of(const mesh *m, int layer) {
  return layer < m->layers ? layer : m->whole_layers - 1 - layer;
}

static void lagrange(mesh_spot *s, const double *x, double at) {
  for (int i = 0; i < s->count; i++) {
    double weight = 1;
    for (int j = 0; j < s->count; j++)
      if (j != i) weight *= (at - x[j]) / (x[i] - x[j]);
    s->weight[i] = weight;
  }
}

mesh_spot mesh_locate(const mesh *m, const location *at) {
  double r = at->coordinate[0];
  if (m->halved && r > 0.5 * m->width) r = m->width - r;
  const mesh_layer *l = &m->layer[mesh_layer_of(m, at->layer)];
  double close = 1e-11 * m->width;
  mesh_spot s = {0};
  int low = l->first, high = l->last;
  while (high - low > 1) {
    int middle = (low + high) / 2;
    if (m->position[middle] <= r + close)
      low = middle;
    else
      high = middle;
  }
  if (fabs(m->position[high] - r) <= close) low = high;
  s.low = s.high = s.first = low;
  s.count = 1;
  s.weight[0] = 1;
  if (fabs(m->position[low] - r) <= close || low == l->last) return s;
  s.high = low + 1;
  int nodes = l->last - l->first + 1;
  s.count = nodes < 4 ? nodes : 4;
  s.first = low - 1;
  if (s.first < l->first) s.first = l->first;
  if (s.first + s.count - 1 > l->last) s.first = l->last - s.count + 1;
  lagrange(&s, m->position + s.first, r);
  return s;
}

double mesh_spot_value(const mesh_spot *s, const double *temperature) {
  double value = 0;
  for (int i = 0; i < s->count; i++) value += s->weight[i] * temperature[s->first + i];
  if (s->low == s->high) return value;
  double a = temperature[s->low], b = temperature[s->high];
  double least = a < b ? a : b, most = a < b ? b : a;
  /* an extremum between two nodes shows in the slopes on both sides; else the profile is kept
   * monotone */
  int left = s->low - 1 >= s->first ? s->low - 1 : s->low;
  int right = s->high + 1 < s->first + s->count ? s->high + 1 : s->high;
  bool turns = (a - temperature[left]) * (temperature[right] - b) < 0;
  if (turns) return value;
  return value < least ? least : value > most ? most : value;
}

double mesh_volume(const mesh *m, int first, int last) {
  double sum = 0;
  for (int i = first; i <= last; i++) sum += m->volume[i];
  return sum;
}

int mesh_whole_nodes(const mesh *m) {
  if (!m->halved) return m->nodes;
  return m->middle_shared ? 2 * m->nodes - 1 : 2 * m->nodes;
}
