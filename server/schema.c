/* schema.c: the schemas of the objects of a case, row by row. */
#include "schema.h"

#include "command.h"
#include "figure.h"
#include "json_out.h"
#include "limit.h"
#include "schema_writer.h"
#include "shape.h"
#include "units.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

void schema_open(schema_writer *w, const char *name) {
  buffer_text(w->b, w->written++ ? ",\n" : "\n");
  json_out_string(w->b, name);
  buffer_text(w->b, ": {");
}

void schema_refer_type(schema_writer *w, const object_type *t) {
  int i = 0;
  while (i < w->types && w->type[i] != t) i++;
  if (i == MOST_SCHEMA_TYPES) w->b->failed = true;
  if (i == w->types && i < MOST_SCHEMA_TYPES) w->type[w->types++] = t;
  buffer_format(w->b, "\"$ref\": \"#/components/schemas/%s\"", t->name);
}

/* ---- one member ---- */

/* A bound or default of a bare number, in the unit that a bare number has. */
static void write_number(schema_writer *w, const parameter *p, const char *key, double value) {
  const output_units si = {0};
  if (!isfinite(value)) return;
  buffer_format(w->b, ", \"%s\": ", key);
  json_out_number(w->b, quantity_out(value, p->dimension, &si), 0);
}

static void write_range(schema_writer *w, const parameter *p) {
  write_number(w, p, p->flags & PARAMETER_ABOVE ? "exclusiveMinimum" : "minimum", p->least);
  write_number(w, p, p->flags & PARAMETER_BELOW ? "exclusiveMaximum" : "maximum", p->most);
  if (!(p->flags & PARAMETER_REQUIRED)) write_number(w, p, "default", p->fallback);
}

static void write_choices(schema_writer *w, const parameter *p) {
  const char *const *choices = p->of;
  buffer_text(w->b, "\"type\": \"string\", \"enum\": [");
  for (int i = 0; choices[i]; i++) {
    if (i > 0) buffer_text(w->b, ", ");
    json_out_string(w->b, choices[i]);
  }
  buffer_text(w->b, "]");
}

static void write_list_of_form(schema_writer *w, form f, int most) {
  buffer_format(w->b, "\"type\": \"array\", \"maxItems\": %d, \"items\": {", most);
  schema_refer_form(w, f, DIMENSION_NUMBER);
  buffer_text(w->b, "}");
}

void schema_list_of(schema_writer *w, const object_type *t) {
  static const struct {
    const object_type *type;
    int most;
  } limits[] = {{&layer_type, LIMIT_LAYERS},     {&stage_type, LIMIT_STAGES},
                {&point_type, LIMIT_POINTS},     {&figure_type, LIMIT_FIGURES},
                {&until_type, LIMIT_CONDITIONS}, {&latent_heat_type, LIMIT_LATENT_HEATS}};
  int most = LIMIT_ZONES;
  for (size_t i = 0; i < sizeof limits / sizeof limits[0]; i++)
    if (limits[i].type == t) most = limits[i].most;
  bool may_be_empty = t == &point_type || t == &figure_type || t == &latent_heat_type;
  buffer_format(w->b, "\"type\": \"array\", \"minItems\": %d, \"maxItems\": %d, \"items\": {",
                may_be_empty ? 0 : 1, most);
  schema_refer_type(w, t);
  buffer_text(w->b, "}");
}

static form form_of(value_kind kind) {
  switch (kind) {
  case VALUE_NAME: return FORM_NAME;
  case VALUE_QUANTITY:
  case VALUE_LEVEL: return FORM_QUANTITY;
  case VALUE_SERIES:
  case VALUE_OPTIONAL_SERIES: return FORM_SERIES;
  case VALUE_MATERIAL: return FORM_MATERIAL_NAME;
  case VALUE_COEFFICIENT: return FORM_COEFFICIENT;
  case VALUE_CONTACT: return FORM_CONTACT;
  case VALUE_CURVE: return FORM_PROPERTY;
  case VALUE_TABLE: return FORM_TABLE;
  case VALUE_TARGET: return FORM_PLACE;
  case VALUE_LOCATION:
  case VALUE_OPTIONAL_LOCATION: return FORM_LOCATION;
  case VALUE_INSTANT: return FORM_INSTANT;
  case VALUE_STAGE_SET: return FORM_STAGE_SET;
  case VALUE_FACES: return FORM_FACES;
  case VALUE_START: return FORM_START;
  case VALUE_FACE:
  case VALUE_TEXT:
  case VALUE_COUNT_OF:
  case VALUE_FLAG:
  case VALUE_CHOICE:
  case VALUE_CHOICES:
  case VALUE_OBJECT:
  case VALUE_OPTIONAL:
  case VALUE_LIST:
  case VALUE_INSTANTS:
  case VALUE_UNTIL:
  case VALUE_PLACES: break;
  }
  return FORMS;
}

/* What a member may hold: everything of its schema but the description. */
static void write_value(schema_writer *w, const parameter *p) {
  form f = form_of(p->kind);
  switch (p->kind) {
  case VALUE_COUNT_OF: buffer_text(w->b, "\"type\": \"integer\""); break;
  case VALUE_FLAG: buffer_text(w->b, "\"type\": \"boolean\""); break;
  case VALUE_FACE:
  case VALUE_TEXT:
    buffer_format(w->b, "\"type\": \"string\", \"maxLength\": %d", LIMIT_TEXT);
    break;
  case VALUE_CHOICE: write_choices(w, p); break;
  case VALUE_CHOICES:
    buffer_text(w->b, "\"type\": \"array\", \"items\": {");
    write_choices(w, p);
    buffer_text(w->b, "}");
    break;
  case VALUE_OBJECT:
  case VALUE_OPTIONAL: schema_refer_type(w, p->of); break;
  case VALUE_LIST: schema_list_of(w, p->of); break;
  case VALUE_INSTANTS: write_list_of_form(w, FORM_INSTANT, LIMIT_OUTPUTS); break;
  case VALUE_PLACES: write_list_of_form(w, FORM_COLUMN, LIMIT_COLUMNS); break;
  case VALUE_UNTIL: /* a stage has one condition, a group a list of them */
    if (p->of)
      schema_refer_type(w, p->of);
    else
      schema_list_of(w, &until_type);
    break;
  default: schema_refer_form(w, f, p->kind == VALUE_LEVEL ? DIMENSION_ANY : p->dimension);
  }
  if (p->kind == VALUE_QUANTITY || p->kind == VALUE_COUNT_OF) write_range(w, p);
}

/* Whether a member is one of the variant that is being written: not every figure watches a place.
 */
static bool belongs(const schema_writer *w, const object_type *t, const parameter *p) {
  bool of_place = strcmp(p->name, "of") == 0 || strcmp(p->name, "in") == 0;
  return t != &figure_type || w->takes_place || !of_place;
}

void schema_properties(schema_writer *w, const object_type *t, bool *first) {
  for (int i = 0; i < t->count; i++) {
    const parameter *p = &t->parameters[i];
    if (p->flags & PARAMETER_PLANNED || !belongs(w, t, p)) continue;
    buffer_format(w->b, *first ? "\"%s\": {" : ", \"%s\": {", p->name);
    if (!schema_special(w, t, p)) write_value(w, p);
    buffer_text(w->b, ", \"description\": ");
    json_out_string(w->b, p->about);
    buffer_text(w->b, "}");
    *first = false;
  }
}

/* ---- one object ---- */

static void write_required(schema_writer *w, const object_type *t, bool *first) {
  for (int i = 0; i < t->count; i++) {
    const parameter *p = &t->parameters[i];
    bool watched = t == &figure_type && w->takes_place && strcmp(p->name, "of") == 0;
    if (!(p->flags & PARAMETER_REQUIRED) && !watched) continue;
    if (!*first) buffer_text(w->b, ", ");
    json_out_string(w->b, p->name);
    *first = false;
  }
}

/* The schema of an object with the members of up to two types. */
static void write_object(schema_writer *w, const char *about, const object_type *common,
                         const object_type *own) {
  bool first = true;
  buffer_text(w->b, "\"type\": \"object\", \"description\": ");
  json_out_string(w->b, about);
  buffer_text(w->b, ", \"properties\": {");
  schema_properties(w, common, &first);
  if (own) schema_properties(w, own, &first);
  schema_extra_members(w, common);
  buffer_text(w->b, "}, \"required\": [");
  first = true;
  write_required(w, common, &first);
  if (own) write_required(w, own, &first);
  buffer_text(w->b, "], \"additionalProperties\": false}");
}

/* A part or a figure: one schema for each shape or kind, told apart by the member `tag`. */
static void open_union(schema_writer *w, const object_type *t, const char *tag,
                       const char *const *choices) {
  schema_open(w, t->name);
  buffer_text(w->b, "\"description\": ");
  json_out_string(w->b, t->about);
  buffer_text(w->b, ", \"oneOf\": [");
  for (int i = 0; choices[i]; i++)
    buffer_format(w->b, "%s{\"$ref\": \"#/components/schemas/%s_%s\"}", i ? ", " : "", t->name,
                  choices[i]);
  buffer_format(w->b, "], \"discriminator\": {\"propertyName\": \"%s\", \"mapping\": {", tag);
  for (int i = 0; choices[i]; i++)
    buffer_format(w->b, "%s\"%s\": \"#/components/schemas/%s_%s\"", i ? ", " : "", choices[i],
                  t->name, choices[i]);
  buffer_text(w->b, "}}}");
}

static void write_variant(schema_writer *w, const object_type *common, const char *name,
                          const char *about, const object_type *own, bool takes_place) {
  char title[96];
  snprintf(title, sizeof title, "%s_%s", common->name, name);
  schema_open(w, title);
  w->tag = name;
  w->takes_place = takes_place;
  write_object(w, about, common, own);
}

enum { MOST_CHOICES = 64 };

static void write_part(schema_writer *w) {
  const char *names[MOST_CHOICES];
  int count = 0;
  for (; count < MOST_CHOICES - 1 && shapes[count]; count++) names[count] = shapes[count]->name;
  names[count] = NULL;
  open_union(w, &part_type, "shape", names);
  for (int i = 0; i < count; i++)
    write_variant(w, &part_type, names[i], shapes[i]->about, &shapes[i]->sizes, false);
}

static void write_figure(schema_writer *w) {
  const char *names[MOST_CHOICES];
  int count = 0;
  for (; count < MOST_CHOICES - 1 && figure_kinds[count]; count++)
    names[count] = figure_kinds[count]->name;
  names[count] = NULL;
  open_union(w, &figure_type, "kind", names);
  for (int i = 0; i < count; i++)
    write_variant(w, &figure_type, names[i], figure_kinds[i]->about, &figure_kinds[i]->parameters,
                  figure_kinds[i]->takes_place);
}

static void write_type(schema_writer *w, const object_type *t) {
  if (t == &part_type) {
    write_part(w);
  } else if (t == &figure_type) {
    write_figure(w);
  } else {
    schema_open(w, t->name);
    write_object(w, t->about, t, NULL);
  }
}

void schema_write(buffer *b) {
  schema_writer w = {.b = b, .types = 1, .type = {&case_type}};
  int done = 0;
  buffer_text(b, "{");
  do {
    while (done < w.types && !b->failed) write_type(&w, w.type[done++]);
  } while (schema_write_forms(&w) || done < w.types);
  buffer_text(b, "\n}\n");
}

int command_schema(const options *o) {
  buffer b;
  (void)o;
  buffer_init(&b, 0);
  schema_write(&b);
  int code = put_out(&b);
  buffer_free(&b);
  return code;
}
