/* pool.h: the workers. A job becomes the tasks that its kind plans; a worker runs one task at a
   time; who ends the last task of a job folds and writes its answer. */
#ifndef CORESOAK_POOL_H
#define CORESOAK_POOL_H

#include "store.h"

typedef struct pool pool;

typedef struct pool_settings {
  store *store;
  int workers;
  double time_limit;   /* s of one job's run; 0: none. A job's own shorter wish goes first */
  size_t answer_limit; /* bytes of a written answer; 0: none */
  /* Is told of each job that a worker ended, from its thread; `job` is the pool's view, NULL if the
     store has already dropped it. */
  void (*ended)(void *self, const char *id, const job_view *job);
  void *self;
} pool_settings;

/* Starts the workers; NULL out of memory or threads. */
pool *pool_open(const pool_settings *settings);

/* Tells the workers that the store has a new job, or that one was cancelled. */
void pool_wake(pool *p);

/* Workers that are running a task now. */
int pool_busy(pool *p);

/* Cancels what runs and ends the threads; the other calls stay allowed. */
void pool_stop(pool *p);

/* Stops, if that has not been done, and frees. NULL is fine. */
void pool_close(pool *p);

#endif
