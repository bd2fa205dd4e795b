/* read_object.c: fills structs from rows of parameters. */
#include "reader.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

enum { MOST_MEMBERS = 64 };

static const parameter *row_named(const object_type *t, const char *name) {
  for (int i = 0; t && i < t->count; i++)
    if (!strcmp(t->parameters[i].name, name)) return &t->parameters[i];
  return NULL;
}

static int names_of(const object_type *t, const char **names, int count) {
  for (int i = 0; t && i < t->count && count < MOST_MEMBERS; i++)
    if (!(t->parameters[i].flags & PARAMETER_PLANNED)) names[count++] = t->parameters[i].name;
  return count;
}

static void unknown_member(reader *r, const char *name, const object_type *first,
                           const object_type *second) {
  const char *names[MOST_MEMBERS + 1];
  int count = names_of(second, names, names_of(first, names, 0));
  names[count] = NULL;
  const char *near = nearest_name(name, names);
  if (near)
    fault_at(r, name, NULL, "unknown member of a %s; did you mean \"%s\"?", first->name, near);
  else
    fault_at(r, name, NULL, "unknown member of a %s", first->name);
}

bool check_members(reader *r, const json_t *object, const object_type *first,
                   const object_type *second) {
  bool good = true;
  const char *name;
  json_t *value;
  json_object_foreach((json_t *)object, name, value) {
    const parameter *row = row_named(first, name);
    if (!row) row = row_named(second, name);
    if (!row) unknown_member(r, name, first, second);
    if (row && row->flags & PARAMETER_PLANNED)
      fault_at(r, name, NULL, "is not offered by this version");
    good = good && row && !(row->flags & PARAMETER_PLANNED);
  }
  if (first->one_of && json_object_size(object) != 1) {
    fault_here(r, NULL, "must have exactly one member");
    good = false;
  }
  return good;
}

static bool skipped(const char *name, const char *const *skip) {
  for (; skip && *skip; skip++)
    if (!strcmp(*skip, name)) return true;
  return false;
}

static void set_default(const parameter *row, char *at) {
  switch (row->kind) {
  case VALUE_QUANTITY:
  case VALUE_LEVEL:
  case VALUE_CONTACT: *(double *)at = row->fallback; break;
  case VALUE_CHOICE:
  case VALUE_COUNT_OF: *(int *)at = isfinite(row->fallback) ? (int)row->fallback : 0; break;
  case VALUE_FACE:
  case VALUE_MATERIAL: *(int *)at = -1; break;
  default: break; /* zero */
  }
}

static void read_choice(reader *r, const json_t *v, const parameter *row, int *out) {
  const char *const *choices = row->of;
  if (!must_be_text(r, v)) return;
  for (int i = 0; choices[i]; i++)
    if (!strcmp(choices[i], json_string_value(v))) {
      *out = i;
      return;
    }
  const char *near = nearest_name(json_string_value(v), choices);
  char list[200] = "";
  for (int i = 0; choices[i]; i++) {
    strncat(list, i ? ", " : "", sizeof list - strlen(list) - 1);
    strncat(list, choices[i], sizeof list - strlen(list) - 1);
  }
  fault_here(r, v, "must be one of %s%s%s%s", list, near ? "; did you mean \"" : "",
             near ? near : "", near ? "\"?" : "");
}

static void read_choices(reader *r, const json_t *v, const parameter *row, unsigned *out) {
  if (!must_be_array(r, v, 32, "names")) return;
  for (size_t i = 0; i < json_array_size(v); i++) {
    int choice = -1;
    size_t before = path_push_index(r, i);
    read_choice(r, json_array_get(v, i), row, &choice);
    if (choice >= 0) *out |= 1u << choice;
    path_pop(r, before);
  }
}

static void read_name(reader *r, const json_t *v, const char **out) {
  if (!must_be_text(r, v)) return;
  if (!is_name(json_string_value(v)) || strlen(json_string_value(v)) != json_string_length(v)) {
    fault_here(r, v, "a name has 1 to 64 letters, digits, _ or -");
    return;
  }
  *out = arena_text(r->memory, json_string_value(v), json_string_length(v));
  if (!*out) r->no_memory = true;
}

static size_t limit_of(const object_type *t) {
  static const struct {
    const char *name;
    size_t limit;
  } limits[] = {
      {"layer", LIMIT_LAYERS}, {"latent_heat", LIMIT_LATENT_HEATS}, {"zone", LIMIT_ZONES}};
  for (int i = 0; i < COUNT_OF(limits); i++)
    if (!strcmp(limits[i].name, t->name)) return limits[i].limit;
  return LIMIT_TABLE_ROWS;
}

typedef LIST(void) any_list;

static void read_list(reader *r, const json_t *v, const object_type *t, void *out) {
  char what[64];
  snprintf(what, sizeof what, "%ss", t->name);
  if (!must_be_array(r, v, limit_of(t), what)) return;
  any_list *list = out;
  size_t count = json_array_size(v);
  char *items = take(r, count, t->size);
  if (!items) return;
  for (size_t i = 0; i < count; i++) {
    size_t before = path_push_index(r, i);
    if (must_be_object(r, json_array_get(v, i)))
      read_object(r, json_array_get(v, i), t, NULL, NULL, items + i * t->size);
    path_pop(r, before);
  }
  list->count = (int)count;
  list->items = items;
}

static void read_optional(reader *r, const json_t *v, const object_type *t, void **out) {
  if (!must_be_object(r, v)) return;
  void *item = take(r, 1, t->size);
  if (!item) return;
  read_object(r, v, t, NULL, NULL, item);
  *out = item;
}

static void read_optional_series(reader *r, const json_t *v, const parameter *row, series **out) {
  series *item = take(r, 1, sizeof *item);
  if (item && read_series(r, v, row->dimension, row->least, row->most, item)) *out = item;
}

static void read_member(reader *r, const json_t *v, const parameter *row, const json_t *whole,
                        char *at) {
  switch (row->kind) {
  case VALUE_QUANTITY: read_ranged(r, v, row, row->dimension, (double *)at); break;
  case VALUE_FLAG:
    if (json_is_boolean(v))
      *(bool *)at = json_is_true(v);
    else
      fault_here(r, v, "must be true or false");
    break;
  case VALUE_TEXT:
    if (must_be_text(r, v) &&
        !(*(const char **)at = arena_text(r->memory, json_string_value(v), json_string_length(v))))
      r->no_memory = true;
    break;
  case VALUE_NAME: read_name(r, v, (const char **)at); break;
  case VALUE_CHOICE: read_choice(r, v, row, (int *)at); break;
  case VALUE_CHOICES: read_choices(r, v, row, (unsigned *)at); break;
  case VALUE_OBJECT:
    if (must_be_object(r, v)) read_object(r, v, row->of, NULL, NULL, at);
    break;
  case VALUE_OPTIONAL: read_optional(r, v, row->of, (void **)at); break;
  case VALUE_LIST: read_list(r, v, row->of, at); break;
  case VALUE_MATERIAL: *(int *)at = read_material_name(r, v); break;
  case VALUE_SERIES: read_series(r, v, row->dimension, row->least, row->most, (series *)at); break;
  case VALUE_OPTIONAL_SERIES: read_optional_series(r, v, row, (series **)at); break;
  case VALUE_COEFFICIENT: read_coefficient(r, v, (coefficient *)at); break;
  case VALUE_CONTACT: read_contact(r, v, (double *)at); break;
  case VALUE_CURVE:
    read_curve(r, v, row->dimension, row->flags & PARAMETER_ABOVE, (curve *)at);
    break;
  case VALUE_TABLE: read_table(r, v, row->dimension, row->second, false, (table *)at); break;
  case VALUE_TARGET: read_target(r, v, json_object_get(whole, "in"), (target *)at); break;
  case VALUE_LOCATION: read_location(r, v, (location *)at); break;
  case VALUE_OPTIONAL_LOCATION: {
    location *l = take(r, 1, sizeof *l);
    if (l && read_location(r, v, l)) *(location **)at = l;
    break;
  }
  case VALUE_INSTANT: {
    instant *i = take(r, 1, sizeof *i);
    if (i && read_instant(r, v, i)) *(instant **)at = i;
    break;
  }
  case VALUE_INSTANTS: {
    LIST(instant) *list = (void *)at;
    read_instants(r, v, &list->count, &list->items);
    break;
  }
  case VALUE_STAGE_SET: read_stage_set(r, v, (stage_set *)at); break;
  case VALUE_FACE: *(int *)at = read_face_name(r, v); break;
  case VALUE_FACES: read_faces(r, v, (faces *)at); break;
  case VALUE_UNTIL: read_until(r, v, (until *)at); break;
  case VALUE_COUNT_OF:
  case VALUE_LEVEL: /* in the dimension of a target: read by who knows it */
  case VALUE_START:
  case VALUE_PLACES: break;
  }
}

static void read_rows(reader *r, const json_t *object, const object_type *t,
                      const char *const *skip, char *out) {
  for (int i = 0; t && i < t->count; i++) {
    const parameter *row = &t->parameters[i];
    if (row->flags & PARAMETER_PLANNED || skipped(row->name, skip)) continue;
    const json_t *v = json_object_get(object, row->name);
    set_default(row, out + row->offset);
    if (!v) {
      if (row->flags & PARAMETER_REQUIRED)
        fault_at(r, row->name, NULL, "is missing: %s", row->about ? row->about : "");
      continue;
    }
    size_t before = path_push(r, row->name);
    read_member(r, v, row, object, out + row->offset);
    path_pop(r, before);
  }
}

void read_object(reader *r, const json_t *object, const object_type *first,
                 const object_type *second, const char *const *skip, void *out) {
  check_members(r, object, first, second);
  read_rows(r, object, first, skip, out);
  read_rows(r, object, second, skip, out);
}
