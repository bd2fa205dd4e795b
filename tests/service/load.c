/* load.c: many callers at once: a full queue, waiting requests, callers that leave, order,
 * stopping. */
#include "client.h"
#include "clock.h"
#include "trial.h"

#include <pthread.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

enum { CALLERS = 64, TEXT = 256 };

static int port;

static double gauge(const char *name) {
  char line[TEXT];
  answer a = ask(port, "GET", "/metrics", NULL, NULL);
  snprintf(line, sizeof line, "\ncoresoak_%s ", name);
  const char *at = a.body.bytes ? strstr(a.body.bytes, line) : NULL;
  double value = at ? atof(at + strlen(line)) : -1;
  answer_free(&a);
  return value;
}

/* Waits until a gauge has a value; false after five seconds. */
static bool reaches(const char *name, double value) {
  for (int i = 0; i < 500; i++) {
    if (gauge(name) == value) return true;
    usleep(10000);
  }
  return false;
}

static void submit(const char *json, char location[TEXT]) {
  answer a = post(port, "/v1/trials", "Prefer: respond-async\r\n", json);
  answer_header(&a, "Location", location, TEXT);
  answer_free(&a);
}

static void full_queue(void) {
  static const char *const flags[] = {"--workers", "1", "--queue", "4", "--drain", "0", NULL};
  char location[TEXT];
  service *s = trial_open(flags);
  port = service_port(s);
  submit("{\"inputs\": {\"seconds\": 20}}", location);
  check(reaches("workers_busy", 1), "one worker is busy");
  for (int i = 0; i < 4; i++) submit("{}", location);
  check(gauge("queue_depth") == 4, "four jobs wait");
  double worst = 0;
  int refused = 0, told = 0;
  for (int i = 0; i < 50; i++) {
    char value[32];
    double began = clock_steady();
    answer a = post(port, "/v1/trials", NULL, "{}");
    double took = clock_steady() - began;
    refused += a.status == 503;
    told += answer_header(&a, "Retry-After", value, sizeof value) && atoi(value) >= 1;
    if (took > worst) worst = took;
    answer_free(&a);
  }
  check(refused == 50 && told == 50,
        "a fifth is refused with 503 and Retry-After, 50 times (%d, %d)", refused, told);
  check(worst < 0.01, "each within 10 ms (slowest %.2f ms)", 1000 * worst);
  answer a = ask(port, "GET", "/healthz", NULL, NULL);
  check(a.status == 200, "/healthz beside a full queue");
  answer_free(&a);

  check(service_close(s) == 5, "stops at once with --drain 0, cancelling all five");
}

static void order(void) {
  static const char *const flags[] = {"--workers", "1", NULL};
  char first[TEXT], low[TEXT], high[TEXT], usual[TEXT];
  service *s = trial_open(flags);
  port = service_port(s);
  submit("{\"inputs\": {\"seconds\": 0.3}}", first);
  check(reaches("workers_busy", 1), "one worker is busy");
  submit("{\"inputs\": {\"seconds\": 0.1}, \"job\": {\"priority\": -1}}", low);
  submit("{\"inputs\": {\"seconds\": 0.1}}", usual);
  submit("{\"inputs\": {\"seconds\": 0.1}, \"job\": {\"priority\": 5}}", high);
  answer a = ask(port, "GET", usual, NULL, NULL);
  check(answer_text_is(&a, "state", "queued") && answer_number(&a, "queue_position") == 1,
        "the usual job stands behind the urgent one");
  answer_free(&a);
  check(reaches("queue_depth", 0) && reaches("workers_busy", 0), "all are done");
  const char *const rising[] = {first, high, usual, low};
  char before[64] = "";
  bool sorted = true;
  for (int i = 0; i < 4; i++) {
    a = ask(port, "GET", rising[i], NULL, NULL);
    json_t *j = answer_json(&a);
    const char *started = json_string_value(json_object_get(j, "started"));
    sorted = sorted && started && strcmp(before, started) < 0;
    snprintf(before, sizeof before, "%s", started ? started : "");
    json_decref(j);
    answer_free(&a);
  }
  check(sorted, "started by priority, then by age");
  service_close(s);
}

typedef struct caller {
  const char *json, *headers;
  answer answer;
  pthread_t thread;
} caller;

static void *call(void *self) {
  caller *c = self;
  c->answer = post(port, "/v1/trials", c->headers, c->json);
  return NULL;
}

static void begin_call(caller *c, const char *headers, const char *json) {
  c->json = json;
  c->headers = headers;
  pthread_create(&c->thread, NULL, call, c);
}

static void same_bytes(void) {
  static const char *const flags[] = {"--workers", "4", "--connections", "256", NULL};
  const char *json = "{\"inputs\": {\"seconds\": 0.02, \"tasks\": 3, \"bytes\": 20000}}";
  caller callers[CALLERS];
  service *s = trial_open(flags);
  port = service_port(s);
  answer alone = post(port, "/v1/trials", NULL, json);
  for (int i = 0; i < CALLERS; i++) begin_call(&callers[i], NULL, json);
  int same = 0;
  for (int i = 0; i < CALLERS; i++) {
    pthread_join(callers[i].thread, NULL);
    const answer *a = &callers[i].answer;
    same += a->status == 200 && a->body.length == alone.body.length &&
            memcmp(a->body.bytes, alone.body.bytes, alone.body.length) == 0;
    answer_free(&callers[i].answer);
  }
  check(alone.status == 200 && same == CALLERS,
        "64 callers at once get the bytes of one alone (%d)", same);
  answer_free(&alone);
  check(service_close(s) == 0, "stops with nothing left");
}

/* Only half of the connections may wait; beyond it the answer is 202 at once. */
static void waiters(void) {
  static const char *const flags[] = {"--workers", "1", "--connections", "40", "--drain",
                                      "0",         NULL};
  caller callers[30];
  service *s = trial_open(flags);
  port = service_port(s);
  for (int i = 0; i < 20; i++)
    begin_call(&callers[i], "Prefer: wait=3\r\n", "{\"inputs\": {\"seconds\": 60}}");
  check(reaches("http_waiters", 20), "twenty of forty connections wait");
  double began = clock_steady();
  answer a = post(port, "/v1/trials", "Prefer: wait=3\r\n", "{\"inputs\": {\"seconds\": 60}}");
  check(a.status == 202 && clock_steady() - began < 0.2, "the next is told 202 at once (%.3f s)",
        clock_steady() - began);
  answer_free(&a);
  a = ask(port, "GET", "/healthz", NULL, NULL);
  check(a.status == 200, "/healthz beside them");
  answer_free(&a);
  int accepted = 0;
  for (int i = 0; i < 20; i++) {
    pthread_join(callers[i].thread, NULL);
    accepted += callers[i].answer.status == 202;
    answer_free(&callers[i].answer);
  }
  double took = clock_steady() - began;
  check(accepted == 20 && took < 4, "all twenty are told 202 when their wait is over (%.2f s)",
        took);
  service_close(s);
}

static void departure(void) {
  static const char *const flags[] = {"--workers", "1", NULL};
  wire w;
  service *s = trial_open(flags);
  port = service_port(s);
  wire_open(&w, port, 5);
  wire_text(&w, "POST /v1/trials HTTP/1.1\r\nHost: t\r\nContent-Type: application/json\r\n"
                "Content-Length: 27\r\n\r\n{\"inputs\": {\"seconds\": 60}}");
  check(reaches("workers_busy", 1), "somebody waits for a long job");
  double left = clock_steady();
  wire_close(&w);
  check(reaches("workers_busy", 0), "who leaves ends the job that nobody else knows of");
  check(atomic_load(&trial_stopped) - left < 0.3, "within 0.3 s (%.3f)",
        atomic_load(&trial_stopped) - left);
  wire_open(&w, port, 5);
  wire_text(&w, "POST /v1/trials HTTP/1.1\r\nHost: t\r\nContent-Type: application/json\r\n"
                "Content-Length: 27\r\n\r\n{\"inputs\": {\"seconds\": 60}}");
  check(reaches("workers_busy", 1), "somebody waits again");
  struct linger abrupt = {1, 0};
  setsockopt(w.socket, SOL_SOCKET, SO_LINGER, &abrupt, sizeof abrupt);
  wire_close(&w);
  check(reaches("workers_busy", 0), "a connection that breaks ends it as well");
  service_close(s);
}

static void *stop(void *s) {
  return (void *)(intptr_t)service_close(s);
}

static void stopping(void) {
  static const char *const flags[] = {"--workers", "2", "--drain", "1", NULL};
  caller short_one, long_one, queued;
  wire open;
  answer a;
  pthread_t thread;
  void *cancelled;
  service *s = trial_open(flags);
  port = service_port(s);
  wire_open(&open, port, 5);
  wire_text(&open, "GET /readyz HTTP/1.1\r\nHost: t\r\n\r\n");
  check(wire_read(&open, &a, false) && a.status == 200, "ready before");
  answer_free(&a);
  begin_call(&short_one, NULL, "{\"inputs\": {\"seconds\": 0.6}}");
  begin_call(&long_one, NULL, "{\"inputs\": {\"seconds\": 60}}");
  check(reaches("workers_busy", 2), "a short and a long job run");
  begin_call(&queued, NULL, "{\"inputs\": {\"seconds\": 60}}");
  check(reaches("queue_depth", 1), "a third waits");
  double began = clock_steady();
  pthread_create(&thread, NULL, stop, s);
  usleep(100000);
  wire_text(&open, "GET /readyz HTTP/1.1\r\nHost: t\r\n\r\n");
  check(wire_read(&open, &a, false) && a.status == 503, "not ready while it stops");
  answer_free(&a);
  wire_text(&open, "POST /v1/trials HTTP/1.1\r\nHost: t\r\nContent-Type: application/json\r\n"
                   "Content-Length: 2\r\n\r\n{}");
  check(wire_read(&open, &a, false) && a.status == 503, "and it takes no job");
  answer_free(&a);
  wire refused;
  check(!wire_open(&refused, port, 1), "and no connection");
  wire_close(&refused);
  pthread_join(thread, &cancelled);
  double took = clock_steady() - began;
  pthread_join(short_one.thread, NULL);
  pthread_join(long_one.thread, NULL);
  pthread_join(queued.thread, NULL);
  check(short_one.answer.status == 200, "the short job was still answered (%d)",
        short_one.answer.status);
  check(long_one.answer.status == 410 && queued.answer.status == 410,
        "who waited for the others was told (%d, %d)", long_one.answer.status,
        queued.answer.status);
  check((intptr_t)cancelled == 2 && took < 2.5,
        "two were cancelled; stopped after %.2f s (drain 1 s)", took);
  answer_free(&short_one.answer);
  answer_free(&long_one.answer);
  answer_free(&queued.answer);
  wire_close(&open);
}

/* Results go, the oldest first, when more are there than are kept. */
static void keeping(void) {
  static const char *const flags[] = {"--kept", "3", NULL};
  char location[5][TEXT];
  int there[5];
  service *s = trial_open(flags);
  port = service_port(s);
  for (int i = 0; i < 5; i++) {
    answer a = post(port, "/v1/trials", NULL, "{}");
    answer_header(&a, "Location", location[i], TEXT);
    answer_free(&a);
  }
  for (int i = 0; i < 5; i++) {
    answer a = ask(port, "GET", location[i], NULL, NULL);
    there[i] = a.status;
    answer_free(&a);
  }
  check(there[0] == 404 && there[1] == 404 && there[2] == 200 && there[3] == 200 && there[4] == 200,
        "of five results the last three are kept");
  service_close(s);
}

int main(void) {
  full_queue();
  order();
  same_bytes();
  waiters();
  departure();
  stopping();
  keeping();
  return tally();
}
