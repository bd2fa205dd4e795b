/* trial.c: counted checks; kinds of job that only wait and add. */
#include "trial.h"

#include "clock.h"

#include <jansson.h>
#include <math.h>
#include <pthread.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

enum { MOST_FLAGS = 32 };

static pthread_mutex_t count_mutex = PTHREAD_MUTEX_INITIALIZER;
static int passed, failed;

bool check(bool good, const char *what, ...) {
  char text[512];
  va_list arguments;
  va_start(arguments, what);
  vsnprintf(text, sizeof text, what, arguments);
  va_end(arguments);
  pthread_mutex_lock(&count_mutex);
  *(good ? &passed : &failed) += 1;
  printf("%s  %s\n", good ? "ok  " : "FAIL", text);
  fflush(stdout);
  pthread_mutex_unlock(&count_mutex);
  return good;
}

int tally(void) {
  printf("%d passed, %d failed\n", passed, failed);
  return failed == 0 && passed > 0 ? 0 : 1;
}

atomic_int trial_running;
_Atomic double trial_stopped;

typedef struct question {
  double seconds;
  int tasks, bytes, fails;
} question;

typedef struct sum {
  long value;
  int bytes;
  bool unwritable;
} sum;

static int read_question(struct reader *r, void *json, document *d) {
  (void)r;
  const json_t *wanted = json_object_get(json, "inputs");
  question *q = calloc(1, sizeof *q);
  if (!q) return -1;
  q->seconds = json_number_value(json_object_get(wanted, "seconds"));
  q->bytes = (int)json_integer_value(json_object_get(wanted, "bytes"));
  q->fails = (int)json_integer_value(json_object_get(wanted, "fails"));
  const json_t *tasks = json_object_get(wanted, "tasks");
  q->tasks = tasks ? (int)json_integer_value(tasks) : 1;
  d->question = q;
  char *finished = json_dumps(json, JSON_COMPACT | JSON_SORT_KEYS);
  if (!finished) return -1;
  d->finished_length = strlen(finished);
  d->finished = arena_text(&d->memory, finished, d->finished_length);
  free(finished);
  return d->finished ? 0 : -1;
}

static int plan(const document *d) {
  return ((const question *)d->question)->tasks;
}

static status run(const document *d, int task, const solve_control *control, void **part,
                  fault *f) {
  const question *q = d->question;
  double began = clock_steady(), took = 0;
  status s = STATUS_OK;
  sum *own = calloc(1, sizeof *own);
  if (!own) return fail(f, STATUS_NO_MEMORY, "", "no memory");
  own->value = task + 1;
  own->bytes = q->bytes;
  atomic_fetch_add(&trial_running, 1);
  do {
    s = control->go_on(control->self, q->seconds > 0 ? fmin(took / q->seconds, 1) : 1);
    if (q->seconds > 0) usleep(1000);
    took = clock_steady() - began;
  } while (s == STATUS_OK && took < q->seconds);
  if (s == STATUS_OK && q->fails > 0 && q->fails < STATUS_COUNT) s = (status)q->fails;
  own->unwritable = q->fails == STATUS_COUNT;
  atomic_store(&trial_stopped, clock_steady());
  atomic_fetch_sub(&trial_running, 1);
  if (s == STATUS_OK) {
    *part = own;
    return s;
  }
  free(own);
  return fail(f, s, "/stages/0", "%s at task %d", status_message(s), task);
}

static status fold(const document *d, void **parts, int count, void **answer, fault *f) {
  (void)d, (void)f;
  sum *whole = parts[0];
  for (int i = 1; i < count; i++) {
    whole->value += ((sum *)parts[i])->value;
    free(parts[i]);
  }
  *answer = whole;
  return STATUS_OK;
}

static int write_sum(const document *d, const void *answer, media m, buffer *b) {
  const sum *s = answer;
  if (m == MEDIA_CSV) {
    buffer_format(b, "sum\r\n%ld\r\n", s->value);
    return 0;
  }
  buffer_format(b, "{\"sum\": %ld, \"hash\": \"%s\", \"text\": \"", s->value, d->hash);
  for (int i = 0; i < s->bytes; i++) buffer_add(b, &"abcdefghij"[i % 10], 1);
  buffer_text(b, "\"}\n");
  if (s->unwritable) b->failed = true;
  return 0;
}

static int write_plain(const document *d, const void *answer, media m, buffer *b) {
  return m == MEDIA_JSON ? write_sum(d, answer, m, b) : -1;
}

static verdict judge(const void *answer) {
  (void)answer;
  return VERDICT_MEETS;
}

static status cost(const document *d, solve_cost *c, fault *f) {
  (void)d, (void)f;
  memset(c, 0, sizeof *c);
  return STATUS_OK;
}

static const job_kind trial_kind = {.name = "trial",
                                    .path = "trials",
                                    .about = "waits and adds",
                                    .read = read_question,
                                    .plan = plan,
                                    .run = run,
                                    .fold = fold,
                                    .write = write_sum,
                                    .verdict = judge,
                                    .cost = cost,
                                    .free_question = free,
                                    .free_part = free,
                                    .free_answer = free};

static const job_kind plain_kind = {.name = "plain",
                                    .path = "plains",
                                    .about = "waits and adds, as JSON only",
                                    .read = read_question,
                                    .plan = plan,
                                    .run = run,
                                    .fold = fold,
                                    .write = write_plain,
                                    .verdict = judge,
                                    .cost = cost,
                                    .free_question = free,
                                    .free_part = free,
                                    .free_answer = free};

const job_kind *const trial_kinds[] = {&trial_kind, &plain_kind, NULL};

static const char *nothing(const char *name) {
  (void)name;
  return NULL;
}

service *trial_open(const char *const *flags) {
  const char *arguments[MOST_FLAGS] = {"--listen", "127.0.0.1:0", "--quiet"};
  char message[256];
  int count = 3;
  options o;
  for (int i = 0; flags && flags[i] && count < MOST_FLAGS; i++) arguments[count++] = flags[i];
  service *s = NULL;
  if (options_read(&o, FOR_SERVE, count, arguments, nothing, message, sizeof message) == 0)
    s = service_open(&o, trial_kinds, NULL, message, sizeof message);
  if (s) return s;
  printf("FAIL  the service does not start: %s\n0 passed, 1 failed\n", message);
  exit(1);
}
