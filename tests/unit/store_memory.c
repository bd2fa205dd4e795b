/* The store of jobs in memory. */
#include "store.h"

#include "clock.h"

#include <criterion/criterion.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

static int freed_answers, freed_questions;

static void free_question(void *question) {
  freed_questions++;
  free(question);
}

static void free_answer(void *answer) {
  freed_answers++;
  free(answer);
}

static verdict judge(const void *answer) {
  return *(const int *)answer > 0 ? VERDICT_MEETS : VERDICT_MISSES;
}

static const job_kind kind = {
    .name = "a", .verdict = judge, .free_question = free_question, .free_answer = free_answer};
static const job_kind other = {
    .name = "b", .verdict = judge, .free_question = free_question, .free_answer = free_answer};

static document *make(const job_kind *k, int priority) {
  document *d = calloc(1, sizeof *d);
  cr_assert(d);
  d->kind = k;
  d->question = malloc(1);
  d->job = (job_wishes){priority, NAN, NAN, NAN, NULL};
  arena_init(&d->memory, 0);
  return d;
}

static void add(store *s, document *d, char id[40]) {
  cr_assert_eq(s->add(s, d, NULL, id), 0);
}

static job_outcome answer(int value, const char *text) {
  job_outcome o = {
      .answer = malloc(sizeof value), .text = strdup(text), .text_length = strlen(text)};
  memcpy(o.answer, &value, sizeof value);
  return o;
}

/* Adds, claims and ends a job. */
static void run(store *s, const char *text, char id[40]) {
  job_view v;
  add(s, make(&kind, 0), id);
  cr_assert_eq(s->claim(s, &v), CLAIM_TAKEN);
  job_outcome o = answer(1, text);
  s->finish(s, v.id, &o);
  s->release(s, &v);
}

static job_state state_of(store *s, const char *id) {
  job_view v;
  cr_assert_eq(s->look(s, id, &v), 0);
  s->release(s, &v);
  return v.state;
}

Test(store_memory, ids_are_long_and_differ) {
  store *s = store_memory_open(100, 10, 1000);
  char ids[50][40];
  for (int i = 0; i < 50; i++) {
    add(s, make(&kind, 0), ids[i]);
    cr_assert_eq(strspn(ids[i], "0123456789abcdef"), 32);
    for (int k = 0; k < i; k++) cr_assert_str_neq(ids[i], ids[k]);
  }
  s->close(s);
  cr_assert_eq(freed_questions, 50);
}

Test(store_memory, a_full_queue_takes_no_more_and_leaves_the_document) {
  store *s = store_memory_open(2, 10, 1000);
  char id[40];
  job_view v;
  add(s, make(&kind, 0), id);
  add(s, make(&kind, 0), id);
  document *d = make(&kind, 9);
  cr_assert_eq(s->add(s, d, NULL, id), -1);
  cr_assert_eq(s->claim(s, &v), CLAIM_TAKEN);
  cr_assert_eq(s->add(s, d, NULL, id), 0, "a claimed job makes room");
  s->release(s, &v);
  s->close(s);
  cr_assert_eq(freed_questions, 3);
}

Test(store_memory, claims_by_priority_then_age) {
  store *s = store_memory_open(10, 10, 1000);
  static const int priorities[] = {0, -1, 5, 0, 5};
  static const int order[] = {2, 4, 0, 3, 1};
  char ids[5][40];
  job_view v;
  for (int i = 0; i < 5; i++) add(s, make(&kind, priorities[i]), ids[i]);
  cr_assert_eq(s->look(s, ids[1], &v), 0);
  cr_assert_eq(v.position, 4);
  s->release(s, &v);
  for (int i = 0; i < 5; i++) {
    cr_assert_eq(s->claim(s, &v), CLAIM_TAKEN);
    cr_assert_str_eq(v.id, ids[order[i]]);
    cr_assert_eq(v.attempts, 1);
    s->release(s, &v);
  }
  cr_assert_eq(s->claim(s, &v), CLAIM_NONE);
  s->close(s);
}

Test(store_memory, not_before_and_expires_at) {
  store *s = store_memory_open(10, 10, 1000);
  char later[40], late[40], now[40];
  job_view v;
  document *d = make(&kind, 9);
  d->job.not_before = clock_wall() + 0.2;
  add(s, d, later);
  d = make(&kind, 5);
  d->job.expires_at = clock_wall() - 1;
  add(s, d, late);
  add(s, make(&kind, 0), now);
  cr_assert_eq(s->claim(s, &v), CLAIM_EXPIRED);
  cr_assert_str_eq(v.id, late);
  cr_assert_eq(v.state, JOB_FAILED);
  s->release(s, &v);
  cr_assert_eq(s->claim(s, &v), CLAIM_TAKEN);
  cr_assert_str_eq(v.id, now);
  s->release(s, &v);
  cr_assert_eq(state_of(s, late), JOB_FAILED);
  cr_assert_eq(s->claim(s, &v), CLAIM_LATER);
  struct timespec pause = {0, 250000000};
  nanosleep(&pause, NULL);
  cr_assert_eq(s->claim(s, &v), CLAIM_TAKEN);
  cr_assert_str_eq(v.id, later);
  s->release(s, &v);
  s->close(s);
}

Test(store_memory, an_answer_its_text_and_its_hash) {
  store *s = store_memory_open(10, 10, 1000);
  char id[40];
  job_view v;
  run(s, "abc", id);
  cr_assert_eq(s->look(s, id, &v), 0);
  cr_assert_eq(v.state, JOB_DONE);
  cr_assert_eq(v.verdict, VERDICT_MEETS);
  cr_assert_eq(v.fraction, 1);
  cr_assert_eq(*(const int *)v.answer, 1);
  cr_assert_eq(strncmp(v.text, "abc", v.text_length), 0);
  /* FIPS 180-2, appendix B.1 */
  cr_assert_str_eq(v.text_hash, "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
  s->release(s, &v);
  s->close(s);
  cr_assert_eq(freed_answers, 1);
}

Test(store_memory, cancelling) {
  store *s = store_memory_open(10, 10, 1000);
  char queued[40], running[40], done[40];
  job_view v;
  run(s, "x", done);
  add(s, make(&kind, 1), running);
  cr_assert_eq(s->claim(s, &v), CLAIM_TAKEN);
  add(s, make(&kind, 0), queued);
  cr_assert_eq(s->cancel(s, queued), 0);
  cr_assert_eq(s->cancel(s, running), 0);
  cr_assert_eq(s->cancel(s, done), -2);
  cr_assert_eq(s->cancel(s, running), -2);
  cr_assert_eq(s->cancel(s, "nothing"), -1);
  cr_assert(s->cancelled(s, running) && s->cancelled(s, queued) && s->cancelled(s, "nothing"));
  cr_assert_not(s->cancelled(s, done));
  job_outcome o = answer(1, "late");
  s->finish(s, running, &o);
  cr_assert_null(o.answer, "taken over all the same");
  cr_assert_eq(freed_answers, 1, "an answer that comes after the cancelling is dropped");
  cr_assert_eq(state_of(s, running), JOB_CANCELLED);
  s->release(s, &v);
  s->close(s);
}

Test(store_memory, failures) {
  store *s = store_memory_open(10, 10, 1000);
  char id[40];
  job_view v;
  add(s, make(&kind, 0), id);
  cr_assert_eq(s->claim(s, &v), CLAIM_TAKEN);
  s->release(s, &v);
  job_outcome o = {.failure = {.status = STATUS_NO_CONVERGENCE, .stage = 2, .is = "no"}};
  s->finish(s, id, &o);
  cr_assert_eq(s->look(s, id, &v), 0);
  cr_assert_eq(v.state, JOB_FAILED);
  cr_assert_eq(v.failure.stage, 2);
  cr_assert_null(v.answer);
  s->release(s, &v);
  s->close(s);
}

Test(store_memory, the_oldest_ended_go_first_by_number_and_by_bytes) {
  store *s = store_memory_open(10, 3, 100);
  char ids[6][40], large[161];
  job_view v;
  for (int i = 0; i < 5; i++) run(s, "0123456789", ids[i]);
  cr_assert_eq(s->look(s, ids[1], &v), -1);
  cr_assert_eq(s->look(s, ids[2], &v), 0);
  memset(large, 'x', 160);
  large[160] = '\0';
  run(s, large, ids[5]);
  job_view newest;
  cr_assert_eq(s->look(s, ids[4], &newest), -1, "it alone is over the bytes");
  cr_assert_eq(s->look(s, ids[5], &newest), 0, "but the newest stays");
  cr_assert_eq(strncmp(v.text, "0123456789", v.text_length), 0, "a view holds what it shows");
  s->release(s, &v);
  s->release(s, &newest);
  s->close(s);
  cr_assert_eq(freed_answers, 6);
}

Test(store_memory, lists_and_counts) {
  store *s = store_memory_open(10, 10, 1000);
  label lot = {"lot", "B7"};
  char id[40], labelled[40];
  job_view v[10];
  long by_state[JOB_STATES];
  double age;
  run(s, "x", id);
  document *d = make(&other, 0);
  d->labels = &lot;
  d->label_count = 1;
  add(s, d, labelled);
  add(s, make(&kind, 0), id);
  cr_assert_eq(s->list(s, &(job_filter){0}, v, 10), 3);
  cr_assert_str_eq(v[0].id, id, "newest first");
  long middle = v[1].number;
  for (int i = 0; i < 3; i++) s->release(s, &v[i]);
  const job_filter filters[] = {
      {.state = "done"}, {.kind = "b"}, {.label = "lot", .label_value = "B7"}, {.before = middle}};
  for (size_t i = 0; i < 4; i++) {
    cr_assert_eq(s->list(s, &filters[i], v, 10), 1, "filter %zu", i);
    s->release(s, &v[0]);
  }
  cr_assert_eq(s->list(s, &(job_filter){.label = "lot", .label_value = "B8"}, v, 10), 0);
  s->count(s, by_state, &age);
  cr_assert(by_state[JOB_QUEUED] == 2 && by_state[JOB_DONE] == 1 && by_state[JOB_RUNNING] == 0);
  cr_assert(age >= 0 && age < 5);
  s->close(s);
}
