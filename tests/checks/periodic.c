/* EN ISO 13786: a layered wall between two rooms whose temperatures swing. With sines of unit
   amplitude on one side at a time, Q11 = heat flow into the inside face per swing inside, Q12 the
   same per swing outside, Q22 at the outside face, as complex numbers: Y11 = |Q11|, Y12 = |Q12|,
   Y22 = |Q22|, decrement = |Q12|/U, time shift from arg(-Q12), and the areal heat capacity of a
   side = period/(2 pi) |Q11 + Q12|: both sides swinging alike. */
#include "adapt.h"
#include "rows.h"
#include "run_case.h"
#include "special.h"
#include "tally.h"
#include <complex.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

typedef struct wall {
  double complex q11, q12, q21, q22; /* W/(m2.K) */
  double u, period;
} wall;

static const double pi = 3.14159265358979323846;
static const double mean = 20, swing = 10; /* degC, K */

static json_t *side(const json_t *neutral, const char *name, json_t *medium) {
  const json_t *given =
      json_array_get(json_object_get(json_object_get(neutral, "boundaries"), name), 0);
  return json_pack("{s:{s:O,s:o}}", "convection", "h", json_object_get(given, "h"), "medium",
                   medium);
}

static json_t *wall_case(const json_t *neutral, json_t *inside, json_t *outside, double lasts) {
  const json_t *l = json_array_get(json_object_get(neutral, "layers"), 0);
  json_t *stage = json_pack("{s:s,s:{s:o,s:o}}", "name", "swing", "faces", "front",
                            side(neutral, "left", inside), "back", side(neutral, "right", outside));
  if (lasts > 0)
    json_object_set_new(stage, "lasts", json_real(lasts));
  else
    json_object_set_new(stage, "steady", json_true());
  json_t *document =
      json_pack("{s:{s:s,s:O,s:s},s:{s:o},s:[o],s:f}", "part", "shape", "plate", "thickness",
                json_object_get(l, "thickness"), "material", "wall", "materials", "wall",
                adapt_material(l), "stages", stage, "numerical_error", 0.002);
  if (lasts > 0) json_object_set_new(document, "start", json_real(mean));
  return document;
}

static json_t *sine(double period) {
  return json_pack("{s:{s:f,s:f,s:f}}", "sine", "mean", mean, "amplitude", swing, "period", period);
}

static double complex flow(const json_t *result, const char *face, double period) {
  double times[LOOKS], values[LOOKS], amplitude, phase;
  for (int i = 0; i < LOOKS; i++) {
    times[i] = (PERIODS_BEFORE + (double)i / LOOKS) * period;
    values[i] = result_number(result, "history/heat_flow/%s/%d", face, i);
  }
  first_harmonic(LOOKS, times, values, period, &amplitude, &phase);
  return amplitude / swing * cexp(I * phase);
}

/* Flows at both faces per swing on one side. */
static int swing_one(const json_t *neutral, wall *w, bool inside_swings, double complex *front,
                     double complex *back) {
  char why[400];
  json_t *still = json_real(mean), *times = json_array();
  json_t *document =
      wall_case(neutral, inside_swings ? sine(w->period) : still,
                inside_swings ? still : sine(w->period), (PERIODS_BEFORE + 1) * w->period);
  for (int i = 0; i < LOOKS; i++)
    json_array_append_new(times, json_real((PERIODS_BEFORE + (double)i / LOOKS) * w->period));
  json_object_set_new(document, "output",
                      json_pack("{s:{s:o,s:[s,s]}}", "history", "at", times, "of",
                                "heat_flow:front", "heat_flow:back"));
  json_t *result = run_case(document, why, sizeof why);
  if (result) {
    *front = flow(result, "front", w->period);
    *back = flow(result, "back", w->period);
  }
  check_true("R59 solves", result != NULL, "%s", result ? "a wall, one side swinging" : why);
  json_decref(document);
  json_decref(result);
  return result ? 0 : -1;
}

static int transmittance(const json_t *neutral, wall *w) {
  char why[400];
  json_t *document = wall_case(neutral, json_real(mean + swing), json_real(mean), 0);
  json_object_set_new(document, "figures",
                      json_pack("[{s:s,s:s,s:s,s:s}]", "name", "flow", "kind", "heat_flow", "face",
                                "front", "time", "end:swing"));
  json_t *result = run_case(document, why, sizeof why);
  w->u = result_number(result, "figures/flow/value") / swing;
  check_true("R59 solves", result != NULL, "%s", result ? "steady" : why);
  json_decref(document);
  json_decref(result);
  return result ? 0 : -1;
}

static double quantity(const wall *w, const char *name) {
  double per_side = w->period / (2 * pi) / 1000;
  if (!strcmp(name, "U")) return w->u;
  if (!strcmp(name, "periodic_transmittance_Y12")) return cabs(w->q12);
  if (!strcmp(name, "time_shift_Y12")) {
    double shift = carg(-w->q12) / (2 * pi) * w->period / 3600;
    return shift > 0 ? shift - w->period / 3600 : shift;
  }
  if (!strcmp(name, "decrement_factor")) return cabs(w->q12) / w->u;
  if (!strcmp(name, "admittance_inside_Y11")) return cabs(w->q11);
  if (!strcmp(name, "admittance_outside_Y22")) return cabs(w->q22);
  if (!strcmp(name, "areal_heat_capacity_inside")) return per_side * cabs(w->q11 + w->q12);
  if (!strcmp(name, "areal_heat_capacity_outside")) return per_side * cabs(w->q22 + w->q21);
  return NAN;
}

void check_periodic_wall(const json_t *neutral) {
  wall w = {.period = neutral_number(neutral, "period", 0)};
  if (swing_one(neutral, &w, true, &w.q11, &w.q21) ||
      swing_one(neutral, &w, false, &w.q12, &w.q22) || transmittance(neutral, &w))
    return;
  size_t i;
  const json_t *row;
  json_array_foreach(json_object_get(neutral, "expect"), i, row) {
    const char *name = json_string_value(json_object_get(row, "quantity"));
    char what[96];
    snprintf(what, sizeof what, "R59 %s", name);
    check_near(what, quantity(&w, name), neutral_number(row, "value", NAN),
               neutral_number(row, "tol", 0), json_string_value(json_object_get(row, "unit")),
               json_string_value(json_object_get(neutral, "source")));
  }
}
