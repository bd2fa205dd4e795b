/* slow.c: callers that are slow, large, or hesitant. */
#include "client.h"
#include "clock.h"
#include "trial.h"

#include <poll.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#define HEADERS "POST /v1/trials HTTP/1.1\r\nHost: t\r\nContent-Type: application/json\r\n"

enum { BODY_LIMIT = 65536, HUGE_BODY = 8 << 20 };

static int port;

/* Sends a text byte by byte until it is over, the connection ends, or so many seconds went by;
 * returns the seconds it took. */
static double trickle(wire *w, const char *text, double pause, double most) {
  double began = clock_steady();
  while (*text && clock_steady() - began < most && !wire_ended(w, pause) && w->used == 0) {
    if (!wire_send(w, text++, 1)) break;
  }
  return clock_steady() - began;
}

static void slow_headers(void) {
  wire w;
  answer a;
  wire_open(&w, port, 5);
  double took =
      trickle(&w, "GET /healthz HTTP/1.1\r\nHost: t\r\nX-Long: aaaaaaaaaaaaaaaaaaaaaaaaa", 0.1, 5);
  wire_read(&w, &a, false);
  check(a.status == 408 && took > 0.8 && took < 2,
        "headers byte by byte: 408 after %.2f s (limit 1 s)", took);
  check(answer_number(&a, "status") == 408, "the 408 is a problem document");
  check(wire_ended(&w, 1), "and the connection is closed");
  answer_free(&a);
  wire_close(&w);
  wire_open(&w, port, 5);
  double began = clock_steady();
  wire_read(&w, &a, false);
  took = clock_steady() - began;
  check(a.status == 0 && took < 2,
        "a connection that says nothing is closed without a word (%.2f s)", took);
  answer_free(&a);
  wire_close(&w);
}

static void slow_second_request(void) {
  wire w;
  answer a;
  wire_open(&w, port, 5);
  wire_text(&w, "GET /healthz HTTP/1.1\r\nHost: t\r\n\r\n");
  check(wire_read(&w, &a, false) && a.status == 200, "a first request on a connection");
  answer_free(&a);
  usleep(300000);
  double took =
      trickle(&w, "GET /healthz HTTP/1.1\r\nHost: t\r\nX-Long: aaaaaaaaaaaaaaaaaaaaaaaaa", 0.1, 5);
  wire_read(&w, &a, false);
  check(a.status == 408 && took < 2, "the second byte by byte: 408 after %.2f s", took);
  answer_free(&a);
  wire_close(&w);
  wire_open(&w, port, 5);
  wire_text(&w, "GET /healthz HTTP/1.1\r\nHost: t\r\n\r\n");
  wire_read(&w, &a, false);
  answer_free(&a);
  double began = clock_steady();
  bool ended = wire_ended(&w, 5);
  took = clock_steady() - began;
  check(ended && took > 1.5 && took < 3, "an idle connection is closed after %.2f s (limit 2 s)",
        took);
  wire_close(&w);
}

static void slow_body(void) {
  wire w;
  answer a;
  wire_open(&w, port, 8);
  wire_text(&w, HEADERS "Content-Length: 60000\r\n\r\n");
  char *body = malloc(60001);
  memset(body, ' ', 60000);
  body[60000] = '\0';
  double took = trickle(&w, body, 0.05, 8);
  wire_read(&w, &a, false);
  check(a.status == 408 && took < 4, "a body of 20 bytes/s: 408 after %.2f s (least rate 1000)",
        took);
  answer_free(&a);
  wire_close(&w);
  wire_open(&w, port, 8);
  wire_text(&w, HEADERS "Transfer-Encoding: chunked\r\n\r\n");
  double began = clock_steady();
  for (int i = 0; i < 100 && !wire_ended(&w, 0.1) && w.used == 0; i++) {
    char chunk[512];
    snprintf(chunk, sizeof chunk, "12c\r\n%.300s\r\n", body);
    if (!wire_text(&w, chunk)) break;
  }
  wire_read(&w, &a, false);
  took = clock_steady() - began;
  check(a.status == 408 && took > 4 && took < 6, "a body without end: 408 after %.2f s (limit 5 s)",
        took);
  answer_free(&a);
  wire_close(&w);
  free(body);
}

/* A caller that asks for a large answer and does not read it. */
static void slow_reader(void) {
  wire w;
  int connections = 1;
  wire_open(&w, port, 1);
  wire_text(&w, HEADERS "Content-Length: 31\r\n\r\n{\"inputs\": {\"bytes\": 30000000}}");
  double began = clock_steady();
  answer a;
  sleep(1);
  do {
    usleep(200000);
    a = ask(port, "GET", "/metrics", NULL, NULL);
    const char *line = strstr(a.body.bytes, "\ncoresoak_http_connections ");
    connections = line ? atoi(line + strlen("\ncoresoak_http_connections ")) : -1;
    answer_free(&a);
  } while (connections > 1 && clock_steady() - began < 50);
  check(connections == 1, "who does not read 30 MB is cut off after %.1f s",
        clock_steady() - began);
  wire_close(&w);
}

static void too_large(void) {
  wire w;
  answer a;
  wire_open(&w, port, 5);
  wire_text(&w, HEADERS "Expect: 100-continue\r\nContent-Length: 65537\r\n\r\n");
  wire_read(&w, &a, false);
  check(a.status == 413, "Expect with a byte too many: 413 before any upload (%d)", a.status);
  answer_free(&a);
  check(wire_ended(&w, 1), "and closed");
  wire_close(&w);

  char *huge = malloc(HUGE_BODY + 1);
  memset(huge, ' ', HUGE_BODY);
  huge[HUGE_BODY] = '\0';
  a = post(port, "/v1/trials", NULL, huge);
  check(a.status == 413 && answer_number(&a, "status") == 413,
        "8 MB sent without asking: a 413 that is read (%d)", a.status);
  answer_free(&a);

  wire_open(&w, port, 5);
  wire_text(&w, HEADERS "Transfer-Encoding: chunked\r\n\r\n100000\r\n");
  wire_send(&w, huge, 0x100000);
  wire_text(&w, "\r\n0\r\n\r\n");
  wire_read(&w, &a, false);
  check(a.status == 413, "1 MB in chunks, its size never announced: 413 (%d)", a.status);
  answer_free(&a);
  wire_text(&w, "GET /healthz HTTP/1.1\r\nHost: t\r\n\r\n");
  check(wire_read(&w, &a, false) && a.status == 200, "and the connection goes on");
  answer_free(&a);
  wire_close(&w);

  a = post(port, "/v2/none", NULL, huge);
  check(a.status == 404, "8 MB to an unknown address: a 404 that is read (%d)", a.status);
  answer_free(&a);
  huge[BODY_LIMIT] = '\0';
  memcpy(huge, "{}", 2);
  a = post(port, "/v1/trials", NULL, huge);
  check(a.status == 200, "a body of exactly the limit: 200 (%d)", a.status);
  answer_free(&a);
  free(huge);
}

static void hesitant(void) {
  wire w;
  answer a;
  wire_open(&w, port, 5);
  wire_text(&w, HEADERS "Expect: 100-Continue\r\nContent-Length: 2\r\n\r\n");
  check(wire_read(&w, &a, false) && a.status == 100, "Expect: 100-continue: 100");
  answer_free(&a);
  wire_text(&w, "{}");
  check(wire_read(&w, &a, false) && a.status == 200, "then the result");
  answer_free(&a);
  wire_close(&w);
  wire_open(&w, port, 5);
  wire_text(
      &w,
      "POST /v1/trials HTTP/1.1\r\nHost: t\r\nContent-Type: text/csv\r\nExpect: 100-continue\r\n"
      "Content-Length: 2\r\n\r\n");
  check(wire_read(&w, &a, false) && a.status == 415,
        "Expect with a wrong type: 415 before any upload");
  answer_free(&a);
  wire_close(&w);
  wire_open(&w, port, 5);
  wire_text(&w, HEADERS
            "Transfer-Encoding: chunked\r\n\r\n1\r\n{\r\n1;x=y\r\n}\r\n0\r\nX-Trailer: a\r\n\r\n");
  check(wire_read(&w, &a, false) && a.status == 200,
        "a body in chunks, with an extension and a trailer");
  answer_free(&a);
  wire_close(&w);
}

/* While sixty callers trickle, others are answered at once. */
static void crowd(void) {
  enum { CROWD = 60 };
  wire slow[CROWD];
  for (int i = 0; i < CROWD; i++) {
    wire_open(&slow[i], port, 5);
    wire_text(&slow[i], "GET /hea");
  }
  double worst = 0;
  int good = 0;
  for (int i = 0; i < 20; i++) {
    double began = clock_steady();
    answer a = ask(port, "GET", "/healthz", NULL, NULL);
    double took = clock_steady() - began;
    good += a.status == 200;
    if (took > worst) worst = took;
    answer_free(&a);
  }
  check(good == 20 && worst < 0.5, "/healthz beside 60 slow callers: %d of 20, slowest %.3f s",
        good, worst);
  usleep(1500000);
  int closed = 0;
  for (int i = 0; i < CROWD; i++) {
    answer a;
    wire_read(&slow[i], &a, false);
    closed += a.status == 408;
    answer_free(&a);
    wire_close(&slow[i]);
  }
  check(closed == CROWD, "all 60 were told 408 (%d)", closed);
}

/* True once each of these connections has something to read. */
static bool all_answered(const wire *w, int count) {
  bool all = true;
  for (int i = 0; i < count && all; i++) {
    struct pollfd p = {w[i].socket, POLLIN, 0};
    all = poll(&p, 1, 0) == 1;
  }
  return all;
}

/* Documents of megabytes are read beside the threads that answer others, and to the end. */
static void large_documents(void) {
  static const char *const flags[] = {"--body-limit", "8MiB", NULL};
  enum { SENDERS = 4 };
  wire senders[SENDERS];
  service *s = trial_open(flags);
  port = service_port(s);
  buffer large;
  buffer_init(&large, 0);
  buffer_text(&large, "{\"inputs\": {\"bytes\": 600000, \"values\": [0");
  while (large.length < HUGE_BODY - 19) buffer_text(&large, ", 850.123456789");
  while (large.length < HUGE_BODY - 3) buffer_text(&large, " ");
  buffer_text(&large, "]}}");
  for (int i = 0; i < SENDERS; i++) {
    wire_open(&senders[i], port, 30);
    wire_text(&senders[i], HEADERS "Content-Length: 8388608\r\n\r\n");
    wire_send(&senders[i], large.bytes, large.length);
  }
  double worst = 0;
  int asked = 0;
  while (!all_answered(senders, SENDERS)) {
    double began = clock_steady();
    answer a = ask(port, "GET", "/healthz", NULL, NULL);
    double took = clock_steady() - began;
    if (a.status != 200 || took > worst) worst = took;
    asked += a.status == 200;
    answer_free(&a);
    usleep(2000);
  }
  check(asked > 10 && worst < 0.1,
        "/healthz %d times while four documents of 8 MB are read: slowest %.4f s", asked, worst);
  char location[128], rows[160];
  for (int i = 0; i < SENDERS; i++) {
    answer a;
    wire_read(&senders[i], &a, false);
    check(a.status == 200 && a.body.length > 600000, "document %d is answered (%d)", i + 1,
          a.status);
    answer_header(&a, "Location", location, sizeof location);
    answer_free(&a);
    wire_close(&senders[i]);
  }
  snprintf(rows, sizeof rows, "%s/result", location);
  answer a = ask(port, "GET", rows, "Accept: text/csv\r\n", NULL);
  check(a.status == 200 && a.body.length > 0 && strncmp(a.body.bytes, "sum", 3) == 0,
        "rows of a large result are written beside as well");
  answer_free(&a);
  buffer_free(&large);
  service_close(s);
}

int main(void) {
  static const char *const flags[] = {"--header-deadline",
                                      "1",
                                      "--body-deadline",
                                      "5",
                                      "--least-rate",
                                      "1000",
                                      "--idle",
                                      "2",
                                      "--body-limit",
                                      "64KiB",
                                      NULL};
  static const char *const quick[] = {"--body-deadline", "1", "--least-rate", "10000000", NULL};
  service *s = trial_open(flags);
  port = service_port(s);
  slow_headers();
  slow_second_request();
  slow_body();
  too_large();
  hesitant();
  crowd();
  service_close(s);
  large_documents();
  s = trial_open(quick);
  port = service_port(s);
  slow_reader();
  service_close(s);
  return tally();
}
