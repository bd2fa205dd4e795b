/* service.c: the parts put together, and taken apart in order. */
#include "service.h"

#include "clock.h"
#include "cpu.h"
#include "log.h"
#include "routes.h"
#include "self_test.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

enum {
  HTTP_THREADS = 2,           /* reading and writing of bytes; the arithmetic has its own */
  LARGEST_ANSWER = 256 << 20, /* bytes of one result's JSON */
  KEPT_BYTES = 512 << 20,     /* of all results that are kept */
  LONGEST_RETRY = 60          /* s */
};

static const double DRAIN_LOOK = 0.01; /* s between looks at what still runs */
static const double LAST_REPLIES = 2;  /* s for replies once all waits are over */

const job_kind *service_kind(const service *s, const char *path) {
  for (int i = 0; s->kinds[i]; i++)
    if (strcmp(s->kinds[i]->path, path) == 0) return s->kinds[i];
  return NULL;
}

static int whole_seconds(double seconds) {
  if (!(seconds > 1)) return 1;
  return seconds < LONGEST_RETRY ? (int)ceil(seconds) : LONGEST_RETRY;
}

int retry_after(service *s) {
  long jobs[JOB_STATES];
  double age;
  s->store->count(s->store, jobs, &age);
  return whole_seconds(metrics_usual_seconds(s->metrics) * (double)jobs[JOB_QUEUED] / s->workers);
}

int retry_after_job(service *s, const job_view *job) {
  return whole_seconds(job_expected(s, job));
}

static void log_job(const job_view *job) {
  log_line l;
  bool good = job->state != JOB_FAILED;
  log_begin(&l, good ? LOG_LEVEL_INFO : LOG_LEVEL_WARNING, "job_ended");
  log_text(&l, "job", job->id);
  log_text(&l, "kind", job->kind->name);
  log_text(&l, "state", job_state_names[job->state]);
  log_text(&l, "case", job->document->hash);
  log_number(&l, "waiting_seconds", job->started - job->created);
  log_number(&l, "solving_seconds", job->finished - job->started);
  log_text(&l, "why", good ? "" : job->failure.is);
  log_text(&l, "traceparent", job->trace);
  log_end(&l);
}

void service_job_ended(void *self, const char *id, const job_view *job) {
  service *s = self;
  if (job) {
    metrics_job(s->metrics, job->kind, job->state, job->started - job->created,
                job->finished - job->started);
    if (!s->options.quiet || job->state == JOB_FAILED) log_job(job);
  }
  http_wake(s->http, id);
}

/* From a worker. What was cancelled has been told already by who cancelled it. */
static void worker_ended_job(void *self, const char *id, const job_view *job) {
  if (!job || job->state != JOB_CANCELLED) service_job_ended(self, id, job);
}

static bool open_parts(service *s, char *message, size_t size) {
  const options *o = &s->options;
  for (int i = 0; i < MOST_ROUTES && routes[i].pattern; i++) s->patterns[i] = routes[i].pattern;
  s->metrics = metrics_new(s->kinds, s->patterns);
  s->store = store_memory_open(o->queue, o->kept, KEPT_BYTES);
  snprintf(message, size, "out of memory");
  if (!s->metrics || !s->store) return false;
  http_settings web = {o->listen,        o->connections, HTTP_THREADS,  o->header_deadline,
                       o->body_deadline, o->idle,        o->least_rate, o->body_limit};
  http_app app = route_app(s);
  pool_settings workers = {s->store,       s->workers,       o->time_limit,
                           LARGEST_ANSWER, worker_ended_job, s};
  s->pool = pool_open(&workers);
  snprintf(message, size, "the workers could not be started");
  if (!s->pool) return false;
  s->http = http_open(&web, &app, message, size);
  if (!s->http) return false;
  snprintf(message, size, "the threads of HTTP could not be started");
  return http_start(s->http);
}

/* Workers call HTTP and HTTP calls the pool, so the workers end first and the pool goes last. */
static void free_service(service *s) {
  if (s->pool) pool_stop(s->pool);
  http_close(s->http, LAST_REPLIES);
  pool_close(s->pool);
  if (s->store) s->store->close(s->store);
  metrics_free(s->metrics);
  free(s);
}

service *service_open(const options *o, const job_kind *const *kinds, const library *materials,
                      char *message, size_t size) {
  char fault[128] = "";
  service *s = calloc(1, sizeof *s);
  snprintf(message, size, "out of memory");
  if (!s) return NULL;
  s->options = *o;
  s->kinds = kinds;
  s->materials = materials;
  s->started = clock_wall();
  s->workers = o->workers > 0 ? o->workers : cpu_workers("");
  arithmetic_in_one_thread();
  s->kernel = arithmetic_kernel();
  if (gethostname(s->node, sizeof s->node - 1) != 0) s->node[0] = '\0';
  bool sound = self_test(fault, sizeof fault);
  if (!sound) log_event(LOG_LEVEL_ERROR, "self_test_failed", "why", fault);
  atomic_init(&s->sound, sound);
  atomic_init(&s->draining, false);
  if (open_parts(s, message, size)) return s;
  free_service(s);
  return NULL;
}

int service_port(const service *s) {
  return http_port(s->http);
}

bool service_is_ready(const service *s) {
  return atomic_load(&s->sound) && !atomic_load(&s->draining);
}

/* Jobs that wait or run. */
static long unfinished(service *s) {
  long jobs[JOB_STATES];
  double age;
  s->store->count(s->store, jobs, &age);
  return jobs[JOB_QUEUED] + jobs[JOB_RUNNING];
}

/* Cancels what is left, so that its waiters hear of it. */
static long cancel_rest(service *s) {
  long count = 0;
  job_view job;
  for (int state = JOB_QUEUED; state <= JOB_RUNNING; state++) {
    job_filter filter = {.state = job_state_names[state]};
    while (s->store->list(s->store, &filter, &job, 1) == 1) {
      if (s->store->cancel(s->store, job.id) == 0) count++;
      http_wake(s->http, job.id);
      s->store->release(s->store, &job);
    }
  }
  return count;
}

long service_close(service *s) {
  double until = clock_steady() + s->options.drain;
  atomic_store(&s->draining, true);
  http_quiesce(s->http);
  while (unfinished(s) > 0 && clock_steady() < until) usleep((useconds_t)(DRAIN_LOOK * 1e6));
  long cancelled = cancel_rest(s);
  free_service(s);
  return cancelled;
}
