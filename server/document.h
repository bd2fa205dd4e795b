/* document.h: a job document (kind, job, title, labels around a question) made of bytes, or all its
 * faults. */
#ifndef CORESOAK_DOCUMENT_H
#define CORESOAK_DOCUMENT_H

#include "arena.h"
#include "faults.h"
#include "library.h"
#include "result.h"
#include "units.h"

struct job_kind;

typedef struct label {
  const char *name, *value;
} label;

/* "job": how to treat the job, outside of the case and of its hash. Unset: priority 0, others NAN /
 * NULL. */
typedef struct job_wishes {
  int priority;
  double not_before, expires_at; /* s since 1970-01-01T00:00Z */
  double time_limit;             /* s */
  const char *id;
} job_wishes;

typedef struct document {
  const struct job_kind *kind;
  const char *title; /* NULL if absent */
  int label_count;
  const label *labels;
  job_wishes job;
  output_units units;
  void *question;    /* of the kind; for a solve a heat_case */
  int warning_count; /* what reading noticed: bare lengths, ... */
  warning *warnings;
  char *finished; /* the finished case as canonical JSON: names resolved, materials expanded; hashed
                   */
  size_t finished_length;
  char hash[65]; /* SHA-256 of it, hex */
  arena memory;  /* of everything above except question */
} document;

/* Reads a job document. `expected` is the kind that the route or caller implies (NULL: `kind` in
   the document, absent = solve). Returns 0 and a new document, or -1 with every fault in *faults
   (faults->status 400 or 422; 413 for element counts beyond limits is 422). Thread-safe. */
int document_read(const char *bytes, size_t length, const struct job_kind *expected,
                  const library *materials, document **out, fault_list *faults);

void document_free(document *d);

#endif
