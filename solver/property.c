/* property.c: curves, heat content, and the tables T(H), theta(H).

   H(T) = integral of rho c dT + latent heat, theta(T) = integral of k dT. Each kink-free stretch of
   temperature (and each latent heat released at one temperature) is a segment with its own grid,
   uniform in H; between grid points both functions are cubic Hermite with the exact slopes dT/dH =
   1/(rho c), dtheta/dH = k/(rho c). */
#include "property.h"

#include "limit.h"
#include "physics.h"

#include <math.h>
#include <string.h>

enum { MOST_KINKS = 3 * 2 * LIMIT_PIECES + 2 * LIMIT_LATENT_HEATS + 2 };

static double piece_value(const piece *p, double temperature) {
  double x = temperature - ZERO_CELSIUS;
  double value = p->poly[4];
  for (int i = 3; i >= 0; i--) value = value * x + p->poly[i];
  if (p->rational != 0) value += p->rational / (x - p->pole);
  return value;
}

/* Value with the piece chosen by `inside`, a temperature strictly between two kinks; so one-sided
 * at kinks. */
static double curve_inside(const curve *c, double inside, double temperature) {
  const piece *first = c->pieces, *last = c->pieces + c->count - 1;
  if (inside <= first->from) return piece_value(first, first->from);
  if (inside >= last->to) return piece_value(last, last->to);
  int low = 0, high = c->count - 1;
  while (low < high) {
    int middle = (low + high) / 2;
    if (inside < c->pieces[middle].to)
      high = middle;
    else
      low = middle + 1;
  }
  return piece_value(&c->pieces[low], temperature);
}

double curve_value(const curve *c, double temperature) {
  const piece *first = c->pieces, *last = c->pieces + c->count - 1;
  if (temperature <= first->from) return piece_value(first, first->from);
  if (temperature >= last->to) return piece_value(last, last->to);
  int low = 0, high = c->count - 1;
  while (low < high) {
    int middle = (low + high) / 2;
    if (temperature < c->pieces[middle].to)
      high = middle;
    else
      low = middle + 1;
  }
  return piece_value(&c->pieces[low], temperature);
}

/* A stretch of temperature without kinks. */
typedef struct stretch {
  const material *material;
  double from, to;
  double latent; /* J/(kg.K), spread over the stretch */
} stretch;

static double capacity(const stretch *s, double temperature) {
  double inside = s->from + (s->to - s->from) / 2;
  const material *m = s->material;
  return curve_inside(&m->density, inside, temperature) *
         (curve_inside(&m->specific_heat, inside, temperature) + s->latent);
}

static double conductivity(const stretch *s, double temperature) {
  double inside = s->from + (s->to - s->from) / 2;
  return curve_inside(&s->material->conductivity, inside, temperature);
}

/* Gauss-Legendre, five points: exact to degree nine. Abramowitz & Stegun, table 25.4. */
static double gauss(double (*f)(const stretch *, double), const stretch *s, double from,
                    double to) {
  static const double x[5] = {0, 0.5384693101056831, -0.5384693101056831, 0.9061798459386640,
                              -0.9061798459386640};
  static const double w[5] = {0.5688888888888889, 0.4786286704993665, 0.4786286704993665,
                              0.2369268850561891, 0.2369268850561891};
  double half = (to - from) / 2, middle = from + half, sum = 0;
  for (int i = 0; i < 5; i++) sum += w[i] * f(s, middle + half * x[i]);
  return sum * half;
}

/* ---- kinks ---- */

typedef struct kinks {
  int count;
  double at[MOST_KINKS];
} kinks;

static void kink_add(kinks *k, double temperature, double from, double to) {
  if (!(temperature > from && temperature < to)) return;
  int place = k->count;
  while (place > 0 && k->at[place - 1] > temperature) place--;
  if (place > 0 && k->at[place - 1] == temperature) return;
  if (k->count == MOST_KINKS) return;
  memmove(&k->at[place + 1], &k->at[place], (size_t)(k->count - place) * sizeof k->at[0]);
  k->at[place] = temperature;
  k->count++;
}

static void kinks_of_curve(kinks *k, const curve *c, double from, double to) {
  for (int i = 0; i < c->count; i++) {
    kink_add(k, c->pieces[i].from, from, to);
    kink_add(k, c->pieces[i].to, from, to);
  }
}

/* All temperatures in (from, to) where k, rho, c or the release of latent heat has a kink, with
 * both ends. */
static void kinks_find(kinks *k, const material *m, double from, double to) {
  k->count = 0;
  kinks_of_curve(k, &m->conductivity, from, to);
  kinks_of_curve(k, &m->density, from, to);
  kinks_of_curve(k, &m->specific_heat, from, to);
  for (int i = 0; i < m->latent.count; i++) {
    kink_add(k, m->latent.items[i].from, from, to);
    kink_add(k, m->latent.items[i].to, from, to);
  }
  memmove(&k->at[1], &k->at[0], (size_t)k->count * sizeof k->at[0]);
  k->at[0] = from;
  k->at[++k->count] = to;
  k->count++;
}

static stretch stretch_of(const material *m, double from, double to) {
  stretch s = {.material = m, .from = from, .to = to};
  double middle = from + (to - from) / 2;
  for (int i = 0; i < m->latent.count; i++) {
    const latent_heat *l = &m->latent.items[i];
    if (l->to > l->from && middle > l->from && middle < l->to)
      s.latent += l->heat / (l->to - l->from);
  }
  return s;
}

/* J/m3 released at exactly this temperature. */
static double sharp_heat(const material *m, double temperature) {
  double sum = 0;
  for (int i = 0; i < m->latent.count; i++) {
    const latent_heat *l = &m->latent.items[i];
    if (l->from == l->to && l->from == temperature) sum += l->heat;
  }
  return sum ? sum * curve_value(&m->density, temperature) : 0;
}

static double stretch_heat(const stretch *s) {
  enum { PANELS = 64 };
  double sum = 0, width = (s->to - s->from) / PANELS;
  for (int i = 0; i < PANELS; i++)
    sum += gauss(capacity, s, s->from + i * width, s->from + (i + 1) * width);
  return sum;
}

double material_heat(const material *m, double from, double to) {
  if (to < from) return -material_heat(m, to, from);
  if (to == from) return 0;
  kinks k;
  kinks_find(&k, m, from, to);
  double sum = 0;
  for (int i = 0; i + 1 < k.count; i++) {
    stretch s = stretch_of(m, k.at[i], k.at[i + 1]);
    sum += stretch_heat(&s) + sharp_heat(m, k.at[i + 1]);
  }
  return sum;
}

/* ---- the fast table ---- */

typedef struct builder {
  property *property;
  property_segment *segment;
  double (*row)[8];
  double enthalpy, potential; /* so far */
} builder;

/* Cubic in f of an interval from (y0, slope d0 dH) to (y1, d1 dH), kept monotone (Fritsch & Carlson
 * 1980). */
static void hermite(double *c, double y0, double y1, double d0, double d1) {
  double rise = y1 - y0;
  if (d0 > 3 * rise) d0 = 3 * rise;
  if (d1 > 3 * rise) d1 = 3 * rise;
  c[0] = y0;
  c[1] = d0;
  c[2] = 3 * rise - 2 * d0 - d1;
  c[3] = d0 + d1 - 2 * rise;
}

/* Temperature at which the stretch has taken up `heat` above `from`: Newton on the integral, kept
 * in bounds. */
static double temperature_after(const stretch *s, double from, double heat, double guess) {
  double t = guess;
  for (int i = 0; i < 30; i++) {
    double excess = gauss(capacity, s, from, t) - heat;
    double next = t - excess / capacity(s, t);
    if (next < from) next = from;
    if (next > s->to) next = s->to;
    if (fabs(next - t) <= 1e-14 * t) return next;
    t = next;
  }
  return t;
}

static void add_stretch(builder *b, const stretch *s, int rows, double heat) {
  property_segment *segment = &b->segment[b->property->segments++];
  double step = heat / rows, t0 = s->from;
  segment->start = b->enthalpy;
  segment->inverse = 1 / step;
  segment->first = b->property->segments == 1 ? 0 : segment[-1].first + segment[-1].count;
  segment->count = rows;
  for (int i = 0; i < rows; i++) {
    double *row = b->row[segment->first + i];
    double guess = t0 + step / capacity(s, t0);
    double t1 =
        i == rows - 1 ? s->to : temperature_after(s, t0, step, guess < s->to ? guess : s->to);
    double c0 = capacity(s, t0), c1 = capacity(s, t1);
    double potential = b->potential + gauss(conductivity, s, t0, t1);
    hermite(row, b->potential, potential, step * conductivity(s, t0) / c0,
            step * conductivity(s, t1) / c1);
    hermite(row + 4, t0, t1, step / c0, step / c1);
    b->potential = potential;
    t0 = t1;
  }
  b->enthalpy += heat;
}

/* A latent heat at one temperature: T and theta stand still. */
static void add_plateau(builder *b, double temperature, double heat) {
  property_segment *segment = &b->segment[b->property->segments++];
  segment->start = b->enthalpy;
  segment->inverse = 1 / heat;
  segment->first = b->property->segments == 1 ? 0 : segment[-1].first + segment[-1].count;
  segment->count = 1;
  double *row = b->row[segment->first];
  memset(row, 0, sizeof b->row[0]);
  row[0] = b->potential;
  row[4] = temperature;
  b->enthalpy += heat;
}

static status check_positive(const stretch *s, fault *f) {
  for (int i = 0; i <= 16; i++) {
    double t = s->from + (s->to - s->from) * i / 16;
    double c = capacity(s, t), k = conductivity(s, t);
    if (!(c > 0) || !isfinite(c) || !(k > 0) || !isfinite(k))
      return fail(f, STATUS_BAD_ARGUMENT, "",
                  "material %s: conductivity, density and specific heat must be greater than 0; at "
                  "%.6g degC they are not",
                  s->material->name ? s->material->name : "", t - ZERO_CELSIUS);
  }
  return STATUS_OK;
}

static void note_extremes(property *p, const stretch *s) {
  for (int i = 0; i <= 16; i++) {
    double t = s->from + (s->to - s->from) * i / 16, k = conductivity(s, t);
    double sensible = capacity(s, t);
    if (sensible > p->peak_capacity) p->peak_capacity = sensible;
    if (s->latent > 0) {
      stretch bare = *s;
      bare.latent = 0;
      sensible = capacity(&bare, t);
    }
    if (sensible < p->reference_capacity) p->reference_capacity = sensible;
    if (k > p->largest_conductivity) p->largest_conductivity = k;
    if (k < p->smallest_conductivity) p->smallest_conductivity = k;
  }
}

/* Rows for a stretch: a share by temperature, and never too few where c turns sharply. */
static int rows_of(const stretch *s, double whole, int intervals) {
  double share = intervals * (s->to - s->from) / whole;
  double low = INFINITY, high = 0;
  for (int i = 0; i <= 8; i++) {
    double c = capacity(s, s->from + (s->to - s->from) * i / 8);
    if (c < low) low = c;
    if (c > high) high = c;
  }
  int rows = (int)(share + 1);
  if (high > 1.001 * low) rows = (int)(rows * (1 + 2 * (high / low - 1)) + 8);
  return rows < intervals ? rows : intervals;
}

status property_build(property *p, const material *m, double from, double to, int intervals,
                      arena *memory, fault *f) {
  memset(p, 0, sizeof *p);
  kinks k;
  kinks_find(&k, m, from, to);
  p->material = m;
  p->from = from;
  p->to = to;
  p->reference_capacity = p->smallest_conductivity = INFINITY;

  int rows = 0;
  for (int i = 0; i + 1 < k.count; i++) {
    stretch s = stretch_of(m, k.at[i], k.at[i + 1]);
    status bad = check_positive(&s, f);
    if (bad) return bad;
    note_extremes(p, &s);
    rows += rows_of(&s, to - from, intervals) + 1;
  }
  builder b = {.property = p};
  b.segment = arena_array(memory, (size_t)k.count * 2, sizeof *b.segment);
  b.row = arena_array(memory, (size_t)rows, sizeof *b.row);
  if (!b.segment || !b.row) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  for (int i = 0; i + 1 < k.count; i++) {
    stretch s = stretch_of(m, k.at[i], k.at[i + 1]);
    add_stretch(&b, &s, rows_of(&s, to - from, intervals), stretch_heat(&s));
    double sharp = i + 2 < k.count ? sharp_heat(m, k.at[i + 1]) : 0;
    if (!(sharp > 0)) continue;
    add_plateau(&b, k.at[i + 1], sharp);
    p->peak_capacity = INFINITY;
  }
  p->segment = b.segment;
  p->row = (const double(*)[8])b.row;
  p->most = b.enthalpy;
  return STATUS_OK;
}

/* The row of an enthalpy and the fraction in it; outside of the range the end rows' cubics would
   turn, so the fraction is kept in 0..1 and the rest is told apart in *beyond (J/m3). */
static inline const double *row_in(const property *p, int s, double enthalpy, double *fraction,
                                   double *inverse, double *beyond) {
  const property_segment *segment = &p->segment[s];
  double x = (enthalpy - segment->start) * segment->inverse;
  int last = segment->count - 1;
  int i =
      x > 0 ? x < last ? (int)x : last : 0; /* a wild trial state, even NAN, stays in the table */
  double part = x - i, kept = part < 0 ? 0 : part > 1 ? 1 : part;
  *inverse = segment->inverse;
  *beyond = part == kept ? 0 : (part - kept) / segment->inverse;
  *fraction = kept;
  return p->row[segment->first + i];
}

/* The segment of an enthalpy, sought from a guess: neighbours in space are neighbours in H. */
static inline int segment_of(const property *p, int guess, double enthalpy) {
  while (guess + 1 < p->segments && enthalpy >= p->segment[guess + 1].start) guess++;
  while (guess > 0 && enthalpy < p->segment[guess].start) guess--;
  return guess;
}

static inline const double *row_of(const property *p, double enthalpy, double *fraction,
                                   double *inverse, double *beyond) {
  return row_in(p, segment_of(p, 0, enthalpy), enthalpy, fraction, inverse, beyond);
}

static inline double cubic(const double *c, double f, double inverse, double beyond,
                           double *slope) {
  *slope = (c[1] + f * (2 * c[2] + 3 * c[3] * f)) * inverse;
  return c[0] + f * (c[1] + f * (c[2] + f * c[3])) + beyond * *slope;
}

double property_temperature(const property *p, double enthalpy, double *slope) {
  double f, inverse, beyond;
  const double *row = row_of(p, enthalpy, &f, &inverse, &beyond);
  return cubic(row + 4, f, inverse, beyond, slope);
}

double property_potential(const property *p, double enthalpy, double *slope) {
  double f, inverse, beyond;
  const double *row = row_of(p, enthalpy, &f, &inverse, &beyond);
  return cubic(row, f, inverse, beyond, slope);
}

void property_potentials(const property *p, int count, const double *enthalpy, double *potential,
                         double *slope) {
  double f, inverse, beyond, unused;
  int guess = 0;
  for (int i = 0; i < count; i++) {
    guess = segment_of(p, guess, enthalpy[i]);
    const double *row = row_in(p, guess, enthalpy[i], &f, &inverse, &beyond);
    potential[i] = cubic(row, f, inverse, beyond, slope ? &slope[i] : &unused);
  }
}

void property_temperatures(const property *p, int count, const double *enthalpy,
                           double *temperature) {
  double f, inverse, beyond, slope;
  int guess = 0;
  for (int i = 0; i < count; i++) {
    guess = segment_of(p, guess, enthalpy[i]);
    const double *row = row_in(p, guess, enthalpy[i], &f, &inverse, &beyond);
    temperature[i] = cubic(row + 4, f, inverse, beyond, &slope);
  }
}

/* The table's own cubic is inverted, so that T(H(T)) = T to round-off. */
double property_enthalpy(const property *p, double temperature) {
  int s = p->segments - 1;
  while (s > 0 && p->row[p->segment[s].first][4] > temperature) s--;
  const property_segment *segment = &p->segment[s];
  if (segment->count == 1 &&
      p->row[segment->first][5] == 0) /* a plateau reached from above: liquid side */
    return segment->start + 1 / segment->inverse;
  double low = segment->start, high = segment->start + segment->count / segment->inverse, slope;
  if (s == 0 && temperature < p->from)
    low += (temperature - p->from) * 4 * p->reference_capacity * 1e3;
  if (s == p->segments - 1 && temperature > p->to)
    high += (temperature - p->to) * p->reference_capacity * 1e3;
  double h = low + (high - low) / 2;
  for (int i = 0; i < 200 && high - low > 0; i++) {
    double excess = property_temperature(p, h, &slope) - temperature;
    if (excess == 0) break;
    if (excess < 0)
      low = h;
    else
      high = h;
    double next = slope > 0 ? h - excess / slope : low + (high - low) / 2;
    if (!(next > low && next < high)) next = low + (high - low) / 2;
    if (next == h || next == low || next == high) break;
    h = next;
  }
  return h;
}
