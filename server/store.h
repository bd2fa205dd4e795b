/* store.h: where jobs live. One struct of functions; memory today, SQLite and PostgreSQL by the
 * same rows. */
#ifndef CORESOAK_STORE_H
#define CORESOAK_STORE_H

#include "document.h"
#include "kind.h"

typedef enum job_state { JOB_QUEUED, JOB_RUNNING, JOB_DONE, JOB_FAILED, JOB_CANCELLED } job_state;
enum { JOB_STATES = 5 };
extern const char *const job_state_names[];

typedef struct job_view {
  char id[40];
  long number; /* of the order of arrival; rises */
  job_state state;
  const job_kind *kind;
  double created, started, finished; /* s since 1970; NAN if not yet */
  double fraction;                   /* of a running job */
  int position;                      /* JOB_QUEUED: jobs before it in the queue; in a list -1 */
  int attempts;
  fault failure; /* JOB_FAILED, JOB_CANCELLED */
  verdict verdict;
  char trace[56];           /* traceparent of the request, "" if none */
  const document *document; /* held by the view: release */
  const void *answer;       /* JOB_DONE; held by the view */
  const char *text;         /* JOB_DONE: the answer as JSON; held by the view */
  size_t text_length;
  char text_hash[65]; /* SHA-256 of it, hex */
  void *hold;
} job_view;

/* What a job ended with: an answer and its JSON, or a failure (answer NULL); of STATUS_CANCELLED it
 * is cancelled. */
typedef struct job_outcome {
  void *answer;
  char *text; /* malloc'd */
  size_t text_length;
  fault failure;
} job_outcome;

/* What a list shows: newest first, those older than the number `before` (0: all). */
typedef struct job_filter {
  const char *state, *kind;        /* NULL: any */
  const char *label, *label_value; /* NULL: any */
  long before;
} job_filter;

typedef enum claim_outcome {
  CLAIM_TAKEN,
  CLAIM_NONE,
  CLAIM_LATER,  /* only jobs that are not yet due */
  CLAIM_EXPIRED /* a job was due no more, and failed; ask again */
} claim_outcome;

typedef struct store store;
struct store {
  /* Takes the document over on success. Returns 0 and the id, -1 if the store is full, -2 out of
   * memory. */
  int (*add)(store *s, document *d, const char *trace, char id[40]);
  /* Takes for a worker the queued and due job of the highest priority, of those the oldest. A view
   * with CLAIM_TAKEN and CLAIM_EXPIRED. */
  claim_outcome (*claim)(store *s, job_view *out);
  void (*progress)(store *s, const char *id, double fraction);
  /* Ends a running job; takes the outcome's answer and text over. A job cancelled meanwhile stays
   * cancelled. */
  void (*finish)(store *s, const char *id, job_outcome *outcome);
  int (*cancel)(store *s, const char *id);              /* 0, -1 unknown, -2 already ended */
  bool (*cancelled)(store *s, const char *id);          /* or unknown */
  int (*look)(store *s, const char *id, job_view *out); /* 0, -1 unknown */
  void (*release)(store *s, job_view *v);
  /* Fills at most `most` views; each is to be released. Returns their number. */
  int (*list)(store *s, const job_filter *filter, job_view *out, int most);
  /* Jobs by state, and the age in s of the oldest that is queued (0 if none). */
  void (*count)(store *s, long by_state[JOB_STATES], double *oldest_queued);
  void (*close)(store *s);
};

/* In memory: at most `most_queued` jobs wait; at most `kept` ended jobs stay, together of at most
   kept_bytes of results (the newest stays whatever its size); the oldest ended go first. NULL out
   of memory. */
store *store_memory_open(int most_queued, int kept, size_t kept_bytes);

#endif
