/* materials: the library against other printed sources, and rules that hold for every file. */
#include "library.h"
#include "limit.h"
#include "physics.h"

#include <criterion/criterion.h>
#include <ctype.h>
#include <math.h>
#include <string.h>

typedef enum quantity { K, RHO, C, ALPHA, RHO_C } quantity;

typedef struct published {
  const char *material;
  quantity quantity;
  double at;    /* degC */
  double value; /* W/(m.K), kg/m3, J/(kg.K), m2/s, J/(m3.K) */
  double
      tolerance; /* relative: rounding of the printed figure, or how far two good tables differ */
} published;

/* EN 1993-1-2:2005, 3.4.1.2 and 3.4.1.3, worked out by hand from the formulas. */
static const published steel_of_the_fire_code[] = {
    {"carbon_steel", C, 20, 439.80176, 1e-6},   {"carbon_steel", C, 300, 564.74, 1e-6},
    {"carbon_steel", C, 600, 760.21739, 1e-6},  {"carbon_steel", C, 700, 1008.15789, 1e-6},
    {"carbon_steel", C, 735, 5000, 1e-6},       {"carbon_steel", C, 800, 803.26087, 1e-6},
    {"carbon_steel", C, 1000, 650, 1e-6},       {"carbon_steel", K, 20, 53.334, 1e-6},
    {"carbon_steel", K, 300, 44.01, 1e-6},      {"carbon_steel", K, 600, 34.02, 1e-6},
    {"carbon_steel", K, 700, 30.69, 1e-6},      {"carbon_steel", K, 735, 29.5245, 1e-6},
    {"carbon_steel", K, 800, 27.3, 1e-6},       {"carbon_steel", K, 1000, 27.3, 1e-6},
    {"stainless_steel", C, 600, 542.184, 1e-6}, {"stainless_steel", K, 1000, 27.3, 1e-6},
    {"aluminium_6000", K, 500, 225, 1e-6},      {"aluminium_6000", C, 500, 1108, 1e-6},
    {"aluminium_5000", K, 300, 170, 1e-6},      {"aluminium_5000", RHO, 300, 2700, 1e-6},
};

/* EN 1992-1-2:2004, 3.3.2 and 3.3.3; EN 1994-1-2:2005, 3.3.3; EN 1995-1-2:2004, Annex B: by hand.
 */
static const published other_fire_codes[] = {
    {"concrete_lower_0", K, 1200, 0.5488, 1e-6},
    {"concrete_upper_0", K, 1000, 0.619, 1e-6},
    {"concrete_lower_1_5", C, 107, 1470, 1e-6},
    {"concrete_lower_3", C, 107, 2020, 1e-6},
    {"concrete_lower_0", C, 107, 907, 1e-6},
    {"concrete_upper_1_5", C, 300, 1050, 1e-6},
    {"concrete_lower_1_5", RHO, 157.5, 2277, 1e-6},
    {"concrete_lower_1_5", RHO, 300, 2219.5, 1e-6},
    {"concrete_upper_3", RHO, 800, 2104.5, 1e-6},
    {"concrete_lightweight", K, 400, 0.75, 1e-6},
    {"concrete_lightweight", K, 1000, 0.5, 1e-6},
    {"timber", K, 350, 0.07, 1e-6},
    {"timber", C, 110, 13547.619, 1e-6},
    {"timber", RHO, 350, 0.52 * 375, 1e-6},
};

/* Thermal diffusivity at 300 K as printed in Bergman, Lavine, Incropera, DeWitt, Fundamentals of
   Heat and Mass Transfer, 7th ed., Tables A.1 and A.2 (alpha column, from memory): guards k,
   density and c together. */
static const published printed_diffusivity[] = {
    {"aluminium", ALPHA, 26.85, 97.1e-6, 0.006},
    {"copper", ALPHA, 26.85, 117e-6, 0.006},
    {"iron", ALPHA, 26.85, 23.1e-6, 0.02},
    {"nickel", ALPHA, 26.85, 23.0e-6, 0.006},
    {"titanium", ALPHA, 26.85, 9.32e-6, 0.006},
    {"tungsten", ALPHA, 26.85, 68.3e-6, 0.006},
    {"molybdenum", ALPHA, 26.85, 53.7e-6, 0.006},
    {"tantalum", ALPHA, 26.85, 24.7e-6, 0.006},
    {"platinum", ALPHA, 26.85, 25.1e-6, 0.006},
    {"silver", ALPHA, 26.85, 174e-6, 0.006},
    {"gold", ALPHA, 26.85, 127e-6, 0.006},
    {"zinc", ALPHA, 26.85, 41.8e-6, 0.006},
    {"lead", ALPHA, 26.85, 24.1e-6, 0.006},
    {"tin", ALPHA, 26.85, 40.1e-6, 0.006},
    {"magnesium", ALPHA, 26.85, 87.6e-6, 0.006},
    {"brass", ALPHA, 26.85, 33.9e-6, 0.006},
    {"aluminium_bronze", ALPHA, 26.85, 14e-6, 0.02},
    {"aluminium_2024", ALPHA, 26.85, 73.0e-6, 0.006},
    {"nichrome", ALPHA, 26.85, 3.4e-6, 0.02},
    {"alloy_x750", ALPHA, 26.85, 3.1e-6, 0.02},
    {"stainless_304", ALPHA, 26.85, 3.95e-6, 0.006},
    {"stainless_316", ALPHA, 26.85, 3.48e-6, 0.006},
    {"carbon_steel_1010", ALPHA, 26.85, 18.8e-6, 0.006},
    {"low_alloy_steel_1cr_mo", ALPHA, 26.85, 12.2e-6, 0.006},
    {"alumina", ALPHA, 26.85, 11.9e-6, 0.006},
    {"fused_silica", ALPHA, 26.85, 0.834e-6, 0.006},
};

/* Molar heat capacities at 25 degC, CRC Handbook of Chemistry and Physics, standard thermodynamic
   properties (from memory), over the atomic masses of the same book. Good tables agree within 1.5
   %. */
static const published heat_capacity_of_elements[] = {
    {"aluminium", C, 25, 24.20 / 0.026982, 0.015}, {"copper", C, 25, 24.44 / 0.063546, 0.015},
    {"iron", C, 25, 25.10 / 0.055845, 0.015},      {"nickel", C, 25, 26.07 / 0.058693, 0.015},
    {"titanium", C, 25, 25.06 / 0.047867, 0.015},  {"tungsten", C, 25, 24.27 / 0.18384, 0.015},
    {"molybdenum", C, 25, 24.06 / 0.09595, 0.015}, {"tantalum", C, 25, 25.36 / 0.18095, 0.015},
    {"platinum", C, 25, 25.86 / 0.195084, 0.015},  {"silver", C, 25, 25.35 / 0.107868, 0.015},
    {"gold", C, 25, 25.42 / 0.196967, 0.015},      {"zinc", C, 25, 25.39 / 0.06538, 0.015},
    {"lead", C, 25, 26.84 / 0.2072, 0.015},        {"tin", C, 25, 27.11 / 0.11871, 0.015},
    {"magnesium", C, 25, 24.87 / 0.024305, 0.015},
};

/* Holman, Heat Transfer, 8th ed., Tables A-2 and A-3 (copper and brass read in print, the rest from
   memory). Metals of other purity differ by some per cent; the bricks are the same measurements to
   one more digit. */
static const published second_textbook[] = {
    {"copper", K, 100, 379, 0.05},
    {"copper", K, 300, 369, 0.04},
    {"copper", K, 600, 353, 0.04},
    {"brass", K, 20, 111, 0.03},
    {"brass", K, 100, 128, 0.03},
    {"brass", K, 200, 144, 0.03},
    {"lead", K, 100, 33.4, 0.04},
    {"lead", K, 300, 29.8, 0.07},
    {"zinc", K, 100, 109, 0.04},
    {"zinc", K, 300, 100, 0.06},
    {"fireclay_brick", K, 500, 1.04, 0.05},
    {"fireclay_brick", K, 800, 1.07, 0.05},
    {"fireclay_brick", K, 1100, 1.09, 0.05},
    {"fireclay_brick", RHO, 500, 2000, 0.03},
    {"fireclay_brick_dense", K, 600, 1.47, 0.05},
    {"fireclay_brick_dense", K, 200, 1.00, 0.05},
    {"magnesite_brick", K, 200, 3.81, 0.05},
    {"magnesite_brick", K, 650, 2.77, 0.05},
    {"magnesite_brick", K, 1200, 1.90, 0.05},
    {"chrome_brick", K, 200, 2.32, 0.05},
    {"chrome_brick", K, 550, 2.47, 0.05},
    {"chrome_brick", RHO, 550, 3000, 0.01},
};

/* Callister, Rethwisch, Fundamentals of Materials Science and Engineering, 3rd ed., Table B.8,
   specific heat at room temperature. */
static const published third_textbook[] = {
    {"fused_silica", C, 25, 740, 0.02},
    {"alumina", C, 25, 775, 0.02},
    {"borosilicate_glass", C, 25, 850, 0.03},
    {"tantalum", C, 25, 139, 0.02},
    {"tungsten", C, 25, 138, 0.06},
    {"nickel", C, 25, 456, 0.04},
    {"lead", C, 25, 129, 0.02},
    {"tin", C, 25, 222, 0.04},
    {"zinc", C, 25, 395, 0.03},
    {"alloy_625", C, 25, 410, 0.01},
    {"polyamide", C, 25, 1670, 0.06},
};

/* ASM Metals Handbook, 10th ed., vol. 1, wrought stainless steels: 16.2 W/(m.K) at 100 degC, 21.5
   at 500 degC for 18-8 steels (from memory); Hildenwall's heat capacities per volume (from memory);
   IAPWS and CRC values of water and ice (from memory); Bergman et al., Table A.3, ceramic fibre
   blanket of 128 kg/m3 (from memory; another maker); Perry's silicon carbide in its own unit (from
   memory). */
static const published other_sources[] = {
    {"stainless_304", K, 100, 16.2, 0.02},
    {"stainless_304", K, 500, 21.5, 0.04},
    {"stainless_steel", K, 100, 16.2, 0.03},
    {"stainless_steel", K, 500, 21.5, 0.03},
    {"austenite", RHO_C, 0, 4.15e6, 0.001},
    {"austenite", RHO_C, 300, 4.40e6, 0.001},
    {"austenite", RHO_C, 900, 4.90e6, 0.001},
    {"ferrite_pearlite", RHO_C, 600, 5.09e6, 0.001},
    {"martensite", RHO_C, 600, 5.07e6, 0.001},
    {"water_ice", K, 25, 0.6065, 0.03},
    {"water_ice", K, 60, 0.651, 0.02},
    {"water_ice", C, 25, 4180, 0.005},
    {"water_ice", RHO, 20, 998.2, 0.003},
    {"ceramic_fibre", K, 372, 0.068, 0.15},
    {"ceramic_fibre", K, 477, 0.091, 0.08},
    {"titanium_6al_4v", RHO, 20, 4430, 0.005},
    {"silicon_carbide_brick", K, 600, 10.7 * 1.7307, 0.005},
    {"silicon_carbide_brick", K, 1000, 8.0 * 1.7307, 0.005},
    {"alloy_600", RHO, 20, 8470, 1e-6},
    {"alloy_625", K, 760, 20.8, 1e-6},
};

/* Heat content between two temperatures, J/kg. */
typedef struct heat_content {
  const char *material;
  double from, to; /* degC */
  double value, tolerance;
  const char *source;
} heat_content;

static const heat_content heat_contents[] = {
    {"carbon_steel", 25, 860, 0.603e6, 0.001, "EN 1993-1-2 curve, general-purpose integrator"},
    {"carbon_steel", 25, 1250, 0.857e6, 0.001, "EN 1993-1-2 curve, general-purpose integrator"},
    {"grey_cast_iron", 20, 200, 460 * 180, 1e-6, "EN 1561:2011, Annex A, printed mean"},
    {"grey_cast_iron", 20, 600, 535 * 580, 1e-6, "EN 1561:2011, Annex A, printed mean"},
    {"water_ice", -1, 1, 333.6e3 + 2000 * 0.917 + 4190, 0.001, "CRC Handbook, heat of fusion"},
    {"aluminium", 25, 661, 28.76e3 / 0.026982, 0.04,
     "NIST-JANAF, enthalpy of the melt at 933 K, from memory"},
    {"copper", 25, 1085, 43.0e3 / 0.063546, 0.05,
     "NIST-JANAF, enthalpy of the melt at 1358 K, from memory"},
    {"lead", 300, 340, 141.34 * 26.85 + 142 * 0.61 + 23.0e3 + 152 * 12.54, 0.001,
     "CRC Handbook, heat of fusion; the rest by hand"},
};

static library *open_library(void) {
  fault_list faults;
  faults_init(&faults);
  library *l = library_open(&faults);
  for (int i = 0; i < faults.count; i++)
    cr_log_error("%s: %s (%s)", faults.items[i].at, faults.items[i].is,
                 faults.items[i].got ? faults.items[i].got : "");
  faults_free(&faults);
  cr_assert_not_null(l);
  return l;
}

static double value_of(const material *m, quantity q, double celsius) {
  double kelvin = celsius + ZERO_CELSIUS;
  double k = curve_value(&m->conductivity, kelvin);
  double rho = curve_value(&m->density, kelvin);
  double c = curve_value(&m->specific_heat, kelvin);
  switch (q) {
  case K: return k;
  case RHO: return rho;
  case C: return c;
  case ALPHA: return k / (rho * c);
  case RHO_C: return rho * c;
  }
  return NAN;
}

static int check_rows(const library *l, const published *rows, int count, const char *set) {
  for (int i = 0; i < count; i++) {
    const published *p = &rows[i];
    const material *m = library_find(l, p->material);
    cr_expect_not_null(m, "%s: no material %s", set, p->material);
    if (!m) continue;
    double got = value_of(m, p->quantity, p->at);
    cr_expect(fabs(got - p->value) <= p->tolerance * p->value,
              "%s: %s, quantity %d at %g degC: %.7g, published %.7g", set, p->material,
              (int)p->quantity, p->at, got, p->value);
  }
  return count;
}

#define CHECK(rows) check_rows(l, rows, COUNT_OF(rows), #rows)

Test(materials, agree_with_published_values) {
  library *l = open_library();
  int rows = CHECK(steel_of_the_fire_code) + CHECK(other_fire_codes) + CHECK(printed_diffusivity) +
             CHECK(heat_capacity_of_elements) + CHECK(second_textbook) + CHECK(third_textbook) +
             CHECK(other_sources);
  cr_expect_geq(rows, 60);
  library_free(l);
}

Test(materials, heat_content_agrees_with_published_values) {
  library *l = open_library();
  for (int i = 0; i < COUNT_OF(heat_contents); i++) {
    const heat_content *h = &heat_contents[i];
    const material *m = library_find(l, h->material);
    cr_assert_not_null(m, "%s", h->material);
    double density = curve_value(&m->density, h->to + ZERO_CELSIUS);
    double got = material_heat(m, h->from + ZERO_CELSIUS, h->to + ZERO_CELSIUS) / density;
    cr_expect(fabs(got - h->value) <= h->tolerance * h->value,
              "%s from %g to %g degC: %.6g J/kg, published %.6g (%s)", h->material, h->from, h->to,
              got, h->value, h->source);
  }
  library_free(l);
}

Test(materials, there_are_at_least_forty_each_with_its_source) {
  library *l = open_library();
  cr_expect_geq(library_count(l), 40);
  for (int i = 0; i < library_count(l); i++) {
    const material *m = library_at(l, i);
    cr_expect(m->title && *m->title, "%s has no title", m->name);
    cr_expect(m->source && strlen(m->source) > 12, "%s has no source", m->name);
    cr_expect(m->revision && *m->revision, "%s has no revision", m->name);
    cr_expect_not_null(library_text(l, m->name), "%s has no text", m->name);
  }
  library_free(l);
}

static bool name_is_valid(const char *name) {
  if (!islower((unsigned char)name[0]) || strlen(name) > LIMIT_NAME) return false;
  for (const char *c = name; *c; c++)
    if (!islower((unsigned char)*c) && !isdigit((unsigned char)*c) && *c != '_') return false;
  return true;
}

Test(materials, names_are_valid_sorted_and_found) {
  library *l = open_library();
  const char *const *names = library_names(l);
  int count = library_count(l);
  for (int i = 0; i < count; i++) {
    cr_expect(name_is_valid(names[i]), "%s", names[i]);
    cr_expect_eq(library_find(l, names[i]), library_at(l, i), "%s", names[i]);
    cr_expect_str_eq(library_at(l, i)->name, names[i]);
    if (i) cr_expect_lt(strcmp(names[i - 1], names[i]), 0, "%s", names[i]);
  }
  cr_expect_null(names[count]);
  cr_expect_null(library_find(l, "unobtainium"));
  library_free(l);
}

enum { SAMPLES = 2000 };

static double sample_temperature(const material *m, int i) {
  return m->valid_from + (m->valid_to - m->valid_from) * i / SAMPLES;
}

Test(materials, properties_are_positive_and_finite_over_the_valid_range) {
  library *l = open_library();
  for (int n = 0; n < library_count(l); n++) {
    const material *m = library_at(l, n);
    cr_assert(isfinite(m->valid_from) && isfinite(m->valid_to) && m->valid_from < m->valid_to, "%s",
              m->name);
    for (int i = 0; i <= SAMPLES; i++) {
      double celsius = sample_temperature(m, i) - ZERO_CELSIUS;
      for (quantity q = K; q <= C; q++) {
        double v = value_of(m, q, celsius);
        cr_assert(isfinite(v) && v > 0, "%s, quantity %d at %g degC: %g", m->name, (int)q, celsius,
                  v);
      }
    }
  }
  library_free(l);
}

/* Widest and narrowest that any solid or liquid of a plant has: iridium-like densities, silver, and
 * fibre. */
Test(materials, properties_are_of_the_size_that_such_matter_has) {
  library *l = open_library();
  for (int n = 0; n < library_count(l); n++) {
    const material *m = library_at(l, n);
    double k = value_of(m, K, 25), rho = value_of(m, RHO, 25), c = value_of(m, C, 25);
    cr_expect(k > 0.02 && k < 450, "%s: %g W/(m.K)", m->name, k);
    cr_expect(rho > 20 && rho < 22700, "%s: %g kg/m3", m->name, rho);
    cr_expect(c > 100 && c < 4300, "%s: %g J/(kg.K)", m->name, c);
    cr_expect_eq(!!(m->traits & MATERIAL_METAL),
                 k > 5 && rho > 1700 && strcmp(m->name, "alumina") &&
                     strcmp(m->name, "silicon_carbide_brick"),
                 "%s", m->name);
  }
  library_free(l);
}

Test(materials, latent_heat_lies_in_the_valid_range_and_melting_has_one) {
  library *l = open_library();
  for (int n = 0; n < library_count(l); n++) {
    const material *m = library_at(l, n);
    if (m->traits & MATERIAL_MELTS) cr_expect_gt(m->latent.count, 0, "%s", m->name);
    for (int i = 0; i < m->latent.count; i++) {
      const latent_heat *h = &m->latent.items[i];
      cr_expect(h->heat > 0 && h->from <= h->to, "%s", m->name);
      cr_expect(h->from > m->valid_from && h->to < m->valid_to, "%s", m->name);
    }
  }
  library_free(l);
}

Test(materials, only_steels_with_a_transformation_peak_are_for_heating_only) {
  static const char *const expected[] = {"carbon_steel", "carbon_steel_1010",
                                         "low_alloy_steel_1cr_mo"};
  library *l = open_library();
  int found = 0;
  for (int n = 0; n < library_count(l); n++) {
    const material *m = library_at(l, n);
    if (!(m->traits & MATERIAL_HEATING_ONLY)) continue;
    bool is_expected = false;
    for (int i = 0; i < COUNT_OF(expected); i++) is_expected |= !strcmp(expected[i], m->name);
    cr_expect(is_expected, "%s", m->name);
    cr_expect_gt(value_of(m, C, 727), 1.9 * value_of(m, C, 25), "%s has no peak", m->name);
    found++;
  }
  cr_expect_eq(found, COUNT_OF(expected));
  cr_expect_not(library_find(l, "austenite")->traits & MATERIAL_HEATING_ONLY);
  library_free(l);
}

static bool alike(const material *a, const material *b) {
  for (double t = -50; t <= 1200; t += 12.5)
    for (quantity q = K; q <= C; q++)
      if (value_of(a, q, t) != value_of(b, q, t)) return false;
  return a->latent.count == b->latent.count;
}

Test(materials, no_two_are_equal) {
  library *l = open_library();
  for (int i = 0; i < library_count(l); i++)
    for (int j = i + 1; j < library_count(l); j++) {
      const material *a = library_at(l, i), *b = library_at(l, j);
      cr_expect_not(alike(a, b), "%s and %s have the same properties", a->name, b->name);
      cr_expect_str_neq(a->title, b->title);
    }
  library_free(l);
}

/* The solver's table of every material over its whole range gives the temperature back from the
 * enthalpy. */
Test(materials, every_one_can_be_tabulated) {
  library *l = open_library();
  for (int n = 0; n < library_count(l); n++) {
    const material *m = library_at(l, n);
    arena memory;
    arena_init(&memory, 0);
    property p;
    fault f;
    cr_assert_eq(property_build(&p, m, m->valid_from, m->valid_to, 512, &memory, &f), STATUS_OK,
                 "%s: %s", m->name, f.is);
    for (int i = 1; i < 100; i++) {
      double t = sample_temperature(m, i * SAMPLES / 100), slope;
      double back = property_temperature(&p, property_enthalpy(&p, t), &slope);
      cr_expect_float_eq(back, t, 0.05, "%s at %g K: %g K", m->name, t, back);
    }
    arena_free(&memory);
  }
  library_free(l);
}
