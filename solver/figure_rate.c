/* figure_rate.c: the fastest rise or fall as a mean over a moving window, or the mean rate between
   two levels.

   Fastest: g(p) = (v(p + w) - v(p)) / w over the starts p of a window of length w. Starts are
   remembered until the end of their window comes by; both values are exact (of the step's own
   interpolant), only the choice of p is discrete: the samples of each step, at least w/64 apart,
   and both sides of every change of stage. Where g has a maximum between starts, parabolas through
   three of them give it: to 2e-4 of the value where the course is smooth, to 1e-3 at a corner
   inside a stage, exactly at a corner between stages. */
#include "figure_kit.h"

enum { WINDOW_PARTS = 64, MOST_STARTS = 208, SMOOTH = 4 };

#define WINDOW_FALLING 1.0  /* s: common practice for the cooling rate in a quench */
#define WINDOW_RISING  60.0 /* s: common practice for heating rates, told in K/min or K/h */

typedef struct start_of_window {
  double t, value;
  bool breaks; /* the curve has a corner here */
} start_of_window;

typedef struct gain {
  double t, value; /* start of the window; K/s in the direction asked for */
} gain;

typedef struct state {
  bool begun, steady, found;
  int first, count;
  start_of_window ring[MOST_STARTS];
  start_of_window passed; /* the last that left the ring; t is NAN if none */
  int chain;              /* how many of `recent` stand on one smooth stretch, newest last */
  gain recent[SMOOTH], best;
  double previous, left, left_rate; /* of the mean between two levels */
  double value, sensitivity;
} state;

static const char *const directions[] = {"rise", "fall", NULL};

static const parameter parameters[] = {
    {.name = "direction",
     .kind = VALUE_CHOICE,
     .offset = offsetof(figure, direction),
     .least = -INFINITY,
     .most = INFINITY,
     .fallback = DIRECTION_RISE,
     .of = directions,
     .about = "Fastest rise or fastest fall, each told as a positive number; rise unless given"},
    FIGURE_QUANTITY("over", TIME, over, PARAMETER_ABOVE, 0, INFINITY, NAN,
                    "Length of the moving window; 1 s for a fall, 1 min for a rise unless given"),
    FIGURE_LEVEL("from", from,
                 "With `to`: the mean rate from the first crossing of this value towards `to`"),
    FIGURE_LEVEL("to", to, "With `from`: to the first crossing of this value that follows"),
};

static bool between_levels(const figure *f) {
  return isfinite(f->from);
}

static double window_of(const figure *f) {
  if (isfinite(f->over)) return f->over;
  return f->direction == DIRECTION_FALL ? WINDOW_FALLING : WINDOW_RISING;
}

static const char *check(const figure *f, const heat_case *c, const char **member) {
  const char *fault = figure_needs_place(f, c, member);
  if (fault) return fault;
  bool from = isfinite(f->from), to = isfinite(f->to);
  *member = from ? "to" : "from";
  if (from != to) return "must be given too: from and to stand together";
  *member = "to";
  if (from && f->from == f->to) return "must differ from `from`";
  *member = "over";
  return from && isfinite(f->over) ? "has no meaning beside from and to" : NULL;
}

static dimension gives_rate(const figure *f, const heat_case *c) {
  (void)f;
  (void)c;
  return DIMENSION_RATE;
}

static void forget(state *x) {
  x->count = x->chain = 0;
  x->passed.t = NAN;
  x->previous = x->left = NAN;
}

static void begin(figure_run *r) {
  state *x = r->self;
  *x = (state){.best = {NAN, NAN}, .left_rate = NAN};
  forget(x);
}

/* ---- moving window ---- */

static const start_of_window *newest(const state *x) {
  return &x->ring[(x->first + x->count - 1) % MOST_STARTS];
}

static void remember(state *x, double t, double value, bool breaks) {
  if (x->count == MOST_STARTS) return;
  x->ring[(x->first + x->count++) % MOST_STARTS] = (start_of_window){t, value, breaks};
}

static void better(state *x, gain g) {
  if (isnan(x->best.value) || g.value > x->best.value) x->best = g;
}

/* Top of the parabola through three gains, if it lies among them; else the largest of the three. */
static gain top_of(const gain g[3]) {
  double slope = (g[1].value - g[0].value) / (g[1].t - g[0].t);
  double bend = ((g[2].value - g[1].value) / (g[2].t - g[1].t) - slope) / (g[2].t - g[0].t);
  double t = 0.5 * (g[0].t + g[1].t - slope / bend);
  if (bend < 0 && t > g[0].t && t < g[2].t)
    return (gain){t, g[0].value + (t - g[0].t) * (slope + bend * (t - g[1].t))};
  int best = g[1].value > g[0].value ? 1 : 0;
  return g[2].value > g[best].value ? g[2] : g[best];
}

/* A maximum between starts. The lower of two parabolas: at a corner, or where a plateau begins, one
 * of them overshoots. */
static void try_between(state *x) {
  const gain *g = x->recent;
  if (x->chain < SMOOTH) return;
  gain a = top_of(g), b = top_of(g + 1);
  better(x, a.value < b.value ? a : b);
}

static void take(state *x, gain g, bool breaks) {
  if (breaks) x->chain = 0;
  if (x->chain && g.t <= x->recent[SMOOTH - 1].t) return;
  for (int i = 0; i < SMOOTH - 1; i++) x->recent[i] = x->recent[i + 1];
  x->recent[SMOOTH - 1] = g;
  x->chain++;
  better(x, g);
  try_between(x);
}

static void remember_segment(state *x, const view *v, double window) {
  const segment *s = v->segment;
  if (!x->count || s->stage_begins) {
    if (s->stage_begins) x->chain = 0;
    remember(x, s->t0, view_sample(v, 0), true);
  }
  for (int j = 1; j < SEGMENT_SAMPLES; j++) {
    double t = segment_time(s, j), since = t - newest(x)->t;
    bool last = j == SEGMENT_SAMPLES - 1 && s->stage_ends;
    if (since >= window / WINDOW_PARTS || (last && since > 0))
      remember(x, t, view_sample(v, j), last);
  }
}

/* Windows whose end lies in this segment. */
static void close_windows(state *x, const view *v, double window, int sign) {
  const segment *s = v->segment;
  while (x->count && x->ring[x->first].t + window <= s->t1) {
    start_of_window p = x->ring[x->first];
    double end = view_value(v, fmax(s->t0, p.t + window));
    take(x, (gain){p.t, sign * (end - p.value) / window}, p.breaks);
    x->passed = p;
    x->first = (x->first + 1) % MOST_STARTS;
    x->count--;
  }
}

/* The window that ends with the stage: a fall may be fastest just before it. */
static void close_last(state *x, const view *v, double window, int sign) {
  const segment *s = v->segment;
  double t = s->t1 - window, from = NAN;
  if (t >= s->t0) {
    from = view_value(v, t);
  } else if (x->passed.t <= t && x->count && x->ring[x->first].t > x->passed.t) {
    const start_of_window *a = &x->passed, *b = &x->ring[x->first];
    from = a->value + (t - a->t) / (b->t - a->t) * (b->value - a->value);
  }
  double end = view_sample(v, SEGMENT_SAMPLES - 1);
  if (isfinite(from)) better(x, (gain){t, sign * (end - from) / window});
}

static void observe_window(state *x, const figure *f, const view *v) {
  double window = window_of(f);
  int sign = f->direction == DIRECTION_FALL ? -1 : 1;
  if (!(v->segment->t1 > v->segment->t0)) return;
  remember_segment(x, v, window);
  close_windows(x, v, window, sign);
  if (v->segment->stage_ends) close_last(x, v, window, sign);
}

/* ---- between two levels ---- */

static void observe_levels(state *x, const figure *f, const view *v) {
  int sign = f->to > f->from ? 1 : -1;
  double left[SEGMENT_SAMPLES], reached[SEGMENT_SAMPLES];
  if (x->found) return;
  if (isnan(x->left) &&
      view_crossings(v, x->previous, f->from + sign * SAME_TEMPERATURE, sign, true, left)) {
    x->left = left[0];
    x->left_rate = view_rate(v, left[0]);
  }
  int count = view_crossings(v, x->previous, f->to - sign * SAME_TEMPERATURE, sign, false, reached);
  for (int i = 0; i < count && !x->found; i++) {
    double span = reached[i] - x->left;
    if (!(span >= 0)) continue;
    x->found = true;
    x->value = fabs(f->to - f->from) / span;
    x->sensitivity =
        x->value / span * (1 / fabs(x->left_rate) + 1 / fabs(view_rate(v, reached[i])));
  }
  x->previous = view_sample(v, SEGMENT_SAMPLES - 1);
}

/* ---- the row ---- */

static void observe(figure_run *r, const segment *s) {
  state *x = r->self;
  if (!figure_sees(r, s)) {
    forget(x);
    return;
  }
  x->begun = true;
  x->steady |= segment_is_steady(r, s);
  if (x->steady) return;
  view v = figure_view(r, s);
  if (between_levels(r->figure))
    observe_levels(x, r->figure, &v);
  else
    observe_window(x, r->figure, &v);
}

static void finish_levels(const state *x, figure_value *v) {
  if (x->found && isfinite(x->value))
    figure_found(v, x->value, NAN, x->sensitivity);
  else if (x->found)
    figure_missing(v, "the two values are passed in a jump");
  else if (isnan(x->left))
    figure_missing(v, "it never crosses `from` towards `to`");
  else
    figure_missing(v, "after `from` it never reaches `to`");
}

static void finish(figure_run *r, figure_value *v) {
  const state *x = r->self;
  double window = window_of(r->figure);
  if (x->steady)
    figure_missing(v, "a steady state has no course of time");
  else if (!x->begun)
    figure_missing(v, "none of the stages that count was computed");
  else if (between_levels(r->figure))
    finish_levels(x, v);
  else if (isnan(x->best.value))
    figure_missing(v, "the stages that count are shorter than the window `over`");
  else if (x->best.value > 0)
    figure_found(v, x->best.value, x->best.t + window / 2, 2 / window);
  else
    figure_found(v, 0, NAN, 2 / window);
}

const figure_kind rate_kind = {
    .name = "rate",
    .about =
        "Fastest rise or fall of a place as a mean over a moving window, with the time of the "
        "window's middle; or the "
        "mean rate between two values; a positive number either way, 0 if it never moves that way",
    .parameters = FIGURE_PARAMETERS("rate", "A direction, or two values", parameters),
    .takes_place = true,
    .size = sizeof(state),
    .dimension = gives_rate,
    .trace = TRACE_PLACE,
    .check = check,
    .begin = begin,
    .observe = observe,
    .finish = finish,
};
