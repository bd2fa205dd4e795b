/* client.c: HTTP over a plain socket. */
#include "client.h"

#include <arpa/inet.h>
#include <errno.h>
#include <math.h>
#include <netinet/in.h>
#include <poll.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>
#include <sys/socket.h>
#include <sys/time.h>
#include <unistd.h>

enum { PENDING = 1 << 16 };

bool wire_open(wire *w, int port, double patience) {
  struct sockaddr_in to = {.sin_family = AF_INET, .sin_port = htons((uint16_t)port)};
  struct timeval limit = {(time_t)patience, (suseconds_t)((patience - floor(patience)) * 1e6)};
  to.sin_addr.s_addr = htonl(INADDR_LOOPBACK);
  w->used = 0;
  w->pending = malloc(PENDING);
  w->socket = socket(AF_INET, SOCK_STREAM | SOCK_CLOEXEC, 0);
  if (!w->pending || w->socket < 0) return false;
  setsockopt(w->socket, SOL_SOCKET, SO_RCVTIMEO, &limit, sizeof limit);
  return connect(w->socket, (const struct sockaddr *)&to, sizeof to) == 0;
}

void wire_close(wire *w) {
  if (w->socket >= 0) close(w->socket);
  w->socket = -1;
  free(w->pending);
  w->pending = NULL;
}

bool wire_send(wire *w, const char *bytes, size_t length) {
  while (length > 0) {
    ssize_t n = send(w->socket, bytes, length, MSG_NOSIGNAL);
    if (n < 0 && errno == EINTR) continue;
    if (n <= 0) return false;
    bytes += n;
    length -= (size_t)n;
  }
  return true;
}

bool wire_text(wire *w, const char *text) {
  return wire_send(w, text, strlen(text));
}

static bool more(wire *w) {
  if (w->used == PENDING) return false;
  ssize_t n = recv(w->socket, w->pending + w->used, PENDING - w->used, 0);
  if (n > 0) w->used += (size_t)n;
  return n > 0;
}

static void take(wire *w, size_t n) {
  memmove(w->pending, w->pending + n, w->used - n);
  w->used -= n;
}

/* Reads up to and with an ending; its bytes go to out. */
static bool read_until(wire *w, const char *ending, char *out, size_t size) {
  char *at;
  while (!(at = memmem(w->pending, w->used, ending, strlen(ending))))
    if (!more(w)) return false;
  size_t n = (size_t)(at - w->pending) + strlen(ending);
  if (n >= size) return false;
  memcpy(out, w->pending, n);
  out[n] = '\0';
  take(w, n);
  return true;
}

static bool read_bytes(wire *w, size_t n, buffer *out) {
  while (n > 0) {
    if (w->used == 0 && !more(w)) return false;
    size_t piece = n < w->used ? n : w->used;
    if (out) buffer_add(out, w->pending, piece);
    take(w, piece);
    n -= piece;
  }
  return true;
}

static bool read_chunks(wire *w, buffer *out) {
  char line[256];
  for (;;) {
    if (!read_until(w, "\r\n", line, sizeof line)) return false;
    size_t n = strtoul(line, NULL, 16);
    if (n > 0 && !read_bytes(w, n, out)) return false;
    if (!read_until(w, "\r\n", line, sizeof line)) return false;
    if (n == 0) return true;
  }
}

bool wire_read(wire *w, answer *a, bool after_head) {
  char value[64];
  memset(a, 0, sizeof *a);
  buffer_init(&a->body, 0);
  if (!read_until(w, "\r\n\r\n", a->head, sizeof a->head)) return false;
  if (sscanf(a->head, "HTTP/1.%*d %d", &a->status) != 1) return false;
  if (after_head || a->status == 304 || a->status < 200) return true;
  if (answer_header(a, "Transfer-Encoding", value, sizeof value)) return read_chunks(w, &a->body);
  if (answer_header(a, "Content-Length", value, sizeof value))
    return read_bytes(w, strtoul(value, NULL, 10), &a->body);
  while (read_bytes(w, 1, &a->body)) continue;
  return true;
}

bool wire_ended(wire *w, double seconds) {
  struct pollfd p = {w->socket, POLLIN, 0};
  char byte;
  if (w->used > 0) return false;
  if (poll(&p, 1, (int)(seconds * 1000)) <= 0) return false;
  return recv(w->socket, &byte, 1, MSG_PEEK) <= 0;
}

void answer_free(answer *a) {
  buffer_free(&a->body);
}

bool answer_header(const answer *a, const char *name, char *out, size_t size) {
  const char *line = a->head;
  while ((line = strstr(line, "\r\n"))) {
    line += 2;
    size_t n = strlen(name);
    if (strncasecmp(line, name, n) != 0 || line[n] != ':') continue;
    line += n + 1;
    line += strspn(line, " ");
    snprintf(out, size, "%.*s", (int)strcspn(line, "\r"), line);
    return true;
  }
  if (size) out[0] = '\0';
  return false;
}

answer ask(int port, const char *method, const char *target, const char *headers,
           const char *body) {
  wire w;
  answer a = {0};
  buffer text;
  buffer_init(&text, 0);
  buffer_format(&text, "%s %s HTTP/1.1\r\nHost: test\r\n%s", method, target,
                headers ? headers : "");
  if (body) buffer_format(&text, "Content-Length: %zu\r\n", strlen(body));
  buffer_format(&text, "\r\n%s", body ? body : "");
  if (wire_open(&w, port, 40) && wire_send(&w, text.bytes, text.length))
    wire_read(&w, &a, strcmp(method, "HEAD") == 0);
  wire_close(&w);
  buffer_free(&text);
  return a;
}

answer post(int port, const char *target, const char *headers, const char *json) {
  char all[1024];
  snprintf(all, sizeof all, "Content-Type: application/json\r\n%s", headers ? headers : "");
  return ask(port, "POST", target, all, json);
}

json_t *answer_json(const answer *a) {
  return a->body.length ? json_loadb(a->body.bytes, a->body.length, JSON_REJECT_DUPLICATES, NULL)
                        : NULL;
}

bool answer_text_is(const answer *a, const char *member, const char *expected) {
  json_t *j = answer_json(a);
  const char *text = json_string_value(json_object_get(j, member));
  bool same = text && strcmp(text, expected) == 0;
  json_decref(j);
  return same;
}

double answer_number(const answer *a, const char *member) {
  json_t *j = answer_json(a);
  const json_t *value = json_object_get(j, member);
  double number = json_is_number(value) ? json_number_value(value) : NAN;
  json_decref(j);
  return number;
}
