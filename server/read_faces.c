/* read_faces.c: the condition of each face during a stage. */
#include "reader.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

int read_face_name(reader *r, const json_t *v) {
  const shape *s = r->the_case->part.shape;
  if (!v) {
    fault_here(r, NULL, "is missing: the name of a face");
    return -1;
  }
  if (!must_be_text(r, v)) return -1;
  if (r->shapeless) return -1;
  const char *name = json_string_value(v);
  if (!strcmp(name, "all")) return -1;
  int face = shape_face(s, name);
  bool there = face != 0 || !s->power || s->hollow(&r->the_case->part);
  if (face >= 0 && there) return face;
  const char *near = nearest_name(name, s->faces);
  if (face >= 0)
    fault_here(r, v, "a solid %s has no face \"%s\"", s->name, name);
  else
    fault_here(r, v, "unknown face of a %s (%s, %s)%s%s%s", s->name, s->faces[0], s->faces[1],
               near ? "; did you mean \"" : "", near ? near : "", near ? "\"?" : "");
  return -1;
}

static int parts_given(const condition_form *f) {
  return (f->flux != NULL) + (f->convection != NULL) + (f->radiation != NULL);
}

static void by_furnace(const furnace_form *f, face_condition *out) {
  out->kind = FACE_EXCHANGE;
  out->furnace = true;
  out->has_convection = f->h.by_surface_temperature || f->h.over_time.kind != SERIES_NONE;
  out->has_radiation = f->emissivity > 0;
  out->h = f->h;
  out->medium = out->surroundings = f->temperature;
  out->emissivity = f->emissivity;
  out->view_factor = f->view_factor;
}

static void by_parts(const condition_form *f, face_condition *out) {
  out->kind = FACE_EXCHANGE;
  if (f->flux) out->flux = *f->flux;
  if (f->convection) {
    out->has_convection = true;
    out->h = f->convection->h;
    out->medium = f->convection->medium;
  }
  if (f->radiation) {
    out->has_radiation = true;
    out->emissivity = f->radiation->emissivity;
    out->view_factor = f->radiation->view_factor;
    out->surroundings = f->radiation->surroundings;
  }
}

static void read_condition(reader *r, const json_t *v, face_condition *out) {
  condition_form f;
  memset(&f, 0, sizeof f);
  *out = (face_condition){.kind = FACE_INSULATED};
  if (json_is_array(v)) {
    fault_here(r, v, "patches of a face are for shapes of two and three dimensions");
    return;
  }
  if (!must_be_object(r, v)) return;
  int faults = r->faults->found;
  read_object(r, v, &condition_type, NULL, NULL, &f);
  if (r->faults->found != faults) return;
  int alone = (f.temperature != NULL) + (f.furnace != NULL) + f.insulated;
  if (alone > 1 || (alone && parts_given(&f))) {
    fault_here(r, NULL,
               "temperature, furnace and insulated each stand alone; only flux, convection and "
               "radiation add up");
  } else if (f.temperature) {
    out->kind = FACE_PRESCRIBED;
    out->temperature = *f.temperature;
  } else if (f.furnace) {
    by_furnace(f.furnace, out);
    if (!out->has_convection && !out->has_radiation)
      fault_at(r, "furnace", NULL, "must have h or emissivity");
  } else if (parts_given(&f)) {
    by_parts(&f, out);
  } else if (!f.insulated) {
    fault_here(r, v,
               "must have temperature, flux, convection, radiation, furnace or insulated: true");
  }
}

/* The condition that stands under one name: for a face, for all, or only for its faults. */
static void read_named_condition(reader *r, const char *name, const json_t *v, faces *out,
                                 face_condition *all, bool named[MOST_FACES]) {
  face_condition unused;
  if (!strcmp(name, "all")) {
    read_condition(r, v, all);
    return;
  }
  json_t *text = json_string(name);
  int face = text ? read_face_name(r, text) : -1;
  if (!text) r->no_memory = true;
  json_decref(text);
  read_condition(r, v, face >= 0 ? &out->condition[face] : &unused);
  if (face >= 0) named[face] = true;
}

void read_faces(reader *r, const json_t *v, faces *out) {
  const part *p = &r->the_case->part;
  bool solid = p->shape->power && p->layers.count && !p->shape->hollow(p);
  bool named[MOST_FACES] = {false};
  face_condition all = {.kind = FACE_INSULATED, .assumed = true};
  memset(out, 0, sizeof *out);
  while (p->shape->faces[out->count]) out->count++;
  const char *name;
  json_t *value;
  if (v && must_be_object(r, v)) {
    json_object_foreach((json_t *)v, name, value) {
      size_t before = path_push(r, name);
      read_named_condition(r, name, value, out, &all, named);
      path_pop(r, before);
    }
  }
  for (int i = 0; i < out->count; i++)
    if (!named[i]) out->condition[i] = all;
  if (solid) out->condition[0] = (face_condition){.kind = FACE_INSULATED};
}
