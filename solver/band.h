/* band.h: tridiagonal systems, factored once and solved many times.

       | d0 u0          |            lower[i] multiplies x[i-1] in row i, upper[i] multiplies
   x[i+1]; A = | l1 d1 u1       |            lower[0] and upper[n-1] are not read. |    l2 d2 u2 |
       |       l3 d3    |

   Elimination runs from both ends to the middle (two chains that the processor overlaps) without
   pivoting: right for the diagonally dominant matrices M - gamma h J of conduction. */
#ifndef CORESOAK_BAND_H
#define CORESOAK_BAND_H

#include "arena.h"

typedef struct tridiagonal {
  int size;
  double *reciprocal; /* of the pivots */
  double *eliminate;  /* multiplier of the neighbour already eliminated */
  double *substitute; /* multiplier of the neighbour already solved */
  double *inner;      /* of the middle row: the second neighbour's multiplier in inner[0] */
} tridiagonal;

/* Takes the arrays of a system of n rows. 0, or -1 out of memory. */
MUST_USE int tridiagonal_init(tridiagonal *t, int n, arena *memory);

/* Factors. Returns the row of a pivot that is zero or not finite, -1 if all is well. */
MUST_USE int tridiagonal_factor(tridiagonal *t, const double *lower, const double *diagonal,
                                const double *upper);

/* Solves A x = b in place: on return b holds x. */
void tridiagonal_solve(const tridiagonal *t, double *b);

#endif
