/* read_named.c: the case's own named series. What a series is used for decides its dimension. */
#include "reader.h"

#include <math.h>
#include <string.h>

static dimension dimension_of_member(const char *member) {
  if (!strcmp(member, "h")) return DIMENSION_COEFFICIENT;
  if (!strcmp(member, "flux")) return DIMENSION_FLUX;
  if (!strcmp(member, "heat_generation")) return DIMENSION_GENERATION;
  return DIMENSION_TEMPERATURE;
}

/* Notes in `uses` the first use of every {"series": NAME}, or other `form`, below v, which stands
   at `member`. */
static void note_uses(reader *r, const json_t *v, const char *form, const char *member,
                      json_t *uses) {
  const char *name = json_is_object(v) ? json_string_value(json_object_get(v, form)) : NULL;
  if (name && !json_object_get(uses, name) &&
      json_object_set_new(uses, name, json_integer(dimension_of_member(member))))
    r->no_memory = true;
  const char *key;
  json_t *value;
  json_object_foreach((json_t *)v, key, value) note_uses(r, value, form, key, uses);
  for (size_t i = 0; i < json_array_size(v); i++)
    if (json_is_object(json_array_get(v, i)))
      note_uses(r, json_array_get(v, i), form, member, uses);
}

static json_t *uses_of(reader *r, const char *form) {
  static const char *const members[] = {"part", "start", "stages"};
  json_t *uses = json_object();
  if (!uses) r->no_memory = true;
  for (int i = 0; uses && i < COUNT_OF(members); i++)
    note_uses(r, json_object_get(r->given, members[i]), form, members[i], uses);
  return uses;
}

dimension dimension_of_log(reader *r, const char *name) {
  json_t *uses = uses_of(r, "log");
  const json_t *use = json_object_get(uses, name);
  dimension d = use ? (dimension)json_integer_value(use) : DIMENSION_TEMPERATURE;
  json_decref(uses);
  return d;
}

/* Of a series that nothing uses: the first dimension that its values fit. */
static dimension dimension_that_fits(reader *r, const json_t *v) {
  static const dimension all[] = {DIMENSION_TEMPERATURE, DIMENSION_COEFFICIENT, DIMENSION_FLUX,
                                  DIMENSION_GENERATION};
  fault_list *faults = r->faults, trial;
  dimension found = DIMENSION_TEMPERATURE;
  for (int i = COUNT_OF(all) - 1; i >= 0; i--) {
    series unused;
    faults_init(&trial);
    r->faults = &trial;
    if (read_series(r, v, all[i], -INFINITY, INFINITY, &unused)) found = all[i];
    if (trial.no_memory) r->no_memory = true;
    faults_free(&trial);
  }
  r->faults = faults;
  return found;
}

int add_named_series(reader *r, const char *name, dimension d, const series *s) {
  heat_case *c = r->the_case;
  if (!c->series.items && !(c->series.items = take(r, LIMIT_NAMED_SERIES, sizeof(named_series))))
    return -1;
  if (c->series.count == LIMIT_NAMED_SERIES) {
    fault_here(r, NULL, "more than %d series", LIMIT_NAMED_SERIES);
    return -1;
  }
  named_series *item = &c->series.items[c->series.count];
  *item = (named_series){
      .name = arena_text(r->memory, name, strlen(name)), .dimension = d, .series = *s};
  if (!item->name) r->no_memory = true;
  return item->name ? c->series.count++ : -1;
}

static void read_one(reader *r, const char *name, const json_t *v, const json_t *uses) {
  series s;
  const json_t *use = json_object_get(uses, name);
  dimension d = use ? (dimension)json_integer_value(use) : dimension_that_fits(r, v);
  if (!is_name(name)) fault_here(r, NULL, "a name has 1 to 64 letters, digits, _ or -");
  if (read_series(r, v, d, -INFINITY, INFINITY, &s)) add_named_series(r, name, d, &s);
}

void read_named_series(reader *r, const json_t *v) {
  if (!must_be_object(r, v)) return;
  size_t count = json_object_size(v);
  if (count > LIMIT_NAMED_SERIES) {
    fault_here(r, NULL, "has %zu series; the limit is %d", count, LIMIT_NAMED_SERIES);
    return;
  }
  json_t *uses = uses_of(r, "series"), *value;
  const char *name;
  json_object_foreach((json_t *)v, name, value) {
    size_t before = path_push(r, name);
    read_one(r, name, value, uses);
    path_pop(r, before);
  }
  json_decref(uses);
}
