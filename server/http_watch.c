/* http_watch.c: deadlines of connections and waits.

   One mutex guards everything. A connection belongs to the watch; its descriptor is valid until
   watch_remove, which the HTTP side calls before it closes the descriptor, so that the watch never
   touches one that has become another's. */
#include "http_watch.h"

#include "clock.h"

#include <linux/tcp.h>
#include <math.h>
#include <netinet/in.h>
#include <pthread.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/socket.h>

enum { TCP_STATE_ESTABLISHED = 1 };

static const double TICK = 0.05;    /* s between looks */
static const double RATE_GRACE = 3; /* s before the rate of a body counts */

struct connection {
  connection *before, *after;
  int descriptor;
  phase phase;
  double since;             /* steady clock */
  size_t bytes;             /* of the body so far, or of the reply */
  unsigned long long heard; /* bytes received by the socket when the phase began */
  bool cut;
  void *waiter; /* NULL: does not wait */
  double until;
  char job[40];
};

struct http_watch {
  watch_settings settings;
  pthread_mutex_t mutex;
  pthread_cond_t wake;
  pthread_t thread;
  connection *first;
  int connections, waiters;
  bool closing, no_waits, running;
};

/* State of the socket and the number of bytes that it ever received. */
static bool socket_facts(int descriptor, int *state, unsigned long long *heard) {
  struct tcp_info info;
  socklen_t size = sizeof info;
  memset(&info, 0, sizeof info);
  if (getsockopt(descriptor, IPPROTO_TCP, TCP_INFO, &info, &size) != 0) return false;
  *state = info.tcpi_state;
  *heard = info.tcpi_bytes_received;
  return true;
}

static void end_wait(http_watch *w, connection *c, bool departed) {
  void *waiter = c->waiter;
  c->waiter = NULL;
  w->waiters--;
  w->settings.resume(waiter, departed);
}

/* Says why where a request has begun and no reply has, then ends both directions; the HTTP side
 * sees the end and closes. */
static void cut(http_watch *w, connection *c, bool say_why) {
  const char *text = w->settings.too_slow;
  /* who does not take even this much is told nothing */
  if (say_why) (void)!send(c->descriptor, text, strlen(text), MSG_DONTWAIT | MSG_NOSIGNAL);
  shutdown(c->descriptor, SHUT_RDWR);
  c->cut = true;
  w->settings.cut(w->settings.self);
}

static void look_at_wait(http_watch *w, connection *c, double now) {
  int state = TCP_STATE_ESTABLISHED;
  unsigned long long heard;
  bool departed = socket_facts(c->descriptor, &state, &heard) && state != TCP_STATE_ESTABLISHED;
  if (departed || now >= c->until) end_wait(w, c, departed);
}

/* The first byte of the next request ends the idling. */
static void look_at_idle(http_watch *w, connection *c, double now) {
  int state;
  unsigned long long heard;
  if (socket_facts(c->descriptor, &state, &heard) && heard > c->heard) {
    c->phase = PHASE_HEADERS;
    c->since = now;
  } else if (now - c->since > w->settings.idle) {
    cut(w, c, false);
  }
}

static void look_at_headers(http_watch *w, connection *c, double now) {
  int state;
  unsigned long long heard = 0;
  if (now - c->since <= w->settings.header_deadline) return;
  cut(w, c, socket_facts(c->descriptor, &state, &heard) && heard > c->heard);
}

static void look_at_body(http_watch *w, connection *c, double now) {
  double took = now - c->since;
  bool crawls = took > RATE_GRACE && (double)c->bytes < took * w->settings.least_rate;
  if (crawls || took > w->settings.body_deadline) cut(w, c, true);
}

static void look_at_reply(http_watch *w, connection *c, double now) {
  double allowed = w->settings.body_deadline;
  if (w->settings.least_rate > 0) allowed += (double)c->bytes / w->settings.least_rate;
  if (now - c->since > allowed) cut(w, c, false);
}

static void look_at(http_watch *w, connection *c, double now) {
  if (c->waiter) look_at_wait(w, c, now);
  if (c->cut) return;
  switch (c->phase) {
  case PHASE_IDLE: look_at_idle(w, c, now); break;
  case PHASE_HEADERS: look_at_headers(w, c, now); break;
  case PHASE_BODY: look_at_body(w, c, now); break;
  case PHASE_WORK: break;
  case PHASE_SEND: look_at_reply(w, c, now); break;
  }
}

static void *look(void *self) {
  http_watch *w = self;
  pthread_mutex_lock(&w->mutex);
  while (!w->closing) {
    double now = clock_steady();
    for (connection *c = w->first; c; c = c->after) look_at(w, c, now);
    if (w->first)
      clock_wait(&w->wake, &w->mutex, TICK);
    else
      pthread_cond_wait(&w->wake, &w->mutex);
  }
  pthread_mutex_unlock(&w->mutex);
  return NULL;
}

http_watch *watch_open(const watch_settings *settings) {
  http_watch *w = calloc(1, sizeof *w);
  if (!w) return NULL;
  w->settings = *settings;
  pthread_mutex_init(&w->mutex, NULL);
  if (clock_condition_init(&w->wake) == 0)
    w->running = pthread_create(&w->thread, NULL, look, w) == 0;
  if (w->running) return w;
  free(w);
  return NULL;
}

void watch_close(http_watch *w) {
  if (!w) return;
  pthread_mutex_lock(&w->mutex);
  w->closing = true;
  pthread_cond_signal(&w->wake);
  pthread_mutex_unlock(&w->mutex);
  pthread_join(w->thread, NULL);
  while (w->first) {
    connection *c = w->first;
    w->first = c->after;
    free(c);
  }
  pthread_cond_destroy(&w->wake);
  pthread_mutex_destroy(&w->mutex);
  free(w);
}

connection *watch_add(http_watch *w, int descriptor) {
  connection *c = calloc(1, sizeof *c);
  if (!c) return NULL;
  c->descriptor = descriptor;
  c->phase = PHASE_HEADERS;
  c->since = clock_steady();
  pthread_mutex_lock(&w->mutex);
  c->after = w->first;
  if (w->first)
    w->first->before = c;
  else
    pthread_cond_signal(&w->wake);
  w->first = c;
  w->connections++;
  pthread_mutex_unlock(&w->mutex);
  return c;
}

void watch_remove(http_watch *w, connection *c) {
  if (!c) return;
  pthread_mutex_lock(&w->mutex);
  if (c->before)
    c->before->after = c->after;
  else
    w->first = c->after;
  if (c->after) c->after->before = c->before;
  if (c->waiter) w->waiters--;
  w->connections--;
  pthread_mutex_unlock(&w->mutex);
  free(c);
}

void watch_enter(http_watch *w, connection *c, phase p, size_t bytes) {
  int state;
  if (!c) return;
  pthread_mutex_lock(&w->mutex);
  bool same = c->phase == p;
  c->phase = p;
  c->bytes = bytes;
  if (!same) c->since = clock_steady();
  if (p == PHASE_IDLE) socket_facts(c->descriptor, &state, &c->heard);
  pthread_mutex_unlock(&w->mutex);
}

void watch_received(http_watch *w, connection *c, size_t bytes) {
  if (!c) return;
  pthread_mutex_lock(&w->mutex);
  c->bytes += bytes;
  pthread_mutex_unlock(&w->mutex);
}

bool watch_wait(http_watch *w, connection *c, void *waiter, const char *job, double seconds) {
  if (!c) return false;
  pthread_mutex_lock(&w->mutex);
  bool room = !w->no_waits && w->waiters < w->settings.most_waiters;
  if (room) {
    c->waiter = waiter;
    c->until = clock_steady() + seconds;
    snprintf(c->job, sizeof c->job, "%s", job);
    w->waiters++;
  }
  pthread_mutex_unlock(&w->mutex);
  return room;
}

void watch_wake(http_watch *w, const char *job) {
  pthread_mutex_lock(&w->mutex);
  if (!job) w->no_waits = true;
  for (connection *c = w->first; c; c = c->after)
    if (c->waiter && (!job || strcmp(c->job, job) == 0)) end_wait(w, c, false);
  pthread_mutex_unlock(&w->mutex);
}

void watch_count(http_watch *w, int *connections, int *waiters) {
  pthread_mutex_lock(&w->mutex);
  *connections = w->connections;
  *waiters = w->waiters;
  pthread_mutex_unlock(&w->mutex);
}
