#include "client.h"
#include <arpa/inet.h>
#include <netinet/tcp.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/socket.h>
#include <sys/uio.h>
#include <unistd.h>

int client_open(int port) {
  struct sockaddr_in at = {.sin_family = AF_INET, .sin_port = htons((uint16_t)port)};
  int s = socket(AF_INET, SOCK_STREAM | SOCK_CLOEXEC, 0), on = 1;
  at.sin_addr.s_addr = htonl(INADDR_LOOPBACK);
  if (s < 0) return -1;
  setsockopt(s, IPPROTO_TCP, TCP_NODELAY, &on, sizeof on);
  if (!connect(s, (struct sockaddr *)&at, sizeof at)) return s;
  close(s);
  return -1;
}

static int send_request(int s, const char *path, const char *body, size_t length) {
  char head[512];
  int n = body
              ? snprintf(head, sizeof head,
                         "POST %s HTTP/1.1\r\nHost: localhost\r\nContent-Type: application/json\r\n"
                         "Content-Length: %zu\r\n\r\n",
                         path, length)
              : snprintf(head, sizeof head, "GET %s HTTP/1.1\r\nHost: localhost\r\n\r\n", path);
  struct iovec parts[2] = {{head, (size_t)n}, {(void *)(size_t)body, body ? length : 0}};
  size_t whole = parts[0].iov_len + parts[1].iov_len;
  ssize_t sent = writev(s, parts, 2);
  return sent == (ssize_t)whole ? 0 : -1;
}

/* Reads the head of the answer into text; what was read of the body counts in *extra. */
static int read_head(int s, char *text, size_t size, size_t *extra) {
  size_t used = 0;
  while (used + 1 < size) {
    ssize_t n = read(s, text + used, size - 1 - used);
    if (n <= 0) return -1;
    used += (size_t)n;
    text[used] = 0;
    char *end = strstr(text, "\r\n\r\n");
    if (!end) continue;
    *extra = used - (size_t)(end + 4 - text);
    *end = 0;
    return 0;
  }
  return -1;
}

int client_call(int s, const char *path, const char *body, size_t body_length, size_t *length) {
  char text[65536];
  size_t got = 0, whole = 0;
  if (send_request(s, path, body, body_length) || read_head(s, text, sizeof text, &got)) return -1;
  int status = strlen(text) > 12 ? atoi(text + 9) : -1;
  const char *field = strcasestr(text, "\r\nContent-Length:");
  if (field) whole = strtoul(field + strlen("\r\nContent-Length:"), NULL, 10);
  while (got < whole) {
    ssize_t n = read(s, text, sizeof text);
    if (n <= 0) return -1;
    got += (size_t)n;
  }
  if (length) *length = whole;
  return status;
}
