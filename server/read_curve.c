/* read_curve.c: properties against temperature: a number, a table or pieces of formulas. */
#include "reader.h"

#include "physics.h"

#include <math.h>
#include <string.h>

static bool one_piece(reader *r, double value, curve *out) {
  piece *p = take(r, 1, sizeof *p);
  if (!p) return false;
  *p = (piece){.from = 0, .to = 1e6, .poly = {value}};
  *out = (curve){.count = 1, .pieces = p};
  return true;
}

/* Linear pieces between the rows of a table; two rows at one temperature are a jump. */
static bool table_to_pieces(reader *r, const table *t, curve *out) {
  if (t->count == 1) return one_piece(r, t->y[0], out);
  piece *p = take(r, (size_t)t->count, sizeof *p);
  if (!p) return false;
  int n = 0;
  for (int i = 0; i + 1 < t->count; i++) {
    if (t->x[i] == t->x[i + 1]) continue;
    double slope = (t->y[i + 1] - t->y[i]) / (t->x[i + 1] - t->x[i]);
    p[n++] = (piece){.from = t->x[i],
                     .to = t->x[i + 1],
                     .poly = {t->y[i] - slope * (t->x[i] - ZERO_CELSIUS), slope}};
  }
  *out = (curve){.count = n, .pieces = p};
  return n > 0;
}

static bool check_rows(reader *r, const table *t, const json_t *rows, bool positive) {
  if (t->count > LIMIT_PIECES) {
    fault_here(r, NULL, "has %d rows; the limit is %d", t->count, LIMIT_PIECES);
    return false;
  }
  for (int i = 0; positive && i < t->count; i++) {
    if (t->y[i] > 0) continue;
    size_t before = path_push_index(r, (size_t)i);
    fault_here(r, json_array_get(rows, (size_t)i), "must be greater than 0");
    path_pop(r, before);
    return false;
  }
  return true;
}

static bool tabled(reader *r, const json_t *object, dimension d, bool positive, curve *out) {
  table t;
  if (!read_table_of(r, object, "table", DIMENSION_TEMPERATURE, d, &t)) return false;
  size_t before = path_push(r, "table");
  bool good = check_rows(r, &t, json_object_get(object, "table"), positive);
  path_pop(r, before);
  return good && table_to_pieces(r, &t, out);
}

static bool read_piece(reader *r, const json_t *v, piece *p) {
  static const parameter rows[] = {{.name = "from",
                                    .kind = VALUE_QUANTITY,
                                    .dimension = DIMENSION_TEMPERATURE,
                                    .offset = offsetof(piece, from),
                                    .flags = PARAMETER_REQUIRED,
                                    .least = 0,
                                    .most = INFINITY,
                                    .fallback = NAN},
                                   {.name = "to",
                                    .kind = VALUE_QUANTITY,
                                    .dimension = DIMENSION_TEMPERATURE,
                                    .offset = offsetof(piece, to),
                                    .flags = PARAMETER_REQUIRED,
                                    .least = 0,
                                    .most = INFINITY,
                                    .fallback = NAN},
                                   {.name = "poly", .kind = VALUE_LIST},
                                   {.name = "rational",
                                    .kind = VALUE_QUANTITY,
                                    .dimension = DIMENSION_NUMBER,
                                    .offset = offsetof(piece, rational),
                                    .least = -INFINITY,
                                    .most = INFINITY,
                                    .fallback = 0},
                                   {.name = "pole",
                                    .kind = VALUE_QUANTITY,
                                    .dimension = DIMENSION_NUMBER,
                                    .offset = offsetof(piece, pole),
                                    .least = -INFINITY,
                                    .most = INFINITY,
                                    .fallback = 0}};
  static const object_type type = {
      .name = "piece", .size = sizeof(piece), .parameters = rows, .count = COUNT_OF(rows)};
  static const char *const skip[] = {"poly", NULL};
  if (!must_be_object(r, v)) return false;
  int faults = r->faults->found;
  read_object(r, v, &type, NULL, skip, p);
  const json_t *poly = json_object_get(v, "poly");
  if (!json_is_array(poly) || json_array_size(poly) < 1 || json_array_size(poly) > 5) {
    fault_at(r, "poly", poly, "must be one to five coefficients, in degC");
    return false;
  }
  for (size_t i = 0; i < json_array_size(poly); i++) {
    if (!json_is_number(json_array_get(poly, i)))
      fault_at(r, "poly", json_array_get(poly, i), "must be numbers");
    p->poly[i] = json_number_value(json_array_get(poly, i));
  }
  if (p->from >= p->to) fault_at(r, "to", json_object_get(v, "to"), "must be above from");
  bool pole_inside =
      p->rational != 0 && p->pole + ZERO_CELSIUS >= p->from && p->pole + ZERO_CELSIUS <= p->to;
  if (pole_inside) fault_at(r, "pole", json_object_get(v, "pole"), "must lie outside of the piece");
  return r->faults->found == faults;
}

static bool pieced(reader *r, const json_t *v, curve *out) {
  if (!must_be_array(r, v, LIMIT_PIECES, "pieces")) return false;
  size_t count = json_array_size(v);
  piece *p = take(r, count, sizeof *p);
  if (!count) fault_here(r, NULL, "must have at least one piece");
  if (!p || !count) return false;
  bool good = true;
  for (size_t i = 0; i < count; i++) {
    size_t before = path_push_index(r, i);
    bool fine = read_piece(r, json_array_get(v, i), &p[i]);
    if (fine && good && i && fabs(p[i].from - p[i - 1].to) > 1e-9) {
      fault_here(r, NULL, "must begin where the piece before ends");
      fine = false;
    }
    good = good && fine;
    path_pop(r, before);
  }
  for (size_t i = 1; good && i < count; i++) p[i].from = p[i - 1].to;
  *out = (curve){.count = (int)count, .pieces = p};
  return good;
}

static bool all_positive(reader *r, const curve *c) {
  for (int i = 0; i < c->count; i++)
    for (int k = 0; k <= 32; k++) {
      const piece *p = &c->pieces[i];
      curve alone = {.count = 1, .pieces = p};
      double t = p->from + (p->to - p->from) * k / 32;
      if (curve_value(&alone, t) > 0) continue;
      fault_here(r, NULL, "must be greater than 0; at %.6g degC it is %.6g", t - ZERO_CELSIUS,
                 curve_value(&alone, t));
      return false;
    }
  return true;
}

static bool read_shape_of_curve(reader *r, const json_t *v, dimension d, bool positive,
                                curve *out) {
  static const char *const names[] = {"table", "pieces", NULL};
  static const parameter row = {.flags = PARAMETER_ABOVE, .least = 0, .most = INFINITY};
  static const parameter any = {.least = -INFINITY, .most = INFINITY};
  if (!json_is_object(v)) {
    double value;
    return read_ranged(r, v, positive ? &row : &any, d, &value) && one_piece(r, value, out);
  }
  const char *only = json_object_iter_key(json_object_iter((json_t *)v));
  bool units = json_object_get(v, "units") != NULL;
  if (json_object_get(v, "table") && json_object_size(v) == 1u + units)
    return tabled(r, v, d, positive, out);
  if (json_object_get(v, "pieces") && json_object_size(v) == 1) {
    size_t before = path_push(r, "pieces");
    bool good = pieced(r, json_object_get(v, "pieces"), out);
    path_pop(r, before);
    return good;
  }
  const char *near = only ? nearest_name(only, names) : NULL;
  fault_here(r, v, "must be a number, {\"table\": [[T, value], ...]} or {\"pieces\": [...]}%s%s%s",
             near ? "; did you mean \"" : "", near ? near : "", near ? "\"?" : "");
  return false;
}

bool read_curve(reader *r, const json_t *v, dimension d, bool positive, curve *out) {
  *out = (curve){0};
  if (read_shape_of_curve(r, v, d, positive, out) && (!positive || all_positive(r, out)))
    return true;
  one_piece(r, 1, out);
  return false;
}
