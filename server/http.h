/* http.h: HTTP/1.1 on a listening socket. The only file behind it that knows the HTTP library is
 * http.c. */
#ifndef CORESOAK_HTTP_H
#define CORESOAK_HTTP_H

#include "exchange.h"

typedef struct http http;

typedef struct http_settings {
  const char *listen; /* "address:port"; port 0 takes a free one */
  int connections, threads;
  double header_deadline, body_deadline, idle; /* s */
  int least_rate;                              /* bytes/s */
  size_t body_limit;                           /* bytes of a request's body */
} http_settings;

/* Why a request never reached a route. */
typedef enum refusal { REFUSED_AUDIT, REFUSED_SLOW, REFUSED_TOO_LARGE } refusal;

/* Who answers. All functions may be called from several threads at once. */
typedef struct http_app {
  void *self;
  /* Looks at a request whose headers are there: fills a reply to refuse it, else leaves r->status
   * 0. */
  void (*admit)(void *self, request *q, reply *r);
  /* Answers a whole request; with r->wait set it is asked again, q->waited true, when q->job has
   * ended. */
  void (*answer)(void *self, request *q, reply *r);
  bool (*ended)(void *self, const char *job);
  /* The reply has gone out, or the caller went away before; status 0 if there was none. */
  void (*done)(void *self, const request *q, int status, size_t bytes, double seconds);
  void (*refused)(void *self, refusal why);
} http_app;

/* Listens; nothing is answered before http_start, so that who opens it knows it first. NULL, with
 * one line in message, if the address cannot be had or memory is out. */
http *http_open(const http_settings *settings, const http_app *app, char *message, size_t size);

/* Begins to answer. False if the threads cannot be had. */
bool http_start(http *h);

int http_port(const http *h);

/* Asks again for every request that waits for this job; NULL: for all, and none waits any more. */
void http_wake(http *h, const char *job);

void http_count(http *h, int *connections, int *waiters);

/* Takes no more connections; those that are open go on. */
void http_quiesce(http *h);

/* Ends all waits, lets requests be answered for at most `seconds`, closes everything, frees. NULL
 * is fine. */
void http_close(http *h, double seconds);

#endif
