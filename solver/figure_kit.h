/* figure_kit.h: what the rows of the table of figures share. Internal to solver/figure*.c. */
#ifndef CORESOAK_FIGURE_KIT_H
#define CORESOAK_FIGURE_KIT_H

#include "figure.h"

#include <math.h>

/* A temperature within this of a level counts as being at it: round-off of T(H) must not decide
   whether a surface held at exactly 850 degC is "above 850 degC". A thousandth of the finest
   numerical error. */
#define SAME_TEMPERATURE 1e-6 /* K */

/* ---- rows of parameters ---- */

#define FIGURE_MEMBER(name_, kind_, member_, of_, about_)                                          \
  {                                                                                                \
    .name = name_, .kind = kind_, .dimension = DIMENSION_ANY, .offset = offsetof(figure, member_), \
    .least = -INFINITY, .most = INFINITY, .fallback = NAN, .of = of_, .about = about_              \
  }

#define FIGURE_LEVEL(name_, member_, about_)                                                       \
  FIGURE_MEMBER(name_, VALUE_LEVEL, member_, NULL, about_)

#define FIGURE_QUANTITY(name_, dimension_, member_, flags_, least_, most_, fallback_, about_)      \
  {                                                                                                \
    .name = name_, .kind = VALUE_QUANTITY, .dimension = DIMENSION_##dimension_,                    \
    .offset = offsetof(figure, member_), .flags = flags_, .least = least_, .most = most_,          \
    .fallback = fallback_, .about = about_                                                         \
  }

#define FIGURE_PARAMETERS(name_, about_, rows)                                                     \
  {                                                                                                \
    .name = name_, .about = about_, .size = sizeof(figure), .parameters = rows,                    \
    .count = COUNT_OF(rows)                                                                        \
  }

#define FIGURE_NO_PARAMETERS(name_, about_)                                                        \
  { .name = name_, .about = about_, .size = sizeof(figure), .parameters = NULL, .count = 0 }

/* ---- segments ---- */

/* Whether a figure takes note of a segment: its stage counts, and it is not the steady state after
   other stages (which only "end:STAGE" sees). */
bool figure_sees(const figure_run *r, const segment *s);

/* Whether a segment is a steady state: it has a place in no course of time. */
bool segment_is_steady(const figure_run *r, const segment *s);

/* Time of sample j. */
double segment_time(const segment *s, int j);

/* Whether the figure's `time` lies in this segment, and where. An absent time is the end of every
   segment, so that the last one seen stands. The first segment that holds a time decides: just
   before a jump. */
bool figure_instant_in(const figure_run *r, const segment *s, double *t);

/* Why a `time` was not found, given the end of the last segment shown to the figure (NAN: none). */
const char *figure_instant_why(const figure_run *r, double seen_until);

/* ---- values ---- */

void figure_found(figure_value *v, double value, double when, double sensitivity);
void figure_missing(figure_value *v, const char *why);

/* What the figure watches, along one segment: a trace, or the sum of an accumulating figure. */
typedef struct view {
  const segment *segment;
  int trace;
  const figure_run *watched;
} view;

view figure_view(const figure_run *r, const segment *s);
double view_value(const view *v, double t);
double view_sample(const view *v, int j);

/* Rate of change at t by a difference inside the segment; NAN in an instant. */
double view_rate(const view *v, double t);

/* Times at which the view crosses a level, rising; at most SEGMENT_SAMPLES. `previous` is the value
   just before the segment (a jump between the two is a crossing at t0), NAN if there is none.
   direction +1, -1 or 0 (both). A crossing is counted where the level is reached or, with
   `leaving`, where it is left; so one at the common end of two segments is counted once. Only what
   the samples reveal is found. */
int view_crossings(const view *v, double previous, double level, int direction, bool leaving,
                   double times[SEGMENT_SAMPLES]);

/* Root of f between a and b, where it has the values fa and fb of opposite sign: regula falsi
   (Illinois variant, Dowell & Jarratt 1971) with bisection where that is slow; to 1e-10 of the
   interval. */
double root_between(double (*f)(const void *context, double t), const void *context, double a,
                    double b, double fa, double fb);

/* Largest value (sign +1) or smallest (-1) in the segment: of the samples, and of the curve around
   the best of them where a parabola through three says that there is more, and that may beat
   `beat` (NAN: anything does). */
typedef struct extreme {
  double value, when;
} extreme;
extreme view_extreme(const view *v, int sign, double beat);

/* ---- check ---- */

/* For kinds that watch a place only: a fault naming `of` if a figure is named instead; else NULL.
 */
const char *figure_needs_place(const figure *f, const heat_case *c, const char **member);

dimension figure_gives_time(const figure *f, const heat_case *c);

/* ---- the rows ---- */

extern const figure_kind time_to_kind, time_at_temperature_kind, time_between_kind, at_kind,
    peak_kind, lowest_kind, rate_kind, heat_absorbed_kind, heat_flow_kind, lethality_kind,
    equivalent_age_kind, accumulated_kind, tempering_kind, maturity_kind, stress_kind;

#endif
