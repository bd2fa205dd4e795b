/* accuracy.c: fine and coarse, and finer until the difference is small enough. */
#include "accuracy.h"

#include "elementary.h"
#include "shape.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#define COARSE_TOLERANCE 8.0  /* of the coarse twin's steps over the fine run's */
#define MOST_WORK        3e7  /* nodes x steps of one run: some three seconds on one core */
#define HOPELESS         15.0 /* of MOST_WORK: foreseen work beyond it is not begun */
#define FAR_OFF          5.0 /* of the numerical error: beyond it the mesh is to blame, and is not asked */
#define TABLE_INTERVALS  512
#define SPACE_SHARE                                                                                \
  0.7 /* of the numerical error: what a refined plan aims at for mesh and steps                    \
       */
#define TIME_SHARE 0.25
#define LEAST_SHARE                                                                                \
  0.1 /* two runs that agree in one figure by chance are not believed beyond this share of the     \
         estimate */

enum { MOST_REFINEMENTS = 9, MOST_WIDENINGS = 8 };

status properties_build(const heat_case *c, double from, double to, property **out, arena *memory,
                        fault *f) {
  property *p = arena_array(memory, (size_t)c->materials.count + 1, sizeof *p);
  if (!p) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  for (int i = 0; i < c->materials.count; i++) {
    status bad =
        property_build(&p[i], &c->materials.items[i], from, to, TABLE_INTERVALS, memory, f);
    if (bad) return bad;
  }
  *out = p;
  return STATUS_OK;
}

/* ---- one march ---- */

status attempt_new(attempt **out, const heat_case *c, const march_plan *plan,
                   const property *properties, int keep_every, const observer *reference,
                   fault *f) {
  attempt *t = calloc(1, sizeof *t);
  if (!t) {
    fail(f, STATUS_NO_MEMORY, "", "out of memory");
    return STATUS_NO_MEMORY;
  }
  arena_init(&t->memory, 0);
  mesh_plan mesh = {.cells = plan->cells,
                    .keep_every = keep_every,
                    .end_cell = plan->end_cell,
                    .halved = plan->halved};
  status bad = c->part.shape->build(&t->mesh, c, &mesh, properties, &t->memory, f);
  if (!bad && conduction_init(&t->system, &t->mesh, &t->memory))
    bad = fail(f, STATUS_NO_MEMORY, "", "out of memory");
  if (!bad && stepper_init(&t->stepper, &t->system, &t->memory))
    bad = fail(f, STATUS_NO_MEMORY, "", "out of memory");
  if (!bad) bad = observe_init(&t->observer, c, &t->mesh, reference, &t->memory, f);
  if (bad) {
    attempt_free(t);
    return bad;
  }
  *out = t;
  return STATUS_OK;
}

status attempt_run(attempt *t, double tolerance, const double *durations,
                   const solve_control *control, double progress_from, double progress_to,
                   fault *f) {
  march_request r = {.the_case = t->observer.the_case,
                     .tolerance = tolerance,
                     .durations = durations,
                     .watch = &t->observer.march,
                     .control = control,
                     .progress_from = progress_from,
                     .progress_to = progress_to};
  status bad = march(&r, &t->stepper, &t->outcome, f);
  observe_ranges(&t->observer);
  return bad;
}

void attempt_free(attempt *t) {
  if (!t) return;
  arena_free(&t->memory);
  free(t);
}

/* ---- two ---- */

static void drop_attempts(accuracy *a) {
  attempt_free(a->coarse);
  attempt_free(a->fine);
  a->fine = a->coarse = NULL;
}

static bool any_below_zero(const observer *o) {
  for (int i = 0; i < o->mesh->layers; i++)
    if (o->least[i] < 0) return true;
  return false;
}

static status run_pair(accuracy *a, int refinement, fault *f) {
  double from = 1 - 1.0 / (1 << refinement), to = 1 - 0.5 / (1 << refinement);
  double split = from + 0.7 * (to - from), durations[LIMIT_STAGES];
  drop_attempts(a);
  a->progress = to;
  status bad = attempt_new(&a->fine, a->the_case, &a->plan, a->properties, 1, NULL, f);
  if (!bad) bad = attempt_run(a->fine, a->plan.tolerance, NULL, a->control, from, split, f);
  if (bad) return bad;
  a->runs++;
  if (a->fine->observer.beyond_table) return STATUS_OK;
  for (int i = 0; i < a->the_case->stages.count; i++)
    durations[i] = a->fine->outcome.stage[i].end - a->fine->outcome.stage[i].start;
  bad = attempt_new(&a->coarse, a->the_case, &a->plan, a->properties, 2, &a->fine->observer, f);
  if (!bad)
    bad = attempt_run(a->coarse, fmin(1, COARSE_TOLERANCE * a->plan.tolerance), durations,
                      a->control, split, to, f);
  a->runs += !bad;
  return bad;
}

/* A case with flux or generation can leave the range that its starts and surroundings span. */
static bool widen_tables(accuracy *a, status *bad, fault *f) {
  const observer *o = &a->fine->observer;
  double least = a->from, most = a->to;
  for (int i = 0; i < o->mesh->layers; i++) {
    least = fmin(least, o->least[i]);
    most = fmax(most, o->most[i]);
  }
  double span = most - least;
  if (least < a->from) least -= 0.5 * span;
  if (most > a->to) most += 0.5 * span;
  a->from = fmax(0, least);
  a->to = fmin(most, 2e5);
  arena_rewind(&a->memory);
  *bad = properties_build(a->the_case, a->from, a->to, &a->properties, &a->memory, f);
  return !*bad;
}

/* Difference of the place that a figure watches, at the end of the stage in which its value was
   found: what is known of a crossing that the coarse run just missed. */
static double place_difference(const accuracy *a, int figure, const figure_value *fine) {
  const observer *o = &a->coarse->observer;
  int trace = a->fine->observer.run[figure].trace, stage = 0;
  double when =
      isfinite(fine->when) ? fine->when : fine->value; /* of time_to the value is the time */
  while (stage + 1 < a->the_case->stages.count &&
         when > a->fine->outcome.stage[stage].end * (1 + 1e-12))
    stage++;
  for (int i = 0; trace >= 0 && i < o->places; i++)
    if (o->place_trace[i] == trace) return o->last_difference[(size_t)stage * o->places + i];
  return a->estimate;
}

double accuracy_figure_error(const accuracy *a, int figure, const figure_value *fine,
                             const figure_value *coarse) {
  if (!fine->found) return NAN;
  double least = LEAST_SHARE * fine->sensitivity * a->estimate;
  if (!coarse->found && fine->sensitivity > 0)
    return fmax(least, fine->sensitivity * place_difference(a, figure, fine));
  if (!coarse->found) return INFINITY;
  double error = fmax(fabs(fine->value - coarse->value), least);
  for (int i = 0; i < fine->parts && i < coarse->parts; i++)
    error = fmax(error, fabs(fine->part[i].value - coarse->part[i].value));
  return error;
}

/* Largest error of the figures that are temperatures. */
static double figures_in_kelvin(const accuracy *a, const attempt *twin) {
  double most = 0;
  const heat_case *c = a->the_case;
  for (int i = 0; i < c->figures.count; i++) {
    const figure *g = &c->figures.items[i];
    dimension d = g->kind->dimension(g, c);
    if (d != DIMENSION_TEMPERATURE && d != DIMENSION_DIFFERENCE) continue;
    figure_value fine = {0}, coarse = {0};
    g->kind->finish(&a->fine->observer.run[i], &fine);
    g->kind->finish(&twin->observer.run[i], &coarse);
    if (fine.found && coarse.found) most = fmax(most, fabs(fine.value - coarse.value));
  }
  return most;
}

/* How much of the estimate is the mesh's: the coarse mesh once more with the fine run's tolerance.
 */
static status space_part(accuracy *a, double worst, double *space, fault *f) {
  double durations[LIMIT_STAGES];
  attempt *probe = NULL;
  for (int i = 0; i < a->the_case->stages.count; i++)
    durations[i] = a->fine->outcome.stage[i].end - a->fine->outcome.stage[i].start;
  status bad = attempt_new(&probe, a->the_case, &a->plan, a->properties, 2, &a->fine->observer, f);
  if (!bad)
    bad = attempt_run(probe, a->plan.tolerance, durations, a->control, a->progress, a->progress, f);
  if (!bad) {
    *space =
        fmax(observe_difference(&a->fine->observer, &probe->observer), figures_in_kelvin(a, probe));
    *space = fmin(*space, worst);
    a->runs++;
  }
  attempt_free(probe);
  return bad;
}

/* Factor on the cells that the mesh's part of the error asks for, by the order seen between two
 * meshes (1 to 2). */
static double finer_by_order(const accuracy *a, double ratio) {
  double order = 2;
  if (a->last_cells > 0 && a->plan.cells > a->last_cells && a->last_space > 0)
    order = elementary_log(a->last_space / (ratio * SPACE_SHARE * a->the_case->numerical_error)) /
            elementary_log((double)a->plan.cells / a->last_cells);
  order = fmin(2, fmax(1, order));
  return elementary_exp(elementary_log(ratio) / order);
}

/* Chooses the next plan from the two parts of the error; false when the limits leave no room, or
 * foreseeably will not. */
static bool refine(accuracy *a, double space, double time) {
  double target = a->the_case->numerical_error, ratio = space / (SPACE_SHARE * target);
  double work = (double)a->fine->stepper.nodes * a->fine->outcome.steps;
  double wanted = ratio > 1 ? finer_by_order(a, ratio) : 1,
         finer = ratio > 1 ? fmin(4, fmax(1.3, wanted)) : 1;
  double sharper =
      time > TIME_SHARE * target ? fmin(16, fmax(2, 1.3 * time / (TIME_SHARE * target))) : 1;
  if (finer == 1 && sharper == 1) sharper = 2;
  int cells = finer > 1 ? plan_rung(a->plan.cells * finer) : a->plan.cells;
  if (finer > 1 && cells == a->plan.cells) return false;
  if (work * finer * sqrt(sqrt(sharper)) > MOST_WORK ||
      (a->last_cells > 0 && work * wanted > HOPELESS * MOST_WORK))
    return false;
  a->last_space = space;
  a->last_cells = a->plan.cells;
  a->plan.tolerance /= sharper;
  a->plan.cells = cells;
  plan_end_cells(&a->plan, a->the_case, a->properties);
  return true;
}

/* To two digits, upwards, so that the figure told can be asked for. */
static double rounded_up(double x) {
  double unit = 1e-4;
  while (unit * 99 < x) unit *= 10;
  return ceil(x / unit) * unit;
}

static status not_met(accuracy *a, double best, fault *f) {
  double could = rounded_up(1.05 * best);
  fail(f, STATUS_ERROR_NOT_MET, "/numerical_error",
       "%.3g K cannot be met within the limits of nodes and steps; %.2g K could be",
       a->the_case->numerical_error, could);
  if (f) f->could_be_met = could;
  return STATUS_ERROR_NOT_MET;
}

static status run_until_met(accuracy *a, fault *f) {
  double best = INFINITY;
  for (int k = 0, widened = 0; k < MOST_REFINEMENTS; k++) {
    status bad = run_pair(a, k, f);
    if (bad == STATUS_BEYOND_LIMIT && isfinite(best)) return not_met(a, best, f);
    if (bad) return bad;
    if (a->fine->observer.out_of_memory)
      return fail(f, STATUS_BEYOND_LIMIT, "", "too many places are watched");
    if (a->fine->observer.beyond_table && any_below_zero(&a->fine->observer) && a->from <= 0)
      return fail(
          f, STATUS_NOT_FINITE, "/stages",
          "more heat is taken out than the part holds: its temperature falls below absolute zero");
    if (a->fine->observer.beyond_table && widened++ < MOST_WIDENINGS) {
      if (!widen_tables(a, &bad, f)) return bad;
      k--;
      continue;
    }
    if (!a->coarse)
      return fail(f, STATUS_NOT_FINITE, "/stages",
                  "a temperature runs away; look at heat_generation and flux");
    a->estimate = observe_difference(&a->fine->observer, &a->coarse->observer);
    double worst = fmax(a->estimate, figures_in_kelvin(a, a->coarse));
    if (worst <= a->the_case->numerical_error) return STATUS_OK;
    best = fmin(best, worst);
    double space = worst;
    if (worst < FAR_OFF * a->the_case->numerical_error) bad = space_part(a, worst, &space, f);
    if (bad) return bad;
    if (!refine(a, space, worst - space)) break;
  }
  return not_met(a, best, f);
}

status accuracy_run(accuracy *a, const heat_case *c, const solve_control *control, fault *f) {
  memset(a, 0, sizeof *a);
  arena_init(&a->memory, 0);
  a->the_case = c;
  a->control = control;
  plan_range(c, &a->from, &a->to);
  status bad = properties_build(c, a->from, a->to, &a->properties, &a->memory, f);
  if (bad) return bad;
  plan_first(&a->plan, c, a->properties);
  return run_until_met(a, f);
}

void accuracy_free(accuracy *a) {
  drop_attempts(a);
  arena_free(&a->memory);
}
