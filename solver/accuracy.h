/* accuracy.h: chooses the plan, runs fine and coarse, tells the error, refines until it is met.

   The coarse twin has every second node of the fine mesh, eight times the tolerance per step, and
   the fine run's ends of stages. Every number given is the fine run's; the error is the plain
   difference of the two. */
#ifndef CORESOAK_ACCURACY_H
#define CORESOAK_ACCURACY_H

#include "observe.h"
#include "plan.h"

/* One march with all that belongs to it. */
typedef struct attempt {
  mesh mesh;
  conduction system;
  stepper stepper;
  observer observer;
  march_outcome outcome;
  arena memory;
} attempt;

typedef struct accuracy {
  const heat_case *the_case;
  const solve_control *control;
  property *properties; /* one for each material */
  double from, to;      /* K: range of the tables */
  march_plan plan;      /* of the runs kept */
  attempt *fine, *coarse;
  double last_space; /* K: the mesh's part of the error on the mesh before */
  int last_cells;    /* its cells; 0: there was none */
  double estimate;   /* K */
  int runs;
  double progress; /* fraction told so far */
  arena memory;
} accuracy;

/* Runs a case until its numerical error is met. On success a->fine and a->coarse are finished runs.
   In any case accuracy_free gives everything back. */
MUST_USE status accuracy_run(accuracy *a, const heat_case *c, const solve_control *control,
                             fault *f);
void accuracy_free(accuracy *a);

/* Error of a figure's value between the two runs, in its own unit; INFINITY if it cannot be told.
 */
double accuracy_figure_error(const accuracy *a, int figure, const figure_value *fine,
                             const figure_value *coarse);

/* One march by a plan, for references and benches: keep_every 1 or 2, stage durations imposed or
   NULL, compared with `reference` or not. The attempt is given back with attempt_free. */
MUST_USE status attempt_new(attempt **out, const heat_case *c, const march_plan *plan,
                            const property *properties, int keep_every, const observer *reference,
                            fault *f);
MUST_USE status attempt_run(attempt *t, double tolerance, const double *durations,
                            const solve_control *control, double progress_from, double progress_to,
                            fault *f);
void attempt_free(attempt *t);

/* Tables for all materials over [from, to] K. */
MUST_USE status properties_build(const heat_case *c, double from, double to, property **out,
                                 arena *memory, fault *f);

#endif
