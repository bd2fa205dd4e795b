/* read_path.c: where in the document the reader is, and the faults it adds there. */
#include "reader.h"

#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* RFC 6901: "~" is "~0", "/" is "~1". */
static size_t escaped(char *out, size_t size, const char *text) {
  size_t n = 0;
  for (; *text && n + 3 < size; text++) {
    if (*text == '~' || *text == '/') {
      out[n++] = '~';
      out[n++] = *text == '~' ? '0' : '1';
    } else {
      out[n++] = *text;
    }
  }
  out[n] = 0;
  return n;
}

size_t path_push(reader *r, const char *member) {
  size_t before = r->length;
  if (r->length + 4 < LONGEST_PATH) {
    r->path[r->length++] = '/';
    r->length += escaped(r->path + r->length, LONGEST_PATH - r->length, member);
  }
  return before;
}

size_t path_push_index(reader *r, size_t index) {
  char text[24];
  snprintf(text, sizeof text, "%zu", index);
  return path_push(r, text);
}

void path_pop(reader *r, size_t length) {
  r->length = length;
  r->path[length] = 0;
}

/* A value as it stood, shortened. */
static char *rendered(const json_t *v) {
  if (!v) return NULL;
  if (json_is_object(v) || (json_is_array(v) && json_array_size(v) > 8))
    return strdup(json_is_object(v) ? "an object" : "an array");
  char *text =
      json_dumps(v, JSON_ENCODE_ANY | JSON_COMPACT | JSON_ENSURE_ASCII | JSON_REAL_PRECISION(12));
  if (!text) return NULL;
  size_t length = strlen(text);
  if (json_is_string(v) && length >= 2) { /* a text without its quotes */
    memmove(text, text + 1, length - 2);
    text[length - 2] = 0;
    length -= 2;
  }
  if (length > 80) memcpy(text + 77, "...", 4);
  return text;
}

/* A reference that led nowhere left null behind; its fault stands already. */
static bool told_already(const reader *r, const char *at, const json_t *got) {
  if (!json_is_null(got)) return false;
  for (int i = 0; i < r->faults->count; i++)
    if (!strcmp(r->faults->items[i].at, at)) return true;
  return false;
}

static void add(reader *r, const char *at, const json_t *got, const char *is, va_list arguments) {
  if (told_already(r, at, got)) return;
  char text[512];
  vsnprintf(text, sizeof text, is, arguments);
  char *shown = rendered(got);
  faults_add(r->faults, at, shown, "%s", text);
  free(shown);
}

void fault_here(reader *r, const json_t *got, const char *is, ...) {
  va_list arguments;
  va_start(arguments, is);
  add(r, r->path, got, is, arguments);
  va_end(arguments);
}

void fault_at(reader *r, const char *member, const json_t *got, const char *is, ...) {
  size_t before = member ? path_push(r, member) : r->length;
  va_list arguments;
  va_start(arguments, is);
  add(r, r->path, got, is, arguments);
  va_end(arguments);
  path_pop(r, before);
}

void warn_here(reader *r, const char *is, ...) {
  document *d = r->document;
  if (!d || d->warning_count >= LIMIT_WARNINGS) return;
  if (!d->warnings &&
      !(d->warnings = arena_array(&d->memory, LIMIT_WARNINGS, sizeof *d->warnings))) {
    r->no_memory = true;
    return;
  }
  warning *w = &d->warnings[d->warning_count++];
  snprintf(w->at, sizeof w->at, "%.95s", r->path);
  va_list arguments;
  va_start(arguments, is);
  vsnprintf(w->is, sizeof w->is, is, arguments);
  va_end(arguments);
}

void *take(reader *r, size_t count, size_t size) {
  void *memory = arena_array(r->memory, count ? count : 1, size);
  if (!memory) r->no_memory = true;
  return memory;
}

bool must_be_object(reader *r, const json_t *v) {
  if (json_is_object(v)) return true;
  fault_here(r, v, "must be an object");
  return false;
}

bool must_be_array(reader *r, const json_t *v, size_t most, const char *what) {
  if (!json_is_array(v)) {
    fault_here(r, v, "must be an array");
    return false;
  }
  if (json_array_size(v) <= most) return true;
  fault_here(r, NULL, "has %zu %s; the limit is %zu", json_array_size(v), what, most);
  return false;
}

bool must_be_text(reader *r, const json_t *v) {
  if (!json_is_string(v)) {
    fault_here(r, v, "must be a text");
    return false;
  }
  if (json_string_length(v) <= LIMIT_TEXT) return true;
  fault_here(r, NULL, "is %zu bytes long; the limit is %d", json_string_length(v), LIMIT_TEXT);
  return false;
}

bool is_name(const char *text) {
  size_t n = strlen(text);
  if (!n || n > LIMIT_NAME) return false;
  return strspn(text, "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789_-") == n;
}
