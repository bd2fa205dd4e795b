/* buffer.c: bytes that grow by doubling. The first failure sticks, so that a writer checks once at
 * its end. */
#include "buffer.h"

#include <stdarg.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { FIRST_CAPACITY = 256 };

void buffer_init(buffer *b, size_t limit) {
  memset(b, 0, sizeof *b);
  b->limit = limit;
}

void buffer_free(buffer *b) {
  free(b->bytes);
  buffer_init(b, b->limit);
}

void buffer_clear(buffer *b) {
  b->length = 0;
  b->failed = false;
  if (b->bytes) b->bytes[0] = '\0';
}

static bool make_room(buffer *b, size_t more) {
  if (b->failed) return false;
  size_t most = b->limit ? b->limit : SIZE_MAX / 2;
  if (more > most || b->length > most - more) goto fail;
  size_t needed = b->length + more + 1;
  if (needed <= b->capacity) return true;
  size_t capacity = b->capacity ? b->capacity : FIRST_CAPACITY;
  while (capacity < needed) capacity *= 2;
  char *grown = realloc(b->bytes, capacity);
  if (!grown) goto fail;
  b->bytes = grown;
  b->capacity = capacity;
  return true;
fail:
  b->failed = true;
  return false;
}

void buffer_add(buffer *b, const void *bytes, size_t length) {
  if (!make_room(b, length)) return;
  if (length > 0) memcpy(b->bytes + b->length, bytes, length);
  b->length += length;
  b->bytes[b->length] = '\0';
}

void buffer_text(buffer *b, const char *text) {
  buffer_add(b, text, strlen(text));
}

void buffer_format(buffer *b, const char *format, ...) {
  va_list arguments, again;
  va_start(arguments, format);
  va_copy(again, arguments);
  int length = vsnprintf(NULL, 0, format, arguments);
  if (length < 0) b->failed = true;
  if (length >= 0 && make_room(b, (size_t)length)) {
    vsnprintf(b->bytes + b->length, (size_t)length + 1, format, again);
    b->length += (size_t)length;
  }
  va_end(again);
  va_end(arguments);
}
