/* march.c: from the start to the end of the last stage. */
#include "march.h"

#include "shape.h"
#include "steady.h"

#include <math.h>
#include <string.h>

#define SAFETY            0.9
#define GROWTH            6.0
#define SHRINK            0.2
#define SMALLEST_STEP     1e-11 /* of the stage's time, relative; below it the march has failed */
#define LARGEST_TOLERANCE 1.0   /* K */

#define LANDING 1e-9 /* of the step: how far behind the moment of an event its end may lie */

enum { MOST_LANDINGS = 120 };

void march_conditions(conduction *system, const faces *given) {
  const mesh *m = system->mesh;
  system->condition[0] = m->solid && m->power ? NULL : &given->condition[0];
  system->condition[1] = m->halved ? NULL : &given->condition[1];
}

/* ---- the start ---- */

/* Mean of a profile over the control volume of a node. */
static double profile_mean(const mesh *m, const mesh_layer *l, int node, const table *profile,
                           double surface) {
  enum { PARTS = 16 };
  double left =
      node > l->first ? 0.5 * (m->position[node - 1] + m->position[node]) : m->position[node];
  double right =
      node < l->last ? 0.5 * (m->position[node] + m->position[node + 1]) : m->position[node];
  series as_series = {.kind = SERIES_TABLE, .table = *profile};
  double sum = 0;
  for (int i = 0; i < PARTS; i++)
    sum += series_value(&as_series, left + (right - left) * (i + 0.5) / PARTS - surface);
  return sum / PARTS;
}

static double typical_temperature(const heat_case *c) {
  double sum = 0;
  int count = 0;
  const faces *f = c->start.kind == START_STEADY ? &c->start.faces : &c->stages.items[0].faces;
  for (int i = 0; i < f->count; i++) {
    const face_condition *k = &f->condition[i];
    const series *s = k->kind == FACE_PRESCRIBED ? &k->temperature
                      : k->kind != FACE_EXCHANGE ? NULL
                      : k->has_convection        ? &k->medium
                      : k->has_radiation         ? &k->surroundings
                                                 : NULL;
    if (!s) continue;
    sum += series_value(s, 0);
    count++;
  }
  return count ? sum / count : 293.15;
}

status march_start(const heat_case *c, stepper *s, fault *f) {
  const mesh *m = s->system->mesh;
  double *temperature = s->work, surface;
  c->part.shape->extent(&c->part, &surface);
  double otherwise = c->start.kind == START_UNIFORM ? c->start.temperature : typical_temperature(c);
  for (int i = 0; i < m->layers; i++) {
    const mesh_layer *l = &m->layer[i];
    for (int node = l->first; node <= l->last; node++) {
      temperature[node] = isfinite(l->start) ? l->start : otherwise;
      if (c->start.kind == START_PROFILE && !isfinite(l->start))
        temperature[node] = profile_mean(m, l, node, &c->start.profile, surface);
    }
  }
  conduction_state(m, temperature, s->state);
  if (c->start.kind != START_STEADY) return STATUS_OK;
  march_conditions(s->system, &c->start.faces);
  s->system->stage_start = 0;
  s->system->from = 0;
  s->system->to = 0;
  return steady_solve(s, 0, f);
}

/* ---- one stage ---- */

typedef struct leg {
  const march_request *request;
  stepper *s;
  march_outcome *o;
  const stage *stage;
  int index;
  double start, end; /* of the stage in the case; longest duration */
  double step;       /* next step to try */
  double last_error; /* of the controller; in units of the tolerance */
  double tolerance;
  bool fulfilled;
} leg;

static status stopped(leg *l, fault *f, status s, const char *why) {
  fail(f, s, "", "%s in stage \"%s\"", why, l->stage->name);
  if (f) {
    f->stage = l->index;
    f->time = l->start + l->s->t;
  }
  return s;
}

static double next_break(const leg *l, double t) {
  const mesh *m = l->s->system->mesh;
  double tiny = 1e-9 + 1e-12 * (l->start + t), next = INFINITY;
  for (int end = 0; end < 2; end++)
    if (l->s->system->condition[end])
      next = fmin(next, face_next_break(l->s->system->condition[end], l->start, t + tiny));
  for (int i = 0; i < m->layers; i++) {
    const series *g = m->layer[i].generation;
    if (!g) continue;
    double origin = g->from_case_start ? l->start : 0;
    next = fmin(next, series_next_break(g, t + tiny + origin) - origin);
  }
  return next;
}

static double longest_step(const leg *l) {
  double longest = l->end;
  for (int end = 0; end < 2; end++)
    if (l->s->system->condition[end])
      longest = fmin(longest, face_longest_step(l->s->system->condition[end]));
  const mesh *m = l->s->system->mesh;
  for (int i = 0; i < m->layers; i++)
    if (m->layer[i].generation)
      longest = fmin(longest, series_longest_step(m->layer[i].generation));
  return longest;
}

/* Sets the interval [t, to], accounts for the heat of a jump at a prescribed end; true if anything
 * jumps. */
static bool enter_interval(leg *l, double t, double to, bool anew) {
  stepper *s = l->s;
  const mesh *m = s->system->mesh;
  int last = s->nodes - 1;
  double first_before = s->state[0], last_before = s->state[last];
  memcpy(s->trial, s->rate, (size_t)s->nodes * sizeof(double));
  s->system->from = t;
  s->system->to = to;
  stepper_begin(s, t);
  s->heat[HEAT_FIRST] += m->volume[0] * (s->state[0] - first_before);
  s->heat[HEAT_LAST] += m->volume[last] * (s->state[last] - last_before);
  double scale_jump =
      fmax(fabs(s->state[0] - first_before), fabs(s->state[last] - last_before)) * s->scale[0];
  if (anew || scale_jump > 1e-3 * l->tolerance) return true;
  double most = 0, change = 0;
  for (int i = 0; i < s->nodes; i++) {
    most = fmax(most, fabs(s->rate[i]) * s->scale[i] / m->volume[i]);
    change = fmax(change, fabs(s->rate[i] - s->trial[i]) * s->scale[i] / m->volume[i]);
  }
  return change > 1e-6 * most;
}

static double root16(double x, int sixteenths) { /* x^(sixteenths/16) for 1..4 */
  double fourth = sqrt(sqrt(x)), eighth = sqrt(fourth), sixteenth = sqrt(eighth);
  return sixteenths == 4   ? fourth
         : sixteenths == 3 ? eighth * sixteenth
         : sixteenths == 2 ? eighth
                           : sixteenth;
}

/* Tries steps until one is within the tolerance. The step that will be next is left in l->step. */
static status try_step(leg *l, double *h, fault *f) {
  bool rejected = false;
  for (;;) {
    double error = stepper_try(l->s, *h) / l->tolerance;
    if (error < 0 || !isfinite(error)) error = 1e12;
    if (error < 1e-8) error = 1e-8;
    double factor = SAFETY / root16(error, 4);
    if (error <= 1) {
      if (l->last_error > 0)
        factor = fmin(factor, SAFETY / root16(error, 3) * root16(l->last_error, 2));
      factor = fmax(SHRINK, fmin(GROWTH, factor));
      if (rejected) factor = fmin(factor, 1);
      l->last_error = fmax(error, 1e-2);
      l->step = *h * factor;
      return STATUS_OK;
    }
    rejected = true;
    l->o->rejected++;
    *h *= fmin(SAFETY, fmax(0.1, factor));
    if (*h < SMALLEST_STEP * (1 + l->s->t) || *h < 1e-12)
      return stopped(l, f, error >= 1e12 ? STATUS_NOT_FINITE : STATUS_NO_CONVERGENCE,
                     "the step shrank to nothing");
    if (l->o->steps + l->o->rejected > LIMIT_STEPS)
      return stopped(l, f, STATUS_BEYOND_LIMIT, "more steps than the limit allows");
  }
}

static void take_step(leg *l, bool ends) {
  stepper *s = l->s;
  if (l->request->watch->accepted) l->request->watch->accepted(l->request->watch->self, s, ends);
  for (int q = 0; q < HEATS; q++) l->o->heat_moved += fabs(s->heat_next[q] - s->heat[q]);
  stepper_accept(s);
  l->o->steps++;
}

static double fraction_done(const leg *l) {
  const march_request *r = l->request;
  double inside = l->end > 0 ? l->s->t / l->end : 1, stages = r->the_case->stages.count;
  return r->progress_from +
         (r->progress_to - r->progress_from) * (l->index + fmin(inside, 1)) / stages;
}

static status look_up_from_work(leg *l, fault *f) {
  const solve_control *control = l->request->control;
  if (l->o->steps + l->o->rejected > LIMIT_STEPS)
    return stopped(l, f, STATUS_BEYOND_LIMIT, "more steps than the limit allows");
  if (!control || !control->go_on || l->o->steps % 16) return STATUS_OK;
  status s = control->go_on(control->self, fraction_done(l));
  return s ? stopped(l, f, s, status_message(s)) : STATUS_OK;
}

/* Lands on the moment at which `until` is fulfilled, if that is within the step tried. A step of
   another length ends a little elsewhere than the interpolant said, so it is tried until its own
   end is the moment. */
static status land_on_event(leg *l, double *h, fault *f) {
  stepper *s = l->s;
  const march_watch *w = l->request->watch;
  if (l->request->durations || l->stage->end != STAGE_UNTIL) return STATUS_OK;
  double at = w->event(w->self, s), shortest = SMALLEST_STEP * (1 + s->t), longer = 0;
  if (!(at <= s->t + *h)) return STATUS_OK;
  l->fulfilled = true;
  for (int i = 0; i < MOST_LANDINGS; i++) {
    bool reached = at <= s->t + *h;
    if (reached && (*h <= shortest || s->t + *h - at <= LANDING * *h)) return STATUS_OK;
    longer = reached ? 0 : fmax(2 * longer, 0.1 * LANDING * *h);
    *h = reached ? fmax(at - s->t, shortest) : *h + fmin(longer, 0.01 * *h);
    if (stepper_try(s, *h) < 0) return stopped(l, f, STATUS_NOT_FINITE, "a value is not finite");
    at = w->event(w->self, s);
  }
  return STATUS_OK;
}

static status march_interval(leg *l, double to, fault *f) {
  stepper *s = l->s;
  double longest = longest_step(l), tiny = 1e-12 * (1 + to);
  while (s->t < to - tiny && !l->fulfilled) {
    double left = to - s->t, h = fmin(l->step, longest);
    if (h * 1.0001 >= left)
      h = left;
    else if (h * 1.9 > left)
      h = left / 2;
    bool cut = h < l->step;
    double wish = l->step;
    status bad = try_step(l, &h, f);
    if (!bad) bad = land_on_event(l, &h, f);
    if (!bad) bad = look_up_from_work(l, f);
    if (bad) return bad;
    if (cut && l->step < wish && l->last_error < 0.5) l->step = wish;
    bool ends = l->fulfilled || s->t + h >= l->end - tiny;
    take_step(l, ends);
    if (s->t >= to - tiny) s->t = to;
  }
  return STATUS_OK;
}

/* A stage that was over when it began, repeated by a twin: its conditions still act on prescribed
 * ends. */
static void pass_stage(leg *l) {
  enter_interval(l, 0, 0, true);
  if (l->request->watch->passed) l->request->watch->passed(l->request->watch->self, l->s);
}

static status march_stage(leg *l, fault *f) {
  stepper *s = l->s;
  double t = 0;
  bool anew = true;
  if (l->request->durations && !(l->end > 0)) pass_stage(l);
  while (t < l->end && !l->fulfilled) {
    double to = fmin(next_break(l, t), l->end);
    if (l->end - to < 1e-9 * l->end) to = l->end;
    bool jump = enter_interval(l, t, to, anew);
    if (jump && l->request->watch->jumped) l->request->watch->jumped(l->request->watch->self, t);
    if (anew && l->stage->end == STAGE_UNTIL && !l->request->durations &&
        l->request->watch->fulfilled_at_start(l->request->watch->self, s)) {
      l->fulfilled = true;
      break;
    }
    double first = stepper_first(s, l->tolerance, to - t, jump);
    if (jump) l->last_error = 0;
    l->step = anew || jump ? first : fmin(l->step, first);
    status bad = march_interval(l, to, f);
    if (bad) return bad;
    t = s->t;
    anew = false;
  }
  return STATUS_OK;
}

static double stage_limit(const march_request *r, const stage *g, int index) {
  if (r->durations) return r->durations[index];
  return g->end == STAGE_LASTS ? g->lasts : g->end == STAGE_UNTIL ? g->time_limit : 0;
}

static status rest(leg *l, fault *f) {
  conduction *system = l->s->system;
  face_condition still[2];
  for (int end = 0; end < 2; end++) {
    if (!system->condition[end]) continue;
    still[end] = face_at_rest(system->condition[end]);
    system->condition[end] = &still[end];
  }
  system->at_rest = true;
  status bad = steady_solve(l->s, 0, f);
  if (bad && f) f->stage = l->index;
  if (!bad) {
    const double *flow = l->s->heat_rate;
    double sum = 0, size = 0;
    for (int q = 0; q < HEATS; q++) {
      sum += flow[q];
      size += fabs(flow[q]);
    }
    l->o->rested = true;
    l->o->rest_residual = size > 0 ? fabs(sum) / size : 0;
    l->request->watch->rests(l->request->watch->self, l->s, l->start);
  }
  system->at_rest = false;
  system->condition[0] = system->condition[1] = NULL;
  return bad;
}

status march(const march_request *r, stepper *s, march_outcome *o, fault *f) {
  memset(o, 0, sizeof *o);
  memset(s->heat, 0, sizeof s->heat);
  status bad = march_start(r->the_case, s, f);
  if (bad) return bad;
  o->initial_content = conduction_content(s->system->mesh, s->state);
  double start = 0;
  for (int i = 0; i < r->the_case->stages.count; i++) {
    const stage *g = &r->the_case->stages.items[i];
    leg l = {.request = r, .s = s, .o = o, .stage = g, .index = i, .start = start};
    l.tolerance = fmin(r->tolerance, LARGEST_TOLERANCE);
    l.end = stage_limit(r, g, i);
    s->t = 0;
    s->h = 0;
    s->system->stage_start = start;
    s->system->from = 0;
    s->system->to = l.end;
    march_conditions(s->system, &g->faces);
    r->watch->begins(r->watch->self, i, start, s);
    if (g->end == STAGE_STEADY) o->final_content = conduction_content(s->system->mesh, s->state);
    bad = g->end == STAGE_STEADY ? rest(&l, f) : march_stage(&l, f);
    if (bad) return bad;
    stage_result *result = &o->stage[i];
    result->start = start;
    result->end = start + s->t;
    result->ended_by = g->end == STAGE_STEADY  ? ENDED_STEADY
                       : g->end == STAGE_LASTS ? ENDED_LASTS
                       : l.fulfilled           ? ENDED_UNTIL
                                               : ENDED_TIME_LIMIT;
    start = result->end;
  }
  if (!o->rested) o->final_content = conduction_content(s->system->mesh, s->state);
  return STATUS_OK;
}
