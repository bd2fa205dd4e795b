/* run_case.h: a case of the API through reader, solver and writer, in this process. */
#ifndef CHECKS_RUN_CASE_H
#define CHECKS_RUN_CASE_H

#include "library.h"
#include <jansson.h>

/* The library of materials, opened once. NULL if it cannot be read (told on stderr). */
const library *shared_library(void);

/* Solves a case and returns its result as parsed JSON, a new reference; NULL on any fault, with the
   reasons in `why` (size bytes). */
json_t *run_case(const json_t *document, char *why, size_t size);

/* Member by JSON Pointer of plain names ("figures/t85/value", "history/time/3"); NULL if there is
 * none. */
const json_t *result_at(const json_t *root, const char *path, ...)
    __attribute__((format(printf, 2, 3)));

/* A number by pointer; NAN if there is none. */
double result_number(const json_t *root, const char *path, ...)
    __attribute__((format(printf, 2, 3)));

#endif
