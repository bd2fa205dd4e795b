/* clock.h: the two clocks and how a moment is written. */
#ifndef CORESOAK_CLOCK_H
#define CORESOAK_CLOCK_H

#include <pthread.h>
#include <stddef.h>

/* Seconds since 1970-01-01T00:00Z; may be set by an administrator. */
double clock_wall(void);

/* Seconds of a clock that only goes forward; for differences. */
double clock_steady(void);

enum { CLOCK_TEXT = 32 };

/* "2026-03-01T06:30:00.250Z" (RFC 3339) of a moment of the wall clock; "" if it is NAN. */
void clock_text(double wall, char out[CLOCK_TEXT]);

/* A condition whose timed waits use the steady clock; and such a wait of at most `seconds`. */
int clock_condition_init(pthread_cond_t *condition);
void clock_wait(pthread_cond_t *condition, pthread_mutex_t *held, double seconds);

#endif
