/* until.h: whether and when the condition that ends a stage is fulfilled. */
#ifndef CORESOAK_UNTIL_H
#define CORESOAK_UNTIL_H

#include "limit.h"
#include "watch.h"

/* How a stage ended: kept so that the twin run can tell the error of the end. */
typedef struct until_end {
  bool known;
  int leaf;     /* the node of the condition that decided */
  double t;     /* s from the stage's start: when the condition became true */
  double value; /* of that leaf's target then */
  double rate;  /* its slope then, per s */
} until_end;

typedef struct until_watch {
  const until *until;     /* of the stage; NULL if it has none */
  const figure_run *runs; /* of the case's figures, for conditions on an accumulating figure */
  watch *watch;
  int stage;
  int trace[LIMIT_CONDITIONS];
  double since;   /* true without a break since this stage time; NAN: false */
  double pending; /* the same at the end of the step tried */
  until_end end;
} until_watch;

/* Gets ready for a stage; its traces must already be in `w` or fit (returns -1 if not). */
int until_begin(until_watch *u, const until *given, int stage, watch *w, const figure_run *runs);

/* At the stage's start, with a still watch: true if the stage is over at once. */
bool until_at_start(until_watch *u);

/* Stage time within the step of `watch` at which the stage ends; INFINITY if it goes on. */
double until_event(until_watch *u);

/* The step was accepted. */
void until_accepted(until_watch *u);

/* Value of the deciding leaf's target at stage time t of the step. */
double until_leaf_value(until_watch *u, int leaf, double t);

/* Traces that the conditions of a case watch, added to w; -1 if there are too many. */
int until_add_traces(const until *given, watch *w);

#endif
