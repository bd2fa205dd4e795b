/* conduction.h: the equations. For every control volume
     V dH/dt = F = sum of heat flows from its neighbours + V g + heat through a surface,
   with heat flows G (theta_j - theta_i) inside a layer and G (T_j - T_i) across an interface; all
   per mesh unit. */
#ifndef CORESOAK_CONDUCTION_H
#define CORESOAK_CONDUCTION_H

#include "face.h"
#include "mesh.h"

enum { HEAT_FIRST, HEAT_LAST, HEAT_GENERATED, HEATS };

typedef struct conduction {
  const mesh *mesh;
  const face_condition
      *condition[2];         /* first and last node; NULL: nothing crosses (axis, mirror plane) */
  double stage_start;        /* s from the start of the case */
  double from, to;           /* s from the start of the stage: interval without breaks */
  bool at_rest;              /* generation at its last value: a steady stage */
  double *potential, *slope; /* [nodes] */
  double *lower, *diagonal, *upper; /* dF/dH */
  double *by_time;                  /* dF/dt at fixed H */
  double heat[HEATS];               /* W: through each surface, generated; of the last call */
  double heat_by_time[HEATS];       /* its derivative by time */
  double heat_by_state[2];          /* and by H of heat_node */
  int heat_node[2];
  double held[2]; /* H of prescribed ends */
} conduction;

MUST_USE int conduction_init(conduction *c, const mesh *m, arena *memory);

/* Whether the first or last node's temperature is prescribed. */
bool conduction_prescribes(const conduction *c, int end);

/* H of the node at a prescribed end at time t, and dH/dt; state[0] or state[n-1] is set. */
void conduction_prescribe(const conduction *c, double t, double *state, double rate[2]);

/* F at time t of the stage; prescribed nodes (already set in state) have F = 0. Fills heat. */
void conduction_rates(conduction *c, double t, const double *state, double *rate);

/* The same, and dF/dH, dF/dt and the derivatives of heat. */
void conduction_linearise(conduction *c, double t, const double *state, double *rate);

/* Generation in a layer at stage time t (W/m3), and its slope. */
double conduction_generation(const conduction *c, const mesh_layer *l, double t, double *slope);

/* Temperatures of all nodes. */
void conduction_temperatures(const mesh *m, const double *state, double *temperature);

/* Heat content, J per mesh unit. */
double conduction_content(const mesh *m, const double *state);

/* H of every node from a temperature (K) of every node. */
void conduction_state(const mesh *m, const double *temperature, double *state);

#endif
