/* figure_time_to.c: the first time that a place or an accumulating figure reaches a level. */
#include "figure_kit.h"

typedef struct state {
  bool begun, steady, found;
  double when, rate;
} state;

static const parameter parameters[] = {
    FIGURE_LEVEL("rises_to", rises_to, "The first time at which the value is at or above this"),
    FIGURE_LEVEL("falls_to", falls_to, "The first time at which the value is at or below this"),
};

static int direction(const figure *f) {
  return isfinite(f->rises_to) ? 1 : -1;
}

/* A sum that ends a stage when it reaches a value is that value but for the last digits: the step
   was made again to end there. */
#define SAME_SUM 1e-8

/* The level, shifted so that being at it counts as having reached it. */
static double level(const figure_run *r) {
  const figure *f = r->figure;
  double wanted = direction(f) > 0 ? f->rises_to : f->falls_to;
  double hair = f->of.is_figure ? SAME_SUM * fabs(wanted) : SAME_TEMPERATURE;
  return wanted - direction(f) * hair;
}

static const char *check(const figure *f, const heat_case *c, const char **member) {
  bool rises = isfinite(f->rises_to), falls = isfinite(f->falls_to);
  *member = rises ? "falls_to" : "rises_to";
  if (rises && falls) return "stands beside rises_to: give one of them";
  if (!rises && !falls) return "must be given, or falls_to";
  if (!f->of.is_figure) return NULL;
  *member = "of";
  if (!c->figures.items[f->of.figure].kind->accumulates)
    return "must be a place or an accumulating figure";
  *member = "falls_to";
  return falls ? "can never happen: an accumulating figure does not fall" : NULL;
}

static void begin(figure_run *r) {
  state *x = r->self;
  *x = (state){.when = NAN, .rate = NAN};
}

static void reached(state *x, const view *v, double t) {
  x->found = true;
  x->when = t;
  x->rate = v->watched ? NAN : view_rate(v, t); /* of a sum: nothing per kelvin */
}

static void observe(figure_run *r, const segment *s) {
  state *x = r->self;
  double times[SEGMENT_SAMPLES];
  if (x->found || !figure_sees(r, s)) return;
  x->begun = true;
  x->steady |= segment_is_steady(r, s);
  if (segment_is_steady(r, s)) return;
  view v = figure_view(r, s);
  double first = view_sample(&v, 0), limit = level(r);
  int sign = direction(r->figure);
  if (sign * (first - limit) >= 0)
    reached(x, &v, s->t0);
  else if (view_crossings(&v, NAN, limit, sign, false, times))
    reached(x, &v, times[0]);
}

static void finish(figure_run *r, figure_value *v) {
  const state *x = r->self;
  if (x->found)
    figure_found(v, x->when, NAN, 1 / fabs(x->rate));
  else if (x->steady)
    figure_missing(v, "a steady state has no course of time");
  else if (!x->begun)
    figure_missing(v, "none of the stages that count was computed");
  else
    figure_missing(v, direction(r->figure) > 0 ? "it never rises to that value"
                                               : "it never falls to that value");
}

const figure_kind time_to_kind = {
    .name = "time_to",
    .about = "First time, from the start of the case, at which a place or an accumulating figure "
             "rises or falls to a value",
    .parameters = FIGURE_PARAMETERS("time_to", "Exactly one of the two", parameters),
    .takes_place = true,
    .size = sizeof(state),
    .dimension = figure_gives_time,
    .trace = TRACE_PLACE,
    .check = check,
    .begin = begin,
    .observe = observe,
    .finish = finish,
};
