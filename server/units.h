/* units.h: units at the border. Inside, everything is SI and kelvin. */
#ifndef CORESOAK_UNITS_H
#define CORESOAK_UNITS_H

#include "parameter.h"
#include <stddef.h>

/* Output units that a caller chose; zero-initialised means SI and degC. */
typedef enum temperature_unit { OUT_CELSIUS, OUT_FAHRENHEIT, OUT_KELVIN } temperature_unit;
typedef struct output_units {
  temperature_unit temperature;
  int length, time; /* indices into the table of units.c; 0 = m, s */
  bool us;          /* "us": also ft/in, Btu units for flux, energy, ... */
} output_units;

typedef enum unit_outcome {
  UNIT_OK,
  UNIT_NOT_A_QUANTITY,
  UNIT_UNKNOWN,
  UNIT_WRONG_DIMENSION,
  UNIT_NEEDED
} unit_outcome;

/* Reads "<number> <unit>" (or a bare number in the dimension's default unit) into SI and kelvin.
   `hint` (hint_size bytes) receives a "did you mean" or the units that would fit, "" if none.
   Percent is read for DIMENSION_NUMBER only. Independent of the locale. */
unit_outcome quantity_read(const char *text, dimension d, double *value, char *hint,
                           size_t hint_size);

/* A bare number in the dimension's default unit to SI. */
double quantity_from_default(double number, dimension d);

/* A number in a named unit ("min", "degF": a table column's) to SI; UNIT_OK, UNKNOWN or
 * WRONG_DIMENSION. */
unit_outcome quantity_in_unit(double number, const char *unit, dimension d, double *value);

/* Sets units from "temperature": "degF" and so on; 0, or -1 if the unit does not fit that
 * dimension. */
int output_units_set(output_units *u, const char *dimension_text, const char *unit);

/* SI value to the caller's unit, an error or difference likewise (no offset), and the unit's label.
 */
double quantity_out(double value, dimension d, const output_units *u);
double quantity_out_difference(double value, dimension d, const output_units *u);
const char *quantity_label(dimension d, const output_units *u);

#endif
