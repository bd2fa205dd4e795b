/* make_attempt.h: one march of a made case with its observer, on an even mesh, without the search
   for an accuracy. */
#ifndef CORESOAK_TESTS_MAKE_ATTEMPT_H
#define CORESOAK_TESTS_MAKE_ATTEMPT_H

#include "accuracy.h"
#include "make_case.h"

#include <criterion/criterion.h>

typedef struct trial {
  property *property;
  march_plan plan;
  attempt *attempt;
  arena memory;
  fault fault;
} trial;

/* Tables over [from, to] K and an even mesh of `cells`, ready to run. */
static inline void make_attempt(trial *t, const made *m, double from, double to, int cells) {
  memset(t, 0, sizeof *t);
  arena_init(&t->memory, 0);
  status s = properties_build(&m->the_case, from, to, &t->property, &t->memory, &t->fault);
  cr_assert_eq(s, STATUS_OK, "properties: %s", s ? t->fault.is : "");
  t->plan.cells = cells;
  for (int i = 0; i < LIMIT_LAYERS; i++) t->plan.end_cell[i][0] = t->plan.end_cell[i][1] = INFINITY;
  s = attempt_new(&t->attempt, &m->the_case, &t->plan, t->property, 1, NULL, &t->fault);
  cr_assert_eq(s, STATUS_OK, "attempt: %s", s ? t->fault.is : "");
}

static inline void run_attempt(trial *t, double tolerance) {
  status s = attempt_run(t->attempt, tolerance, NULL, NULL, 0, 1, &t->fault);
  cr_assert_eq(s, STATUS_OK, "march: %s", s ? t->fault.is : "");
}

static inline void free_attempt(trial *t) {
  attempt_free(t->attempt);
  arena_free(&t->memory);
}

#endif
