/* solve_kind.c: the job kind "solve". */
#include "solve_kind.h"

#include "read.h"
#include "write_result.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static int plan(const document *d) {
  (void)d;
  return 1;
}

/* The solver's reason names the stage; here it is told where that stands in the document, and when
 * in words. */
static void tell_where(fault *f) {
  char when[64];
  if (!f) return;
  if (f->stage >= 0 && !f->at[0]) snprintf(f->at, sizeof f->at, "/stages/%d", f->stage);
  if (!isfinite(f->time)) return;
  snprintf(when, sizeof when, ", %.6g s from the start of the case", f->time);
  size_t used = strlen(f->is), room = sizeof f->is - 1 - strlen(when);
  memcpy(f->is + (used < room ? used : room), when, strlen(when) + 1);
}

static status run(const document *d, int task, const solve_control *control, void **part,
                  fault *f) {
  (void)task;
  heat_result *result = NULL;
  status s = solve_case(d->question, control, &result, f);
  if (s != STATUS_OK) tell_where(f);
  *part = result;
  return s;
}

static status fold(const document *d, void **parts, int count, void **answer, fault *f) {
  (void)d, (void)count, (void)f;
  *answer = parts[0];
  return STATUS_OK;
}

static int write(const document *d, const void *answer, media m, buffer *b) {
  switch (m) {
  case MEDIA_JSON: write_result_json(d, answer, b); return 0;
  case MEDIA_CSV: write_result_csv(d, answer, b); return 0;
  case MEDIA_TEXT: write_result_text(d, answer, b); return 0;
  }
  return -1;
}

static verdict verdict_of(const void *answer) {
  return ((const heat_result *)answer)->verdict;
}

static status cost(const document *d, solve_cost *c, fault *f) {
  return solve_estimate(d->question, c, f);
}

static int advise(const document *d, warning *list) {
  return case_advice(d->question, list, 0);
}

static void free_question(void *question) {
  heat_case_free(question);
}

static void free_result(void *result) {
  heat_result_free(result);
}

const job_kind solve_kind = {
    .name = "solve",
    .path = "solves",
    .about = "The temperatures of one part taken through one schedule",
    .read = read_solve,
    .plan = plan,
    .run = run,
    .fold = fold,
    .write = write,
    .verdict = verdict_of,
    .cost = cost,
    .advise = advise,
    .free_question = free_question,
    .free_part = free_result,
    .free_answer = free_result,
};
