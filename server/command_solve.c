/* command_solve.c: a job document solved in this process. */
#include "command.h"

#include "kind.h"

#include <math.h>
#include <stdio.h>
#include <time.h>

static double now(void) {
  struct timespec t;
  clock_gettime(CLOCK_MONOTONIC, &t);
  return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static status until_deadline(void *self, double fraction) {
  (void)fraction;
  return now() < *(const double *)self ? STATUS_OK : STATUS_OUT_OF_TIME;
}

/* The stricter of the flag's limit and the document's own; 0 on the flag is none. */
static double allowed_time(const options *o, const document *d) {
  double allowed = o->time_limit > 0 ? o->time_limit : INFINITY;
  return d->job.time_limit > 0 ? fmin(allowed, d->job.time_limit) : allowed;
}

static int tell_failure(const char *path, const fault *f) {
  buffer b;
  buffer_init(&b, 0);
  fprintf(stderr, "%s: %s: %s\n", input_name(path), f->at[0] ? f->at : "the job",
          f->is[0] ? f->is : status_message(f->status));
  problem_of_fault(&b, f);
  if (!b.failed) fputs(b.bytes, stderr);
  buffer_free(&b);
  return problem_exit_code(f->status);
}

static int exit_code_of(verdict v) {
  switch (v) {
  case VERDICT_NONE:
  case VERDICT_MEETS: return EXIT_GOOD;
  case VERDICT_CLOSE:
  case VERDICT_MISSES: return EXIT_MISSES;
  }
  return EXIT_NOT_SOLVED;
}

static int put_answer(const options *o, const document *d, const void *answer) {
  media m = o->csv ? MEDIA_CSV : o->brief ? MEDIA_TEXT : MEDIA_JSON;
  int code = EXIT_BAD_INPUT;
  buffer b;
  buffer_init(&b, 0);
  if (d->kind->write(d, answer, m, &b) != 0)
    fprintf(stderr, "coresoak: a %s has no answer in that form\n", d->kind->name);
  else
    code = put_out(&b);
  buffer_free(&b);
  return code == EXIT_GOOD ? exit_code_of(d->kind->verdict(answer)) : code;
}

int command_solve(const options *o) {
  library *materials = NULL;
  document *d = NULL;
  void *answer = NULL;
  fault f;
  if (o->csv && o->brief) {
    fputs("coresoak: --csv and --brief exclude each other\n", stderr);
    return EXIT_BAD_INPUT;
  }
  int code = input_document(o, false, &materials, &d);
  if (code != EXIT_GOOD) goto out;
  double deadline = now() + allowed_time(o, d);
  solve_control control = {until_deadline, &deadline};
  fail(&f, STATUS_OK, "", "%s", "");
  if (job_run(d, &control, &answer, &f) != STATUS_OK)
    code = tell_failure(o->operands[0], &f);
  else
    code = put_answer(o, d, answer);
out:
  if (answer) d->kind->free_answer(answer);
  document_free(d);
  library_free(materials);
  return code;
}
