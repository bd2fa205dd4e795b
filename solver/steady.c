/* steady.c: F(H) = 0 by (V/dt - J) dH = F with dt growing as the change per step falls. */
#include "steady.h"

#include <math.h>

#define STEADY_CHANGE 1e-9 /* K: largest change of the last two Newton steps */
#define LARGEST_CHANGE                                                                             \
  200.0 /* K in one step, so that radiation and k(T) stay near their linearisation */
#define GROWTH_PER_STEP 8.0
#define NEWTON_STEP                                                                                \
  1e25 /* s: V/dt no longer matters, but keeps plateaus of T(H) from making the matrix singular */

enum { MOST_STEADY_STEPS = 600 };

/* Diffusion time of the whole section: a first dt. */
static double first_step(const stepper *s) {
  const mesh *m = s->system->mesh;
  double time = 0, width = m->position[m->nodes - 1] - m->position[0];
  for (int i = 0; i < m->layers; i++) {
    const property *p = m->layer[i].property;
    time = fmax(time, width * width * p->reference_capacity / p->largest_conductivity);
  }
  return time / 100;
}

static int euler_step(stepper *s, double dt) {
  const conduction *c = s->system;
  const double *volume = c->mesh->volume;
  for (int i = 0; i < s->nodes; i++) {
    s->lower[i] = -c->lower[i];
    s->diagonal[i] = volume[i] / dt - c->diagonal[i];
    s->upper[i] = -c->upper[i];
    s->work[i] = s->rate[i];
    if (s->diagonal[i] == 0) s->diagonal[i] = 1;
  }
  if (tridiagonal_factor(&s->matrix, s->lower, s->diagonal, s->upper) >= 0) return -1;
  tridiagonal_solve(&s->matrix, s->work);
  return 0;
}

status steady_solve(stepper *s, double t, fault *f) {
  const mesh *m = s->system->mesh;
  double dt = first_step(s);
  int settled = 0;
  stepper_begin(s, t);
  conduction_temperatures(m, s->state, s->trial);
  for (int step = 0; step < MOST_STEADY_STEPS; step++) {
    if (euler_step(s, dt))
      return fail(f, STATUS_SINGULAR, "", "the steady state is not determined");
    for (int i = 0; i < s->nodes; i++) s->next[i] = s->state[i] + s->work[i];
    double *after = s->stage[0], change = 0;
    conduction_temperatures(m, s->next, after);
    for (int i = 0; i < s->nodes; i++) {
      double moved = fabs(after[i] - s->trial[i]);
      if (!(moved <= change)) change = moved;
    }
    if (!isfinite(change)) return fail(f, STATUS_NOT_FINITE, "", "the steady state is not finite");
    if (change > LARGEST_CHANGE) {
      dt *= LARGEST_CHANGE / change / 2;
      if (dt < 1e-12)
        return fail(f, STATUS_NO_CONVERGENCE, "", "the steady state does not converge");
      continue;
    }
    double *swap = s->state;
    s->state = s->next;
    s->next = swap;
    swap = s->stage[0];
    s->stage[0] = s->trial;
    s->trial = swap;
    stepper_begin(s, t);
    settled = change < STEADY_CHANGE && dt >= NEWTON_STEP ? settled + 1 : 0;
    if (settled == 2) return STATUS_OK;
    dt = fmin(NEWTON_STEP, dt * GROWTH_PER_STEP);
  }
  return fail(f, STATUS_NO_CONVERGENCE, "", "the steady state does not converge in %d steps",
              MOST_STEADY_STEPS);
}
