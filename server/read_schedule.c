/* read_schedule.c: the start and the stages. */
#include "reader.h"

#include <math.h>
#include <string.h>

/* ---- the start ---- */

static void read_profile(reader *r, const json_t *object, start *out) {
  const part *p = &r->the_case->part;
  double origin, extent = p->shape->extent(p, &origin);
  out->kind = START_PROFILE;
  if (!read_table_of(r, object, "profile", DIMENSION_LENGTH, DIMENSION_TEMPERATURE, &out->profile))
    return;
  double last = out->profile.x[out->profile.count - 1];
  if (out->profile.x[0] < 0) fault_at(r, "profile", NULL, "depths must be at least 0");
  if (isfinite(extent) && last > extent * (1 + 1e-9))
    fault_at(r, "profile", NULL, "goes to a depth of %.6g m; the section ends at %.6g m", last,
             extent);
}

static void read_steady_start(reader *r, const json_t *v, start *out) {
  static const parameter rows[] = {{.name = "faces",
                                    .kind = VALUE_FACES,
                                    .offset = 0,
                                    .flags = PARAMETER_REQUIRED,
                                    .about = "condition of each face"}};
  static const object_type type = {
      .name = "steady", .size = sizeof(faces), .parameters = rows, .count = 1};
  size_t before = path_push(r, "steady");
  out->kind = START_STEADY;
  if (must_be_object(r, v)) read_object(r, v, &type, NULL, NULL, &out->faces);
  path_pop(r, before);
}

static bool layers_start(const heat_case *c) {
  for (int i = 0; i < c->part.layers.count; i++)
    if (!isfinite(c->part.layers.items[i].start)) return false;
  return c->part.layers.count > 0;
}

void read_start(reader *r, const json_t *v) {
  start *s = &r->the_case->start;
  *s = (start){.kind = START_PER_LAYER, .temperature = NAN};
  if (!v) return;
  if (json_is_object(v)) {
    bool units = json_object_get(v, "profile") && json_object_get(v, "units");
    if (!(units && json_object_size(v) == 2) && !check_members(r, v, &start_type, NULL)) return;
    if (json_object_get(v, "profile")) read_profile(r, v, s);
    if (json_object_get(v, "steady")) read_steady_start(r, json_object_get(v, "steady"), s);
    return;
  }
  if (read_quantity(r, v, DIMENSION_TEMPERATURE, &s->temperature)) s->kind = START_UNIFORM;
}

/* ---- until ---- */

enum { ROOT_AND_GROUPS = LIMIT_CONDITIONS };

typedef struct until_list {
  condition_node *nodes;
  int count;
} until_list;

static double read_level(reader *r, const json_t *object, const char *name, const target *of) {
  double value = NAN;
  const json_t *v = json_object_get(object, name);
  if (!v) return value;
  size_t before = path_push(r, name);
  if (!read_quantity(r, v, target_dimension(of, r->the_case), &value)) value = NAN;
  path_pop(r, before);
  return value;
}

static void read_leaf(reader *r, const json_t *v, condition_node *node) {
  const char *const ways[] = {"rises_to", "falls_to", "within"};
  int given = 0, way = 0;
  for (int i = 0; i < 3; i++)
    if (json_object_get(v, ways[i])) {
      given++;
      way = i;
    }
  if (given != 1) {
    fault_here(r, NULL, "must have exactly one of rises_to, falls_to and within");
    return;
  }
  if (!json_object_get(v, "of")) {
    fault_at(r, "of", NULL, "is missing: the place or figure that is watched");
    return;
  }
  node->kind = way == 0 ? UNTIL_RISES_TO : way == 1 ? UNTIL_FALLS_TO : UNTIL_WITHIN;
  size_t before = path_push(r, "of");
  bool good = read_target(r, json_object_get(v, "of"), json_object_get(v, "in"), &node->of);
  path_pop(r, before);
  if (!good) return;
  if (way < 2) {
    node->level = read_level(r, v, ways[way], &node->of);
    if (json_object_get(v, "of_set")) fault_at(r, "of_set", NULL, "goes with within");
    return;
  }
  node->level = read_level(r, v, "of_set", &node->of);
  if (!json_object_get(v, "of_set"))
    fault_at(r, "of_set", NULL, "is missing: the value that the band lies around");
  if (node->of.is_figure) fault_at(r, "of", json_object_get(v, "of"), "a band is for places");
  before = path_push(r, "within");
  if (read_quantity(r, json_object_get(v, "within"), DIMENSION_DIFFERENCE, &node->band) &&
      !(node->band > 0))
    fault_here(r, json_object_get(v, "within"), "must be greater than 0");
  path_pop(r, before);
}

static void read_node(reader *r, const json_t *v, until_list *list, int index, bool root);

static void read_group(reader *r, const json_t *v, const char *name, until_list *list, int index) {
  const json_t *children = json_object_get(v, name);
  size_t before = path_push(r, name);
  if (must_be_array(r, children, LIMIT_CONDITIONS, "conditions")) {
    int count = (int)json_array_size(children);
    if (!count) fault_here(r, NULL, "must list at least one condition");
    if (list->count + count > LIMIT_CONDITIONS) {
      fault_here(r, NULL, "more than %d conditions", LIMIT_CONDITIONS);
    } else {
      condition_node *node = &list->nodes[index];
      node->kind = !strcmp(name, "all") ? UNTIL_ALL : UNTIL_ANY;
      node->first_child = list->count;
      node->children = count;
      list->count += count;
      for (int i = 0; i < count; i++) {
        size_t inner = path_push_index(r, (size_t)i);
        read_node(r, json_array_get(children, (size_t)i), list, node->first_child + i, false);
        path_pop(r, inner);
      }
    }
  }
  path_pop(r, before);
}

static void read_node(reader *r, const json_t *v, until_list *list, int index, bool root) {
  if (!must_be_object(r, v) || !check_members(r, v, &until_type, NULL)) return;
  if (!root && json_object_get(v, "held_for"))
    fault_at(r, "held_for", NULL, "stands beside the outermost condition");
  bool all = json_object_get(v, "all"), any = json_object_get(v, "any");
  if (all + any + (json_object_get(v, "of") != NULL) > 1) {
    fault_here(r, NULL, "must have one of all, any and of");
    return;
  }
  if (all || any)
    read_group(r, v, all ? "all" : "any", list, index);
  else
    read_leaf(r, v, &list->nodes[index]);
}

void read_until(reader *r, const json_t *v, until *out) {
  until_list list = {.nodes = take(r, LIMIT_CONDITIONS, sizeof(condition_node)), .count = 1};
  memset(out, 0, sizeof *out);
  if (!list.nodes) return;
  read_node(r, v, &list, 0, true);
  out->count = list.count;
  out->nodes = list.nodes;
  const json_t *held = json_is_object(v) ? json_object_get(v, "held_for") : NULL;
  if (!held) return;
  size_t before = path_push(r, "held_for");
  if (read_quantity(r, held, DIMENSION_TIME, &out->held_for) && out->held_for < 0)
    fault_here(r, held, "must be at least 0");
  path_pop(r, before);
}

/* ---- stages ---- */

static bool has(const json_t *v, const char *name) {
  return json_object_get(v, name) != NULL;
}

static void set_end(reader *r, const json_t *v, stage *g, bool last) {
  bool steady = g->steady, lasts = has(v, "lasts"), until = has(v, "until");
  g->end = steady ? STAGE_STEADY : until ? STAGE_UNTIL : STAGE_LASTS;
  if (lasts + until + steady > 1)
    fault_here(r, NULL, "must end in one way: lasts, until with time_limit, or steady");
  else if (lasts + until + steady == 0)
    fault_here(r, NULL, "has no end: give lasts, until with time_limit, or steady: true");
  if (until && !has(v, "time_limit")) fault_at(r, "time_limit", NULL, "is missing: until needs it");
  if (!until && has(v, "time_limit")) fault_at(r, "time_limit", NULL, "goes with until");
  if (steady && !last) fault_at(r, "steady", NULL, "only the last stage can be steady");
}

static void read_stage(reader *r, const json_t *v, stage *g, bool last) {
  g->name = "";
  g->lasts = g->time_limit = NAN;
  read_faces(r, NULL, &g->faces);
  if (!must_be_object(r, v)) return;
  read_object(r, v, &stage_type, NULL, NULL, g);
  if (!has(v, "faces")) read_faces(r, NULL, &g->faces);
  if (!g->name) g->name = "";
  set_end(r, v, g, last);
}

static bool same_name(const stage *a, const stage *b) {
  return a->name && b->name && *a->name && !strcmp(a->name, b->name);
}

void read_stages(reader *r, const json_t *v) {
  if (!must_be_array(r, v, LIMIT_STAGES, "stages")) return;
  heat_case *c = r->the_case;
  size_t count = json_array_size(v);
  if (!count) fault_here(r, NULL, "must have at least one stage");
  for (size_t i = 0; i < count && c->stages.items; i++) {
    size_t before = path_push_index(r, i);
    read_stage(r, json_array_get(v, i), &c->stages.items[i], i + 1 == count);
    for (size_t k = 0; k < i; k++)
      if (same_name(&c->stages.items[i], &c->stages.items[k]))
        fault_at(r, "name", json_object_get(json_array_get(v, i), "name"),
                 "another stage has this name");
    path_pop(r, before);
  }
  bool only_steady = count == 1 && c->stages.items && c->stages.items[0].end == STAGE_STEADY;
  if (json_object_get(r->root, "start") || only_steady || layers_start(c) || !c->part.layers.count)
    return;
  size_t length = r->length;
  char path[LONGEST_PATH];
  memcpy(path, r->path, sizeof path);
  path_pop(r, 0);
  fault_at(r, "start", NULL,
           "is missing: the temperature at the start, unless every layer has its own");
  memcpy(r->path, path, sizeof path);
  r->length = length;
}
