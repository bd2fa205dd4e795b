/* series.h: a value against time, with its breaks. */
#ifndef CORESOAK_SERIES_H
#define CORESOAK_SERIES_H

#include "parameter.h"
#include <stdbool.h>

/* Two columns of numbers, x never falling; a jump is two rows at one x. */
typedef struct table {
  int count;
  const double *x, *y;
} table;

typedef enum series_kind {
  SERIES_NONE,
  SERIES_CONSTANT,
  SERIES_TABLE,
  SERIES_SINE,
  SERIES_FIRE
} series_kind;

typedef enum fire_curve { FIRE_STANDARD, FIRE_HYDROCARBON, FIRE_EXTERNAL } fire_curve;
extern const char *const fire_curve_names[]; /* NULL-terminated */

/* One time series, in SI and kelvin. A ramp and a line are tables by the time they stand here. */
typedef struct series {
  series_kind kind;
  bool from_case_start; /* times count from the start of the case (logs), else from the stage's
                           start */
  double value;         /* SERIES_CONSTANT; the mean of SERIES_SINE */
  double amplitude, period, phase; /* SERIES_SINE: value + amplitude sin(2 pi t/period + phase) */
  fire_curve curve;                /* SERIES_FIRE, K */
  table table;     /* SERIES_TABLE: linear between rows, first and last value hold */
  const char *log; /* "F3/zone_1" if it came from a log, else NULL */
} series;

/* The forms in which a series may be given, for the reader and the schema: members ramp, table,
   sine, fire, line, log, series; each an object_type or a kind. The reader turns a form into a
   `series`. */
typedef struct ramp_form {
  double from, to, rate;
} ramp_form;
typedef struct sine_form {
  double mean, amplitude, period, phase;
} sine_form;
typedef struct zone_form {
  double length, value;
} zone_form;
typedef struct line_form {
  double speed, blend;
  LIST(zone_form) zones;
} line_form;
extern const object_type ramp_type, sine_type, zone_type,
    line_type; /* `from`, `to`, ... have DIMENSION_ANY */

/* Value at time t (s, from the series' own origin). At a jump the value after it. */
double series_value(const series *s, double t);

/* Value just before t: differs from series_value only at a jump. */
double series_before(const series *s, double t);

/* Value and slope (1/s) for t inside (from, to), an interval without breaks: at both ends the
   one-sided limits from inside. */
void series_within(const series *s, double from, double to, double t, double *value, double *slope);

/* The first break (row of a table) later than t, INFINITY if none. */
double series_next_break(const series *s, double t);

/* Longest step that sees the series' own curvature (period/16 of a sine), INFINITY if any will do.
 */
double series_longest_step(const series *s);

/* Smallest and largest value over the times [from, to]. */
void series_range(const series *s, double from, double to, double *least, double *most);

/* Last value: what a steady state uses. */
double series_last(const series *s, double at);

#endif
