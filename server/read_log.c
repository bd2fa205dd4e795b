/* read_log.c: furnace logs: columns, times in a unit or as RFC 3339, and what advice needs to know
 * of them. */
#include "reader.h"

#include <math.h>
#include <string.h>

typedef struct log_view {
  const json_t *columns, *units, *rows, *started;
  size_t width;
} log_view;

/* ---- its members ---- */

static void check_log_members(reader *r, const json_t *v) {
  static const char *const members[] = {"columns", "units", "rows", "started_at", NULL};
  const char *name;
  json_t *value;
  json_object_foreach((json_t *)v, name, value) {
    bool known = false;
    for (int i = 0; members[i]; i++) known = known || !strcmp(members[i], name);
    if (known) continue;
    const char *near = nearest_name(name, members);
    fault_at(r, name, NULL, "unknown member of a log%s%s%s", near ? "; did you mean \"" : "",
             near ? near : "", near ? "\"?" : "");
  }
}

static bool same_text(const json_t *a, const json_t *b) {
  return json_is_string(a) && json_is_string(b) &&
         !strcmp(json_string_value(a), json_string_value(b));
}

static void check_columns(reader *r, const log_view *l) {
  if (!json_is_array(l->columns) || l->width < 2) {
    fault_at(r, "columns", l->columns,
             "must name at least two columns, the first of them the time");
    return;
  }
  size_t before = path_push(r, "columns");
  for (size_t i = 0; i < l->width; i++) {
    size_t inner = path_push_index(r, i);
    const json_t *name = json_array_get(l->columns, i);
    bool text = must_be_text(r, name), again = false;
    if (text && !is_name(json_string_value(name)))
      fault_here(r, name, "a name has 1 to 64 letters, digits, _ or -");
    for (size_t k = 0; k < i; k++) again = again || same_text(name, json_array_get(l->columns, k));
    if (again) fault_here(r, name, "another column has this name");
    path_pop(r, inner);
  }
  path_pop(r, before);
}

static const char *unit_of(const log_view *l, size_t column) {
  return l->units ? json_string_value(json_array_get(l->units, column)) : NULL;
}

static void check_log_units(reader *r, const log_view *l) {
  double unused;
  if (!l->units) return;
  size_t before = path_push(r, "units");
  if (!json_is_array(l->units) || json_array_size(l->units) != l->width)
    fault_here(r, l->units, "must name one unit, or null, for each column");
  for (size_t i = 0; i < json_array_size(l->units); i++) {
    const json_t *unit = json_array_get(l->units, i);
    size_t inner = path_push_index(r, i);
    if (!json_is_string(unit) && !json_is_null(unit))
      fault_here(r, unit, "must be a unit as a text, or null");
    else if (i == 0 && json_is_string(unit) &&
             quantity_in_unit(1, json_string_value(unit), DIMENSION_TIME, &unused) != UNIT_OK)
      fault_here(r, unit, "must be a unit of time, such as min");
    path_pop(r, inner);
  }
  path_pop(r, before);
}

static void check_row_shapes(reader *r, const log_view *l) {
  size_t before = path_push(r, "rows");
  size_t count = json_array_size(l->rows);
  if (!count) fault_here(r, l->rows, "must be an array of rows");
  if (count > LIMIT_TABLE_ROWS)
    fault_here(r, NULL, "has %zu rows; the limit is %d", count, LIMIT_TABLE_ROWS);
  for (size_t i = 0; count <= LIMIT_TABLE_ROWS && i < count; i++) {
    const json_t *row = json_array_get(l->rows, i);
    if (json_is_array(row) && json_array_size(row) == l->width) continue;
    size_t inner = path_push_index(r, i);
    fault_here(r, row, "must have one value for each column");
    path_pop(r, inner);
  }
  path_pop(r, before);
}

static log_view view_of(const json_t *v) {
  log_view l = {.columns = json_object_get(v, "columns"),
                .units = json_object_get(v, "units"),
                .rows = json_object_get(v, "rows"),
                .started = json_object_get(v, "started_at")};
  l.width = json_array_size(l.columns);
  return l;
}

static bool view_log(reader *r, const json_t *v, log_view *out) {
  if (!must_be_object(r, v)) return false;
  int faults = r->faults->found;
  *out = view_of(v);
  check_log_members(r, v);
  check_columns(r, out);
  check_log_units(r, out);
  check_row_shapes(r, out);
  return r->faults->found == faults;
}

/* ---- its times ---- */

/* Time of a row in s from the start of the case, or since 1970 where the log is dated. */
static bool row_time(reader *r, const log_view *l, const json_t *v, bool dated, double *out) {
  const char *unit = unit_of(l, 0);
  if (dated && json_is_string(v) && read_rfc3339(json_string_value(v), out)) return true;
  if (!dated && json_is_number(v)) {
    *out = json_number_value(v);
    return !unit || quantity_in_unit(*out, unit, DIMENSION_TIME, out) == UNIT_OK;
  }
  if (dated)
    fault_here(r, v,
               "must be a moment as RFC 3339 with an offset, such as 2026-03-01T06:15:00+01:00");
  else
    fault_here(r, v, "must be a number, as in the rows before");
  return false;
}

static bool read_times(reader *r, const log_view *l, bool dated, double *time) {
  bool good = true;
  for (size_t i = 0; i < json_array_size(l->rows); i++) {
    const json_t *v = json_array_get(json_array_get(l->rows, i), 0);
    size_t before = path_push_index(r, i);
    path_push_index(r, 0);
    bool fine = row_time(r, l, v, dated, &time[i]);
    if (!fine) time[i] = i ? time[i - 1] : -INFINITY;
    if (fine && i && time[i] < time[i - 1]) {
      fault_here(r, v, "times must not fall");
      fine = false;
    }
    good = good && fine;
    path_pop(r, before);
  }
  return good;
}

/* The moment from which a dated log counts: `started_at`, else its first row. */
static bool origin_of(reader *r, const log_view *l, double first, double *out) {
  *out = first;
  if (!l->started) return true;
  if (json_is_string(l->started) && read_rfc3339(json_string_value(l->started), out)) return true;
  fault_at(r, "started_at", l->started,
           "must be a moment as RFC 3339 with an offset, such as 2026-03-01T06:15:00+01:00");
  return false;
}

static void note_facts(const double *time, int count, log_facts *facts) {
  facts->rows = count;
  facts->first = time[0];
  facts->last = time[count - 1];
  for (int i = 1; i < count; i++)
    if (time[i] - time[i - 1] > facts->widest_gap) {
      facts->widest_gap = time[i] - time[i - 1];
      facts->gap_at = time[i - 1];
    }
}

/* Fills times (s from the start of the case) and facts; false after a fault. */
static bool log_times(reader *r, const log_view *l, double *time, log_facts *facts) {
  int count = (int)json_array_size(l->rows);
  bool dated = json_is_string(json_array_get(json_array_get(l->rows, 0), 0));
  double origin = 0;
  size_t before = path_push(r, "rows");
  bool good = read_times(r, l, dated, time);
  path_pop(r, before);
  good = origin_of(r, l, time[0], &origin) && good;
  if (!good) return false;
  for (int i = 0; dated && i < count; i++) time[i] -= origin;
  facts->dated = dated;
  facts->has_offset = l->started != NULL || time[0] == 0;
  note_facts(time, count, facts);
  return true;
}

static void read_log(reader *r, const char *name, const json_t *v) {
  heat_case *c = r->the_case;
  log_view l;
  log_facts *facts = &c->logs.items[c->logs.count];
  if (!is_name(name)) fault_here(r, NULL, "a name has 1 to 64 letters, digits, _ or -");
  if (!view_log(r, v, &l)) return;
  double *time = take(r, json_array_size(l.rows), sizeof(double));
  facts->name = arena_text(r->memory, name, strlen(name));
  if (!facts->name) r->no_memory = true;
  if (time && facts->name && log_times(r, &l, time, facts)) c->logs.count++;
}

void read_logs(reader *r, const json_t *logs) {
  if (!must_be_object(r, logs)) return;
  heat_case *c = r->the_case;
  size_t count = json_object_size(logs);
  if (count > LIMIT_NAMED_SERIES) {
    fault_here(r, NULL, "has %zu logs; the limit is %d", count, LIMIT_NAMED_SERIES);
    return;
  }
  c->logs.items = take(r, count, sizeof *c->logs.items);
  const char *name;
  json_t *value;
  json_object_foreach((json_t *)logs, name, value) {
    size_t before = path_push(r, name);
    if (c->logs.items) read_log(r, name, value);
    path_pop(r, before);
  }
}

/* ---- one column, where it is used ---- */

static const json_t *find_log(reader *r, const json_t *name, char *log, size_t size,
                              const char **column) {
  const char *text = json_string_value(name), *slash = text ? strchr(text, '/') : NULL;
  if (!slash || (size_t)(slash - text) >= size) {
    fault_here(r, name, "must be \"LOG/COLUMN\"");
    return NULL;
  }
  memcpy(log, text, (size_t)(slash - text));
  log[slash - text] = 0;
  *column = slash + 1;
  const json_t *found = json_object_get(json_object_get(r->root, "logs"), log);
  if (!found) fault_here(r, name, "there is no log \"%s\" in `logs`", log);
  return found;
}

static bool was_read(const heat_case *c, const char *log) {
  for (int i = 0; i < c->logs.count; i++)
    if (!strcmp(c->logs.items[i].name, log)) return true;
  return false;
}

static size_t column_named(reader *r, const log_view *l, const json_t *got, const char *name) {
  const char *names[LIMIT_COLUMNS + 1];
  int n = 0;
  for (size_t i = 1; i < l->width; i++) {
    const char *own = json_string_value(json_array_get(l->columns, i));
    if (!strcmp(own, name)) return i;
    if (n < LIMIT_COLUMNS) names[n++] = own;
  }
  names[n] = NULL;
  const char *near = nearest_name(name, names);
  fault_here(r, got, "the log has no column \"%s\"%s%s%s", name, near ? "; did you mean \"" : "",
             near ? near : "", near ? "\"?" : "");
  return 0;
}

static bool column_value(reader *r, const json_t *v, const char *unit, dimension d, double *out) {
  if (!unit || !json_is_number(v)) return read_quantity(r, v, d, out);
  return quantity_in_unit(json_number_value(v), unit, d, out) == UNIT_OK && in_scale(r, v, d, out);
}

/* Reads one column at the path of its log. */
static bool column_values(reader *r, const log_view *l, size_t column, dimension d, table *out) {
  size_t count = json_array_size(l->rows);
  double *x = take(r, count, sizeof(double)), *y = take(r, count, sizeof(double)), unused;
  const char *unit = unit_of(l, column);
  log_facts facts = {0};
  if (!x || !y || !log_times(r, l, x, &facts)) return false;
  bool good = true;
  size_t before = path_push(r, "units");
  path_push_index(r, column);
  if (unit && quantity_in_unit(1, unit, d, &unused) != UNIT_OK) {
    fault_here(r, json_array_get(l->units, column), "does not fit a %s", dimension_name(d));
    good = false;
  }
  path_pop(r, before);
  path_push(r, "rows");
  for (size_t i = 0; good && i < count; i++) {
    size_t inner = path_push_index(r, i);
    path_push_index(r, column);
    good = column_value(r, json_array_get(json_array_get(l->rows, i), column), unit, d, &y[i]);
    path_pop(r, inner);
  }
  path_pop(r, before);
  *out = (table){.count = (int)count, .x = x, .y = y};
  return good;
}

bool read_log_column(reader *r, const json_t *name, dimension d, series *out) {
  char log[LIMIT_NAME + 1], path[LONGEST_PATH];
  const char *wanted;
  const json_t *found = find_log(r, name, log, sizeof log, &wanted);
  if (!found || !was_read(r->the_case, log)) return false; /* its faults stand already */
  log_view l = view_of(found);
  size_t column = column_named(r, &l, name, wanted), length = r->length;
  if (!column) return false;
  memcpy(path, r->path, sizeof path);
  path_pop(r, 0);
  path_push(r, "logs");
  path_push(r, log);
  bool good = column_values(r, &l, column, d, &out->table);
  memcpy(r->path, path, sizeof path);
  r->length = length;
  out->kind = SERIES_TABLE;
  out->from_case_start = true;
  out->log = arena_text(r->memory, json_string_value(name), json_string_length(name));
  if (!out->log) r->no_memory = true;
  return good;
}
