/* buffer.h: bytes that grow. */
#ifndef CORESOAK_BUFFER_H
#define CORESOAK_BUFFER_H

#include <stdbool.h>
#include <stddef.h>

typedef struct buffer {
  char *bytes;    /* always terminated by a NUL that does not count */
  size_t length, capacity;
  size_t limit;   /* most bytes; 0: none */
  bool failed;    /* out of memory or beyond the limit: everything after is dropped; check once at the end */
} buffer;

void buffer_init(buffer *b, size_t limit);
void buffer_free(buffer *b);
void buffer_clear(buffer *b);
void buffer_add(buffer *b, const void *bytes, size_t length);
void buffer_text(buffer *b, const char *text);
void buffer_format(buffer *b, const char *format, ...) __attribute__((format(printf, 2, 3)));

#endif
