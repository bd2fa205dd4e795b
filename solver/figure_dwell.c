/* figure_dwell.c: time at temperature, in total or the longest without a break. */
#include "figure_kit.h"

typedef struct state {
  bool begun, steady;
  double total, longest, unbroken; /* s; `unbroken` up to the end of the last segment */
  double sensitivity;              /* sum of 1 / |rate| over the crossings, s/K */
} state;

static const char *const counts[] = {"total", "longest", NULL};

static const parameter parameters[] = {
    FIGURE_LEVEL("above", above, "Time counts while the value is at or above this"),
    FIGURE_LEVEL("below", below, "Time counts while the value is at or below this"),
    {.name = "count",
     .kind = VALUE_CHOICE,
     .offset = offsetof(figure, count),
     .least = -INFINITY,
     .most = INFINITY,
     .fallback = COUNT_TOTAL,
     .of = counts,
     .about = "All time together, or the longest stretch without a break; total unless given"},
};

static const char *check(const figure *f, const heat_case *c, const char **member) {
  bool above = isfinite(f->above), below = isfinite(f->below);
  const char *fault = figure_needs_place(f, c, member);
  if (fault) return fault;
  *member = "above";
  if (!above && !below) return "must be given, or below, or both";
  return above && below && f->above >= f->below ? "must be less than below" : NULL;
}

static void begin(figure_run *r) {
  state *x = r->self;
  *x = (state){0};
}

static bool inside(const figure *f, double value) {
  if (isfinite(f->above) && value < f->above - SAME_TEMPERATURE) return false;
  return !(isfinite(f->below) && value > f->below + SAME_TEMPERATURE);
}

static int insert(double *times, int count, double t) {
  int i = count;
  for (; i > 0 && times[i - 1] > t; i--) times[i] = times[i - 1];
  times[i] = t;
  return count + 1;
}

enum { MOST_TURNS = 2 * SEGMENT_SAMPLES + 2 };

/* Times at which the segment goes in or out, rising, between its two ends. */
static int turns(const figure *f, const view *v, double times[MOST_TURNS]) {
  double crossing[SEGMENT_SAMPLES],
      level[2] = {f->above - SAME_TEMPERATURE, f->below + SAME_TEMPERATURE};
  int count = 0;
  count = insert(times, count, v->segment->t0);
  for (int i = 0; i < 2; i++) {
    int found = isfinite(level[i]) ? view_crossings(v, NAN, level[i], 0, false, crossing) : 0;
    for (int j = 0; j < found; j++) count = insert(times, count, crossing[j]);
  }
  return insert(times, count, v->segment->t1);
}

/* Adds the part of the segment before `until`. */
static void take_in(state *x, const figure *f, const view *v, double until) {
  double times[MOST_TURNS];
  int count = turns(f, v, times);
  bool whole = count == 2;
  for (int i = 0; i + 1 < count; i++) {
    double from = times[i], to = fmin(times[i + 1], until);
    if (!(to > from)) continue;
    double middle = times[i] + (times[i + 1] - times[i]) / 2;
    double value = whole ? view_sample(v, SEGMENT_SAMPLES / 2) : view_value(v, middle);
    x->unbroken = inside(f, value) ? x->unbroken + (to - from) : 0;
    if (x->unbroken > 0) x->total += to - from;
    x->longest = fmax(x->longest, x->unbroken);
  }
}

static void note_crossings(state *x, const figure *f, const view *v) {
  double times[MOST_TURNS];
  int count = turns(f, v, times);
  for (int i = 1; i + 1 < count; i++) {
    double rate = fabs(view_rate(v, times[i]));
    if (rate > 0) x->sensitivity += 1 / rate;
  }
}

static void observe(figure_run *r, const segment *s) {
  state *x = r->self;
  if (!figure_sees(r, s)) {
    x->unbroken = 0;
    return;
  }
  x->begun = true;
  x->steady |= segment_is_steady(r, s);
  view v = figure_view(r, s);
  take_in(x, r->figure, &v, s->t1);
  note_crossings(x, r->figure, &v);
}

static double answer(const figure *f, const state *x) {
  return f->count == COUNT_LONGEST ? x->longest : x->total;
}

static double value_at(const figure_run *r, const segment *s, double t) {
  state x = *(const state *)r->self;
  if (figure_sees(r, s)) {
    view v = figure_view(r, s);
    take_in(&x, r->figure, &v, t);
  }
  return answer(r->figure, &x);
}

static void finish(figure_run *r, figure_value *v) {
  const state *x = r->self;
  if (x->steady)
    figure_missing(v, "a steady state has no course of time");
  else if (!x->begun)
    figure_missing(v, "none of the stages that count was computed");
  else
    figure_found(v, answer(r->figure, x), NAN, x->sensitivity);
}

const figure_kind time_at_temperature_kind = {
    .name = "time_at_temperature",
    .about = "Time for which a place is above or below a temperature or between two, in total or "
             "longest unbroken",
    .parameters =
        FIGURE_PARAMETERS("time_at_temperature", "At least one of above and below", parameters),
    .takes_place = true,
    .accumulates = true,
    .size = sizeof(state),
    .dimension = figure_gives_time,
    .trace = TRACE_PLACE,
    .check = check,
    .begin = begin,
    .observe = observe,
    .finish = finish,
    .value_at = value_at,
};
