/* The solver's own march, with a watch that only records. */
#include "probe.h"
#include <math.h>

typedef struct recorder {
  probe *p;
  double start;
} recorder;

static void begins(void *self, int stage, double start, stepper *s) {
  (void)stage, (void)s;
  ((recorder *)self)->start = start;
}

static bool never(void *self, stepper *s) {
  (void)self, (void)s;
  return false;
}

static double no_event(void *self, stepper *s) {
  (void)self, (void)s;
  return INFINITY;
}

static void accepted(void *self, stepper *s, bool ends) {
  recorder *r = self;
  probe *p = r->p;
  double enthalpy[MOST_PROBES], until = (s->t + s->h) * (1 + 1e-13);
  (void)ends;
  while (p->next < p->looks && p->look[p->next] - r->start <= until) {
    for (int i = 0; i < p->count; i++)
      enthalpy[i] = stepper_node(s, p->nodes[i], p->look[p->next] - r->start);
    probe_record(p, enthalpy);
  }
}

static void rests(void *self, stepper *s, double start) {
  (void)self, (void)s, (void)start;
}

static double residual(const stepper *s, const march_outcome *o) {
  double in = s->heat[HEAT_FIRST] + s->heat[HEAT_LAST] + s->heat[HEAT_GENERATED];
  return fabs(o->final_content - o->initial_content - in) / fmax(o->heat_moved, 1e-300);
}

int kernel_march(probe *p, double tolerance) {
  recorder r = {.p = p};
  march_watch watch = {.self = &r,
                       .begins = begins,
                       .fulfilled_at_start = never,
                       .event = no_event,
                       .accepted = accepted,
                       .rests = rests};
  march_request request = {
      .the_case = p->the_case, .tolerance = tolerance, .watch = &watch, .progress_to = 1};
  march_outcome outcome;
  fault f;
  p->next = 0;
  if (march(&request, &p->stepper, &outcome, &f)) return -1;
  p->steps = outcome.steps;
  p->balance = residual(&p->stepper, &outcome);
  return 0;
}
