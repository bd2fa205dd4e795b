/* figure.h: the table of figures, the numbers that decisions rest on. A figure is one row: name,
   parameters, observe, finish. A figure sees scalar traces and profiles along each step; it never
   sees a mesh. */
#ifndef CORESOAK_FIGURE_H
#define CORESOAK_FIGURE_H

#include "case.h"

enum { SEGMENT_SAMPLES = 6 }; /* both ends and four instants between */

/* One accepted step (or, with t0 == t1, an instant: a steady state) as figures see it. Times are
   from the start of the case. */
typedef struct segment segment;
struct segment {
  double t0, t1;
  int stage;
  bool stage_begins, stage_ends; /* this is the first / last segment of the stage */
  /* value of a trace at t in [t0, t1]: temperature (K), difference (K), heat (J...) or heat flow
   * (W...) */
  double (*value)(const segment *s, int trace, double t);
  /* value at sample j = 0 .. SEGMENT_SAMPLES-1, at t0 + j (t1 - t0)/(SEGMENT_SAMPLES-1) */
  double (*sample)(const segment *s, int trace, int j);
  /* the whole section at t, for `stress`: temperatures (K) at the nodes of `section`; valid until
   * the next call */
  const double *(*profile)(const segment *s, double t);
  const struct section *section;
  void *self; /* of whoever makes the segment */
};

/* Nodes across a one-dimensional section. A section that symmetry halved is given whole. */
typedef struct section {
  int nodes;
  const double *position; /* m from front or axis, rising */
  const double *volume; /* of each node's control volume per unit area, radian or steradian: sums to
                           the body's */
  int power;            /* 0 plate, 1 cylinder, 2 sphere */
} section;

/* What a figure watches. */
typedef enum trace_kind { TRACE_PLACE, TRACE_HEAT, TRACE_HEAT_FLOW } trace_kind;

typedef struct trace_request {
  trace_kind kind;
  place place; /* TRACE_PLACE */
  int face;    /* TRACE_HEAT (heat since the start of the case), TRACE_HEAT_FLOW; -1: all faces */
} trace_request;

/* A value that was found. */
typedef struct figure_value {
  bool found;
  double value;       /* SI, kelvin; NAN if not found */
  double when;        /* s from the start of the case; NAN if it has none */
  double where;       /* m (stress); NAN */
  double sensitivity; /* |d value / d (temperature of the place)|, for an error where runs cannot be
                         compared: 1 for a temperature, 1/|rate| for a crossing; 0 if unknown */
  const char *why;    /* static text when not found */
  int parts;          /* stress: number of named components below; else 0 */
  struct {
    const char *name;
    double value, when, where;
  } part[4]; /* tension, compression | in_plane | radial, hoop, axial */
} figure_value;

typedef struct figure_run figure_run;

/* State of one figure during one run; `self` is the kind's own, of kind->size bytes, zeroed before
 * begin. */
struct figure_run {
  const figure *figure;
  const heat_case *the_case;
  int trace;                 /* index of what it watches, -1 none */
  const figure_run *watched; /* time_to of an accumulating figure: that figure's run */
  const double *stage_end;   /* ends of the stages known so far, s; for "end:STAGE" */
  void *self;
};

struct figure_kind {
  const char *name, *about;
  object_type
      parameters;   /* its own members beside name, kind, of, during, require; offsets in figure */
  bool takes_place; /* has `of` */
  bool accumulates; /* may be watched by `until` and time_to; then value_at is set */
  size_t size;      /* of its state */
  dimension (*dimension)(const figure *f, const heat_case *c); /* of its value */
  trace_kind trace; /* what it watches when it takes no place */
  /* faults that the rows cannot say (exactly one of rises_to / falls_to ...): NULL, or text naming
     the member in *member; called by the reader once the members are filled */
  const char *(*check)(const figure *f, const heat_case *c, const char **member);
  void (*begin)(figure_run *r);
  void (*observe)(figure_run *r, const segment *s); /* a step was accepted */
  void (*finish)(figure_run *r, figure_value *v);
  /* accumulating: the sum at t inside a segment that has not been observed yet; leaves the state
   * alone */
  double (*value_at)(const figure_run *r, const segment *s, double t);
};

extern const figure_kind *const figure_kinds[]; /* NULL-terminated */
const figure_kind *figure_kind_named(const char *name);

/* Whether a stage counts for a figure. */
bool figure_counts_stage(const figure *f, int stage);

/* Dimension of a target's value (place or figure). */
dimension target_dimension(const target *t, const heat_case *c);

/* Roots of trace - level inside a segment, rising or falling, from the samples and refined by the
   interpolant; returns how many, at most SEGMENT_SAMPLES - 1, in rising time. direction +1, -1 or 0
   (both). */
int segment_crossings(const segment *s, int trace, double level, int direction,
                      double times[SEGMENT_SAMPLES]);

/* Index into figure_value.part of a component of a stress figure by name ("tension", "compression"
   | "in_plane" | "radial", "hoop", "axial", by shape and whether the figure has `at`): what
   requirement.which holds. -1 if it has no such component. Components at a place are signed,
   tension positive; `compression` is told as a positive number. */
int stress_part_named(const figure *f, const heat_case *c, const char *name);

#endif
