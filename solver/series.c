/* series.c: a value against time: constant, table, sine, nominal fire curve. */
#include "series.h"

#include "elementary.h"
#include "physics.h"

#include <math.h>

const char *const fire_curve_names[] = {"standard", "hydrocarbon", "external", NULL};

#define TWO_PI 6.283185307179586476925

/* Last row with x <= t (after: a jump counts as passed) or x < t; -1 before the first. */
static int row_before(const table *t, double x, bool after) {
  int low = -1, high = t->count;
  while (high - low > 1) {
    int middle = low + (high - low) / 2;
    if (after ? t->x[middle] <= x : t->x[middle] < x)
      low = middle;
    else
      high = middle;
  }
  return low;
}

static double table_line(const table *t, int row, double x, double *slope) {
  *slope = 0;
  if (row < 0) return t->y[0];
  if (row >= t->count - 1) return t->y[t->count - 1];
  double width = t->x[row + 1] - t->x[row];
  if (!(width > 0)) return t->y[row + 1];
  *slope = (t->y[row + 1] - t->y[row]) / width;
  return t->y[row] + (x - t->x[row]) * *slope;
}

/* EN 1991-1-2:2002, 3.2: eq. 3.4, 3.6 and 3.5, gas temperature with t in minutes. */
static double fire_value(fire_curve curve, double t, double *slope) {
  double minutes = t > 0 ? t / 60 : 0, celsius = 20, per_minute = 0;
  switch (curve) {
  case FIRE_STANDARD:
    celsius = 20 + 345 * elementary_log10(8 * minutes + 1);
    per_minute = 345 * 0.4342944819032518277 * 8 / (8 * minutes + 1);
    break;
  case FIRE_HYDROCARBON: {
    double slow = 0.325 * elementary_exp(-0.167 * minutes);
    double fast = 0.675 * elementary_exp(-2.5 * minutes);
    celsius = 1080 * (1 - slow - fast) + 20;
    per_minute = 1080 * (0.167 * slow + 2.5 * fast);
    break;
  }
  case FIRE_EXTERNAL: {
    double slow = 0.687 * elementary_exp(-0.32 * minutes);
    double fast = 0.313 * elementary_exp(-3.8 * minutes);
    celsius = 660 * (1 - slow - fast) + 20;
    per_minute = 660 * (0.32 * slow + 3.8 * fast);
    break;
  }
  }
  *slope = t < 0 ? 0 : per_minute / 60;
  return celsius + ZERO_CELSIUS;
}

static double smooth_value(const series *s, double t, double *slope) {
  *slope = 0;
  if (s->kind == SERIES_FIRE) return fire_value(s->curve, t, slope);
  if (s->kind != SERIES_SINE) return s->value;
  double rate = TWO_PI / s->period, angle = rate * t + s->phase;
  *slope = s->amplitude * rate * elementary_cos(angle);
  return s->value + s->amplitude * elementary_sin(angle);
}

double series_value(const series *s, double t) {
  double slope;
  if (s->kind == SERIES_TABLE)
    return table_line(&s->table, row_before(&s->table, t, true), t, &slope);
  return smooth_value(s, t, &slope);
}

double series_before(const series *s, double t) {
  double slope;
  if (s->kind == SERIES_TABLE)
    return table_line(&s->table, row_before(&s->table, t, false), t, &slope);
  return smooth_value(s, t, &slope);
}

void series_within(const series *s, double from, double to, double t, double *value,
                   double *slope) {
  if (s->kind == SERIES_TABLE) {
    double middle = from + (to - from) / 2;
    *value = table_line(&s->table, row_before(&s->table, middle, true), t, slope);
  } else {
    *value = smooth_value(s, t, slope);
  }
}

double series_next_break(const series *s, double t) {
  if (s->kind != SERIES_TABLE) return INFINITY;
  int row = row_before(&s->table, t, true) + 1;
  return row < s->table.count ? s->table.x[row] : INFINITY;
}

double series_longest_step(const series *s) {
  return s->kind == SERIES_SINE ? s->period / 16 : INFINITY;
}

static void widen(double value, double *least, double *most) {
  if (value < *least) *least = value;
  if (value > *most) *most = value;
}

void series_range(const series *s, double from, double to, double *least, double *most) {
  *least = INFINITY;
  *most = -INFINITY;
  if (s->kind == SERIES_SINE) {
    widen(s->value - fabs(s->amplitude), least, most);
    widen(s->value + fabs(s->amplitude), least, most);
    return;
  }
  widen(series_value(s, from), least, most);
  widen(series_before(s, to), least, most);
  if (s->kind != SERIES_TABLE) return;
  for (int row = row_before(&s->table, from, true) + 1; row < s->table.count; row++) {
    if (s->table.x[row] > to) break;
    widen(s->table.y[row], least, most);
  }
}

double series_last(const series *s, double at) {
  if (s->kind == SERIES_TABLE) return s->table.y[s->table.count - 1];
  return series_value(s, at);
}
