/* http.c: the one file that knows the HTTP library.

   A request's life: on_target (its first line is there) -> on_request, first call (headers: audit,
   admit)
   -> on_request with pieces of the body -> on_request, last call (answer; perhaps suspended and
   called again when its job ended) -> on_completed. Only rejections answer on the first call,
   because a reply there ends the connection; only on_request queues replies. */
#include "http.h"

#include "audit.h"
#include "clock.h"
#include "gzip.h"
#include "http_desk.h"
#include "http_listen.h"
#include "http_watch.h"
#include "problem.h"

#include <microhttpd.h>
#include <pthread.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

enum {
  DRAIN_LIMIT = 64 << 20,  /* bytes of a refused body that are read so that its sender sees why */
  MEMORY_LIMIT = 32 << 10, /* of a connection: bounds its headers */
  GZIP_PIECE = 32 << 10,
  LARGE_BODY = 64 << 10, /* takes more than a millisecond to read */
  WAITERS_SHARE = 2      /* of the connections, one in so many may wait */
};

struct http {
  http_settings settings;
  http_app app;
  struct MHD_Daemon *daemon;
  http_watch *watch;
  http_desk *desk;
  buffer too_slow;
  int port, listening;   /* the descriptor, -1 once it is closed */
  pthread_mutex_t mutex; /* of `exchanges` */
  int exchanges;         /* requests begun and not completed */
};

typedef struct exchange {
  http *http;
  struct MHD_Connection *socket;
  connection *connection;
  request request;
  reply reply;
  double began;
  bool begun, refused, expects;
  bool answered; /* by the desk, while suspended */
  size_t received, sent;
  int status;
} exchange;

/* The content of a reply on its way; lives until the library has sent it. */
typedef struct content {
  reply reply;
  gzip *gzip;
} content;

static connection *connection_of(struct MHD_Connection *socket) {
  const union MHD_ConnectionInfo *info =
      MHD_get_connection_info(socket, MHD_CONNECTION_INFO_SOCKET_CONTEXT);
  return info ? info->socket_context : NULL;
}

static void count_exchange(http *h, int change) {
  pthread_mutex_lock(&h->mutex);
  h->exchanges += change;
  pthread_mutex_unlock(&h->mutex);
}

static int exchanges_of(http *h) {
  pthread_mutex_lock(&h->mutex);
  int count = h->exchanges;
  pthread_mutex_unlock(&h->mutex);
  return count;
}

/* ---- replies ---- */

static void free_content(void *self) {
  content *c = self;
  gzip_close(c->gzip);
  reply_free(&c->reply);
  free(c);
}

static ssize_t next_piece(void *self, uint64_t position, char *out, size_t room) {
  content *c = self;
  (void)position;
  ssize_t n = gzip_read(c->gzip, out, room);
  if (n > 0) return n;
  return n == 0 ? MHD_CONTENT_READER_END_OF_STREAM : MHD_CONTENT_READER_END_WITH_ERROR;
}

/* The library's reply with its content, which it takes over; NULL out of memory. */
static struct MHD_Response *response_of(reply *r) {
  size_t length;
  const char *bytes = reply_content(r, &length);
  bool compressed = reply_compresses(r);
  struct MHD_Response *response = NULL;
  content *c = calloc(1, sizeof *c);
  if (!c) return NULL;
  if (compressed) c->gzip = gzip_open(bytes, length);
  if (c->gzip)
    response = MHD_create_response_from_callback(MHD_SIZE_UNKNOWN, GZIP_PIECE, next_piece, c,
                                                 free_content);
  else if (!compressed)
    response = MHD_create_response_from_buffer_with_free_callback_cls(
        length, (void *)(uintptr_t)bytes, free_content, c);
  if (response) {
    c->reply = *r;
    reply_init(r);
  } else {
    gzip_close(c->gzip);
    free(c);
  }
  return response;
}

static void add_headers(struct MHD_Response *response, const reply *r, bool compressed) {
  bool cached = false;
  for (int i = 0; i < r->header_count; i++) {
    MHD_add_response_header(response, r->headers[i].name, r->headers[i].value);
    cached |= strcmp(r->headers[i].name, MHD_HTTP_HEADER_CACHE_CONTROL) == 0;
  }
  if (!cached) MHD_add_response_header(response, MHD_HTTP_HEADER_CACHE_CONTROL, "no-store");
  if (r->type) MHD_add_response_header(response, MHD_HTTP_HEADER_CONTENT_TYPE, r->type);
  if (compressed) MHD_add_response_header(response, MHD_HTTP_HEADER_CONTENT_ENCODING, "gzip");
  if (r->close) MHD_add_response_header(response, MHD_HTTP_HEADER_CONNECTION, "close");
  MHD_add_response_header(response, "X-Content-Type-Options", "nosniff");
}

static enum MHD_Result send_reply(exchange *x) {
  reply head = x->reply; /* headers and flags; the content moves on */
  size_t length;
  if (x->reply.body.failed) reply_problem(&x->reply, 503, "out of memory");
  reply_content(&x->reply, &length);
  head.status = x->reply.status;
  head.type = x->reply.type;
  bool compressed = reply_compresses(&x->reply);
  struct MHD_Response *response = response_of(&x->reply);
  if (!response) return MHD_NO;
  add_headers(response, &head, compressed);
  x->status = head.status;
  x->sent = length;
  watch_enter(x->http->watch, x->connection, PHASE_SEND, length);
  enum MHD_Result outcome = MHD_queue_response(x->socket, (unsigned)head.status, response);
  MHD_destroy_response(response);
  return outcome;
}

/* ---- requests ---- */

static void *on_target(void *self, const char *target, struct MHD_Connection *socket) {
  http *h = self;
  exchange *x = calloc(1, sizeof *x);
  if (!x) return NULL;
  x->http = h;
  x->socket = socket;
  x->connection = connection_of(socket);
  x->began = clock_steady();
  x->request.target = strdup(target);
  x->request.route = -1;
  buffer_init(&x->request.body, h->settings.body_limit);
  reply_init(&x->reply);
  count_exchange(h, 1);
  watch_enter(h->watch, x->connection, PHASE_HEADERS, 0);
  return x;
}

static enum MHD_Result note_header(void *self, enum MHD_ValueKind kind, const char *name,
                                   size_t name_length, const char *value, size_t value_length) {
  request *q = self;
  (void)kind;
  if (q->header_count < MOST_HEADERS)
    q->headers[q->header_count] = (header_field){name, value, name_length, value_length};
  q->header_count++;
  return MHD_YES;
}

/* Size that a body was announced with; 0 if none was. Valid once audited. */
static size_t announced(const request *q) {
  const char *length = request_header(q, "content-length");
  return length ? (size_t)strtoull(length, NULL, 10) : 0;
}

static bool audit(exchange *x) {
  request *q = &x->request;
  const char *why = NULL;
  int status = audit_request(q, &why);
  if (status == 0 && request_split_target(q) != 0) {
    status = 400;
    why = "the address cannot be decoded";
  }
  if (status == 0) return true;
  reply_problem(&x->reply, status, why);
  x->reply.close = true;
  x->http->app.refused(x->http->app.self, REFUSED_AUDIT);
  return false;
}

static void refuse_too_large(exchange *x) {
  char detail[96];
  snprintf(detail, sizeof detail, "the body is larger than the limit of %zu bytes",
           x->http->settings.body_limit);
  reply_problem(&x->reply, 413, detail);
  x->refused = true;
  buffer_free(&x->request.body);
  x->http->app.refused(x->http->app.self, REFUSED_TOO_LARGE);
}

/* The first call: headers only. What is refused here and has a body on its way is read to its end
 * first, so that its sender sees the reply; unless it asked whether to send at all, or sends more
 * than anybody should read. */
static enum MHD_Result begin(exchange *x, const char *method, const char *version) {
  request *q = &x->request;
  http *h = x->http;
  q->method = method_of(method);
  q->method_text = method;
  q->version = version;
  MHD_get_connection_values_n(x->socket, MHD_HEADER_KIND, note_header, q);
  if (!q->target) return MHD_NO;
  if (!audit(x)) return send_reply(x);
  size_t size = announced(q);
  bool chunked = request_header(q, "transfer-encoding") != NULL;
  const char *trace = request_header(q, "traceparent");
  if (trace && audit_traceparent(trace)) snprintf(q->trace, sizeof q->trace, "%.55s", trace);
  h->app.admit(h->app.self, q, &x->reply);
  x->refused = x->reply.status != 0;
  if (!x->refused && size > h->settings.body_limit) refuse_too_large(x);
  x->expects = request_header(q, "expect") && strcmp(version, "HTTP/1.1") == 0;
  bool has_body = size > 0 || chunked;
  if (x->refused && has_body && (x->expects || size > DRAIN_LIMIT)) {
    x->reply.close = true;
    return send_reply(x);
  }
  watch_enter(h->watch, x->connection, has_body ? PHASE_BODY : PHASE_WORK, 0);
  return MHD_YES;
}

static enum MHD_Result take_body(exchange *x, const char *bytes, size_t *length) {
  size_t n = *length;
  *length = 0;
  x->received += n;
  watch_received(x->http->watch, x->connection, n);
  if (!x->refused && x->received > x->http->settings.body_limit) refuse_too_large(x);
  if (x->refused) return x->received > DRAIN_LIMIT ? MHD_NO : MHD_YES;
  buffer_add(&x->request.body, bytes, n);
  if (x->request.body.failed) {
    reply_problem(&x->reply, 503, "out of memory");
    x->refused = true;
  }
  return MHD_YES;
}

static enum MHD_Result wait_for_job(exchange *x) {
  http *h = x->http;
  double seconds = x->reply.wait;
  char job[JOB_ID];
  memcpy(job, x->request.job, sizeof job);
  x->reply.wait = 0;
  x->request.waited = true;
  struct MHD_Connection *socket = x->socket;
  MHD_suspend_connection(socket);
  if (!watch_wait(h->watch, x->connection, x, job, seconds))
    MHD_resume_connection(socket);
  else if (h->app.ended(h->app.self, job))
    watch_wake(h->watch, job); /* it ended before the watch knew of the wait */
  return MHD_YES;
}

/* From the desk's thread: answers a suspended exchange. */
static void answer_at_desk(void *item, bool closing) {
  exchange *x = item;
  const http_app *app = &x->http->app;
  if (closing)
    reply_problem(&x->reply, 503, "the service is stopping");
  else
    app->answer(app->self, &x->request, &x->reply);
  x->answered = true;
  MHD_resume_connection(x->socket);
}

/* The last call: the request is whole, a wait is over, or the desk has answered. */
static enum MHD_Result conclude(exchange *x) {
  http *h = x->http;
  request *q = &x->request;
  if (x->refused) return send_reply(x);
  watch_enter(h->watch, x->connection, PHASE_WORK, 0);
  if (!x->answered && (q->slow || q->body.length > LARGE_BODY)) {
    MHD_suspend_connection(x->socket);
    if (desk_hand(h->desk, x)) return MHD_YES;
    MHD_resume_connection(x->socket);
    x->answered = true;
    reply_problem(&x->reply, 503, "out of memory");
    return MHD_YES;
  }
  if (!x->answered) h->app.answer(h->app.self, q, &x->reply);
  x->answered = false;
  return x->reply.wait > 0 ? wait_for_job(x) : send_reply(x);
}

static enum MHD_Result on_request(void *self, struct MHD_Connection *socket, const char *url,
                                  const char *method, const char *version, const char *body,
                                  size_t *body_length, void **state) {
  exchange *x = *state;
  (void)self, (void)socket, (void)url;
  if (!x) return MHD_NO;
  if (!x->begun) {
    x->begun = true;
    return begin(x, method, version);
  }
  if (*body_length > 0) return take_body(x, body, body_length);
  return conclude(x);
}

static void on_completed(void *self, struct MHD_Connection *socket, void **state,
                         enum MHD_RequestTerminationCode how) {
  http *h = self;
  exchange *x = *state;
  (void)socket;
  if (!x) return;
  *state = NULL;
  if (how != MHD_REQUEST_TERMINATED_COMPLETED_OK) x->request.departed = true;
  if (x->begun)
    h->app.done(h->app.self, &x->request, x->status, x->sent, clock_steady() - x->began);
  watch_enter(h->watch, x->connection, PHASE_IDLE, 0);
  free((char *)(uintptr_t)x->request.target);
  request_free(&x->request);
  reply_free(&x->reply);
  free(x);
  count_exchange(h, -1);
}

static void on_connection(void *self, struct MHD_Connection *socket, void **context,
                          enum MHD_ConnectionNotificationCode what) {
  http *h = self;
  if (what == MHD_CONNECTION_NOTIFY_STARTED) {
    const union MHD_ConnectionInfo *info =
        MHD_get_connection_info(socket, MHD_CONNECTION_INFO_CONNECTION_FD);
    *context = info ? watch_add(h->watch, info->connect_fd) : NULL;
  } else {
    watch_remove(h->watch, *context);
    *context = NULL;
  }
}

/* From the watch, which calls it once for each wait. */
static void resume(void *waiter, bool departed) {
  exchange *x = waiter;
  x->request.departed = departed;
  MHD_resume_connection(x->socket);
}

/* ---- opening and closing ---- */

static void on_cut(void *self) {
  const http *h = self;
  h->app.refused(h->app.self, REFUSED_SLOW);
}

static bool open_watch(http *h) {
  buffer problem;
  buffer_init(&problem, 0);
  problem_write(&problem, 408, "the request came more slowly than the limits allow", NULL);
  buffer_format(&h->too_slow,
                "HTTP/1.1 408 Request Timeout\r\nContent-Type: application/problem+json\r\n"
                "Content-Length: %zu\r\nConnection: close\r\n\r\n%s",
                problem.length, problem.bytes ? problem.bytes : "");
  watch_settings settings = {h->settings.header_deadline,
                             h->settings.body_deadline,
                             h->settings.idle,
                             h->settings.least_rate,
                             h->settings.connections / WAITERS_SHARE,
                             h->too_slow.bytes,
                             resume,
                             on_cut,
                             h};
  if (!problem.failed && !h->too_slow.failed) h->watch = watch_open(&settings);
  buffer_free(&problem);
  return h->watch != NULL;
}

static void free_http(http *h) {
  desk_close(h->desk);
  watch_close(h->watch);
  if (h->listening >= 0) close(h->listening);
  buffer_free(&h->too_slow);
  pthread_mutex_destroy(&h->mutex);
  free(h);
}

http *http_open(const http_settings *settings, const http_app *app, char *message, size_t size) {
  http *h = calloc(1, sizeof *h);
  snprintf(message, size, "out of memory");
  if (!h) return NULL;
  h->settings = *settings;
  h->app = *app;
  h->listening = -1;
  pthread_mutex_init(&h->mutex, NULL);
  buffer_init(&h->too_slow, 0);
  h->desk = desk_open(answer_at_desk);
  if (!h->desk || !open_watch(h)) goto out;
  h->listening = http_listen(settings->listen, &h->port, message, size);
  if (h->listening >= 0) return h;
out:
  free_http(h);
  return NULL;
}

/* More than one thread only where it is asked for: the library warns of a pool of one. */
bool http_start(http *h) {
  struct MHD_OptionItem pool[] = {{MHD_OPTION_THREAD_POOL_SIZE, h->settings.threads, NULL},
                                  {MHD_OPTION_END, 0, NULL}};
  if (h->settings.threads < 2) pool[0].option = MHD_OPTION_END;
  h->daemon = MHD_start_daemon(
      MHD_USE_EPOLL_INTERNAL_THREAD | MHD_ALLOW_SUSPEND_RESUME, 0, NULL, NULL, on_request, h,
      MHD_OPTION_LISTEN_SOCKET, (MHD_socket)h->listening, MHD_OPTION_CONNECTION_LIMIT,
      (unsigned)h->settings.connections, MHD_OPTION_CONNECTION_MEMORY_LIMIT, (size_t)MEMORY_LIMIT,
      MHD_OPTION_CONNECTION_TIMEOUT, 0u, MHD_OPTION_STRICT_FOR_CLIENT, 1,
      MHD_OPTION_URI_LOG_CALLBACK, on_target, h, MHD_OPTION_NOTIFY_COMPLETED, on_completed, h,
      MHD_OPTION_NOTIFY_CONNECTION, on_connection, h, MHD_OPTION_ARRAY, pool, MHD_OPTION_END);
  return h->daemon != NULL;
}

int http_port(const http *h) {
  return h->port;
}

void http_wake(http *h, const char *job) {
  watch_wake(h->watch, job);
}

void http_count(http *h, int *connections, int *waiters) {
  watch_count(h->watch, connections, waiters);
}

/* A daemon whose listening socket was not taken from it would close that with itself. */
void http_quiesce(http *h) {
  if (h->listening < 0) return;
  if (h->daemon) (void)MHD_quiesce_daemon(h->daemon);
  close(h->listening);
  h->listening = -1;
}

void http_close(http *h, double seconds) {
  if (!h) return;
  double until = clock_steady() + seconds;
  http_quiesce(h);
  watch_wake(h->watch, NULL);
  while (exchanges_of(h) > 0 && clock_steady() < until) usleep(2000);
  desk_close(h->desk); /* which resumes what it has: nothing may be suspended now */
  h->desk = NULL;
  if (h->daemon) MHD_stop_daemon(h->daemon);
  free_http(h);
}
