/* read_expand.c: the finished document: inputs and named series put where they are used. */
#include "reader.h"

#include <string.h>

/* The document that is expanded. A named series is expanded once and then shared. */
typedef struct expansion {
  reader *r;
  const json_t *given;
  json_t *series; /* those expanded so far */
  json_t *sizes;  /* their elements; a name stands here from when its expansion begins */
} expansion;

static json_t *expand(expansion *e, const json_t *v);

/* Counts elements of the finished document; true if there are too many. */
static bool count(expansion *e, size_t elements) {
  size_t left = MOST_ELEMENTS + 1 - e->r->expanded;
  e->r->expanded += elements < left ? elements : left;
  return e->r->expanded > MOST_ELEMENTS;
}

/* ---- references ---- */

static json_t *unknown_reference(expansion *e, const char *name, const char *group) {
  const char *names[LIMIT_NAMED_SERIES + 1], *key;
  json_t *value;
  int n = 0;
  json_object_foreach(json_object_get((json_t *)e->given, group), key, value) {
    if (n < LIMIT_NAMED_SERIES) names[n++] = key;
  }
  names[n] = NULL;
  const char *near = nearest_name(name, names);
  fault_here(e->r, NULL, "there is no \"%s\" in `%s`%s%s%s", name, group,
             near ? "; did you mean \"" : "", near ? near : "", near ? "\"?" : "");
  return json_null();
}

static json_t *expand_series(expansion *e, const char *name, const json_t *found) {
  size_t before = e->r->expanded;
  if (json_object_set_new(e->sizes, name, json_integer(0))) e->r->no_memory = true;
  json_t *value = expand(e, found);
  json_t *size = json_integer((json_int_t)(e->r->expanded - before));
  if (json_object_set_new(e->sizes, name, size) || json_object_set(e->series, name, value))
    e->r->no_memory = true;
  return value;
}

static json_t *series_reference(expansion *e, const char *name) {
  const json_t *found = json_object_get(json_object_get(e->given, "series"), name);
  json_t *known = json_object_get(e->series, name);
  if (!found) return unknown_reference(e, name, "series");
  if (!known && !json_object_get(e->sizes, name)) return expand_series(e, name, found);
  if (!known || json_is_null(known)) {
    fault_here(e->r, NULL, known ? "\"%s\" has no value of its own" : "\"%s\" refers to itself",
               name);
    return json_null();
  }
  count(e, (size_t)json_integer_value(json_object_get(e->sizes, name)));
  return json_incref(known);
}

static json_t *input_reference(expansion *e, const char *name) {
  json_t *found = json_object_get(json_object_get(e->given, "inputs"), name);
  return found ? json_incref(found) : unknown_reference(e, name, "inputs");
}

/* The name in {"input": NAME} or {"series": NAME}; NULL if v is something else. */
static const char *referred(const json_t *v, const char *form) {
  return json_object_size(v) == 1 ? json_string_value(json_object_get(v, form)) : NULL;
}

/* ---- everything else ---- */

static json_t *expand_object(expansion *e, const json_t *v) {
  json_t *copy = json_object(), *value;
  const char *key;
  json_object_foreach((json_t *)v, key, value) {
    size_t before = path_push(e->r, key);
    if (json_object_set_new(copy, key, expand(e, value))) e->r->no_memory = true;
    path_pop(e->r, before);
  }
  return copy;
}

static json_t *expand_array(expansion *e, const json_t *v) {
  json_t *copy = json_array();
  for (size_t i = 0; i < json_array_size(v); i++) {
    size_t before = path_push_index(e->r, i);
    if (json_array_append_new(copy, expand(e, json_array_get(v, i)))) e->r->no_memory = true;
    path_pop(e->r, before);
  }
  return copy;
}

/* Rows of numbers are most of a large document: they are shared, not copied. */
static bool holds_containers(const json_t *v) {
  for (size_t i = 0; i < json_array_size(v); i++)
    if (json_is_object(json_array_get(v, i)) || json_is_array(json_array_get(v, i))) return true;
  return false;
}

/* A new reference; null where a reference leads nowhere or the document grows too large. */
static json_t *expand(expansion *e, const json_t *v) {
  const char *input = referred(v, "input"), *series = referred(v, "series");
  if (count(e, 1)) return json_null();
  if (input) return input_reference(e, input);
  if (series) return series_reference(e, series);
  if (json_is_object(v)) return expand_object(e, v);
  if (json_is_array(v) && holds_containers(v)) return expand_array(e, v);
  count(e, json_array_size(v));
  return json_incref((json_t *)v);
}

/* ---- the document ---- */

/* Members whose keys are the caller's own names: one called "input" is no reference. */
static json_t *expand_named(expansion *e, const json_t *v) {
  bool is_series = v == json_object_get(e->given, "series");
  json_t *copy = json_object(), *value;
  const char *key;
  json_object_foreach((json_t *)v, key, value) {
    size_t before = path_push(e->r, key);
    json_t *inner = is_series ? series_reference(e, key) : expand(e, value);
    if (json_object_set_new(copy, key, inner)) e->r->no_memory = true;
    path_pop(e->r, before);
  }
  return copy;
}

static json_t *expand_member(expansion *e, const char *key, json_t *v) {
  static const char *const untouched[] = {"logs", "labels", "inputs", "title", NULL};
  bool named = !strcmp(key, "series") || !strcmp(key, "materials");
  for (int i = 0; untouched[i]; i++)
    if (!strcmp(untouched[i], key)) return json_incref(v);
  return named && json_is_object(v) ? expand_named(e, v) : expand(e, v);
}

static void check_inputs(reader *r, const json_t *v) {
  const char *name;
  json_t *value;
  size_t before = path_push(r, "inputs");
  if (v && must_be_object(r, v)) {
    json_object_foreach((json_t *)v, name, value) {
      size_t inner = path_push(r, name);
      if (!is_name(name)) fault_here(r, NULL, "a name has 1 to 64 letters, digits, _ or -");
      if (!json_is_number(value) && !json_is_string(value))
        fault_here(r, value, "must be a number, \"<number> <unit>\" or a material's name");
      path_pop(r, inner);
    }
  }
  path_pop(r, before);
}

json_t *expand_document(reader *r, const json_t *given) {
  expansion e = {.r = r, .given = given, .series = json_object(), .sizes = json_object()};
  json_t *copy = json_object(), *value;
  const char *key;
  check_inputs(r, json_object_get(given, "inputs"));
  json_object_foreach((json_t *)given, key, value) {
    size_t before = path_push(r, key);
    if (json_object_set_new(copy, key, expand_member(&e, key, value))) r->no_memory = true;
    path_pop(r, before);
  }
  if (r->expanded > MOST_ELEMENTS)
    fault_here(r, NULL, "has more than %d elements once its series are put in place",
               MOST_ELEMENTS);
  json_decref(e.series);
  json_decref(e.sizes);
  return copy;
}
