/* adapt.h: a neutral reference case turned into a case of the API. */
#ifndef CHECKS_ADAPT_H
#define CHECKS_ADAPT_H

#include <jansson.h>
#include <stdbool.h>

enum { MOST_INTERFACES = 8 };

typedef struct adapted {
  const json_t *neutral;
  json_t *document;                      /* the API's case, owned */
  json_t *points, *times, *of, *figures; /* borrowed: parts of `document` that rows add to */
  const char *coordinate;                /* "x" or "r" */
  const char *first, *last;              /* names of the faces */
  double origin, end;                    /* coordinates of the faces, m */
  int interfaces;
  double interface[MOST_INTERFACES];
  bool steady;
  double longest; /* s: end of the last stage */
  double period;  /* s, of a periodic case; 0 otherwise */
} adapted;

/* Builds the case without its questions. Returns NULL on success, else why it cannot be said
   (static text); in any case adapt_free. */
const char *adapt(adapted *a, const json_t *neutral);
void adapt_free(adapted *a);

/* Numbers of the neutral form. `fallback` if absent. */
double neutral_number(const json_t *object, const char *name, double fallback);

/* adapt_material.c: a material object of the API from a neutral material or layer (a new
   reference), or a library name as a JSON string; NULL if it cannot be said. */
json_t *adapt_material(const json_t *neutral);

#endif
