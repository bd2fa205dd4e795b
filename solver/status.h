/* status.h: how a function of the solver can fail, and the one record of why. */
#ifndef CORESOAK_STATUS_H
#define CORESOAK_STATUS_H

#define SOLVER_STATUSES(X)                                                                         \
  X(OK, "ok")                                                                                      \
  X(BAD_ARGUMENT, "bad argument")                                                                  \
  X(BEYOND_LIMIT, "beyond a limit")                                                                \
  X(NO_MEMORY, "out of memory")                                                                    \
  X(SINGULAR, "singular system")                                                                   \
  X(NOT_FINITE, "not finite")                                                                      \
  X(NO_CONVERGENCE, "no convergence")                                                              \
  X(ERROR_NOT_MET, "the numerical error asked for cannot be met")                                  \
  X(CANCELLED, "cancelled")                                                                        \
  X(OUT_OF_TIME, "out of time")

typedef enum status {
#define X(name, message) STATUS_##name,
  SOLVER_STATUSES(X)
#undef X
      STATUS_COUNT
} status;

/* The short message of a status; never NULL. */
const char *status_message(status s);

/* Where and why something failed. `at` is a JSON Pointer into the case, "" for the case as a whole.
 */
typedef struct fault {
  status status;
  char at[128];
  char is[256];
  int stage;           /* index of the stage that was running, -1 if none */
  double time;         /* s from the start of the case, NAN if none */
  double could_be_met; /* K, with STATUS_ERROR_NOT_MET: the smallest estimate reached; else NAN */
} fault;

/* Fills *f (which may be NULL) with a printf-formatted reason and returns `s`, so that a failing
   function can end in `return fail(...)`. stage and time start at "none". */
status fail(fault *f, status s, const char *at, const char *is, ...)
    __attribute__((format(printf, 4, 5)));

#define MUST_USE __attribute__((warn_unused_result))

#endif
