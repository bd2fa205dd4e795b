/* The metrics' text: every line in the Prometheus exposition format 0.0.4 (names, HELP and TYPE
   before the samples, histograms that rise to their count). */
#include "metrics.h"

#include <criterion/criterion.h>
#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const job_kind kind = {.name = "solve"};
static const job_kind *const kinds[] = {&kind, NULL};
static const char *const routes[] = {"/healthz", "/v1/jobs/{id}", NULL};

static metrics *used(void) {
  metrics *m = metrics_new(kinds, routes);
  cr_assert(m);
  metrics_request(m, 0, METHOD_GET, 200, 0.0004);
  metrics_request(m, 1, METHOD_DELETE, 404, 0.002);
  metrics_request(m, -1, METHOD_OTHER, 404, 1000);
  metrics_job(m, &kind, JOB_DONE, 0.1, 2);
  metrics_job(m, &kind, JOB_FAILED, NAN, NAN);
  metrics_rejected(m, REJECTED_SLOW);
  return m;
}

static void write_all(metrics *m, buffer *b) {
  gauges g = {.jobs = {3, 1, 4, 1, 5},
              .oldest_queued = 2.5,
              .workers = 2,
              .ready = true,
              .kernel = "Haswell"};
  buffer_init(b, 0);
  metrics_write(m, &g, b);
  cr_assert_not(b->failed);
}

static void has(const buffer *b, const char *line) {
  char whole[256];
  snprintf(whole, sizeof whole, "\n%s\n", line);
  cr_assert(strstr(b->bytes, whole), "\"%s\" is missing", line);
}

Test(metrics, values) {
  metrics *m = used();
  buffer b;
  write_all(m, &b);
  has(&b, "coresoak_http_requests_total{route=\"/healthz\",method=\"GET\",status=\"200\"} 1");
  has(&b,
      "coresoak_http_requests_total{route=\"/v1/jobs/{id}\",method=\"DELETE\",status=\"404\"} 1");
  has(&b, "coresoak_http_requests_total{route=\"none\",method=\"other\",status=\"404\"} 1");
  has(&b, "coresoak_http_request_seconds_bucket{le=\"0.001\"} 1");
  has(&b, "coresoak_http_request_seconds_bucket{le=\"0.0025\"} 2");
  has(&b, "coresoak_http_request_seconds_bucket{le=\"300\"} 2");
  has(&b, "coresoak_http_request_seconds_bucket{le=\"+Inf\"} 3");
  has(&b, "coresoak_http_request_seconds_count 3");
  has(&b, "coresoak_jobs_total{kind=\"solve\",state=\"done\"} 1");
  has(&b, "coresoak_jobs_total{kind=\"solve\",state=\"failed\"} 1");
  has(&b, "coresoak_job_solving_seconds_sum{kind=\"solve\"} 2");
  has(&b, "coresoak_job_waiting_seconds_count 1");
  has(&b, "coresoak_http_rejected_total{reason=\"slow\"} 1");
  has(&b, "coresoak_jobs{state=\"done\"} 4");
  has(&b, "coresoak_queue_depth 3");
  has(&b, "coresoak_queue_oldest_age_seconds 2.5");
  has(&b, "coresoak_ready 1");
  cr_assert_float_eq(metrics_usual_seconds(m), 2, 1e-12);
  buffer_free(&b);
  metrics_free(m);
}

/* The name that a sample belongs to: without labels and a histogram's endings. */
static void family_of(const char *line, char name[128]) {
  static const char *const endings[] = {"_bucket", "_sum", "_count"};
  snprintf(name, 128, "%.*s", (int)strcspn(line, "{ "), line);
  for (int i = 0; i < 3; i++) {
    size_t n = strlen(name), e = strlen(endings[i]);
    if (n > e && strcmp(name + n - e, endings[i]) == 0 && strstr(name, "_seconds_"))
      name[n - e] = '\0';
  }
}

Test(metrics, every_sample_follows_its_help_and_type) {
  metrics *m = used();
  buffer b;
  char type[128] = "", help[128] = "", family[128], *rest = NULL;
  int samples = 0;
  write_all(m, &b);
  for (char *line = strtok_r(b.bytes, "\n", &rest); line; line = strtok_r(NULL, "\n", &rest)) {
    if (sscanf(line, "# HELP %127s", help) == 1) {
      cr_assert_eq(line[strlen(line) - 1], '.', "help is a sentence: %s", line);
      continue;
    }
    if (sscanf(line, "# TYPE %127s", type) == 1) continue;
    family_of(line, family);
    cr_assert_str_eq(family, type, "%s", line);
    cr_assert_str_eq(family, help, "%s", line);
    cr_assert_eq(strncmp(family, "coresoak_", 9), 0);
    for (const char *c = family; *c; c++)
      cr_assert(islower((unsigned char)*c) || isdigit((unsigned char)*c) || *c == '_');
    const char *value = strrchr(line, ' ');
    char *end;
    double number = strtod(value, &end);
    cr_assert(*end == '\0' && isfinite(number), "%s", line);
    samples++;
  }
  cr_assert(samples > 50);
  buffer_free(&b);
  metrics_free(m);
}
