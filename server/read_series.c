/* read_series.c: time series in all their forms, tables and coefficients. */
#include "reader.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

/* ---- tables ---- */

/* Optional units of the columns: {"table": ..., "units": ["min", "degF"]}. */
typedef struct column_units {
  const char *name[2];
} column_units;

static bool in_column(reader *r, const json_t *v, const char *unit, dimension d, double *out) {
  if (!unit || !json_is_number(v)) return read_quantity(r, v, d, out);
  return quantity_in_unit(json_number_value(v), unit, d, out) == UNIT_OK && in_scale(r, v, d, out);
}

static bool read_row(reader *r, const json_t *row, const column_units *units, const dimension d[2],
                     double out[2]) {
  if (!json_is_array(row) || json_array_size(row) != 2) {
    fault_here(r, row, "must be a row of two values");
    return false;
  }
  bool good = true;
  for (size_t k = 0; k < 2; k++) {
    size_t before = path_push_index(r, k);
    good = in_column(r, json_array_get(row, k), units->name[k], d[k], &out[k]) && good;
    path_pop(r, before);
  }
  return good;
}

/* Row i against those before it: rising, or (not strict) level once, which is a jump. */
static bool in_order(reader *r, const double *x, size_t i, bool strict, const json_t *row) {
  bool falls = i > 0 && (strict ? x[i] <= x[i - 1] : x[i] < x[i - 1]);
  bool third = i > 1 && x[i] == x[i - 2];
  if (falls)
    fault_here(r, row,
               strict ? "rows must rise in their first column"
                      : "rows must not fall in their first column");
  else if (third)
    fault_here(r, row, "a jump is two rows at one place, not three");
  return !falls && !third;
}

static bool fill_rows(reader *r, const json_t *v, const column_units *units, const dimension d[2],
                      bool strict, double *x, double *y) {
  bool good = true;
  for (size_t i = 0; i < json_array_size(v); i++) {
    const json_t *row = json_array_get(v, i);
    double value[2];
    size_t before = path_push_index(r, i);
    bool fine = read_row(r, row, units, d, value);
    x[i] = fine ? value[0] : i ? x[i - 1] : -INFINITY;
    y[i] = fine ? value[1] : 0;
    good = fine && in_order(r, x, i, strict, row) && good;
    path_pop(r, before);
  }
  return good;
}

static bool read_rows(reader *r, const json_t *v, const column_units *units, const dimension d[2],
                      bool strict, table *out) {
  if (!must_be_array(r, v, LIMIT_TABLE_ROWS, "rows")) return false;
  size_t count = json_array_size(v);
  if (!count) {
    fault_here(r, NULL, "must have at least one row");
    return false;
  }
  double *x = take(r, count, sizeof(double)), *y = take(r, count, sizeof(double));
  if (!x || !y) return false;
  *out = (table){.count = (int)count, .x = x, .y = y};
  return fill_rows(r, v, units, d, strict, x, y);
}

bool read_table(reader *r, const json_t *v, dimension x, dimension y, bool strict, table *out) {
  column_units none = {{NULL, NULL}};
  dimension d[2] = {x, y};
  return read_rows(r, v, &none, d, strict, out);
}

/* The units of the columns of a table, each of which must fit. */
static bool read_units(reader *r, const json_t *object, const dimension d[2], column_units *units) {
  const json_t *v = json_object_get(object, "units");
  double unused;
  *units = (column_units){{NULL, NULL}};
  if (!v) return true;
  size_t before = path_push(r, "units");
  bool good = json_is_array(v) && json_array_size(v) == 2;
  if (!good) fault_here(r, v, "must name the units of the two columns");
  for (size_t k = 0; good && k < 2; k++) {
    const json_t *unit = json_array_get(v, k);
    units->name[k] = json_string_value(unit);
    size_t inner = path_push_index(r, k);
    if (!units->name[k] || quantity_in_unit(1, units->name[k], d[k], &unused) != UNIT_OK) {
      fault_here(r, unit, "must be a unit of %s, such as %s", dimension_name(d[k]),
                 dimension_unit(d[k]));
      good = false;
    }
    path_pop(r, inner);
  }
  path_pop(r, before);
  return good;
}

bool read_table_of(reader *r, const json_t *object, const char *member, dimension x, dimension y,
                   table *out) {
  column_units units;
  dimension d[2] = {x, y};
  if (!read_units(r, object, d, &units)) return false;
  size_t before = path_push(r, member);
  bool good = read_rows(r, json_object_get(object, member), &units, d, false, out);
  path_pop(r, before);
  return good;
}

/* ---- forms ---- */

static bool constant(reader *r, const json_t *v, dimension d, series *out) {
  out->kind = SERIES_CONSTANT;
  return read_quantity(r, v, d, &out->value);
}

static bool two_rows(reader *r, series *out, const double x[2], const double y[2]) {
  double *xs = take(r, 2, sizeof(double)), *ys = take(r, 2, sizeof(double));
  if (!xs || !ys) return false;
  memcpy(xs, x, 2 * sizeof(double));
  memcpy(ys, y, 2 * sizeof(double));
  out->kind = SERIES_TABLE;
  out->table = (table){.count = 2, .x = xs, .y = ys};
  return true;
}

static bool member_of_dimension(reader *r, const json_t *object, const char *name, dimension d,
                                double *out) {
  const json_t *v = json_object_get(object, name);
  if (!v) {
    fault_at(r, name, NULL, "is missing");
    return false;
  }
  size_t before = path_push(r, name);
  bool good = read_quantity(r, v, d, out);
  path_pop(r, before);
  return good;
}

/* A rate of something that is not a temperature is that thing's unit per second, and has no unit
 * strings. */
static bool ramp(reader *r, const json_t *v, dimension d, series *out) {
  static const char *const skip[] = {"from", "to", "rate", NULL};
  if (!must_be_object(r, v)) return false;
  ramp_form f = {NAN, NAN, NAN};
  size_t faults = (size_t)r->faults->found;
  read_object(r, v, &ramp_type, NULL, skip, &f);
  member_of_dimension(r, v, "from", d, &f.from);
  member_of_dimension(r, v, "to", d, &f.to);
  bool thermal = d == DIMENSION_TEMPERATURE || d == DIMENSION_ANY;
  member_of_dimension(r, v, "rate", thermal ? DIMENSION_RATE : DIMENSION_NUMBER, &f.rate);
  if (f.rate <= 0) fault_at(r, "rate", json_object_get(v, "rate"), "must be greater than 0");
  if ((size_t)r->faults->found != faults) return false;
  if (f.from == f.to) {
    out->kind = SERIES_CONSTANT;
    out->value = f.to;
    return true;
  }
  return two_rows(r, out, (double[2]){0, fabs(f.to - f.from) / f.rate}, (double[2]){f.from, f.to});
}

static bool sine(reader *r, const json_t *v, dimension d, series *out) {
  static const char *const skip[] = {"mean", "amplitude", NULL};
  if (!must_be_object(r, v)) return false;
  sine_form f = {NAN, NAN, NAN, 0};
  int faults = r->faults->found;
  read_object(r, v, &sine_type, NULL, skip, &f);
  member_of_dimension(r, v, "mean", d, &f.mean);
  member_of_dimension(r, v, "amplitude", d == DIMENSION_TEMPERATURE ? DIMENSION_DIFFERENCE : d,
                      &f.amplitude);
  if (r->faults->found != faults) return false;
  if (d == DIMENSION_TEMPERATURE && f.mean - fabs(f.amplitude) < 0) {
    fault_here(r, NULL, "falls below absolute zero");
    return false;
  }
  *out = (series){.kind = SERIES_SINE,
                  .value = f.mean,
                  .amplitude = f.amplitude,
                  .period = f.period,
                  .phase = f.phase};
  return true;
}

static bool fire(reader *r, const json_t *v, dimension d, series *out) {
  if (d != DIMENSION_TEMPERATURE && d != DIMENSION_ANY) {
    fault_here(r, v, "a fire curve is a temperature");
    return false;
  }
  if (!must_be_text(r, v)) return false;
  for (int i = 0; fire_curve_names[i]; i++)
    if (!strcmp(fire_curve_names[i], json_string_value(v))) {
      *out = (series){.kind = SERIES_FIRE, .curve = (fire_curve)i};
      return true;
    }
  const char *near = nearest_name(json_string_value(v), fire_curve_names);
  fault_here(r, v, "must be one of standard, hydrocarbon, external%s%s%s",
             near ? "; did you mean \"" : "", near ? near : "", near ? "\"?" : "");
  return false;
}

/* Zones as a table: a jump at each border, or a straight change over `blend` around it. */
static bool zones_to_table(reader *r, const line_form *f, series *out) {
  int zones = f->zones.count;
  size_t rows = (size_t)zones * 2;
  double *x = take(r, rows, sizeof(double)), *y = take(r, rows, sizeof(double)), at = 0;
  if (!x || !y || !f->zones.items) return false;
  int n = 0;
  x[n] = 0;
  y[n++] = f->zones.items[0].value;
  for (int i = 0; i + 1 < zones; i++) {
    at += f->zones.items[i].length;
    x[n] = (at - f->blend / 2) / f->speed;
    y[n++] = f->zones.items[i].value;
    x[n] = (at + f->blend / 2) / f->speed;
    y[n++] = f->zones.items[i + 1].value;
  }
  *out = (series){.kind = SERIES_TABLE, .table = {.count = n, .x = x, .y = y}};
  return true;
}

static bool read_zone(reader *r, const json_t *v, dimension d, double blend, zone_form *z) {
  static const char *const skip[] = {"value", NULL};
  if (!must_be_object(r, v)) return false;
  int faults = r->faults->found;
  read_object(r, v, &zone_type, NULL, skip, z);
  member_of_dimension(r, v, "value", d, &z->value);
  if (z->length > 0 && z->length < blend)
    fault_at(r, "length", json_object_get(v, "length"), "is shorter than blend");
  return r->faults->found == faults;
}

static bool line(reader *r, const json_t *v, dimension d, series *out) {
  static const char *const skip[] = {"zones", NULL};
  if (!must_be_object(r, v)) return false;
  line_form f = {.speed = NAN};
  int faults = r->faults->found;
  read_object(r, v, &line_type, NULL, skip, &f);
  const json_t *zones = json_object_get(v, "zones");
  size_t before = path_push(r, "zones");
  if (!zones || !json_array_size(zones)) {
    fault_here(r, zones, "must list at least one zone");
  } else if (must_be_array(r, zones, LIMIT_ZONES, "zones")) {
    f.zones.count = (int)json_array_size(zones);
    f.zones.items = take(r, (size_t)f.zones.count, sizeof(zone_form));
    for (int i = 0; f.zones.items && i < f.zones.count; i++) {
      size_t inner = path_push_index(r, (size_t)i);
      read_zone(r, json_array_get(zones, (size_t)i), d, f.blend, &f.zones.items[i]);
      path_pop(r, inner);
    }
  }
  path_pop(r, before);
  return r->faults->found == faults && !r->no_memory && zones_to_table(r, &f, out);
}

static const char *const forms[] = {"ramp", "table",  "sine",  "fire", "line",
                                    "log",  "series", "input", NULL};

static bool by_form(reader *r, const char *form, const json_t *v, dimension d, series *out) {
  if (!strcmp(form, "ramp")) return ramp(r, v, d, out);
  if (!strcmp(form, "sine")) return sine(r, v, d, out);
  if (!strcmp(form, "fire")) return fire(r, v, d, out);
  if (!strcmp(form, "line")) return line(r, v, d, out);
  return read_log_column(r, v, d, out);
}

static bool read_form(reader *r, const json_t *v, dimension d, series *out) {
  const char *form = NULL, *name;
  json_t *value;
  int keys = 0;
  json_object_foreach((json_t *)v, name, value) {
    if (!strcmp(name, "units") && json_object_get(v, "table")) continue;
    form = name;
    keys++;
  }
  if (keys != 1) {
    fault_here(r, v, "must have exactly one of ramp, table, sine, fire, line, log");
    return false;
  }
  bool known = false;
  for (int i = 0; i < 6; i++) known = known || !strcmp(forms[i], form);
  if (!known) {
    const char *near = nearest_name(form, forms);
    fault_at(r, form, NULL, "is no form of a series%s%s%s",
             near ? "; did you mean \"" : " (ramp, table, sine, fire, line, log)", near ? near : "",
             near ? "\"?" : "");
    return false;
  }
  if (!strcmp(form, "table")) {
    out->kind = SERIES_TABLE;
    return read_table_of(r, v, form, DIMENSION_TIME, d, &out->table);
  }
  size_t before = path_push(r, form);
  bool good = by_form(r, form, json_object_get(v, form), d, out);
  path_pop(r, before);
  return good;
}

static bool in_range(reader *r, const series *s, double least, double most) {
  double low, high;
  if (s->kind == SERIES_FIRE) return true;
  series_range(s, 0, LIMIT_DURATION, &low, &high);
  if (low < least) fault_here(r, NULL, "must be at least %.10g", least);
  if (high > most) fault_here(r, NULL, "must be at most %.10g", most);
  return low >= least && high <= most;
}

bool read_series(reader *r, const json_t *v, dimension d, double least, double most, series *out) {
  *out = (series){.kind = SERIES_NONE};
  bool good = json_is_object(v) ? read_form(r, v, d, out) : constant(r, v, d, out);
  if (!good) {
    *out = (series){.kind = SERIES_CONSTANT, .value = 300};
    return false;
  }
  return d == DIMENSION_TEMPERATURE || in_range(r, out, least, most);
}

static const char by_surface[] = "by_surface_temperature";

/* {"by_surface_temperature": rows, "units": ...}, strictly rising, none negative. */
static bool read_by_surface(reader *r, const json_t *v, table *out) {
  column_units units;
  const dimension d[2] = {DIMENSION_TEMPERATURE, DIMENSION_COEFFICIENT};
  const json_t *rows = json_object_get(v, by_surface);
  const char *name;
  json_t *value;
  json_object_foreach((json_t *)v, name, value) {
    if (strcmp(name, by_surface) && strcmp(name, "units"))
      fault_at(r, name, NULL, "unknown member of a coefficient");
  }
  if (!read_units(r, v, d, &units)) return false;
  size_t before = path_push(r, by_surface);
  bool good = read_rows(r, rows, &units, d, true, out);
  for (int i = 0; good && i < out->count; i++) {
    if (out->y[i] >= 0) continue;
    size_t inner = path_push_index(r, (size_t)i);
    fault_here(r, json_array_get(rows, (size_t)i), "a coefficient must be at least 0");
    good = false;
    path_pop(r, inner);
  }
  path_pop(r, before);
  return good;
}

bool read_coefficient(reader *r, const json_t *v, coefficient *out) {
  static const char *const own[] = {by_surface, NULL};
  out->by_surface_temperature = json_is_object(v) && json_object_get(v, by_surface);
  if (out->by_surface_temperature) return read_by_surface(r, v, &out->over_temperature);
  const char *only = json_is_object(v) && json_object_size(v) == 1
                         ? json_object_iter_key(json_object_iter((json_t *)v))
                         : NULL;
  if (only && nearest_name(only, own)) {
    fault_at(r, only, NULL, "unknown member; did you mean \"%s\"?", by_surface);
    return false;
  }
  return read_series(r, v, DIMENSION_COEFFICIENT, 0, 1e12, &out->over_time);
}
