/* figure_stress.c: the largest thermoelastic tension and compression over section and time, or the
   components at one place and time (stress.h has the method). Each step is looked at at its start,
   middle and end, and at the vertex of the parabola through these where that lies inside. */
#include "figure_kit.h"

#include "physics.h"
#include "shape.h"
#include "stress.h"

#include <string.h>

typedef struct peak_stress {
  double value;
  double marked, when,
      where; /* the value that set these: a later one must be larger by SAME_STRESS */
} peak_stress;

#define SAME_STRESS                                                                                \
  1e-6 /* relative: a plateau is dated at its beginning, at the first of equal places */

typedef struct state {
  elastic elastic;
  bool begun, done;
  double seen_until;
  double before[2]; /* tension and compression at the end of the last segment; NAN after a gap */
  peak_stress tension, compression;
  stress_state there; /* with `at` */
  double when;
} state;

static const parameter parameters[] = {
    {.name = "elastic_modulus",
     .kind = VALUE_CURVE,
     .dimension = DIMENSION_STRESS,
     .offset = offsetof(figure, elastic_modulus),
     .flags = PARAMETER_REQUIRED | PARAMETER_ABOVE,
     .least = 0,
     .most = INFINITY,
     .fallback = NAN,
     .about = "Young's modulus, one number or against temperature"},
    {.name = "expansion",
     .kind = VALUE_CURVE,
     .dimension = DIMENSION_EXPANSION,
     .offset = offsetof(figure, expansion),
     .flags = PARAMETER_REQUIRED,
     .least = -INFINITY,
     .most = INFINITY,
     .fallback = NAN,
     .about = "Instantaneous coefficient of thermal expansion, one number or against temperature"},
    FIGURE_QUANTITY("poisson", NUMBER, poisson, PARAMETER_REQUIRED | PARAMETER_BELOW, 0, 0.5, NAN,
                    "Poisson's ratio"),
    {.name = "at",
     .kind = VALUE_OPTIONAL_LOCATION,
     .dimension = DIMENSION_LENGTH,
     .offset = offsetof(figure, at),
     .least = -INFINITY,
     .most = INFINITY,
     .fallback = NAN,
     .about = "Where the components are asked for, as in points; the largest over the section "
              "unless given"},
    {.name = "time",
     .kind = VALUE_INSTANT,
     .dimension = DIMENSION_TIME,
     .offset = offsetof(figure, time),
     .least = 0,
     .most = INFINITY,
     .fallback = NAN,
     .about = "When, from the start of the case, or \"end:STAGE\"; unless given the end with `at`, "
              "else the largest over all "
              "time"},
};

static const char *const component_names[3][3] = {
    {"in_plane"}, {"radial", "hoop", "axial"}, {"radial", "hoop"}};
static const char *const largest_names[2] = {"tension", "compression"};

int stress_part_named(const figure *f, const heat_case *c, const char *name) {
  int power = c->part.shape->power, count = f->at ? stress_components(power) : 2;
  for (int i = 0; i < count; i++)
    if (!strcmp(name, f->at ? component_names[power][i] : largest_names[i])) return i;
  return -1;
}

/* ---- check ---- */

static bool one_material(const part *p) {
  for (int i = 0; i < p->layers.count; i++)
    if (p->layers.items[i].material != p->layers.items[0].material ||
        p->layers.items[i].contact > 0)
      return false;
  return true;
}

static bool positive(const curve *c) {
  for (int i = 0; i < c->count; i++) {
    double from = isfinite(c->pieces[i].from) ? c->pieces[i].from : 0;
    double to = isfinite(c->pieces[i].to) ? c->pieces[i].to : from;
    if (!(curve_value(c, from) > 0) || !(curve_value(c, to) > 0)) return false;
  }
  return true;
}

static const char *check(const figure *f, const heat_case *c, const char **member) {
  *member = "kind";
  if (c->part.shape->dimensions != 1) return "is for plate, cylinder and sphere only";
  if (!one_material(&c->part)) return "is for a part of one material only";
  *member = "expansion";
  if (f->expansion.count > LIMIT_PIECES) return "has more pieces than are allowed";
  *member = "elastic_modulus";
  if (!positive(&f->elastic_modulus)) return "must be greater than 0";
  *member = "require";
  bool compression = f->require && !f->at && f->require->which == 1;
  if (compression && (f->require->at_most < 0 || f->require->at_least < 0))
    return "compression is told as a positive number: give positive bounds";
  return NULL;
}

/* ---- along the run ---- */

static void begin(figure_run *r) {
  state *x = r->self;
  const figure *f = r->figure;
  x->elastic.modulus = &f->elastic_modulus;
  x->elastic.poisson = f->poisson;
  strain_table_init(&x->elastic.strain, &f->expansion);
  x->seen_until = x->when = x->before[0] = x->before[1] = NAN;
  x->tension = x->compression = (peak_stress){-INFINITY, -INFINITY, NAN, NAN};
}

static void keep(peak_stress *p, double value, double when, double where) {
  p->value = fmax(p->value, value);
  if (!(value > p->marked * (1 + SAME_STRESS))) return;
  p->marked = value;
  p->when = when;
  p->where = where;
}

/* Largest tension and compression at t, kept if larger than before; returned in now[2]. */
static void look(state *x, const segment *s, double t, double now[2]) {
  stress_extreme largest, smallest;
  stress_extremes(&x->elastic, s->section, s->profile(s, t), &largest, &smallest);
  now[0] = fmax(0, largest.value);
  now[1] = fmax(0, -smallest.value);
  keep(&x->tension, now[0], t, largest.position);
  keep(&x->compression, now[1], t, smallest.position);
}

static void look_along(state *x, const segment *s) {
  double first[2] = {x->before[0], x->before[1]}, middle[2], last[2], between[2];
  if (isnan(first[0]) || s->stage_begins) look(x, s, s->t0, first);
  memcpy(x->before, first, sizeof first);
  if (!(s->t1 > s->t0)) return;
  double half = (s->t1 - s->t0) / 2;
  look(x, s, s->t0 + half, middle);
  look(x, s, s->t1, last);
  for (int i = 0; i < 2; i++) {
    double bend = first[i] - 2 * middle[i] + last[i];
    double at = bend < 0 ? 0.5 * (first[i] - last[i]) / bend : NAN;
    if (fabs(at) < 1) look(x, s, s->t0 + half * (1 + at), between);
  }
  memcpy(x->before, last, sizeof last);
}

static void observe(figure_run *r, const segment *s) {
  state *x = r->self;
  const figure *f = r->figure;
  double t, now[2];
  if (x->done) return;
  x->seen_until = s->t1;
  if (!f->at && !f->time) {
    if (!figure_sees(r, s)) {
      x->before[0] = NAN;
      return;
    }
    look_along(x, s);
  } else {
    if (!figure_instant_in(r, s, &t)) return;
    if (f->at)
      x->there = stress_at(&x->elastic, s->section, s->profile(s, t), f->at->coordinate[0]);
    else
      look(x, s, t, now);
    x->when = t;
    x->done = f->time != NULL;
  }
  x->begun = true;
}

/* ---- the answer ---- */

static void tell_components(const figure_run *r, const state *x, figure_value *v) {
  int power = r->the_case->part.shape->power;
  v->parts = stress_components(power);
  for (int i = 0; i < v->parts; i++) {
    v->part[i].name = component_names[power][i];
    v->part[i].value = x->there.component[i];
    v->part[i].when = v->part[i].where = NAN;
  }
}

static void tell_largest(const state *x, figure_value *v) {
  const peak_stress *p[2] = {&x->tension, &x->compression};
  v->parts = 2;
  for (int i = 0; i < 2; i++) {
    v->part[i].name = largest_names[i];
    v->part[i].value = p[i]->value;
    v->part[i].when = p[i]->when;
    v->part[i].where = p[i]->where;
  }
}

/* Of a place that alone is warmer than the rest, at 20 degC. */
static double stress_per_kelvin(const figure *f) {
  double usual = ZERO_CELSIUS + 20;
  return curve_value(&f->elastic_modulus, usual) * fabs(curve_value(&f->expansion, usual)) /
         (1 - f->poisson);
}

static void finish(figure_run *r, figure_value *v) {
  const state *x = r->self;
  const figure *f = r->figure;
  if (!x->begun) {
    figure_missing(v, f->at || f->time ? figure_instant_why(r, x->seen_until)
                                       : "none of the stages that count was computed");
    return;
  }
  figure_found(v, NAN, NAN, stress_per_kelvin(f));
  if (f->at)
    tell_components(r, x, v);
  else
    tell_largest(x, v);
  int which =
      f->require && f->require->which > 0 && f->require->which < v->parts ? f->require->which : 0;
  v->value = v->part[which].value;
}

static dimension gives_stress(const figure *f, const heat_case *c) {
  (void)f;
  (void)c;
  return DIMENSION_STRESS;
}

const figure_kind stress_kind = {
    .name = "stress",
    .about = "Largest thermoelastic tension and compression across a section of one material that "
             "is free to stretch and "
             "bend, stress-free at any uniform temperature (compression as a positive number); or "
             "the components at one "
             "place and time, tension positive; elastic only",
    .parameters = FIGURE_PARAMETERS("stress", "Elastic properties, and where and when", parameters),
    .size = sizeof(state),
    .dimension = gives_stress,
    .trace = TRACE_PLACE,
    .check = check,
    .begin = begin,
    .observe = observe,
    .finish = finish,
};
