/* client.h: a small HTTP/1.1 client over one kept connection. */
#ifndef BENCH_CLIENT_H
#define BENCH_CLIENT_H

#include <stddef.h>

/* A connection to 127.0.0.1:port, -1 if there is none. Close with close(2). */
int client_open(int port);

/* One request and its answer on an open connection; body NULL: a GET. Returns the status, -1 on a
   broken connection. The answer's body is read and counted in *length (may be NULL). */
int client_call(int connection, const char *path, const char *body, size_t body_length,
                size_t *length);

#endif
