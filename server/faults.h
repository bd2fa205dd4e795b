/* faults.h: every fault of a request, collected in one pass. */
#ifndef CORESOAK_FAULTS_H
#define CORESOAK_FAULTS_H

#include <stdbool.h>
#include <stddef.h>

enum { MOST_FAULTS = 100 }; /* beyond it only counted */

/* One fault: `at` a JSON Pointer, `is` what is wrong, `got` what stood there (NULL if nothing
   useful), `in` where it came from when not the request itself ("recipe", "row 17"; NULL). */
typedef struct request_fault {
  char *at, *is, *got, *in;
} request_fault;

typedef struct fault_list {
  int count; /* stored */
  int found; /* all */
  request_fault items[MOST_FAULTS];
  int status; /* HTTP status of the whole: 400 if the body is not JSON, else 422; 0 while empty */
  bool no_memory;
} fault_list;

void faults_init(fault_list *f);
void faults_free(fault_list *f);

/* Adds a fault; texts are copied; got may be NULL. `is` is a printf format. */
void faults_add(fault_list *f, const char *at, const char *got, const char *is, ...)
    __attribute__((format(printf, 4, 5)));

/* Nearest of `names` (NULL-terminated) to a misspelt one by edit distance, NULL if none is near. */
const char *nearest_name(const char *name, const char *const *names);

#endif
