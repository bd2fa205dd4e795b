/* tally.h: counts checks and tells them, one line each. */
#ifndef CHECKS_TALLY_H
#define CHECKS_TALLY_H

#include <stdbool.h>

/* Passes if |value - expected| <= tolerance (a value that is NAN never does). `source` says where
 * `expected` comes from. */
bool check_near(const char *what, double value, double expected, double tolerance, const char *unit,
                const char *source);

/* Passes if `holds`. `detail` is a printf format for what was seen. */
bool check_true(const char *what, bool holds, const char *detail, ...)
    __attribute__((format(printf, 3, 4)));

/* Tells of what cannot be checked yet, and why; it counts neither way. */
void check_waits(const char *what, int rows, const char *why);

/* Prints "N passed, N failed" and returns the exit code. */
int tally_finish(void);

#endif
