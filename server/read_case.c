/* read_case.c: a case from its members, in the order that their names need, and the rules that
 * concern several. */
#include "read.h"
#include "reader.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

/* ---- names first: stages, figures and points refer to one another ---- */

static const char *name_of(reader *r, const json_t *v) {
  const char *text = json_string_value(json_object_get(v, "name"));
  if (!text || !is_name(text)) return NULL;
  char *copy = arena_text(r->memory, text, strlen(text));
  if (!copy) r->no_memory = true;
  return copy;
}

static void prepare_stages(reader *r, const json_t *v) {
  size_t count = json_array_size(v);
  stage *items = count <= LIMIT_STAGES ? take(r, count, sizeof *items) : NULL;
  for (size_t i = 0; items && i < count; i++) items[i].name = name_of(r, json_array_get(v, i));
  r->the_case->stages.items = items;
  r->the_case->stages.count = items ? (int)count : 0;
}

static void prepare_figures(reader *r, const json_t *v) {
  size_t count = json_array_size(v);
  figure *items = count <= LIMIT_FIGURES ? take(r, count, sizeof *items) : NULL;
  for (size_t i = 0; items && i < count; i++) {
    const char *kind = json_string_value(json_object_get(json_array_get(v, i), "kind"));
    items[i].name = name_of(r, json_array_get(v, i));
    items[i].kind = kind ? figure_kind_named(kind) : NULL;
    items[i].face = -1;
  }
  r->the_case->figures.items = items;
  r->the_case->figures.count = items ? (int)count : 0;
}

/* ---- collisions ---- */

typedef struct named {
  const char *name;
  const char *what;
  char at[64];
} named;

static int collect(const heat_case *c, named *list) {
  static const char *const words[] = {"coldest", "hottest",  "mean", "section_difference",
                                      "center",  "mid_wall", "all"};
  int n = 0;
  for (int i = 0; i < COUNT_OF(words); i++)
    list[n++] = (named){words[i], "a place of every part", ""};
  for (int i = 0; c->part.shape->faces[i]; i++)
    list[n++] = (named){c->part.shape->faces[i], "a face", ""};
  for (int i = 0; i < c->part.layers.count; i++, n++) {
    list[n] = (named){c->part.layers.items[i].name, "a layer", ""};
    snprintf(list[n].at, sizeof list[n].at, "/part/layers/%d/name", i);
  }
  for (int i = 0; i < c->points.count; i++, n++) {
    list[n] = (named){c->points.items[i].name, "a point", ""};
    snprintf(list[n].at, sizeof list[n].at, "/points/%d/name", i);
  }
  for (int i = 0; i < c->figures.count; i++, n++) {
    list[n] = (named){c->figures.items[i].name, "a figure", ""};
    snprintf(list[n].at, sizeof list[n].at, "/figures/%d/name", i);
  }
  return n;
}

static void check_collisions(reader *r) {
  static const int most = 7 + MOST_FACES + LIMIT_LAYERS + LIMIT_POINTS + LIMIT_FIGURES;
  named *list = take(r, (size_t)most, sizeof *list);
  if (!list) return;
  int n = collect(r->the_case, list);
  for (int i = 0; i < n; i++)
    for (int k = 0; k < i; k++) {
      if (!list[i].name || !list[k].name || !*list[i].name || strcmp(list[i].name, list[k].name) ||
          !*list[i].at)
        continue;
      faults_add(r->faults, list[i].at, list[i].name, "%s has this name already", list[k].what);
      break;
    }
}

/* ---- rules of the whole ---- */

static bool is_zero(const series *s) {
  return s->kind == SERIES_CONSTANT && s->value == 0;
}

/* Whether a face ties the part to some temperature. */
static bool exchanges(const face_condition *c) {
  bool convects = c->has_convection && (c->h.by_surface_temperature || !is_zero(&c->h.over_time));
  bool radiates = c->has_radiation && c->emissivity * c->view_factor > 0;
  return c->kind == FACE_PRESCRIBED || convects || radiates;
}

static double net_heat(const heat_case *c, const faces *f) {
  double origin, extent = c->part.shape->extent(&c->part, &origin), at = origin, sum = 0;
  int power = c->part.shape->power;
  for (int i = 0; i < f->count; i++) {
    double radius = i ? origin + extent : origin, area = power == 0   ? 1
                                                         : power == 1 ? radius
                                                                      : radius * radius;
    if (f->condition[i].flux.kind != SERIES_NONE)
      sum += area * series_last(&f->condition[i].flux, 0);
  }
  for (int i = 0; i < c->part.layers.count; i++) {
    double outer = at + c->part.layers.items[i].thickness;
    double volume = power == 0   ? outer - at
                    : power == 1 ? (outer * outer - at * at) / 2
                                 : (outer * outer * outer - at * at * at) / 3;
    if (c->part.layers.items[i].heat_generation)
      sum += volume * series_last(c->part.layers.items[i].heat_generation, 0);
    at = outer;
  }
  return sum;
}

static void check_steady(reader *r, const faces *f, const char *at, bool is_start) {
  for (int i = 0; i < f->count; i++)
    if (exchanges(&f->condition[i])) return;
  bool no_start = is_start || (r->the_case->start.kind == START_PER_LAYER &&
                               !json_object_get(r->root, "start"));
  if (net_heat(r->the_case, f) != 0)
    faults_add(r->faults, at, NULL,
               "has no steady state: heat is generated or flows in and no face gives it away");
  else if (no_start)
    faults_add(r->faults, at, NULL, "has no steady state of its own: no face sets a temperature");
}

void check_case(reader *r) {
  heat_case *c = r->the_case;
  check_collisions(r);
  if (r->faults->found) return;
  if (c->start.kind == START_STEADY) check_steady(r, &c->start.faces, "/start/steady", true);
  for (int i = 0; i < c->stages.count; i++) {
    char at[64];
    snprintf(at, sizeof at, "/stages/%d/steady", i);
    if (c->stages.items[i].end == STAGE_STEADY)
      check_steady(r, &c->stages.items[i].faces, at, false);
  }
}

/* ---- the members ---- */

typedef void (*member_reader)(reader *r, const json_t *v);

static void read_case_member(reader *r, const char *name, member_reader read) {
  const json_t *v = json_object_get(r->root, name);
  size_t before = path_push(r, name);
  if (v) read(r, v);
  path_pop(r, before);
}

static void read_own_materials(reader *r, const json_t *v) {
  if (!must_be_object(r, v)) return;
  if (json_object_size(v) > LIMIT_MATERIALS) {
    fault_here(r, NULL, "has %zu materials; the limit is %d", json_object_size(v), LIMIT_MATERIALS);
    return;
  }
  const char *name;
  json_t *value;
  json_object_foreach((json_t *)v, name, value) {
    size_t before = path_push(r, name);
    bool used = false;
    for (int i = 0; i < r->the_case->materials.count; i++)
      used = used || !strcmp(r->the_case->materials.items[i].name, name);
    material unused;
    if (!is_name(name)) fault_here(r, NULL, "a name has 1 to 64 letters, digits, _ or -");
    if (!used) read_material(r, name, value, &unused); /* for its faults */
    path_pop(r, before);
  }
}

/* Quantities that stand in the case itself. */
static void read_own_quantities(reader *r) {
  for (int i = 0; i < case_type.count; i++) {
    const parameter *row = &case_type.parameters[i];
    const json_t *v = json_object_get(r->root, row->name);
    double *out = (double *)((char *)r->the_case + row->offset);
    if (row->kind != VALUE_QUANTITY) continue;
    size_t before = path_push(r, row->name);
    *out = row->fallback;
    if (v) read_ranged(r, v, row, row->dimension, out);
    path_pop(r, before);
  }
}

static void read_members(reader *r) {
  for (int i = 0; i < case_type.count; i++)
    if (case_type.parameters[i].flags & PARAMETER_REQUIRED &&
        !json_object_get(r->root, case_type.parameters[i].name))
      fault_at(r, case_type.parameters[i].name, NULL, "is missing: %s",
               case_type.parameters[i].about);
  r->the_case->part.shape = shapes[0];
  r->the_case->part.material = -1;
  prepare_stages(r, json_object_get(r->root, "stages"));
  prepare_figures(r, json_object_get(r->root, "figures"));
  read_case_member(r, "logs", read_logs);
  read_case_member(r, "series", read_named_series);
  if (json_object_get(r->root, "part"))
    read_case_member(r, "part", read_part);
  else
    r->shapeless = true;
  read_case_member(r, "materials", read_own_materials);
  read_case_member(r, "points", read_points);
  size_t before = path_push(r, "start");
  read_start(r, json_object_get(r->root, "start"));
  path_pop(r, before);
  read_case_member(r, "figures", read_figures);
  read_case_member(r, "stages", read_stages);
  read_case_member(r, "output", read_output);
  read_own_quantities(r);
}

/* Reads everything that the document tells of the case; true if there is no fault. */
static bool read_whole(reader *r, const json_t *given) {
  int faults = r->faults->found;
  r->given = given;
  r->root = expand_document(r, given);
  if (!r->no_memory && r->expanded <= MOST_ELEMENTS) read_members(r);
  if (!r->no_memory && r->expanded <= MOST_ELEMENTS) check_case(r);
  return !r->no_memory && !r->faults->no_memory && r->faults->found == faults;
}

int read_solve(struct reader *r, void *json, document *d) {
  arena_init(&r->own_memory, 0);
  r->memory = &r->own_memory;
  r->the_case = take(r, 1, sizeof(heat_case));
  bool good = r->the_case && read_whole(r, json);
  if (good && finish_case(r, d)) good = !(r->no_memory = true);
  json_decref(r->root);
  r->root = NULL;
  if (good) {
    r->the_case->memory = r->own_memory;
    d->question = r->the_case;
  } else {
    arena_free(&r->own_memory);
  }
  return good ? 0 : -1;
}
