/* store.h: where jobs live. One struct of functions; memory today, SQLite and PostgreSQL by the same rows. */
#ifndef CORESOAK_STORE_H
#define CORESOAK_STORE_H

#include "document.h"
#include "kind.h"

typedef enum job_state { JOB_QUEUED, JOB_RUNNING, JOB_DONE, JOB_FAILED, JOB_CANCELLED } job_state;
extern const char *const job_state_names[];

typedef struct job_view {
  char id[40];
  job_state state;
  const job_kind *kind;
  double created, started, finished; /* s since 1970; NAN if not yet */
  double fraction;                   /* of a running job */
  int attempts;
  fault failure;                     /* JOB_FAILED */
  verdict verdict;
  const document *document;          /* held by the view: job_view_release */
  const void *answer;                /* JOB_DONE; held by the view */
  void *hold;
} job_view;

typedef struct store store;
struct store {
  /* Takes the document over on success. Returns 0 and the id, -1 if the store is full. */
  int (*add)(store *s, document *d, char id[40]);
  /* Takes the oldest queued job for a worker: 0 and a view, -1 if there is none. */
  int (*claim)(store *s, job_view *out);
  void (*progress)(store *s, const char *id, double fraction);
  /* Ends a job: answer (taken over) or failure. */
  void (*finish)(store *s, const char *id, void *answer, const fault *failure);
  int (*cancel)(store *s, const char *id);         /* 0, -1 unknown, -2 already ended */
  bool (*cancelled)(store *s, const char *id);
  int (*look)(store *s, const char *id, job_view *out); /* 0, -1 unknown */
  void (*release)(store *s, job_view *v);
  void (*count)(store *s, long by_state[5], double *oldest_queued);
  void (*close)(store *s);
};

/* In memory: at most `kept` ended jobs stay, the oldest ended go first. */
store *store_memory_open(int most_queued, int kept);

#endif
