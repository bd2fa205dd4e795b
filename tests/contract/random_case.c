#include "random_case.h"
#include "chance.h"
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

enum { MOST_LAYERS = 5 };

typedef struct maker {
  chance c;
  json_t *document, *materials, *stages;
  const char *first, *last; /* faces */
  bool round, hollow, solid_round;
  int layers;
  double thickness[MOST_LAYERS], conductivity[MOST_LAYERS],
      capacity[MOST_LAYERS]; /* capacity: J/(m3.K) */
  double biot, h;            /* of the outermost face; W/(m2.K) */
  double time;               /* s: what heating through takes */
  double total;              /* s: of all stages at most */
  double hot, cold;          /* degC */
  char *about;
  size_t size;
} maker;

static void tell(maker *m, const char *format, ...) __attribute__((format(printf, 2, 3)));

static void tell(maker *m, const char *format, ...) {
  size_t used = strlen(m->about);
  va_list arguments;
  va_start(arguments, format);
  vsnprintf(m->about + used, m->size - used, format, arguments);
  va_end(arguments);
}

/* ---- materials ---- */

/* A value that drifts by up to `drift` of itself over the range of temperatures. */
static json_t *drifting(maker *m, double value, double drift) {
  if (chance_is(&m->c, 0.4)) return json_real(value);
  double other = value * (1 + chance_between(&m->c, -drift, drift));
  if (chance_is(&m->c, 0.5))
    return json_pack("{s:[[f,f],[f,f]]}", "table", 0., value, 1300., other);
  double middle = value * (1 + chance_between(&m->c, -drift, drift));
  return json_pack("{s:[[f,f],[f,f],[f,f]]}", "table", 0., value, chance_between(&m->c, 200, 900),
                   middle, 1300., other);
}

static json_t *latent_heat(maker *m) {
  bool narrow = chance_is(&m->c, 0.3);
  double from = chance_between(&m->c, 200, 900),
         range = narrow ? chance_between(&m->c, 1, 5) : chance_between(&m->c, 20, 90);
  tell(m, ", latent over %.0f K", range);
  return json_pack("[{s:f,s:f,s:f}]", "heat", chance_log(&m->c, 5e4, 4e5), "from", from, "to",
                   from + range);
}

static const char *own_material(maker *m, int layer, char *name, size_t size) {
  double k = chance_log(&m->c, 0.1, 200), density = chance_log(&m->c, 300, 9000),
         heat = chance_log(&m->c, 400, 1500);
  json_t *made = json_pack("{s:o,s:f,s:o}", "conductivity", drifting(m, k, 0.5), "density", density,
                           "specific_heat", drifting(m, heat, 0.4));
  if (chance_is(&m->c, 0.2)) json_object_set_new(made, "latent_heat", latent_heat(m));
  m->conductivity[layer] = k;
  m->capacity[layer] = density * heat;
  snprintf(name, size, "own_%d", layer + 1);
  json_object_set_new(m->materials, name, made);
  return name;
}

static const char *any_material(maker *m, int layer, char *name, size_t size) {
  static const struct {
    const char *name;
    double k, capacity;
  } library[] = {{"carbon_steel", 35, 5e6},
                 {"stainless_steel", 20, 4.5e6},
                 {"alloy_600", 20, 4.5e6},
                 {"fireclay_brick", 1.2, 2e6}};
  if (!chance_is(&m->c, 0.3)) return own_material(m, layer, name, size);
  int i = chance_count(&m->c, 0, 3);
  m->conductivity[layer] = library[i].k;
  m->capacity[layer] = library[i].capacity;
  return library[i].name;
}

/* ---- part ---- */

static void make_layers(maker *m, json_t *part) {
  char name[24];
  json_t *layers = json_array();
  for (int i = 0; i < m->layers; i++) {
    const char *material = any_material(m, i, name, sizeof name);
    m->thickness[i] = chance_log(&m->c, 0.004, m->layers > 1 ? 0.15 : 0.3);
    json_t *layer = json_pack("{s:s,s:f}", "material", material, "thickness", m->thickness[i]);
    if (i + 1 < m->layers && chance_is(&m->c, 0.5))
      json_object_set_new(
          layer, "contact",
          json_real(chance_log(&m->c, 0.01, 1) * m->thickness[i] / m->conductivity[i]));
    json_array_append_new(layers, layer);
  }
  json_object_set_new(part, "layers", layers);
}

static void make_generation(maker *m, json_t *part) {
  if (!chance_is(&m->c, 0.12)) return;
  int i = chance_count(&m->c, 0, m->layers - 1);
  double rise = chance_between(&m->c, 20, 150);
  double g = rise / m->time * m->capacity[i];
  json_object_set_new(json_array_get(json_object_get(part, "layers"), (size_t)i), "heat_generation",
                      json_real(g));
  tell(m, ", generation");
}

static void make_part(maker *m) {
  static const char *const shapes[] = {"plate", "cylinder", "sphere"};
  int shape = chance_count(&m->c, 0, 2);
  m->round = shape > 0;
  m->hollow = m->round && chance_is(&m->c, 0.4);
  m->solid_round = m->round && !m->hollow;
  m->first = m->round ? "inner" : "front";
  m->last = m->round ? "outer" : "back";
  m->layers = chance_is(&m->c, 0.5) ? 1 : chance_count(&m->c, 2, MOST_LAYERS);
  tell(m, "%s%s, %d layers", m->hollow ? "hollow " : "", shapes[shape], m->layers);
  json_t *part = json_pack("{s:s}", "shape", shapes[shape]);
  json_object_set_new(m->document, "part", part);
  if (m->hollow) json_object_set_new(part, "bore", json_real(chance_log(&m->c, 0.01, 1)));
  make_layers(m, part);
  int outermost = m->layers - 1;
  double resistance = 0, root = 0, capacity = 0;
  for (int i = 0; i < m->layers; i++) {
    resistance += m->thickness[i] / m->conductivity[i];
    root += m->thickness[i] * sqrt(m->capacity[i] / m->conductivity[i]);
    capacity += m->thickness[i] * m->capacity[i];
  }
  m->biot = chance_log(&m->c, 0.01, 500);
  m->h = fmin(fmax(m->biot * m->conductivity[outermost] / m->thickness[outermost], 1), 3e4);
  m->time = fmax(root * root, capacity / m->h) * chance_log(&m->c, 0.1, 1);
  tell(m, ", Bi %.3g", m->h * resistance);
  make_generation(m, part);
}

/* ---- stages ---- */

static json_t *medium(maker *m, double from, double to, double lasts) {
  switch (chance_count(&m->c, 0, 2)) {
  case 0: return json_real(to);
  case 1:
    return json_pack("{s:[[f,f],[f,f]]}", "table", 0., from,
                     lasts * chance_between(&m->c, 0.2, 0.8), to);
  default:
    return json_pack("{s:[[f,f],[f,f],[f,f]]}", "table", 0., from, lasts * 0.3, 0.5 * (from + to),
                     lasts * 0.3, to);
  }
}

static json_t *heating(maker *m, double lasts) {
  if (chance_is(&m->c, 0.12)) {
    tell(m, ", prescribed");
    return json_pack("{s:o}", "temperature", medium(m, m->cold, m->hot, lasts));
  }
  if (chance_is(&m->c, 0.6)) {
    json_t *furnace =
        json_pack("{s:o,s:f}", "temperature", medium(m, m->cold, m->hot, lasts), "h", m->h);
    json_object_set_new(furnace, "emissivity", json_real(chance_between(&m->c, 0.2, 0.95)));
    return json_pack("{s:o}", "furnace", furnace);
  }
  return json_pack("{s:{s:f,s:o}}", "convection", "h", m->h, "medium",
                   medium(m, m->cold, m->hot, lasts));
}

static json_t *quenching(maker *m) {
  double h = fmin(m->h * chance_log(&m->c, 1, 20), 3e4), bath = chance_between(&m->c, 20, 80);
  if (chance_is(&m->c, 0.4))
    return json_pack("{s:{s:f,s:f}}", "convection", "h", h, "medium", bath);
  json_t *table =
      json_pack("[[f,f],[f,f],[f,f],[f,f]]", bath, 0.2 * h, 200., 0.6 * h, 500., h, 900., 0.3 * h);
  tell(m, ", h by surface temperature");
  return json_pack("{s:{s:{s:o},s:f}}", "convection", "h", "by_surface_temperature", table,
                   "medium", bath);
}

/* The condition on the outside; the other face takes it too, or a weaker one, or none. */
static json_t *faces(maker *m, json_t *outside) {
  json_t *made = json_pack("{s:o}", m->last, outside);
  if (m->solid_round) return made;
  if (chance_is(&m->c, 0.4))
    json_object_set(made, m->first, outside);
  else if (chance_is(&m->c, 0.4))
    json_object_set_new(made, m->first,
                        json_pack("{s:{s:f,s:f}}", "convection", "h", fmax(0.2 * m->h, 1), "medium",
                                  chance_between(&m->c, 20, 200)));
  else
    json_object_set_new(made, m->first, json_pack("{s:b}", "insulated", 1));
  return made;
}

static void add_stage(maker *m, const char *name, json_t *outside, double lasts, bool heats) {
  json_t *stage = json_pack("{s:s,s:o}", "name", name, "faces", faces(m, outside));
  if (chance_is(&m->c, 0.3)) {
    double share = chance_between(&m->c, 0.3, 0.9),
           level = heats ? m->cold + share * (m->hot - m->cold) : m->hot - share * (m->hot - 80);
    json_object_set_new(stage, "until",
                        json_pack("{s:s,s:f}", "of", heats ? "coldest" : "hottest",
                                  heats ? "rises_to" : "falls_to", level));
    json_object_set_new(stage, "time_limit", json_real(lasts));
  } else {
    json_object_set_new(stage, "lasts", json_real(lasts));
  }
  m->total += lasts;
  json_array_append_new(m->stages, stage);
}

static void make_stages(maker *m) {
  bool quenches = chance_is(&m->c, 0.45);
  m->stages = json_array();
  json_object_set_new(m->document, "stages", m->stages);
  if (quenches && chance_is(&m->c, 0.5)) {
    json_object_set_new(m->document, "start", json_real(m->hot));
  } else {
    json_object_set_new(m->document, "start", json_real(m->cold));
    double lasts = m->time * chance_log(&m->c, 0.3, 3);
    add_stage(m, "heat", heating(m, lasts), lasts, true);
  }
  if (!quenches) return;
  tell(m, ", quench");
  add_stage(m, "quench", quenching(m), m->time * chance_log(&m->c, 0.1, 1), false);
}

/* A mould and what is poured into it: layers with starts of their own. */
static void make_starts(maker *m) {
  if (m->layers < 2 || !chance_is(&m->c, 0.2)) return;
  json_t *layers = json_object_get(json_object_get(m->document, "part"), "layers");
  for (size_t i = 0; i < json_array_size(layers); i++)
    json_object_set_new(json_array_get(layers, i), "start", json_real(i == 0 ? m->hot : m->cold));
  tell(m, ", layers at their own temperature");
}

static void make_output(maker *m) {
  json_t *points = json_array(), *of = json_pack("[s,s,s,s,s,s]", "outside", "coldest", "hottest",
                                                 "mean", "section_difference", "mid_wall");
  json_array_append_new(points,
                        json_pack("{s:s,s:{s:s}}", "name", "outside", "at", "face", m->last));
  if (!m->solid_round) {
    json_array_append_new(points,
                          json_pack("{s:s,s:{s:s}}", "name", "inside", "at", "face", m->first));
    json_array_append_new(of, json_string("inside"));
  }
  json_array_append_new(points, json_pack("{s:s,s:{s:s,s:f}}", "name", "near", "at", "face",
                                          m->last, "depth", 0.2 * m->thickness[m->layers - 1]));
  json_array_append_new(of, json_string("near"));
  json_object_set_new(m->document, "points", points);
  json_object_set_new(m->document, "output",
                      json_pack("{s:{s:f,s:o}}", "history", "every", m->total / 60, "of", of));
}

json_t *random_case(uint64_t seed, char *about, size_t size) {
  maker m = {.c = chance_of(seed),
             .document = json_object(),
             .materials = json_object(),
             .about = about,
             .size = size};
  about[0] = 0;
  m.cold = chance_between(&m.c, 15, 30);
  m.hot = chance_between(&m.c, 150, 1200);
  make_part(&m);
  make_stages(&m);
  make_starts(&m);
  make_output(&m);
  if (json_object_size(m.materials)) json_object_set(m.document, "materials", m.materials);
  json_decref(m.materials);
  return m.document;
}
