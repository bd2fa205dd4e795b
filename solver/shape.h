/* shape.h: the table of shapes. A shape is one row: name, coordinates, faces, sizes, mesh builder,
 * places. */
#ifndef CORESOAK_SHAPE_H
#define CORESOAK_SHAPE_H

#include "case.h"

struct mesh;
struct mesh_plan;

struct shape {
  const char *name, *about;
  int dimensions; /* 1, 2 or 3 */
  int power;      /* area grows with r^power: 0 plate, 1 cylinder, 2 sphere */
  const char *coordinates[MOST_COORDINATES + 1]; /* "x" | "r"; NULL-terminated */
  const char *faces[MOST_FACES + 1];             /* NULL-terminated; inner before outer in 1-D */
  object_type sizes; /* members of `part` that are this shape's own; offsets in part */
  double (*extent)(const part *p,
                   double *origin); /* thickness across the section, m; origin: coordinate of
                             front or bore surface; NAN if sizes are missing */
  bool (*hollow)(const part *p);    /* has an inner face */
  status (*build)(struct mesh *m, const heat_case *c, const struct mesh_plan *plan,
                  const property *properties, arena *memory,
                  fault *f);    /* control volumes of the section */
  dimension energy, power_unit; /* of heat_absorbed and heat_flow: J/m2, W/m2 | J/m, W/m | J, W */
};

/* Rows of the table; NULL-terminated. Planned shapes stand in shape_planned, by name only. */
extern const shape *const shapes[];
extern const char *const shapes_planned[];

/* The row with that name, NULL if there is none. */
const shape *shape_named(const char *name);

/* Index of a face by name, -1 if there is none. */
int shape_face(const shape *s, const char *name);

#endif
