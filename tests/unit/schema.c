/* The schemas of a case are those of the rows, and stand in the specification as they are made. */
#include "schema.h"
#include "embedded.h"
#include "figure.h"
#include "shape.h"

#include <criterion/criterion.h>
#include <jansson.h>
#include <stdio.h>

static json_t *made(void) {
  buffer b;
  buffer_init(&b, 0);
  schema_write(&b);
  cr_assert(!b.failed);
  json_error_t error;
  json_t *schemas = json_loadb(b.bytes, b.length, JSON_REJECT_DUPLICATES, &error);
  cr_assert_not_null(schemas, "line %d: %s", error.line, error.text);
  buffer_free(&b);
  return schemas;
}

static json_t *specified(void) {
  json_t *whole = json_loadb(embedded_specification.bytes, embedded_specification.length,
                             JSON_REJECT_DUPLICATES, NULL);
  cr_assert_not_null(whole);
  json_t *schemas = json_incref(json_object_get(json_object_get(whole, "components"), "schemas"));
  json_decref(whole);
  return schemas;
}

Test(schema, the_specification_holds_the_schemas_that_the_rows_make) {
  json_t *rows = made(), *spec = specified(), *value;
  const char *name;
  json_object_foreach(rows, name, value)
      cr_expect(json_equal(json_object_get(spec, name), value),
                "%s differs: node tests/spec/update.mjs build/release/coresoak", name);
  cr_assert(json_object_size(rows) > 40);
  json_decref(rows);
  json_decref(spec);
}

Test(schema, the_comparison_sees_a_changed_member) {
  json_t *rows = made(), *spec = specified();
  json_t *properties = json_object_get(json_object_get(rows, "layer"), "properties");
  cr_assert_eq(json_object_del(properties, "thickness"), 0);
  cr_expect(!json_equal(json_object_get(spec, "layer"), json_object_get(rows, "layer")));
  json_decref(rows);
  json_decref(spec);
}

/* Every reference leads somewhere, and every schema but the first is referred to. */
static void follow(const json_t *value, const json_t *schemas, json_t *seen) {
  static const char prefix[] = "#/components/schemas/";
  const char *key;
  json_t *member;
  size_t i;
  if (json_is_array(value)) json_array_foreach(value, i, member) follow(member, schemas, seen);
  if (!json_is_object(value)) return;
  json_object_foreach((json_t *)value, key, member) {
    const char *target = json_string_value(member);
    if (strcmp(key, "$ref") != 0) {
      follow(member, schemas, seen);
      continue;
    }
    cr_assert(target && strncmp(target, prefix, strlen(prefix)) == 0);
    cr_expect(json_object_get(schemas, target + strlen(prefix)), "%s leads nowhere", target);
    json_object_set_new(seen, target + strlen(prefix), json_true());
  }
}

Test(schema, references_lead_somewhere_and_nothing_stands_unused) {
  json_t *rows = made(), *seen = json_object(), *value;
  const char *name;
  follow(rows, rows, seen);
  json_object_foreach(rows, name, value)
      cr_expect(strcmp(name, "case") == 0 || json_object_get(seen, name), "%s is not used", name);
  json_decref(seen);
  json_decref(rows);
}

static void expect_members(const json_t *schemas, const char *union_name, const char *variant,
                           const object_type *own) {
  char name[96];
  snprintf(name, sizeof name, "%s_%s", union_name, variant);
  const json_t *schema = json_object_get(schemas, name);
  cr_assert(schema, "%s has no schema", name);
  for (int i = 0; i < own->count; i++)
    cr_expect(json_object_get(json_object_get(schema, "properties"), own->parameters[i].name),
              "%s lacks %s", name, own->parameters[i].name);
}

Test(schema, every_shape_and_every_figure_kind_is_there_with_its_members) {
  json_t *rows = made();
  for (int i = 0; shapes[i]; i++) expect_members(rows, "part", shapes[i]->name, &shapes[i]->sizes);
  for (int i = 0; figure_kinds[i]; i++)
    expect_members(rows, "figure", figure_kinds[i]->name, &figure_kinds[i]->parameters);
  json_decref(rows);
}

/* A bare number's bounds are in the unit that a bare number has. */
Test(schema, bounds_are_in_the_usual_units) {
  json_t *rows = made(), *emissivity, *start;
  emissivity = json_object_get(json_object_get(json_object_get(rows, "radiation"), "properties"),
                               "emissivity");
  cr_expect_eq(json_number_value(json_object_get(emissivity, "maximum")), 1);
  start = json_object_get(json_object_get(json_object_get(rows, "layer"), "properties"), "start");
  cr_expect_float_eq(json_number_value(json_object_get(start, "minimum")), -273.15, 1e-9);
  json_decref(rows);
}
