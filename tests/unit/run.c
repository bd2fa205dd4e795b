/* run: every task of a job once and in order, its parts folded or freed, never both. */
#include "kind.h"

#include <criterion/criterion.h>
#include <stdlib.h>
#include <string.h>

/* A kind whose task i answers i + 1 and whose answer is their sum. */
static int tasks, failing_task, alive;

static int plan_some(const document *d) {
  (void)d;
  return tasks;
}

static status run_number(const document *d, int task, const solve_control *control, void **part,
                         fault *f) {
  (void)d;
  if (task == failing_task) return fail(f, STATUS_NOT_FINITE, "/x", "task %d failed", task);
  if (control && control->go_on(control->self, 0) != STATUS_OK)
    return fail(f, STATUS_CANCELLED, "", "cancelled");
  int *number = malloc(sizeof *number);
  if (!number) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  *number = task + 1;
  *part = number;
  alive++;
  return STATUS_OK;
}

static void free_number(void *part) {
  if (part) alive--;
  free(part);
}

static status sum_up(const document *d, void **parts, int count, void **answer, fault *f) {
  (void)d, (void)f;
  int *sum = parts[0];
  for (int i = 1; i < count; i++) {
    *sum += *(int *)parts[i];
    free_number(parts[i]);
  }
  *answer = sum;
  return STATUS_OK;
}

static const job_kind summing = {
    .name = "sum", .plan = plan_some, .run = run_number, .fold = sum_up, .free_part = free_number};
static document job;

static void prepare(void) {
  job = (document){.kind = &summing};
  tasks = 3;
  failing_task = -1;
  alive = 0;
}

static status count_down(void *self, double fraction) {
  (void)fraction;
  int *left = self;
  return --*left < 0 ? STATUS_CANCELLED : STATUS_OK;
}

TestSuite(run, .init = prepare);

Test(run, folds_the_parts_of_all_tasks) {
  void *answer = NULL;
  fault f;
  cr_assert_eq(job_run(&job, NULL, &answer, &f), STATUS_OK);
  cr_assert_eq(*(int *)answer, 1 + 2 + 3);
  free_number(answer);
  cr_assert_eq(alive, 0);
}

Test(run, a_failing_task_ends_the_job_and_frees_what_was_done) {
  for (failing_task = 0; failing_task < tasks; failing_task++) {
    void *answer = &job;
    fault f;
    cr_assert_eq(job_run(&job, NULL, &answer, &f), STATUS_NOT_FINITE);
    cr_assert_null(answer);
    cr_assert_eq(f.status, STATUS_NOT_FINITE);
    cr_assert_str_eq(f.at, "/x");
    cr_assert_eq(alive, 0, "%d parts were left by task %d", alive, failing_task);
  }
}

Test(run, control_reaches_every_task) {
  for (int allowed = 0; allowed < tasks; allowed++) {
    int left = allowed;
    solve_control control = {count_down, &left};
    void *answer = NULL;
    fault f;
    cr_assert_eq(job_run(&job, &control, &answer, &f), STATUS_CANCELLED);
    cr_assert_null(answer);
    cr_assert_eq(alive, 0);
  }
}
