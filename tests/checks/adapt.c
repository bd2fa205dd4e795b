#include "adapt.h"
#include "rows.h"
#include <math.h>
#include <stdio.h>
#include <string.h>

double neutral_number(const json_t *object, const char *name, double fallback) {
  const json_t *found = json_object_get(object, name);
  return json_is_number(found) ? json_number_value(found) : fallback;
}

/* ---- conditions ---- */

static json_t *series(const json_t *neutral) {
  if (json_is_string(neutral) && !strcmp(json_string_value(neutral), "ISO 834"))
    return json_pack("{s:s}", "fire", "standard");
  const json_t *table = json_object_get(neutral, "table");
  if (table) return json_pack("{s:O}", "table", table);
  return json_incref((json_t *)neutral); /* a number or a sine: the same on both sides */
}

static json_t *coefficient(const json_t *neutral) {
  const json_t *table = json_object_get(neutral, "table_of_surface_T");
  if (table) return json_pack("{s:O}", "by_surface_temperature", table);
  return json_incref((json_t *)neutral);
}

static void add_condition(json_t *made, const json_t *c, const json_t **ambient) {
  const char *type = json_string_value(json_object_get(c, "type"));
  if (!strcmp(type, "convection")) {
    *ambient = json_object_get(c, "T_amb");
    json_object_set_new(made, "convection",
                        json_pack("{s:o,s:o}", "h", coefficient(json_object_get(c, "h")), "medium",
                                  series(*ambient)));
  } else if (!strcmp(type, "radiation")) {
    const json_t *surroundings = json_object_get(c, "T_surr");
    if (json_is_string(surroundings) && !strcmp(json_string_value(surroundings), "same as T_amb"))
      surroundings = *ambient;
    json_object_set_new(made, "radiation",
                        json_pack("{s:O,s:o}", "emissivity", json_object_get(c, "emissivity"),
                                  "surroundings", series(surroundings)));
  } else if (!strcmp(type, "temperature")) {
    json_object_set_new(made, "temperature", series(json_object_get(c, "T")));
  } else if (!strcmp(type, "flux")) {
    json_object_set_new(made, "flux", series(json_object_get(c, "q")));
  } else {
    json_object_set_new(made, "insulated", json_true());
  }
}

static json_t *condition(const json_t *list) {
  json_t *made = json_object();
  const json_t *ambient = NULL;
  for (size_t i = 0; i < json_array_size(list); i++)
    add_condition(made, json_array_get(list, i), &ambient);
  return made;
}

static const char *face_name(const char *neutral) {
  static const char *const names[][2] = {
      {"left", "front"}, {"right", "back"}, {"inner", "inner"}, {"outer", "outer"}};
  for (int i = 0; i < 4; i++)
    if (!strcmp(neutral, names[i][0])) return names[i][1];
  return NULL;
}

/* ---- stages ---- */

/* A figure without a time of its own is looked for this long, s. */
static const double usual_length = 2000;

static double last_time(const adapted *a) {
  if (a->period > 0) return (PERIODS_BEFORE + 1) * a->period;
  double longest = 0;
  size_t i;
  const json_t *row;
  json_array_foreach(json_object_get(a->neutral, "expect"), i, row) longest =
      fmax(longest, neutral_number(row, "t", 0));
  return longest > 0 ? longest : usual_length;
}

static double period_of(const json_t *neutral) {
  const json_t *left = json_object_get(json_object_get(neutral, "boundaries"), "left");
  const json_t *sine = json_object_get(json_object_get(json_array_get(left, 0), "T"), "sine");
  return neutral_number(sine, "period", 0);
}

/* Both faces alike, in steps from one time to the next. */
static void add_timed_stages(adapted *a, const json_t *steps, json_t *stages) {
  for (size_t i = 0; i < json_array_size(steps); i++) {
    const json_t *step = json_array_get(steps, i);
    json_t *stage =
        json_pack("{s:o,s:f,s:{s:o}}", "name", json_sprintf("stage_%zu", i + 1), "lasts",
                  neutral_number(step, "to_t", 0) - neutral_number(step, "from_t", 0), "faces",
                  "all", condition(json_object_get(step, "bc")));
    json_array_append_new(stages, stage);
    a->longest = neutral_number(step, "to_t", 0);
  }
}

static const char *add_stages(adapted *a) {
  json_t *stages = json_array(), *faces = json_object();
  const json_t *boundaries = json_object_get(a->neutral, "boundaries"), *list;
  const char *name;
  json_object_set_new(a->document, "stages", stages);
  a->longest = last_time(a);
  json_object_foreach((json_t *)boundaries, name, list) {
    if (!strcmp(name, "both_faces")) {
      add_timed_stages(a, list, stages);
      json_decref(faces);
      return NULL;
    }
    if (!face_name(name)) {
      json_decref(faces);
      return "faces of a section in two or three dimensions";
    }
    json_object_set_new(faces, face_name(name), condition(list));
  }
  json_t *stage = json_pack("{s:s,s:o}", "name", "stage_1", "faces", faces);
  if (a->steady)
    json_object_set_new(stage, "steady", json_true());
  else
    json_object_set_new(stage, "lasts", json_real(a->longest));
  json_array_append_new(stages, stage);
  return NULL;
}

/* ---- part ---- */

typedef struct shape_name {
  const char *neutral, *shape, *coordinate, *first, *last;
} shape_name;

static const shape_name shape_names[] = {
    {"plate", "plate", "x", "front", "back"},
    {"layered_wall", "plate", "x", "front", "back"},
    {"long_cylinder", "cylinder", "r", "inner", "outer"},
    {"hollow_cylinder", "cylinder", "r", "inner", "outer"},
    {"sphere", "sphere", "r", "inner", "outer"},
    {"hollow_sphere", "sphere", "r", "inner", "outer"},
};

static const shape_name *shape_of(const json_t *geometry) {
  const char *name = json_string_value(json_object_get(geometry, "shape"));
  for (size_t i = 0; name && i < sizeof shape_names / sizeof *shape_names; i++)
    if (!strcmp(name, shape_names[i].neutral)) return &shape_names[i];
  return NULL;
}

static void add_layers(adapted *a, json_t *part) {
  json_t *layers = json_array(), *materials = json_object();
  const json_t *given = json_object_get(a->neutral, "layers"), *l;
  size_t i;
  double at = a->origin;
  json_array_foreach(given, i, l) {
    json_t *material = adapt_material(l), *layer;
    char name[40];
    snprintf(name, sizeof name, "material_%zu", i + 1);
    const char *used = json_is_string(material) ? json_string_value(material) : name;
    layer = json_pack("{s:O,s:s}", "thickness", json_object_get(l, "thickness"), "material", used);
    const json_t *contact = json_object_get(l, "contact_resistance_to_next");
    if (json_is_number(contact)) json_object_set(layer, "contact", (json_t *)contact);
    const json_t *start = json_object_get(l, "T_initial");
    if (start) json_object_set(layer, "start", (json_t *)start);
    json_array_append_new(layers, layer);
    if (used == name) json_object_set(materials, name, material);
    json_decref(material);
    at += neutral_number(l, "thickness", 0);
    if (i + 1 < json_array_size(given) && a->interfaces < MOST_INTERFACES)
      a->interface[a->interfaces++] = at;
  }
  a->end = at;
  json_object_set_new(part, "layers", layers);
  json_object_set_new(a->document, "materials", materials);
}

static const char *add_one_material(adapted *a, json_t *part, const json_t *geometry) {
  bool round = a->coordinate[0] == 'r';
  a->end = round ? neutral_number(geometry, "r_outer", neutral_number(geometry, "radius", 0))
                 : neutral_number(geometry, "thickness", 0);
  json_object_set_new(part, round ? "diameter" : "thickness",
                      json_real(round ? 2 * a->end : a->end));
  json_t *material = adapt_material(json_object_get(a->neutral, "material"));
  if (!material) return "a material that is not in the library";
  if (json_is_string(material))
    json_object_set(part, "material", material);
  else {
    json_object_set_new(part, "material", json_string("material_1"));
    json_object_set_new(a->document, "materials", json_pack("{s:O}", "material_1", material));
  }
  json_decref(material);
  return NULL;
}

static const char *add_part(adapted *a) {
  const json_t *geometry = json_object_get(a->neutral, "geometry");
  const shape_name *shape = shape_of(geometry);
  if (!shape) return "a shape in two or three dimensions";
  a->coordinate = shape->coordinate;
  a->first = shape->first;
  a->last = shape->last;
  a->origin = neutral_number(geometry, "r_inner", 0);
  json_t *part = json_pack("{s:s}", "shape", shape->shape);
  json_object_set_new(a->document, "part", part);
  if (a->origin > 0) json_object_set_new(part, "bore", json_real(2 * a->origin));
  const json_t *generation = json_object_get(a->neutral, "generation");
  if (generation) json_object_set(part, "heat_generation", json_object_get(generation, "uniform"));
  if (!json_object_get(a->neutral, "layers")) return add_one_material(a, part, geometry);
  add_layers(a, part);
  return NULL;
}

const char *adapt(adapted *a, const json_t *neutral) {
  const char *mode = json_string_value(json_object_get(neutral, "mode"));
  *a = (adapted){.neutral = neutral, .document = json_object(), .steady = !strcmp(mode, "steady")};
  if (!strcmp(mode, "periodic")) a->period = period_of(neutral);
  json_object_set(a->document, "title", json_object_get(neutral, "title"));
  const char *why = add_part(a);
  if (!why) why = add_stages(a);
  if (why) return why;
  const json_t *initial = json_object_get(json_object_get(neutral, "initial"), "T");
  if (initial) json_object_set(a->document, "start", (json_t *)initial);
  a->points = json_array();
  a->figures = json_array();
  a->times = json_array();
  a->of = json_array();
  json_object_set_new(a->document, "points", a->points);
  json_object_set_new(a->document, "figures", a->figures);
  json_object_set_new(a->document, "output",
                      json_pack("{s:{s:o,s:o}}", "history", "at", a->times, "of", a->of));
  return NULL;
}

void adapt_free(adapted *a) {
  json_decref(a->document);
  a->document = NULL;
}
