/* case_facts.h: a finished case as JSON, in SI and kelvin, so that a test can name any fact of it
   by a JSON Pointer. Unset numbers and absent pointers are null. */
#ifndef CORESOAK_TESTS_CASE_FACTS_H
#define CORESOAK_TESTS_CASE_FACTS_H

#include "figure.h"
#include "shape.h"

#include <jansson.h>
#include <math.h>

static inline json_t *fact_number(double value) {
  return isfinite(value) ? json_real(value) : json_null();
}

static inline json_t *fact_text(const char *text) {
  return text ? json_string(text) : json_null();
}

static inline json_t *fact_table(const table *t) {
  json_t *rows = json_array();
  for (int i = 0; i < t->count; i++)
    json_array_append_new(rows, json_pack("[f,f]", t->x[i], t->y[i]));
  return rows;
}

static inline json_t *fact_series(const series *s) {
  static const char *const kinds[] = {"none", "constant", "table", "sine", "fire"};
  if (!s || s->kind == SERIES_NONE) return json_null();
  json_t *o = json_pack("{s:s, s:b, s:o}", "kind", kinds[s->kind], "from_case_start",
                        s->from_case_start, "log", fact_text(s->log));
  if (s->kind == SERIES_CONSTANT || s->kind == SERIES_SINE)
    json_object_set_new(o, "value", fact_number(s->value));
  if (s->kind == SERIES_TABLE) json_object_set_new(o, "table", fact_table(&s->table));
  if (s->kind == SERIES_FIRE)
    json_object_set_new(o, "curve", json_string(fire_curve_names[s->curve]));
  if (s->kind != SERIES_SINE) return o;
  json_object_set_new(o, "amplitude", fact_number(s->amplitude));
  json_object_set_new(o, "period", fact_number(s->period));
  json_object_set_new(o, "phase", fact_number(s->phase));
  return o;
}

static inline json_t *fact_coefficient(const coefficient *h) {
  return h->by_surface_temperature
             ? json_pack("{s:o}", "by_surface_temperature", fact_table(&h->over_temperature))
             : fact_series(&h->over_time);
}

static inline json_t *fact_condition(const face_condition *c) {
  static const char *const kinds[] = {"insulated", "prescribed", "exchange"};
  json_t *o = json_pack("{s:s, s:b, s:b}", "kind", kinds[c->kind], "assumed", c->assumed, "furnace",
                        c->furnace);
  if (c->kind == FACE_PRESCRIBED)
    json_object_set_new(o, "temperature", fact_series(&c->temperature));
  if (c->kind != FACE_EXCHANGE) return o;
  json_object_set_new(o, "flux", fact_series(&c->flux));
  if (c->has_convection) {
    json_object_set_new(o, "h", fact_coefficient(&c->h));
    json_object_set_new(o, "medium", fact_series(&c->medium));
  }
  if (!c->has_radiation) return o;
  json_object_set_new(o, "emissivity", fact_number(c->emissivity));
  json_object_set_new(o, "view_factor", fact_number(c->view_factor));
  json_object_set_new(o, "surroundings", fact_series(&c->surroundings));
  return o;
}

static inline json_t *fact_faces(const faces *f, const shape *s) {
  json_t *o = json_object();
  for (int i = 0; i < f->count; i++)
    json_object_set_new(o, s->faces[i], fact_condition(&f->condition[i]));
  return o;
}

/* pieces [from, to, poly[0], poly[1], rational, pole] */
static inline json_t *fact_curve(const curve *c) {
  json_t *rows = json_array();
  for (int i = 0; i < c->count; i++) {
    const piece *p = &c->pieces[i];
    json_t *row = json_array();
    const double values[] = {p->from, p->to, p->poly[0], p->poly[1], p->rational, p->pole};
    for (int j = 0; j < 6; j++) json_array_append_new(row, fact_number(values[j]));
    json_array_append_new(rows, row);
  }
  return rows;
}

static inline json_t *fact_material(const material *m) {
  json_t *latent = json_array();
  for (int i = 0; i < m->latent.count; i++) {
    const latent_heat *l = &m->latent.items[i];
    json_array_append_new(
        latent, json_pack("{s:f, s:f, s:f}", "heat", l->heat, "from", l->from, "to", l->to));
  }
  return json_pack("{s:o, s:o, s:o, s:o, s:o, s:o, s:i}", "name", fact_text(m->name),
                   "conductivity", fact_curve(&m->conductivity), "density", fact_curve(&m->density),
                   "specific_heat", fact_curve(&m->specific_heat), "latent", latent, "max_service",
                   fact_number(m->max_service), "traits", (int)m->traits);
}

static inline json_t *fact_layers(const part *p) {
  json_t *layers = json_array();
  for (int i = 0; i < p->layers.count; i++) {
    const layer *l = &p->layers.items[i];
    json_array_append_new(
        layers, json_pack("{s:o, s:i, s:o, s:o, s:o, s:o}", "name", fact_text(l->name), "material",
                          l->material, "thickness", fact_number(l->thickness), "contact",
                          fact_number(l->contact), "heat_generation",
                          fact_series(l->heat_generation), "start", fact_number(l->start)));
  }
  return layers;
}

static inline json_t *fact_place(const place *p) {
  static const char *const kinds[] = {
      "point", "face", "coldest", "hottest", "mean", "section_difference", "center", "mid_wall"};
  return json_pack("{s:s, s:i, s:i}", "kind", kinds[p->kind], "index", p->index, "layer", p->layer);
}

static inline json_t *fact_target(const target *t) {
  return t->is_figure ? json_pack("{s:i}", "figure", t->figure) : fact_place(&t->place);
}

static inline json_t *fact_instant(const instant *i) {
  if (!i) return json_null();
  return i->end_of_stage >= 0 ? json_pack("{s:i}", "end_of_stage", i->end_of_stage)
                              : fact_number(i->time);
}

static inline json_t *fact_start(const start *s, const shape *of) {
  switch (s->kind) {
  case START_PER_LAYER: return json_string("per_layer");
  case START_UNIFORM: return fact_number(s->temperature);
  case START_PROFILE: return json_pack("{s:o}", "profile", fact_table(&s->profile));
  case START_STEADY: return json_pack("{s:o}", "steady", fact_faces(&s->faces, of));
  }
  return json_null();
}

static inline json_t *fact_until(const until *u) {
  static const char *const kinds[] = {"rises_to", "falls_to", "within", "all", "any"};
  json_t *nodes = json_array();
  for (int i = 0; i < u->count; i++) {
    const condition_node *n = &u->nodes[i];
    json_t *o = json_pack("{s:s}", "kind", kinds[n->kind]);
    if (n->kind == UNTIL_ALL || n->kind == UNTIL_ANY) {
      json_object_set_new(o, "first_child", json_integer(n->first_child));
      json_object_set_new(o, "children", json_integer(n->children));
    } else {
      json_object_set_new(o, "of", fact_target(&n->of));
      json_object_set_new(o, "level", fact_number(n->level));
      if (n->kind == UNTIL_WITHIN) json_object_set_new(o, "band", fact_number(n->band));
    }
    json_array_append_new(nodes, o);
  }
  return json_pack("{s:o, s:o}", "held_for", fact_number(u->held_for), "nodes", nodes);
}

static inline json_t *fact_stages(const heat_case *c) {
  static const char *const ends[] = {"lasts", "until", "steady"};
  json_t *stages = json_array();
  for (int i = 0; i < c->stages.count; i++) {
    const stage *s = &c->stages.items[i];
    json_t *o = json_pack("{s:o, s:s, s:o}", "name", fact_text(s->name), "end", ends[s->end],
                          "faces", fact_faces(&s->faces, c->part.shape));
    if (s->end == STAGE_LASTS) json_object_set_new(o, "lasts", fact_number(s->lasts));
    if (s->end == STAGE_UNTIL) {
      json_object_set_new(o, "time_limit", fact_number(s->time_limit));
      json_object_set_new(o, "until", fact_until(&s->until));
    }
    json_array_append_new(stages, o);
  }
  return stages;
}

static inline json_t *fact_points(const heat_case *c) {
  json_t *points = json_array();
  for (int i = 0; i < c->points.count; i++) {
    const point *p = &c->points.items[i];
    json_array_append_new(points, json_pack("{s:o, s:f, s:i}", "name", fact_text(p->name), "at",
                                            p->at.coordinate[0], "layer", p->at.layer));
  }
  return points;
}

/* The members that the figure's own row names, as numbers; others by hand. */
static inline json_t *fact_figure(const figure *f) {
  json_t *o = json_pack("{s:o, s:s, s:o, s:o}", "name", fact_text(f->name), "kind", f->kind->name,
                        "of", f->kind->takes_place ? fact_target(&f->of) : json_null(), "time",
                        fact_instant(f->time));
  json_t *during = json_array();
  for (int i = 0; f->during.items && i < f->during.count; i++)
    json_array_append_new(during, json_integer(f->during.items[i]));
  json_object_set_new(o, "during", f->during.items ? during : json_null());
  if (!f->during.items) json_decref(during);
  if (f->require)
    json_object_set_new(o, "require",
                        json_pack("{s:o, s:o, s:i}", "at_least", fact_number(f->require->at_least),
                                  "at_most", fact_number(f->require->at_most), "which",
                                  f->require->which));
  for (int i = 0; i < f->kind->parameters.count; i++) {
    const parameter *p = &f->kind->parameters.parameters[i];
    const char *at = (const char *)f + p->offset;
    if (p->kind == VALUE_QUANTITY || p->kind == VALUE_LEVEL)
      json_object_set_new(o, p->name, fact_number(*(const double *)at));
    if (p->kind == VALUE_CHOICE || p->kind == VALUE_FACE)
      json_object_set_new(o, p->name, json_integer(*(const int *)at));
    if (p->kind == VALUE_TABLE) json_object_set_new(o, p->name, fact_table((const table *)at));
    if (p->kind == VALUE_CURVE) json_object_set_new(o, p->name, fact_curve((const curve *)at));
  }
  if (f->at)
    json_object_set_new(o, "at",
                        json_pack("{s:f, s:i}", "at", f->at->coordinate[0], "layer", f->at->layer));
  return o;
}

static inline json_t *fact_request(const output_request *r) {
  static const char *const kinds[] = {"place", "heat_flow", "series"};
  static const char *const times[] = {"none", "every", "at"};
  json_t *at = json_array(), *of = json_array();
  for (int i = 0; i < r->at.count; i++) json_array_append_new(at, fact_instant(&r->at.items[i]));
  for (int i = 0; i < r->of.count; i++) {
    const column *c = &r->of.items[i];
    json_array_append_new(
        of, json_pack("{s:s, s:o, s:o, s:i}", "kind", kinds[c->kind], "name", fact_text(c->name),
                      "place", c->kind == COLUMN_PLACE ? fact_place(&c->place) : json_null(),
                      "index", c->index));
  }
  return json_pack("{s:s, s:o, s:o, s:o}", "times", times[r->times], "every", fact_number(r->every),
                   "at", at, "of", of);
}

static inline json_t *fact_named(const heat_case *c) {
  json_t *o = json_object();
  for (int i = 0; i < c->series.count; i++) {
    const named_series *n = &c->series.items[i];
    json_object_set_new(o, n->name,
                        json_pack("{s:s, s:o}", "dimension", dimension_name(n->dimension), "series",
                                  fact_series(&n->series)));
  }
  return o;
}

static inline json_t *fact_logs(const heat_case *c) {
  json_t *logs = json_array();
  for (int i = 0; i < c->logs.count; i++) {
    const log_facts *l = &c->logs.items[i];
    json_array_append_new(logs, json_pack("{s:s, s:f, s:f, s:f, s:f, s:i, s:b, s:b}", "name",
                                          l->name, "first", l->first, "last", l->last, "widest_gap",
                                          l->widest_gap, "gap_at", l->gap_at, "rows", l->rows,
                                          "dated", l->dated, "has_offset", l->has_offset));
  }
  return logs;
}

/* All of it; a new reference. */
static inline json_t *case_facts(const heat_case *c) {
  json_t *o = json_object(), *materials = json_array(), *figures = json_array(),
         *sizes = json_array();
  for (int i = 0; i < c->materials.count; i++)
    json_array_append_new(materials, fact_material(&c->materials.items[i]));
  for (int i = 0; i < c->figures.count; i++)
    json_array_append_new(figures, fact_figure(&c->figures.items[i]));
  for (int i = 0; i < MOST_SIZES; i++) json_array_append_new(sizes, fact_number(c->part.sizes[i]));
  json_object_set_new(o, "shape", json_string(c->part.shape->name));
  json_object_set_new(o, "sizes", sizes);
  json_object_set_new(o, "layers", fact_layers(&c->part));
  json_object_set_new(o, "materials", materials);
  json_object_set_new(o, "start", fact_start(&c->start, c->part.shape));
  json_object_set_new(o, "stages", fact_stages(c));
  json_object_set_new(o, "points", fact_points(c));
  json_object_set_new(o, "figures", figures);
  json_object_set_new(o, "history", fact_request(&c->output.history));
  json_object_set_new(o, "fields", fact_request(&c->output.fields));
  json_object_set_new(o, "series", fact_named(c));
  json_object_set_new(o, "logs", fact_logs(c));
  json_object_set_new(o, "numerical_error", fact_number(c->numerical_error));
  return o;
}

#endif
