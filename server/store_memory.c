/* store_memory.c: jobs in memory.

   One mutex guards all of it, every job's facts included. A job lies in the list of all, in a
   bucket by its id, and while queued in the queue or once ended in the list of the ended. Views
   share a job by a count of holders; what a view points to (document, answer, text) does not change
   once it is set. */
#include "store.h"

#include "clock.h"

#include <errno.h>
#include <math.h>
#include <nettle/sha2.h>
#include <pthread.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/random.h>

enum { BUCKETS = 4096, ID_BYTES = 16 };

const char *const job_state_names[] = {"queued", "running", "done", "failed", "cancelled"};

typedef struct job job;

typedef struct link {
  job *before, *after;
} link;

struct job {
  job_view facts;
  document *document;
  void *answer;
  char *text;
  int holders;
  job *next_in_bucket;
  link all, rest; /* rest: of the queue or of the ended */
};

typedef struct list {
  job *first, *last;
  long count;
} list;

typedef struct store_memory {
  store functions;
  pthread_mutex_t mutex;
  int most_queued, kept;
  size_t kept_bytes, bytes;
  long numbers, by_state[JOB_STATES];
  list all, queue, ended;
  job *buckets[BUCKETS];
} store_memory;

/* The links of one list, chosen by their offset in a job. */
static link *link_of(job *j, size_t offset) {
  return (link *)(void *)((char *)j + offset);
}

/* Puts a job behind another (NULL: first). */
static void insert_after(list *l, job *place, job *j, size_t offset) {
  link *at = link_of(j, offset);
  at->before = place;
  at->after = place ? link_of(place, offset)->after : l->first;
  if (at->before)
    link_of(at->before, offset)->after = j;
  else
    l->first = j;
  if (at->after)
    link_of(at->after, offset)->before = j;
  else
    l->last = j;
  l->count++;
}

static void take_out(list *l, job *j, size_t offset) {
  link *at = link_of(j, offset);
  if (at->before)
    link_of(at->before, offset)->after = at->after;
  else
    l->first = at->after;
  if (at->after)
    link_of(at->after, offset)->before = at->before;
  else
    l->last = at->before;
  at->before = at->after = NULL;
  l->count--;
}

#define ALL  offsetof(job, all)
#define REST offsetof(job, rest)

static size_t bucket_of(const char *id) {
  size_t hash = 5381;
  for (; *id; id++) hash = hash * 33 + (unsigned char)*id;
  return hash % BUCKETS;
}

static job *find(store_memory *m, const char *id) {
  job *j = m->buckets[bucket_of(id)];
  while (j && strcmp(j->facts.id, id) != 0) j = j->next_in_bucket;
  return j;
}

static void free_job(job *j) {
  if (j->answer) j->facts.kind->free_answer(j->answer);
  free(j->text);
  document_free(j->document);
  free(j);
}

/* Gives up one hold; frees the job with the last. */
static void let_go(job *j) {
  if (--j->holders == 0) free_job(j);
}

static void forget(store_memory *m, job *j) {
  job **at = &m->buckets[bucket_of(j->facts.id)];
  while (*at != j) at = &(*at)->next_in_bucket;
  *at = j->next_in_bucket;
  m->by_state[j->facts.state]--;
  m->bytes -= j->facts.text_length;
  take_out(&m->all, j, ALL);
  let_go(j);
}

static void set_state(store_memory *m, job *j, job_state state) {
  m->by_state[j->facts.state]--;
  m->by_state[state]++;
  j->facts.state = state;
}

static void end_job(store_memory *m, job *j, job_state state) {
  if (j->facts.state == JOB_QUEUED) take_out(&m->queue, j, REST);
  set_state(m, j, state);
  j->facts.finished = clock_wall();
  insert_after(&m->ended, m->ended.last, j, REST);
  m->bytes += j->facts.text_length;
  while (m->ended.count > 1 && (m->ended.count > m->kept || m->bytes > m->kept_bytes)) {
    job *oldest = m->ended.first;
    take_out(&m->ended, oldest, REST);
    forget(m, oldest);
  }
}

static void fail_job(store_memory *m, job *j, status s, const char *why) {
  fail(&j->facts.failure, s, "", "%s", why);
  end_job(m, j, s == STATUS_CANCELLED ? JOB_CANCELLED : JOB_FAILED);
}

static int new_id(char id[40]) {
  unsigned char bytes[ID_BYTES];
  ssize_t got;
  do got = getrandom(bytes, sizeof bytes, 0);
  while (got < 0 && errno == EINTR);
  if (got != (ssize_t)sizeof bytes) return -1;
  for (int i = 0; i < ID_BYTES; i++) snprintf(id + 2 * i, 3, "%02x", bytes[i]);
  return 0;
}

static job *new_job(document *d, const char *trace) {
  job *j = calloc(1, sizeof *j);
  if (!j || new_id(j->facts.id) != 0) {
    free(j);
    return NULL;
  }
  j->document = d;
  j->holders = 1;
  j->facts.kind = d->kind;
  j->facts.document = d;
  j->facts.created = clock_wall();
  j->facts.started = j->facts.finished = NAN;
  j->facts.failure.stage = -1;
  j->facts.failure.time = j->facts.failure.could_be_met = NAN;
  snprintf(j->facts.trace, sizeof j->facts.trace, "%s", trace ? trace : "");
  return j;
}

/* Behind the last job of the same or a higher priority. */
static void enqueue(store_memory *m, job *j) {
  job *place = m->queue.last;
  while (place && place->document->job.priority < j->document->job.priority)
    place = place->rest.before;
  insert_after(&m->queue, place, j, REST);
}

static int memory_add(store *s, document *d, const char *trace, char id[40]) {
  store_memory *m = (store_memory *)s;
  job *j = new_job(d, trace);
  if (!j) return -2;
  pthread_mutex_lock(&m->mutex);
  bool full = m->queue.count >= m->most_queued;
  if (!full) {
    memcpy(id, j->facts.id, sizeof j->facts.id);
    j->facts.number = ++m->numbers;
    size_t bucket = bucket_of(id);
    j->next_in_bucket = m->buckets[bucket];
    m->buckets[bucket] = j;
    m->by_state[JOB_QUEUED]++;
    insert_after(&m->all, NULL, j, ALL);
    enqueue(m, j);
  }
  pthread_mutex_unlock(&m->mutex);
  if (full) free(j);
  return full ? -1 : 0;
}

/* A view of a job, which it holds. */
static void show(job *j, job_view *out) {
  *out = j->facts;
  out->hold = j;
  j->holders++;
}

static claim_outcome memory_claim(store *s, job_view *out) {
  store_memory *m = (store_memory *)s;
  claim_outcome outcome = CLAIM_NONE;
  double now = clock_wall();
  pthread_mutex_lock(&m->mutex);
  for (job *j = m->queue.first, *next; j && outcome != CLAIM_TAKEN && outcome != CLAIM_EXPIRED;
       j = next) {
    next = j->rest.after;
    if (j->document->job.expires_at <= now) {
      j->holders++; /* it may be the next to be dropped */
      fail_job(m, j, STATUS_OUT_OF_TIME, "the job expired before it could be started");
      show(j, out);
      j->holders--;
      outcome = CLAIM_EXPIRED;
    } else if (j->document->job.not_before > now) {
      outcome = CLAIM_LATER;
    } else {
      take_out(&m->queue, j, REST);
      set_state(m, j, JOB_RUNNING);
      j->facts.started = now;
      j->facts.attempts++;
      show(j, out);
      outcome = CLAIM_TAKEN;
    }
  }
  pthread_mutex_unlock(&m->mutex);
  return outcome;
}

static void memory_progress(store *s, const char *id, double fraction) {
  store_memory *m = (store_memory *)s;
  pthread_mutex_lock(&m->mutex);
  job *j = find(m, id);
  if (j && j->facts.state == JOB_RUNNING && fraction > j->facts.fraction)
    j->facts.fraction = fraction;
  pthread_mutex_unlock(&m->mutex);
}

static void hash_text(const char *text, size_t length, char hex[65]) {
  struct sha256_ctx context;
  uint8_t digest[SHA256_DIGEST_SIZE];
  sha256_init(&context);
  sha256_update(&context, length, (const uint8_t *)text);
  sha256_digest(&context, sizeof digest, digest);
  for (size_t i = 0; i < sizeof digest; i++) snprintf(hex + 2 * i, 3, "%02x", digest[i]);
}

/* Gives a running job its outcome. */
static void settle(store_memory *m, job *j, job_outcome *outcome, const char *hash) {
  job_state state = JOB_DONE;
  if (!outcome->answer)
    state = outcome->failure.status == STATUS_CANCELLED ? JOB_CANCELLED : JOB_FAILED;
  if (state == JOB_DONE) {
    j->answer = outcome->answer;
    j->text = outcome->text;
    j->facts.answer = j->answer;
    j->facts.text = j->text;
    j->facts.text_length = outcome->text_length;
    j->facts.verdict = j->facts.kind->verdict(j->answer);
    j->facts.fraction = 1;
    memcpy(j->facts.text_hash, hash, sizeof j->facts.text_hash);
    outcome->answer = NULL;
    outcome->text = NULL;
  } else {
    j->facts.failure = outcome->failure;
  }
  end_job(m, j, state);
}

static void memory_finish(store *s, const char *id, job_outcome *outcome) {
  store_memory *m = (store_memory *)s;
  const job_kind *kind = NULL;
  char hash[65] = "";
  if (outcome->text) hash_text(outcome->text, outcome->text_length, hash);
  pthread_mutex_lock(&m->mutex);
  job *j = find(m, id);
  if (j) {
    kind = j->facts.kind;
    if (j->facts.state == JOB_RUNNING) settle(m, j, outcome, hash);
  }
  pthread_mutex_unlock(&m->mutex);
  if (outcome->answer && kind) kind->free_answer(outcome->answer);
  free(outcome->text);
  outcome->answer = NULL;
  outcome->text = NULL;
}

static int memory_cancel(store *s, const char *id) {
  store_memory *m = (store_memory *)s;
  int outcome = 0;
  pthread_mutex_lock(&m->mutex);
  job *j = find(m, id);
  if (!j)
    outcome = -1;
  else if (j->facts.state != JOB_QUEUED && j->facts.state != JOB_RUNNING)
    outcome = -2;
  else
    fail_job(m, j, STATUS_CANCELLED, "the job was cancelled");
  pthread_mutex_unlock(&m->mutex);
  return outcome;
}

static bool memory_cancelled(store *s, const char *id) {
  store_memory *m = (store_memory *)s;
  pthread_mutex_lock(&m->mutex);
  job *j = find(m, id);
  bool cancelled = !j || j->facts.state == JOB_CANCELLED;
  pthread_mutex_unlock(&m->mutex);
  return cancelled;
}

static int memory_look(store *s, const char *id, job_view *out) {
  store_memory *m = (store_memory *)s;
  pthread_mutex_lock(&m->mutex);
  job *j = find(m, id);
  if (j) {
    show(j, out);
    if (j->facts.state == JOB_QUEUED)
      for (const job *k = j->rest.before; k; k = k->rest.before) out->position++;
  }
  pthread_mutex_unlock(&m->mutex);
  return j ? 0 : -1;
}

static void memory_release(store *s, job_view *v) {
  store_memory *m = (store_memory *)s;
  job *j = v->hold;
  if (!j) return;
  pthread_mutex_lock(&m->mutex);
  bool last = --j->holders == 0;
  pthread_mutex_unlock(&m->mutex);
  if (last) free_job(j);
  v->hold = NULL;
}

static bool has_label(const document *d, const job_filter *filter) {
  if (!filter->label) return true;
  for (int i = 0; i < d->label_count; i++)
    if (strcmp(d->labels[i].name, filter->label) == 0 &&
        strcmp(d->labels[i].value, filter->label_value) == 0)
      return true;
  return false;
}

static bool passes(const job *j, const job_filter *filter) {
  if (filter->before > 0 && j->facts.number >= filter->before) return false;
  if (filter->state && strcmp(job_state_names[j->facts.state], filter->state) != 0) return false;
  if (filter->kind && strcmp(j->facts.kind->name, filter->kind) != 0) return false;
  return has_label(j->document, filter);
}

static int memory_list(store *s, const job_filter *filter, job_view *out, int most) {
  store_memory *m = (store_memory *)s;
  int count = 0;
  pthread_mutex_lock(&m->mutex);
  for (job *j = m->all.first; j && count < most; j = j->all.after)
    if (passes(j, filter)) {
      show(j, &out[count]);
      out[count++].position = -1;
    }
  pthread_mutex_unlock(&m->mutex);
  return count;
}

static void memory_count(store *s, long by_state[JOB_STATES], double *oldest_queued) {
  store_memory *m = (store_memory *)s;
  double oldest = INFINITY, now = clock_wall();
  pthread_mutex_lock(&m->mutex);
  memcpy(by_state, m->by_state, sizeof m->by_state);
  for (const job *j = m->queue.first; j; j = j->rest.after) oldest = fmin(oldest, j->facts.created);
  pthread_mutex_unlock(&m->mutex);
  *oldest_queued = isfinite(oldest) && now > oldest ? now - oldest : 0;
}

static void memory_close(store *s) {
  store_memory *m = (store_memory *)s;
  for (job *j = m->all.first, *next; j; j = next) {
    next = j->all.after;
    let_go(j);
  }
  pthread_mutex_destroy(&m->mutex);
  free(m);
}

store *store_memory_open(int most_queued, int kept, size_t kept_bytes) {
  store_memory *m = calloc(1, sizeof *m);
  if (!m) return NULL;
  if (pthread_mutex_init(&m->mutex, NULL) != 0) {
    free(m);
    return NULL;
  }
  m->most_queued = most_queued;
  m->kept = kept;
  m->kept_bytes = kept_bytes;
  m->functions = (store){memory_add,    memory_claim,     memory_progress, memory_finish,
                         memory_cancel, memory_cancelled, memory_look,     memory_release,
                         memory_list,   memory_count,     memory_close};
  return &m->functions;
}
