/* route.c: the table of routes, and the way of a request through it. */
#include "routes.h"

#include "log.h"
#include "negotiate.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

/* "/v1/{kind}" stands last: it matches the paths of the job kinds only. */
const route routes[] = {
    {"/healthz", route_health, NULL, NULL, NULL},
    {"/readyz", route_ready, NULL, NULL, NULL},
    {"/metrics", route_metrics, NULL, NULL, NULL},
    {"/openapi.json", route_specification, NULL, NULL, NULL},
    {"/v1/jobs", route_jobs, NULL, NULL, NULL},
    {"/v1/jobs/{id}", route_job, NULL, route_job_cancel, NULL},
    {"/v1/jobs/{id}/result", route_result, NULL, NULL, admit_result},
    {"/v1/materials", route_materials, NULL, NULL, NULL},
    {"/v1/materials/{name}", route_material, NULL, NULL, NULL},
    {"/v1/{kind}", NULL, route_submit, NULL, admit_job},
    {NULL, NULL, NULL, NULL, NULL},
};

/* Compares segment by segment; a {name} takes one that is not empty. */
static bool matches(const char *pattern, const char *path, char argument[ARGUMENT_TEXT]) {
  while (*pattern && *path) {
    size_t wanted = strcspn(pattern + 1, "/") + 1, given = strcspn(path + 1, "/") + 1;
    if (*path != '/') return false;
    if (pattern[1] == '{') {
      if (given < 2 || given > ARGUMENT_TEXT) return false;
      snprintf(argument, ARGUMENT_TEXT, "%.*s", (int)given - 1, path + 1);
    } else if (wanted != given || strncmp(pattern, path, wanted) != 0) {
      return false;
    }
    pattern += wanted;
    path += given;
  }
  return !*pattern && !*path;
}

static const route *find(service *s, request *q) {
  for (int i = 0; routes[i].pattern; i++) {
    if (!matches(routes[i].pattern, q->path, q->argument)) continue;
    if (routes[i].post && !service_kind(s, q->argument)) continue;
    q->route = i;
    return &routes[i];
  }
  return NULL;
}

static route_function *function_of(const route *found, method how) {
  switch (how) {
  case METHOD_GET:
  case METHOD_HEAD: return found->get;
  case METHOD_POST: return found->post;
  case METHOD_DELETE: return found->remove;
  case METHOD_OTHER: break;
  }
  return NULL;
}

static void refuse_method(const route *found, reply *r) {
  reply_problem(r, 405, NULL);
  reply_header_set(r, "Allow", "%s%s%s%s%s", found->get ? "GET, HEAD" : "",
                   found->get && found->remove ? ", " : "", found->remove ? "DELETE" : "",
                   (found->get || found->remove) && found->post ? ", " : "",
                   found->post ? "POST" : "");
}

static void admit(void *self, request *q, reply *r) {
  service *s = self;
  const route *found = find(s, q);
  if (!found)
    reply_problem(r, 404, NULL);
  else if (!function_of(found, q->method))
    refuse_method(found, r);
  else if (found->admit)
    found->admit(s, q, r);
}

static void answer(void *self, request *q, reply *r) {
  service *s = self;
  char accepted[512];
  bool listed = request_list_header(q, "accept-encoding", accepted, sizeof accepted);
  r->compress = listed && negotiate_gzip(accepted);
  function_of(&routes[q->route], q->method)(s, q, r);
}

static bool ended(void *self, const char *job) {
  service *s = self;
  job_view view;
  if (s->store->look(s->store, job, &view) != 0) return true;
  bool over = view.state != JOB_QUEUED && view.state != JOB_RUNNING;
  s->store->release(s->store, &view);
  return over;
}

static void done(void *self, const request *q, int status, size_t bytes, double seconds) {
  service *s = self;
  if (status > 0) metrics_request(s->metrics, q->route, q->method, status, seconds);
  if (s->options.quiet) return;
  log_line l;
  log_begin(&l, LOG_LEVEL_INFO, "request");
  log_text(&l, "method", q->method_text);
  log_text(&l, "target", q->target);
  log_number(&l, "status", status > 0 ? status : NAN);
  log_number(&l, "bytes", (double)bytes);
  log_number(&l, "seconds", seconds);
  log_text(&l, "job", q->job);
  log_text(&l, "traceparent", q->trace);
  log_text(&l, "note", q->departed ? "the caller went away" : "");
  log_end(&l);
}

static void refused(void *self, refusal why) {
  service *s = self;
  static const rejection reasons[] = {[REFUSED_AUDIT] = REJECTED_AUDIT,
                                      [REFUSED_SLOW] = REJECTED_SLOW,
                                      [REFUSED_TOO_LARGE] = REJECTED_TOO_LARGE};
  metrics_rejected(s->metrics, reasons[why]);
}

http_app route_app(service *s) {
  return (http_app){s, admit, answer, ended, done, refused};
}

bool refuse_unknown_parameters(const request *q, reply *r, const char *const *known) {
  char name[64], detail[160];
  if (!request_unknown_parameter(q, known, name, sizeof name)) return false;
  snprintf(detail, sizeof detail, "\"%s\" is not a parameter of this address%s%s", name,
           known[0] ? "; it takes " : "", known[0] ? known[0] : "");
  for (int i = 1; known[0] && known[i]; i++) {
    size_t used = strlen(detail);
    snprintf(detail + used, sizeof detail - used, ", %s", known[i]);
  }
  reply_problem(r, 400, detail);
  return true;
}
