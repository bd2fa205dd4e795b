/* metrics.c: counters as atomics, written as Prometheus text. No ids in labels. */
#include "metrics.h"

#include <math.h>
#include <stdatomic.h>
#include <stdio.h>
#include <stdlib.h>
#include <unistd.h>

enum {
  BOUNDS = 14,
  MOST_ROUTES = 24,
  MOST_KINDS = 8,
  LOWEST_STATUS = 200,
  STATUSES = 400,
  METHODS = 5
};

/* s; the same for requests, waiting and solving, so that they can be compared. */
static const double bounds[BOUNDS] = {0.001, 0.0025, 0.005, 0.01, 0.025, 0.05, 0.1,
                                      0.25,  0.5,    1,     2.5,  10,    60,   300};
static const double PART_OF_NEWEST = 0.1; /* in the running mean of solving times */

static const char *const method_names[METHODS] = {"GET", "HEAD", "POST", "DELETE", "other"};
static const char *const rejection_names[REJECTIONS] = {"headers", "slow", "too_large",
                                                        "queue_full"};

typedef atomic_ulong counter;

typedef struct histogram {
  counter count[BOUNDS + 1];
  counter nanoseconds;
} histogram;

struct metrics {
  const job_kind *const *kinds;
  const char *const *routes;
  int kind_count, route_count;
  counter requests[MOST_ROUTES + 1][METHODS][STATUSES]; /* the last row: no route */
  counter rejected[REJECTIONS];
  counter jobs[MOST_KINDS][JOB_STATES];
  histogram answering, waiting, solving[MOST_KINDS];
  _Atomic double usual;
};

metrics *metrics_new(const job_kind *const *kinds, const char *const *routes) {
  metrics *m = calloc(1, sizeof *m);
  if (!m) return NULL;
  m->kinds = kinds;
  m->routes = routes;
  while (m->kind_count < MOST_KINDS && kinds[m->kind_count]) m->kind_count++;
  while (m->route_count < MOST_ROUTES && routes[m->route_count]) m->route_count++;
  return m;
}

void metrics_free(metrics *m) {
  free(m);
}

static void observe(histogram *h, double seconds) {
  int i = 0;
  if (!(seconds >= 0)) seconds = 0;
  while (i < BOUNDS && seconds > bounds[i]) i++;
  atomic_fetch_add_explicit(&h->count[i], 1, memory_order_relaxed);
  atomic_fetch_add_explicit(&h->nanoseconds, (unsigned long)(seconds * 1e9), memory_order_relaxed);
}

static void count_one(counter *c) {
  atomic_fetch_add_explicit(c, 1, memory_order_relaxed);
}

static unsigned long get(counter *c) {
  return atomic_load_explicit(c, memory_order_relaxed);
}

void metrics_request(metrics *m, int route, method how, int status, double seconds) {
  if (route < 0 || route >= m->route_count) route = m->route_count;
  if (status < LOWEST_STATUS || status >= LOWEST_STATUS + STATUSES)
    status = LOWEST_STATUS + STATUSES - 1;
  count_one(&m->requests[route][how][status - LOWEST_STATUS]);
  observe(&m->answering, seconds);
}

void metrics_rejected(metrics *m, rejection why) {
  count_one(&m->rejected[why]);
}

void metrics_job(metrics *m, const job_kind *kind, job_state state, double waited, double solved) {
  int k = 0;
  while (k < m->kind_count && m->kinds[k] != kind) k++;
  if (k == m->kind_count) return;
  count_one(&m->jobs[k][state]);
  if (isnan(waited)) return;
  observe(&m->waiting, waited);
  observe(&m->solving[k], solved);
  double usual = atomic_load(&m->usual);
  atomic_store(&m->usual, usual > 0 ? usual + PART_OF_NEWEST * (solved - usual) : solved);
}

double metrics_usual_seconds(metrics *m) {
  return atomic_load(&m->usual);
}

static void head(buffer *b, const char *name, const char *type, const char *help) {
  buffer_format(b, "# HELP coresoak_%s %s\n# TYPE coresoak_%s %s\n", name, help, name, type);
}

static void gauge(buffer *b, const char *name, const char *help, double value) {
  head(b, name, "gauge", help);
  buffer_format(b, "coresoak_%s %.15g\n", name, value);
}

/* `label` is "" or one label with its value, such as kind="solve". */
static void write_histogram(buffer *b, const char *name, const char *label, histogram *h) {
  unsigned long below = 0;
  const char *comma = *label ? "," : "";
  for (int i = 0; i <= BOUNDS; i++) {
    char bound[32] = "+Inf";
    if (i < BOUNDS) snprintf(bound, sizeof bound, "%g", bounds[i]);
    below += get(&h->count[i]);
    buffer_format(b, "coresoak_%s_bucket{%s%sle=\"%s\"} %lu\n", name, label, comma, bound, below);
  }
  const char *open = *label ? "{" : "", *close = *label ? "}" : "";
  buffer_format(b, "coresoak_%s_sum%s%s%s %.9g\n", name, open, label, close,
                1e-9 * (double)get(&h->nanoseconds));
  buffer_format(b, "coresoak_%s_count%s%s%s %lu\n", name, open, label, close, below);
}

static void write_requests(metrics *m, buffer *b) {
  head(b, "http_requests_total", "counter", "Requests answered, by route, method and status.");
  for (int r = 0; r <= m->route_count; r++)
    for (int how = 0; how < METHODS; how++)
      for (int s = 0; s < STATUSES; s++) {
        unsigned long count = get(&m->requests[r][how][s]);
        if (count == 0) continue;
        buffer_format(
            b, "coresoak_http_requests_total{route=\"%s\",method=\"%s\",status=\"%d\"} %lu\n",
            r < m->route_count ? m->routes[r] : "none", method_names[how], s + LOWEST_STATUS,
            count);
      }
  head(b, "http_rejected_total", "counter",
       "Requests refused before a route saw them, or because the queue was full.");
  for (int i = 0; i < REJECTIONS; i++)
    buffer_format(b, "coresoak_http_rejected_total{reason=\"%s\"} %lu\n", rejection_names[i],
                  get(&m->rejected[i]));
  head(b, "http_request_seconds", "histogram",
       "Time from a request's first line to the end of its reply, waiting included.");
  write_histogram(b, "http_request_seconds", "", &m->answering);
}

static void write_jobs(metrics *m, buffer *b) {
  head(b, "jobs_total", "counter", "Jobs that ended, by kind and state.");
  for (int k = 0; k < m->kind_count; k++)
    for (int s = JOB_DONE; s < JOB_STATES; s++)
      buffer_format(b, "coresoak_jobs_total{kind=\"%s\",state=\"%s\"} %lu\n", m->kinds[k]->name,
                    job_state_names[s], get(&m->jobs[k][s]));
  head(b, "job_waiting_seconds", "histogram", "Time of a job in the queue.");
  write_histogram(b, "job_waiting_seconds", "", &m->waiting);
  head(b, "job_solving_seconds", "histogram", "Time of a job with the workers, by kind.");
  for (int k = 0; k < m->kind_count; k++) {
    char label[96];
    snprintf(label, sizeof label, "kind=\"%s\"", m->kinds[k]->name);
    write_histogram(b, "job_solving_seconds", label, &m->solving[k]);
  }
}

/* Memory that the process has in use now, from /proc/self/statm; 0 if that cannot be read. */
static double resident_bytes(void) {
  long whole, resident = 0;
  FILE *f = fopen("/proc/self/statm", "re");
  if (!f) return 0;
  if (fscanf(f, "%ld %ld", &whole, &resident) != 2) resident = 0;
  fclose(f);
  return (double)resident * (double)sysconf(_SC_PAGESIZE);
}

static void write_gauges(const gauges *g, buffer *b) {
  head(b, "build_info", "gauge", "Version of the service and kernel of its linear algebra.");
  buffer_format(b, "coresoak_build_info{version=\"%s\",kernel=\"%s\"} 1\n", CORESOAK_VERSION,
                g->kernel);
  head(b, "jobs", "gauge", "Jobs that are known, by state.");
  for (int s = 0; s < JOB_STATES; s++)
    buffer_format(b, "coresoak_jobs{state=\"%s\"} %ld\n", job_state_names[s], g->jobs[s]);
  gauge(b, "queue_depth", "Jobs that wait for a worker.", (double)g->jobs[JOB_QUEUED]);
  gauge(b, "queue_oldest_age_seconds", "Age of the oldest job that waits.", g->oldest_queued);
  gauge(b, "workers", "Workers.", g->workers);
  gauge(b, "workers_busy", "Workers that are running a task.", g->busy);
  gauge(b, "http_connections", "Open connections.", g->connections);
  gauge(b, "http_waiters", "Requests that wait for a job to end.", g->waiters);
  gauge(b, "ready", "1 when the service takes new jobs.", g->ready);
  gauge(b, "start_time_seconds", "When the service started, in seconds since 1970.", g->started);
  gauge(b, "resident_memory_bytes", "Memory in use.", resident_bytes());
}

void metrics_write(metrics *m, const gauges *g, buffer *b) {
  write_gauges(g, b);
  write_jobs(m, b);
  write_requests(m, b);
}
