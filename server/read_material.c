/* read_material.c: latent heats, enthalpy tables; materials of the library and of the case. */
#include "reader.h"

#include <math.h>
#include <string.h>

/* ---- enthalpy tables ---- */

/* The step from row i to the next: a slope is specific heat, a jump a latent heat at one
   temperature. */
static bool enthalpy_step(reader *r, const table *t, int i, material *m, piece *pieces) {
  double rise = t->y[i + 1] - t->y[i], wide = t->x[i + 1] - t->x[i];
  if (!(rise > 0)) {
    fault_here(r, NULL, "enthalpy must rise with temperature");
    return false;
  }
  if (wide > 0) {
    pieces[m->specific_heat.count++] =
        (piece){.from = t->x[i], .to = t->x[i + 1], .poly = {rise / wide}};
    return true;
  }
  if (m->latent.count == LIMIT_LATENT_HEATS) {
    fault_here(r, NULL, "has too many jumps; the limit is %d", LIMIT_LATENT_HEATS);
    return false;
  }
  m->latent.items[m->latent.count++] = (latent_heat){.heat = rise, .from = t->x[i], .to = t->x[i]};
  return true;
}

static void enthalpy_steps(reader *r, const table *t, material *m) {
  piece *pieces = take(r, (size_t)t->count, sizeof *pieces);
  m->latent.items = take(r, LIMIT_LATENT_HEATS, sizeof(latent_heat));
  m->specific_heat = (curve){.count = 0, .pieces = pieces};
  bool good = pieces && m->latent.items;
  for (int i = 0; good && i + 1 < t->count; i++) {
    size_t before = path_push_index(r, (size_t)i + 1);
    good = enthalpy_step(r, t, i, m, pieces);
    path_pop(r, before);
  }
}

static void read_enthalpy(reader *r, const json_t *v, material *m) {
  table t;
  size_t members = json_object_get(v, "units") ? 2 : 1;
  if (!json_object_get(v, "table") || json_object_size(v) != members) {
    fault_here(r, v, "must be {\"table\": [[T, enthalpy], ...]}");
    return;
  }
  if (!read_table_of(r, v, "table", DIMENSION_TEMPERATURE, DIMENSION_ENTHALPY, &t)) return;
  size_t before = path_push(r, "table");
  if (t.count < 2)
    fault_here(r, NULL, "must have at least two rows");
  else if (t.count > LIMIT_PIECES)
    fault_here(r, NULL, "has %d rows; the limit is %d", t.count, LIMIT_PIECES);
  else
    enthalpy_steps(r, &t, m);
  path_pop(r, before);
}

/* ---- materials ---- */

/* Stands beside the rows because it takes the place of two of them. */
static const parameter enthalpy_rows[] = {{.name = "enthalpy", .kind = VALUE_CURVE}};
static const object_type enthalpy_type = {
    .name = "material", .size = sizeof(material), .parameters = enthalpy_rows, .count = 1};

static void range_of_curve(const curve *c, double *from, double *to) {
  if (c->count == 1 && c->pieces[0].to >= 1e6) return;
  if (c->count < 1) return;
  *from = fmax(*from, c->pieces[0].from);
  *to = fmin(*to, c->pieces[c->count - 1].to);
}

/* The range given, else that of the tables. */
static void set_validity(reader *r, const json_t *object, material *m) {
  if (json_object_get(object, "valid")) {
    if (m->valid_from >= m->valid_to) fault_at(r, "valid", NULL, "must rise: from is not below to");
    return;
  }
  m->valid_from = -INFINITY;
  m->valid_to = INFINITY;
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

static void read_heat(reader *r, const json_t *object, material *m) {
  const json_t *heat = json_object_get(object, "specific_heat"),
               *enthalpy = json_object_get(object, "enthalpy"),
               *latent = json_object_get(object, "latent_heat");
  if (!heat == !enthalpy) fault_here(r, NULL, "must have either specific_heat or enthalpy");
  if (enthalpy && latent) fault_at(r, "latent_heat", NULL, "stands in the enthalpy table already");
  size_t before = path_push(r, heat ? "specific_heat" : "enthalpy");
  if (heat)
    read_curve(r, heat, DIMENSION_SPECIFIC_HEAT, true, &m->specific_heat);
  else if (enthalpy)
    read_enthalpy(r, enthalpy, m);
  path_pop(r, before);
  before = path_push(r, "latent_heat");
  if (latent && !enthalpy) check_latent(r, latent, m);
  path_pop(r, before);
}

/* A file of the library names its source; a case's own material is the caller's. */
static void set_record(reader *r, material *m) {
  if (r->in_library && (!m->title || !m->source || !m->revision))
    fault_here(r, NULL, "must have title, source and revision");
  if (!m->title) m->title = m->name;
  if (!m->source) m->source = "given in the case";
  if (!m->revision) m->revision = "";
}

bool read_material(reader *r, const char *name, const json_t *object, material *out) {
  static const char *const skip[] = {"enthalpy", "specific_heat", NULL};
  memset(out, 0, sizeof *out);
  out->name = arena_text(r->memory, name, strlen(name));
  if (!out->name) r->no_memory = true;
  int faults = r->faults->found;
  if (must_be_object(r, object)) {
    read_object(r, object, &material_type, &enthalpy_type, skip, out);
    read_heat(r, object, out);
    set_validity(r, object, out);
  }
  set_record(r, out);
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
