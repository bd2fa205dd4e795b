/* read_json.c: bytes to a JSON tree, refused early where the tree would be too deep or too large.
 */
#include "reader.h"

#include <pthread.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* The JSON library tells a failed allocation as a fault of the text; so it is noted here. */
static _Thread_local bool out_of_memory;

static void *noting_malloc(size_t size) {
  void *memory = malloc(size);
  if (!memory) out_of_memory = true;
  return memory;
}

static void prepare_library(void) {
  json_set_alloc_funcs(noting_malloc, free);
  json_object_seed(0);
}

typedef struct scan {
  const char *bytes;
  size_t length, at;
  int depth;
  size_t elements;
  fault_list *faults;
} scan;

static void locate(const char *bytes, size_t at, int *line, int *column) {
  *line = *column = 1;
  for (size_t i = 0; i < at; i++) {
    if (bytes[i] == '\n') {
      ++*line;
      *column = 1;
    } else if (((unsigned char)bytes[i] & 0xC0) != 0x80) {
      ++*column;
    }
  }
}

static int refuse(scan *s, const char *why) {
  int line, column;
  locate(s->bytes, s->at, &line, &column);
  faults_add(s->faults, "", NULL, "%s (line %d, column %d)", why, line, column);
  s->faults->status = 400;
  return -1;
}

/* Length of the UTF-8 sequence at p, 0 if it is not one (RFC 3629). */
static size_t utf8_length(const unsigned char *p, size_t left) {
  if (p[0] < 0x80) return 1;
  size_t n = p[0] >= 0xF0 ? 4 : p[0] >= 0xE0 ? 3 : 2;
  if (p[0] < 0xC2 || p[0] > 0xF4 || left < n) return 0;
  for (size_t i = 1; i < n; i++)
    if ((p[i] & 0xC0) != 0x80) return 0;
  if (p[0] == 0xE0 && p[1] < 0xA0) return 0;
  if (p[0] == 0xED && p[1] > 0x9F) return 0;
  if (p[0] == 0xF0 && p[1] < 0x90) return 0;
  if (p[0] == 0xF4 && p[1] > 0x8F) return 0;
  return n;
}

/* Depth, number of elements and characters, before any memory is taken for the tree. */
static int prescan(scan *s) {
  bool text = false;
  while (s->at < s->length) {
    unsigned char c = (unsigned char)s->bytes[s->at];
    size_t n = utf8_length((const unsigned char *)s->bytes + s->at, s->length - s->at);
    if (!n) return refuse(s, "not valid UTF-8");
    if (text) {
      if (c == '\\' && s->at + 1 < s->length && (unsigned char)s->bytes[s->at + 1] < 0x80) n = 2;
      if (c == '"') text = false;
    } else if (c == '"') {
      text = true;
    } else if (c == '[' || c == '{') {
      if (++s->depth > MOST_DEPTH) return refuse(s, "nested more than 32 deep");
      s->elements++;
    } else if (c == ']' || c == '}') {
      s->depth--;
    } else if (c == ',' && ++s->elements > MOST_ELEMENTS) {
      return refuse(s, "more than 2000000 elements");
    }
    s->at += n;
  }
  return 0;
}

json_t *parse_json(const char *bytes, size_t length, fault_list *faults) {
  scan s = {.bytes = bytes, .length = length, .faults = faults};
  static pthread_once_t prepared = PTHREAD_ONCE_INIT;
  if (prescan(&s)) return NULL;
  json_error_t error;
  pthread_once(&prepared, prepare_library);
  out_of_memory = false;
  json_t *root = json_loadb(bytes, length, JSON_REJECT_DUPLICATES, &error);
  if (root && json_is_object(root)) return root;
  if (root) {
    json_decref(root);
    faults_add(faults, "", NULL, "must be an object");
    return NULL;
  }
  if (out_of_memory) {
    faults->no_memory = true;
    return NULL;
  }
  faults_add(faults, "", NULL, "not JSON: %s (line %d, column %d)", error.text, error.line,
             error.column);
  faults->status = 400;
  return NULL;
}
