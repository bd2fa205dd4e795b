/* route_materials.c: the library of materials, and values of it at temperatures that the caller
 * names (degC). */
#include "json_out.h"
#include "routes.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { MOST_TEMPERATURES = 200, LONGEST_AT = 4096 };

static const double ZERO_CELSIUS = 273.15;

typedef struct temperatures {
  int count;
  double kelvin[MOST_TEMPERATURES];
} temperatures;

static const struct {
  unsigned trait;
  const char *name;
} traits[] = {{MATERIAL_METAL, "metal"},
              {MATERIAL_HEATING_ONLY, "heating_only"},
              {MATERIAL_LIQUID, "liquid"},
              {MATERIAL_MELTS, "melts"}};

/* Reads ?at=20,150; false with a 400. */
static bool read_at(const request *q, reply *r, temperatures *at) {
  static const char *const known[] = {"at", NULL};
  char text[LONGEST_AT];
  at->count = 0;
  if (refuse_unknown_parameters(q, r, known)) return false;
  if (!strstr(q->query, "at=")) return true;
  const char *c = text;
  bool good = request_parameter(q, "at", text, sizeof text);
  while (good && at->count < MOST_TEMPERATURES) {
    char *end;
    double celsius = strtod(c, &end);
    good = end != c && isfinite(celsius) && celsius >= -ZERO_CELSIUS;
    if (good) at->kelvin[at->count++] = celsius + ZERO_CELSIUS;
    c = end + 1;
    if (*end == '\0' && good) return true;
    good = good && *end == ',';
  }
  reply_problem(
      r, 400, "at must be temperatures in degC divided by commas, such as at=20,150; at most 200");
  return false;
}

static void member(buffer *b, const char *name, const char *text) {
  if (!text) return;
  buffer_format(b, ", \"%s\": ", name);
  json_out_string(b, text);
}

static void bound(buffer *b, const char *name, double kelvin) {
  buffer_format(b, "\"%s\": ", name);
  if (isfinite(kelvin))
    json_out_number(b, kelvin - ZERO_CELSIUS, 0);
  else
    buffer_text(b, "null");
}

static void write_traits(buffer *b, unsigned has) {
  const char *comma = "";
  buffer_text(b, ", \"traits\": [");
  for (size_t i = 0; i < sizeof traits / sizeof traits[0]; i++) {
    if (!(has & traits[i].trait)) continue;
    buffer_format(b, "%s\"%s\"", comma, traits[i].name);
    comma = ", ";
  }
  buffer_text(b, "]");
}

static void write_curve(buffer *b, const char *name, const curve *c, const temperatures *at) {
  buffer_format(b, ", \"%s\": [", name);
  for (int i = 0; i < at->count; i++) {
    if (i) buffer_text(b, ", ");
    json_out_number(b, curve_value(c, at->kelvin[i]), 0);
  }
  buffer_text(b, "]");
}

static void write_values(buffer *b, const material *m, const temperatures *at) {
  if (at->count == 0) return;
  buffer_text(b, ", \"values\": {\"temperature\": [");
  for (int i = 0; i < at->count; i++) {
    if (i) buffer_text(b, ", ");
    json_out_number(b, at->kelvin[i] - ZERO_CELSIUS, 0);
  }
  buffer_text(b, "]");
  write_curve(b, "density", &m->density, at);
  write_curve(b, "conductivity", &m->conductivity, at);
  write_curve(b, "specific_heat", &m->specific_heat, at);
  buffer_text(b, "}");
}

static void write_material(buffer *b, const material *m, const temperatures *at) {
  buffer_text(b, "{\"name\": ");
  json_out_string(b, m->name);
  member(b, "title", m->title);
  member(b, "source", m->source);
  member(b, "revision", m->revision);
  buffer_text(b, ", \"valid\": {");
  bound(b, "from", m->valid_from);
  buffer_text(b, ", ");
  bound(b, "to", m->valid_to);
  buffer_text(b, "}, ");
  bound(b, "max_service", m->max_service);
  write_traits(b, m->traits);
  write_values(b, m, at);
}

static const char units[] = "{\"temperature\": \"degC\", \"density\": \"kg/m3\", "
                            "\"conductivity\": \"W/(m.K)\", \"specific_heat\": \"J/(kg.K)\"}";

void route_materials(service *s, request *q, reply *r) {
  temperatures at;
  if (!read_at(q, r, &at)) return;
  int count = s->materials ? library_count(s->materials) : 0;
  r->status = 200;
  r->type = "application/json";
  reply_header_set(r, "Vary", "Accept-Encoding");
  buffer_text(&r->body, "{\"materials\": [");
  for (int i = 0; i < count; i++) {
    if (i) buffer_text(&r->body, ", ");
    write_material(&r->body, library_at(s->materials, i), &at);
    buffer_text(&r->body, "}");
  }
  buffer_format(&r->body, "], \"units\": %s}\n", units);
}

void route_material(service *s, request *q, reply *r) {
  temperatures at;
  if (!read_at(q, r, &at)) return;
  const material *m = s->materials ? library_find(s->materials, q->argument) : NULL;
  if (!m) {
    char detail[224] = "no material has this name";
    const char *near = s->materials ? nearest_name(q->argument, library_names(s->materials)) : NULL;
    if (near) snprintf(detail, sizeof detail, "no material has this name: did you mean %s?", near);
    reply_problem(r, 404, detail);
    return;
  }
  r->status = 200;
  r->type = "application/json";
  reply_header_set(r, "Vary", "Accept-Encoding");
  write_material(&r->body, m, &at);
  const char *definition = library_text(s->materials, m->name);
  if (definition) {
    buffer_text(&r->body, ", \"definition\": ");
    buffer_text(&r->body, definition);
  }
  buffer_format(&r->body, ", \"units\": %s}\n", units);
}
