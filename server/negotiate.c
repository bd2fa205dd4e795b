/* negotiate.c: reading the headers by which callers state preferences. */
#include "negotiate.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#define BLANKS " \t"

/* One element of a list header: its text up to ';' and its parameters, both within the header. */
typedef struct element {
  const char *text, *parameters;
  size_t length, parameters_length;
} element;

static size_t trimmed(const char *text, size_t length) {
  while (length > 0 && strchr(BLANKS, text[length - 1])) length--;
  return length;
}

/* Takes the next element off *at; commas inside quotes do not divide. False at the end. */
static bool next_element(const char **at, element *e) {
  *at += strspn(*at, ", \t");
  if (!**at) return false;
  const char *start = *at, *semicolon = NULL;
  bool quoted = false;
  while (**at && (quoted || **at != ',')) {
    if (**at == '"') quoted = !quoted;
    if (**at == '\\' && quoted && (*at)[1]) ++*at;
    if (**at == ';' && !quoted && !semicolon) semicolon = *at;
    ++*at;
  }
  const char *end = semicolon ? semicolon : *at;
  e->text = start;
  e->length = trimmed(start, (size_t)(end - start));
  e->parameters = semicolon ? semicolon + 1 : *at;
  e->parameters_length = (size_t)(*at - e->parameters);
  return true;
}

/* Value of a parameter "name=value" among those divided by ';', without quotes; false if absent. */
static bool parameter(const element *e, const char *name, const char **value, size_t *length) {
  const char *at = e->parameters, *end = e->parameters + e->parameters_length;
  while (at < end) {
    at += strspn(at, "; \t");
    const char *stop = at;
    while (stop < end && *stop != ';') stop++;
    size_t n = strlen(name);
    if ((size_t)(stop - at) > n && strncasecmp(at, name, n) == 0 && at[n] == '=') {
      *value = at + n + 1;
      *length = trimmed(*value, (size_t)(stop - *value));
      if (*length >= 2 && **value == '"') {
        ++*value;
        *length -= 2;
      }
      return true;
    }
    at = stop < end ? stop + 1 : end;
  }
  return false;
}

static double weight(const element *e) {
  const char *value;
  size_t length;
  if (!parameter(e, "q", &value, &length)) return 1;
  char *rest;
  double q = strtod(value, &rest);
  return rest == value || !(q >= 0 && q <= 1) ? 0 : q;
}

/* How exactly a media range names a type: 3 itself, 2 "type" + "/" + "*", 1 everything, 0 not at
 * all. */
static int match(const element *e, const char *type) {
  size_t major = strcspn(type, "/") + 1;
  if (e->length == strlen(type) && strncasecmp(e->text, type, e->length) == 0) return 3;
  if (e->length == major + 1 && e->text[major] == '*' && strncasecmp(e->text, type, major) == 0)
    return 2;
  return e->length == 3 && strncmp(e->text, "*/*", 3) == 0;
}

static double weight_of_type(const char *accept, const char *type) {
  element e;
  int best = 0;
  double q = 0;
  while (next_element(&accept, &e)) {
    int exact = match(&e, type);
    if (exact > best) {
      best = exact;
      q = weight(&e);
    }
  }
  return q;
}

int negotiate_media(const char *accept, const char *const *offered) {
  int best = -1;
  double most = 0;
  if (!accept || accept[strspn(accept, BLANKS)] == '\0') return 0;
  for (int i = 0; offered[i]; i++) {
    double q = weight_of_type(accept, offered[i]);
    if (q > most) {
      most = q;
      best = i;
    }
  }
  return best;
}

static bool is_text(const element *e, const char *text) {
  return e->length == strlen(text) && strncasecmp(e->text, text, e->length) == 0;
}

bool negotiate_gzip(const char *accept_encoding) {
  element e;
  double gzip = -1, any = -1, identity = -1;
  if (!accept_encoding) return false;
  while (next_element(&accept_encoding, &e)) {
    if (is_text(&e, "gzip") || is_text(&e, "x-gzip")) gzip = weight(&e);
    if (is_text(&e, "*")) any = weight(&e);
    if (is_text(&e, "identity")) identity = weight(&e);
  }
  if (gzip < 0) gzip = any;
  return gzip > 0 && gzip >= identity;
}

bool media_type_is(const char *content_type, const char *type) {
  element e;
  const char *charset;
  size_t length;
  if (!content_type || !next_element(&content_type, &e) || !is_text(&e, type)) return false;
  if (!parameter(&e, "charset", &charset, &length)) return true;
  return length == 5 && strncasecmp(charset, "utf-8", 5) == 0;
}

preference negotiate_prefer(const char *prefer) {
  preference p = {false, NAN};
  element e;
  while (prefer && next_element(&prefer, &e)) {
    if (is_text(&e, "respond-async")) p.respond_async = true;
    if (e.length > 5 && strncasecmp(e.text, "wait=", 5) == 0 && isnan(p.wait)) {
      const char *digits = e.text[5] == '"' ? e.text + 6 : e.text + 5;
      char *rest;
      long seconds = strtol(digits, &rest, 10);
      if (strchr("0123456789", *digits) && rest != digits && seconds >= 0) p.wait = (double)seconds;
    }
  }
  return p;
}

bool negotiate_none_match(const char *if_none_match, const char *tag) {
  element e;
  while (if_none_match && next_element(&if_none_match, &e)) {
    const char *text = e.text;
    size_t length = e.length;
    if (length == 1 && *text == '*') return true;
    if (length > 2 && strncmp(text, "W/", 2) == 0) {
      text += 2;
      length -= 2;
    }
    if (length == strlen(tag) && strncmp(text, tag, length) == 0) return true;
  }
  return false;
}
