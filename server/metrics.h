/* metrics.h: counters of the service as Prometheus text. Every function may be called from any
 * thread. */
#ifndef CORESOAK_METRICS_H
#define CORESOAK_METRICS_H

#include "buffer.h"
#include "exchange.h"
#include "store.h"

typedef struct metrics metrics;

/* Rejections that never reach a route. */
typedef enum rejection {
  REJECTED_AUDIT,
  REJECTED_SLOW,
  REJECTED_TOO_LARGE,
  REJECTED_FULL,
  REJECTIONS
} rejection;

/* What is read when asked rather than counted. */
typedef struct gauges {
  long jobs[JOB_STATES];
  double oldest_queued; /* s */
  int workers, busy;
  int connections, waiters;
  bool ready;
  double started; /* s since 1970 */
  const char *kernel;
} gauges;

/* Counters for these kinds and routes (their patterns); both NULL-terminated and kept. NULL out of
 * memory. */
metrics *metrics_new(const job_kind *const *kinds, const char *const *routes);
void metrics_free(metrics *m);

/* A request answered: index of its route (-1: none), status, seconds from its first line to its
 * end. */
void metrics_request(metrics *m, int route, method how, int status, double seconds);
void metrics_rejected(metrics *m, rejection why);

/* A job ended: s from creation to start (NAN if never started), and from there to its end. */
void metrics_job(metrics *m, const job_kind *kind, job_state state, double waited, double solved);

/* Usual seconds that a job takes, from those that ended lately; 0 before the first. */
double metrics_usual_seconds(metrics *m);

/* All of it in the text format 0.0.4. */
void metrics_write(metrics *m, const gauges *g, buffer *b);

#endif
