/* route_health.c: what operators ask. */
#include "embedded.h"
#include "json_out.h"
#include "routes.h"

static void reply_state(reply *r, int status, const char *state) {
  r->status = status;
  r->type = "application/json";
  buffer_format(&r->body, "{\"status\": \"%s\"}\n", state);
}

void route_health(service *s, request *q, reply *r) {
  (void)s, (void)q;
  reply_state(r, 200, "alive");
}

void route_ready(service *s, request *q, reply *r) {
  (void)q;
  if (service_is_ready(s)) {
    reply_state(r, 200, "ready");
    return;
  }
  bool stopping = atomic_load(&s->draining);
  reply_header_set(r, "Retry-After", "%d", retry_after(s));
  reply_problem(r, 503, stopping ? "the service is stopping" : "the service failed its self-test");
}

void route_metrics(service *s, request *q, reply *r) {
  gauges g = {.workers = s->workers, .started = s->started, .kernel = s->kernel};
  (void)q;
  s->store->count(s->store, g.jobs, &g.oldest_queued);
  g.busy = pool_busy(s->pool);
  http_count(s->http, &g.connections, &g.waiters);
  g.ready = service_is_ready(s);
  r->status = 200;
  r->type = "text/plain; version=0.0.4; charset=utf-8";
  reply_header_set(r, "Vary", "Accept-Encoding");
  metrics_write(s->metrics, &g, &r->body);
}

void route_specification(service *s, request *q, reply *r) {
  (void)s, (void)q;
  r->status = 200;
  r->type = "application/json";
  r->held = embedded_specification.bytes;
  r->held_length = embedded_specification.length;
  reply_header_set(r, "Cache-Control", "public, max-age=300");
  reply_header_set(r, "Vary", "Accept-Encoding");
}
