/* kinds.c: the table of job kinds. */
#include "kind.h"
#include "solve_kind.h"

#include <string.h>

const job_kind *const job_kinds[] = {&solve_kind, NULL};

const job_kind *job_kind_named(const char *name) {
  for (int i = 0; job_kinds[i]; i++)
    if (strcmp(job_kinds[i]->name, name) == 0) return job_kinds[i];
  return NULL;
}

const job_kind *job_kind_at_path(const char *path) {
  for (int i = 0; job_kinds[i]; i++)
    if (strcmp(job_kinds[i]->path, path) == 0) return job_kinds[i];
  return NULL;
}
