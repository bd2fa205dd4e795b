/* read_material.c: properties, latent heats, enthalpy tables; materials of the library and of the
 * case. */
#include "reader.h"

#include "physics.h"

#include <math.h>
#include <string.h>

/* ---- curves ---- */

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

/* ---- enthalpy tables ---- */

/* Slopes between rows are the specific heat, jumps are latent heats at one temperature. */
static bool read_enthalpy(reader *r, const json_t *v, material *m) {
  const json_t *rows = json_is_object(v) ? json_object_get(v, "table") : NULL;
  table t;
  if (!rows || json_object_size(v) != 1u + (json_object_get(v, "units") != NULL)) {
    fault_here(r, v, "must be {\"table\": [[T, enthalpy], ...]}");
    return false;
  }
  bool good = read_table_of(r, v, "table", DIMENSION_TEMPERATURE, DIMENSION_ENTHALPY, &t);
  size_t before = path_push(r, "table");
  if (good && t.count < 2) {
    fault_here(r, NULL, "must have at least two rows");
    good = false;
  }
  piece *p = good ? take(r, (size_t)t.count, sizeof *p) : NULL;
  m->latent.items = good ? take(r, LIMIT_LATENT_HEATS, sizeof(latent_heat)) : NULL;
  int n = 0;
  for (int i = 0; p && m->latent.items && i + 1 < t.count && good; i++) {
    double rise = t.y[i + 1] - t.y[i];
    size_t inner = path_push_index(r, (size_t)i + 1);
    if (!(rise > 0)) {
      fault_here(r, json_array_get(rows, (size_t)i + 1), "enthalpy must rise with temperature");
      good = false;
    } else if (t.x[i] == t.x[i + 1] && m->latent.count == LIMIT_LATENT_HEATS) {
      fault_here(r, NULL, "has too many jumps; the limit is %d", LIMIT_LATENT_HEATS);
      good = false;
    } else if (t.x[i] == t.x[i + 1]) {
      m->latent.items[m->latent.count++] =
          (latent_heat){.heat = rise, .from = t.x[i], .to = t.x[i]};
    } else {
      p[n++] = (piece){.from = t.x[i], .to = t.x[i + 1], .poly = {rise / (t.x[i + 1] - t.x[i])}};
    }
    path_pop(r, inner);
  }
  path_pop(r, before);
  if (good && n > LIMIT_PIECES) {
    fault_here(r, NULL, "has %d rows; the limit is %d", t.count, LIMIT_PIECES);
    return false;
  }
  m->specific_heat = (curve){.count = n, .pieces = p};
  return good && n > 0;
}

/* ---- materials ---- */

/* Members that only the library's files have. */
typedef struct library_members {
  double valid_from, valid_to;
} library_members;

static const parameter valid_rows[] = {{.name = "from",
                                        .kind = VALUE_QUANTITY,
                                        .dimension = DIMENSION_TEMPERATURE,
                                        .offset = offsetof(library_members, valid_from),
                                        .flags = PARAMETER_REQUIRED,
                                        .least = 0,
                                        .most = INFINITY},
                                       {.name = "to",
                                        .kind = VALUE_QUANTITY,
                                        .dimension = DIMENSION_TEMPERATURE,
                                        .offset = offsetof(library_members, valid_to),
                                        .flags = PARAMETER_REQUIRED,
                                        .least = 0,
                                        .most = INFINITY}};
static const object_type valid_type = {
    .name = "valid", .size = sizeof(library_members), .parameters = valid_rows, .count = 2};

static const parameter extra_rows[] = {{.name = "title",
                                        .kind = VALUE_TEXT,
                                        .offset = offsetof(material, title),
                                        .flags = PARAMETER_REQUIRED},
                                       {.name = "source",
                                        .kind = VALUE_TEXT,
                                        .offset = offsetof(material, source),
                                        .flags = PARAMETER_REQUIRED},
                                       {.name = "revision",
                                        .kind = VALUE_TEXT,
                                        .offset = offsetof(material, revision),
                                        .flags = PARAMETER_REQUIRED},
                                       {.name = "valid", .kind = VALUE_OBJECT},
                                       {.name = "traits", .kind = VALUE_LIST},
                                       {.name = "note", .kind = VALUE_TEXT},
                                       {.name = "enthalpy", .kind = VALUE_CURVE}};
static const object_type extra_type = {.name = "material",
                                       .size = sizeof(material),
                                       .parameters = extra_rows,
                                       .count = COUNT_OF(extra_rows)};

/* Of the case's own materials: only enthalpy stands beside the rows. */
static const parameter enthalpy_rows[] = {{.name = "enthalpy", .kind = VALUE_CURVE}};
static const object_type enthalpy_type = {
    .name = "material", .size = sizeof(material), .parameters = enthalpy_rows, .count = 1};

static void read_traits(reader *r, const json_t *v, unsigned *out) {
  static const char *const names[] = {"metal", "heating_only", "liquid", "melts", NULL};
  for (size_t i = 0; i < json_array_size(v); i++) {
    const char *text = json_string_value(json_array_get(v, i));
    int k = 0;
    while (text && names[k] && strcmp(names[k], text)) k++;
    if (text && names[k])
      *out |= 1u << k;
    else
      fault_here(r, json_array_get(v, i), "unknown trait");
  }
}

static void range_of_curve(const curve *c, double *from, double *to) {
  if (c->count == 1 && c->pieces[0].to >= 1e6) return;
  if (c->count < 1) return;
  *from = fmax(*from, c->pieces[0].from);
  *to = fmin(*to, c->pieces[c->count - 1].to);
}

static void set_validity(reader *r, const json_t *object, material *m) {
  m->valid_from = -INFINITY;
  m->valid_to = INFINITY;
  const json_t *valid = json_object_get(object, "valid");
  if (valid && r->in_library) {
    library_members range = {-INFINITY, INFINITY};
    size_t before = path_push(r, "valid");
    if (must_be_object(r, valid)) read_object(r, valid, &valid_type, NULL, NULL, &range);
    path_pop(r, before);
    m->valid_from = range.valid_from;
    m->valid_to = range.valid_to;
    return;
  }
  range_of_curve(&m->conductivity, &m->valid_from, &m->valid_to);
  range_of_curve(&m->density, &m->valid_from, &m->valid_to);
  range_of_curve(&m->specific_heat, &m->valid_from, &m->valid_to);
}

static void check_latent(reader *r, const json_t *list, material *m) {
  for (int i = 0; i < m->latent.count; i++) {
    const latent_heat *l = &m->latent.items[i];
    size_t before = path_push_index(r, (size_t)i);
    if (isfinite(l->from) && isfinite(l->to) && l->to < l->from)
      fault_at(r, "to", json_object_get(json_array_get(list, (size_t)i), "to"),
               "must not be below from");
    path_pop(r, before);
  }
}

bool read_material(reader *r, const char *name, const json_t *object, material *out) {
  static const char *const skip[] = {"valid", "traits", "note", "enthalpy", "specific_heat", NULL};
  memset(out, 0, sizeof *out);
  out->name = arena_text(r->memory, name, strlen(name));
  out->source = r->in_library ? NULL : "given in the case";
  out->title = out->name;
  out->revision = r->in_library ? NULL : "";
  if (!out->name) r->no_memory = true;
  if (!must_be_object(r, object)) return false;
  int faults = r->faults->found;
  read_object(r, object, &material_type, r->in_library ? &extra_type : &enthalpy_type, skip, out);
  const json_t *heat = json_object_get(object, "specific_heat"),
               *enthalpy = json_object_get(object, "enthalpy");
  const json_t *latent = json_object_get(object, "latent_heat");
  if (!heat == !enthalpy) fault_here(r, NULL, "must have either specific_heat or enthalpy");
  if (enthalpy && latent) fault_at(r, "latent_heat", NULL, "stands in the enthalpy table already");
  size_t before = path_push(r, heat ? "specific_heat" : "enthalpy");
  if (heat)
    read_curve(r, heat, DIMENSION_SPECIFIC_HEAT, true, &out->specific_heat);
  else if (enthalpy)
    read_enthalpy(r, enthalpy, out);
  path_pop(r, before);
  before = path_push(r, "latent_heat");
  if (latent && !enthalpy) check_latent(r, latent, out);
  path_pop(r, before);
  before = path_push(r, "traits");
  if (r->in_library) read_traits(r, json_object_get(object, "traits"), &out->traits);
  path_pop(r, before);
  set_validity(r, object, out);
  return r->faults->found == faults && !r->no_memory;
}

/* ---- names ---- */

static int already_used(const heat_case *c, const char *name) {
  for (int i = 0; i < c->materials.count; i++)
    if (!strcmp(c->materials.items[i].name, name)) return i;
  return -1;
}

static void unknown_material(reader *r, const json_t *v, const char *name) {
  const char *near = nearest_name(name, library_names(r->library));
  const json_t *own = json_object_get(r->root, "materials");
  const char *key;
  json_t *value;
  const char *own_names[LIMIT_MATERIALS + 1];
  int count = 0;
  json_object_foreach((json_t *)own, key, value) if (count < LIMIT_MATERIALS) own_names[count++] =
      key;
  own_names[count] = NULL;
  const char *near_own = nearest_name(name, own_names);
  if (near_own) near = near_own;
  fault_here(r, v, "unknown material%s%s%s", near ? "; did you mean \"" : "", near ? near : "",
             near ? "\"?" : "");
}

int read_material_name(reader *r, const json_t *v) {
  heat_case *c = r->the_case;
  if (!must_be_text(r, v)) return -1;
  const char *name = json_string_value(v);
  if (!strcmp(name, "void")) {
    fault_here(r, v, "\"void\" is not offered by this version for this shape");
    return -1;
  }
  int used = already_used(c, name);
  if (used >= 0) return used;
  if (!c->materials.items && !(c->materials.items = take(r, LIMIT_MATERIALS, sizeof(material))))
    return -1;
  if (c->materials.count == LIMIT_MATERIALS) {
    fault_here(r, v, "more than %d materials", LIMIT_MATERIALS);
    return -1;
  }
  const json_t *own = json_object_get(json_object_get(r->root, "materials"), name);
  const material *known = own ? NULL : library_find(r->library, name);
  if (known) {
    c->materials.items[c->materials.count] = *known;
    return c->materials.count++;
  }
  if (!own) {
    unknown_material(r, v, name);
    return -1;
  }
  char path[LONGEST_PATH];
  size_t length = r->length;
  memcpy(path, r->path, sizeof path);
  path_pop(r, 0);
  path_push(r, "materials");
  path_push(r, name);
  read_material(r, name, own, &c->materials.items[c->materials.count]);
  memcpy(r->path, path, sizeof path);
  r->length = length;
  return c->materials.count++;
}
