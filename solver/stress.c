/* stress.c: thermoelastic stress across a section (stress.h has the equations).

   Between nodes the strain is the cubic with the nodes' values and three-point slopes, so that a
   parabola is integrated exactly; the modulus is straight between nodes. Gauss quadrature of three
   points is exact for the products. */
#include "stress.h"

#include "elementary.h"
#include "physics.h"

#include <math.h>

#define REFERENCE (ZERO_CELSIUS + 20)

/* ---- thermal strain ---- */

/* Integral of a piece between two temperatures inside it. */
static double piece_integral(const piece *p, double from, double to) {
  double a = from - ZERO_CELSIUS, b = to - ZERO_CELSIUS, sum = 0;
  for (int i = 4; i >= 0; i--) sum = sum * b + p->poly[i] / (i + 1);
  double below = 0;
  for (int i = 4; i >= 0; i--) below = below * a + p->poly[i] / (i + 1);
  double value = sum * b - below * a;
  if (p->rational != 0) value += p->rational * elementary_log((b - p->pole) / (a - p->pole));
  return value;
}

static double piece_start(const curve *c, int i) {
  return i == 0 && !isfinite(c->pieces[0].from) ? 0 : c->pieces[i].from;
}

void strain_table_init(strain_table *t, const curve *expansion) {
  t->expansion = expansion;
  t->from = piece_start(expansion, 0);
  t->before[0] = 0;
  for (int i = 0; i + 1 < expansion->count; i++)
    t->before[i + 1] =
        t->before[i] +
        piece_integral(&expansion->pieces[i], piece_start(expansion, i), expansion->pieces[i].to);
  t->reference = 0;
  t->reference = thermal_strain(t, REFERENCE);
}

double thermal_strain(const strain_table *t, double temperature) {
  const curve *c = t->expansion;
  int low = 0, high = c->count - 1;
  if (temperature < t->from)
    return (temperature - t->from) * curve_value(c, t->from) - t->reference;
  while (low < high) {
    int middle = (low + high) / 2;
    if (temperature < c->pieces[middle].to)
      high = middle;
    else
      low = middle + 1;
  }
  double top = fmin(temperature, c->pieces[low].to), beyond = temperature - top;
  double sum = t->before[low] + piece_integral(&c->pieces[low], piece_start(c, low), top);
  if (beyond > 0) sum += beyond * curve_value(c, top);
  return sum - t->reference;
}

/* ---- intervals between nodes ---- */

typedef struct knot {
  double x, strain, modulus;
} knot;

/* One interval at a time, with its neighbours for the slopes. */
typedef struct walk {
  const elastic *elastic;
  const section *section;
  const double *temperature;
  int next;
  bool has_before, has_after;
  knot before, left, right, after;
  double left_slope, right_slope;
} walk;

/* The next node at a place of its own: an interface inside the material has two. */
static bool load(walk *w, knot *k) {
  int i = w->next;
  if (i >= w->section->nodes) return false;
  *k = (knot){w->section->position[i], thermal_strain(&w->elastic->strain, w->temperature[i]),
              curve_value(w->elastic->modulus, w->temperature[i])};
  while (++i < w->section->nodes && !(w->section->position[i] > k->x)) continue;
  w->next = i;
  return true;
}

static double secant(const knot *a, const knot *b) {
  return (b->strain - a->strain) / (b->x - a->x);
}

/* Slope at b of the parabola through a, b, c. */
static double slope_at(const knot *a, const knot *b, const knot *c) {
  double part = (b->x - a->x) / (c->x - a->x);
  return part * secant(b, c) + (1 - part) * secant(a, b);
}

static void set_slopes(walk *w) {
  double straight = secant(&w->left, &w->right);
  bool axis = w->section->power > 0 && w->left.x == 0;
  w->left_slope = axis ? 0 : straight;
  if (w->has_before) w->left_slope = slope_at(&w->before, &w->left, &w->right);
  w->right_slope = 2 * straight - w->left_slope;
  if (w->has_after) w->right_slope = slope_at(&w->left, &w->right, &w->after);
  if (!w->has_before && !axis && w->has_after) w->left_slope = 2 * straight - w->right_slope;
}

static void walk_begin(walk *w, const elastic *e, const section *s, const double *temperature) {
  *w = (walk){.elastic = e, .section = s, .temperature = temperature};
  load(w, &w->left);
  load(w, &w->right);
  w->has_after = load(w, &w->after);
  set_slopes(w);
}

static bool walk_next(walk *w) {
  if (!w->has_after) return false;
  w->before = w->left;
  w->left = w->right;
  w->right = w->after;
  w->has_before = true;
  w->has_after = load(w, &w->after);
  set_slopes(w);
  return true;
}

/* Strain and modulus inside the interval. */
static knot inside(const walk *w, double x) {
  double h = w->right.x - w->left.x, f = (x - w->left.x) / h, g = 1 - f;
  double strain = g * g * (1 + 2 * f) * w->left.strain + f * f * (1 + 2 * g) * w->right.strain +
                  h * f * g * (g * w->left_slope - f * w->right_slope);
  return (knot){x, strain, w->left.modulus + f * (w->right.modulus - w->left.modulus)};
}

static double power_of(double r, int power) {
  return power == 0 ? 1 : power == 1 ? r : r * r;
}

/* Gauss-Legendre, three points on (0, 1); Abramowitz & Stegun, table 25.4. */
static const double gauss_at[3] = {0.11270166537925831, 0.5, 0.88729833462074169};
static const double gauss_weight[3] = {5.0 / 18, 8.0 / 18, 5.0 / 18};

/* Integral of e r^power from the left node to x. */
static double strain_integral(const walk *w, double x) {
  double sum = 0, h = x - w->left.x;
  for (int i = 0; i < 3; i++) {
    knot k = inside(w, w->left.x + gauss_at[i] * h);
    sum += gauss_weight[i] * h * k.strain * power_of(k.x, w->section->power);
  }
  return sum;
}

/* ---- the section as a whole ---- */

typedef struct whole {
  double inner, outer, middle;
  double stretch, bend; /* plate: m0, m1 */
  double total;         /* round: I(b) */
} whole;

static whole plate_balance(walk *w, whole b) {
  double e0 = 0, e1 = 0, e2 = 0, f0 = 0, f1 = 0;
  do {
    for (int i = 0; i < 3; i++) {
      double h = w->right.x - w->left.x;
      knot k = inside(w, w->left.x + gauss_at[i] * h);
      double x = k.x - b.middle, weight = gauss_weight[i] * h * k.modulus;
      e0 += weight;
      e1 += weight * x;
      e2 += weight * x * x;
      f0 += weight * k.strain;
      f1 += weight * k.strain * x;
    }
  } while (walk_next(w));
  double determinant = e0 * e2 - e1 * e1;
  b.stretch = (f0 * e2 - f1 * e1) / determinant;
  b.bend = (f1 * e0 - f0 * e1) / determinant;
  return b;
}

static whole balance(const elastic *e, const section *s, const double *temperature) {
  whole b = {.inner = s->position[0], .outer = s->position[s->nodes - 1]};
  walk w;
  b.middle = b.inner + (b.outer - b.inner) / 2;
  walk_begin(&w, e, s, temperature);
  if (s->power == 0) return plate_balance(&w, b);
  do b.total += strain_integral(&w, w.right.x);
  while (walk_next(&w));
  return b;
}

int stress_components(int power) {
  return power == 0 ? 1 : power == 1 ? 3 : 2;
}

static void cylinder(const whole *b, const knot *k, double integral, double factor, double out[3]) {
  double a2 = b->inner * b->inner, span = b->outer * b->outer - a2, r2 = k->x * k->x;
  if (r2 > 0) {
    out[0] = factor * ((r2 - a2) / span * b->total - integral) / r2;
    out[1] = factor * ((r2 + a2) / span * b->total + integral - k->strain * r2) / r2;
  } else {
    out[0] = out[1] = factor * (b->total / span - k->strain / 2);
  }
  out[2] = factor * (2 / span * b->total - k->strain);
}

static void sphere(const whole *b, const knot *k, double integral, double factor, double out[3]) {
  double a3 = b->inner * b->inner * b->inner, r3 = k->x * k->x * k->x;
  double span = b->outer * b->outer * b->outer - a3;
  if (r3 > 0) {
    out[0] = 2 * factor * ((r3 - a3) / span * b->total - integral) / r3;
    out[1] = factor * ((2 * r3 + a3) / span * b->total + integral - k->strain * r3) / r3;
  } else {
    out[0] = out[1] = 2 * factor * (b->total / span - k->strain / 3);
  }
}

static stress_state state_at(const elastic *e, int power, const whole *b, const knot *k,
                             double integral) {
  stress_state s = {.position = k->x};
  double factor = k->modulus / (1 - e->poisson);
  if (power == 0)
    s.component[0] = factor * (b->stretch + b->bend * (k->x - b->middle) - k->strain);
  else if (power == 1)
    cylinder(b, k, integral, factor, s.component);
  else
    sphere(b, k, integral, factor, s.component);
  return s;
}

stress_state stress_at(const elastic *e, const section *s, const double *temperature,
                       double position) {
  whole b = balance(e, s, temperature);
  double x = fmax(b.inner, fmin(b.outer, position)), integral = 0;
  walk w;
  walk_begin(&w, e, s, temperature);
  while (w.right.x < x && w.has_after) {
    integral += strain_integral(&w, w.right.x);
    walk_next(&w);
  }
  integral += strain_integral(&w, x);
  knot k = inside(&w, x);
  return state_at(e, s->power, &b, &k, integral);
}

/* Of places that are equal but for round-off the first one stands. */
#define SAME 1e-9

static void compare(const stress_state *s, int components, stress_extreme *largest,
                    stress_extreme *smallest) {
  for (int i = 0; i < components; i++) {
    double value = s->component[i];
    if (!(value <= largest->value + SAME * fabs(largest->value)))
      *largest = (stress_extreme){value, s->position};
    if (!(value >= smallest->value - SAME * fabs(smallest->value)))
      *smallest = (stress_extreme){value, s->position};
  }
}

void stress_extremes(const elastic *e, const section *s, const double *temperature,
                     stress_extreme *largest, stress_extreme *smallest) {
  whole b = balance(e, s, temperature);
  int components = stress_components(s->power);
  double integral = 0;
  walk w;
  walk_begin(&w, e, s, temperature);
  *largest = (stress_extreme){-INFINITY, NAN};
  *smallest = (stress_extreme){INFINITY, NAN};
  stress_state here = state_at(e, s->power, &b, &w.left, 0);
  compare(&here, components, largest, smallest);
  do {
    integral += strain_integral(&w, w.right.x);
    here = state_at(e, s->power, &b, &w.right, integral);
    compare(&here, components, largest, smallest);
  } while (walk_next(&w));
}
