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

/* ---- columns ---- */

/* What stands in a list of columns: a text, or {"of": PLACE, "in": LAYER}. */
typedef struct column_text {
  const char *of;
  const json_t *in;
} column_text;

static bool view_column(reader *r, const json_t *v, column_text *out) {
  static const char *const members[] = {"of", "in", NULL};
  const json_t *of = json_is_object(v) ? json_object_get(v, "of") : v;
  const char *name;
  json_t *value;
  bool good = json_is_string(of);
  *out = (column_text){json_string_value(of), json_is_object(v) ? json_object_get(v, "in") : NULL};
  if (!good)
    fault_here(
        r, v,
        "must be a place, \"heat_flow:FACE\", a named series, or {\"of\": PLACE, \"in\": LAYER}");
  json_object_foreach((json_t *)v, name, value) {
    if (!strcmp(name, members[0]) || !strcmp(name, members[1])) continue;
    fault_at(r, name, NULL, "unknown member of a column (of, in)");
    good = false;
  }
  return good && (json_is_string(of) ? must_be_text(r, of) : true);
}

static void name_column(reader *r, const column_text *t, column *out) {
  char name[LIMIT_TEXT + LIMIT_NAME + 8];
  const char *in = json_string_value(t->in);
  snprintf(name, sizeof name, "%s%s%.64s", t->of, in ? " in " : "", in ? in : "");
  out->name = arena_text(r->memory, name, strlen(name));
  if (!out->name) r->no_memory = true;
}

static const char heat_flow[] = "heat_flow:";

static void read_heat_flow(reader *r, const char *text, column *out) {
  json_t *face = json_string(text + sizeof heat_flow - 1);
  if (!face) r->no_memory = true;
  out->kind = COLUMN_HEAT_FLOW;
  out->index = face ? read_face_name(r, face) : -1;
  json_decref(face);
}

/* The index of a named series or a log's column; -1 if the text is neither. */
static int read_series_column(reader *r, const char *text) {
  int known = series_named(r->the_case, text);
  if (known >= 0 || !strchr(text, '/')) return known;
  series s;
  dimension d = dimension_of_log(r, text);
  json_t *name = json_string(text);
  if (!name) r->no_memory = true;
  bool good = name && read_log_column(r, name, d, &s);
  json_decref(name);
  return good ? add_named_series(r, text, d, &s) : -1;
}

static void read_column(reader *r, const json_t *v, column *out) {
  column_text t;
  place twin;
  if (!view_column(r, v, &t)) return;
  name_column(r, &t, out);
  if (!strncmp(t.of, heat_flow, sizeof heat_flow - 1)) {
    read_heat_flow(r, t.of, out);
  } else if ((out->index = read_series_column(r, t.of)) >= 0) {
    out->kind = COLUMN_SERIES;
    if (read_place_name(r, t.of, NULL, &twin, true))
      fault_here(r, v, "is the name of a place and of a series: rename one of them");
  } else if (!strchr(t.of, '/')) {
    out->kind = COLUMN_PLACE;
    size_t before = json_is_object(v) ? path_push(r, "of") : r->length;
    read_place_name(r, t.of, t.in, &out->place, false);
    path_pop(r, before);
  }
  if (t.in && (out->kind == COLUMN_SERIES || out->kind == COLUMN_HEAT_FLOW))
    fault_at(r, "in", t.in, "goes with coldest, hottest, mean and section_difference");
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
