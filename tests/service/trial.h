/* trial.h: checks that are counted, and a service in this process to check. */
#ifndef CORESOAK_TRIAL_H
#define CORESOAK_TRIAL_H

#include "service.h"

#include <stdatomic.h>
#include <stdbool.h>

/* Prints "ok" or "FAIL" with what was checked; counts. Returns `good`. May be called from several
 * threads. */
bool check(bool good, const char *what, ...) __attribute__((format(printf, 2, 3)));

/* Prints "N passed, N failed"; the exit code of the program. */
int tally(void);

/* Starts a service with the trial kinds on a free port, its options the usual ones but for `flags`
   (NULL-terminated, as on the command line). Ends the program if it cannot start. */
service *trial_open(const char *const *flags);

/* Kinds that heat nothing. "trial": {"inputs": {"seconds": S, "tasks": N, "bytes": B, "fails":
 * STATUS}}: each of N tasks takes S seconds, stepping every millisecond; the answer is the sum of
 * the tasks' numbers and a text of B bytes. "plain": the same, not offered as CSV. */
extern const job_kind *const trial_kinds[];

/* Tasks that are running now, and the steady time at which the last one was told to stop. */
extern atomic_int trial_running;
extern _Atomic double trial_stopped;

#endif
