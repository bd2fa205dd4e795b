/* attacks.c: requests that two readers could understand in two ways, over raw sockets (RFC 9112
   sections 5, 6 and 11.2; RFC 9110 sections 7.2, 10.1.1). Each is refused and its connection
   closed, and what was smuggled behind it is not answered. */
#include "client.h"
#include "trial.h"

#include <stdio.h>
#include <string.h>

#define HOST     "Host: t\r\n"
#define JSON     "Content-Type: application/json\r\n"
#define SMUGGLED "GET /healthz HTTP/1.1\r\nHost: t\r\n\r\n"

typedef struct attack {
  const char *what, *text;
  size_t length; /* 0: of the text */
  int status;    /* 0: the library closes without a word */
} attack;

static const attack attacks[] = {
    {"Content-Length with Transfer-Encoding",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Content-Length: 5\r\nTransfer-Encoding: chunked\r\n\r\n0\r\n\r\n" SMUGGLED,
     0, 400},
    {"Transfer-Encoding with Content-Length",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Transfer-Encoding: chunked\r\nContent-Length: 5\r\n\r\n0\r\n\r\n" SMUGGLED,
     0, 400},
    {"two equal Content-Lengths",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Content-Length: 2\r\nContent-Length: 2\r\n\r\n{}" SMUGGLED,
     0, 400},
    {"two different Content-Lengths",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Content-Length: 2\r\nContent-Length: 0\r\n\r\n{}" SMUGGLED,
     0, 400},
    {"a list of Content-Lengths",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON "Content-Length: 2, 2\r\n\r\n{}" SMUGGLED, 0, 400},
    {"a signed Content-Length",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON "Content-Length: +2\r\n\r\n{}" SMUGGLED, 0, 400},
    {"a negative Content-Length",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON "Content-Length: -2\r\n\r\n{}" SMUGGLED, 0, 400},
    {"a hexadecimal Content-Length",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON "Content-Length: 0x2\r\n\r\n{}" SMUGGLED, 0, 400},
    {"an empty Content-Length",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON "Content-Length:\r\n\r\n" SMUGGLED, 0, 400},
    {"an enormous Content-Length",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON "Content-Length: 99999999999999999999\r\n\r\n{}", 0,
     413},
    {"an unknown transfer coding",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Transfer-Encoding: gzip, chunked\r\n\r\n0\r\n\r\n" SMUGGLED,
     0, 501},
    {"a transfer coding named identity",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON "Transfer-Encoding: identity\r\n\r\n" SMUGGLED, 0,
     501},
    {"chunked twice",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Transfer-Encoding: chunked\r\nTransfer-Encoding: chunked\r\n\r\n0\r\n\r\n" SMUGGLED,
     0, 400},
    {"a transfer coding with a vertical tab",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Transfer-Encoding: \vchunked\r\n\r\n0\r\n\r\n" SMUGGLED,
     0, 400},
    {"chunked in HTTP/1.0",
     "POST /v1/trials HTTP/1.0\r\n" HOST JSON
     "Transfer-Encoding: chunked\r\n\r\n0\r\n\r\n" SMUGGLED,
     0, 400},
    {"no Host", "GET /healthz HTTP/1.1\r\n\r\n", 0, 400},
    {"two Hosts", "GET /healthz HTTP/1.1\r\nHost: a\r\nHost: b\r\n\r\n" SMUGGLED, 0, 400},
    {"an empty Host", "GET /healthz HTTP/1.1\r\nHost:\r\n\r\n" SMUGGLED, 0, 400},
    {"a Host with a path", "GET /healthz HTTP/1.1\r\nHost: a/b\r\n\r\n" SMUGGLED, 0, 400},
    {"a Host with two names", "GET /healthz HTTP/1.1\r\nHost: a,b\r\n\r\n" SMUGGLED, 0, 400},
    {"a Host with a user", "GET /healthz HTTP/1.1\r\nHost: a@b\r\n\r\n" SMUGGLED, 0, 400},
    {"a space before the colon",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON "Content-Length : 2\r\n\r\n{}" SMUGGLED, 0, 400},
    {"a tab before the colon",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Transfer-Encoding\t: chunked\r\n\r\n0\r\n\r\n" SMUGGLED,
     0, 400},
    {"a header name with a bracket", "GET /healthz HTTP/1.1\r\n" HOST "X(y): 1\r\n\r\n" SMUGGLED, 0,
     400},
    {"a control character in a header",
     "GET /healthz HTTP/1.1\r\n" HOST "X: a\x01z\r\n\r\n" SMUGGLED, 0, 400},
    {"a delete character in a header",
     "GET /healthz HTTP/1.1\r\n" HOST "X: a\x7fz\r\n\r\n" SMUGGLED, 0, 400},
    {"an encoded NUL in the path", "GET /healthz%00.txt HTTP/1.1\r\n" HOST "\r\n" SMUGGLED, 0, 400},
    {"an encoded line feed in the path", "GET /healthz%0aX HTTP/1.1\r\n" HOST "\r\n" SMUGGLED, 0,
     400},
    {"an encoded delete in the path", "GET /healthz%7F HTTP/1.1\r\n" HOST "\r\n" SMUGGLED, 0, 400},
    {"half an escape", "GET /healthz%4 HTTP/1.1\r\n" HOST "\r\n" SMUGGLED, 0, 400},
    {"an escape of no digits", "GET /health%zz HTTP/1.1\r\n" HOST "\r\n" SMUGGLED, 0, 400},
    {"a control byte in the path", "GET /health\x02z HTTP/1.1\r\n" HOST "\r\n" SMUGGLED, 0, 400},
    {"a space in the path", "GET /health z HTTP/1.1\r\n" HOST "\r\n" SMUGGLED, 0, 0},
    {"a byte above ASCII in the path", "GET /health\xc3\xa9 HTTP/1.1\r\n" HOST "\r\n" SMUGGLED, 0,
     400},
    {"a fragment in the path", "GET /healthz#top HTTP/1.1\r\n" HOST "\r\n" SMUGGLED, 0, 400},
    {"a backslash in the path", "GET \\healthz HTTP/1.1\r\n" HOST "\r\n" SMUGGLED, 0, 400},
    {"a target without a slash", "GET healthz HTTP/1.1\r\n" HOST "\r\n" SMUGGLED, 0, 400},
    {"an unknown expectation",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Expect: 200-ok\r\nContent-Length: 2\r\n\r\n{}" SMUGGLED,
     0, 417},
    {"two expectations",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Expect: 100-continue\r\nExpect: x\r\nContent-Length: 2\r\n\r\n{}" SMUGGLED,
     0, 400},
    {"two content types",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Content-Type: text/plain\r\nContent-Length: 2\r\n\r\n{}" SMUGGLED,
     0, 400},
    {"two Authorizations",
     "GET /healthz HTTP/1.1\r\n" HOST "Authorization: a\r\nAuthorization: b\r\n\r\n" SMUGGLED, 0,
     400},
    {"two idempotency keys",
     "POST /v1/trials HTTP/1.1\r\n" HOST JSON
     "Idempotency-Key: a\r\nIdempotency-Key: b\r\nContent-Length: 2\r\n\r\n{}" SMUGGLED,
     0, 400},
    {"HTTP/1.7", "GET /healthz HTTP/1.7\r\n" HOST "\r\n" SMUGGLED, 0, 505},
    {"HTTP/3.0", "GET /healthz HTTP/3.0\r\n" HOST "\r\n" SMUGGLED, 0, 505},
};

static void launch(int port, const attack *a) {
  wire w;
  answer first, second;
  bool sent =
      wire_open(&w, port, 5) && wire_send(&w, a->text, a->length ? a->length : strlen(a->text));
  wire_read(&w, &first, false);
  bool more = wire_read(&w, &second, false);
  check(sent && first.status == a->status && !more, "%s: %d and closed (got %d%s)", a->what,
        a->status, first.status, more ? ", then another answer" : "");
  answer_free(&first);
  answer_free(&second);
  wire_close(&w);
}

/* Sizes beyond what a connection may hold. */
static void too_long(int port) {
  static const struct {
    const char *what, *before, *after;
    size_t length;
    int status;
  } cases[] = {
      {"a target of 9,000 bytes", "GET /", " HTTP/1.1\r\n" HOST "\r\n", 9000, 414},
      {"a target of 100,000 bytes", "GET /", " HTTP/1.1\r\n" HOST "\r\n", 100000, 414},
      {"a header of 100,000 bytes", "GET / HTTP/1.1\r\n" HOST "X: ", "\r\n\r\n", 100000, 431}};
  for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
    wire w;
    answer a = {0};
    buffer text;
    buffer_init(&text, 0);
    buffer_text(&text, cases[i].before);
    for (size_t k = 0; k < cases[i].length; k++) buffer_text(&text, "x");
    buffer_text(&text, cases[i].after);
    wire_open(&w, port, 5);
    wire_send(&w, text.bytes, text.length);
    bool came = wire_read(&w, &a, false);
    check((came && a.status == cases[i].status) || wire_ended(&w, 1), "%s: %d or closed (got %d)",
          cases[i].what, cases[i].status, a.status);
    answer_free(&a);
    buffer_free(&text);
    wire_close(&w);
  }
}

static void too_many(int port) {
  buffer text;
  buffer_init(&text, 0);
  for (int i = 0; i < 65; i++) buffer_format(&text, "X-%d: y\r\n", i);
  answer a = ask(port, "GET", "/healthz", text.bytes, NULL);
  check(a.status == 431, "66 headers: 431 (got %d)", a.status);
  answer_free(&a);
  buffer_free(&text);
}

/* Bytes that are no HTTP at all. */
static void noise(int port) {
  static const char *const texts[] = {"\r\n\r\n\r\n", "hello\r\n\r\n",
                                      "\x16\x03\x01\x02\x00\x01\x00\x01\xfc\x03\x03",
                                      "PRI * HTTP/2.0\r\n\r\nSM\r\n\r\n"};
  for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++) {
    wire w;
    answer a;
    wire_open(&w, port, 0.3);
    wire_text(&w, texts[i]);
    wire_read(&w, &a, false);
    answer_free(&a);
    wire_close(&w);
  }
  answer a = ask(port, "GET", "/healthz", NULL, NULL);
  check(a.status == 200, "after bytes that are no HTTP the service answers");
  answer_free(&a);
}

int main(void) {
  service *s = trial_open(NULL);
  int port = service_port(s);
  for (size_t i = 0; i < sizeof attacks / sizeof attacks[0]; i++) launch(port, &attacks[i]);
  too_long(port);
  too_many(port);
  noise(port);
  service_close(s);
  return tally();
}
