/* solve.h: the question "what happens if": a case in, a result out. */
#ifndef CORESOAK_SOLVE_H
#define CORESOAK_SOLVE_H

#include "case.h"
#include "result.h"
#include "status.h"

/* Progress and cancellation. `go_on` is called between steps from the solving thread with the
   fraction done, 0..1; when it returns something else than STATUS_OK (CANCELLED, OUT_OF_TIME) the
   solve ends with that. May be NULL. */
typedef struct solve_control {
  status (*go_on)(void *self, double fraction);
  void *self;
} solve_control;

/* Solves a case. May be called from any number of threads at once. On success *out is a new result
   (heat_result_free); on failure *out is NULL and *f says why:
   BEYOND_LIMIT, NO_MEMORY, NOT_FINITE and NO_CONVERGENCE (with stage and time), ERROR_NOT_MET
   (could_be_met set, at "/numerical_error"), or what go_on returned. */
MUST_USE status solve_case(const heat_case *c, const solve_control *control, heat_result **out,
                           fault *f);

/* Cost before solving: nodes x steps of the usual run, from the case alone; and faults that only
   the solver can find (limits on outputs). */
typedef struct solve_cost {
  double unknowns, steps; /* of the fine run, estimated */
  double outputs;         /* instants of history and fields */
  double seconds;         /* on one core, roughly */
} solve_cost;
MUST_USE status solve_estimate(const heat_case *c, solve_cost *cost, fault *f);

/* advice.c: what a plant engineer would say of the case before it runs: appends to list
   (LIMIT_WARNINGS), returns the new count. solve_case calls it; the result carries its warnings
   after those of the run. */
int case_advice(const heat_case *c, warning *list, int count);

#endif
