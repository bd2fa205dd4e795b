/* probe.h: one mesh of a job with what marches on it, and the temperatures recorded along the way.
   Both integrators of a comparison share it: the same volumes, the same equations, the same
   instants. */
#ifndef BENCH_PROBE_H
#define BENCH_PROBE_H

#include "accuracy.h"
#include "jobs.h"

enum { MOST_PROBES = 16, MOST_LOOKS = 4000 };

typedef struct probe {
  const bench_job *job;
  document *document;
  const heat_case *the_case;
  property *properties;
  mesh mesh;
  conduction system;
  stepper stepper;
  int nodes[MOST_PROBES], count; /* looked at */
  double look[MOST_LOOKS];       /* s from the start of the case */
  int looks, next;
  double value[MOST_LOOKS][MOST_PROBES]; /* K */
  long steps;
  double balance; /* energy residual of the last march, relative; NAN if not known */
  arena memory;
} probe;

/* Builds everything for a job; 0, or -1 (told on stderr). */
int probe_open(probe *p, const bench_job *job);
void probe_close(probe *p);

/* Records H of the probes' nodes, as K, at the next instant. */
void probe_record(probe *p, const double *enthalpy);

/* kernel.c, bdf.c: marches the whole case with a tolerance (K per step) and fills `value`. 0, or -1
 * on failure. */
int kernel_march(probe *p, double tolerance);
int bdf_march(probe *p, double tolerance);

/* exact.c: fills `value` with the exact solution of a P2 job. */
void exact_march(probe *p);

#endif
