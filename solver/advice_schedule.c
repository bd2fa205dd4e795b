/* advice_schedule.c: advice on times and targets: what is approached too closely, furnace logs, and
   the way from the furnace to the bath. */
#include "advice.h"
#include "figure.h"
#include "physics.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

enum { POINTER = 96 };

/* Common practice: in the last 10 K below the furnace the time depends on the furnace's own
 * tolerance. */
#define CLOSE_TO_SINK 10.0

/* ---- targets ---- */

static void advise_on_distance(advice *a, const char *at, double level, double sink) {
  advise(a, at,
         "the target, %.5g degC, is within %.2g K of what the part is taken towards, %.5g degC: 1 "
         "K there changes the "
         "remaining difference by %.2g %%, and the time with it",
         level - ZERO_CELSIUS, CLOSE_TO_SINK, sink - ZERO_CELSIUS,
         100 / fmax(fabs(sink - level), 0.1));
}

/* A rising target just under the hottest sink, a falling one just above the coldest. */
static bool close_to(double level, double sink, bool rising) {
  double left = rising ? sink - level : level - sink;
  return left >= 0 && left < CLOSE_TO_SINK;
}

static bool is_temperature(const target *t) {
  return !t->is_figure && t->place.kind != PLACE_SECTION_DIFFERENCE;
}

/* Of `within` a band the near edge is the target; from which side is told by what the part was
 * before. */
static bool leaf_target(const condition_node *n, const stage_view *v, double *level, bool *rising) {
  if (n->kind == UNTIL_ALL || n->kind == UNTIL_ANY || !is_temperature(&n->of)) return false;
  *rising = n->kind == UNTIL_RISES_TO;
  *level = n->level;
  if (n->kind == UNTIL_WITHIN) {
    *rising = !(v->hottest_before > n->level);
    *level += *rising ? -n->band : n->band;
  }
  return true;
}

static void advise_on_until(advice *a, int stage) {
  const until *u = &a->c->stages.items[stage].until;
  const stage_view *v = &a->stage[stage];
  char at[POINTER];
  snprintf(at, sizeof at, "/stages/%d/until", stage);
  for (int i = 0; i < u->count; i++) {
    double level;
    bool rising;
    if (!leaf_target(&u->nodes[i], v, &level, &rising)) continue;
    double sink = rising ? v->hottest_sink : v->coldest_sink;
    if (close_to(level, sink, rising)) {
      advise_on_distance(a, at, level, sink);
      return;
    }
  }
}

static void advise_on_time_to(advice *a, int index) {
  const figure *g = &a->c->figures.items[index];
  if (strcmp(g->kind->name, "time_to") || !is_temperature(&g->of)) return;
  bool rising = isfinite(g->rises_to);
  double level = rising ? g->rises_to : g->falls_to, sink = NAN;
  for (int i = 0; i < a->c->stages.count; i++) {
    if (!figure_counts_stage(g, i)) continue;
    const stage_view *v = &a->stage[i];
    sink = rising ? fmax(sink, v->hottest_sink) : fmin(sink, v->coldest_sink);
  }
  char at[POINTER];
  snprintf(at, sizeof at, "/figures/%d/%s", index, rising ? "rises_to" : "falls_to");
  if (close_to(level, sink, rising)) advise_on_distance(a, at, level, sink);
}

void advise_on_targets(advice *a) {
  for (int i = 0; i < a->c->stages.count; i++)
    if (a->c->stages.items[i].end == STAGE_UNTIL) advise_on_until(a, i);
  for (int i = 0; i < a->c->figures.count; i++) advise_on_time_to(a, i);
}

/* ---- furnace to bath ---- */

static bool leaves_furnace(const stage *g) {
  for (int f = 0; f < g->faces.count; f++)
    if (g->faces.condition[f].furnace) return true;
  return false;
}

/* A liquid: convection beyond a gas's, or a curve against surface temperature, colder than the part
 * can be. */
static bool enters_bath(const advice *a, int stage) {
  const faces *f = &a->c->stages.items[stage].faces;
  for (int i = 0; i < f->count; i++) {
    const face_condition *one = &f->condition[i];
    double least, most, coldest, warmest;
    if (one->kind != FACE_EXCHANGE || !one->has_convection || one->furnace) continue;
    if (!advice_range(a, &one->medium, stage, &coldest, &warmest)) continue;
    bool liquid =
        one->h.by_surface_temperature ||
        (advice_range(a, &one->h.over_time, stage, &least, &most) && most >= GAS_COEFFICIENT);
    if (liquid && warmest < a->stage[stage].hottest_before) return true;
  }
  return false;
}

void advise_on_transfer(advice *a) {
  const heat_case *c = a->c;
  for (int i = 1; i < c->stages.count; i++) {
    if (c->stages.items[i].end == STAGE_STEADY) continue;
    if (!leaves_furnace(&c->stages.items[i - 1]) || !enters_bath(a, i)) continue;
    char at[POINTER];
    snprintf(at, sizeof at, "/stages/%d", i);
    advise(a, at,
           "bath \"%s\" follows furnace \"%s\" with no transfer stage: on the way, in air, the "
           "surface cools by "
           "radiation before it is quenched",
           c->stages.items[i].name, c->stages.items[i - 1].name);
  }
}

/* ---- logs ---- */

static bool series_of_log(const series *s, const char *log) {
  size_t n = strlen(log);
  return s && s->kind != SERIES_NONE && s->log && !strncmp(s->log, log, n) && s->log[n] == '/';
}

static bool face_uses_log(const face_condition *f, const char *log) {
  return series_of_log(&f->temperature, log) || series_of_log(&f->flux, log) ||
         series_of_log(&f->medium, log) || series_of_log(&f->surroundings, log) ||
         (!f->h.by_surface_temperature && series_of_log(&f->h.over_time, log));
}

static bool stage_uses_log(const heat_case *c, int stage, const char *log) {
  const faces *f = &c->stages.items[stage].faces;
  for (int i = 0; i < f->count; i++)
    if (face_uses_log(&f->condition[i], log)) return true;
  for (int i = 0; i < c->part.layers.count; i++)
    if (series_of_log(c->part.layers.items[i].heat_generation, log)) return true;
  return false;
}

/* The stretch of the case in which a log is read: what is sure, and what is possible with `until`
 * ends. */
typedef struct log_use {
  bool used;
  double first, sure_last, possible_last;
} log_use;

static log_use use_of(const advice *a, const char *log) {
  log_use u = {.first = INFINITY};
  for (int i = 0; i < a->c->stages.count; i++) {
    if (!stage_uses_log(a->c, i, log)) continue;
    const stage_view *v = &a->stage[i];
    bool timed = a->c->stages.items[i].end == STAGE_LASTS;
    u.used = true;
    u.first = fmin(u.first, v->earliest);
    u.sure_last = fmax(u.sure_last, v->earliest + (timed ? v->horizon : 0));
    u.possible_last = fmax(u.possible_last, v->latest + v->horizon);
  }
  return u;
}

/* "/logs/NAME", escaped as RFC 6901 asks. */
static void log_pointer(const char *name, char at[POINTER]) {
  size_t used = (size_t)snprintf(at, POINTER, "/logs/");
  for (; *name && used < POINTER - 3; name++) {
    if (*name == '~' || *name == '/') {
      at[used++] = '~';
      at[used++] = *name == '~' ? '0' : '1';
    } else {
      at[used++] = *name;
    }
  }
  at[used] = '\0';
}

/* Five times the mean of the other intervals. */
static bool has_gap(const log_facts *l) {
  if (l->rows < 3) return false;
  double others = (l->last - l->first - l->widest_gap) / (l->rows - 2);
  return others > 0 && l->widest_gap > 5 * others;
}

static void advise_on_log(advice *a, const log_facts *l) {
  log_use u = use_of(a, l->name);
  if (!u.used) return;
  char at[POINTER];
  log_pointer(l->name, at);
  if (l->last < u.sure_last)
    advise(a, at, "the log ends %.6g s before the case does: its last value is held",
           u.sure_last - l->last);
  else if (l->last < u.possible_last)
    advise(a, at,
           "the log ends at %.6g s, and the case may run until %.6g s: its last value is held then",
           l->last, u.possible_last);
  if (l->first > u.first)
    advise(a, at,
           "the log begins %.6g s after it is first read: its first value is held until then",
           l->first - u.first);
  if (has_gap(l))
    advise(a, at,
           "the log has a gap of %.6g s, from %.6g s on: the values between are a straight line",
           l->widest_gap, l->gap_at);
  if (!l->has_offset)
    advise(a, at,
           "the log says not when the case started (no started_at): its first row, at %.6g s, may "
           "be shifted",
           l->first);
}

void advise_on_logs(advice *a) {
  for (int i = 0; i < a->c->logs.count; i++) advise_on_log(a, &a->c->logs.items[i]);
}
