/* read_quantity.c: quantities with their units and ranges. */
#include "reader.h"

#include "physics.h"
#include "units.h"

#include <math.h>
#include <string.h>

#define LONG_BARE_LENGTH    5.0  /* m: a bare number above draws a warning */
#define LONGEST_BARE_LENGTH 50.0 /* m: above it must carry its unit */
#define BELOW_ZERO          1e-9 /* K: absolute zero may be missed by round-off */

static bool bare_number(reader *r, const json_t *v, dimension d, double *out) {
  double number = json_number_value(v);
  if (d == DIMENSION_LENGTH && fabs(number) > LONGEST_BARE_LENGTH) {
    fault_here(r, v, "a length above 50 m must carry its unit, such as \"60 mm\" or \"60 m\"");
    return false;
  }
  if (d == DIMENSION_LENGTH && fabs(number) > LONG_BARE_LENGTH)
    warn_here(r, "a bare length is in m: is %.6g m meant?", number);
  *out = quantity_from_default(number, d);
  return true;
}

static bool text_quantity(reader *r, const json_t *v, dimension d, double *out) {
  char hint[160];
  const char *text = json_string_value(v);
  if (strlen(text) != json_string_length(v)) {
    fault_here(r, NULL, "holds a NUL character");
    return false;
  }
  switch (quantity_read(text, d, out, hint, sizeof hint)) {
  case UNIT_OK: return true;
  case UNIT_NOT_A_QUANTITY: fault_here(r, v, "must be a number or \"<number> <unit>\""); break;
  case UNIT_UNKNOWN: fault_here(r, v, "unknown unit%s%s", hint[0] ? "; " : "", hint); break;
  case UNIT_WRONG_DIMENSION:
    if (strchr(text, '%') && (d == DIMENSION_TEMPERATURE || d == DIMENSION_DIFFERENCE))
      fault_here(r, v, "a percentage of a temperature means nothing; give it in degC or K");
    else
      fault_here(r, v, "wrong unit%s%s", hint[0] ? "; " : "", hint);
    break;
  case UNIT_NEEDED: fault_here(r, v, "needs a unit"); break;
  }
  return false;
}

bool in_scale(reader *r, const json_t *got, dimension d, double *value) {
  if (d != DIMENSION_TEMPERATURE || *value >= 0) return true;
  if (*value < -BELOW_ZERO) {
    fault_here(r, got, "is below absolute zero, -273.15 degC");
    return false;
  }
  *value = 0;
  return true;
}

bool read_quantity(reader *r, const json_t *v, dimension d, double *out) {
  double value;
  bool good = json_is_number(v) ? bare_number(r, v, d, &value)
                                : json_is_string(v) && text_quantity(r, v, d, &value);
  if (!good) {
    if (!json_is_number(v) && !json_is_string(v))
      fault_here(r, v, "must be a number or \"<number> <unit>\"");
    return false;
  }
  if (!isfinite(value)) {
    fault_here(r, v, "must be finite");
    return false;
  }
  if (!in_scale(r, v, d, &value)) return false;
  *out = value;
  return true;
}

bool read_ranged(reader *r, const json_t *v, const parameter *row, dimension d, double *out) {
  double value;
  if (!read_quantity(r, v, d, &value)) return false;
  double shown =
      d == DIMENSION_TEMPERATURE ? ZERO_CELSIUS : 0; /* bounds are told in default units */
  if (row->flags & PARAMETER_ABOVE ? !(value > row->least) : !(value >= row->least)) {
    fault_here(r, v, "must be %s %.10g%s%s",
               row->flags & PARAMETER_ABOVE ? "greater than" : "at least", row->least - shown,
               row->least == 0 || d == DIMENSION_NUMBER ? "" : " ",
               row->least == 0 || d == DIMENSION_NUMBER ? "" : dimension_unit(d));
    return false;
  }
  if (row->flags & PARAMETER_BELOW ? !(value < row->most) : !(value <= row->most)) {
    fault_here(r, v, "must be %s %.10g%s%s", row->flags & PARAMETER_BELOW ? "less than" : "at most",
               row->most - shown, d == DIMENSION_NUMBER ? "" : " ",
               d == DIMENSION_NUMBER ? "" : dimension_unit(d));
    return false;
  }
  *out = value;
  return true;
}

bool read_contact(reader *r, const json_t *v, double *out) {
  static const parameter rows[] = {{.name = "conductance",
                                    .kind = VALUE_QUANTITY,
                                    .dimension = DIMENSION_COEFFICIENT,
                                    .flags = PARAMETER_REQUIRED | PARAMETER_ABOVE,
                                    .least = 0,
                                    .most = INFINITY,
                                    .fallback = NAN}};
  static const parameter resistance = {.least = 0, .most = INFINITY};
  static const object_type type = {
      .name = "contact", .size = sizeof(double), .parameters = rows, .count = 1};
  if (!json_is_object(v)) return read_ranged(r, v, &resistance, DIMENSION_RESISTANCE, out);
  double conductance = NAN;
  read_object(r, v, &type, NULL, NULL, &conductance);
  if (!(conductance > 0)) return false;
  *out = 1 / conductance;
  return true;
}
