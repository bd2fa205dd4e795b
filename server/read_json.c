/* read_json.c: bytes to a JSON tree, refused early where the tree would be too deep or too large.
 */
#include "reader.h"

#include <stdio.h>
#include <string.h>

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

static int refuse(scan *s, int status, const char *why) {
  int line, column;
  locate(s->bytes, s->at, &line, &column);
  faults_add(s->faults, "", NULL, "%s (line %d, column %d)", why, line, column);
  s->faults->status = status;
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

static int count_element(scan *s) {
  return ++s->elements > MOST_ELEMENTS ? refuse(s, 422, "more than 1000000 elements") : 0;
}

/* The text that begins at the quote where the scan stands; leaves it behind the closing quote. */
static int scan_text(scan *s) {
  size_t begin = s->at++;
  while (s->at < s->length && s->bytes[s->at] != '"') {
    bool escape = s->bytes[s->at] == '\\' && s->at + 1 < s->length;
    size_t at = s->at + escape;
    size_t n = utf8_length((const unsigned char *)s->bytes + at, s->length - at);
    s->at = at + n;
    if (!n) return refuse(s, 400, "not valid UTF-8");
    if (s->at - begin > LONGEST_TEXT) return refuse(s, 422, "a text of more than 65536 bytes");
  }
  s->at++;
  return 0;
}

/* Depth, number of elements and characters, before any memory is taken for the tree. */
static int prescan(scan *s) {
  while (s->at < s->length) {
    unsigned char c = (unsigned char)s->bytes[s->at];
    if (c == '"') {
      if (scan_text(s)) return -1;
      continue;
    }
    if (c >= 0x80) {
      if (!utf8_length((const unsigned char *)s->bytes + s->at, s->length - s->at))
        return refuse(s, 400, "not valid UTF-8");
      return refuse(s, 400, "not JSON: a character outside of a text");
    }
    if ((c == '[' || c == '{') && ++s->depth > MOST_DEPTH)
      return refuse(s, 400, "nested more than 32 deep");
    if (c == ']' || c == '}') s->depth--;
    if ((c == '[' || c == '{' || c == ',') && count_element(s)) return -1;
    s->at++;
  }
  return 0;
}

static size_t next_piece(void *out, size_t room, void *context) {
  scan *s = context;
  if (parsing_lacks_memory()) return (size_t)-1;
  size_t left = s->length - s->at, n = left < room ? left : room;
  memcpy(out, s->bytes + s->at, n);
  s->at += n;
  return n;
}

/* Parses text that the scan found sound. */
static json_t *parse(scan *s) {
  json_error_t error;
  s->at = 0;
  json_t *root = json_load_callback(next_piece, s, JSON_REJECT_DUPLICATES, &error);
  if (parsing_lacks_memory()) {
    s->faults->no_memory = true;
    json_decref(root);
    return NULL;
  }
  if (json_is_object(root)) return root;
  if (root)
    faults_add(s->faults, "", NULL, "must be an object");
  else
    faults_add(s->faults, "", NULL, "not JSON: %s (line %d, column %d)", error.text, error.line,
               error.column);
  s->faults->status = root ? 422 : 400;
  json_decref(root);
  return NULL;
}

json_t *parse_json(const char *bytes, size_t length, fault_list *faults) {
  scan s = {.bytes = bytes, .length = length, .faults = faults};
  if (prescan(&s)) return NULL;
  if (!parsing_begins()) {
    faults->no_memory = true;
    return NULL;
  }
  json_t *root = parse(&s);
  parsing_ends();
  return root;
}
