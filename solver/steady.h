/* steady.h: the same equations with no storage term: F(H) = 0. */
#ifndef CORESOAK_STEADY_H
#define CORESOAK_STEADY_H

#include "step.h"

/* Finds the steady state from s->state with the conditions of s->system at its current interval; on
   return s is linearised there. Pseudo-transient continuation: implicit Euler steps that grow until
   they are Newton's (Kelley & Keyes, SIAM J. Numer. Anal. 35, 1998). Returns STATUS_OK, SINGULAR,
   NOT_FINITE or NO_CONVERGENCE (fault filled). */
MUST_USE status steady_solve(stepper *s, double t, fault *f);

#endif
