/* figure_sum.c: integrals of a rate that depends on the temperature alone.

   lethality       10^((T - T_ref)/z)                    Bigelow 1921; F0 with 121.1 degC and 10 K
   equivalent_age  exp(-(E/R)(1/T - 1/T_ref))            Arrhenius; Freiesleben Hansen & Pedersen
   1977, ASTM C1074 accumulated     a table, straight in the logarithm maturity        max(0, T -
   T_datum)                   Nurse 1949, Saul 1951, ASTM C1074

   The integral over a step is taken from the six samples (Newton-Cotes, six points) where two rules
   of lower order agree with that; else by Simpson's rule, halving until it agrees with itself. */
#include "figure_kit.h"

#include "elementary.h"
#include "physics.h"

typedef double (*rate_of)(const figure *f, double temperature);

typedef struct state {
  bool begun, steady;
  double sum, hottest;
} state;

/* ---- quadrature ---- */

/* Relative error allowed: of the step's own integral, of the sum so far. */
#define AGREEMENT  1e-7
#define NEGLIGIBLE 1e-11
enum { MOST_HALVINGS = 14 };

typedef struct integrand {
  const view *view;
  const figure *figure;
  rate_of rate;
  double allowed; /* absolute error that does not matter */
} integrand;

static double at_time(const integrand *g, double t) {
  return g->rate(g->figure, view_value(g->view, t));
}

typedef struct panel {
  double from, to, first, middle, last, simpson;
} panel;

static panel panel_of(const integrand *g, double from, double to, double first, double last) {
  double middle = at_time(g, from + (to - from) / 2);
  return (panel){from, to, first, middle, last, (to - from) / 6 * (first + 4 * middle + last)};
}

static double halved(const integrand *g, const panel *p, int depth) {
  double middle = p->from + (p->to - p->from) / 2;
  panel a = panel_of(g, p->from, middle, p->first, p->middle);
  panel b = panel_of(g, middle, p->to, p->middle, p->last);
  double sum = a.simpson + b.simpson, difference = sum - p->simpson;
  if (depth >= MOST_HALVINGS || fabs(difference) <= 15 * (AGREEMENT * sum + g->allowed))
    return sum + difference / 15;
  return halved(g, &a, depth + 1) + halved(g, &b, depth + 1);
}

static double by_halving(const integrand *g, double until) {
  const segment *s = g->view->segment;
  double sum = 0, before = g->rate(g->figure, view_sample(g->view, 0));
  for (int j = 1; j < SEGMENT_SAMPLES; j++) {
    double from = segment_time(s, j - 1), to = segment_time(s, j);
    bool whole = to <= until;
    if (!whole) to = until;
    if (!(to > from)) break;
    double last = whole ? g->rate(g->figure, view_sample(g->view, j)) : at_time(g, to);
    panel p = panel_of(g, from, to, before, last);
    sum += halved(g, &p, 0);
    before = last;
  }
  return sum;
}

/* Over the whole segment from its samples; false if the rules do not agree. */
static bool by_samples(const integrand *g, double *value) {
  const segment *s = g->view->segment;
  double f[SEGMENT_SAMPLES], step = (s->t1 - s->t0) / (SEGMENT_SAMPLES - 1);
  for (int j = 0; j < SEGMENT_SAMPLES; j++) f[j] = g->rate(g->figure, view_sample(g->view, j));
  *value = 5 * step / 288 * (19 * (f[0] + f[5]) + 75 * (f[1] + f[4]) + 50 * (f[2] + f[3]));
  double left =
      step / 3 * (f[0] + 4 * f[1] + f[2]) + 3 * step / 8 * (f[2] + 3 * f[3] + 3 * f[4] + f[5]);
  double right =
      3 * step / 8 * (f[0] + 3 * f[1] + 3 * f[2] + f[3]) + step / 3 * (f[3] + 4 * f[4] + f[5]);
  return fmax(fabs(left - *value), fabs(right - *value)) <= 10 * AGREEMENT * *value + g->allowed;
}

static double integral(const figure_run *r, const view *v, rate_of rate, double until) {
  const state *x = r->self;
  integrand g = {v, r->figure, rate, NEGLIGIBLE * x->sum};
  double value;
  if (!(until > v->segment->t0)) return 0;
  if (until >= v->segment->t1 && by_samples(&g, &value)) return value;
  return by_halving(&g, until);
}

/* ---- what the four have in common ---- */

static void begin(figure_run *r) {
  state *x = r->self;
  *x = (state){.hottest = -INFINITY};
}

static void observe_sum(figure_run *r, const segment *s, rate_of rate) {
  state *x = r->self;
  if (!figure_sees(r, s)) return;
  x->begun = true;
  x->steady |= segment_is_steady(r, s);
  view v = figure_view(r, s);
  x->sum += integral(r, &v, rate, s->t1);
  for (int j = 0; j < SEGMENT_SAMPLES; j++) x->hottest = fmax(x->hottest, view_sample(&v, j));
}

static double sum_at(const figure_run *r, const segment *s, double t, rate_of rate) {
  const state *x = r->self;
  if (!figure_sees(r, s)) return x->sum;
  view v = figure_view(r, s);
  return x->sum + integral(r, &v, rate, fmin(t, s->t1));
}

/* The sensitivity is that of the hottest moment, where most of the sum is made. */
static void finish_sum(figure_run *r, figure_value *v, rate_of rate) {
  const state *x = r->self;
  const figure *f = r->figure;
  double there = rate(f, x->hottest);
  double change = fabs(rate(f, x->hottest + 0.5) - rate(f, x->hottest - 0.5));
  if (x->steady)
    figure_missing(v, "a steady state has no course of time");
  else if (!x->begun)
    figure_missing(v, "none of the stages that count was computed");
  else if (!isfinite(x->sum))
    figure_missing(v, "the sum is too large for a number");
  else
    figure_found(v, x->sum, NAN, there > 0 ? x->sum * change / there : 0);
}

static dimension gives_number(const figure *f, const heat_case *c) {
  (void)f;
  (void)c;
  return DIMENSION_NUMBER;
}

static dimension gives_maturity(const figure *f, const heat_case *c) {
  (void)f;
  (void)c;
  return DIMENSION_MATURITY;
}

#define SUM_FUNCTIONS(name)                                                                        \
  static void observe_##name(figure_run *r, const segment *s) {                                    \
    observe_sum(r, s, name##_rate);                                                                \
  }                                                                                                \
  static double name##_at(const figure_run *r, const segment *s, double t) {                       \
    return sum_at(r, s, t, name##_rate);                                                           \
  }                                                                                                \
  static void finish_##name(figure_run *r, figure_value *v) {                                      \
    finish_sum(r, v, name##_rate);                                                                 \
  }

#define SUM_KIND(name_, dimension_, check_, parameters_, about_)                                   \
  const figure_kind name_##_kind = {                                                               \
      .name = #name_,                                                                              \
      .about = about_,                                                                             \
      .parameters = FIGURE_PARAMETERS(#name_, "What the rate depends on", parameters_),            \
      .takes_place = true,                                                                         \
      .accumulates = true,                                                                         \
      .size = sizeof(state),                                                                       \
      .dimension = dimension_,                                                                     \
      .trace = TRACE_PLACE,                                                                        \
      .check = check_,                                                                             \
      .begin = begin,                                                                              \
      .observe = observe_##name_,                                                                  \
      .finish = finish_##name_,                                                                    \
      .value_at = name_##_at}

/* A rate is a function of temperature: neither a figure nor a difference of temperatures has one.
 */
static const char *needs_temperature(const figure *f, const heat_case *c, const char **member) {
  const char *fault = figure_needs_place(f, c, member);
  if (fault) return fault;
  return f->of.place.kind == PLACE_SECTION_DIFFERENCE ? "must be a temperature, not a difference"
                                                      : NULL;
}

/* ---- lethality ---- */

static const parameter lethality_parameters[] = {
    FIGURE_QUANTITY("reference", TEMPERATURE, reference, PARAMETER_REQUIRED, 0, INFINITY, NAN,
                    "Temperature at which one second counts as one second"),
    FIGURE_QUANTITY("z", DIFFERENCE, z, PARAMETER_REQUIRED | PARAMETER_ABOVE, 0, INFINITY, NAN,
                    "Rise of temperature that makes the rate ten times as large"),
};

static double lethality_rate(const figure *f, double temperature) {
  return elementary_exp10((temperature - f->reference) / f->z);
}

SUM_FUNCTIONS(lethality)
SUM_KIND(lethality, figure_gives_time, needs_temperature, lethality_parameters,
         "Integral of 10^((T - reference)/z): time at the reference that does as much");

/* ---- equivalent age ---- */

static const parameter equivalent_age_parameters[] = {
    FIGURE_QUANTITY("activation_energy", ACTIVATION_ENERGY, activation_energy,
                    PARAMETER_REQUIRED | PARAMETER_ABOVE, 0, INFINITY, NAN,
                    "Apparent activation energy E of the process"),
    FIGURE_QUANTITY("reference", TEMPERATURE, reference, PARAMETER_REQUIRED | PARAMETER_ABOVE, 0,
                    INFINITY, NAN, "Temperature at which one second counts as one second"),
};

static double equivalent_age_rate(const figure *f, double temperature) {
  return elementary_exp(-f->activation_energy / GAS_CONSTANT *
                        (1 / temperature - 1 / f->reference));
}

SUM_FUNCTIONS(equivalent_age)
SUM_KIND(equivalent_age, figure_gives_time, needs_temperature, equivalent_age_parameters,
         "Integral of exp(-(E/R)(1/T - 1/T_ref)): time at the reference that does as much");

/* ---- accumulated ---- */

static const parameter accumulated_parameters[] = {
    {.name = "rate",
     .kind = VALUE_TABLE,
     .dimension = DIMENSION_TEMPERATURE,
     .second = DIMENSION_FREQUENCY,
     .offset = offsetof(figure, rate),
     .flags = PARAMETER_REQUIRED,
     .least = -INFINITY,
     .most = INFINITY,
     .fallback = NAN,
     .about = "[[temperature, rate per second], ...]: straight in the logarithm between rows, the "
              "end values hold beyond"},
};

static const char *check_accumulated(const figure *f, const heat_case *c, const char **member) {
  const char *fault = needs_temperature(f, c, member);
  if (fault) return fault;
  *member = "rate";
  for (int i = 0; i < f->rate.count; i++)
    if (!(f->rate.y[i] > 0))
      return "must have rates above 0: between rows it is straight in the logarithm";
  return NULL;
}

static double accumulated_rate(const figure *f, double temperature) {
  const table *t = &f->rate;
  int low = 0, high = t->count - 1;
  if (temperature <= t->x[0]) return t->y[0];
  if (temperature >= t->x[high]) return t->y[high];
  while (high - low > 1) {
    int middle = (low + high) / 2;
    if (t->x[middle] <= temperature)
      low = middle;
    else
      high = middle;
  }
  double part = (temperature - t->x[low]) / (t->x[high] - t->x[low]);
  return t->y[low] * elementary_pow(t->y[high] / t->y[low], part);
}

SUM_FUNCTIONS(accumulated)
SUM_KIND(accumulated, gives_number, check_accumulated, accumulated_parameters,
         "Integral of a rate that is read from a table against temperature");

/* ---- maturity ---- */

static const parameter maturity_parameters[] = {
    FIGURE_QUANTITY("datum", TEMPERATURE, datum, PARAMETER_REQUIRED, 0, INFINITY, NAN,
                    "Temperature below which nothing is gained"),
};

/* The one value that is not in SI: degC.h is the unit in which the trade knows it. */
#define SECONDS_PER_HOUR 3600.0

static double maturity_rate(const figure *f, double temperature) {
  return temperature > f->datum ? (temperature - f->datum) / SECONDS_PER_HOUR : 0;
}

SUM_FUNCTIONS(maturity)
SUM_KIND(maturity, gives_maturity, needs_temperature, maturity_parameters,
         "Nurse-Saul maturity: integral of the temperature above a datum, nothing below it");
