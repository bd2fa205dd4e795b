/* until.c: truth of a condition along a step, and the moment at which it has been true for long
 * enough. */
#include "until.h"

#include <math.h>
#include <string.h>

enum { BISECTIONS = 48 };

int until_add_traces(const until *given, watch *w) {
  for (int i = 0; i < given->count; i++) {
    const condition_node *node = &given->nodes[i];
    if (node->kind == UNTIL_ALL || node->kind == UNTIL_ANY || node->of.is_figure) continue;
    if (watch_add_place(w, &node->of.place) < 0) return -1;
  }
  return 0;
}

int until_begin(until_watch *u, const until *given, int stage, watch *w, const figure_run *runs) {
  memset(u, 0, sizeof *u);
  u->until = given && given->count ? given : NULL;
  u->watch = w;
  u->runs = runs;
  u->stage = stage;
  u->since = u->pending = NAN;
  for (int i = 0; u->until && i < given->count; i++) {
    const condition_node *node = &given->nodes[i];
    u->trace[i] = -1;
    if (node->kind == UNTIL_ALL || node->kind == UNTIL_ANY || node->of.is_figure) continue;
    if ((u->trace[i] = watch_add_place(w, &node->of.place)) < 0) return -1;
  }
  return 0;
}

double until_leaf_value(until_watch *u, int leaf, double t) {
  const condition_node *node = &u->until->nodes[leaf];
  if (!node->of.is_figure) return watch_value(u->watch, u->trace[leaf], t);
  const figure_run *run = &u->runs[node->of.figure];
  segment g = watch_segment(u->watch, u->stage, false, false);
  return run->figure->kind->value_at(run, &g, u->watch->start + t);
}

static bool leaf_true(const condition_node *node, double value) {
  switch (node->kind) {
  case UNTIL_RISES_TO: return value >= node->level;
  case UNTIL_FALLS_TO: return value <= node->level;
  default: return fabs(value - node->level) <= node->band;
  }
}

static bool truth(until_watch *u, int index, double t) {
  const condition_node *node = &u->until->nodes[index];
  if (node->kind != UNTIL_ALL && node->kind != UNTIL_ANY)
    return leaf_true(node, until_leaf_value(u, index, t));
  bool all = node->kind == UNTIL_ALL;
  for (int i = 0; i < node->children; i++)
    if (truth(u, node->first_child + i, t) != all) return !all;
  return all;
}

/* Where truth changes between a (value before) and b. */
static double change(until_watch *u, double a, double b, bool before) {
  for (int i = 0; i < BISECTIONS && b - a > 1e-13 * (1 + b); i++) {
    double middle = a + (b - a) / 2;
    if (truth(u, 0, middle) == before)
      a = middle;
    else
      b = middle;
  }
  return b;
}

/* Remembers the leaf that decided at t. */
static void note_end(until_watch *u, double t, double step) {
  double earlier = fmax(u->watch->s->t, t - 1e-4 * step);
  double later = fmin(u->watch->s->t + u->watch->s->h, t + 1e-4 * step);
  int leaf = -1;
  for (int i = 0; i < u->until->count; i++) {
    const condition_node *node = &u->until->nodes[i];
    if (node->kind == UNTIL_ALL || node->kind == UNTIL_ANY) continue;
    bool before = leaf_true(node, until_leaf_value(u, i, earlier));
    if (leaf < 0 || before != leaf_true(node, until_leaf_value(u, i, later))) leaf = i;
  }
  double a = until_leaf_value(u, leaf, earlier), b = until_leaf_value(u, leaf, later);
  u->end = (until_end){.known = true, .leaf = leaf, .t = t, .value = until_leaf_value(u, leaf, t)};
  u->end.rate = later > earlier ? (b - a) / (later - earlier) : 0;
}

bool until_at_start(until_watch *u) {
  if (!u->until) return false;
  double t = u->watch->s->t;
  u->since = u->pending = truth(u, 0, t) ? t : NAN;
  return isfinite(u->since) && !(u->until->held_for > 0);
}

double until_event(until_watch *u) {
  if (!u->until) return INFINITY;
  double t0 = u->watch->s->t, h = u->watch->s->h, before = t0, since = u->since;
  bool was = isfinite(since);
  for (int j = 1; j < SEGMENT_SAMPLES; j++) {
    double t = j == SEGMENT_SAMPLES - 1 ? t0 + h : t0 + h * j / (SEGMENT_SAMPLES - 1);
    bool is = truth(u, 0, t);
    double turned = is != was ? change(u, before, t, was) : t;
    if (was && since + u->until->held_for <= turned) return since + u->until->held_for;
    if (is && !was) {
      since = turned;
      note_end(u, turned, h);
      if (since + u->until->held_for <= t) return since + u->until->held_for;
    }
    if (!is) since = NAN;
    was = is;
    before = t;
  }
  u->pending = since;
  return INFINITY;
}

void until_accepted(until_watch *u) {
  u->since = u->pending;
}
