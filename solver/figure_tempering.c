/* figure_tempering.c: the tempering parameter of Hollomon & Jaffe (Trans. AIME 162, 1945),

     P = T (C + log10 t) / 1000,   T in K, t in h,

   kept as a continuous sum: whenever the temperature changes, the time so far becomes the time w at
   the new temperature that gives the same P. Over a piece that ends at T1, with w counted at T1,

     dw/dt = (T/T1) 10^((C + log10 w)(1 - T1/T)),

   whose right side hardly depends on w while T is near T1: Gauss quadrature of three points over
   pieces of at most PIECE kelvin, w at the points from one round with the mean rate. */
#include "figure_kit.h"

#include "elementary.h"

#define PIECE          4.0  /* K */
#define ALIKE          0.02 /* K: a temperature that changes less over a step counts as constant */
#define NEGLIGIBLE     1e-9 /* h per h: a step that adds less to the equal time is not subdivided */
#define USUAL_CONSTANT 20.0
enum { MOST_PIECES = 256 };

typedef struct state {
  bool begun, steady;
  double parameter; /* P x 1000, K; -INFINITY before any time */
  double hottest;
} state;

static const parameter parameters[] = {
    FIGURE_QUANTITY("constant", NUMBER, constant, PARAMETER_ABOVE, 0, 100, USUAL_CONSTANT,
                    "C in T (C + log10 t); 20 unless given"),
};

/* Time in h at a temperature that gives the parameter. */
static double equal_time(double parameter, double constant, double temperature) {
  return elementary_exp10(parameter / temperature - constant);
}

static double parameter_of(double time, double constant, double temperature) {
  return temperature * (constant + elementary_log10(time));
}

/* Relative rate dw/dt at temperature T of equal time w at T1. */
static double rate_of(double constant, double temperature, double end, double w) {
  if (temperature == end) return 1;
  return temperature / end *
         elementary_exp10((constant + elementary_log10(w)) * (1 - end / temperature));
}

/* Gauss-Legendre, three points on (0, 1); Abramowitz & Stegun, table 25.4. */
static const double gauss_at[3] = {0.11270166537925831, 0.5, 0.88729833462074169};
static const double gauss_weight[3] = {5.0 / 18, 8.0 / 18, 5.0 / 18};

/* Adds `hours` during which the temperature goes through at[0..2] at the Gauss points and ends at
 * `end`. */
static double advance(double parameter, double constant, double hours, const double at[3],
                      double end) {
  double w = equal_time(parameter, constant, end), mean = 1;
  if (!(hours > 0) || !(w < 1e300)) return parameter;
  for (int round = 0; round < 2; round++) {
    double sum = 0;
    for (int i = 0; i < 3; i++)
      sum += gauss_weight[i] * rate_of(constant, at[i], end, w + gauss_at[i] * mean * hours);
    mean = sum;
  }
  return parameter_of(w + mean * hours, constant, end);
}

static double over_piece(double parameter, const figure *f, const view *v, double from, double to) {
  double at[3];
  for (int i = 0; i < 3; i++) at[i] = view_value(v, from + gauss_at[i] * (to - from));
  return advance(parameter, f->constant, (to - from) / 3600, at, view_value(v, to));
}

static double over_interval(double parameter, const figure *f, const view *v, int j, double until) {
  double from = segment_time(v->segment, j - 1), to = fmin(segment_time(v->segment, j), until);
  double change = fabs(view_sample(v, j) - view_sample(v, j - 1));
  int pieces = (int)fmin(MOST_PIECES, 1 + floor(change / PIECE));
  if (!(to > from)) return parameter;
  for (int i = 0; i < pieces; i++)
    parameter = over_piece(parameter, f, v, from + i * (to - from) / pieces,
                           from + (i + 1) * (to - from) / pieces);
  return parameter;
}

/* Parameter at `until`. A step too cold to matter, or at one temperature, is taken at once. */
static double taken_in(const state *x, const figure *f, const view *v, double until) {
  const segment *s = v->segment;
  double least = INFINITY, most = -INFINITY, hours = (until - s->t0) / 3600;
  if (!(hours > 0)) return x->parameter;
  for (int j = 0; j < SEGMENT_SAMPLES; j++) {
    least = fmin(least, view_sample(v, j));
    most = fmax(most, view_sample(v, j));
  }
  double middle = least + (most - least) / 2, at[3] = {middle, middle, middle};
  bool alike = most - least < ALIKE;
  if (alike || hours < NEGLIGIBLE * equal_time(x->parameter, f->constant, most))
    return advance(x->parameter, f->constant, hours, at, middle);
  double parameter = x->parameter;
  for (int j = 1; j < SEGMENT_SAMPLES; j++) parameter = over_interval(parameter, f, v, j, until);
  return parameter;
}

static void begin(figure_run *r) {
  state *x = r->self;
  *x = (state){.parameter = -INFINITY, .hottest = -INFINITY};
}

static void observe(figure_run *r, const segment *s) {
  state *x = r->self;
  if (!figure_sees(r, s)) return;
  x->begun = true;
  x->steady |= segment_is_steady(r, s);
  view v = figure_view(r, s);
  x->parameter = taken_in(x, r->figure, &v, s->t1);
  for (int j = 0; j < SEGMENT_SAMPLES; j++) x->hottest = fmax(x->hottest, view_sample(&v, j));
}

static double value_at(const figure_run *r, const segment *s, double t) {
  const state *x = r->self;
  if (!figure_sees(r, s)) return x->parameter / 1000;
  view v = figure_view(r, s);
  return taken_in(x, r->figure, &v, fmin(t, s->t1)) / 1000;
}

static void finish(figure_run *r, figure_value *v) {
  const state *x = r->self;
  if (x->steady)
    figure_missing(v, "a steady state has no course of time");
  else if (!isfinite(x->parameter))
    figure_missing(v, "none of the stages that count was computed");
  else
    figure_found(v, x->parameter / 1000, NAN, x->parameter / 1000 / x->hottest);
}

static dimension gives_number(const figure *f, const heat_case *c) {
  (void)f;
  (void)c;
  return DIMENSION_NUMBER;
}

static const char *check(const figure *f, const heat_case *c, const char **member) {
  const char *fault = figure_needs_place(f, c, member);
  if (fault) return fault;
  return f->of.place.kind == PLACE_SECTION_DIFFERENCE ? "must be a temperature, not a difference"
                                                      : NULL;
}

const figure_kind tempering_kind = {
    .name = "tempering",
    .about = "Hollomon-Jaffe parameter T (C + log10 t)/1000 with T in K and t in h, earlier time "
             "converted to equal parameter",
    .parameters = FIGURE_PARAMETERS("tempering", "The constant", parameters),
    .takes_place = true,
    .accumulates = true,
    .size = sizeof(state),
    .dimension = gives_number,
    .trace = TRACE_PLACE,
    .check = check,
    .begin = begin,
    .observe = observe,
    .finish = finish,
    .value_at = value_at,
};
