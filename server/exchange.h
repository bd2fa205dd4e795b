/* exchange.h: one request and its reply, without a socket: what the routes see of HTTP. */
#ifndef CORESOAK_EXCHANGE_H
#define CORESOAK_EXCHANGE_H

#include "buffer.h"
#include <stdbool.h>
#include <stddef.h>

enum {
  MOST_HEADERS = 64,
  MOST_REPLY_HEADERS = 8,
  TRACE_TEXT = 56,
  JOB_ID = 40,
  ARGUMENT_TEXT = 96
};

typedef struct header_field {
  const char *name, *value;
  size_t name_length, value_length;
} header_field;

typedef enum method { METHOD_GET, METHOD_HEAD, METHOD_POST, METHOD_DELETE, METHOD_OTHER } method;

typedef struct request {
  method method;
  const char *method_text, *version;
  const char *target; /* as it came */
  char *path;         /* decoded, without query; owned */
  char *query;        /* not decoded, "" if none; owned with path */
  int header_count;   /* all that came; headers holds at most MOST_HEADERS */
  header_field headers[MOST_HEADERS];
  buffer body;
  char trace[TRACE_TEXT];       /* a valid traceparent, "" if none came */
  int route;                    /* index, -1 before a route was found */
  char argument[ARGUMENT_TEXT]; /* what stands in the path for the route's {name} */
  char job[JOB_ID];             /* of the job that it made or waits for, "" if none */
  bool slow;                    /* takes long to answer: not by a thread that others wait for */
  bool waited;                  /* the wait that it asked for is over */
  bool departed;                /* the caller went away while it waited */
} request;

typedef struct reply_header {
  const char *name;
  char value[128];
} reply_header;

typedef struct reply {
  int status;       /* 0 until somebody answered */
  const char *type; /* of the content; a constant */
  buffer body;      /* the content, unless `held` is set: */
  const char *held; /* bytes of somebody else's, which */
  size_t held_length;
  void (*release)(void *self, void *hold); /* is called for when they have been sent */
  void *release_self, *hold;
  int header_count;
  reply_header headers[MOST_REPLY_HEADERS];
  bool close;    /* end the connection afterwards */
  bool compress; /* the caller reads gzip */
  double wait;   /* > 0: ask again when request.job has ended, or after so many seconds */
} reply;

void request_free(request *q);

/* Splits q->target into a decoded path and a query. Returns 0, -1 if it cannot be decoded, or -2
 * out of memory. */
int request_split_target(request *q);

/* Value of a header of which one is expected; NULL if absent. Names compare without case. */
const char *request_header(const request *q, const char *name);

/* All values of a list header, joined by ", " into out; false if absent or longer than size. */
bool request_list_header(const request *q, const char *name, char *out, size_t size);

/* Value of a query parameter, decoded into out; false if absent or longer than size. */
bool request_parameter(const request *q, const char *name, char *out, size_t size);

/* First query parameter that is not among `known` (NULL-terminated), into out; false if there is
 * none. */
bool request_unknown_parameter(const request *q, const char *const *known, char *out, size_t size);

void reply_init(reply *r);
void reply_free(reply *r);

/* Sets a header from a printf-formatted value. */
void reply_header_set(reply *r, const char *name, const char *value, ...)
    __attribute__((format(printf, 3, 4)));

/* The bytes of the content, own or held. */
const char *reply_content(const reply *r, size_t *length);

/* True if the content goes out compressed: the caller takes gzip, and it is worth it. */
bool reply_compresses(const reply *r);

/* Makes the reply a problem document; whatever content was there is dropped, headers stay. */
void reply_problem(reply *r, int status, const char *detail);

method method_of(const char *text);

#endif
