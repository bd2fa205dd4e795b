/* figure_instant.c: the value at one time: of a place, of the heat absorbed, of the heat flow. */
#include "figure_kit.h"

#include "shape.h"

typedef struct state {
  bool begun, steady, found;
  bool done; /* nothing later counts */
  double value, when;
  double heat;       /* absorbed in the stages that count, so far */
  double seen_until; /* end of the last segment shown, s */
} state;

static void begin(figure_run *r) {
  state *x = r->self;
  *x = (state){.value = NAN, .when = NAN, .seen_until = NAN};
}

static void take(state *x, const figure_run *r, double value, double t) {
  x->found = true;
  x->value = value;
  x->when = t;
  x->done = r->figure->time != NULL;
}

static void observe(figure_run *r, const segment *s) {
  state *x = r->self;
  double t;
  if (x->done) return;
  x->seen_until = s->t1;
  if (!figure_instant_in(r, s, &t)) return;
  bool end = t == s->t1 && s->t1 > s->t0;
  take(x, r, end ? s->sample(s, r->trace, SEGMENT_SAMPLES - 1) : s->value(s, r->trace, t), t);
}

static void finish_as(figure_run *r, figure_value *v, double sensitivity) {
  const state *x = r->self;
  if (x->found)
    figure_found(v, x->value, NAN, sensitivity);
  else
    figure_missing(v, figure_instant_why(r, x->seen_until));
}

/* ---- at ---- */

static const parameter at_parameters[] = {
    {.name = "time",
     .kind = VALUE_INSTANT,
     .dimension = DIMENSION_TIME,
     .offset = offsetof(figure, time),
     .flags = PARAMETER_REQUIRED,
     .least = 0,
     .most = INFINITY,
     .fallback = NAN,
     .about = "From the start of the case, or \"end:STAGE\", just before a jump"},
};

static dimension of_place(const figure *f, const heat_case *c) {
  return target_dimension(&f->of, c);
}

static void finish_at(figure_run *r, figure_value *v) {
  finish_as(r, v, 1);
}

const figure_kind at_kind = {
    .name = "at",
    .about = "The value of a place at a time",
    .parameters = FIGURE_PARAMETERS("at", "The time", at_parameters),
    .takes_place = true,
    .size = sizeof(state),
    .dimension = of_place,
    .trace = TRACE_PLACE,
    .check = figure_needs_place,
    .begin = begin,
    .observe = observe,
    .finish = finish_at,
};

/* ---- heat ---- */

static const parameter heat_parameters[] = {
    {.name = "face",
     .kind = VALUE_FACE,
     .dimension = DIMENSION_ANY,
     .offset = offsetof(figure, face),
     .least = -INFINITY,
     .most = INFINITY,
     .fallback = -1,
     .about = "One face of the shape; all faces unless given"},
    {.name = "time",
     .kind = VALUE_INSTANT,
     .dimension = DIMENSION_TIME,
     .offset = offsetof(figure, time),
     .least = 0,
     .most = INFINITY,
     .fallback = NAN,
     .about = "From the start of the case, or \"end:STAGE\"; the end unless given"},
};

static dimension energy(const figure *f, const heat_case *c) {
  (void)f;
  return c->part.shape->energy;
}

static dimension power(const figure *f, const heat_case *c) {
  (void)f;
  return c->part.shape->power_unit;
}

static void observe_heat(figure_run *r, const segment *s) {
  state *x = r->self;
  double t;
  if (x->done) return;
  x->seen_until = s->t1;
  if (!figure_counts_stage(r->figure, s->stage)) return;
  x->begun = true;
  x->steady |= segment_is_steady(r, s);
  bool here = figure_instant_in(r, s, &t);
  if (s->t1 > s->t0)
    x->heat += s->value(s, r->trace, here ? t : s->t1) - s->value(s, r->trace, s->t0);
  if (here) take(x, r, x->heat, t);
}

static void finish_heat(figure_run *r, figure_value *v) {
  const state *x = r->self;
  if (x->steady && r->the_case->stages.count == 1)
    figure_missing(v, "a steady state has no course of time");
  else
    finish_as(r, v, 0);
}

static void finish_flow(figure_run *r, figure_value *v) {
  finish_as(r, v, 0);
}

const figure_kind heat_absorbed_kind = {
    .name = "heat_absorbed",
    .about = "Heat that went into the part through a face, or all, up to a time: per area of a "
             "plate, per length of a long "
             "cylinder, of the whole sphere; positive into the part",
    .parameters = FIGURE_PARAMETERS("heat_absorbed", "Where and until when", heat_parameters),
    .size = sizeof(state),
    .dimension = energy,
    .trace = TRACE_HEAT,
    .begin = begin,
    .observe = observe_heat,
    .finish = finish_heat,
};

const figure_kind heat_flow_kind = {
    .name = "heat_flow",
    .about = "Rate at which heat goes into the part through a face, or all, at a time: per area of "
             "a plate, per length of a "
             "long cylinder, of the whole sphere; positive into the part",
    .parameters = FIGURE_PARAMETERS("heat_flow", "Where and when", heat_parameters),
    .size = sizeof(state),
    .dimension = power,
    .trace = TRACE_HEAT_FLOW,
    .begin = begin,
    .observe = observe,
    .finish = finish_flow,
};
