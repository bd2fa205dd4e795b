/* Units at the border: what is read, what is refused with which hint, what is told. Conversion
   factors: NIST SP 811 (2008), appendix B.8; temperature scales: BIPM, The SI Brochure, 9th
   edition. */
#include "units.h"

#include <criterion/criterion.h>
#include <math.h>
#include <string.h>

typedef struct reading {
  const char *text;
  dimension dimension;
  double value;
} reading;

static void expect_reading(const reading *r) {
  double value = NAN;
  char hint[160];
  unit_outcome outcome = quantity_read(r->text, r->dimension, &value, hint, sizeof hint);
  cr_expect_eq(outcome, UNIT_OK, "\"%s\" as %s: outcome %d, %s", r->text,
               dimension_name(r->dimension), outcome, hint);
  cr_expect(fabs(value - r->value) <= 1e-12 * fabs(r->value) + 1e-300,
            "\"%s\" as %s gives %.17g, not %.17g", r->text, dimension_name(r->dimension), value,
            r->value);
}

static void expect_readings(const reading *r, int count) {
  for (int i = 0; i < count; i++) expect_reading(&r[i]);
}

Test(units, reads_temperatures_and_their_differences) {
  static const reading rows[] = {{"880 degC", DIMENSION_TEMPERATURE, 1153.15},
                                 {"880 \302\260C", DIMENSION_TEMPERATURE, 1153.15},
                                 {"880 Cel", DIMENSION_TEMPERATURE, 1153.15},
                                 {"880", DIMENSION_TEMPERATURE, 1153.15},
                                 {"300 K", DIMENSION_TEMPERATURE, 300},
                                 {"1650 degF", DIMENSION_TEMPERATURE, (1650 - 32) / 1.8 + 273.15},
                                 {"-40 [degF]", DIMENSION_TEMPERATURE, 233.15},
                                 {"-40 \302\260F", DIMENSION_TEMPERATURE, 233.15},
                                 {"25 degC", DIMENSION_DIFFERENCE, 25},
                                 {"25 K", DIMENSION_DIFFERENCE, 25},
                                 {"9 degF", DIMENSION_DIFFERENCE, 5},
                                 {"250 K/h", DIMENSION_RATE, 250 / 3600.},
                                 {"3 K/min", DIMENSION_RATE, 0.05},
                                 {"360 degF/h", DIMENSION_RATE, 200 / 3600.},
                                 {"240 degC/h", DIMENSION_RATE, 240 / 3600.},
                                 {"1.2e-5 1/K", DIMENSION_EXPANSION, 1.2e-5},
                                 {"6.5e-6 1/degF", DIMENSION_EXPANSION, 11.7e-6}};
  expect_readings(rows, COUNT_OF(rows));
}

Test(units, reads_lengths_times_and_plain_numbers) {
  static const reading rows[] = {
      {"25 mm", DIMENSION_LENGTH, 0.025},    {"2.5 cm", DIMENSION_LENGTH, 0.025},
      {"1 in", DIMENSION_LENGTH, 0.0254},    {"1 [in_i]", DIMENSION_LENGTH, 0.0254},
      {"2 ft", DIMENSION_LENGTH, 0.6096},    {"1.5 m", DIMENSION_LENGTH, 1.5},
      {"35 min", DIMENSION_TIME, 2100},      {"3.5 h", DIMENSION_TIME, 12600},
      {"2 d", DIMENSION_TIME, 172800},       {"90 s", DIMENSION_TIME, 90},
      {"9 m/h", DIMENSION_SPEED, 0.0025},    {"0.6 m/min", DIMENSION_SPEED, 0.01},
      {"80 %", DIMENSION_NUMBER, 0.8},       {"0.8", DIMENSION_NUMBER, 0.8},
      {"180 deg", DIMENSION_ANGLE, M_PI},    {"1.5 rad", DIMENSION_ANGLE, 1.5},
      {"0.1 1/s", DIMENSION_FREQUENCY, 0.1}, {"6 1/min", DIMENSION_FREQUENCY, 0.1}};
  expect_readings(rows, COUNT_OF(rows));
}

Test(units, reads_heat_in_both_systems) {
  static const reading rows[] = {
      {"45 W/(m.K)", DIMENSION_CONDUCTIVITY, 45},
      {"45 W/m/K", DIMENSION_CONDUCTIVITY, 45},
      {"1 Btu/(h.ft.degF)", DIMENSION_CONDUCTIVITY, 1.730734666371391}, /* SP 811: 1.730 735 */
      {"1 Btu/(h.ft2.degF)", DIMENSION_COEFFICIENT, 5.678263341113488}, /* SP 811: 5.678 263 */
      {"25 W/(m2.K)", DIMENSION_COEFFICIENT, 25},
      {"0.025 kW/(m2.K)", DIMENSION_COEFFICIENT, 25},
      {"7850 kg/m3", DIMENSION_DENSITY, 7850},
      {"1 lb/ft3", DIMENSION_DENSITY, 0.45359237 / (0.3048 * 0.3048 * 0.3048)},
      {"0.5 kJ/(kg.K)", DIMENSION_SPECIFIC_HEAT, 500},
      {"1 Btu/(lb.degF)", DIMENSION_SPECIFIC_HEAT, 4186.8}, /* SP 811: 4186.8 exactly (IT) */
      {"270 kJ/kg", DIMENSION_ENTHALPY, 270e3},
      {"1 Btu/lb", DIMENSION_ENTHALPY, 2326}, /* SP 811: 2326 exactly (IT) */
      {"20 kW/m2", DIMENSION_FLUX, 20e3},
      {"1 kW/m3", DIMENSION_GENERATION, 1e3},
      {"0.002 m2.K/W", DIMENSION_RESISTANCE, 0.002},
      {"1 h.ft2.degF/Btu", DIMENSION_RESISTANCE, 1 / 5.678263341113488},
      {"210 GPa", DIMENSION_STRESS, 210e9},
      {"450 MPa", DIMENSION_STRESS, 450e6},
      {"1 ksi", DIMENSION_STRESS, 6894757.293168}, /* SP 811: 6.894 757 E+06 */
      {"1 psi", DIMENSION_STRESS, 6894.757293168},
      {"240 kJ/mol", DIMENSION_ACTIVATION_ENERGY, 240e3},
      {"5 kW", DIMENSION_POWER, 5e3},
      {"5040 degC.h", DIMENSION_MATURITY, 5040}};
  for (int i = 0; i < COUNT_OF(rows); i++) {
    double value = NAN;
    cr_expect_eq(quantity_read(rows[i].text, rows[i].dimension, &value, NULL, 0), UNIT_OK, "%s",
                 rows[i].text);
    cr_expect(fabs(value - rows[i].value) <= 1e-9 * fabs(rows[i].value),
              "\"%s\" gives %.12g, not %.12g", rows[i].text, value, rows[i].value);
  }
}

static void expect_refusal(const char *text, dimension d, unit_outcome outcome,
                           const char *hinted) {
  double value = 42;
  char hint[160] = "untouched";
  unit_outcome got = quantity_read(text, d, &value, hint, sizeof hint);
  cr_expect_eq(got, outcome, "\"%s\" as %s: outcome %d, not %d", text, dimension_name(d), got,
               outcome);
  cr_expect_eq(value, 42, "\"%s\" must leave the value alone", text);
  cr_expect(!hinted || strstr(hint, hinted), "\"%s\": hint \"%s\" does not tell of \"%s\"", text,
            hint, hinted);
}

Test(units, refuses_the_wrong_dimension_with_a_hint) {
  expect_refusal("1650 F", DIMENSION_TEMPERATURE, UNIT_UNKNOWN, "degF");
  expect_refusal("860 C", DIMENSION_TEMPERATURE, UNIT_UNKNOWN, "degC");
  expect_refusal("35 minutes", DIMENSION_TIME, UNIT_UNKNOWN, "min");
  expect_refusal("25 mm", DIMENSION_TIME, UNIT_WRONG_DIMENSION, "min");
  expect_refusal("3 kg", DIMENSION_LENGTH, UNIT_WRONG_DIMENSION, "mm");
  expect_refusal("25 W/(m2.K)", DIMENSION_CONDUCTIVITY, UNIT_WRONG_DIMENSION, "W/(m.K)");
  expect_refusal("5 %", DIMENSION_TEMPERATURE, UNIT_WRONG_DIMENSION, NULL);
  expect_refusal("5 %", DIMENSION_DIFFERENCE, UNIT_WRONG_DIMENSION, NULL);
  expect_refusal("250 K/h", DIMENSION_TEMPERATURE, UNIT_WRONG_DIMENSION, NULL);
}

Test(units, refuses_what_is_no_quantity) {
  static const char *const texts[] = {"",          " ",       "mm",    "abc",    "NaN", "inf",
                                      "-infinity", "0x10 mm", "1e999", "--3 mm", "."};
  for (int i = 0; i < COUNT_OF(texts); i++) {
    double value = 42;
    unit_outcome outcome = quantity_read(texts[i], DIMENSION_LENGTH, &value, NULL, 0);
    cr_expect(outcome != UNIT_OK && value == 42, "\"%s\" was read as %g", texts[i], value);
  }
}

Test(units, refuses_a_second_number_where_a_unit_should_stand) {
  static const char *const texts[] = {
      "5 10",       "5 10 mm",     "1,5 mm",     "3 mm 4",    "3 (mm", "3 mm)",   "3 m/",
      "5 m7933879", "3 (m16)16.m", "3 ((m9)9)9", "1e300 km9", "3 /m",  "2 ((m))("};
  for (int i = 0; i < COUNT_OF(texts); i++) {
    double value = 42;
    cr_expect(quantity_read(texts[i], DIMENSION_LENGTH, &value, NULL, 0) != UNIT_OK,
              "\"%s\" was read as %g", texts[i], value);
    cr_expect(quantity_read(texts[i], DIMENSION_NUMBER, &value, NULL, 0) != UNIT_OK,
              "\"%s\" was read as %g", texts[i], value);
  }
}

Test(units, has_a_default_unit_that_it_reads_itself) {
  for (int d = DIMENSION_LENGTH; d < DIMENSION_ANY; d++) {
    double value = NAN;
    cr_expect_eq(quantity_in_unit(3, dimension_unit((dimension)d), (dimension)d, &value), UNIT_OK,
                 "%s", dimension_name((dimension)d));
    cr_expect_float_eq(value, quantity_from_default(3, (dimension)d), 1e-12, "%s",
                       dimension_name((dimension)d));
  }
}

/* Every quantity that goes out can be read back in. */
static void expect_round_trip(const output_units *u) {
  for (int d = DIMENSION_LENGTH; d < DIMENSION_ANY; d++) {
    double back = NAN, told = quantity_out(321.5, (dimension)d, u);
    const char *label = quantity_label((dimension)d, u);
    cr_expect_eq(quantity_in_unit(told, label, (dimension)d, &back), UNIT_OK, "%s in %s",
                 dimension_name((dimension)d), label);
    cr_expect_float_eq(back, 321.5, 1e-9, "%s: %g %s is %g", dimension_name((dimension)d), told,
                       label, back);
  }
}

Test(units, tells_what_it_can_read_back) {
  output_units si = {0}, us = {.temperature = OUT_FAHRENHEIT, .us = true},
               kelvin = {.temperature = OUT_KELVIN};
  cr_assert_eq(output_units_set(&us, "length", "in"), 0);
  cr_assert_eq(output_units_set(&us, "time", "min"), 0);
  expect_round_trip(&si);
  expect_round_trip(&us);
  expect_round_trip(&kelvin);
}

Test(units, tells_a_difference_without_the_offset) {
  output_units us = {.temperature = OUT_FAHRENHEIT}, si = {0};
  cr_expect_float_eq(quantity_out(300, DIMENSION_TEMPERATURE, &si), 26.85, 1e-9);
  cr_expect_float_eq(quantity_out(300, DIMENSION_TEMPERATURE, &us), 80.33, 1e-9);
  cr_expect_float_eq(quantity_out_difference(5, DIMENSION_TEMPERATURE, &us), 9, 1e-12);
  cr_expect_float_eq(quantity_out(5, DIMENSION_DIFFERENCE, &us), 9, 1e-12);
}

Test(units, takes_only_units_that_fit) {
  output_units u = {0};
  cr_expect_eq(output_units_set(&u, "temperature", "K"), 0);
  cr_expect_eq(output_units_set(&u, "length", "mm"), 0);
  cr_expect_eq(output_units_set(&u, "time", "h"), 0);
  cr_expect_eq(output_units_set(&u, "temperature", "mm"), -1);
  cr_expect_eq(output_units_set(&u, "length", "h"), -1);
  cr_expect_eq(output_units_set(&u, "mass", "kg"), -1);
  cr_expect_str_eq(quantity_label(DIMENSION_TEMPERATURE, &u), "K");
  cr_expect_str_eq(quantity_label(DIMENSION_LENGTH, &u), "mm");
  cr_expect_str_eq(quantity_label(DIMENSION_TIME, &u), "h");
}
