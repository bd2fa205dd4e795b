/* route_jobs.c: jobs made, looked at, cancelled, and their results. */
#include "json_out.h"
#include "log.h"
#include "negotiate.h"
#include "problem.h"
#include "routes.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum {
  USUAL_LIST = 50,
  LONGEST_LIST = 200,
  TAG_TEXT = 64,
  TAG_DIGITS = 32,
  LARGE_RESULT = 256 << 10
};

static const char *const result_types[] = {"application/json", "text/csv", "text/plain", NULL};
static const char *const sent_types[] = {"application/json", "text/csv",
                                         "text/plain; charset=utf-8"};
static const media result_media[] = {MEDIA_JSON, MEDIA_CSV, MEDIA_TEXT};
static const char *const tag_endings[] = {"json", "csv", "txt"};

/* ---- results ---- */

/* Index into result_types that the caller takes, -1 if none. */
static int accepted_type(const request *q) {
  char accept[512];
  if (!request_header(q, "accept")) return 0;
  bool whole = request_list_header(q, "accept", accept, sizeof accept);
  return whole ? negotiate_media(accept, result_types) : 0;
}

static void refuse_form(reply *r) {
  reply_problem(r, 406, "a result is offered as application/json, as text/csv and as text/plain");
}

typedef struct held_view {
  store *store;
  job_view view;
} held_view;

static void release_view(void *self, void *hold) {
  held_view *h = hold;
  (void)self;
  h->store->release(h->store, &h->view);
  free(h);
}

/* The text of a result as the content of a reply, which holds the job until it has been sent. */
static bool lend_text(service *s, reply *r, const job_view *job) {
  held_view *h = malloc(sizeof *h);
  if (!h) return false;
  h->store = s->store;
  if (s->store->look(s->store, job->id, &h->view) != 0 || !h->view.text) {
    free(h);
    return false;
  }
  r->held = h->view.text;
  r->held_length = h->view.text_length;
  r->release = release_view;
  r->hold = h;
  return true;
}

/* A result never changes, so its tag is its content's hash with its form. */
static void tag_result(const job_view *job, int type, bool compressed, char tag[TAG_TEXT]) {
  snprintf(tag, TAG_TEXT, "\"%.*s-%s%s\"", TAG_DIGITS, job->text_hash, tag_endings[type],
           compressed ? "-gzip" : "");
}

/* True, and a 304, if the caller has this result already, in whichever coding. */
static bool unchanged(const request *q, reply *r, const job_view *job, int type) {
  char named[1024], plain[TAG_TEXT], compressed[TAG_TEXT];
  if (q->method == METHOD_POST || !request_list_header(q, "if-none-match", named, sizeof named))
    return false;
  tag_result(job, type, false, plain);
  tag_result(job, type, true, compressed);
  bool has_plain = negotiate_none_match(named, plain);
  if (!has_plain && !negotiate_none_match(named, compressed)) return false;
  r->status = 304;
  reply_header_set(r, "ETag", "%s", has_plain ? plain : compressed);
  return true;
}

static void reply_done(service *s, const request *q, reply *r, const job_view *job) {
  int type = accepted_type(q);
  char tag[TAG_TEXT];
  if (type < 0) {
    refuse_form(r);
    return;
  }
  reply_header_set(r, "Vary", "Accept, Accept-Encoding");
  reply_header_set(r, "Cache-Control", "private, no-cache");
  if (unchanged(q, r, job, type)) return;
  r->status = 200;
  r->type = sent_types[type];
  if (result_media[type] == MEDIA_JSON) {
    if (!lend_text(s, r, job)) reply_problem(r, 503, "the result is no longer kept");
  } else if (job->kind->write(job->document, job->answer, result_media[type], &r->body) != 0) {
    refuse_form(r);
  }
  if (r->status != 200) return;
  tag_result(job, type, reply_compresses(r), tag);
  reply_header_set(r, "ETag", "%s", tag);
}

/* The outcome of a job that has ended. */
static void reply_ended(service *s, const request *q, reply *r, const job_view *job) {
  switch (job->state) {
  case JOB_DONE: reply_done(s, q, r, job); break;
  case JOB_CANCELLED: reply_problem(r, 410, job->failure.is); break;
  case JOB_FAILED:
    r->status = problem_http_status(job->failure.status);
    r->type = "application/problem+json";
    problem_of_fault(&r->body, &job->failure);
    if (r->status == 503) reply_header_set(r, "Retry-After", "%d", retry_after(s));
    break;
  case JOB_QUEUED:
  case JOB_RUNNING: break;
  }
}

static bool is_over(const job_view *job) {
  return job->state != JOB_QUEUED && job->state != JOB_RUNNING;
}

/* ---- jobs looked at ---- */

static void reply_job(service *s, reply *r, const job_view *job, int status) {
  r->status = status;
  r->type = "application/json";
  job_write(&r->body, s, job);
  buffer_text(&r->body, "\n");
}

/* Looks up the job of the path; false with a 404. */
static bool look(service *s, request *q, reply *r, job_view *job) {
  static const char *const none[] = {NULL};
  if (refuse_unknown_parameters(q, r, none)) return false;
  if (strlen(q->argument) >= sizeof q->job || s->store->look(s->store, q->argument, job) != 0) {
    reply_problem(r, 404, "no job has this id, or it ended so long ago that it is no longer kept");
    return false;
  }
  memcpy(q->job, job->id, sizeof q->job);
  return true;
}

void route_job(service *s, request *q, reply *r) {
  job_view job;
  if (!look(s, q, r, &job)) return;
  if (!is_over(&job)) reply_header_set(r, "Retry-After", "%d", retry_after_job(s, &job));
  reply_job(s, r, &job, 200);
  s->store->release(s->store, &job);
}

/* Rows are written when they are asked for, which takes a while for a large result. */
void admit_result(service *s, request *q, reply *r) {
  job_view job;
  int type = accepted_type(q);
  (void)r;
  if (type < 0 || result_media[type] == MEDIA_JSON) return;
  if (strlen(q->argument) >= sizeof q->job || s->store->look(s->store, q->argument, &job) != 0)
    return;
  q->slow = job.text_length > LARGE_RESULT;
  s->store->release(s->store, &job);
}

void route_result(service *s, request *q, reply *r) {
  job_view job;
  if (!look(s, q, r, &job)) return;
  if (is_over(&job)) {
    reply_ended(s, q, r, &job);
  } else {
    reply_problem(r, 409, "the job has not ended");
    reply_header_set(r, "Retry-After", "%d", retry_after_job(s, &job));
  }
  s->store->release(s->store, &job);
}

static void cancel(service *s, const char *id) {
  job_view job;
  if (s->store->cancel(s->store, id) != 0) return;
  pool_wake(s->pool);
  bool there = s->store->look(s->store, id, &job) == 0;
  service_job_ended(s, id, there ? &job : NULL);
  if (there) s->store->release(s->store, &job);
}

void route_job_cancel(service *s, request *q, reply *r) {
  job_view job;
  if (!look(s, q, r, &job)) return;
  s->store->release(s->store, &job);
  cancel(s, q->argument);
  if (!look(s, q, r, &job)) return;
  if (job.state == JOB_CANCELLED)
    reply_job(s, r, &job, 200);
  else
    reply_problem(r, 409, "the job has already ended");
  s->store->release(s->store, &job);
}

/* ---- the list ---- */

/* Reads state, kind, label ("name:value"), limit and cursor; false with a 400. */
static bool read_filter(const request *q, reply *r, job_filter *filter, int *limit,
                        char text[4][128]) {
  static const char *const known[] = {"state", "kind", "label", "limit", "cursor", NULL};
  char number[24];
  if (refuse_unknown_parameters(q, r, known)) return false;
  if (request_parameter(q, "state", text[0], sizeof text[0])) filter->state = text[0];
  if (request_parameter(q, "kind", text[1], sizeof text[1])) filter->kind = text[1];
  if (request_parameter(q, "label", text[2], sizeof text[2])) {
    char *colon = strchr(text[2], ':');
    if (!colon) {
      reply_problem(r, 400, "label must be NAME:VALUE");
      return false;
    }
    *colon = '\0';
    filter->label = text[2];
    filter->label_value = colon + 1;
  }
  if (request_parameter(q, "limit", number, sizeof number)) *limit = atoi(number);
  if (request_parameter(q, "cursor", number, sizeof number)) filter->before = atol(number);
  bool known_state = !filter->state;
  for (int i = 0; i < JOB_STATES && !known_state; i++)
    known_state = strcmp(job_state_names[i], filter->state) == 0;
  if (known_state && *limit >= 1 && *limit <= LONGEST_LIST && filter->before >= 0) return true;
  reply_problem(r, 400,
                known_state ? "limit must be 1 to 200, cursor one that a list gave"
                            : "state must be queued, running, done, failed or cancelled");
  return false;
}

void route_jobs(service *s, request *q, reply *r) {
  job_filter filter = {0};
  char text[4][128];
  int limit = USUAL_LIST;
  if (!read_filter(q, r, &filter, &limit, text)) return;
  job_view *jobs = calloc((size_t)limit + 1, sizeof *jobs);
  if (!jobs) {
    reply_problem(r, 503, "out of memory");
    return;
  }
  int count = s->store->list(s->store, &filter, jobs, limit + 1);
  r->status = 200;
  r->type = "application/json";
  buffer_text(&r->body, "{\"jobs\": [");
  for (int i = 0; i < count && i < limit; i++) {
    if (i) buffer_text(&r->body, ", ");
    job_write(&r->body, s, &jobs[i]);
  }
  buffer_text(&r->body, "], \"next\": ");
  if (count > limit)
    buffer_format(&r->body, "\"%ld\"}\n", jobs[limit - 1].number);
  else
    buffer_text(&r->body, "null}\n");
  for (int i = 0; i < count; i++) s->store->release(s->store, &jobs[i]);
  free(jobs);
}

/* ---- jobs made ---- */

static void refuse_busy(service *s, reply *r, const char *why) {
  reply_problem(r, 503, why);
  reply_header_set(r, "Retry-After", "%d", retry_after(s));
}

void admit_job(service *s, request *q, reply *r) {
  long jobs[JOB_STATES];
  double age;
  const char *coding = request_header(q, "content-encoding");
  if (coding && strcasecmp(coding, "identity") != 0) {
    reply_problem(r, 415, "a request's body is read without a content coding only");
    reply_header_set(r, "Accept-Encoding", "identity");
    return;
  }
  if (!media_type_is(request_header(q, "content-type"), "application/json")) {
    reply_problem(r, 415, "a job document must come with Content-Type: application/json");
    reply_header_set(r, "Accept-Post", "application/json");
    return;
  }
  if (accepted_type(q) < 0) {
    refuse_form(r);
    return;
  }
  s->store->count(s->store, jobs, &age);
  if (atomic_load(&s->draining)) {
    refuse_busy(s, r, "the service is stopping");
    r->close = true;
  } else if (!atomic_load(&s->sound)) {
    refuse_busy(s, r, "the service failed its self-test");
  } else if (jobs[JOB_QUEUED] >= s->options.queue) {
    metrics_rejected(s->metrics, REJECTED_FULL);
    refuse_busy(s, r, "the queue is full");
  }
}

static void reply_faults(reply *r, const fault_list *faults) {
  if (faults->no_memory) {
    reply_problem(r, 503, "out of memory");
    return;
  }
  r->status = faults->status;
  r->type = "application/problem+json";
  problem_write(&r->body, faults->status, NULL, faults);
}

/* Makes a job of the body; false with a refusal. */
static bool make_job(service *s, request *q, reply *r) {
  fault_list faults;
  document *d = NULL;
  bool made = false;
  faults_init(&faults);
  const char *bytes = q->body.bytes ? q->body.bytes : "";
  if (document_read(bytes, q->body.length, service_kind(s, q->argument), s->materials, &d,
                    &faults) != 0) {
    reply_faults(r, &faults);
    goto out;
  }
  int outcome = s->store->add(s->store, d, q->trace, q->job);
  if (outcome == 0) {
    d = NULL; /* the store's now */
    made = true;
    pool_wake(s->pool);
  } else {
    if (outcome == -1) metrics_rejected(s->metrics, REJECTED_FULL);
    refuse_busy(s, r, outcome == -1 ? "the queue is full" : "out of memory");
  }
out:
  buffer_free(&q->body);
  document_free(d);
  faults_free(&faults);
  return made;
}

/* Seconds that the caller wants to wait for a result, with what is to be said of its wish. */
static double wait_wanted(const service *s, const request *q, reply *r) {
  char prefer[512];
  bool given = request_list_header(q, "prefer", prefer, sizeof prefer);
  preference p = negotiate_prefer(given ? prefer : NULL);
  if (!isnan(p.wait)) {
    double wait = fmin(p.wait, LONGEST_WAIT);
    reply_header_set(r, "Preference-Applied", "wait=%d", (int)wait);
    return wait;
  }
  if (p.respond_async) reply_header_set(r, "Preference-Applied", "respond-async");
  return p.respond_async ? 0 : s->options.wait;
}

/* What is known of the job once the wait is over. Who wanted no wait is told of the job, even if a
 * worker has been faster than this reply. */
static void reply_outcome(service *s, request *q, reply *r) {
  job_view job;
  if (s->store->look(s->store, q->job, &job) != 0) {
    refuse_busy(s, r, "the job has ended, and so many after it that its result is no longer kept");
    return;
  }
  reply_header_set(r, "Location", "/v1/jobs/%s", job.id);
  if (is_over(&job) && q->waited) {
    reply_ended(s, q, r, &job);
  } else {
    reply_header_set(r, "Retry-After", "%d", retry_after_job(s, &job));
    reply_job(s, r, &job, 202);
  }
  s->store->release(s->store, &job);
}

void route_submit(service *s, request *q, reply *r) {
  static const char *const none[] = {NULL};
  if (!q->job[0]) {
    if (refuse_unknown_parameters(q, r, none) || !make_job(s, q, r)) return;
    r->wait = wait_wanted(s, q, r);
    if (r->wait > 0) return;
  }
  /* who leaves without having been told of the job can never ask for it */
  if (q->departed) cancel(s, q->job);
  reply_outcome(s, q, r);
}
