/* http_listen.c: "address:port" -> a listening socket. */
#include "http_listen.h"

#include <errno.h>
#include <netdb.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

enum { BACKLOG = 511, LONGEST_HOST = 256 };

/* Divides at the last colon; the brackets of an IPv6 address go. */
static bool divide(const char *where, char host[LONGEST_HOST], const char **port) {
  const char *colon = strrchr(where, ':');
  if (!colon || colon == where || colon - where >= LONGEST_HOST) return false;
  size_t length = (size_t)(colon - where);
  *port = colon + 1;
  if (!**port || (*port)[strspn(*port, "0123456789")] != '\0') return false;
  if (where[0] == '[' && where[length - 1] == ']') {
    where++;
    length -= 2;
  }
  memcpy(host, where, length);
  host[length] = '\0';
  return length > 0;
}

static int open_socket(const struct addrinfo *a) {
  int on = 1;
  int s = socket(a->ai_family, a->ai_socktype | SOCK_NONBLOCK | SOCK_CLOEXEC, a->ai_protocol);
  if (s < 0) return -1;
  setsockopt(s, SOL_SOCKET, SO_REUSEADDR, &on, sizeof on);
  if (bind(s, a->ai_addr, a->ai_addrlen) == 0 && listen(s, BACKLOG) == 0) return s;
  int why = errno;
  close(s);
  errno = why;
  return -1;
}

static int port_of(int s) {
  struct sockaddr_storage address;
  socklen_t size = sizeof address;
  char service[16] = "0";
  if (getsockname(s, (struct sockaddr *)&address, &size) != 0) return 0;
  getnameinfo((struct sockaddr *)&address, size, NULL, 0, service, sizeof service, NI_NUMERICSERV);
  return atoi(service);
}

int http_listen(const char *where, int *port, char *message, size_t size) {
  struct addrinfo hints = {.ai_socktype = SOCK_STREAM, .ai_flags = AI_PASSIVE}, *found = NULL;
  char host[LONGEST_HOST];
  const char *service;
  if (!divide(where, host, &service)) {
    snprintf(message, size, "cannot listen on \"%s\": expected ADDRESS:PORT", where);
    return -1;
  }
  int outcome = getaddrinfo(host, service, &hints, &found);
  if (outcome != 0) {
    snprintf(message, size, "cannot listen on \"%s\": %s", where, gai_strerror(outcome));
    return -1;
  }
  int s = -1;
  for (struct addrinfo *a = found; a && s < 0; a = a->ai_next) s = open_socket(a);
  if (s < 0) snprintf(message, size, "cannot listen on \"%s\": %s", where, strerror(errno));
  freeaddrinfo(found);
  if (s >= 0) *port = port_of(s);
  return s;
}
