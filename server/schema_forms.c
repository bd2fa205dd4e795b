/* schema_forms.c: the schemas of values that may be written in several ways: quantities, series,
   properties, places. */
#include "case.h"
#include "json_out.h"
#include "limit.h"
#include "schema_writer.h"

#include <stdio.h>

#define ANY_WAY "\"type\": [\"number\", \"string\", \"object\"]"
#define NAME    "{\"$ref\": \"#/components/schemas/name\"}"
#define INPUT   "\"input\": " NAME
#define CLOSED  "}, \"additionalProperties\": false, \"minProperties\": 1"
/* Exactly one way of writing; a table alone may have its units beside it. */
#define ONE CLOSED ", \"maxProperties\": 1"
#define ONE_OR_TABLE                                                                               \
  CLOSED ", \"if\": {\"required\": [\"units\"]}, \"then\": {\"maxProperties\": 2}, \"else\": "     \
         "{\"maxProperties\": 1}"
#define CELLS(most)                                                                                \
  "{\"type\": \"array\", \"minItems\": 2, \"maxItems\": " most                                     \
  ", \"items\": {\"type\": [\"number\", \"string\", \"object\"]}}"
#define UNITS                                                                                      \
  "\"units\": {\"type\": \"array\", \"minItems\": 2, \"maxItems\": 2, \"items\": {\"type\": "      \
  "\"string\"}, \"description\": \"Units of the columns of the table\"}"

static void describe(schema_writer *w, const char *text) {
  buffer_text(w->b, "\"description\": ");
  json_out_string(w->b, text);
  buffer_text(w->b, ", ");
}

/* How a bare number is meant. */
static void describe_number(schema_writer *w, const char *what, dimension d) {
  char text[256];
  if (d == DIMENSION_ANY)
    snprintf(text, sizeof text, "%s; a bare number is in the usual unit of what it stands for",
             what);
  else if (d == DIMENSION_NUMBER)
    snprintf(text, sizeof text, "%s; it has no unit", what);
  else
    snprintf(text, sizeof text, "%s; a bare number is in %s", what, dimension_unit(d));
  describe(w, text);
}

static void member(schema_writer *w, const char *name, form f, dimension d) {
  buffer_format(w->b, ", \"%s\": {", name);
  schema_refer_form(w, f, d);
  buffer_text(w->b, "}");
}

static void type_member(schema_writer *w, const char *name, const object_type *t) {
  buffer_format(w->b, ", \"%s\": {", name);
  schema_refer_type(w, t);
  buffer_text(w->b, "}");
}

static void table_member(schema_writer *w, const char *name, const char *about) {
  buffer_format(
      w->b,
      ", \"%s\": {\"type\": \"array\", \"minItems\": 1, \"maxItems\": %d, \"items\": " CELLS(
          "2") ", \"description\": \"%s\"}",
      name, LIMIT_TABLE_ROWS, about);
}

static void write_name(schema_writer *w, dimension d) {
  (void)d;
  describe(w, "A name: letters, digits, _ and -");
  buffer_format(w->b, "\"type\": \"string\", \"pattern\": \"^[A-Za-z0-9_-]+$\", \"maxLength\": %d",
                LIMIT_NAME);
}

static void write_quantity(schema_writer *w, dimension d) {
  describe_number(w, "A number, a text with its unit, or an input", d);
  buffer_text(w->b, ANY_WAY ", \"properties\": {" INPUT ONE);
}

static void write_fire(schema_writer *w) {
  buffer_text(w->b, ", \"fire\": {\"type\": \"string\", \"enum\": [");
  for (int i = 0; fire_curve_names[i]; i++)
    buffer_format(w->b, "%s\"%s\"", i ? ", " : "", fire_curve_names[i]);
  buffer_text(w->b, "], \"description\": \"A nominal fire curve of EN 1991-1-2\"}");
}

/* The members of the ways to write a series. */
static void series_members(schema_writer *w, dimension d) {
  buffer_text(w->b, ANY_WAY ", \"properties\": {" INPUT);
  type_member(w, "ramp", &ramp_type);
  table_member(w, "table", "Time and value, times never falling; two rows at one time are a jump");
  buffer_text(w->b, ", " UNITS);
  type_member(w, "sine", &sine_type);
  if (d == DIMENSION_TEMPERATURE || d == DIMENSION_ANY) write_fire(w);
  type_member(w, "line", &line_type);
  buffer_text(w->b, ", \"log\": {\"type\": \"string\", \"description\": \"LOG/COLUMN of the case's "
                    "logs\"}, \"series\": " NAME);
}

static void write_series(schema_writer *w, dimension d) {
  describe_number(w, "A value against time: a quantity, or one of the members", d);
  series_members(w, d);
  buffer_text(w->b, ONE_OR_TABLE);
}

static void write_coefficient(schema_writer *w, dimension d) {
  (void)d;
  describe_number(w, "A heat transfer coefficient against time or surface temperature",
                  DIMENSION_COEFFICIENT);
  series_members(w, DIMENSION_COEFFICIENT);
  table_member(w, "by_surface_temperature",
               "Surface temperature, rising, and coefficient; the end values hold");
  buffer_text(w->b, ONE_OR_TABLE);
}

static void write_contact(schema_writer *w, dimension d) {
  (void)d;
  describe_number(w, "A contact resistance, or a conductance", DIMENSION_RESISTANCE);
  buffer_text(w->b, ANY_WAY ", \"properties\": {" INPUT);
  member(w, "conductance", FORM_QUANTITY, DIMENSION_COEFFICIENT);
  buffer_text(w->b, ONE);
}

static void write_property(schema_writer *w, dimension d) {
  describe_number(w, "A property: one number, or against temperature", d);
  buffer_text(w->b, ANY_WAY ", \"properties\": {" INPUT);
  table_member(w, "table",
               "Temperature and value; the end values hold; two rows at one "
               "temperature are a jump");
  buffer_text(w->b, ", " UNITS);
  buffer_format(w->b,
                ", \"pieces\": {\"type\": \"array\", \"minItems\": 1, \"maxItems\": %d, \"items\": "
                "{\"type\": "
                "\"object\", \"properties\": {\"from\": {",
                LIMIT_PIECES);
  schema_refer_form(w, FORM_QUANTITY, DIMENSION_TEMPERATURE);
  buffer_text(w->b, "}");
  member(w, "to", FORM_QUANTITY, DIMENSION_TEMPERATURE);
  buffer_text(w->b,
              ", \"poly\": {\"type\": \"array\", \"minItems\": 1, \"maxItems\": 5, \"items\": "
              "{\"type\": \"number\"}}, \"rational\": {\"type\": \"number\"}, \"pole\": "
              "{\"type\": \"number\"}}, \"required\": [\"from\", \"to\", \"poly\"], "
              "\"additionalProperties\": false}, \"description\": \"Rising, without gaps; "
              "with x in degC: poly[0] + poly[1] x + ... + rational/(x - pole)\"}");
  buffer_text(w->b, ONE_OR_TABLE);
}

/* [[x, y], ...] where the two columns are known. */
static void write_table(schema_writer *w, dimension d) {
  (void)d;
  describe(w, "Rows of two columns, the first never falling");
  buffer_format(w->b,
                "\"type\": \"array\", \"minItems\": 1, \"maxItems\": %d, \"items\": " CELLS("2"),
                LIMIT_TABLE_ROWS);
}

static void write_material_name(schema_writer *w, dimension d) {
  (void)d;
  describe(w, "A material of the library or of the case's own, or an input that names one");
  buffer_text(w->b, "\"type\": [\"string\", \"object\"], \"properties\": {" INPUT ONE);
}

static void write_place(schema_writer *w, dimension d) {
  (void)d;
  describe(w, "A point's or a face's name, coldest, hottest, mean, section_difference, center or "
              "mid_wall; for time_to and conditions also an accumulating figure's name");
  buffer_format(w->b, "\"type\": \"string\", \"minLength\": 1, \"maxLength\": %d", LIMIT_TEXT);
}

static void write_column(schema_writer *w, dimension d) {
  (void)d;
  describe(w,
           "A place, \"heat_flow:FACE\", a named series, \"LOG/COLUMN\", or a place in one layer");
  buffer_text(w->b, "\"type\": [\"string\", \"object\"], \"properties\": {\"of\": {");
  schema_refer_form(w, FORM_PLACE, d);
  buffer_text(w->b,
              "}, \"in\": " NAME "}, \"required\": [\"of\"], \"additionalProperties\": false");
}

static void write_location(schema_writer *w, dimension d) {
  (void)d;
  describe(w, "\"center\", \"mid_wall\", a face with a depth below it, or a coordinate");
  buffer_text(w->b, "\"type\": [\"string\", \"object\"], \"properties\": {\"face\": " NAME);
  member(w, "depth", FORM_QUANTITY, DIMENSION_LENGTH);
  member(w, "x", FORM_QUANTITY, DIMENSION_LENGTH);
  member(w, "r", FORM_QUANTITY, DIMENSION_LENGTH);
  buffer_text(w->b, ", \"side\": {\"type\": \"string\", \"description\": \"At an interface: the "
                    "surface that lies towards this face\"}" CLOSED);
}

static void write_instant(schema_writer *w, dimension d) {
  (void)d;
  describe(w, "A time from the start of the case (a bare number is in s), or \"end:STAGE\", just "
              "before a jump");
  buffer_text(w->b, ANY_WAY ", \"properties\": {" INPUT ONE);
}

static void write_stage_set(schema_writer *w, dimension d) {
  (void)d;
  describe(w, "A stage's name or a list of them");
  buffer_format(w->b,
                "\"type\": [\"string\", \"array\"], \"minItems\": 1, \"maxItems\": %d, "
                "\"items\": " NAME,
                LIMIT_STAGES);
}

static void write_faces(schema_writer *w, dimension d) {
  (void)d;
  describe(w, "The condition of each face by its name (front, back; inner, outer), or of all that "
              "are not named; a face that nobody names is insulated");
  buffer_text(w->b, "\"type\": \"object\", \"additionalProperties\": {");
  schema_refer_type(w, &condition_type);
  buffer_text(w->b, "}");
}

static void write_start(schema_writer *w, dimension d) {
  bool first = false;
  describe_number(w, start_type.about, d);
  buffer_text(w->b, ANY_WAY ", \"properties\": {" INPUT);
  schema_properties(w, &start_type, &first);
  buffer_text(w->b, ", " UNITS ONE_OR_TABLE);
}

static void write_log(schema_writer *w, dimension d) {
  (void)d;
  describe(w, "A record of thermocouples; the first column is the time");
  buffer_format(
      w->b,
      "\"type\": \"object\", \"properties\": {\"columns\": {\"type\": \"array\", \"minItems\": "
      "2, \"items\": {\"type\": \"string\"}}, \"units\": {\"type\": \"array\", \"items\": "
      "{\"type\": [\"string\", \"null\"]}}, \"rows\": {\"type\": \"array\", \"minItems\": 1, "
      "\"maxItems\": %d, \"items\": {\"type\": \"array\", \"minItems\": 2, \"items\": {\"type\": "
      "[\"number\", \"string\"]}}}, \"started_at\": {\"type\": \"string\", \"format\": "
      "\"date-time\", "
      "\"description\": \"The time in the log at which the case starts\"}}, "
      "\"required\": [\"columns\", \"rows\"], \"additionalProperties\": false",
      LIMIT_TABLE_ROWS);
}

/* ---- all forms ---- */

typedef struct form_row {
  const char *name;
  bool by_dimension; /* one schema for every dimension that it is used with */
  void (*write)(schema_writer *w, dimension d);
} form_row;

static const form_row form_rows[FORMS] = {
    [FORM_NAME] = {"name", false, write_name},
    [FORM_QUANTITY] = {"quantity", true, write_quantity},
    [FORM_SERIES] = {"series", true, write_series},
    [FORM_COEFFICIENT] = {"coefficient", false, write_coefficient},
    [FORM_CONTACT] = {"contact", false, write_contact},
    [FORM_PROPERTY] = {"property", true, write_property},
    [FORM_TABLE] = {"table", false, write_table},
    [FORM_MATERIAL_NAME] = {"material_name", false, write_material_name},
    [FORM_PLACE] = {"place", false, write_place},
    [FORM_COLUMN] = {"column", false, write_column},
    [FORM_LOCATION] = {"location", false, write_location},
    [FORM_INSTANT] = {"instant", false, write_instant},
    [FORM_STAGE_SET] = {"stage_set", false, write_stage_set},
    [FORM_FACES] = {"faces", false, write_faces},
    [FORM_START] = {"start", false, write_start},
    [FORM_LOG] = {"log", false, write_log},
};

static void form_name(form f, dimension d, char *name, size_t size) {
  const form_row *row = &form_rows[f];
  snprintf(name, size, row->by_dimension ? "%s_%s" : "%s", row->name, dimension_name(d));
}

void schema_refer_form(schema_writer *w, form f, dimension d) {
  char name[64];
  if (!form_rows[f].by_dimension) d = DIMENSION_TEMPERATURE;
  form_name(f, d, name, sizeof name);
  w->wanted[f] |= 1u << d;
  buffer_format(w->b, "\"$ref\": \"#/components/schemas/%s\"", name);
}

bool schema_write_forms(schema_writer *w) {
  bool any = false;
  for (form f = 0; f < FORMS; f++)
    for (dimension d = 0; d < DIMENSION_COUNT; d++) {
      char name[64];
      unsigned bit = 1u << d;
      if (!(w->wanted[f] & bit) || (w->done[f] & bit)) continue;
      form_name(f, d, name, sizeof name);
      schema_open(w, name);
      form_rows[f].write(w, d);
      buffer_text(w->b, "}");
      w->done[f] |= bit;
      any = true;
    }
  return any;
}
