/* pool.c: workers that take tasks, and one thread that watches over them.

   The mutex guards the list of active jobs, `busy`, `stopping` and each active job's counts. A part
   belongs to the worker that runs its task until the counts say that all are there; then to the one
   that folds. fraction[] and stop are atomic: the solver's callback reads and writes them without
   the mutex. Order of locks: the pool's, then the store's. */
#include "pool.h"

#include "clock.h"

#include <math.h>
#include <pthread.h>
#include <stdatomic.h>
#include <stdlib.h>
#include <string.h>

static const double WATCH_EVERY = 0.025; /* s: cancellation must stop the arithmetic within 0.1 s */
static const double LATER_EVERY = 0.1;   /* s between looks at jobs that are not yet due */

typedef struct active {
  struct active *next;
  job_view job;
  int tasks, started, ended;
  void **parts;
  _Atomic double *fraction;
  atomic_int stop; /* a status: why tasks are to end */
  double deadline; /* steady clock */
  fault failure;   /* of the first task that failed; status OK if none */
} active;

struct pool {
  pool_settings settings;
  pthread_mutex_t mutex;
  pthread_cond_t work, watch;
  active *jobs;
  int busy, threads;
  bool stopping, ready;
  pthread_t watcher, *workers;
};

typedef struct task {
  active *job;
  int index;
} task;

static status go_on(void *self, double fraction) {
  const task *t = self;
  atomic_store_explicit(&t->job->fraction[t->index], fraction, memory_order_relaxed);
  return (status)atomic_load_explicit(&t->job->stop, memory_order_relaxed);
}

static void free_active(pool *p, active *a) {
  if (!a) return;
  p->settings.store->release(p->settings.store, &a->job);
  free(a->parts);
  free(a->fraction);
  free(a);
}

/* Smaller of the service's limit and the job's wish. */
static double run_limit(const pool *p, const document *d) {
  double limit = p->settings.time_limit > 0 ? p->settings.time_limit : INFINITY;
  return d->job.time_limit > 0 ? fmin(limit, d->job.time_limit) : limit;
}

static active *new_active(pool *p, const job_view *job) {
  active *a = calloc(1, sizeof *a);
  if (!a) return NULL;
  int tasks = job->kind->plan(job->document);
  a->tasks = tasks > 0 ? tasks : 1;
  a->job = *job;
  a->parts = calloc((size_t)a->tasks, sizeof *a->parts);
  a->fraction = calloc((size_t)a->tasks, sizeof *a->fraction);
  a->deadline = clock_steady() + run_limit(p, job->document);
  if (a->parts && a->fraction) return a;
  a->job.hold = NULL;
  free_active(p, a);
  return NULL;
}

/* Ends a job in the store, whose own record has the last word, and tells the listener. */
static void report(pool *p, const job_view *job, job_outcome *outcome) {
  store *s = p->settings.store;
  job_view after;
  s->finish(s, job->id, outcome);
  bool there = s->look(s, job->id, &after) == 0;
  p->settings.ended(p->settings.self, job->id, there ? &after : NULL);
  if (there) s->release(s, &after);
}

static void report_failure(pool *p, const job_view *job, const fault *why) {
  job_outcome outcome = {.failure = *why};
  report(p, job, &outcome);
}

/* Makes a job of the store active; false if there is none, *later if one will be due. */
static bool claim(pool *p, bool *later) {
  store *s = p->settings.store;
  job_view job;
  claim_outcome outcome = s->claim(s, &job);
  *later = outcome == CLAIM_LATER;
  if (outcome == CLAIM_EXPIRED) {
    p->settings.ended(p->settings.self, job.id, &job);
    s->release(s, &job);
    return true;
  }
  if (outcome != CLAIM_TAKEN) return false;
  active *a = new_active(p, &job);
  if (!a) {
    fault f;
    fail(&f, STATUS_NO_MEMORY, "", "no memory to start the job");
    report_failure(p, &job, &f);
    s->release(s, &job);
    return true;
  }
  active **end = &p->jobs;
  while (*end) end = &(*end)->next;
  *end = a;
  pthread_cond_signal(&p->watch);
  return true;
}

static bool next_task(pool *p, task *t) {
  for (active *a = p->jobs; a; a = a->next) {
    if (a->started == a->tasks || a->failure.status != STATUS_OK) continue;
    t->job = a;
    t->index = a->started++;
    return true;
  }
  return false;
}

/* Waits for a task; false when the pool stops. */
static bool take_task(pool *p, task *t) {
  bool later;
  while (!p->stopping) {
    if (next_task(p, t)) return true;
    if (claim(p, &later)) continue;
    if (later)
      clock_wait(&p->work, &p->mutex, LATER_EVERY);
    else
      pthread_cond_wait(&p->work, &p->mutex);
  }
  return false;
}

static void write_answer(pool *p, const job_view *job, job_outcome *outcome) {
  buffer text;
  buffer_init(&text, p->settings.answer_limit);
  int written = job->kind->write(job->document, outcome->answer, MEDIA_JSON, &text);
  if (written == 0 && !text.failed && text.length > 0) {
    outcome->text = text.bytes;
    outcome->text_length = text.length;
    return;
  }
  fail(&outcome->failure, STATUS_NOT_FINITE, "",
       "the answer could not be written: a number is not finite, or it is larger than %zu bytes",
       p->settings.answer_limit);
  buffer_free(&text);
  job->kind->free_answer(outcome->answer);
  outcome->answer = NULL;
}

/* Folds the parts of a job whose tasks have all ended, or frees them. */
static void conclude(pool *p, active *a) {
  const job_kind *kind = a->job.kind;
  job_outcome outcome = {.failure = a->failure};
  if (a->failure.status == STATUS_OK) {
    fault f;
    status s = kind->fold(a->job.document, a->parts, a->tasks, &outcome.answer, &f);
    if (s == STATUS_OK)
      write_answer(p, &a->job, &outcome);
    else
      outcome.failure = f;
  } else {
    for (int i = 0; i < a->tasks; i++)
      if (a->parts[i]) kind->free_part(a->parts[i]);
  }
  report(p, &a->job, &outcome);
  free_active(p, a);
}

static void run_task(task *t, fault *f) {
  const active *a = t->job;
  solve_control control = {go_on, t};
  status s = a->job.kind->run(a->job.document, t->index, &control, &t->job->parts[t->index], f);
  f->status = s;
}

/* Notes how a task ended; true if it was the last that its job waits for. */
static bool note_end(active *a, const fault *f) {
  if (f->status != STATUS_OK && a->failure.status == STATUS_OK) a->failure = *f;
  a->ended++;
  return a->failure.status == STATUS_OK ? a->ended == a->tasks : a->ended == a->started;
}

static void take_off(pool *p, active *a) {
  active **at = &p->jobs;
  while (*at != a) at = &(*at)->next;
  *at = a->next;
}

static void *work(void *self) {
  pool *p = self;
  task t;
  pthread_mutex_lock(&p->mutex);
  while (take_task(p, &t)) {
    fault f = {.stage = -1, .time = NAN, .could_be_met = NAN};
    p->busy++;
    if (t.job->started < t.job->tasks) pthread_cond_signal(&p->work);
    pthread_mutex_unlock(&p->mutex);
    run_task(&t, &f);
    pthread_mutex_lock(&p->mutex);
    bool last = note_end(t.job, &f);
    if (last) {
      take_off(p, t.job);
      pthread_mutex_unlock(&p->mutex);
      conclude(p, t.job);
      pthread_mutex_lock(&p->mutex);
    }
    p->busy--;
  }
  pthread_mutex_unlock(&p->mutex);
  return NULL;
}

static double progress_of(const active *a) {
  double sum = 0;
  for (int i = 0; i < a->tasks; i++)
    sum += atomic_load_explicit(&a->fraction[i], memory_order_relaxed);
  return sum / a->tasks;
}

static void watch_job(pool *p, active *a, double now) {
  store *s = p->settings.store;
  if (p->stopping || s->cancelled(s, a->job.id))
    atomic_store(&a->stop, STATUS_CANCELLED);
  else if (now >= a->deadline)
    atomic_store(&a->stop, STATUS_OUT_OF_TIME);
  else
    s->progress(s, a->job.id, progress_of(a));
}

static void *watch(void *self) {
  pool *p = self;
  pthread_mutex_lock(&p->mutex);
  while (!p->stopping) {
    double now = clock_steady();
    for (active *a = p->jobs; a; a = a->next) watch_job(p, a, now);
    if (p->jobs)
      clock_wait(&p->watch, &p->mutex, WATCH_EVERY);
    else
      pthread_cond_wait(&p->watch, &p->mutex);
  }
  for (active *a = p->jobs; a; a = a->next) watch_job(p, a, 0);
  pthread_mutex_unlock(&p->mutex);
  return NULL;
}

pool *pool_open(const pool_settings *settings) {
  pool *p = calloc(1, sizeof *p);
  if (!p) return NULL;
  p->settings = *settings;
  p->workers = calloc((size_t)settings->workers, sizeof *p->workers);
  pthread_mutex_init(&p->mutex, NULL);
  if (!p->workers || clock_condition_init(&p->work) != 0 || clock_condition_init(&p->watch) != 0)
    goto out;
  if (pthread_create(&p->watcher, NULL, watch, p) != 0) goto out;
  p->ready = true;
  while (p->threads < settings->workers) {
    if (pthread_create(&p->workers[p->threads], NULL, work, p) != 0) goto out;
    p->threads++;
  }
  return p;
out:
  pool_close(p);
  return NULL;
}

void pool_wake(pool *p) {
  pthread_mutex_lock(&p->mutex);
  pthread_cond_signal(&p->work);
  pthread_cond_signal(&p->watch);
  pthread_mutex_unlock(&p->mutex);
}

int pool_busy(pool *p) {
  pthread_mutex_lock(&p->mutex);
  int busy = p->busy;
  pthread_mutex_unlock(&p->mutex);
  return busy;
}

void pool_stop(pool *p) {
  pthread_mutex_lock(&p->mutex);
  p->stopping = true;
  pthread_cond_broadcast(&p->work);
  pthread_cond_broadcast(&p->watch);
  pthread_mutex_unlock(&p->mutex);
  if (p->ready) pthread_join(p->watcher, NULL);
  for (int i = 0; i < p->threads; i++) pthread_join(p->workers[i], NULL);
  p->ready = false;
  p->threads = 0;
  while (p->jobs) {
    active *a = p->jobs;
    p->jobs = a->next;
    fail(&a->failure, STATUS_CANCELLED, "", "the service stopped");
    conclude(p, a);
  }
}

void pool_close(pool *p) {
  if (!p) return;
  pool_stop(p);
  pthread_cond_destroy(&p->work);
  pthread_cond_destroy(&p->watch);
  pthread_mutex_destroy(&p->mutex);
  free(p->workers);
  free(p);
}
