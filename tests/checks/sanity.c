/* Sanity checks: what people of the trade expect, and what an independent general-purpose
 * integrator computed. */
#include "run_case.h"
#include "tally.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

static const char common_practice[] = "common practice";
static const char independent[] =
    "computed by an independent general-purpose integrator with the EN 1993-1-2 curves";

/* Solves a case written out as JSON (a printf format of numbers); NULL with a failed check if it
 * does not solve. */
static json_t *solved(const char *what, const char *format, ...)
    __attribute__((format(printf, 2, 3)));

static json_t *solved(const char *what, const char *format, ...) {
  char *text = NULL, why[600] = "";
  json_error_t error;
  va_list arguments;
  va_start(arguments, format);
  int length = vasprintf(&text, format, arguments);
  va_end(arguments);
  json_t *document = length < 0 ? NULL : json_loads(text, 0, &error);
  json_t *result = document ? run_case(document, why, sizeof why) : NULL;
  check_true(what, result != NULL, "%s", result ? "solves" : document ? why : error.text);
  json_decref(document);
  free(text);
  return result;
}

/* At a steady ramp of the surface the core lags by R L^2/(2 alpha) in a plate of half thickness L,
   and by R r^2/(4 alpha) in a round of radius r. */
static void check_ramp_lag(void) {
  const double k = 40, density = 8000, heat = 500, rate = 0.05, half = 0.05,
               alpha = k / (density * heat);
  static const struct {
    const char *what, *shape, *size, *faces;
    double divisor;
  } bodies[] = {{"lag of a plate", "plate", "thickness", "all", 2},
                {"lag of a round", "cylinder", "diameter", "outer", 4}};
  for (int i = 0; i < 2; i++) {
    json_t *result =
        solved(bodies[i].what,
               "{\"part\": {\"shape\": \"%s\", \"%s\": %.17g, \"material\": \"m\"},"
               " \"materials\": {\"m\": {\"conductivity\": %.17g, \"density\": %.17g, "
               "\"specific_heat\": %.17g}},"
               " \"start\": 20, \"stages\": [{\"name\": \"ramp\", \"lasts\": 10000, \"faces\": "
               "{\"%s\": {\"temperature\":"
               " {\"ramp\": {\"from\": 20, \"to\": 2000, \"rate\": %.17g}}}}}],"
               " \"figures\": [{\"name\": \"lag\", \"kind\": \"at\", \"of\": "
               "\"section_difference\", \"time\": 10000}],"
               " \"numerical_error\": 0.05}",
               bodies[i].shape, bodies[i].size, 2 * half, k, density, heat, bodies[i].faces, rate);
    check_near(bodies[i].what, result_number(result, "figures/lag/value"),
               rate * half * half / (bodies[i].divisor * alpha), 0.1, "K", common_practice);
    json_decref(result);
  }
}

static double solidification(double thickness) {
  json_t *result = solved(
      "solidification",
      "{\"part\": {\"shape\": \"plate\", \"thickness\": %.17g, \"material\": \"m\"},"
      " \"materials\": {\"m\": {\"conductivity\": 30, \"density\": 7000, \"specific_heat\": 700,"
      " \"latent_heat\": [{\"heat\": 270000, \"from\": 1450, \"to\": 1490}]}},"
      " \"start\": 1495, \"stages\": [{\"name\": \"freeze\", \"faces\": {\"all\": "
      "{\"temperature\": 1000}},"
      " \"until\": {\"of\": \"hottest\", \"falls_to\": 1450}, \"time_limit\": 100000}], "
      "\"numerical_error\": 0.5}",
      thickness);
  double end = result_number(result, "stages/0/end");
  json_decref(result);
  return end;
}

static void check_solidification(void) {
  check_near("solidification time of double thickness", solidification(0.1) / solidification(0.05),
             4, 0.05, "-", common_practice);
}

static void check_tempering(void) {
  json_t *result = solved(
      "two equal tempers",
      "{\"part\": {\"shape\": \"plate\", \"thickness\": 0.001, \"material\": \"m\"},"
      " \"materials\": {\"m\": {\"conductivity\": 400, \"density\": 1000, \"specific_heat\": "
      "100}}, \"start\": 600,"
      " \"stages\": [{\"name\": \"first\", \"lasts\": 7200, \"faces\": {\"all\": {\"temperature\": "
      "600}}},"
      " {\"name\": \"cool\", \"lasts\": 3600, \"faces\": {\"all\": {\"temperature\": 20}}},"
      " {\"name\": \"second\", \"lasts\": 7200, \"faces\": {\"all\": {\"temperature\": 600}}}],"
      " \"figures\": [{\"name\": \"one\", \"kind\": \"tempering\", \"of\": \"center\", \"during\": "
      "[\"first\"]},"
      " {\"name\": \"both\", \"kind\": \"tempering\", \"of\": \"center\"}], \"numerical_error\": "
      "0.01}");
  check_near("two hours at 600 degC", result_number(result, "figures/one/value"), 17.73, 0.006, "-",
             common_practice);
  check_near("two such tempers", result_number(result, "figures/both/value"), 17.99, 0.006, "-",
             common_practice);
  json_decref(result);
}

static void check_maturity(void) {
  json_t *result =
      solved("seven days at 20 degC",
             "{\"part\": {\"shape\": \"plate\", \"thickness\": 0.001, \"material\": \"m\"},"
             " \"materials\": {\"m\": {\"conductivity\": 400, \"density\": 1000, "
             "\"specific_heat\": 100}}, \"start\": 20,"
             " \"stages\": [{\"name\": \"cure\", \"lasts\": \"7 d\", \"faces\": {\"all\": "
             "{\"temperature\": 20}}}],"
             " \"figures\": [{\"name\": \"sum\", \"kind\": \"maturity\", \"of\": \"center\", "
             "\"datum\": -10}]}");
  check_near("seven days at 20 degC above -10", result_number(result, "figures/sum/value"), 5040,
             0.5, "degC.h", common_practice);
  json_decref(result);
}

/* Heat content per kg by the energy of a case: a thin sheet taken slowly from one temperature to
 * the other. */
static double heat_content(double to) {
  json_t *result = solved(
      "heat content",
      "{\"part\": {\"shape\": \"plate\", \"thickness\": 0.001, \"material\": \"carbon_steel\"}, "
      "\"start\": 25,"
      " \"stages\": [{\"name\": \"heat\", \"lasts\": 36000, \"faces\": {\"all\": {\"temperature\":"
      " {\"table\": [[0, 25], [30000, %.17g]]}}}}],"
      " \"figures\": [{\"name\": \"heat\", \"kind\": \"heat_absorbed\"}], \"numerical_error\": "
      "0.1}",
      to);
  double heat = result_number(result, "figures/heat/value") / (7850 * 0.001) / 1e6;
  json_decref(result);
  return heat;
}

static void check_heat_content(void) {
  check_near("heat content of carbon steel, 25 to 860 degC", heat_content(860), 0.603, 0.001,
             "MJ/kg", independent);
  check_near("heat content of carbon steel, 25 to 1250 degC", heat_content(1250), 0.857, 0.001,
             "MJ/kg", independent);
}

static void check_rounds(void) {
  static const double rounds[][2] = {{25, 13.67}, {50, 28.03}, {100, 58.87}}; /* mm, min */
  for (int i = 0; i < 3; i++) {
    char what[80];
    snprintf(what, sizeof what, "round of %g mm reaches 850 degC at the core", rounds[i][0]);
    json_t *result = solved(what,
                            "{\"part\": {\"shape\": \"cylinder\", \"diameter\": \"%.17g mm\", "
                            "\"material\": \"carbon_steel\"}, \"start\": 25,"
                            " \"stages\": [{\"name\": \"heat\", \"faces\": {\"outer\": "
                            "{\"furnace\": {\"temperature\": 860, \"h\": 20,"
                            " \"emissivity\": 0.8}}}, \"until\": {\"of\": \"center\", "
                            "\"rises_to\": 850}, \"time_limit\": \"10 h\"}],"
                            " \"numerical_error\": 0.02}",
                            rounds[i][0]);
    check_near(what, result_number(result, "stages/0/end") / 60, rounds[i][1], 0.01, "min",
               independent);
    json_decref(result);
  }
}

int main(void) {
  check_ramp_lag();
  check_solidification();
  check_tempering();
  check_maturity();
  check_heat_content();
  check_rounds();
  return tally_finish();
}
