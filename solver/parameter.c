/* parameter.c: names and default units of the dimensions. */
#include "parameter.h"

const char *dimension_name(dimension d) {
  static const char *const names[] = {
#define X(id, name, unit) name,
      DIMENSIONS(X)
#undef X
  };
  return (unsigned)d < DIMENSION_COUNT ? names[d] : "unknown";
}

const char *dimension_unit(dimension d) {
  static const char *const units[] = {
#define X(id, name, unit) unit,
      DIMENSIONS(X)
#undef X
  };
  return (unsigned)d < DIMENSION_COUNT ? units[d] : "";
}
