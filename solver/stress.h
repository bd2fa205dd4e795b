/* stress.h: thermoelastic stress across a one-material section that is free to stretch and bend.

   Source: S. P. Timoshenko & J. N. Goodier, Theory of Elasticity, chapter on thermal stress: the
   free plate, the long cylinder with free ends (solid or hollow), the sphere (solid or hollow).
   With the thermal strain e(T) = integral of alpha dT from 20 degC, x from the middle of the plate,
   a and b the inner and outer radius,

     plate      s  = E/(1 - nu) (m0 + m1 x - e),   m0, m1 such that the section carries neither
   force nor moment cylinder   sr = E/(1 - nu) 1/r^2 ((r^2 - a^2)/(b^2 - a^2) I(b) - I(r)), I(r) =
   integral of e r dr from a st = E/(1 - nu) 1/r^2 ((r^2 + a^2)/(b^2 - a^2) I(b) + I(r) - e r^2) sz
   = E/(1 - nu) (2/(b^2 - a^2) I(b) - e) sphere     sr = 2E/(1 - nu) 1/r^3 ((r^3 - a^3)/(b^3 - a^3)
   I(b) - I(r)),             I(r) = integral of e r^2 dr from a st = 2E/(1 - nu) (1/(2 r^3)) ((2 r^3
   + a^3)/(b^3 - a^3) I(b) + I(r) - e r^3)

   Any uniform temperature is free of stress. Exact for the plate with any E(T) and alpha(T), since
   E varies with x only; for cylinder and sphere exact with constant E (alpha may vary); with E(T)
   the modulus of the place itself is put in, which is right to the order of the change of E across
   the section. Elastic only: no yielding, no creep, no transformation, no stress from before. */
#ifndef CORESOAK_STRESS_H
#define CORESOAK_STRESS_H

#include "figure.h"
#include "limit.h"

/* Thermal strain against temperature: integrals of alpha up to the start of each piece. */
typedef struct strain_table {
  const curve *expansion;
  double from;                     /* K: where the sums begin */
  double before[LIMIT_PIECES + 1]; /* integral from `from` to the start of the piece */
  double reference;                /* integral from `from` to 20 degC */
} strain_table;

typedef struct elastic {
  const curve *modulus; /* E, Pa */
  double poisson;
  strain_table strain;
} elastic;

/* Gets the table ready; `expansion` (instantaneous coefficient, 1/K) has at most LIMIT_PIECES
   pieces and must live as long as the table. */
void strain_table_init(strain_table *t, const curve *expansion);

/* Thermal strain at a temperature (K), 0 at 20 degC. */
double thermal_strain(const strain_table *t, double temperature);

/* Components at a place: in_plane | radial, hoop, axial | radial, hoop; Pa, tension positive. */
typedef struct stress_state {
  double position; /* m */
  double component[3];
} stress_state;

int stress_components(int power); /* how many */

/* Stress at `position` (m from front or axis), for nodal temperatures (K) of the section. */
stress_state stress_at(const elastic *e, const section *s, const double *temperature,
                       double position);

/* The place of the largest (sign +1) or smallest (-1) of all components at the nodes: its value
 * (Pa) and position. */
typedef struct stress_extreme {
  double value, position;
} stress_extreme;
void stress_extremes(const elastic *e, const section *s, const double *temperature,
                     stress_extreme *largest, stress_extreme *smallest);

#endif
