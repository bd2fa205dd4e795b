/* units.c: "<number> <unit>" to SI and kelvin, by dimension. */
#include "units.h"

#include "physics.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { KG, METRE, SECOND, KELVIN, MOLE, RADIAN, BASES };
enum { LARGEST_POWER = 9 };

typedef struct unit {
  const char *symbol;
  double factor; /* to SI */
  signed char power[BASES];
} unit;

/* UCUM codes and the usual short forms. Factors: BIPM, The SI Brochure, 9th ed.; inch, pound and
 * Btu (IT) by NIST SP 811. */
static const unit units[] = {
    {"1", 1, {0}},
    {"%", 0.01, {0}},
    {"m", 1, {0, 1}},
    {"km", 1e3, {0, 1}},
    {"cm", 1e-2, {0, 1}},
    {"mm", 1e-3, {0, 1}},
    {"um", 1e-6, {0, 1}},
    {"\302\265m", 1e-6, {0, 1}},
    {"in", 0.0254, {0, 1}},
    {"[in_i]", 0.0254, {0, 1}},
    {"ft", 0.3048, {0, 1}},
    {"[ft_i]", 0.3048, {0, 1}},
    {"s", 1, {0, 0, 1}},
    {"ms", 1e-3, {0, 0, 1}},
    {"min", 60, {0, 0, 1}},
    {"h", 3600, {0, 0, 1}},
    {"d", 86400, {0, 0, 1}},
    {"wk", 604800, {0, 0, 1}},
    {"Hz", 1, {0, 0, -1}},
    {"K", 1, {0, 0, 0, 1}},
    {"degC", 1, {0, 0, 0, 1}},
    {"Cel", 1, {0, 0, 0, 1}},
    {"\302\260C", 1, {0, 0, 0, 1}},
    {"degF", 5.0 / 9, {0, 0, 0, 1}},
    {"[degF]", 5.0 / 9, {0, 0, 0, 1}},
    {"\302\260F", 5.0 / 9, {0, 0, 0, 1}},
    {"g", 1e-3, {1}},
    {"kg", 1, {1}},
    {"t", 1e3, {1}},
    {"lb", 0.45359237, {1}},
    {"[lb_av]", 0.45359237, {1}},
    {"N", 1, {1, 1, -2}},
    {"kN", 1e3, {1, 1, -2}},
    {"J", 1, {1, 2, -2}},
    {"kJ", 1e3, {1, 2, -2}},
    {"MJ", 1e6, {1, 2, -2}},
    {"GJ", 1e9, {1, 2, -2}},
    {"Wh", 3600, {1, 2, -2}},
    {"kWh", 3.6e6, {1, 2, -2}},
    {"MWh", 3.6e9, {1, 2, -2}},
    {"cal", 4.184, {1, 2, -2}},
    {"kcal", 4184, {1, 2, -2}},
    {"Btu", 1055.05585262, {1, 2, -2}},
    {"[Btu_IT]", 1055.05585262, {1, 2, -2}},
    {"W", 1, {1, 2, -3}},
    {"mW", 1e-3, {1, 2, -3}},
    {"kW", 1e3, {1, 2, -3}},
    {"MW", 1e6, {1, 2, -3}},
    {"Pa", 1, {1, -1, -2}},
    {"kPa", 1e3, {1, -1, -2}},
    {"MPa", 1e6, {1, -1, -2}},
    {"GPa", 1e9, {1, -1, -2}},
    {"bar", 1e5, {1, -1, -2}},
    {"psi", 6894.757293168, {1, -1, -2}},
    {"[psi]", 6894.757293168, {1, -1, -2}},
    {"ksi", 6894757.293168, {1, -1, -2}},
    {"mol", 1, {0, 0, 0, 0, 1}},
    {"kmol", 1e3, {0, 0, 0, 0, 1}},
    {"rad", 1, {0, 0, 0, 0, 0, 1}},
    {"deg", 0.017453292519943295769, {0, 0, 0, 0, 0, 1}},
};

/* What is often written for what is meant. */
static const char *const meant[][2] = {{"F", "degF"},
                                       {"C", "degC"},
                                       {"deg C", "degC"},
                                       {"deg F", "degF"},
                                       {"\302\272C", "\302\260C"},
                                       {"sec", "s"},
                                       {"secs", "s"},
                                       {"second", "s"},
                                       {"seconds", "s"},
                                       {"mins", "min"},
                                       {"minute", "min"},
                                       {"minutes", "min"},
                                       {"hr", "h"},
                                       {"hrs", "h"},
                                       {"hour", "h"},
                                       {"hours", "h"},
                                       {"day", "d"},
                                       {"days", "d"},
                                       {"inch", "in"},
                                       {"inches", "in"},
                                       {"\"", "in"},
                                       {"feet", "ft"},
                                       {"W/mK", "W/(m.K)"},
                                       {"W/m K", "W/(m.K)"},
                                       {"W/m2K", "W/(m2.K)"},
                                       {"W/m2 K", "W/(m2.K)"},
                                       {"W/m^2K", "W/(m2.K)"},
                                       {"J/kgK", "J/(kg.K)"},
                                       {"J/kg K", "J/(kg.K)"},
                                       {"percent", "%"},
                                       {"kelvin", "K"},
                                       {"Kelvin", "K"}};

static const signed char powers[DIMENSION_COUNT][BASES] = {
    [DIMENSION_LENGTH] = {0, 1},
    [DIMENSION_TIME] = {0, 0, 1},
    [DIMENSION_TEMPERATURE] = {0, 0, 0, 1},
    [DIMENSION_DIFFERENCE] = {0, 0, 0, 1},
    [DIMENSION_RATE] = {0, 0, -1, 1},
    [DIMENSION_DENSITY] = {1, -3},
    [DIMENSION_CONDUCTIVITY] = {1, 1, -3, -1},
    [DIMENSION_SPECIFIC_HEAT] = {0, 2, -2, -1},
    [DIMENSION_ENTHALPY] = {0, 2, -2},
    [DIMENSION_COEFFICIENT] = {1, 0, -3, -1},
    [DIMENSION_FLUX] = {1, 0, -3},
    [DIMENSION_GENERATION] = {1, -1, -3},
    [DIMENSION_RESISTANCE] = {-1, 0, 3, 1},
    [DIMENSION_ENERGY] = {1, 2, -2},
    [DIMENSION_ENERGY_PER_LENGTH] = {1, 1, -2},
    [DIMENSION_ENERGY_PER_AREA] = {1, 0, -2},
    [DIMENSION_POWER] = {1, 2, -3},
    [DIMENSION_POWER_PER_LENGTH] = {1, 1, -3},
    [DIMENSION_STRESS] = {1, -1, -2},
    [DIMENSION_EXPANSION] = {0, 0, 0, -1},
    [DIMENSION_ACTIVATION_ENERGY] = {1, 2, -2, 0, -1},
    [DIMENSION_ANGLE] = {0, 0, 0, 0, 0, 1},
    [DIMENSION_SPEED] = {0, 1, -1},
    [DIMENSION_FREQUENCY] = {0, 0, -1},
    [DIMENSION_MATURITY] = {0, 0, 1, 1},
};

/* Of the unit that the solver uses over SI: maturity is kept in degC.h. */
static double kept_in(dimension d) {
  return d == DIMENSION_MATURITY ? 3600 : 1;
}

/* ---- parsing a unit: term (("." | "/" | "*") term)*, term = symbol exponent? | "(" unit ")" ----
 */

typedef struct parse {
  const char *at;
  bool failed;
} parse;

/* A power that no quantity has makes the factor NAN, which unit_named refuses. */
static void multiply(unit *a, const unit *b, int power) {
  for (int i = 0; i < abs(power); i++)
    a->factor = power > 0 ? a->factor * b->factor : a->factor / b->factor;
  for (int i = 0; i < BASES; i++) {
    int sum = a->power[i] + power * b->power[i];
    if (abs(sum) > LARGEST_POWER) a->factor = NAN;
    a->power[i] = (signed char)(abs(sum) > LARGEST_POWER ? 0 : sum);
  }
}

static const unit *longest_symbol(const char *text, size_t *length) {
  const unit *best = NULL;
  *length = 0;
  for (size_t i = 0; i < sizeof units / sizeof *units; i++) {
    size_t n = strlen(units[i].symbol);
    if (n > *length && !strncmp(text, units[i].symbol, n)) {
      best = &units[i];
      *length = n;
    }
  }
  return best;
}

static int exponent(parse *p) {
  if (!strncmp(p->at, "\302\262", 2) || !strncmp(p->at, "\302\263", 2)) {
    int power = p->at[1] == '\262' ? 2 : 3;
    p->at += 2;
    return power;
  }
  if (*p->at == '^') p->at++;
  int sign = 1, power = 0;
  if (*p->at == '-' || *p->at == '+') {
    sign = *p->at == '-' ? -1 : 1;
    p->at++;
    if (!isdigit((unsigned char)*p->at)) p->failed = true;
  }
  if (!isdigit((unsigned char)*p->at)) return 1;
  power = *p->at++ - '0';
  if (!power || isdigit((unsigned char)*p->at)) p->failed = true;
  return sign * power;
}

static unit parse_unit(parse *p, int depth);

static unit parse_term(parse *p, int depth) {
  unit term = {.factor = 1};
  if (*p->at == '(' && depth < 8) {
    p->at++;
    unit inner = parse_unit(p, depth + 1);
    if (*p->at != ')') p->failed = true;
    if (!p->failed) p->at++;
    multiply(&term, &inner, p->failed ? 1 : exponent(p));
    return term;
  }
  size_t length;
  const unit *found = longest_symbol(p->at, &length);
  if (!found) {
    p->failed = true;
    return term;
  }
  p->at += length;
  bool plain = found == &units[0] || found == &units[1]; /* "5 10" is no quantity */
  multiply(&term, found, plain ? 1 : exponent(p));
  return term;
}

static unit parse_unit(parse *p, int depth) {
  unit whole = {.factor = 1};
  int power = 1;
  for (;;) {
    unit term = parse_term(p, depth);
    if (p->failed) return whole;
    multiply(&whole, &term, power);
    if (*p->at == '/') {
      power = -1;
      p->at++;
    } else if (*p->at == '.' || *p->at == '*') {
      power = 1;
      p->at++;
    } else if (!strncmp(p->at, "\302\267", 2)) {
      power = 1;
      p->at += 2;
    } else {
      return whole;
    }
  }
}

static bool unit_named(const char *text, unit *out) {
  parse p = {.at = text};
  *out = parse_unit(&p, 0);
  return !p.failed && *p.at == 0 && isfinite(out->factor) && out->factor > 0;
}

static bool is(const char *text, const char *a, const char *b, const char *c) {
  return !strcmp(text, a) || !strcmp(text, b) || !strcmp(text, c);
}

unit_outcome quantity_in_unit(double number, const char *text, dimension d, double *value) {
  unit u;
  if (!unit_named(text, &u)) return UNIT_UNKNOWN;
  if (d == DIMENSION_ANY) return UNIT_WRONG_DIMENSION;
  if (memcmp(u.power, powers[d], BASES)) return UNIT_WRONG_DIMENSION;
  if (strchr(text, '%') && d != DIMENSION_NUMBER) return UNIT_WRONG_DIMENSION;
  if (!isfinite(number * u.factor)) return UNIT_NOT_A_QUANTITY;
  *value = number * u.factor / kept_in(d);
  if (d != DIMENSION_TEMPERATURE) return UNIT_OK;
  if (is(text, "degC", "Cel", "\302\260C"))
    *value = number + ZERO_CELSIUS;
  else if (is(text, "degF", "[degF]", "\302\260F"))
    *value = (number - 32) * 5 / 9 + ZERO_CELSIUS;
  return UNIT_OK;
}

double quantity_from_default(double number, dimension d) {
  return d == DIMENSION_TEMPERATURE ? number + ZERO_CELSIUS : number;
}

/* ---- a whole quantity ---- */

/* A decimal number as JSON has it, a sign in front allowed. */
static const char *number_end(const char *text) {
  const char *p = text + (*text == '-' || *text == '+'), *digits = p;
  while (isdigit((unsigned char)*p)) p++;
  if (*p == '.') {
    p++;
    while (isdigit((unsigned char)*p)) p++;
  }
  if (p == digits || (p == digits + 1 && *digits == '.')) return NULL;
  if (*p == 'e' || *p == 'E') {
    const char *e = p + 1 + (p[1] == '-' || p[1] == '+');
    if (isdigit((unsigned char)*e)) {
      while (isdigit((unsigned char)*e)) e++;
      p = e;
    }
  }
  return p;
}

static void suggest(const char *text, dimension d, char *hint, size_t size) {
  unit u;
  if (!size) return;
  double unused;
  for (size_t i = 0; i < sizeof meant / sizeof *meant; i++)
    if (!strcmp(text, meant[i][0]) && quantity_in_unit(1, meant[i][1], d, &unused) == UNIT_OK) {
      snprintf(hint, size, "did you mean %s?", meant[i][1]);
      return;
    }
  if (d == DIMENSION_ANY || d == DIMENSION_NUMBER) return;
  const char *also = d == DIMENSION_LENGTH        ? "mm, m, in"
                     : d == DIMENSION_TIME        ? "s, min, h"
                     : d == DIMENSION_TEMPERATURE ? "degC, degF, K"
                     : d == DIMENSION_DIFFERENCE  ? "K, degF"
                                                  : NULL;
  snprintf(hint, size, "a %s is in %s%s", dimension_name(d), also ? also : dimension_unit(d),
           unit_named(text, &u) ? ", not in this unit" : "");
  for (char *p = hint; *p; p++)
    if (*p == '_') *p = ' ';
}

unit_outcome quantity_read(const char *text, dimension d, double *value, char *hint,
                           size_t hint_size) {
  if (hint_size) hint[0] = 0;
  while (*text == ' ') text++;
  const char *end = number_end(text);
  if (!end) return UNIT_NOT_A_QUANTITY;
  double number = strtod(text, NULL);
  if (!isfinite(number)) return UNIT_NOT_A_QUANTITY;
  while (*end == ' ') end++;
  char name[64];
  size_t length = strlen(end);
  while (length && end[length - 1] == ' ') length--;
  if (!length) {
    *value = quantity_from_default(number, d);
    return UNIT_OK;
  }
  if (length >= sizeof name) return UNIT_UNKNOWN;
  memcpy(name, end, length);
  name[length] = 0;
  unit_outcome outcome = quantity_in_unit(number, name, d, value);
  if (outcome != UNIT_OK) suggest(name, d, hint, hint_size);
  return outcome;
}

/* ---- outwards ---- */

typedef struct out_unit {
  const char *label;
  double factor;
} out_unit;

static const out_unit lengths[] = {
    {"m", 1}, {"mm", 1e-3}, {"cm", 1e-2}, {"in", 0.0254}, {"ft", 0.3048}};
static const out_unit times[] = {{"s", 1}, {"min", 60}, {"h", 3600}, {"d", 86400}};
static const char *const temperatures[] = {"degC", "degF", "K"};

/* US customary labels of the other dimensions; read back by the same parser. */
static const char *us_label(dimension d) {
  switch (d) {
  case DIMENSION_DENSITY: return "lb/ft3";
  case DIMENSION_CONDUCTIVITY: return "Btu/(h.ft.degF)";
  case DIMENSION_SPECIFIC_HEAT: return "Btu/(lb.degF)";
  case DIMENSION_ENTHALPY: return "Btu/lb";
  case DIMENSION_COEFFICIENT: return "Btu/(h.ft2.degF)";
  case DIMENSION_FLUX: return "Btu/(h.ft2)";
  case DIMENSION_GENERATION: return "Btu/(h.ft3)";
  case DIMENSION_ENERGY: return "Btu";
  case DIMENSION_ENERGY_PER_LENGTH: return "Btu/ft";
  case DIMENSION_ENERGY_PER_AREA: return "Btu/ft2";
  case DIMENSION_POWER: return "Btu/h";
  case DIMENSION_POWER_PER_LENGTH: return "Btu/(h.ft)";
  case DIMENSION_STRESS: return "ksi";
  default: return NULL;
  }
}

static int index_of(const out_unit *list, int count, const char *label) {
  for (int i = 0; i < count; i++)
    if (!strcmp(list[i].label, label)) return i;
  return -1;
}

int output_units_set(output_units *u, const char *dimension_text, const char *label) {
  if (!strcmp(dimension_text, "temperature")) {
    for (int i = 0; i < 3; i++)
      if (!strcmp(temperatures[i], label)) {
        u->temperature = (temperature_unit)i;
        return 0;
      }
    return -1;
  }
  bool length = !strcmp(dimension_text, "length");
  if (!length && strcmp(dimension_text, "time")) return -1;
  int i = length ? index_of(lengths, COUNT_OF(lengths), label)
                 : index_of(times, COUNT_OF(times), label);
  if (i < 0) return -1;
  if (length)
    u->length = i;
  else
    u->time = i;
  return 0;
}

const char *quantity_label(dimension d, const output_units *u) {
  bool fahrenheit = u->temperature == OUT_FAHRENHEIT;
  switch (d) {
  case DIMENSION_LENGTH: return lengths[u->length].label;
  case DIMENSION_TIME: return times[u->time].label;
  case DIMENSION_TEMPERATURE: return temperatures[u->temperature];
  case DIMENSION_DIFFERENCE: return fahrenheit ? "degF" : "K";
  case DIMENSION_RATE: return fahrenheit ? "degF/s" : "K/s";
  case DIMENSION_EXPANSION: return fahrenheit ? "1/degF" : "1/K";
  case DIMENSION_MATURITY: return fahrenheit ? "degF.h" : "degC.h";
  default: return u->us && us_label(d) ? us_label(d) : dimension_unit(d);
  }
}

double quantity_out_difference(double value, dimension d, const output_units *u) {
  double one;
  switch (d) {
  case DIMENSION_LENGTH: return value / lengths[u->length].factor;
  case DIMENSION_TIME: return value / times[u->time].factor;
  case DIMENSION_TEMPERATURE:
  case DIMENSION_DIFFERENCE:
  case DIMENSION_RATE:
  case DIMENSION_MATURITY: return u->temperature == OUT_FAHRENHEIT ? value * 9 / 5 : value;
  case DIMENSION_EXPANSION: return u->temperature == OUT_FAHRENHEIT ? value * 5 / 9 : value;
  default: break;
  }
  if (!u->us || !us_label(d) || quantity_in_unit(1, us_label(d), d, &one) != UNIT_OK) return value;
  return value / one;
}

double quantity_out(double value, dimension d, const output_units *u) {
  if (d != DIMENSION_TEMPERATURE) return quantity_out_difference(value, d, u);
  if (u->temperature == OUT_KELVIN) return value;
  double celsius = value - ZERO_CELSIUS;
  return u->temperature == OUT_FAHRENHEIT ? celsius * 9 / 5 + 32 : celsius;
}
