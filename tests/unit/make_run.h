/* make_run.h: the solver's parts put together for a made case: tables, mesh, equations, stepper. */
#ifndef CORESOAK_TESTS_MAKE_RUN_H
#define CORESOAK_TESTS_MAKE_RUN_H

#include "make_case.h"
#include "march.h"
#include "mesh.h"
#include "step.h"

#include <criterion/criterion.h>

typedef struct run {
  property property[MADE_MATERIALS];
  double end_cell[LIMIT_LAYERS][2];
  mesh mesh;
  conduction system;
  stepper stepper;
  arena memory;
} run;

/* Tables over [from, to] K of about `intervals` rows for all materials of the case. */
static inline void make_tables(run *r, const made *m, double from, double to, int intervals) {
  memset(r, 0, sizeof *r);
  arena_init(&r->memory, 0);
  for (int i = 0; i < LIMIT_LAYERS; i++) r->end_cell[i][0] = r->end_cell[i][1] = INFINITY;
  for (int i = 0; i < m->the_case.materials.count; i++) {
    fault f;
    status s =
        property_build(&r->property[i], &m->material[i], from, to, intervals, &r->memory, &f);
    cr_assert_eq(s, STATUS_OK, "property_build: %s", s ? f.is : "");
  }
}

static inline void make_mesh(run *r, const made *m, int cells, int keep_every, bool halved) {
  mesh_plan plan = {cells, keep_every, (const double(*)[2])r->end_cell, halved};
  fault f;
  status s =
      m->the_case.part.shape->build(&r->mesh, &m->the_case, &plan, r->property, &r->memory, &f);
  cr_assert_eq(s, STATUS_OK, "mesh: %s", s ? f.is : "");
}

static inline void make_stepper(run *r) {
  cr_assert_eq(conduction_init(&r->system, &r->mesh, &r->memory), 0);
  cr_assert_eq(stepper_init(&r->stepper, &r->system, &r->memory), 0);
}

/* All of it, at the start of stage 0. */
static inline void make_run(run *r, const made *m, double from, double to, int cells) {
  make_tables(r, m, from, to, 512);
  make_mesh(r, m, cells, 1, false);
  make_stepper(r);
  fault f;
  status s = march_start(&m->the_case, &r->stepper, &f);
  cr_assert_eq(s, STATUS_OK, "start: %s", s ? f.is : "");
  march_conditions(&r->system, &m->stage[0].faces);
  r->system.to = m->stage[0].lasts;
  stepper_begin(&r->stepper, 0);
}

static inline void free_run(run *r) {
  arena_free(&r->memory);
}

/* `count` equal steps over `span` seconds, without step control. */
static inline void take_steps(run *r, double span, int count) {
  for (int i = 0; i < count; i++) {
    cr_assert_geq(stepper_try(&r->stepper, span / count), 0);
    stepper_accept(&r->stepper);
  }
}

static inline const property *property_at(const run *r, int node) {
  int l = 0;
  while (r->mesh.layer[l].last < node) l++;
  return r->mesh.layer[l].property;
}

static inline double temperature_at(const run *r, const double *state, int node) {
  double slope;
  return property_temperature(property_at(r, node), state[node], &slope);
}

#endif
