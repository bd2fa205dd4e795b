/* http_listen.h: the listening socket. */
#ifndef CORESOAK_HTTP_LISTEN_H
#define CORESOAK_HTTP_LISTEN_H

#include <stddef.h>

/* Listens on "address:port", "[address]:port" or "name:port". Returns the descriptor and the port,
   or -1 with one line in message. */
int http_listen(const char *where, int *port, char *message, size_t size);

#endif
