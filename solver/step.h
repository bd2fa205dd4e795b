/* step.h: one implicit step in time, with its error: the Rosenbrock method Rodas4 on V dH/dt = F(t,
   H).

   Source: E. Hairer & G. Wanner, Solving Ordinary Differential Equations II, 2nd ed. 1996, IV.7 and
   the code RODAS: six stages, order 4 with an embedded order 3, stiffly accurate, L-stable, with
   its own interpolant of order 3. In the transformed variables U of that book (IV.7.25), multiplied
   here by gamma h: (V - gamma h J) U_i = gamma h F(t + alpha_i h, H + sum a_ij U_j) + gamma sum
   c_ij V U_j + gamma h gamma_i h F_t H_new = H + sum m_j U_j,  error = U_6. Heat through the faces
   and generated heat are further components of the same method, so that energy balances to
   round-off whatever the tolerance. */
#ifndef CORESOAK_STEP_H
#define CORESOAK_STEP_H

#include "band.h"
#include "conduction.h"

enum { RODAS_STAGES = 6 };

/* The method's coefficients, for the unit test of its order conditions. */
typedef struct rosenbrock {
  double gamma, a[RODAS_STAGES][RODAS_STAGES], c[RODAS_STAGES][RODAS_STAGES];
  double alpha[RODAS_STAGES], gamma_sum[RODAS_STAGES], m[RODAS_STAGES], dense[2][RODAS_STAGES];
} rosenbrock;
extern const rosenbrock rodas4;

typedef struct stepper {
  conduction *system;
  int nodes;
  double t, h;                 /* s from the stage's start; length of the step last tried */
  double *state, *next;        /* H now and after the step tried */
  double *stage[RODAS_STAGES]; /* U */
  double *rate, *trial, *work;
  double *interpolant[2]; /* of the step tried, made on asking */
  bool interpolated;
  double heat_rate[HEATS], heat_by_time[HEATS], heat_by_state[2];
  double heat_stage[RODAS_STAGES][HEATS];
  double heat[HEATS], heat_next[HEATS]; /* J since the start of the case */
  double *scale;                        /* 1 / smallest sensible capacity: J/m3 -> K */
  tridiagonal matrix;
  double *lower, *diagonal, *upper; /* V - gamma h J */
  int evaluations, factorisations;
} stepper;

MUST_USE int stepper_init(stepper *s, conduction *system, arena *memory);

/* Linearises at (t, state): after every change of t, state or conditions that a step did not make.
 */
void stepper_begin(stepper *s, double t);

/* Tries a step of h from (t, state). Returns its error in K (largest over the nodes), or a negative
   number if the matrix is singular (-1) or a value is not finite (-2). */
double stepper_try(stepper *s, double h);

/* Takes the step tried: state = next, t = t + h; linearises there. */
void stepper_accept(stepper *s);

/* H of one node, all nodes, heat, at t within the step tried (before it is accepted). */
double stepper_node(stepper *s, int node, double t);
void stepper_nodes(stepper *s, double t, double *state);
double stepper_heat(stepper *s, int which, double t);

/* First step after a jump: min(2 tol / largest rate, 2 sqrt(tol / largest change of rate), span /
   50). With `jump` false only the second and third count. */
double stepper_first(const stepper *s, double tolerance, double span, bool jump);

#endif
