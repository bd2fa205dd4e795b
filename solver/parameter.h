/* parameter.h: what a caller may say, as plain data.

   Every object of a case is described by an `object_type`: its members, each with name, kind,
   dimension, default, range and the place in the C struct that it fills. One generic reader in
   server/ fills the structs from these rows; the JSON Schema, the "did you mean" and the reference
   page come from the same rows. This header knows no JSON. */
#ifndef CORESOAK_PARAMETER_H
#define CORESOAK_PARAMETER_H

#include <stdbool.h>
#include <stddef.h>

/* Physical dimensions: name, default unit as the API states it. A TEMPERATURE is absolute (kelvin
   inside, degC outside); a DIFFERENCE is in K. */
#define DIMENSIONS(X)                                                                              \
  X(NUMBER, "number", "1")                                                                         \
  X(LENGTH, "length", "m")                                                                         \
  X(TIME, "time", "s")                                                                             \
  X(TEMPERATURE, "temperature", "degC")                                                            \
  X(DIFFERENCE, "temperature_difference", "K")                                                     \
  X(RATE, "rate", "K/s")                                                                           \
  X(DENSITY, "density", "kg/m3")                                                                   \
  X(CONDUCTIVITY, "conductivity", "W/(m.K)")                                                       \
  X(SPECIFIC_HEAT, "specific_heat", "J/(kg.K)")                                                    \
  X(ENTHALPY, "enthalpy", "J/kg")                                                                  \
  X(COEFFICIENT, "heat_transfer_coefficient", "W/(m2.K)")                                          \
  X(FLUX, "flux", "W/m2")                                                                          \
  X(GENERATION, "generation", "W/m3")                                                              \
  X(RESISTANCE, "contact_resistance", "m2.K/W")                                                    \
  X(ENERGY, "energy", "J")                                                                         \
  X(ENERGY_PER_LENGTH, "energy_per_length", "J/m")                                                 \
  X(ENERGY_PER_AREA, "energy_per_area", "J/m2")                                                    \
  X(POWER, "power", "W")                                                                           \
  X(POWER_PER_LENGTH, "power_per_length", "W/m")                                                   \
  X(STRESS, "stress", "Pa")                                                                        \
  X(EXPANSION, "expansion", "1/K")                                                                 \
  X(ACTIVATION_ENERGY, "activation_energy", "J/mol")                                               \
  X(ANGLE, "phase", "rad")                                                                         \
  X(SPEED, "speed", "m/s")                                                                         \
  X(FREQUENCY, "frequency", "1/s")                                                                 \
  X(MATURITY, "maturity", "degC.h")                                                                \
  X(ANY, "any", "") /* decided by context: the values of a named series or of an input */

typedef enum dimension {
#define X(id, name, unit) DIMENSION_##id,
  DIMENSIONS(X)
#undef X
      DIMENSION_COUNT
} dimension;

/* Name and default unit of a dimension; never NULL. */
const char *dimension_name(dimension d);
const char *dimension_unit(dimension d);

/* What a member holds, and the C type at its offset. */
typedef enum value_kind {
  VALUE_QUANTITY, /* double, in SI and kelvin */
  VALUE_COUNT_OF, /* int: a whole number */
  VALUE_FLAG,     /* bool */
  VALUE_TEXT,     /* const char * */
  VALUE_NAME,     /* const char *: a unique name made of letters, digits, _ and - */
  VALUE_CHOICE,   /* int: index into `of`, a NULL-terminated const char *const [] */
  VALUE_CHOICES,  /* unsigned: a list of names out of `of`, a bit for each */
  VALUE_OBJECT, /* struct in place, described by `of`, an object_type; its own defaults if absent */
  VALUE_OPTIONAL,        /* pointer to a struct described by `of`; NULL if absent */
  VALUE_LIST,            /* LIST(struct) described by `of` */
  VALUE_MATERIAL,        /* int: index into heat_case.materials; a name in JSON */
  VALUE_SERIES,          /* struct series (series.h) */
  VALUE_OPTIONAL_SERIES, /* struct series *, NULL if absent */
  VALUE_COEFFICIENT,     /* struct coefficient (face.h) */
  VALUE_CONTACT,         /* double, m2.K/W: a resistance, or {"conductance": ...} in W/(m2.K) */
  VALUE_CURVE,  /* struct curve (property.h): a number, {"table": ...} or {"pieces": ...} */
  VALUE_TABLE,  /* struct table (series.h): [[x, y], ...]; x in `dimension`, y in `second` */
  VALUE_TARGET, /* struct target (case.h): a PLACE ("of", with an "in" beside it) or a figure */
  VALUE_LEVEL,  /* double in the dimension of the target named beside it (rises_to, require ...) */
  VALUE_LOCATION,         /* struct location (case.h): "center", {"face", "depth"}, coordinates */
  VALUE_INSTANT,          /* struct instant * (case.h): a time or "end:STAGE"; NULL if absent */
  VALUE_INSTANTS,         /* LIST(instant) */
  VALUE_STAGE_SET,        /* struct stage_set (case.h): a stage's name or a list of them */
  VALUE_FACE,             /* int: index of a face of the shape; -1 for "all" or absent */
  VALUE_FACES,            /* struct faces (case.h): face name -> condition, "all" */
  VALUE_START,            /* struct start (case.h) */
  VALUE_UNTIL,            /* struct until (case.h) */
  VALUE_PLACES,           /* struct columns (case.h): what a history or the fields hold */
  VALUE_OPTIONAL_LOCATION /* struct location * (case.h), NULL if absent */
} value_kind;

enum parameter_flags {
  PARAMETER_REQUIRED = 1,
  PARAMETER_ABOVE = 2,  /* must be greater than `least`, not equal */
  PARAMETER_BELOW = 4,  /* must be less than `most`, not equal */
  PARAMETER_PLANNED = 8 /* read by a later version: refused today by name */
};

typedef struct object_type object_type;

typedef struct parameter {
  const char *name;
  value_kind kind;
  dimension dimension;
  dimension second; /* of the y column of a VALUE_TABLE */
  size_t offset;    /* in the struct that the object fills */
  unsigned flags;
  double least, most; /* range in SI; -INFINITY, INFINITY for none */
  double fallback;    /* value of a quantity that is absent, in SI; NAN leaves it unset */
  const void *of;     /* choices or object_type, by kind */
  const char *about;  /* one line, a full sentence without its full stop */
} parameter;

struct object_type {
  const char *name; /* "layer", "stage", ... */
  const char *about;
  size_t size; /* of the C struct */
  const parameter *parameters;
  int count;
  bool one_of; /* a union by key: exactly one member */
};

/* A list as the reader fills it: items live in the case's arena. */
#define LIST(type)                                                                                 \
  struct {                                                                                         \
    int count;                                                                                     \
    type *items;                                                                                   \
  }

#define COUNT_OF(array) ((int)(sizeof(array) / sizeof((array)[0])))

#endif
