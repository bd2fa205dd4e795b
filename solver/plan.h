/* plan.h: from a case alone: which temperatures it can reach, how fine its mesh must be where, and
   how much that will cost. A plan can be kept for neighbouring cases. */
#ifndef CORESOAK_PLAN_H
#define CORESOAK_PLAN_H

#include "march.h"

typedef struct march_plan {
  int cells;        /* across the section computed */
  double tolerance; /* K per step */
  bool halved;
  double end_cell[LIMIT_LAYERS][2]; /* m, see mesh_plan */
} march_plan;

/* Range of temperatures (K) that starts and surroundings span. With flux or generation it can be
   left: the caller widens it and runs again. */
void plan_range(const heat_case *c, double *from, double *to);

/* Finer rung of the ladder of mesh sizes: the first that is at least `cells`; the largest if there
 * is none. */
int plan_rung(double cells);

/* A first plan for the numerical error asked. `properties` holds a table for each material. */
void plan_first(march_plan *p, const heat_case *c, const property *properties);

/* Sets the end cells for p->cells. */
void plan_end_cells(march_plan *p, const heat_case *c, const property *properties);

#endif
