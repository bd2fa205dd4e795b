/* routes.h: private to the routes and the service that they belong to. */
#ifndef CORESOAK_ROUTES_H
#define CORESOAK_ROUTES_H

#include "exchange.h"
#include "http.h"
#include "metrics.h"
#include "pool.h"
#include "service.h"

#include <stdatomic.h>

enum { LONGEST_WAIT = 30 /* s of Prefer: wait */, MOST_ROUTES = 24 };

struct service {
  options options;
  const job_kind *const *kinds;
  const library *materials;
  store *store;
  pool *pool;
  metrics *metrics;
  http *http;
  int workers;
  double started; /* s since 1970 */
  const char *kernel;
  char node[64];
  const char *patterns[MOST_ROUTES + 1]; /* of the routes, for the metrics */
  atomic_bool sound, draining;           /* passed its self-test; takes no new jobs */
};

typedef void route_function(service *s, request *q, reply *r);

/* What headers alone tell: refuses, or leaves status 0; or says that the answer will be slow. */
typedef route_function admit_function;

typedef struct route {
  const char *pattern; /* segments; {name} stands for any, which goes to request.argument */
  route_function *get, *post, *remove;
  admit_function *admit; /* NULL: nothing to look at */
} route;

/* Ends with a pattern of NULL. */
extern const route routes[];

/* The http_app of a service. */
http_app route_app(service *s);

route_function route_health, route_ready, route_metrics, route_specification;
route_function route_jobs, route_job, route_job_cancel, route_result, route_submit;
admit_function admit_job, admit_result;
route_function route_materials, route_material;

/* The kind whose jobs are posted to /v1/<path>, NULL if there is none. */
const job_kind *service_kind(const service *s, const char *path);

/* Whole seconds after which a refused or waiting caller should ask again: 1 to 60. */
int retry_after(service *s);
int retry_after_job(service *s, const job_view *job);

/* Ends the waits for a job, and counts and logs that it ended. */
void service_job_ended(void *self, const char *id, const job_view *job);

/* job_out.c: a job as JSON (without what it answered). */
void job_write(buffer *b, const service *s, const job_view *job);

/* Seconds until it will probably have ended; NAN if nothing is known. */
double job_expected(const service *s, const job_view *job);

/* A reply that a query parameter is not known here; false if all are. */
bool refuse_unknown_parameters(const request *q, reply *r, const char *const *known);

#endif
