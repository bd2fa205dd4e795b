/* figure_view.c: one watched quantity along a segment: its value, rate, crossings of a level,
 * extremes. */
#include "figure_kit.h"

#include <float.h>

view figure_view(const figure_run *r, const segment *s) {
  return (view){.segment = s, .trace = r->trace, .watched = r->watched};
}

double view_value(const view *v, double t) {
  if (v->watched) return v->watched->figure->kind->value_at(v->watched, v->segment, t);
  return v->segment->value(v->segment, v->trace, t);
}

double view_sample(const view *v, int j) {
  if (v->watched) return view_value(v, segment_time(v->segment, j));
  return v->segment->sample(v->segment, v->trace, j);
}

double view_rate(const view *v, double t) {
  const segment *s = v->segment;
  double d = 1e-3 * (s->t1 - s->t0);
  double from = fmax(s->t0, t - d), to = fmin(s->t1, t + d);
  if (!(to > from)) return NAN;
  return (view_value(v, to) - view_value(v, from)) / (to - from);
}

/* ---- crossings ---- */

enum { ROOT_ITERATIONS = 60 };

double root_between(double (*f)(const void *context, double t), const void *context, double a,
                    double b, double fa, double fb) {
  double close = 1e-10 * (b - a) + 2 * DBL_EPSILON * fabs(b), before = NAN;
  int kept = 0; /* the end that the last step kept: +1 b, -1 a */
  for (int i = 0; i < ROOT_ITERATIONS && b - a > close; i++) {
    bool bisect = i % 4 == 3;
    double t = bisect ? a + (b - a) / 2 : (a * fb - b * fa) / (fb - fa);
    if (!(t > a && t < b)) t = a + (b - a) / 2;
    double ft = f(context, t);
    if (ft == 0 || (!bisect && fabs(t - before) <= close)) return t;
    before = t;
    if ((ft < 0) == (fa < 0)) {
      a = t;
      fa = ft;
      if (kept > 0) fb /= 2;
      kept = 1;
    } else {
      b = t;
      fb = ft;
      if (kept < 0) fa /= 2;
      kept = -1;
    }
  }
  return a + (b - a) / 2;
}

typedef struct above_level {
  const view *view;
  double level;
} above_level;

static double above(const void *context, double t) {
  const above_level *x = context;
  return view_value(x->view, t) - x->level;
}

/* Whether a step from x to y (both relative to the level) crosses it. */
static bool crosses(double x, double y, int direction, bool leaving) {
  bool rises = leaving ? x <= 0 && y > 0 : x < 0 && y >= 0;
  bool falls = leaving ? x >= 0 && y < 0 : x > 0 && y <= 0;
  return (direction >= 0 && rises) || (direction <= 0 && falls);
}

int view_crossings(const view *v, double previous, double level, int direction, bool leaving,
                   double times[SEGMENT_SAMPLES]) {
  const segment *s = v->segment;
  above_level above_it = {v, level};
  int count = 0;
  double x = view_sample(v, 0) - level;
  if (crosses(previous - level, x, direction, leaving)) times[count++] = s->t0;
  if (!(s->t1 > s->t0)) return count;
  for (int j = 1; j < SEGMENT_SAMPLES; j++) {
    double y = view_sample(v, j) - level, a = segment_time(s, j - 1), b = segment_time(s, j);
    if (crosses(x, y, direction, leaving))
      times[count++] = y == 0 ? b : x == 0 ? a : root_between(above, &above_it, a, b, x, y);
    x = y;
  }
  return count;
}

int segment_crossings(const segment *s, int trace, double level, int direction,
                      double times[SEGMENT_SAMPLES]) {
  view v = {.segment = s, .trace = trace};
  return view_crossings(&v, NAN, level, direction, false, times);
}

/* ---- extremes ---- */

#define GOLDEN 0.61803398874989485
enum {
  GOLDEN_STEPS = 24
}; /* 1e-5 of the interval: the value is then right to 1e-10 of its curvature there */

static extreme golden_section(const view *v, int sign, double a, double b) {
  double c = b - GOLDEN * (b - a), d = a + GOLDEN * (b - a);
  double fc = sign * view_value(v, c), fd = sign * view_value(v, d);
  for (int i = 0; i < GOLDEN_STEPS; i++) {
    if (fc > fd) {
      b = d;
      d = c;
      fd = fc;
      c = b - GOLDEN * (b - a);
      fc = sign * view_value(v, c);
    } else {
      a = c;
      c = d;
      fc = fd;
      d = a + GOLDEN * (b - a);
      fd = sign * view_value(v, d);
    }
  }
  return fc > fd ? (extreme){sign * fc, c} : (extreme){sign * fd, d};
}

/* Vertex of the parabola through three equidistant values, in steps from the middle one; NAN if it
 * is no maximum. */
static double vertex(double before, double middle, double after) {
  double bend = before - 2 * middle + after;
  return bend < 0 ? 0.5 * (before - after) / bend : NAN;
}

extreme view_extreme(const view *v, int sign, double beat) {
  const segment *s = v->segment;
  double sample[SEGMENT_SAMPLES];
  int best = 0;
  if (!(s->t1 > s->t0)) return (extreme){view_sample(v, 0), s->t0};
  for (int j = 0; j < SEGMENT_SAMPLES; j++) {
    sample[j] = sign * view_sample(v, j);
    if (sample[j] > sample[best]) best = j;
  }
  extreme found = {sign * sample[best], segment_time(s, best)};
  int middle = best == 0 ? 1 : best == SEGMENT_SAMPLES - 1 ? best - 1 : best;
  double spread = sample[best] - fmin(sample[middle - 1], sample[middle + 1]);
  if (spread <= SAME_TEMPERATURE || sample[best] + spread <= sign * beat) return found;
  double at = middle + vertex(sample[middle - 1], sample[middle], sample[middle + 1]);
  if (!(at > 0 && at < SEGMENT_SAMPLES - 1)) return found;
  extreme refined =
      golden_section(v, sign, segment_time(s, middle - 1), segment_time(s, middle + 1));
  return sign * refined.value > sample[best] ? refined : found;
}
