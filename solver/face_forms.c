/* face_forms.c: the members of the forms of a face's condition, as data. */
#include "face.h"

#include <math.h>

#define ROW(type, name_, kind_, dimension_, member_, flags_, least_, most_, fallback_, of_,        \
            about_)                                                                                \
  {                                                                                                \
    .name = name_, .kind = kind_, .dimension = DIMENSION_##dimension_,                             \
    .offset = offsetof(type, member_), .flags = flags_, .least = least_, .most = most_,            \
    .fallback = fallback_, .of = of_, .about = about_                                              \
  }
#define TYPE(name_, type, rows, about_)                                                            \
  {                                                                                                \
    .name = name_, .about = about_, .size = sizeof(type), .parameters = rows,                      \
    .count = COUNT_OF(rows)                                                                        \
  }

enum { REQUIRED = PARAMETER_REQUIRED };

#define COEFFICIENT_ROW(type, flags_)                                                              \
  ROW(type, "h", VALUE_COEFFICIENT, COEFFICIENT, h, flags_, 0, INFINITY, NAN, NULL,                \
      "Heat transfer coefficient: a series, or {\"by_surface_temperature\": [[T, h], ...]}")
#define EMISSIVITY_ROW(type, flags_)                                                               \
  ROW(type, "emissivity", VALUE_QUANTITY, NUMBER, emissivity, flags_, 0, 1, 0, NULL,               \
      "Emissivity of the surface")
#define VIEW_FACTOR_ROW(type)                                                                      \
  ROW(type, "view_factor", VALUE_QUANTITY, NUMBER, view_factor, 0, 0, 1, 1, NULL,                  \
      "Share of the surroundings that the surface sees")

static const parameter convection_rows[] = {
    COEFFICIENT_ROW(convection_form, REQUIRED),
    ROW(convection_form, "medium", VALUE_SERIES, TEMPERATURE, medium, REQUIRED, 0, INFINITY, NAN,
        NULL, "Temperature of the gas or liquid"),
};
const object_type convection_type =
    TYPE("convection", convection_form, convection_rows, "Heat from or to a gas or liquid");

static const parameter radiation_rows[] = {
    EMISSIVITY_ROW(radiation_form, REQUIRED),
    ROW(radiation_form, "surroundings", VALUE_SERIES, TEMPERATURE, surroundings, REQUIRED, 0,
        INFINITY, NAN, NULL, "Temperature of the surroundings"),
    VIEW_FACTOR_ROW(radiation_form),
};
const object_type radiation_type =
    TYPE("radiation", radiation_form, radiation_rows, "Heat from or to large surroundings");

static const parameter furnace_rows[] = {
    ROW(furnace_form, "temperature", VALUE_SERIES, TEMPERATURE, temperature, REQUIRED, 0, INFINITY,
        NAN, NULL, "Temperature of gas and walls"),
    COEFFICIENT_ROW(furnace_form, 0),
    EMISSIVITY_ROW(furnace_form, 0),
    VIEW_FACTOR_ROW(furnace_form),
};
const object_type furnace_type =
    TYPE("furnace", furnace_form, furnace_rows, "Convection and radiation at one temperature");

static const parameter condition_rows[] = {
    ROW(condition_form, "temperature", VALUE_OPTIONAL_SERIES, TEMPERATURE, temperature, 0, 0,
        INFINITY, NAN, NULL, "The surface has this temperature"),
    ROW(condition_form, "flux", VALUE_OPTIONAL_SERIES, FLUX, flux, 0, -INFINITY, INFINITY, NAN,
        NULL, "Heat flux, positive into the part"),
    ROW(condition_form, "convection", VALUE_OPTIONAL, NUMBER, convection, 0, 0, INFINITY, NAN,
        &convection_type, "Heat from or to a gas or liquid"),
    ROW(condition_form, "radiation", VALUE_OPTIONAL, NUMBER, radiation, 0, 0, INFINITY, NAN,
        &radiation_type, "Heat from or to large surroundings"),
    ROW(condition_form, "furnace", VALUE_OPTIONAL, NUMBER, furnace, 0, 0, INFINITY, NAN,
        &furnace_type, "Convection and radiation at one temperature"),
    ROW(condition_form, "insulated", VALUE_FLAG, NUMBER, insulated, 0, 0, INFINITY, NAN, NULL,
        "true: nothing crosses"),
};
const object_type condition_type =
    TYPE("condition", condition_form, condition_rows, "What crosses a face");
