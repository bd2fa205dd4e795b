/* mutate.h: changes one value of a JSON text, so that fuzzing goes on behind the parser: half of
   the time a value becomes another, goes, comes twice, or trades places with a value from elsewhere
   in the document. */
#ifndef CORESOAK_FUZZ_MUTATE_H
#define CORESOAK_FUZZ_MUTATE_H

#include <jansson.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

size_t LLVMFuzzerMutate(uint8_t *bytes, size_t length, size_t most);
size_t LLVMFuzzerCustomMutator(uint8_t *bytes, size_t length, size_t most, unsigned seed);

typedef struct mutation {
  uint64_t state;
  int left;          /* values to pass by before the one that is changed */
  json_t *elsewhere; /* a value of the document, to be put in place */
} mutation;

static inline unsigned chance(mutation *m, unsigned below) {
  m->state = m->state * 6364136223846793005u + 1442695040888963407u;
  return (unsigned)(m->state >> 33) % below;
}

static const char *const fuzz_values[] = {
    "0",
    "1",
    "-1",
    "1e-300",
    "1e300",
    "60",
    "0.5",
    "null",
    "true",
    "[]",
    "{}",
    "\"\"",
    "\"1 mm\"",
    "\"860 degC\"",
    "\"-274 degC\"",
    "\"5 %\"",
    "\"1e308 km\"",
    "\"50 K/h\"",
    "\"front\"",
    "\"inner\"",
    "\"center\"",
    "\"mid_wall\"",
    "\"coldest\"",
    "\"hottest\"",
    "\"section_difference\"",
    "\"mean\"",
    "\"all\"",
    "\"end:heat\"",
    "\"plate\"",
    "\"cylinder\"",
    "\"sphere\"",
    "\"copper\"",
    "\"water_ice\"",
    "{\"input\": \"set\"}",
    "{\"series\": \"zone\"}",
    "{\"log\": \"F3/zone_1\"}",
    "{\"fire\": \"standard\"}",
    "{\"table\": [[0, 1], [0, 2], [5, 3]]}",
    "{\"ramp\": {\"from\": 20, \"to\": 800, \"rate\": 1}}",
    "{\"sine\": {\"mean\": 20, \"amplitude\": 5, \"period\": 60}}",
    "{\"face\": \"outer\", \"depth\": 0.001, \"side\": \"inner\"}",
    "{\"profile\": [[0, 20], [0.01, 30]]}",
    "{\"steady\": {\"faces\": {\"all\": {\"temperature\": 20}}}}",
    "{\"conductance\": 500}",
    "{\"of\": \"coldest\", \"rises_to\": 500}",
    "{\"any\": [{\"of\": \"hottest\", \"within\": 5, \"of_set\": 20}]}"};

static inline json_t *other_value(mutation *m) {
  if (m->elsewhere && chance(m, 3) == 0) return json_deep_copy(m->elsewhere);
  return json_loads(fuzz_values[chance(m, sizeof fuzz_values / sizeof *fuzz_values)],
                    JSON_DECODE_ANY, NULL);
}

static inline void change_member(mutation *m, json_t *object, const char *key) {
  char name[128];
  unsigned way = chance(m, 8);
  if (way == 0) {
    json_object_del(object, key);
  } else if (way == 1 && strlen(key) < 100) {
    strcpy(name, key);
    name[chance(m, (unsigned)strlen(name) + 1)] = 'x';
    json_object_set(object, name, json_object_get(object, key));
  } else {
    json_object_set_new(object, key, other_value(m));
  }
}

static inline void change_item(mutation *m, json_t *array, size_t i) {
  unsigned way = chance(m, 6);
  if (way == 0)
    json_array_remove(array, i);
  else if (way == 1)
    json_array_insert_new(array, i, json_deep_copy(json_array_get(array, i)));
  else
    json_array_set_new(array, i, other_value(m));
}

/* Goes through the values in order; true once one was changed. */
static inline int change_one(mutation *m, json_t *value) {
  const char *key;
  json_t *inner;
  json_object_foreach(value, key, inner) {
    if (m->left-- == 0) {
      change_member(m, value, key);
      return 1;
    }
    if (change_one(m, inner)) return 1;
  }
  for (size_t i = 0; i < json_array_size(value); i++) {
    if (m->left-- == 0) {
      change_item(m, value, i);
      return 1;
    }
    if (change_one(m, json_array_get(value, i))) return 1;
  }
  return 0;
}

static inline int count_values(const json_t *value) {
  const char *key;
  json_t *inner;
  int count = 1;
  json_object_foreach((json_t *)value, key, inner) count += count_values(inner);
  for (size_t i = 0; i < json_array_size(value); i++)
    count += count_values(json_array_get(value, i));
  return count;
}

/* The value that is reached after `left` others; NULL behind the last. */
static inline json_t *value_at(json_t *value, int *left) {
  const char *key;
  json_t *inner, *found = NULL;
  if ((*left)-- == 0) return value;
  json_object_foreach(value, key, inner) if (!found) found = value_at(inner, left);
  for (size_t i = 0; !found && i < json_array_size(value); i++)
    found = value_at(json_array_get(value, i), left);
  return found;
}

size_t LLVMFuzzerCustomMutator(uint8_t *bytes, size_t length, size_t most, unsigned seed) {
  mutation m = {.state = seed};
  json_t *root = chance(&m, 2) ? json_loadb((const char *)bytes, length, 0, NULL) : NULL;
  int values = root ? count_values(root) : 0;
  size_t made = 0;
  for (unsigned i = 0, n = 1 + chance(&m, 3); values > 1 && i < n; i++) {
    int left = (int)chance(&m, (unsigned)values);
    m.elsewhere = json_deep_copy(value_at(root, &left));
    m.left = (int)chance(&m, (unsigned)values - 1);
    change_one(&m, root);
    json_decref(m.elsewhere);
  }
  char *text = values > 1 ? json_dumps(root, JSON_COMPACT) : NULL;
  if (text && strlen(text) <= most) memcpy(bytes, text, made = strlen(text));
  free(text);
  json_decref(root);
  return made ? made : LLVMFuzzerMutate(bytes, length, most);
}

#endif
