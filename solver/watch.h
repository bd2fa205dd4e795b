/* watch.h: the values of places along a step: what conditions, figures and histories look at. */
#ifndef CORESOAK_WATCH_H
#define CORESOAK_WATCH_H

#include "figure.h"
#include "step.h"

enum { MOST_TRACES = 640 };

/* One thing watched: a place, heat through a face since the start, or heat flow through a face. */
typedef struct trace {
  trace_request request;
  mesh_spot spot; /* PLACE_POINT, CENTER, MID_WALL, FACE */
  bool is_spot;
  int first, last; /* nodes of the others */
  double volume;   /* of these nodes */
} trace;

typedef struct watch {
  const heat_case *the_case;
  const mesh *mesh;
  int count;
  trace *trace;
  stepper *s;                     /* of the step looked at */
  double start;                   /* of the stage, s from the start of the case */
  double *nodes[SEGMENT_SAMPLES]; /* temperatures at the samples of the step, made on asking */
  bool have[SEGMENT_SAMPLES];
  double *scratch; /* H, then temperatures, at any other time */
  double *state;
  double *whole; /* profile unfolded */
  section section;
  bool still; /* a steady instant: s->state is all there is */
} watch;

MUST_USE status watch_init(watch *w, const heat_case *c, const mesh *m, arena *memory, fault *f);

/* Index of a trace, made if it is new; -1 if there are too many. */
int watch_request(watch *w, const trace_request *request);
int watch_add_place(watch *w, const place *p);

/* Looks at the step that `s` has tried (or, still, at its state). */
void watch_step(watch *w, stepper *s, double start, bool still);

/* Value of a trace at stage time t of that step; at sample j. */
double watch_value(watch *w, int trace, double t);
double watch_sample(watch *w, int trace, int j);

/* The step as figures see it; valid until the next watch_step. */
segment watch_segment(watch *w, int stage, bool begins, bool ends);

/* Value of a place in nodal temperatures. */
double watch_place(const trace *t, const mesh *m, const double *temperature);

/* Temperatures of the whole section (unfolded if halved), w->section.nodes of them. */
const double *watch_profile(watch *w, double t);

#endif
