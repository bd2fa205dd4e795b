/* schema_special.c: members whose row does not say all: maps from names, the tags of unions, what
   stands around a case. */
#include "schema_writer.h"

#include "case.h"
#include "json_out.h"
#include "limit.h"

#include <stdio.h>
#include <string.h>

static void map_of_form(schema_writer *w, int most, form f, dimension d) {
  buffer_format(w->b, "\"type\": \"object\", \"maxProperties\": %d, \"additionalProperties\": {",
                most);
  schema_refer_form(w, f, d);
  buffer_text(w->b, "}");
}

static void write_tag(schema_writer *w) {
  buffer_format(w->b, "\"type\": \"string\", \"enum\": [\"%s\"]", w->tag);
}

static void write_labels(schema_writer *w) {
  buffer_format(w->b,
                "\"type\": \"object\", \"maxProperties\": %d, \"additionalProperties\": {\"type\": "
                "\"string\", \"maxLength\": %d}",
                LIMIT_LABELS, LIMIT_TEXT);
}

static void write_inputs(schema_writer *w) {
  buffer_text(
      w->b, "\"type\": \"object\", \"additionalProperties\": {\"type\": [\"number\", \"string\"]}");
}

static void write_named_series(schema_writer *w) {
  map_of_form(w, LIMIT_NAMED_SERIES, FORM_SERIES, DIMENSION_ANY);
}

static void write_logs(schema_writer *w) {
  map_of_form(w, LIMIT_NAMED_SERIES, FORM_LOG, DIMENSION_ANY);
}

static void write_materials(schema_writer *w) {
  buffer_format(w->b, "\"type\": \"object\", \"maxProperties\": %d, \"additionalProperties\": {",
                LIMIT_MATERIALS);
  schema_refer_type(w, &material_type);
  buffer_text(w->b, "}");
}

static void write_units(schema_writer *w) {
  buffer_text(w->b,
              "\"type\": [\"string\", \"object\"], \"properties\": {\"temperature\": {\"type\": "
              "\"string\"}, \"length\": {\"type\": \"string\"}, \"time\": {\"type\": \"string\"}}, "
              "\"additionalProperties\": false");
}

static void write_steady(schema_writer *w) {
  buffer_text(w->b, "\"type\": \"object\", \"properties\": {\"faces\": {");
  schema_refer_form(w, FORM_FACES, DIMENSION_ANY);
  buffer_text(w->b, "}}, \"required\": [\"faces\"], \"additionalProperties\": false");
}

static const struct {
  const object_type *type;
  const char *name;
  void (*write)(schema_writer *w);
} specials[] = {{&part_type, "shape", write_tag},           {&figure_type, "kind", write_tag},
                {&case_type, "labels", write_labels},       {&case_type, "inputs", write_inputs},
                {&case_type, "series", write_named_series}, {&case_type, "logs", write_logs},
                {&case_type, "materials", write_materials}, {&output_type, "units", write_units},
                {&start_type, "steady", write_steady}};

bool schema_special(schema_writer *w, const object_type *t, const parameter *p) {
  for (size_t i = 0; i < sizeof specials / sizeof specials[0]; i++) {
    if (specials[i].type != t || strcmp(specials[i].name, p->name) != 0) continue;
    specials[i].write(w);
    return true;
  }
  return false;
}

/* The members of a job document around its case. */
static void around_case(schema_writer *w) {
  static const char time[] = "\"type\": \"string\", \"format\": \"date-time\"";
  buffer_text(
      w->b, ", \"kind\": {\"type\": \"string\", \"enum\": [\"solve\"], \"description\": \"Kind of "
            "question; solve unless given\"}, \"job\": {\"type\": \"object\", \"description\": "
            "\"How to treat the job; not part of the case's hash\", \"properties\": {\"priority\": "
            "{\"type\": \"integer\", \"minimum\": -1000, \"maximum\": 1000, \"default\": 0, "
            "\"description\": \"The higher number first\"}, ");
  buffer_format(w->b, "\"not_before\": {%s}, \"expires_at\": {%s}, \"time_limit\": {", time, time);
  schema_refer_form(w, FORM_QUANTITY, DIMENSION_TIME);
  buffer_text(
      w->b, ", \"exclusiveMinimum\": 0, \"description\": \"Longest time of solving\"}, \"id\": {");
  schema_refer_form(w, FORM_NAME, DIMENSION_NUMBER);
  buffer_text(w->b, ", \"description\": \"The caller's own name of the job\"}}, "
                    "\"additionalProperties\": false}");
}

static void write_enthalpy(schema_writer *w) {
  buffer_format(
      w->b,
      ", \"enthalpy\": {\"type\": \"object\", \"properties\": {\"table\": {\"type\": "
      "\"array\", \"minItems\": 2, \"maxItems\": %d, \"items\": {\"type\": \"array\", "
      "\"minItems\": 2, \"maxItems\": 2, \"items\": {\"type\": [\"number\", \"string\", "
      "\"object\"]}}}}, \"required\": [\"table\"], \"additionalProperties\": false, "
      "\"description\": \"Enthalpy in J/kg against temperature, in place of specific_heat "
      "and latent_heat; two rows at one temperature are a latent heat\"}",
      LIMIT_PIECES);
}

void schema_extra_members(schema_writer *w, const object_type *t) {
  if (t == &case_type) around_case(w);
  if (t == &material_type) write_enthalpy(w);
}
