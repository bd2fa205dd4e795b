/* kind.h: the table of job kinds. HTTP, queue, store and command line work on the row and know no
 * kind by name. */
#ifndef CORESOAK_KIND_H
#define CORESOAK_KIND_H

#include "buffer.h"
#include "document.h"
#include "solve.h"

struct reader;

typedef enum media {
  MEDIA_JSON,
  MEDIA_CSV,
  MEDIA_TEXT
} media; /* TEXT: for a reader, not for a program */

typedef struct job_kind {
  const char *name; /* "solve": `kind` in a document */
  const char *path; /* "solves": POST /v1/<path> */
  const char *about;
  /* Reads the question from a parsed document (a json_t *, behind void so that only the readers
     know the library). Fills d->question and d->finished; faults go to the reader's list. Returns 0
     or -1. */
  int (*read)(struct reader *r, void *json, document *d);
  /* Number of independent tasks of the question, at least 1. */
  int (*plan)(const document *d);
  /* Runs one task; *part is its own result, freed by free_part. */
  status (*run)(const document *d, int task, const solve_control *control, void **part, fault *f);
  /* Folds the parts of all tasks into the answer; takes the parts over. */
  status (*fold)(const document *d, void **parts, int count, void **answer, fault *f);
  /* Renders the answer. Returns 0, or -1 if that medium is not offered. b->failed tells of memory.
   */
  int (*write)(const document *d, const void *answer, media m, buffer *b);
  verdict (*verdict)(const void *answer);
  /* Estimated cost, for `check` and the limit per request. */
  status (*cost)(const document *d, solve_cost *cost, fault *f);
  /* What can be said of the question before it runs, for `check`: fills list (LIMIT_WARNINGS),
     returns how many. NULL: nothing. */
  int (*advise)(const document *d, warning *list);
  void (*free_question)(void *question);
  void (*free_part)(void *part);
  void (*free_answer)(void *answer);
} job_kind;

extern const job_kind *const job_kinds[]; /* NULL-terminated; the first is solve */

const job_kind *job_kind_named(const char *name);
const job_kind *job_kind_at_path(const char *path);

/* run.c: all tasks of a job one after the other in the calling thread (command line; a worker's
 * unit is one task). */
status job_run(const document *d, const solve_control *control, void **answer, fault *f);

#endif
