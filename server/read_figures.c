/* read_figures.c: figures by the rows of their kinds, and what is required of them. */
#include "reader.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static const figure_kind *read_kind(reader *r, const json_t *v) {
  const char *names[64];
  int n = 0;
  size_t before = path_push(r, "kind");
  const figure_kind *k = NULL;
  for (int i = 0; figure_kinds[i] && n < 63; i++) names[n++] = figure_kinds[i]->name;
  names[n] = NULL;
  if (!v) {
    fault_here(r, NULL, "is missing: the kind of figure");
  } else if (must_be_text(r, v) && !(k = figure_kind_named(json_string_value(v)))) {
    const char *near = nearest_name(json_string_value(v), names);
    fault_here(r, v, "unknown kind of figure%s%s%s", near ? "; did you mean \"" : "",
               near ? near : "", near ? "\"?" : "");
  }
  path_pop(r, before);
  return k;
}

/* Levels are in the dimension of what the figure watches. */
static void read_levels(reader *r, const json_t *object, const object_type *t, dimension d,
                        char *out) {
  for (int i = 0; i < t->count; i++) {
    const parameter *row = &t->parameters[i];
    const json_t *v = json_object_get(object, row->name);
    if (row->kind != VALUE_LEVEL || !v) continue;
    size_t before = path_push(r, row->name);
    double value;
    if (read_quantity(r, v, d, &value)) *(double *)(out + row->offset) = value;
    path_pop(r, before);
  }
}

static void read_requirement(reader *r, const json_t *v, figure *f) {
  static const char *const skip[] = {"which", NULL};
  heat_case *c = r->the_case;
  requirement *q = take(r, 1, sizeof *q);
  size_t before = path_push(r, "require");
  if (q && must_be_object(r, v)) {
    read_object(r, v, &requirement_type, NULL, skip, q);
    read_levels(r, v, &requirement_type, f->kind->dimension(f, c), (char *)q);
    if (!json_object_get(v, "at_least") && !json_object_get(v, "at_most"))
      fault_here(r, NULL, "must have at_least or at_most");
    if (q->at_least > q->at_most)
      fault_here(r, NULL, "at_least is above at_most: no value can meet it");
    const json_t *which = json_object_get(v, "which");
    bool stress = !strcmp(f->kind->name, "stress");
    if (stress && !which) fault_at(r, "which", NULL, "is missing: the component that is required");
    if (!stress && which) fault_at(r, "which", NULL, "goes with stress");
    size_t inner = path_push(r, "which");
    if (stress && which && must_be_text(r, which)) {
      q->which = stress_part_named(f, c, json_string_value(which));
      if (q->which < 0) fault_here(r, which, "this figure has no such component");
      if (q->which < 0) q->which = 0;
    }
    path_pop(r, inner);
    f->require = q;
  }
  path_pop(r, before);
}

static dimension watched_dimension(const reader *r, const figure *f, bool good) {
  if (!f->kind->takes_place) return DIMENSION_NUMBER;
  return good ? target_dimension(&f->of, r->the_case) : DIMENSION_TEMPERATURE;
}

static void read_of(reader *r, const json_t *v, figure *f, bool *good) {
  const json_t *of = json_object_get(v, "of");
  *good = false;
  f->of = (target){.figure = -1, .place = {.kind = PLACE_MEAN, .layer = -1}};
  if (f->kind->takes_place && !of) fault_at(r, "of", NULL, "is missing: the place that is watched");
  if (!f->kind->takes_place && of) fault_at(r, "of", of, "a %s has no place", f->kind->name);
  if (!f->kind->takes_place && json_object_get(v, "in"))
    fault_at(r, "in", NULL, "a %s has no place", f->kind->name);
  if (!f->kind->takes_place || !of) return;
  size_t before = path_push(r, "of");
  *good = read_target(r, of, json_object_get(v, "in"), &f->of);
  if (*good && f->of.is_figure && &r->the_case->figures.items[f->of.figure] == f) {
    fault_here(r, of, "a figure cannot watch itself");
    *good = false;
  }
  path_pop(r, before);
}

static void read_figure(reader *r, const json_t *v, figure *f) {
  static const char *const skip[] = {"kind", "of", "in", "require", NULL};
  if (!must_be_object(r, v)) return;
  f->kind = read_kind(r, json_object_get(v, "kind"));
  if (!f->kind) return;
  bool good;
  int faults = r->faults->found;
  f->face = -1;
  read_of(r, v, f, &good);
  read_object(r, v, &figure_type, &f->kind->parameters, skip, f);
  read_levels(r, v, &f->kind->parameters, watched_dimension(r, f, good), (char *)f);
  if (!f->name) f->name = "";
  if (json_object_get(v, "require") && !(f->kind->takes_place && !good))
    read_requirement(r, json_object_get(v, "require"), f);
  if (r->faults->found == faults && f->kind->check) {
    const char *member = NULL, *wrong = f->kind->check(f, r->the_case, &member);
    if (wrong) fault_at(r, member, member ? json_object_get(v, member) : NULL, "%s", wrong);
  }
}

void read_figures(reader *r, const json_t *v) {
  if (!must_be_array(r, v, LIMIT_FIGURES, "figures")) return;
  heat_case *c = r->the_case;
  for (int i = 0; i < c->figures.count; i++) {
    size_t before = path_push_index(r, (size_t)i);
    read_figure(r, json_array_get(v, (size_t)i), &c->figures.items[i]);
    path_pop(r, before);
  }
}
