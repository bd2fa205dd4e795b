/* read_output.c: histories, fields and units of the answer. */
#include "reader.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static int series_named(const heat_case *c, const char *name) {
  for (int i = 0; i < c->series.count; i++)
    if (!strcmp(c->series.items[i].name, name)) return i;
  return -1;
}

/* "heat_flow:FACE", a named series, or a place; an object gives a place with "in". */
static bool read_column(reader *r, const json_t *v, column *out) {
  const json_t *of = json_is_object(v) ? json_object_get(v, "of") : v;
  const json_t *in = json_is_object(v) ? json_object_get(v, "in") : NULL;
  if (!json_is_string(of)) {
    fault_here(
        r, v,
        "must be a place, \"heat_flow:FACE\", a named series, or {\"of\": PLACE, \"in\": LAYER}");
    return false;
  }
  const char *text = json_string_value(of);
  char name[2 * LIMIT_NAME + 8];
  snprintf(name, sizeof name, "%s%s%s", text, in ? " in " : "",
           in && json_is_string(in) ? json_string_value(in) : "");
  if (!(out->name = arena_text(r->memory, name, strlen(name)))) r->no_memory = true;
  if (!strncmp(text, "heat_flow:", 10)) {
    json_t *face = json_string(text + 10);
    out->kind = COLUMN_HEAT_FLOW;
    out->index = face ? read_face_name(r, face) : -1;
    json_decref(face);
    return true;
  }
  out->index = series_named(r->the_case, text);
  if (out->index < 0 && strchr(text, '/')) { /* a log's column */
    series s;
    if (!read_log_column(r, of, DIMENSION_TEMPERATURE, &s)) return false;
    out->index = add_named_series(r, text, DIMENSION_TEMPERATURE, &s);
    if (out->index < 0) return false;
  }
  if (out->index >= 0) {
    out->kind = COLUMN_SERIES;
    return true;
  }
  out->kind = COLUMN_PLACE;
  size_t before = json_is_object(v) ? path_push(r, "of") : r->length;
  bool good = read_place_name(r, text, in, &out->place, false);
  path_pop(r, before);
  return good;
}

static void all_points(reader *r, columns *out) {
  const heat_case *c = r->the_case;
  column *items = take(r, (size_t)c->points.count, sizeof *items);
  if (!items) return;
  for (int i = 0; i < c->points.count; i++)
    items[i] = (column){.kind = COLUMN_PLACE,
                        .name = c->points.items[i].name,
                        .place = {.kind = PLACE_POINT, .index = i, .layer = -1}};
  *out = (columns){.count = c->points.count, .items = items};
}

static void read_columns(reader *r, const json_t *v, columns *out) {
  if (!must_be_array(r, v, LIMIT_COLUMNS, "columns")) return;
  size_t count = json_array_size(v);
  column *items = take(r, count, sizeof *items);
  if (!items) return;
  for (size_t i = 0; i < count; i++) {
    size_t before = path_push_index(r, i);
    read_column(r, json_array_get(v, i), &items[i]);
    for (size_t k = 0; k < i; k++)
      if (items[i].name && items[k].name && !strcmp(items[i].name, items[k].name))
        fault_here(r, json_array_get(v, i), "stands in this list already");
    path_pop(r, before);
  }
  *out = (columns){.count = (int)count, .items = items};
}

static void read_times(reader *r, const json_t *v, const object_type *t, output_request *out) {
  static const char *const skip[] = {"of", NULL};
  if (!must_be_object(r, v)) return;
  read_object(r, v, t, NULL, skip, out);
  bool every = json_object_get(v, "every"), at = json_object_get(v, "at");
  if (every == at) fault_here(r, NULL, "must have either every or at");
  out->times = every ? OUTPUT_EVERY : OUTPUT_AT;
  if (every && !isfinite(out->every)) out->times = OUTPUT_NONE;
}

static void read_history(reader *r, const json_t *v) {
  output_request *h = &r->the_case->output.history;
  size_t before = path_push(r, "history");
  read_times(r, v, &history_type, h);
  const json_t *of = json_is_object(v) ? json_object_get(v, "of") : NULL;
  size_t inner = path_push(r, "of");
  if (of)
    read_columns(r, of, &h->of);
  else
    all_points(r, &h->of);
  path_pop(r, inner);
  path_pop(r, before);
}

static void read_unit(reader *r, const char *name, const json_t *v) {
  static const char *const names[] = {"temperature", "length", "time", NULL};
  for (int i = 0; names[i]; i++) {
    if (strcmp(names[i], name)) continue;
    if (!json_is_string(v) || output_units_set(&r->document->units, name, json_string_value(v)))
      fault_at(r, name, v,
               "must be a unit of temperature (degC, degF, K), length (m, mm, cm, in, ft) or time "
               "(s, min, h, d)");
    return;
  }
  const char *near = nearest_name(name, names);
  fault_at(r, name, NULL, "unknown member of units%s%s%s", near ? "; did you mean \"" : "",
           near ? near : "", near ? "\"?" : "");
}

static void read_units(reader *r, const json_t *v) {
  output_units *u = &r->document->units;
  size_t before = path_push(r, "units");
  const char *text = json_string_value(v), *name;
  json_t *value;
  if (text && !strcmp(text, "us")) {
    u->us = true;
    (void)(output_units_set(u, "temperature", "degF") + output_units_set(u, "length", "in"));
  } else if (json_is_object(v)) {
    json_object_foreach((json_t *)v, name, value) read_unit(r, name, value);
  } else if (!text || strcmp(text, "si")) {
    fault_here(r, v, "must be \"si\", \"us\", or an object with temperature, length, time");
  }
  path_pop(r, before);
}

void read_output(reader *r, const json_t *v) {
  if (!must_be_object(r, v)) return;
  check_members(r, v, &output_type, NULL);
  if (json_object_get(v, "history")) read_history(r, json_object_get(v, "history"));
  size_t before = path_push(r, "fields");
  if (json_object_get(v, "fields"))
    read_times(r, json_object_get(v, "fields"), &fields_type, &r->the_case->output.fields);
  path_pop(r, before);
  if (json_object_get(v, "units")) read_units(r, json_object_get(v, "units"));
}
