/* run.c: a whole job in the calling thread. */
#include "kind.h"

#include <stdlib.h>

status job_run(const document *d, const solve_control *control, void **answer, fault *f) {
  const job_kind *kind = d->kind;
  status s = STATUS_OK;
  int count = kind->plan(d), done = 0;
  *answer = NULL;
  void **parts = calloc((size_t)count, sizeof *parts);
  if (!parts) return fail(f, STATUS_NO_MEMORY, "", "no memory for %d tasks", count);
  while (s == STATUS_OK && done < count) {
    s = kind->run(d, done, control, &parts[done], f);
    if (s == STATUS_OK) done++;
  }
  if (s == STATUS_OK)
    s = kind->fold(d, parts, count, answer, f);
  else
    for (int i = 0; i < done; i++) kind->free_part(parts[i]);
  free(parts);
  return s;
}
