/* job_out.c: the job resource. Times of solving, node, kernel and attempts stand here and not in
   the result, which holds only what the case determines. */
#include "clock.h"
#include "json_out.h"
#include "problem.h"
#include "routes.h"

#include <math.h>

static void member(buffer *b, const char *name, const char *text) {
  if (!text || !*text) return;
  buffer_format(b, ", \"%s\": ", name);
  json_out_string(b, text);
}

static void number(buffer *b, const char *name, double value) {
  if (!isfinite(value)) return;
  buffer_format(b, ", \"%s\": ", name);
  json_out_number(b, value, INFINITY);
}

static void moment(buffer *b, const char *name, double wall) {
  char text[CLOCK_TEXT];
  clock_text(wall, text);
  member(b, name, text);
}

static void labels(buffer *b, const document *d) {
  if (d->label_count == 0) return;
  buffer_text(b, ", \"labels\": {");
  for (int i = 0; i < d->label_count; i++) {
    if (i) buffer_text(b, ", ");
    json_out_string(b, d->labels[i].name);
    buffer_text(b, ": ");
    json_out_string(b, d->labels[i].value);
  }
  buffer_text(b, "}");
}

double job_expected(const service *s, const job_view *job) {
  double usual = metrics_usual_seconds(s->metrics);
  double running = clock_wall() - job->started;
  switch (job->state) {
  case JOB_QUEUED:
    return usual > 0 && job->position >= 0 ? usual * (1 + (double)job->position / s->workers) : NAN;
  case JOB_RUNNING:
    if (job->fraction > 0.01) return running * (1 - job->fraction) / job->fraction;
    return usual > running ? usual - running : NAN;
  case JOB_DONE:
  case JOB_FAILED:
  case JOB_CANCELLED: break;
  }
  return NAN;
}

static void progress(buffer *b, const service *s, const job_view *job) {
  number(b, "fraction", job->fraction);
  if (job->state == JOB_QUEUED && job->position >= 0)
    buffer_format(b, ", \"queue_position\": %d", job->position);
  number(b, "expected_seconds_left", job_expected(s, job));
}

static void ending(buffer *b, const job_view *job) {
  const char *verdict = job->state == JOB_DONE ? verdict_names[job->verdict] : NULL;
  number(b, "waiting_seconds", job->started - job->created);
  number(b, "solving_seconds", job->finished - job->started);
  if (job->state == JOB_DONE) {
    buffer_text(b, ", \"verdict\": ");
    if (verdict)
      json_out_string(b, verdict);
    else
      buffer_text(b, "null");
    buffer_format(b, ", \"result\": \"/v1/jobs/%s/result\"", job->id);
  } else if (job->state == JOB_FAILED) {
    buffer_text(b, ", \"failure\": ");
    problem_of_fault(b, &job->failure);
  }
}

void job_write(buffer *b, const service *s, const job_view *job) {
  const document *d = job->document;
  buffer_text(b, "{\"id\": ");
  json_out_string(b, job->id);
  member(b, "kind", job->kind->name);
  member(b, "state", job_state_names[job->state]);
  member(b, "title", d->title);
  labels(b, d);
  if (d->hash[0]) buffer_format(b, ", \"case\": \"sha256:%s\"", d->hash);
  moment(b, "created", job->created);
  moment(b, "started", job->started);
  moment(b, "finished", job->finished);
  progress(b, s, job);
  buffer_format(b, ", \"attempts\": %d", job->attempts);
  ending(b, job);
  member(b, "traceparent", job->trace);
  member(b, "node", s->node);
  member(b, "kernel", s->kernel);
  buffer_text(b, "}");
}
