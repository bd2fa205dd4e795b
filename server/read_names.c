/* read_names.c: places, targets, instants and stages by their names. */
#include "reader.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static const char *const words[] = {"coldest", "hottest", "mean", "section_difference",
                                    "center",  "mid_wall"};
static const place_kind word_kinds[] = {PLACE_COLDEST, PLACE_HOTTEST,
                                        PLACE_MEAN,    PLACE_SECTION_DIFFERENCE,
                                        PLACE_CENTER,  PLACE_MID_WALL};

int stage_named(const reader *r, const char *name) {
  for (int i = 0; i < r->the_case->stages.count; i++)
    if (r->the_case->stages.items[i].name && !strcmp(r->the_case->stages.items[i].name, name))
      return i;
  return -1;
}

int layer_named(const reader *r, const char *name) {
  for (int i = 0; i < r->the_case->part.layers.count; i++) {
    const char *own = r->the_case->part.layers.items[i].name;
    if (own && !strcmp(own, name)) return i;
  }
  return -1;
}

static int point_named(const reader *r, const char *name) {
  for (int i = 0; i < r->the_case->points.count; i++)
    if (r->the_case->points.items[i].name && !strcmp(r->the_case->points.items[i].name, name))
      return i;
  return -1;
}

static int figure_named(const reader *r, const char *name) {
  for (int i = 0; i < r->the_case->figures.count; i++)
    if (r->the_case->figures.items[i].name && !strcmp(r->the_case->figures.items[i].name, name))
      return i;
  return -1;
}

/* Nearest of all names that a place may have; stages instead with `stages`. */
static const char *near_place(const reader *r, const char *name, bool figures_too) {
  const char *names[6 + MOST_FACES + LIMIT_POINTS + LIMIT_FIGURES + 1];
  int n = 0;
  const heat_case *c = r->the_case;
  for (int i = 0; i < 6; i++) names[n++] = words[i];
  for (int i = 0; c->part.shape->faces[i]; i++) names[n++] = c->part.shape->faces[i];
  for (int i = 0; i < c->points.count; i++)
    names[n++] = c->points.items[i].name ? c->points.items[i].name : "";
  for (int i = 0; figures_too && i < c->figures.count; i++)
    names[n++] = c->figures.items[i].name ? c->figures.items[i].name : "";
  names[n] = NULL;
  return nearest_name(name, names);
}

static bool whole_place(reader *r, const char *text, place *out) {
  for (int i = 0; i < 6; i++)
    if (!strcmp(words[i], text)) {
      out->kind = word_kinds[i];
      return true;
    }
  const shape *s = r->the_case->part.shape;
  int point = point_named(r, text), face = shape_face(s, text);
  bool solid = s->power && !s->hollow(&r->the_case->part);
  if (point >= 0) {
    *out = (place){.kind = PLACE_POINT, .index = point, .layer = -1};
    return true;
  }
  if (face < 0 || (solid && face == 0)) return false;
  *out = (place){.kind = PLACE_FACE, .index = face, .layer = -1};
  return true;
}

static void read_in(reader *r, const json_t *in, place *out) {
  bool whole = out->kind >= PLACE_COLDEST && out->kind <= PLACE_SECTION_DIFFERENCE;
  size_t before = r->length; /* "in" stands beside "of" */
  char path[LONGEST_PATH];
  memcpy(path, r->path, sizeof path);
  char *slash = strrchr(r->path, '/');
  if (slash) path_pop(r, (size_t)(slash - r->path));
  path_push(r, "in");
  if (!whole) {
    fault_here(r, in, "goes with coldest, hottest, mean and section_difference");
  } else if (must_be_text(r, in)) {
    out->layer = layer_named(r, json_string_value(in));
    if (out->layer < 0) fault_here(r, in, "there is no layer of this name");
  }
  memcpy(r->path, path, sizeof path);
  r->length = before;
}

bool read_place_name(reader *r, const char *text, const json_t *in, place *out, bool quiet) {
  *out = (place){.kind = PLACE_MEAN, .layer = -1};
  if (!whole_place(r, text, out)) {
    const char *near = near_place(r, text, false);
    if (!quiet && !r->shapeless)
      fault_here(r, NULL, "unknown place \"%s\"%s%s%s", text, near ? "; did you mean \"" : "",
                 near ? near : "", near ? "\"?" : "");
    return false;
  }
  const part *p = &r->the_case->part;
  if (out->kind == PLACE_CENTER && p->shape->power && p->layers.count && p->shape->hollow(p)) {
    if (!quiet)
      fault_here(r, NULL,
                 "a part with a bore has no center; mid_wall is half-way through its wall");
    return false;
  }
  if (in) read_in(r, in, out);
  return true;
}

bool read_target(reader *r, const json_t *of, const json_t *in, target *out) {
  *out = (target){.figure = -1, .place = {.kind = PLACE_MEAN, .layer = -1}};
  if (!must_be_text(r, of)) return false;
  const char *text = json_string_value(of);
  if (read_place_name(r, text, in, &out->place, true)) return true;
  int figure = figure_named(r, text);
  if (figure < 0) {
    const char *near = near_place(r, text, true);
    if (!strcmp(text, "center"))
      fault_here(r, of, "a part with a bore has no center; mid_wall is half-way through its wall");
    else if (!r->shapeless)
      fault_here(r, of, "unknown place%s%s%s", near ? "; did you mean \"" : "", near ? near : "",
                 near ? "\"?" : "");
    return false;
  }
  const figure_kind *k = r->the_case->figures.items[figure].kind;
  if (k && !k->accumulates) {
    fault_here(r, of, "figure \"%s\" does not accumulate: it cannot be watched", text);
    return false;
  }
  if (!k) return false;
  out->is_figure = true;
  out->figure = figure;
  return true;
}

/* ---- instants and stages ---- */

static void unknown_stage(reader *r, const json_t *got, const char *name) {
  const char *names[LIMIT_STAGES + 1];
  int n = 0;
  for (int i = 0; i < r->the_case->stages.count; i++)
    if (r->the_case->stages.items[i].name) names[n++] = r->the_case->stages.items[i].name;
  names[n] = NULL;
  const char *near = nearest_name(name, names);
  fault_here(r, got, "unknown stage \"%s\"%s%s%s", name, near ? "; did you mean \"" : "",
             near ? near : "", near ? "\"?" : "");
}

bool read_instant(reader *r, const json_t *v, instant *out) {
  const char *text = json_string_value(v);
  *out = (instant){.time = NAN, .end_of_stage = -1};
  if (text && !strncmp(text, "end:", 4)) {
    out->end_of_stage = stage_named(r, text + 4);
    if (out->end_of_stage < 0) unknown_stage(r, v, text + 4);
    return out->end_of_stage >= 0;
  }
  if (!read_quantity(r, v, DIMENSION_TIME, &out->time)) return false;
  if (out->time >= 0) return true;
  fault_here(r, v, "must be at least 0");
  return false;
}

bool read_instants(reader *r, const json_t *v, int *count, instant **items) {
  if (!must_be_array(r, v, LIMIT_OUTPUTS, "instants")) return false;
  size_t n = json_array_size(v);
  instant *list = take(r, n, sizeof *list);
  if (!list) return false;
  for (size_t i = 0; i < n; i++) {
    size_t before = path_push_index(r, i);
    read_instant(r, json_array_get(v, i), &list[i]);
    path_pop(r, before);
  }
  *count = (int)n;
  *items = list;
  return true;
}

static bool read_stage_name(reader *r, const json_t *v, int *out) {
  if (!must_be_text(r, v)) return false;
  *out = stage_named(r, json_string_value(v));
  if (*out < 0) unknown_stage(r, v, json_string_value(v));
  return *out >= 0;
}

bool read_stage_set(reader *r, const json_t *v, stage_set *out) {
  size_t n = json_is_array(v) ? json_array_size(v) : 1;
  if (json_is_array(v) && !must_be_array(r, v, LIMIT_STAGES, "stages")) return false;
  int *items = take(r, n, sizeof *items);
  if (!items) return false;
  if (!n) fault_here(r, NULL, "must name at least one stage");
  bool good = n > 0;
  for (size_t i = 0; i < n; i++) {
    size_t before = json_is_array(v) ? path_push_index(r, i) : r->length;
    good = read_stage_name(r, json_is_array(v) ? json_array_get(v, i) : v, &items[i]) && good;
    path_pop(r, before);
  }
  *out = (stage_set){.count = (int)n, .items = items};
  return good;
}
