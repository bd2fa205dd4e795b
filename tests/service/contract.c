/* contract.c: the contract of the service over real sockets, with kinds of job that only wait. */
#include "client.h"
#include "clock.h"
#include "trial.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>
#include <zlib.h>

enum { TEXT = 256 };

static int port;

/* Checks a status, showing what came instead; frees the answer. */
static void expect(answer a, int status, const char *what) {
  check(a.status == status, "%s: %d (got %d)", what, status, a.status);
  answer_free(&a);
}

static bool has(const answer *a, const char *name, const char *value) {
  char got[TEXT];
  return answer_header(a, name, got, sizeof got) && (!value || strcmp(got, value) == 0);
}

static void operators(void) {
  expect(ask(port, "GET", "/healthz", NULL, NULL), 200, "GET /healthz");
  expect(ask(port, "HEAD", "/healthz", NULL, NULL), 200, "HEAD /healthz");
  expect(ask(port, "GET", "/readyz", NULL, NULL), 200, "GET /readyz after the self-test");
  answer a = ask(port, "GET", "/metrics", NULL, NULL);
  check(a.status == 200 && strstr(a.body.bytes, "\ncoresoak_queue_depth 0\n"),
        "GET /metrics tells the queue's depth");
  check(strstr(a.body.bytes, "coresoak_http_requests_total{route=\"/healthz\",method=\"GET\"") != 0,
        "GET /metrics counts requests by route");
  check(has(&a, "Content-Type", "text/plain; version=0.0.4; charset=utf-8"),
        "GET /metrics has Prometheus' content type");
  answer_free(&a);
  a = ask(port, "GET", "/openapi.json", NULL, NULL);
  json_t *spec = answer_json(&a);
  check(a.status == 200 && spec, "GET /openapi.json is JSON");
  json_decref(spec);
  answer_free(&a);
}

/* RFC 9112 section 9.3: connections persist. */
static void keep_alive(void) {
  wire w;
  answer a;
  int good = 0;
  wire_open(&w, port, 5);
  for (int i = 0; i < 50; i++) {
    wire_text(&w, "GET /healthz HTTP/1.1\r\nHost: t\r\n\r\n");
    good += wire_read(&w, &a, false) && a.status == 200;
    answer_free(&a);
  }
  check(good == 50, "50 x /healthz on one connection (%d)", good);
  wire_text(&w, "GET /nothing HTTP/1.1\r\nHost: t\r\n\r\nGET /healthz HTTP/1.1\r\nHost: t\r\n\r\n");
  bool first = wire_read(&w, &a, false) && a.status == 404;
  answer_free(&a);
  bool second = wire_read(&w, &a, false) && a.status == 200;
  answer_free(&a);
  check(first && second, "two requests sent at once: 404, then 200 on the same connection");
  const char *text = "POST /v1/trials HTTP/1.1\r\nHost: t\r\nContent-Type: application/json\r\n"
                     "Content-Length: 2\r\n\r\n{}";
  for (int i = 0; i < 2; i++) {
    wire_text(&w, text);
    check(wire_read(&w, &a, false) && a.status == 200, "POST %d on that connection", i + 1);
    answer_free(&a);
  }
  wire_close(&w);
}

static void refusals(void) {
  answer a = ask(port, "GET", "/v2/solves", NULL, NULL);
  check(a.status == 404 && has(&a, "Content-Type", "application/problem+json"),
        "an unknown address: 404 as a problem document");
  check(answer_number(&a, "status") == 404, "the problem document states its status");
  answer_free(&a);
  a = ask(port, "DELETE", "/healthz", NULL, NULL);
  check(a.status == 405 && has(&a, "Allow", "GET, HEAD"), "DELETE /healthz: 405 with Allow");
  answer_free(&a);
  a = ask(port, "GET", "/v1/trials", NULL, NULL);
  check(a.status == 405 && has(&a, "Allow", "POST"), "GET /v1/trials: 405, Allow: POST");
  answer_free(&a);
  a = ask(port, "PUT", "/v1/jobs/x", NULL, NULL);
  check(a.status == 405 && has(&a, "Allow", "GET, HEAD, DELETE"), "PUT of a job: 405 with Allow");
  answer_free(&a);
  expect(ask(port, "POST", "/v1/solves", NULL, ""), 404, "a kind that this service does not have");
  expect(ask(port, "POST", "/v1/trials", NULL, "{}"), 415, "no content type");
  expect(ask(port, "POST", "/v1/trials", "Content-Type: text/plain\r\n", "{}"), 415, "plain text");
  expect(
      ask(port, "POST", "/v1/trials", "Content-Type: application/json; charset=latin1\r\n", "{}"),
      415, "JSON in another charset");
  expect(ask(port, "POST", "/v1/trials", "Content-Type: Application/JSON; charset=\"UTF-8\"\r\n",
             "{}"),
         200, "JSON in UTF-8, said differently");
  expect(post(port, "/v1/trials", "Content-Encoding: gzip\r\n", "{}"), 415, "a compressed request");
  expect(post(port, "/v1/trials", "Accept: image/png\r\n", "{}"), 406, "a picture wanted");
  expect(post(port, "/v1/trials", NULL, "{\"seconds\": "), 400, "half a document");
  expect(post(port, "/v1/trials?x=1", NULL, "{}"), 400, "an unknown query parameter");
  expect(ask(port, "GET", "/v1/jobs/00", NULL, NULL), 404, "an unknown job");
  expect(ask(port, "GET", "/v1/jobs/00/result", NULL, NULL), 404, "an unknown job's result");
  expect(ask(port, "DELETE", "/v1/jobs/00", NULL, NULL), 404, "cancelling an unknown job");
}

static void targets(void) {
  expect(ask(port, "GET", "http://test/healthz", NULL, NULL), 200, "a target with scheme and host");
  expect(ask(port, "GET", "/%68ealthz?", NULL, NULL), 200, "an encoded path, an empty query");
  expect(ask(port, "GET", "/healthz/", NULL, NULL), 404, "a slash too many");
  expect(ask(port, "GET", "//healthz", NULL, NULL), 404, "a slash too many before");
  expect(ask(port, "GET", "/v1/jobs/%2e%2e/result", NULL, NULL), 404, "dots are a name");
  wire w;
  answer a;
  wire_open(&w, port, 5);
  wire_text(&w, "GET /healthz HTTP/1.0\r\n\r\n");
  check(wire_read(&w, &a, false) && a.status == 200 && wire_ended(&w, 2),
        "HTTP/1.0 without Host: 200, then closed");
  answer_free(&a);
  wire_close(&w);
}

static void results(void) {
  char location[TEXT], result[TEXT + 16], tag[TEXT], header[2 * TEXT], csv_tag[TEXT];
  answer a = post(port, "/v1/trials", NULL, "{\"inputs\": {\"tasks\": 7, \"bytes\": 5000}}");
  check(a.status == 200 && answer_number(&a, "sum") == 28, "seven tasks are folded into one sum");
  check(answer_header(&a, "Location", location, sizeof location) &&
            strncmp(location, "/v1/jobs/", 9) == 0 && strlen(location) == 9 + 32,
        "the job's place is told, its id 32 hexadecimal digits");
  check(answer_header(&a, "ETag", tag, sizeof tag) && tag[0] == '"', "the result has a strong tag");
  snprintf(result, sizeof result, "%s/result", location);
  answer again = ask(port, "GET", result, NULL, NULL);
  check(again.status == 200 && again.body.length == a.body.length &&
            memcmp(again.body.bytes, a.body.bytes, a.body.length) == 0 && has(&again, "ETag", tag),
        "GET of the result: the same bytes and tag");
  answer_free(&again);
  again = ask(port, "HEAD", result, NULL, NULL);
  char length[32];
  check(again.status == 200 && answer_header(&again, "Content-Length", length, sizeof length) &&
            strtoul(length, NULL, 10) == a.body.length,
        "HEAD of the result: its length");
  answer_free(&again);
  snprintf(header, sizeof header, "If-None-Match: \"x\", W/%s\r\n", tag);
  again = ask(port, "GET", result, header, NULL);
  check(again.status == 304 && has(&again, "ETag", tag), "If-None-Match with its tag: 304");
  answer_free(&again);
  expect(ask(port, "GET", result, "If-None-Match: \"x\"\r\n", NULL), 200, "with another tag");
  again = ask(port, "GET", result, "Accept: text/csv, application/json;q=0.5\r\n", NULL);
  check(again.status == 200 && has(&again, "Content-Type", "text/csv") &&
            strcmp(again.body.bytes, "sum\r\n28\r\n") == 0,
        "Accept: text/csv gives rows");
  check(answer_header(&again, "ETag", csv_tag, sizeof csv_tag) && strcmp(tag, csv_tag) != 0,
        "rows have a tag of their own");
  answer_free(&again);
  answer_free(&a);
  a = post(port, "/v1/plains", NULL, "{}");
  answer_header(&a, "Location", location, sizeof location);
  snprintf(result, sizeof result, "%s/result", location);
  answer_free(&a);
  expect(ask(port, "GET", result, "Accept: text/csv\r\n", NULL), 406,
         "rows of a kind without rows");
}

static bool inflate_all(const answer *a, buffer *out) {
  char piece[4096];
  z_stream z = {.next_in = (Bytef *)a->body.bytes, .avail_in = (uInt)a->body.length};
  int outcome = Z_OK;
  if (inflateInit2(&z, 15 + 16) != Z_OK) return false;
  while (outcome == Z_OK) {
    z.next_out = (Bytef *)piece;
    z.avail_out = sizeof piece;
    outcome = inflate(&z, Z_NO_FLUSH);
    buffer_add(out, piece, sizeof piece - z.avail_out);
  }
  inflateEnd(&z);
  return outcome == Z_STREAM_END;
}

static void compression(void) {
  char location[TEXT], result[TEXT + 16], tag[TEXT], packed_tag[TEXT], header[TEXT + 32];
  answer plain = post(port, "/v1/trials", NULL, "{\"inputs\": {\"bytes\": 300000}}");
  answer_header(&plain, "Location", location, sizeof location);
  answer_header(&plain, "ETag", tag, sizeof tag);
  snprintf(result, sizeof result, "%s/result", location);
  answer packed = ask(port, "GET", result, "Accept-Encoding: br, gzip;q=0.8\r\n", NULL);
  buffer whole;
  buffer_init(&whole, 0);
  check(has(&packed, "Content-Encoding", "gzip") && packed.body.length < plain.body.length / 10,
        "a result compressed for who reads gzip (%zu of %zu bytes)", packed.body.length,
        plain.body.length);
  check(inflate_all(&packed, &whole) && whole.length == plain.body.length &&
            memcmp(whole.bytes, plain.body.bytes, whole.length) == 0,
        "and unpacked it is the same bytes");
  check(answer_header(&packed, "ETag", packed_tag, sizeof packed_tag) &&
            strcmp(tag, packed_tag) != 0,
        "its tag is another, since its bytes are");
  check(has(&packed, "Vary", "Accept, Accept-Encoding"), "Vary names what it depends on");
  snprintf(header, sizeof header, "If-None-Match: %s\r\n", packed_tag);
  expect(ask(port, "GET", result, header, NULL), 304, "the compressed tag counts as well");
  answer_free(&packed);
  packed = ask(port, "GET", result, "Accept-Encoding: gzip;q=0, identity\r\n", NULL);
  check(!has(&packed, "Content-Encoding", NULL) && packed.body.length == plain.body.length,
        "gzip;q=0 is respected");
  answer_free(&packed);
  answer_free(&plain);
  buffer_free(&whole);
}

/* Waits until a job has a state; false after five seconds. */
static bool becomes(const char *location, const char *state) {
  for (int i = 0; i < 500; i++) {
    answer a = ask(port, "GET", location, NULL, NULL);
    bool there = answer_text_is(&a, "state", state);
    answer_free(&a);
    if (there) return true;
    usleep(10000);
  }
  return false;
}

static void waiting(void) {
  char location[TEXT], result[TEXT + 16], value[TEXT];
  answer a =
      post(port, "/v1/trials", "Prefer: respond-async\r\n", "{\"inputs\": {\"seconds\": 0.4}}");
  check(a.status == 202 && has(&a, "Preference-Applied", "respond-async"),
        "respond-async: 202, and told so");
  check(answer_header(&a, "Location", location, sizeof location) && has(&a, "Retry-After", NULL),
        "202 has Location and Retry-After");
  answer_free(&a);
  snprintf(result, sizeof result, "%s/result", location);
  a = ask(port, "GET", result, NULL, NULL);
  check(a.status == 409 && has(&a, "Retry-After", NULL),
        "its result before the end: 409, Retry-After");
  answer_free(&a);
  check(becomes(location, "running") || becomes(location, "done"), "it runs");
  check(becomes(location, "done"), "it becomes done by itself");
  expect(ask(port, "GET", result, NULL, NULL), 200, "its result after the end");
  a = ask(port, "GET", location, NULL, NULL);
  check(answer_number(&a, "solving_seconds") > 0.35 && answer_number(&a, "fraction") == 1 &&
            answer_text_is(&a, "verdict", "meets") && answer_text_is(&a, "result", result),
        "the job tells its time, verdict and result");
  answer_free(&a);

  double began = clock_steady();
  a = post(port, "/v1/trials", "Prefer: wait=1\r\n", "{\"inputs\": {\"seconds\": 3}}");
  double took = clock_steady() - began;
  check(a.status == 202 && took > 0.95 && took < 1.4, "wait=1 on a job of 3 s: 202 after %.2f s",
        took);
  check(answer_header(&a, "Preference-Applied", value, sizeof value) && !strcmp(value, "wait=1"),
        "the wait is told");
  answer_header(&a, "Location", location, sizeof location);
  answer_free(&a);
  expect(ask(port, "DELETE", location, NULL, NULL), 200, "it is cancelled");
  a = post(port, "/v1/trials", "Prefer: handling=strict, wait=100\r\n",
           "{\"inputs\": {\"seconds\": 0.1}}");
  check(a.status == 200 && has(&a, "Preference-Applied", "wait=30"), "wait=100 is cut to 30");
  answer_free(&a);
  began = clock_steady();
  expect(post(port, "/v1/trials", NULL, "{\"inputs\": {\"seconds\": 0.3}}"), 200,
         "a plain request waits");
  took = clock_steady() - began;
  check(took > 0.29 && took < 0.6, "and no longer than its job (%.3f s)", took);
}

static void cancelling(void) {
  char location[TEXT], result[TEXT + 16];
  answer a =
      post(port, "/v1/trials", "Prefer: respond-async\r\n", "{\"inputs\": {\"seconds\": 30}}");
  answer_header(&a, "Location", location, sizeof location);
  answer_free(&a);
  snprintf(result, sizeof result, "%s/result", location);
  check(becomes(location, "running"), "a long job runs");
  double asked = clock_steady();
  a = ask(port, "DELETE", location, NULL, NULL);
  check(a.status == 200 && answer_text_is(&a, "state", "cancelled"),
        "DELETE answers the cancelled job");
  answer_free(&a);
  for (int i = 0; i < 1000 && atomic_load(&trial_running) > 0; i++) usleep(1000);
  double took = atomic_load(&trial_stopped) - asked;
  check(atomic_load(&trial_running) == 0 && took < 0.1,
        "its arithmetic stopped within 0.1 s (%.3f)", took);
  expect(ask(port, "GET", result, NULL, NULL), 410, "its result is gone");
  expect(ask(port, "DELETE", location, NULL, NULL), 200, "cancelling it again changes nothing");
  a = post(port, "/v1/trials", NULL, "{}");
  answer_header(&a, "Location", location, sizeof location);
  answer_free(&a);
  expect(ask(port, "DELETE", location, NULL, NULL), 409, "a job that is done cannot be cancelled");
}

static void failures(void) {
  char location[TEXT], result[TEXT + 16];
  const struct {
    const char *json;
    int status;
    const char *what;
  } cases[] = {
      {"{\"inputs\": {\"fails\": 2}}", 422, "a job beyond a limit"},
      {"{\"inputs\": {\"fails\": 6}}", 422, "a job that does not converge"},
      {"{\"inputs\": {\"fails\": 10}}", 422, "an answer that cannot be written"},
      {"{\"inputs\": {\"seconds\": 9}, \"job\": {\"time_limit\": 0.2}}", 504,
       "a job over its own time limit"},
      {"{\"job\": {\"expires_at\": \"2020-01-01T00:00:00Z\"}}", 504, "a job that has expired"}};
  for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
    answer a = post(port, "/v1/trials", NULL, cases[i].json);
    check(a.status == cases[i].status && has(&a, "Content-Type", "application/problem+json"),
          "%s: %d as a problem document (got %d)", cases[i].what, cases[i].status, a.status);
    check(answer_header(&a, "Location", location, sizeof location), "and it has a Location");
    answer_free(&a);
    snprintf(result, sizeof result, "%s/result", location);
    expect(ask(port, "GET", result, NULL, NULL), cases[i].status, "its result answers the same");
    a = ask(port, "GET", location, NULL, NULL);
    check(a.status == 200 && answer_text_is(&a, "state", "failed"),
          "the job itself answers 200: failed");
    answer_free(&a);
  }
}

static void lists(void) {
  answer a = ask(port, "GET", "/v1/jobs?limit=3", NULL, NULL);
  json_t *j = answer_json(&a), *jobs = json_object_get(j, "jobs");
  const char *next = json_string_value(json_object_get(j, "next"));
  char target[TEXT], last[64];
  check(a.status == 200 && json_array_size(jobs) == 3 && next, "a list of three, and more to come");
  snprintf(last, sizeof last, "%s",
           json_string_value(json_object_get(json_array_get(jobs, 2), "id")));
  snprintf(target, sizeof target, "/v1/jobs?limit=200&cursor=%s", next ? next : "");
  json_decref(j);
  answer_free(&a);
  a = ask(port, "GET", target, NULL, NULL);
  check(a.status == 200 && !strstr(a.body.bytes, last) && strstr(a.body.bytes, "\"next\": null"),
        "the rest begins after the last of the first page, and ends");
  answer_free(&a);
  a = ask(port, "GET", "/v1/jobs?state=failed&kind=trial", NULL, NULL);
  j = answer_json(&a);
  jobs = json_object_get(j, "jobs");
  size_t failed = 0, i;
  json_t *job;
  json_array_foreach(jobs, i, job) failed +=
      !strcmp(json_string_value(json_object_get(job, "state")), "failed");
  check(failed == 5 && json_array_size(jobs) == 5, "five jobs failed, and only they are listed");
  json_decref(j);
  answer_free(&a);
  expect(ask(port, "GET", "/v1/jobs?state=lost", NULL, NULL), 400, "a state that does not exist");
  expect(ask(port, "GET", "/v1/jobs?limit=0", NULL, NULL), 400, "a list of none");
  expect(ask(port, "GET", "/v1/jobs?sort=up", NULL, NULL), 400, "an unknown parameter");
}

/* W3C Trace Context: an example of the recommendation's section 3.2. */
static void tracing(void) {
  const char *trace = "00-0af7651916cd43dd8448eb211c80319c-b7ad6b7169203331-01";
  char header[TEXT], location[TEXT];
  snprintf(header, sizeof header, "traceparent: %s\r\n", trace);
  answer a = post(port, "/v1/trials", header, "{}");
  answer_header(&a, "Location", location, sizeof location);
  answer_free(&a);
  a = ask(port, "GET", location, NULL, NULL);
  check(answer_text_is(&a, "traceparent", trace), "the trace is kept with the job");
  answer_free(&a);
  a = post(port, "/v1/trials",
           "traceparent: 00-00000000000000000000000000000000-b7ad6b7169203331-01\r\n", "{}");
  answer_header(&a, "Location", location, sizeof location);
  answer_free(&a);
  a = ask(port, "GET", location, NULL, NULL);
  check(!strstr(a.body.bytes, "traceparent"), "a trace of zeros is not");
  answer_free(&a);
}

int main(void) {
  static const char *const flags[] = {"--workers", "3", NULL};
  service *s = trial_open(flags);
  port = service_port(s);
  operators();
  keep_alive();
  refusals();
  targets();
  results();
  compression();
  waiting();
  cancelling();
  failures();
  lists();
  tracing();
  check(service_close(s) == 0, "stops with nothing left to cancel");
  return tally();
}
