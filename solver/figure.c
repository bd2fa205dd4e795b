/* figure.c: the table of figures, and what its rows share: which segments count, how a value is
 * told. */
#include "figure_kit.h"

#include <string.h>

const figure_kind *const figure_kinds[] = {&time_to_kind,        &time_at_temperature_kind,
                                           &time_between_kind,   &at_kind,
                                           &peak_kind,           &lowest_kind,
                                           &rate_kind,           &heat_absorbed_kind,
                                           &heat_flow_kind,      &lethality_kind,
                                           &equivalent_age_kind, &accumulated_kind,
                                           &tempering_kind,      &maturity_kind,
                                           &stress_kind,         NULL};

const figure_kind *figure_kind_named(const char *name) {
  for (int i = 0; figure_kinds[i]; i++)
    if (!strcmp(figure_kinds[i]->name, name)) return figure_kinds[i];
  return NULL;
}

bool figure_counts_stage(const figure *f, int stage) {
  if (!f->during.items) return true;
  for (int i = 0; i < f->during.count; i++)
    if (f->during.items[i] == stage) return true;
  return false;
}

dimension target_dimension(const target *t, const heat_case *c) {
  if (t->is_figure) {
    const figure *f = &c->figures.items[t->figure];
    return f->kind->dimension(f, c);
  }
  return t->place.kind == PLACE_SECTION_DIFFERENCE ? DIMENSION_DIFFERENCE : DIMENSION_TEMPERATURE;
}

dimension figure_gives_time(const figure *f, const heat_case *c) {
  (void)f;
  (void)c;
  return DIMENSION_TIME;
}

const char *figure_needs_place(const figure *f, const heat_case *c, const char **member) {
  (void)c;
  *member = "of";
  return f->of.is_figure ? "must be a place: only time_to and conditions watch another figure"
                         : NULL;
}

/* ---- segments ---- */

bool segment_is_steady(const figure_run *r, const segment *s) {
  return r->the_case->stages.items[s->stage].end == STAGE_STEADY;
}

bool figure_sees(const figure_run *r, const segment *s) {
  if (!figure_counts_stage(r->figure, s->stage)) return false;
  return r->the_case->stages.count == 1 || !segment_is_steady(r, s);
}

double segment_time(const segment *s, int j) {
  if (j == SEGMENT_SAMPLES - 1) return s->t1;
  return s->t0 + j * (s->t1 - s->t0) / (SEGMENT_SAMPLES - 1);
}

/* Sums of stages differ from the caller's own sum by round-off. */
static double round_off(double t) {
  return 1e-12 * fabs(t) + 1e-9;
}

bool figure_instant_in(const figure_run *r, const segment *s, double *t) {
  const instant *i = r->figure->time;
  if (!figure_counts_stage(r->figure, s->stage)) return false;
  *t = s->t1;
  if (i && i->end_of_stage >= 0) return s->stage_ends && s->stage == i->end_of_stage;
  if (segment_is_steady(r, s)) return r->the_case->stages.count == 1;
  if (!i) return true;
  *t = fmax(s->t0, fmin(s->t1, i->time));
  return fabs(*t - i->time) <= round_off(i->time);
}

const char *figure_instant_why(const figure_run *r, double seen_until) {
  const instant *i = r->figure->time;
  if (isnan(seen_until)) return "no stage was computed";
  if (i && i->end_of_stage < 0 && i->time > seen_until) return "the case ends before that time";
  return "that time lies in no stage that counts for this figure";
}

/* ---- values ---- */

static void nothing(figure_value *v) {
  *v = (figure_value){.value = NAN, .when = NAN, .where = NAN};
}

void figure_found(figure_value *v, double value, double when, double sensitivity) {
  nothing(v);
  v->found = true;
  v->value = value;
  v->when = when;
  v->sensitivity = isfinite(sensitivity) ? sensitivity : 0;
}

void figure_missing(figure_value *v, const char *why) {
  nothing(v);
  v->why = why;
}
