/* property.h: conductivity, density and specific heat against temperature, and the fast tables made
   of them: T and the Kirchhoff potential theta(T) = integral of k dT against the volumetric
   enthalpy H(T) = integral of rho c dT (+ latent heat). */
#ifndef CORESOAK_PROPERTY_H
#define CORESOAK_PROPERTY_H

#include "arena.h"
#include "series.h"
#include "status.h"

/* One piece of a property: with x = T - 273.15 K (degC), as published formulas have it,
     value = poly[0] + poly[1] x + ... + poly[4] x^4 + rational / (x - pole)
   over from <= T <= to (K). */
typedef struct piece {
  double from, to;
  double poly[5];
  double rational, pole; /* rational 0: no such term; pole in degC */
} piece;

/* A property: pieces in rising order without gaps. Below the first and above the last the end value
 * holds. */
typedef struct curve {
  int count;
  const piece *pieces;
} curve;

/* Heat released evenly (in temperature) between two temperatures, which may be equal. */
typedef struct latent_heat {
  double heat;     /* J/kg */
  double from, to; /* K */
} latent_heat;

enum material_traits {
  MATERIAL_METAL = 1,
  MATERIAL_HEATING_ONLY =
      2, /* its c(T) holds the transformation heat of heating; misplaced in a quench */
  MATERIAL_LIQUID = 4 /* a liquid (wholly, or above the end of its last latent heat with MELTS) */,
  MATERIAL_MELTS = 8 /* the last latent heat is melting: liquid above it */
};

/* A material as the solver knows it; texts are for the record. */
typedef struct material {
  const char *name, *title, *source, *revision, *note; /* note: NULL if none */
  curve conductivity;                                  /* W/(m.K) */
  curve density;                                       /* kg/m3 */
  curve specific_heat;      /* J/(kg.K); of an enthalpy table: its slopes */
  LIST(latent_heat) latent; /* of an enthalpy table: its jumps */
  double valid_from,
      valid_to;       /* K: where the source gives values; -INFINITY, INFINITY if everywhere */
  double max_service; /* K, NAN if none */
  unsigned traits;
} material;

/* Value of a property at T (K); at a jump the value above it. */
double curve_value(const curve *c, double temperature);

/* Integral of density x specific heat, with latent heat, from `from` to `to` (K): J/m3. A latent
   heat at one temperature counts when that temperature is in (from, to]. */
double material_heat(const material *m, double from, double to);

/* The fast table. H = 0 at `from`. Rows of 8 doubles (64 bytes): cubic coefficients of theta and of
   T in the fraction f of the interval, uniform in H inside each kink-free segment. */
typedef struct property_segment {
  double start, inverse; /* H at its start, 1 / interval (m3/J) */
  int first, count;      /* rows */
} property_segment;

typedef struct property {
  const material *material;
  int segments;
  const property_segment *segment;
  const double (*row)[8];
  double from, to;      /* K: range covered; beyond it the end slopes go on */
  double least, most;   /* H at the ends, J/m3 */
  double peak_capacity; /* largest volumetric heat capacity, latent heat included; INFINITY if one
                           is released at one temperature */
  double reference_capacity; /* smallest sensible volumetric heat capacity in the range, J/(m3.K) */
  double largest_conductivity, smallest_conductivity; /* in the range */
} property;

/* Builds the table of a material over [from, to] K with about `intervals` rows in all.
   Returns STATUS_NO_MEMORY or STATUS_BAD_ARGUMENT (a property not positive, reported in f). */
MUST_USE status property_build(property *p, const material *m, double from, double to,
                               int intervals, arena *memory, fault *f);

/* T (K), and dT/dH by slope. */
double property_temperature(const property *p, double enthalpy, double *slope);

/* Kirchhoff potential (W/m), and dtheta/dH. */
double property_potential(const property *p, double enthalpy, double *slope);

/* theta and dtheta/dH of many enthalpies at once, for the marching path. slope may be NULL. */
void property_potentials(const property *p, int count, const double *enthalpy, double *potential,
                         double *slope);

/* T of many enthalpies at once. */
void property_temperatures(const property *p, int count, const double *enthalpy,
                           double *temperature);

/* H (J/m3, from the table's own zero) at T; at a latent heat of one temperature the liquid side. */
double property_enthalpy(const property *p, double temperature);

#endif
