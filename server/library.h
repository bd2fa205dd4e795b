/* library.h: the materials that come with the service, read once at start from data embedded at
   build. Immutable afterwards and shared by all threads. */
#ifndef CORESOAK_LIBRARY_H
#define CORESOAK_LIBRARY_H

#include "faults.h"
#include "property.h"

typedef struct library library;

/* Reads all embedded files; NULL on a fault (a defect of the build; tests hold every file valid).
 */
library *library_open(fault_list *faults);
void library_free(library *l);

/* A material by name, NULL if there is none. */
const material *library_find(const library *l, const char *name);

/* Sorted by name; NULL-terminated list of names for "did you mean". */
int library_count(const library *l);
const material *library_at(const library *l, int index);
const char *const *library_names(const library *l);

/* The JSON text of a material's file, as it is hashed and stored with a finished case. */
const char *library_text(const library *l, const char *name);

#endif
