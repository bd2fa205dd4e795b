/* http_watch.h: every open connection, with the time that it may take for what it is doing; and the
   requests that wait for a job. One thread looks at all of them: the HTTP library itself knows only
   a limit for silence, and nothing of connections that are suspended. */
#ifndef CORESOAK_HTTP_WATCH_H
#define CORESOAK_HTTP_WATCH_H

#include <stdbool.h>
#include <stddef.h>

typedef struct http_watch http_watch;
typedef struct connection connection;

typedef enum phase {
  PHASE_IDLE,    /* between requests */
  PHASE_HEADERS, /* until all headers are there */
  PHASE_BODY,
  PHASE_WORK, /* with us */
  PHASE_SEND  /* the reply is on its way */
} phase;

typedef struct watch_settings {
  double header_deadline, body_deadline, idle; /* s */
  int least_rate;                              /* bytes/s of a body or a reply; 0: none */
  int most_waiters;
  const char *too_slow; /* bytes of a whole reply for a request that came too slowly; kept */
  /* Called with a waiter whose wait is over, from any thread that calls into the watch; departed:
   * the caller is gone. */
  void (*resume)(void *waiter, bool departed);
  /* Called for each connection that was ended because it was too slow. */
  void (*cut)(void *self);
  void *self;
} watch_settings;

http_watch *watch_open(const watch_settings *settings);
void watch_close(http_watch *w); /* when no connection is left */

/* A new connection, in PHASE_HEADERS; NULL out of memory. */
connection *watch_add(http_watch *w, int descriptor);
void watch_remove(http_watch *w, connection *c);

/* Enters a phase. `bytes` is the size of the reply in PHASE_SEND. */
void watch_enter(http_watch *w, connection *c, phase p, size_t bytes);

/* More of the body came. */
void watch_received(http_watch *w, connection *c, size_t bytes);

/* Makes a request wait for a job: resume is called once, when watch_wake names the job, after
   `seconds`, or when the caller departs. False (and nothing happens) if too many wait or the watch
   is closing to waiters. */
bool watch_wait(http_watch *w, connection *c, void *waiter, const char *job, double seconds);

/* Ends the waits for a job; for NULL all waits, and no later one begins. */
void watch_wake(http_watch *w, const char *job);

void watch_count(http_watch *w, int *connections, int *waiters);

#endif
