/* read_expand.c: the finished document: inputs and named series put where they are used, materials
   expanded; its canonical text and hash. */
#include "reader.h"

#include <nettle/sha2.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* {"input": NAME} or {"series": NAME}: the name, and which of the two. */
static const char *reference(const json_t *v, const char **group) {
  static const char *const groups[][2] = {{"input", "inputs"}, {"series", "series"}};
  if (!json_is_object(v) || json_object_size(v) != 1) return NULL;
  for (int i = 0; i < 2; i++) {
    const char *name = json_string_value(json_object_get(v, groups[i][0]));
    *group = groups[i][1];
    if (name) return name;
  }
  return NULL;
}

static json_t *expand(reader *r, const json_t *v, const json_t *root, int depth);

static json_t *expand_reference(reader *r, const json_t *root, const char *name, const char *group,
                                int depth) {
  const json_t *found = json_object_get(json_object_get(root, group), name);
  if (found && depth < MOST_DEPTH) return expand(r, found, root, depth + 1);
  const char *names[LIMIT_NAMED_SERIES + 1], *key;
  json_t *value;
  int n = 0;
  json_object_foreach(json_object_get((json_t *)root, group), key,
                      value) if (n < LIMIT_NAMED_SERIES) names[n++] = key;
  names[n] = NULL;
  const char *near = nearest_name(name, names);
  if (found)
    fault_here(r, NULL, "\"%s\" refers to itself", name);
  else
    fault_here(r, NULL, "there is no \"%s\" in `%s`%s%s%s", name, group,
               near ? "; did you mean \"" : "", near ? near : "", near ? "\"?" : "");
  return json_null();
}

/* Series within series could multiply without end. */
static bool too_much(reader *r) {
  return ++r->expanded > MOST_ELEMENTS;
}

static json_t *expand_object(reader *r, const json_t *v, const json_t *root, int depth) {
  json_t *copy = json_object(), *inner;
  const char *key;
  json_t *value;
  json_object_foreach((json_t *)v, key, value) {
    size_t before = path_push(r, key);
    inner = expand(r, value, root, depth + 1);
    if (json_object_set_new(copy, key, inner)) r->no_memory = true;
    path_pop(r, before);
  }
  return copy;
}

static json_t *expand_array(reader *r, const json_t *v, const json_t *root, int depth) {
  json_t *copy = json_array();
  for (size_t i = 0; i < json_array_size(v); i++) {
    const json_t *item = json_array_get(v, i);
    if (!json_is_object(item) && !json_is_array(item) &&
        !too_much(r)) { /* numbers of long tables are shared */
      if (json_array_append(copy, (json_t *)item)) r->no_memory = true;
      continue;
    }
    size_t before = path_push_index(r, i);
    json_t *inner = expand(r, item, root, depth + 1);
    if (json_array_append_new(copy, inner)) r->no_memory = true;
    path_pop(r, before);
  }
  return copy;
}

static json_t *expand(reader *r, const json_t *v, const json_t *root, int depth) {
  const char *group, *name = reference(v, &group);
  if (depth > 2 * MOST_DEPTH || too_much(r)) return json_null();
  if (name) return expand_reference(r, root, name, group, depth);
  if (json_is_object(v)) return expand_object(r, v, root, depth);
  if (json_is_array(v)) return expand_array(r, v, root, depth);
  return json_incref((json_t *)v);
}

/* An object whose keys are names of the caller's: one called "input" is no reference. */
static json_t *expand_each(reader *r, const json_t *v, const json_t *root) {
  return json_is_object(v) ? expand_object(r, v, root, 1) : json_incref((json_t *)v);
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
  json_t *copy = json_object();
  const char *key;
  json_t *value;
  check_inputs(r, json_object_get(given, "inputs"));
  json_object_foreach((json_t *)given, key, value) {
    bool as_it_is = !strcmp(key, "logs") || !strcmp(key, "labels") || !strcmp(key, "inputs") ||
                    !strcmp(key, "title");
    size_t before = path_push(r, key);
    bool own_names = !strcmp(key, "series") || !strcmp(key, "materials");
    json_t *inner = as_it_is    ? json_incref(value)
                    : own_names ? expand_each(r, value, given)
                                : expand(r, value, given, 1);
    if (json_object_set_new(copy, key, inner)) r->no_memory = true;
    path_pop(r, before);
  }
  if (r->expanded > MOST_ELEMENTS)
    fault_here(r, NULL, "has more than %d elements once its series are put in place",
               MOST_ELEMENTS);
  return copy;
}

/* ---- the finished case ---- */

/* The library's own text of each material that is used. */
static int put_materials(reader *r, json_t *finished) {
  json_t *materials = json_object();
  const heat_case *c = r->the_case;
  for (int i = 0; i < c->materials.count; i++) {
    const char *name = c->materials.items[i].name;
    json_t *own = json_object_get(json_object_get(r->root, "materials"), name);
    const char *text = own ? NULL : library_text(r->library, name);
    json_t *value = own ? json_incref(own) : text ? json_loads(text, 0, NULL) : NULL;
    if (!value || json_object_set_new(materials, name, value)) {
      json_decref(materials);
      return -1;
    }
  }
  return json_object_set_new(finished, "materials", materials);
}

static void hash_text(document *d) {
  uint8_t digest[SHA256_DIGEST_SIZE];
  struct sha256_ctx sha;
  sha256_init(&sha);
  sha256_update(&sha, d->finished_length, (const uint8_t *)d->finished);
  sha256_digest(&sha, sizeof digest, digest);
  for (int i = 0; i < SHA256_DIGEST_SIZE; i++) snprintf(d->hash + 2 * i, 3, "%02x", digest[i]);
}

int finish_case(reader *r, document *d) {
  static const char *const outside[] = {"title", "labels", "inputs", "kind", "job", NULL};
  json_t *finished = json_copy(r->root);
  for (int i = 0; finished && outside[i]; i++) json_object_del(finished, outside[i]);
  char *text = NULL;
  if (finished && !put_materials(r, finished))
    text = json_dumps(finished, JSON_SORT_KEYS | JSON_COMPACT);
  json_decref(finished);
  d->finished = text ? arena_text(&d->memory, text, strlen(text)) : NULL;
  d->finished_length = text ? strlen(text) : 0;
  free(text);
  if (!d->finished) return -1;
  hash_text(d);
  return 0;
}
