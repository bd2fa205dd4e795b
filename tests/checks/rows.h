/* rows.h: the quantities of reference rows: what each asks of a case and how it is read from the
 * answer. */
#ifndef CHECKS_ROWS_H
#define CHECKS_ROWS_H

#include "adapt.h"

typedef struct row_kind {
  const char *quantity;
  /* Adds to the case what the row needs. */
  void (*ask)(adapted *a, const json_t *row, int index);
  /* The row's value in its own unit from the case's result; NAN if it is not there. */
  double (*answer)(const adapted *a, const json_t *result, const json_t *row, int index);
} row_kind;

/* The row of the table for a quantity, NULL if there is none. */
const row_kind *row_kind_named(const char *quantity);

/* Amplitude (of a fit by the first harmonic) and phase (rad) against sin(2 pi t/period) of `values`
   at `times`, evenly spread over whole periods, the last not repeated. */
void first_harmonic(int count, const double *times, const double *values, double period,
                    double *amplitude, double *phase);

/* Whole periods that a periodic case runs before it is looked at, and looks in the one that is. */
enum { PERIODS_BEFORE = 20, LOOKS = 96 };

#endif
