/* face.h: what crosses a face, and its derivative by surface temperature. */
#ifndef CORESOAK_FACE_H
#define CORESOAK_FACE_H

#include "series.h"

/* A heat transfer coefficient: against time, or against the surface temperature. W/(m2.K). */
typedef struct coefficient {
  bool by_surface_temperature;
  series over_time;
  table over_temperature; /* strictly rising in K; first and last value hold */
} coefficient;

typedef enum face_kind { FACE_INSULATED, FACE_PRESCRIBED, FACE_EXCHANGE } face_kind;

/* The condition on one face during one stage. EXCHANGE adds up flux, convection and radiation. */
typedef struct face_condition {
  face_kind kind;
  bool assumed; /* nobody named this face: insulated by default */
  bool furnace; /* convection and radiation at one temperature, given as a furnace */
  bool has_convection, has_radiation;
  series temperature;             /* FACE_PRESCRIBED, K */
  series flux;                    /* W/m2, positive into the part; SERIES_NONE if absent */
  coefficient h;                  /* convection */
  series medium;                  /* K */
  double emissivity, view_factor; /* radiation; view_factor 1 unless given */
  series surroundings;            /* K */
} face_condition;

/* The forms of a condition for the reader and the schema. */
typedef struct convection_form {
  coefficient h;
  series medium;
} convection_form;
typedef struct radiation_form {
  double emissivity, view_factor;
  series surroundings;
} radiation_form;
typedef struct furnace_form {
  series temperature;
  coefficient h;
  double emissivity, view_factor;
} furnace_form;
typedef struct condition_form {
  series *temperature, *flux;
  convection_form *convection;
  radiation_form *radiation;
  furnace_form *furnace;
  bool insulated;
} condition_form;
extern const object_type convection_type, radiation_type, furnace_type, condition_type;

/* Flux into the part through a face. */
typedef struct face_flux {
  double flux;           /* W/m2 */
  double by_temperature; /* d flux / d surface temperature at fixed time, W/(m2.K) */
  double by_time;        /* d flux / dt at fixed surface temperature, W/(m2.s) */
} face_flux;

/* Conditions at one time, evaluated once for all stages of a step. */
typedef struct face_state {
  double flux, flux_slope, h, h_slope, medium, medium_slope, surroundings, surroundings_slope;
  double prescribed, prescribed_slope;
} face_state;

/* Reads the series of a condition at time t of the stage (stage_start, s from the start of the
   case), inside the break-free interval (from, to) of stage time. */
void face_at(const face_condition *c, double stage_start, double from, double to, double t,
             face_state *state);

/* Flux for a surface temperature (K), from the state. */
face_flux face_exchange(const face_condition *c, const face_state *state,
                        double surface_temperature);

/* The condition with every series at its last value (a sine or fire curve: its value at t = 0): a
 * steady stage. */
face_condition face_at_rest(const face_condition *c);

/* First break after stage time t among all series of the condition; longest step they allow. */
double face_next_break(const face_condition *c, double stage_start, double t);
double face_longest_step(const face_condition *c);

#endif
