/* solve.c: the question "what happens if": runs the case to its accuracy and puts the answer
 * together. */
#include "solve.h"

#include "accuracy.h"
#include "physics.h"
#include "shape.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

const char *const verdict_names[] = {NULL, "meets", "close", "misses"};
const char *const stage_ended_names[] = {"lasts", "until", "time_limit", "steady"};

#define SLOW_APPROACH                                                                              \
  (20.0 / 3600) /* K/s: a target approached slower makes the time uncertain (common practice) */

void heat_result_free(heat_result *r) {
  if (!r) return;
  arena_free(&r->memory);
  free(r);
}

/* ---- warnings of the run ---- */

__attribute__((format(printf, 3, 4))) static void warn(heat_result *r, const char *at,
                                                       const char *is, ...) {
  if (r->warnings >= LIMIT_WARNINGS) return;
  warning *w = &r->warning[r->warnings++];
  snprintf(w->at, sizeof w->at, "%s", at);
  va_list arguments;
  va_start(arguments, is);
  vsnprintf(w->is, sizeof w->is, is, arguments);
  va_end(arguments);
}

static double celsius(double kelvin) {
  return kelvin - ZERO_CELSIUS;
}

/* Pointer to a layer's material as the caller wrote it. */
static void material_pointer(const heat_case *c, int index, char *at, size_t size) {
  if (c->part.material >= 0 && c->part.layers.count == 1)
    snprintf(at, size, "/part/material");
  else
    snprintf(at, size, "/part/layers/%d/material", index);
}

static void warn_of_material(heat_result *r, const heat_case *c, int index, double least,
                             double most) {
  const layer *l = &c->part.layers.items[index];
  const material *m = &c->materials.items[l->material];
  char at[96];
  material_pointer(c, index, at, sizeof at);
  if (least < m->valid_from - 0.5 || most > m->valid_to + 0.5)
    warn(r, at,
         "the properties of %s are given from %.6g to %.6g degC; layer \"%s\" was between %.4g and "
         "%.4g degC; beyond "
         "the table the end value holds",
         m->name, celsius(m->valid_from), celsius(m->valid_to), l->name, celsius(least),
         celsius(most));
  if (isfinite(m->max_service) && most > m->max_service)
    warn(r, at,
         "layer \"%s\" reaches %.4g degC, above the highest service temperature of %s, %.4g degC",
         l->name, celsius(most), m->name, celsius(m->max_service));
  if ((m->traits & MATERIAL_MELTS) && m->latent.count &&
      most > m->latent.items[m->latent.count - 1].to)
    warn(r, at,
         "layer \"%s\" is liquid above %.4g degC: conduction alone is too slow where the liquid is "
         "stirred",
         l->name, celsius(m->latent.items[m->latent.count - 1].to));
}

static void warn_of_materials(heat_result *r, const accuracy *a) {
  const observer *o = &a->fine->observer;
  int whole = a->the_case->part.layers.count;
  for (int i = 0; i < whole; i++) {
    int computed = mesh_layer_of(&a->fine->mesh, i);
    warn_of_material(r, a->the_case, i, o->least[computed], o->most[computed]);
  }
}

static void warn_of_stages(heat_result *r, const accuracy *a) {
  const observer *o = &a->fine->observer;
  for (int i = 0; i < r->stages; i++) {
    const stage *g = &a->the_case->stages.items[i];
    if (g->end != STAGE_UNTIL) continue;
    char at[96];
    snprintf(at, sizeof at, "/stages/%d/until", i);
    if (o->started_true[i])
      warn(r, at, "the condition was true when stage \"%s\" began: the stage took no time",
           g->name);
    if (r->stage[i].ended_by == ENDED_TIME_LIMIT)
      warn(r, at, "stage \"%s\" ended by its time_limit, %.6g s: the condition was not fulfilled",
           g->name, g->time_limit);
    const until_end *e = &o->ends[i];
    bool of_place = e->known && !g->until.nodes[e->leaf].of.is_figure;
    if (r->stage[i].ended_by == ENDED_UNTIL && of_place && fabs(e->rate) < SLOW_APPROACH &&
        e->rate != 0)
      warn(r, at, "stage \"%s\" approaches its target at %.3g K/h: 1 K more or less is %.3g min",
           g->name, fabs(e->rate) * 3600, 1 / fabs(e->rate) / 60);
  }
}

/* ---- parts of the answer ---- */

static status fill_stages(heat_result *r, const accuracy *a, fault *f) {
  const attempt *fine = a->fine;
  r->stages = a->the_case->stages.count;
  r->stage = arena_array(&r->memory, (size_t)r->stages, sizeof *r->stage);
  if (!r->stage) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  for (int i = 0; i < r->stages; i++) {
    r->stage[i] = fine->outcome.stage[i];
    const until_end *e = &fine->observer.ends[i];
    if (r->stage[i].ended_by != ENDED_UNTIL || !e->known) continue;
    double span = r->stage[i].end - r->stage[i].start, rate = fabs(e->rate);
    double error = rate > 0 ? a->coarse->observer.end_difference[i] / rate : span;
    r->stage[i].end_error = fmin(error, span);
  }
  return STATUS_OK;
}

/* A stage that ends on a figure lands within this of its value. */
#define ROUND_OFF 1e-8

static void judge(figure_result *g, const requirement *need) {
  double value = g->value.value;
  if (need->which >= 0 && need->which < g->value.parts) value = g->value.part[need->which].value;
  g->required = true;
  g->margin = NAN;
  if (!g->value.found) return;
  double margin = INFINITY;
  if (isfinite(need->at_least)) margin = fmin(margin, value - need->at_least);
  if (isfinite(need->at_most)) margin = fmin(margin, need->at_most - value);
  g->margin = margin;
  g->met = margin >= -ROUND_OFF * fabs(value);
  g->close = isfinite(g->error) ? fabs(margin) <= g->error : true;
}

static status fill_figures(heat_result *r, const accuracy *a, fault *f) {
  const heat_case *c = a->the_case;
  r->figures = c->figures.count;
  r->figure = arena_array(&r->memory, (size_t)r->figures + 1, sizeof *r->figure);
  if (!r->figure) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  for (int i = 0; i < r->figures; i++) {
    const figure *g = &c->figures.items[i];
    figure_result *out = &r->figure[i];
    figure_value coarse = {0};
    out->value.value = out->value.when = out->value.where = NAN;
    g->kind->finish(&a->fine->observer.run[i], &out->value);
    g->kind->finish(&a->coarse->observer.run[i], &coarse);
    out->dimension = g->kind->dimension(g, c);
    out->error = accuracy_figure_error(a, i, &out->value, &coarse);
    out->margin = NAN;
    if (g->require) judge(out, g->require);
  }
  return STATUS_OK;
}

static verdict overall(const heat_result *r) {
  verdict v = VERDICT_NONE;
  for (int i = 0; i < r->figures; i++) {
    if (!r->figure[i].required) continue;
    verdict one = !r->figure[i].met ? VERDICT_MISSES : VERDICT_MEETS;
    if (r->figure[i].close && r->figure[i].value.found) one = VERDICT_CLOSE;
    if (one > v) v = one;
  }
  return v;
}

static status copy_numbers(const double **out, const double *from, size_t count, arena *memory,
                           fault *f) {
  double *copy = arena_array(memory, count, sizeof(double));
  if (!copy) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  if (count) memcpy(copy, from, count * sizeof(double));
  *out = copy;
  return STATUS_OK;
}

static status fill_outputs(heat_result *r, const accuracy *a, fault *f) {
  const observer *o = &a->fine->observer;
  size_t rows = (size_t)o->history.rows;
  r->history = o->history;
  status bad = copy_numbers(&r->history.time, o->history.time, rows, &r->memory, f);
  if (!bad)
    bad = copy_numbers(&r->history.value, o->history.value, rows * (size_t)o->history.columns,
                       &r->memory, f);
  if (bad) return bad;
  r->fields = o->fields;
  r->field = arena_array(&r->memory, (size_t)o->fields + 1, sizeof *r->field);
  if (!r->field) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  const double *position = NULL;
  if (o->fields)
    bad = copy_numbers(&position, o->field[0].position, (size_t)o->field[0].nodes, &r->memory, f);
  for (int i = 0; i < o->fields && !bad; i++) {
    r->field[i] = o->field[i];
    r->field[i].position = position;
    bad = copy_numbers(&r->field[i].temperature, o->field[i].temperature, (size_t)o->field[i].nodes,
                       &r->memory, f);
  }
  return bad;
}

/* Half of the heat that the part can hold over the range of its tables: the least scale of the
 * balance. */
static double half_capacity(const mesh *m) {
  double sum = 0;
  for (int i = 0; i < m->layers; i++)
    sum += mesh_volume(m, m->layer[i].first, m->layer[i].last) *
           (m->layer[i].property->most - m->layer[i].property->least);
  return 0.5 * sum;
}

static void heats_of(const attempt *t, energy_balance *e) {
  const mesh *m = &t->mesh;
  const double *heat = t->stepper.heat;
  double both = m->halved ? 2 : 1;
  e->faces = 2;
  e->absorbed[0] = heat[HEAT_FIRST] * m->whole;
  e->absorbed[1] = (m->halved ? heat[HEAT_FIRST] : heat[HEAT_LAST]) * m->whole;
  e->generated = heat[HEAT_GENERATED] * m->whole * both;
  e->stored = (t->outcome.final_content - t->outcome.initial_content) * m->whole * both;
}

static void fill_energy(heat_result *r, const accuracy *a) {
  const attempt *t = a->fine;
  const double *heat = t->stepper.heat;
  energy_balance *e = &r->energy, coarse = {0};
  heats_of(t, e);
  heats_of(a->coarse, &coarse);
  e->error = fabs(e->stored - coarse.stored);
  for (int i = 0; i < e->faces; i++)
    e->error = fmax(e->error, fabs(e->absorbed[i] - coarse.absorbed[i]));
  double given = heat[HEAT_FIRST] + heat[HEAT_LAST] + heat[HEAT_GENERATED];
  double residual = t->outcome.final_content - t->outcome.initial_content - given;
  e->balance_error = fabs(residual) / fmax(t->outcome.heat_moved, half_capacity(&t->mesh));
  if (t->outcome.rested) e->balance_error = fmax(e->balance_error, t->outcome.rest_residual);
}

static void fill_numerics(heat_result *r, const accuracy *a) {
  const attempt *t = a->fine;
  r->numerics = (numerics){
      .error_estimate = a->estimate,
      .unknowns = t->stepper.nodes,
      .steps = t->outcome.steps,
      .rejected = t->outcome.rejected,
      .runs = a->runs,
      .method = t->mesh.halved ? "finite volumes in enthalpy, vertex-centred, half of the section "
                                 "by symmetry; Rodas4 in time"
                               : "finite volumes in enthalpy, vertex-centred; Rodas4 in time"};
}

static status answer(const accuracy *a, heat_result *r, fault *f) {
  arena_init(&r->memory, 0);
  r->warning = arena_array(&r->memory, LIMIT_WARNINGS, sizeof *r->warning);
  if (!r->warning) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  status bad = fill_stages(r, a, f);
  if (!bad) bad = fill_figures(r, a, f);
  if (!bad) bad = fill_outputs(r, a, f);
  if (bad) return bad;
  fill_energy(r, a);
  fill_numerics(r, a);
  r->verdict = overall(r);
  warn_of_stages(r, a);
  warn_of_materials(r, a);
  r->warnings = case_advice(a->the_case, r->warning, r->warnings);
  return STATUS_OK;
}

status solve_case(const heat_case *c, const solve_control *control, heat_result **out, fault *f) {
  accuracy a;
  heat_result *r = NULL;
  *out = NULL;
  status bad = accuracy_run(&a, c, control, f);
  if (!bad && !(r = calloc(1, sizeof *r))) {
    fail(f, STATUS_NO_MEMORY, "", "out of memory");
    bad = STATUS_NO_MEMORY;
  }
  if (r) bad = answer(&a, r, f);
  accuracy_free(&a);
  if (bad)
    heat_result_free(r);
  else
    *out = r;
  return bad;
}

/* ---- the cost before solving ---- */

#define STEPS_PER_STAGE                                                                            \
  70.0 /* of a usual stage at 0.5 K; grows with the fourth root of 1/error                         \
        */
#define SECONDS_PER_UNKNOWN 2.2e-7 /* one step of one unknown, on one core of 2024 */

static double breaks_of(const stage *g, const heat_case *c) {
  double count = 0, whole = case_longest(c);
  for (int face = 0; face < g->faces.count; face++) {
    const face_condition *k = &g->faces.condition[face];
    double t = 0, span = fmin(whole, g->end == STAGE_LASTS ? g->lasts : g->time_limit);
    while ((t = face_next_break(k, 0, t)) < span && count < LIMIT_TABLE_ROWS) count++;
  }
  return count;
}

status solve_estimate(const heat_case *c, solve_cost *cost, fault *f) {
  arena memory;
  property *properties;
  march_plan plan;
  double from, to;
  arena_init(&memory, 0);
  memset(cost, 0, sizeof *cost);
  plan_range(c, &from, &to);
  status bad = properties_build(c, from, to, &properties, &memory, f);
  if (!bad) {
    plan_first(&plan, c, properties);
    cost->unknowns = plan.cells + 2 * c->part.layers.count;
    for (int i = 0; i < c->stages.count; i++)
      cost->steps += STEPS_PER_STAGE * sqrt(sqrt(0.5 / c->numerical_error)) +
                     3 * breaks_of(&c->stages.items[i], c);
    const output_request *h = &c->output.history;
    double whole = case_longest(c);
    cost->outputs = h->times == OUTPUT_EVERY ? floor(whole / h->every) + 1 : h->at.count;
    cost->seconds = 1.5 * SECONDS_PER_UNKNOWN * cost->unknowns * cost->steps;
  }
  arena_free(&memory);
  return bad;
}
