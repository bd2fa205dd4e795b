/* march.h: a case taken through its stages on one mesh: breaks, events, step control, cancellation.
   It never sees a figure: whoever watches gets every accepted step, and says when an `until` is
   fulfilled. */
#ifndef CORESOAK_MARCH_H
#define CORESOAK_MARCH_H

#include "limit.h"
#include "result.h"
#include "solve.h"
#include "step.h"

/* Who watches. Times are of the stage; the step is the one that `stepper` has just tried. */
typedef struct march_watch {
  void *self;
  void (*begins)(void *self, int stage, double start, stepper *s);
  bool (*fulfilled_at_start)(void *self, stepper *s);
  double (*event)(void *self,
                  stepper *s); /* when `until` is fulfilled within the step; INFINITY if not */
  void (*accepted)(void *self, stepper *s, bool ends); /* called before the stepper moves on */
  void (*jumped)(void *self, double t);                /* conditions jump at t: steps start anew */
  void (*rests)(void *self, stepper *s, double start); /* the steady state of the last stage */
  void (*passed)(void *self,
                 stepper *s); /* an imposed end that left a stage no time; may be NULL */
} march_watch;

typedef struct march_request {
  const heat_case *the_case;
  double tolerance;        /* K per step */
  const double *durations; /* ends imposed on the stages, s; NULL: the stages end by themselves */
  const march_watch *watch;
  const solve_control *control;
  double progress_from, progress_to;
} march_request;

typedef struct march_outcome {
  stage_result stage[LIMIT_STAGES];
  int steps, rejected;
  double initial_content, final_content; /* J per mesh unit */
  double
      heat_moved; /* sum over steps of |heat| through faces and generated: a scale of the balance */
  bool rested;    /* the last stage was steady */
  double rest_residual; /* its |sum of heat flows| over the sum of |heat flows| */
} march_outcome;

/* Marches from the start to the end of the last stage. `s` was initialised on the mesh. Failures
 * name stage and time. */
MUST_USE status march(const march_request *r, stepper *s, march_outcome *o, fault *f);

/* Sets s->state from the case's start. */
MUST_USE status march_start(const heat_case *c, stepper *s, fault *f);

/* The conditions of a stage's faces on a system (mirror planes and axes have none). */
void march_conditions(conduction *system, const faces *given);

#endif
