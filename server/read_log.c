/* read_log.c: furnace logs: columns, times in a unit or as RFC 3339, and what advice needs to know
 * of them. */
#include "reader.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

static bool digits(const char *p, int count, int *out) {
  *out = 0;
  for (int i = 0; i < count; i++) {
    if (!isdigit((unsigned char)p[i])) return false;
    *out = *out * 10 + (p[i] - '0');
  }
  return true;
}

/* Days since 1970-01-01 of a date of the proleptic Gregorian calendar. */
static long days_of(int year, int month, int day) {
  static const int before[] = {0, 31, 59, 90, 120, 151, 181, 212, 243, 273, 304, 334};
  bool leap = (year % 4 == 0 && year % 100 != 0) || year % 400 == 0;
  long leaps = (year - 1) / 4 - (year - 1) / 100 + (year - 1) / 400;
  return 365L * (year - 1970) + leaps - (1969 / 4 - 1969 / 100 + 1969 / 400) + before[month - 1] +
         (leap && month > 2) + day - 1;
}

/* "2026-03-01T06:15:00+01:00" to s since 1970; false if it is not RFC 3339 with an offset. */
static bool rfc3339(const char *t, double *out) {
  int year, month, day, hour, minute, second, oh, om;
  if (strlen(t) < 20 || !digits(t, 4, &year) || t[4] != '-' || !digits(t + 5, 2, &month) ||
      t[7] != '-' || !digits(t + 8, 2, &day) || (t[10] != 'T' && t[10] != 't' && t[10] != ' ') ||
      !digits(t + 11, 2, &hour) || t[13] != ':' || !digits(t + 14, 2, &minute) || t[16] != ':' ||
      !digits(t + 17, 2, &second))
    return false;
  if (year < 1 || month < 1 || month > 12 || day < 1 || day > 31 || hour > 23 || minute > 59 ||
      second > 60)
    return false;
  const char *p = t + 19;
  double fraction = 0, place = 0.1;
  if (*p == '.')
    for (p++; isdigit((unsigned char)*p); p++, place /= 10) fraction += (*p - '0') * place;
  double offset = 0;
  if (*p == 'Z' || *p == 'z') {
    p++;
  } else {
    if ((*p != '+' && *p != '-') || !digits(p + 1, 2, &oh) || p[3] != ':' || !digits(p + 4, 2, &om))
      return false;
    offset = (*p == '-' ? -1 : 1) * (oh * 3600.0 + om * 60.0);
    p += 6;
  }
  *out = days_of(year, month, day) * 86400.0 + hour * 3600.0 + minute * 60.0 + second + fraction -
         offset;
  return *p == 0;
}

/* ---- one log ---- */

typedef struct log_view {
  const json_t *columns, *units, *rows, *started;
} log_view;

static bool view_log(reader *r, const json_t *v, log_view *out) {
  static const char *const members[] = {"columns", "units", "rows", "started_at", NULL};
  if (!must_be_object(r, v)) return false;
  bool good = true;
  const char *name;
  json_t *value;
  json_object_foreach((json_t *)v, name, value) {
    bool known = false;
    for (int i = 0; members[i]; i++) known = known || !strcmp(members[i], name);
    if (known) continue;
    const char *near = nearest_name(name, members);
    fault_at(r, name, NULL, "unknown member of a log%s%s%s", near ? "; did you mean \"" : "",
             near ? near : "", near ? "\"?" : "");
    good = false;
  }
  *out = (log_view){.columns = json_object_get(v, "columns"),
                    .units = json_object_get(v, "units"),
                    .rows = json_object_get(v, "rows"),
                    .started = json_object_get(v, "started_at")};
  if (!json_is_array(out->columns) || json_array_size(out->columns) < 2) {
    fault_at(r, "columns", out->columns,
             "must name at least two columns, the first of them the time");
    good = false;
  }
  if (!json_is_array(out->rows) || !json_array_size(out->rows)) {
    fault_at(r, "rows", out->rows, "must be an array of rows");
    good = false;
  }
  if (good && json_array_size(out->rows) > LIMIT_TABLE_ROWS) {
    fault_at(r, "rows", NULL, "has %zu rows; the limit is %d", json_array_size(out->rows),
             LIMIT_TABLE_ROWS);
    good = false;
  }
  if (out->units && (!json_is_array(out->units) ||
                     (good && json_array_size(out->units) != json_array_size(out->columns)))) {
    fault_at(r, "units", out->units, "must name one unit for each column");
    good = false;
  }
  return good;
}

static const char *unit_of(const log_view *l, size_t column) {
  return l->units ? json_string_value(json_array_get(l->units, column)) : NULL;
}

/* Time of a row in s from the start of the case (or since 1970 with *dated). */
static bool row_time(reader *r, const log_view *l, const json_t *v, bool *dated, double *out) {
  const char *text = json_string_value(v);
  if (text && rfc3339(text, out)) {
    *dated = true;
    return true;
  }
  const char *unit = unit_of(l, 0);
  if (json_is_number(v) && unit &&
      quantity_in_unit(json_number_value(v), unit, DIMENSION_TIME, out) == UNIT_OK)
    return true;
  if (json_is_number(v) && unit) {
    fault_here(r, v, "the unit of the time column must be a unit of time");
    return false;
  }
  if (json_is_number(v)) {
    *out = json_number_value(v);
    return true;
  }
  fault_here(
      r, v,
      "must be a number or a time as RFC 3339 with an offset, such as 2026-03-01T06:15:00+01:00");
  return false;
}

/* Fills times; returns false after a fault. */
static bool log_times(reader *r, const log_view *l, double *time, log_facts *facts) {
  size_t count = json_array_size(l->rows);
  bool good = true, dated = false;
  double origin = NAN;
  for (size_t i = 0; i < count; i++) {
    size_t before = path_push_index(r, i);
    const json_t *row = json_array_get(l->rows, i);
    if (!json_is_array(row) || json_array_size(row) != json_array_size(l->columns)) {
      fault_here(r, row, "must have one value for each column");
      good = false;
    } else if (row_time(r, l, json_array_get(row, 0), &dated, &time[i])) {
      if (i && time[i] < time[i - 1]) {
        fault_here(r, json_array_get(row, 0), "times must not fall");
        good = false;
      }
    } else {
      good = false;
    }
    path_pop(r, before);
  }
  if (!good) return false;
  const char *started = json_string_value(l->started);
  if (l->started && (!started || !rfc3339(started, &origin))) {
    fault_at(r, "started_at", l->started, "must be a time as RFC 3339 with an offset");
    return false;
  }
  if (dated && !isfinite(origin)) origin = time[0];
  for (size_t i = 0; dated && i < count; i++) time[i] -= origin;
  facts->dated = dated;
  facts->has_offset = l->started != NULL || time[0] == 0;
  facts->rows = (int)count;
  facts->first = time[0];
  facts->last = time[count - 1];
  for (size_t i = 1; i < count; i++)
    if (time[i] - time[i - 1] > facts->widest_gap) {
      facts->widest_gap = time[i] - time[i - 1];
      facts->gap_at = time[i - 1];
    }
  return true;
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
  if (!c->logs.items) return;
  const char *name;
  json_t *value;
  json_object_foreach((json_t *)logs, name, value) {
    size_t before = path_push(r, name);
    log_view l;
    log_facts *facts = &c->logs.items[c->logs.count];
    if (view_log(r, value, &l)) {
      double *time = take(r, json_array_size(l.rows), sizeof(double));
      size_t inner = path_push(r, "rows");
      facts->name = arena_text(r->memory, name, strlen(name));
      if (!facts->name) r->no_memory = true;
      if (time && facts->name && log_times(r, &l, time, facts)) c->logs.count++;
      path_pop(r, inner);
    }
    path_pop(r, before);
  }
}

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

static int column_named(const log_view *l, const char *name) {
  for (size_t i = 1; i < json_array_size(l->columns); i++) {
    const char *text = json_string_value(json_array_get(l->columns, i));
    if (text && !strcmp(text, name)) return (int)i;
  }
  return -1;
}

/* Reads one column. Faults inside the log are told where the log is. */
static bool column_values(reader *r, const log_view *l, size_t column, dimension d, table *out) {
  size_t count = json_array_size(l->rows);
  double *x = take(r, count, sizeof(double)), *y = take(r, count, sizeof(double));
  log_facts unused = {0};
  if (!x || !y || !log_times(r, l, x, &unused)) return false;
  bool good = true;
  for (size_t i = 0; i < count; i++) {
    const json_t *v = json_array_get(json_array_get(l->rows, i), column);
    const char *unit = unit_of(l, column);
    size_t before = path_push_index(r, i);
    path_push_index(r, column);
    if (unit && json_is_number(v) &&
        quantity_in_unit(json_number_value(v), unit, d, &y[i]) != UNIT_OK) {
      fault_here(r, v, "the column's unit %s does not fit a %s", unit, dimension_name(d));
      good = false;
    } else if (!(unit && json_is_number(v)) && !read_quantity(r, v, d, &y[i])) {
      good = false;
    }
    path_pop(r, before);
    if (!good) break;
  }
  *out = (table){.count = (int)count, .x = x, .y = y};
  return good;
}

bool read_log_column(reader *r, const json_t *name, dimension d, series *out) {
  char log[LIMIT_NAME + 1], path[LONGEST_PATH];
  const char *wanted;
  const json_t *found = find_log(r, name, log, sizeof log, &wanted);
  if (!found || !json_is_object(found)) return false;
  log_view l = {.columns = json_object_get(found, "columns"),
                .units = json_object_get(found, "units"),
                .rows = json_object_get(found, "rows"),
                .started = json_object_get(found, "started_at")};
  bool known = false;
  for (int i = 0; i < r->the_case->logs.count; i++)
    known = known || !strcmp(r->the_case->logs.items[i].name, log);
  if (!known) return false; /* its faults stand already */
  int column = column_named(&l, wanted);
  if (column < 0) {
    fault_here(r, name, "log \"%s\" has no column \"%s\"", log, wanted);
    return false;
  }
  size_t length = r->length;
  memcpy(path, r->path, sizeof path);
  path_pop(r, 0);
  path_push(r, "logs");
  path_push(r, log);
  path_push(r, "rows");
  bool good = column_values(r, &l, (size_t)column, d, &out->table);
  memcpy(r->path, path, sizeof path);
  r->length = length;
  out->kind = SERIES_TABLE;
  out->from_case_start = true;
  out->log = arena_text(r->memory, json_string_value(name), json_string_length(name));
  if (!out->log) r->no_memory = true;
  return good;
}
