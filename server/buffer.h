/* buffer.h: bytes that grow. */
#ifndef CORESOAK_BUFFER_H
#define CORESOAK_BUFFER_H

#include <stdbool.h>
#include <stddef.h>

typedef struct buffer {
  char *bytes; /* terminated by a NUL that does not count; NULL while nothing was ever added */
  size_t length, capacity;
  size_t limit; /* most bytes; 0: none */
  bool failed;  /* out of memory or beyond the limit: everything after is dropped; check once at the
                   end */
} buffer;

/* An empty buffer of at most `limit` bytes (0: no limit); takes no memory yet. */
void buffer_init(buffer *b, size_t limit);

/* Gives the memory back; the buffer may be used again. */
void buffer_free(buffer *b);

/* Forgets content and failure, keeps the memory. */
void buffer_clear(buffer *b);

/* Appends bytes, a text, or a printf-formatted text; on failure sets b->failed and appends nothing.
 */
void buffer_add(buffer *b, const void *bytes, size_t length);
void buffer_text(buffer *b, const char *text);
void buffer_format(buffer *b, const char *format, ...) __attribute__((format(printf, 2, 3)));

#endif
