/* client.h: HTTP over a plain socket, as crooked as a test needs it. */
#ifndef CORESOAK_CLIENT_H
#define CORESOAK_CLIENT_H

#include "buffer.h"

#include <jansson.h>
#include <stdbool.h>
#include <stddef.h>

typedef struct wire {
  int socket;    /* -1: not connected */
  char *pending; /* bytes that came and were not yet read */
  size_t used;
} wire;

typedef struct answer {
  int status;      /* 0: the connection ended without one */
  char head[8192]; /* status line and headers */
  buffer body;
} answer;

/* Connects to 127.0.0.1; reading gives up after `patience` seconds. */
bool wire_open(wire *w, int port, double patience);
void wire_close(wire *w);

bool wire_send(wire *w, const char *bytes, size_t length);
bool wire_text(wire *w, const char *text);

/* Reads one answer (without content after HEAD). A 100 is an answer. False, status 0, if none came.
 */
bool wire_read(wire *w, answer *a, bool after_head);

/* True if the other side has closed, or closes within `seconds`. */
bool wire_ended(wire *w, double seconds);

void answer_free(answer *a);

/* Value of a header in out; false if it is absent. */
bool answer_header(const answer *a, const char *name, char *out, size_t size);

/* One exchange on a connection of its own. `headers` are whole lines, each with \r\n; body NULL:
 * none. */
answer ask(int port, const char *method, const char *target, const char *headers, const char *body);

/* POST of JSON, with more headers. */
answer post(int port, const char *target, const char *headers, const char *json);

/* The content as JSON (decref), NULL if it is none; its member as text, number. */
json_t *answer_json(const answer *a);
bool answer_text_is(const answer *a, const char *member, const char *expected);
double answer_number(const answer *a, const char *member);

#endif
