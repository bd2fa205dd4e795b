/* figure_between.c: the time from one level to another, t(800 to 500 degC) for one.

   From the last crossing of `from` towards `to` that is followed by one of `to`, to that one.
   `from` is crossed where it is left, `to` where it is reached. */
#include "figure_kit.h"

typedef struct state {
  bool begun, steady, found;
  double previous;        /* value at the end of the last segment, NAN after a gap */
  double left, left_rate; /* `from` was left then and `to` not reached yet; NAN */
  double value, sensitivity;
} state;

static const parameter parameters[] = {
    FIGURE_LEVEL("from", from, "Time counts from the last crossing of this value towards `to`"),
    FIGURE_LEVEL("to", to, "Time counts to the crossing of this value that follows"),
};

static const char *check(const figure *f, const heat_case *c, const char **member) {
  const char *fault = figure_needs_place(f, c, member);
  if (fault) return fault;
  *member = isfinite(f->from) ? "to" : "from";
  if (!isfinite(f->from) || !isfinite(f->to)) return "must be given";
  return f->from == f->to ? "must differ from `from`" : NULL;
}

static void begin(figure_run *r) {
  state *x = r->self;
  *x = (state){.previous = NAN, .left = NAN, .left_rate = NAN};
}

static void reach(state *x, const view *v, double t) {
  x->found = true;
  x->value = t - x->left;
  x->sensitivity = 1 / fabs(x->left_rate) + 1 / fabs(view_rate(v, t));
  x->left = NAN;
}

static void observe(figure_run *r, const segment *s) {
  state *x = r->self;
  const figure *f = r->figure;
  if (!figure_sees(r, s)) {
    x->previous = x->left = NAN;
    return;
  }
  x->begun = true;
  x->steady |= segment_is_steady(r, s);
  view v = figure_view(r, s);
  int sign = f->to > f->from ? 1 : -1, i = 0, j = 0;
  double leaving[SEGMENT_SAMPLES], reaching[SEGMENT_SAMPLES];
  int left =
      view_crossings(&v, x->previous, f->from + sign * SAME_TEMPERATURE, sign, true, leaving);
  int reached =
      view_crossings(&v, x->previous, f->to - sign * SAME_TEMPERATURE, sign, false, reaching);
  while (i < left || j < reached) {
    if (j == reached || (i < left && leaving[i] <= reaching[j])) {
      x->left = leaving[i++];
      x->left_rate = view_rate(&v, x->left);
    } else if (isnan(x->left)) {
      j++;
    } else {
      reach(x, &v, reaching[j++]);
    }
  }
  x->previous = view_sample(&v, SEGMENT_SAMPLES - 1);
}

static void finish(figure_run *r, figure_value *v) {
  const state *x = r->self;
  if (x->found)
    figure_found(v, x->value, NAN, x->sensitivity);
  else if (x->steady)
    figure_missing(v, "a steady state has no course of time");
  else if (!x->begun)
    figure_missing(v, "none of the stages that count was computed");
  else if (isnan(x->left))
    figure_missing(v, "it never crosses `from` towards `to`");
  else
    figure_missing(v, "after `from` it never reaches `to`");
}

const figure_kind time_between_kind = {
    .name = "time_between",
    .about = "Time from the last crossing of one temperature towards another, to the crossing of "
             "that one (800 to 500 degC)",
    .parameters = FIGURE_PARAMETERS("time_between", "The two values", parameters),
    .takes_place = true,
    .size = sizeof(state),
    .dimension = figure_gives_time,
    .trace = TRACE_PLACE,
    .check = check,
    .begin = begin,
    .observe = observe,
    .finish = finish,
};
