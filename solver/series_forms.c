/* series_forms.c: the members of the forms in which a series may be given, as data. */
#include "series.h"

#include <math.h>

#define ROW(type, name_, kind_, dimension_, member_, flags_, least_, fallback_, of_, about_)       \
  {                                                                                                \
    .name = name_, .kind = kind_, .dimension = DIMENSION_##dimension_,                             \
    .offset = offsetof(type, member_), .flags = flags_, .least = least_, .most = INFINITY,         \
    .fallback = fallback_, .of = of_, .about = about_                                              \
  }
#define TYPE(name_, type, rows, about_)                                                            \
  {                                                                                                \
    .name = name_, .about = about_, .size = sizeof(type), .parameters = rows,                      \
    .count = COUNT_OF(rows)                                                                        \
  }

enum { REQUIRED = PARAMETER_REQUIRED, ABOVE = PARAMETER_ABOVE };

static const parameter ramp_rows[] = {
    ROW(ramp_form, "from", VALUE_QUANTITY, ANY, from, REQUIRED, -INFINITY, NAN, NULL,
        "First value"),
    ROW(ramp_form, "to", VALUE_QUANTITY, ANY, to, REQUIRED, -INFINITY, NAN, NULL,
        "Last value, which then holds"),
    ROW(ramp_form, "rate", VALUE_QUANTITY, RATE, rate, REQUIRED | ABOVE, 0, NAN, NULL,
        "How fast, as a positive number; up or down follows from `from` and `to`"),
};
const object_type ramp_type =
    TYPE("ramp", ramp_form, ramp_rows, "A straight change, then constant");

static const parameter sine_rows[] = {
    ROW(sine_form, "mean", VALUE_QUANTITY, ANY, mean, REQUIRED, -INFINITY, NAN, NULL, "Mean"),
    ROW(sine_form, "amplitude", VALUE_QUANTITY, ANY, amplitude, REQUIRED, -INFINITY, NAN, NULL,
        "Amplitude; of a temperature a difference"),
    ROW(sine_form, "period", VALUE_QUANTITY, TIME, period, REQUIRED | ABOVE, 0, NAN, NULL,
        "Period"),
    ROW(sine_form, "phase", VALUE_QUANTITY, ANGLE, phase, 0, -INFINITY, 0, NULL, "Phase"),
};
const object_type sine_type =
    TYPE("sine", sine_form, sine_rows, "mean + amplitude sin(2 pi t/period + phase)");

static const parameter zone_rows[] = {
    ROW(zone_form, "length", VALUE_QUANTITY, LENGTH, length, REQUIRED | ABOVE, 0, NAN, NULL,
        "Length of the zone"),
    ROW(zone_form, "value", VALUE_QUANTITY, ANY, value, REQUIRED, -INFINITY, NAN, NULL,
        "Value in the zone"),
};
const object_type zone_type = TYPE("zone", zone_form, zone_rows, "A zone of a line");

static const parameter line_rows[] = {
    ROW(line_form, "speed", VALUE_QUANTITY, SPEED, speed, REQUIRED | ABOVE, 0, NAN, NULL,
        "Speed of the part"),
    ROW(line_form, "blend", VALUE_QUANTITY, LENGTH, blend, 0, 0, 0, NULL,
        "Length over which neighbouring zones blend, around their border; 0: a jump"),
    ROW(line_form, "zones", VALUE_LIST, NUMBER, zones, REQUIRED, 0, NAN, &zone_type,
        "Zones in the order of travel"),
};
const object_type line_type =
    TYPE("line", line_form, line_rows, "A part that travels through zones");
