/* read_part.c: shape, sizes, layers; points and locations. */
#include "reader.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#define SAME_SIZE 1e-9 /* relative: a thickness given beside layers must be their sum */

/* ---- shape ---- */

static const shape *read_shape(reader *r, const json_t *v) {
  size_t before = path_push(r, "shape");
  const shape *s = NULL;
  if (!v)
    fault_here(r, NULL, "is missing: plate, cylinder or sphere");
  else if (must_be_text(r, v) && !(s = shape_named(json_string_value(v)))) {
    const char *names[16], *planned = NULL;
    int n = 0;
    for (int i = 0; shapes[i]; i++) names[n++] = shapes[i]->name;
    names[n] = NULL;
    for (int i = 0; shapes_planned[i]; i++)
      if (!strcmp(shapes_planned[i], json_string_value(v))) planned = shapes_planned[i];
    const char *near = nearest_name(json_string_value(v), names);
    if (planned)
      fault_here(r, v, "is not offered by this version; plate, cylinder and sphere are");
    else
      fault_here(r, v, "unknown shape (plate, cylinder, sphere)%s%s%s",
                 near ? "; did you mean \"" : "", near ? near : "", near ? "\"?" : "");
    if (near) s = shape_named(near); /* the rest is judged by what was meant */
  }
  path_pop(r, before);
  return s;
}

/* ---- layers ---- */

static void name_layers(reader *r, part *p) {
  for (int i = 0; i < p->layers.count; i++) {
    char name[24];
    if (p->layers.items[i].name) continue;
    snprintf(name, sizeof name, "layer_%d", i + 1);
    p->layers.items[i].name = arena_text(r->memory, name, strlen(name));
    if (!p->layers.items[i].name) r->no_memory = true;
  }
}

/* The size that layers stand in place of: thickness, or diameter. */
static const char *layered_size(const part *p) {
  return p->shape->sizes.parameters[0].name;
}

static void compare_sizes(reader *r, part *p) {
  if (!isfinite(p->sizes[0])) return;
  double origin, sum = p->shape->extent(p, &origin),
                 whole = p->shape->power ? 2 * (origin + sum) : sum;
  if (!(sum > 0) || fabs(whole - p->sizes[0]) <= SAME_SIZE * p->sizes[0]) return;
  fault_at(r, layered_size(p), NULL,
           "the layers are %s than the part: together they make a %s of %.9g m, not %.9g m",
           whole > p->sizes[0] ? "thicker" : "thinner", layered_size(p), whole, p->sizes[0]);
}

static void single_layer(reader *r, part *p, const json_t *v) {
  double origin;
  if (!json_object_get(v, "material"))
    fault_at(r, "material", NULL, "is missing: a material's name, or give layers");
  if (!json_object_get(v, layered_size(p))) {
    fault_at(r, layered_size(p), NULL, "is missing");
    return;
  }
  p->layers.items = take(r, 1, sizeof(layer));
  if (!p->layers.items) return;
  double thickness = p->shape->extent(p, &origin);
  if (isfinite(thickness) && !(thickness > 0)) {
    fault_at(r, "bore", json_object_get(v, "bore"), "must be smaller than the diameter");
    thickness = NAN;
  }
  p->layers.count = 1;
  p->layers.items[0] = (layer){.material = p->material,
                               .thickness = thickness,
                               .heat_generation = p->heat_generation,
                               .start = NAN};
}

static void check_layers(reader *r, part *p, const json_t *v) {
  if (json_is_array(json_object_get(v, "layers")) && !json_array_size(json_object_get(v, "layers")))
    fault_at(r, "layers", NULL, "must have at least one layer");
  for (int i = 0; i < 2; i++) {
    const char *name = i ? "heat_generation" : "material";
    if (json_object_get(v, name))
      fault_at(r, name, NULL, "stands in each layer where there are layers");
  }
  const json_t *list = json_object_get(v, "layers");
  size_t last = json_array_size(list);
  if (last && json_object_get(json_array_get(list, last - 1), "contact")) {
    size_t before = path_push(r, "layers");
    path_push_index(r, last - 1);
    fault_at(r, "contact", NULL, "there is no next layer");
    path_pop(r, before);
  }
  p->material = -1;
  compare_sizes(r, p);
}

void read_part(reader *r, const json_t *v) {
  static const char *const skip[] = {"shape", NULL};
  part *p = &r->the_case->part;
  if (!must_be_object(r, v)) return;
  p->shape = read_shape(r, json_object_get(v, "shape"));
  for (int i = 0; i < MOST_SIZES; i++) p->sizes[i] = NAN;
  if (!p->shape) {
    p->shape = shapes[0]; /* names of its faces may be wrong: what follows is told only where it
                             stands alone */
    r->shapeless = true;
    return;
  }
  read_object(r, v, &part_type, &p->shape->sizes, skip, p);
  if (json_object_get(v, "layers"))
    check_layers(r, p, v);
  else
    single_layer(r, p, v);
  name_layers(r, p);
}

/* ---- points ---- */

/* Radius or depth of a location to its layer: at an interface the outer one unless `side` says
 * otherwise. */
static bool put_in_layer(reader *r, double at, const json_t *side, location *out) {
  const part *p = &r->the_case->part;
  double origin, extent = p->shape->extent(p, &origin), inner = origin,
                 close = 1e-9 * (origin + extent);
  if (!isfinite(extent)) return false;
  if (at < origin - close || at > origin + extent + close) {
    fault_here(r, NULL, "lies outside of the part: %s goes from %.6g to %.6g m, not to %.6g m",
               p->shape->coordinates[0], origin, origin + extent, at);
    return false;
  }
  int towards = -1;
  if (side) {
    size_t before = path_push(r, "side");
    towards = read_face_name(r, side);
    path_pop(r, before);
    if (towards < 0) return false;
  }
  out->coordinate[0] = fmin(fmax(at, origin), origin + extent);
  for (int i = 0; i < p->layers.count; i++) {
    double outer = inner + p->layers.items[i].thickness;
    bool on_border = fabs(at - outer) <= close && i + 1 < p->layers.count;
    if (on_border && towards == 0) {
      out->layer = i;
      out->coordinate[0] = outer;
      return true;
    }
    if (at < outer - close || i + 1 == p->layers.count) {
      out->layer = i;
      return true;
    }
    inner = outer;
  }
  return true;
}

static bool from_face(reader *r, const json_t *v, location *out) {
  const part *p = &r->the_case->part;
  double origin, extent = p->shape->extent(p, &origin), depth = 0;
  const char *name;
  json_t *value;
  bool good = true;
  json_object_foreach((json_t *)v, name, value) if (strcmp(name, "face") && strcmp(name, "depth") &&
                                                    strcmp(name, "side")) {
    static const char *const members[] = {"face", "depth", "side", NULL};
    const char *near = nearest_name(name, members);
    fault_at(r, name, NULL, "unknown member of a location%s%s%s", near ? "; did you mean \"" : "",
             near ? near : "", near ? "\"?" : "");
    good = false;
  }
  size_t before = path_push(r, "face");
  int face = read_face_name(r, json_object_get(v, "face"));
  path_pop(r, before);
  const json_t *d = json_object_get(v, "depth");
  before = path_push(r, "depth");
  if (d && read_quantity(r, d, DIMENSION_LENGTH, &depth) && depth < 0) {
    fault_here(r, d, "must be at least 0");
    good = false;
  }
  path_pop(r, before);
  if (face < 0 || !good || !isfinite(extent)) return false;
  return put_in_layer(r, face ? origin + extent - depth : origin + depth,
                      json_object_get(v, "side"), out);
}

static bool by_coordinate(reader *r, const json_t *v, location *out) {
  const part *p = &r->the_case->part;
  const char *coordinate = p->shape->coordinates[0], *name;
  json_t *value;
  bool good = true;
  double at = NAN;
  json_object_foreach((json_t *)v, name,
                      value) if (strcmp(name, coordinate) && strcmp(name, "side")) {
    fault_at(r, name, NULL, "unknown member of a location: a %s has the coordinate %s",
             p->shape->name, coordinate);
    good = false;
  }
  if (!json_object_get(v, coordinate)) {
    if (good)
      fault_here(r, v,
                 "must be \"center\", \"mid_wall\", {\"face\": F, \"depth\": d} or {\"%s\": ...}",
                 coordinate);
    return false;
  }
  size_t before = path_push(r, coordinate);
  good = read_quantity(r, json_object_get(v, coordinate), DIMENSION_LENGTH, &at) && good;
  path_pop(r, before);
  return good && put_in_layer(r, at, json_object_get(v, "side"), out);
}

static bool is_solid(const reader *r) {
  const part *p = &r->the_case->part;
  return !p->shape->power || !p->shape->hollow(p);
}

bool read_location(reader *r, const json_t *v, location *out) {
  const part *p = &r->the_case->part;
  double origin, extent = p->shape->extent(p, &origin);
  const char *text = json_string_value(v);
  *out = (location){.layer = 0};
  if (!p->layers.count) return false; /* its faults stand already */
  if (text && !strcmp(text, "center")) {
    if (!is_solid(r)) {
      fault_here(r, v, "a part with a bore has no center; mid_wall is half-way through its wall");
      return false;
    }
    return put_in_layer(r, p->shape->power ? 0 : extent / 2, NULL, out);
  }
  if (text && !strcmp(text, "mid_wall")) return put_in_layer(r, origin + extent / 2, NULL, out);
  if (json_is_object(v))
    return json_object_get(v, "face") ? from_face(r, v, out) : by_coordinate(r, v, out);
  static const char *const words[] = {"center", "mid_wall", NULL};
  const char *near = text ? nearest_name(text, words) : NULL;
  fault_here(r, v,
             "must be \"center\", \"mid_wall\", {\"face\": F, \"depth\": d} or {\"%s\": ...}%s%s%s",
             p->shape->coordinates[0], near ? "; did you mean \"" : "", near ? near : "",
             near ? "\"?" : "");
  return false;
}

void read_points(reader *r, const json_t *v) {
  if (!must_be_array(r, v, LIMIT_POINTS, "points")) return;
  heat_case *c = r->the_case;
  size_t count = json_array_size(v);
  c->points.items = take(r, count, sizeof(point));
  if (!c->points.items) return;
  c->points.count = (int)count;
  for (size_t i = 0; i < count; i++) {
    size_t before = path_push_index(r, i);
    c->points.items[i].name = "";
    if (must_be_object(r, json_array_get(v, i)))
      read_object(r, json_array_get(v, i), &point_type, NULL, NULL, &c->points.items[i]);
    path_pop(r, before);
  }
}
