/* property: curves, heat content and the fast tables against closed forms, direct quadrature and
   the carbon steel of EN 1993-1-2:2005. */
#include "property.h"

#include "make_case.h"

#include <criterion/criterion.h>
#include <math.h>

#define ZERO 273.15

static made m;
static arena memory;
static property fast;

static void fresh(void) {
  make_case(&m, "plate");
  arena_init(&memory, 0);
}

static void done(void) {
  arena_free(&memory);
}

TestSuite(property, .init = fresh, .fini = done);

static void build(int of_material, double from, double to, int intervals) {
  fault f;
  status s = property_build(&fast, &m.material[of_material], from, to, intervals, &memory, &f);
  cr_assert_eq(s, STATUS_OK, "%s", s ? f.is : "");
}

/* Composite Simpson, one of the rules of Abramowitz & Stegun, 25.4.6: not the rule that the tables
   are made by. Within (a, b) the integrand must be smooth. */
static double simpson(double (*f)(const material *, double), const material *a, double from,
                      double to, int parts) {
  double h = (to - from) / (2 * parts), inside = 1e-9 * (to - from);
  double sum = f(a, from + inside) + f(a, to - inside);
  for (int i = 1; i < 2 * parts; i++) sum += (i % 2 ? 4 : 2) * f(a, from + i * h);
  return sum * h / 3;
}

static double capacity(const material *a, double t) {
  return curve_value(&a->density, t) * curve_value(&a->specific_heat, t);
}

static double conductivity(const material *a, double t) {
  return curve_value(&a->conductivity, t);
}

/* ---- curves ---- */

Test(property, a_curve_holds_its_end_values_and_jumps_upwards_at_a_jump) {
  int a = add_material(&m, 1, 1, 1);
  made_curve(&m, a, OF_CONDUCTIVITY)->count = 0;
  add_piece(&m, a, OF_CONDUCTIVITY, (piece){300, 400, {1 - 0.01 * (300 - ZERO), 0.01}, 0, 0});
  add_piece(&m, a, OF_CONDUCTIVITY, (piece){400, 500, {7}, 0, 0});
  const curve *k = made_curve(&m, a, OF_CONDUCTIVITY);
  cr_assert_float_eq(curve_value(k, 200), 1, 1e-14);
  cr_assert_float_eq(curve_value(k, 350), 1.5, 1e-14);
  cr_assert_float_eq(curve_value(k, 399.9999), 1.999999, 1e-12);
  cr_assert_eq(curve_value(k, 400), 7);
  cr_assert_eq(curve_value(k, 900), 7);
}

/* EN 1993-1-2:2005, 3.4.1.2 and 3.4.1.3: values that its figures and formulas give. */
Test(property, fire_code_steel_has_the_values_of_the_standard) {
  const material *a = &m.material[add_fire_code_steel(&m)];
  static const double at[] = {20, 100, 400, 700, 735, 800, 1000};
  static const double c[] = {439.80176, 487.62, 605.88, 1008.157895, 5000, 803.260870, 650};
  static const double k[] = {53.334, 50.67, 40.68, 30.69, 29.5245, 27.3, 27.3};
  for (int i = 0; i < 7; i++) {
    cr_assert_float_eq(curve_value(&a->specific_heat, at[i] + ZERO), c[i], 1e-5, "c(%g) = %.9g",
                       at[i], curve_value(&a->specific_heat, at[i] + ZERO));
    cr_assert_float_eq(curve_value(&a->conductivity, at[i] + ZERO), k[i], 1e-9);
  }
}

/* ---- heat content ---- */

static double steel_heat_by_hand(double to) { /* degC, from 20; J/kg, by pieces in closed form */
  double x = fmin(to, 600);
  double sum =
      425 * x + 7.73e-1 * x * x / 2 - 1.69e-3 * x * x * x / 3 + 2.22e-6 * x * x * x * x / 4;
  sum -= 425 * 20.0 + 7.73e-1 * 400 / 2 - 1.69e-3 * 8000 / 3 + 2.22e-6 * 160000 / 4;
  x = fmin(to, 735);
  if (to > 600) sum += 666 * (x - 600) + 13002 * log((738.0 - 600) / (738 - x));
  x = fmin(to, 900);
  if (to > 735) sum += 545 * (x - 735) + 17820 * log((x - 731) / (735.0 - 731));
  if (to > 900) sum += 650 * (to - 900);
  return sum;
}

Test(property, heat_of_fire_code_steel_in_closed_form) {
  const material *a = &m.material[add_fire_code_steel(&m)];
  for (double to = 60; to <= 1200; to += 19.5) {
    double exact = 7850 * steel_heat_by_hand(to);
    double heat = material_heat(a, 20 + ZERO, to + ZERO);
    /* five-point Gauss over panels of 2 K, the last one 3 K from the pole at 738 degC: 1e-9 */
    cr_assert_float_eq(heat, exact, 1e-9 * exact, "to %g: %.12g, not %.12g", to, heat, exact);
    cr_assert_float_eq(material_heat(a, to + ZERO, 20 + ZERO), -heat, 1e-15 * heat);
  }
  cr_assert_eq(material_heat(a, 300, 300), 0);
}

Test(property, heat_of_linear_density_times_linear_specific_heat) {
  int i = add_material(&m, 1, 1, 1);
  set_linear(&m, i, OF_DENSITY, 8000, -0.4);
  set_linear(&m, i, OF_SPECIFIC_HEAT, 450, 0.3);
  double a = 50, b = 900; /* degC */
  double exact = 8000 * 450 * (b - a) + (8000 * 0.3 - 0.4 * 450) * (b * b - a * a) / 2 -
                 0.4 * 0.3 * (b * b * b - a * a * a) / 3;
  cr_assert_float_eq(material_heat(&m.material[i], a + ZERO, b + ZERO), exact, 1e-14 * exact);
}

Test(property, latent_heat_is_released_evenly_or_at_one_temperature) {
  int i = add_material(&m, 1, 7000, 500);
  const material *a = &m.material[i];
  add_latent(&m, i, 270e3, 1700, 1730);
  add_latent(&m, i, 20e3, 1200, 1200);
  double sensible = 7000.0 * 500;
  cr_assert_float_eq(material_heat(a, 1700, 1710), sensible * 10 + 7000 * 90e3, 1e-4);
  cr_assert_float_eq(material_heat(a, 1600, 1800), sensible * 200 + 7000 * 270e3, 1e-4);
  cr_assert_float_eq(material_heat(a, 1100, 1200), sensible * 100 + 7000 * 20e3, 1e-4);
  cr_assert_float_eq(material_heat(a, 1200, 1300), sensible * 100, 1e-4);
  cr_assert_float_eq(material_heat(a, 1100, 1199.999), sensible * 99.999, 1e-4);
  cr_assert_float_eq(material_heat(a, 1300, 1100), -sensible * 200 - 7000 * 20e3, 1e-4);
}

/* ---- the tables ---- */

/* T at the ends of rows and between them. */
static double probe(int i, int count, double from, double to) {
  return from + (to - from) * (i + 0.37) / count;
}

/* Largest errors of T (K) and theta (W/m) against quadrature of the pieces, T from `from` to `to`.
 */
static void table_errors(const material *a, double from, double to, double *temperature,
                         double *potential) {
  enum { PROBES = 1500 };
  double heat = 0, kirchhoff = 0, before = from, slope;
  *temperature = *potential = 0;
  for (int i = 0; i < PROBES; i++) {
    double t = probe(i, PROBES, from, to);
    heat += material_heat(a, before, t);
    kirchhoff += simpson(conductivity, a, before, t, 4);
    before = t;
    *temperature = fmax(*temperature, fabs(property_temperature(&fast, heat, &slope) - t));
    *potential = fmax(*potential, fabs(property_potential(&fast, heat, &slope) - kirchhoff));
  }
}

Test(property, steel_table_agrees_with_direct_quadrature) {
  int i = add_fire_code_steel(&m);
  double temperature, potential;
  build(i, ZERO + 18, ZERO + 1000, 512);
  table_errors(&m.material[i], ZERO + 18, ZERO + 1000, &temperature, &potential);
  /* a fifth of the finest error of a solve, 1 mK; theta/k has the same unit */
  cr_assert_lt(temperature, 2e-4, "T: %g K", temperature);
  cr_assert_lt(potential, 2e-4 * 54, "theta: %g W/m", potential);
}

Test(property, a_wide_table_agrees_with_one_eight_times_finer) {
  int i = add_fire_code_steel(&m);
  property fine;
  fault f;
  build(i, 80, 2200, 512);
  cr_assert_eq(property_build(&fine, &m.material[i], 80, 2200, 4096, &memory, &f), STATUS_OK);
  /* the same quadrature, but over more panels of the same stretch */
  cr_assert_float_eq(fast.most, fine.most, 1e-12 * fine.most);
  for (int k = 0; k < 4000; k++) {
    double h = fast.most * (k + 0.5) / 4000, slope;
    double a = property_temperature(&fast, h, &slope), b = property_temperature(&fine, h, &slope);
    cr_assert_float_eq(a, b, 3e-4, "T at H %g: %g against %g", h, a, b);
    a = property_potential(&fast, h, &slope);
    b = property_potential(&fine, h, &slope);
    cr_assert_float_eq(a, b, 3e-4 * 54);
  }
}

Test(property, inverse_is_exact_to_round_off) {
  int i = add_fire_code_steel(&m);
  add_latent(&m, i, 30e3, ZERO + 850, ZERO + 852);
  build(i, ZERO - 20, ZERO + 1100, 512);
  for (int k = 0; k < 3000; k++) {
    double t = probe(k, 3000, ZERO - 20, ZERO + 1100), slope;
    double back = property_temperature(&fast, property_enthalpy(&fast, t), &slope);
    /* one unit in the last place of 1e3 K is 1e-13; H near 5e9 J/m3 is known to 1e-6, or 3e-13 K */
    cr_assert_float_eq(back, t, 2e-12, "T(H(%.17g)) = %.17g", t, back);
  }
}

/* dT/dH = 1/(rho c) and dtheta/dH = k/(rho c) at every grid point. */
Test(property, slopes_are_exact_at_the_grid_points) {
  int i = add_fire_code_steel(&m);
  const material *a = &m.material[i];
  build(i, ZERO + 18, ZERO + 1000, 512);
  for (int s = 0; s < fast.segments; s++)
    for (int k = 1; k < fast.segment[s].count; k++) { /* ends of segments are kinks */
      double h = fast.segment[s].start + k / fast.segment[s].inverse, by_h, theta_by_h;
      double t = property_temperature(&fast, h, &by_h);
      property_potential(&fast, h, &theta_by_h);
      cr_assert_float_eq(by_h * capacity(a, t), 1, 1e-6, "at %g degC", t - ZERO);
      cr_assert_float_eq(theta_by_h / by_h, conductivity(a, t), 1e-6 * 54);
    }
}

Test(property, slopes_are_the_derivatives_of_what_is_told) {
  int i = add_fire_code_steel(&m);
  build(i, ZERO + 18, ZERO + 1000, 512);
  double least_row = 1e300;
  for (int s = 0; s < fast.segments; s++) least_row = fmin(least_row, 1 / fast.segment[s].inverse);
  double step = 0.01 * least_row;
  for (int s = 0; s < fast.segments; s++)
    for (int k = 0; k < fast.segment[s].count; k++) {
      double h = fast.segment[s].start + (k + 0.4) / fast.segment[s].inverse, slope, unused;
      double up = property_temperature(&fast, h + step, &unused);
      double down = property_temperature(&fast, h - step, &unused);
      property_temperature(&fast, h, &slope);
      /* central difference of a cubic over 1 % of a row: 1e-5 of its curvature */
      cr_assert_float_eq(slope, (up - down) / (2 * step), 1e-5 * slope);
      up = property_potential(&fast, h + step, &unused);
      down = property_potential(&fast, h - step, &unused);
      property_potential(&fast, h, &slope);
      cr_assert_float_eq(slope, (up - down) / (2 * step), 1e-5 * slope);
    }
}

/* A joint is looked at 0.1 J/m3 before and after: 0.2 J/m3 over the least rho c, 3.4e6, is 6e-8 K.
 */
static void check_continuity(void) {
  for (int s = 0; s < fast.segments; s++)
    for (int k = 0; k < fast.segment[s].count; k++) {
      double h = fast.segment[s].start + k / fast.segment[s].inverse, unused;
      double before = property_temperature(&fast, h - 0.1, &unused);
      double after = property_temperature(&fast, h + 0.1, &unused);
      cr_assert_float_eq(before, after, 7e-8, "T jumps at H = %g: %.12g, %.12g", h, before, after);
      before = property_potential(&fast, h - 0.1, &unused);
      after = property_potential(&fast, h + 0.1, &unused);
      cr_assert_float_eq(before, after, 54 * 7e-8, "theta jumps at H = %g", h);
    }
}

Test(property, tables_are_continuous_and_rise) {
  int i = add_fire_code_steel(&m);
  add_latent(&m, i, 30e3, ZERO + 900, ZERO + 930);
  add_latent(&m, i, 50e3, ZERO + 950, ZERO + 952);
  add_latent(&m, i, 70e3, ZERO + 970, ZERO + 970);
  build(i, ZERO + 18, ZERO + 1000, 512);
  check_continuity();
  double last = 0, last_theta = -1, slope;
  for (int k = 0; k <= 20000; k++) {
    double h = fast.most * k / 20000;
    double t = property_temperature(&fast, h, &slope);
    cr_assert_geq(slope, 0);
    cr_assert_geq(t, last - 1e-11);
    double theta = property_potential(&fast, h, &slope);
    cr_assert_geq(theta, last_theta - 1e-9);
    last = t;
    last_theta = theta;
  }
}

/* Latent heat over 30 K, 2 K and at one temperature; constant rho c and k, so T(H) is known. */
Test(property, latent_heat_in_the_table_in_closed_form) {
  static const double widths[] = {30, 2, 0};
  for (int w = 0; w < 3; w++) {
    fresh();
    double from = 1700, to = from + widths[w], heat = 270e3, rho = 7000, c = 600, k = 30;
    int i = add_material(&m, k, rho, c);
    add_latent(&m, i, heat, from, to);
    build(i, 1500, 1900, 512);
    for (int n = 0; n < 2000; n++) {
      double h = (400 * c + heat) * rho * (n + 0.5) / 2000, slope, exact;
      double solid = 200 * c * rho, liquid = solid + (widths[w] * c + heat) * rho;
      if (h < solid)
        exact = 1500 + h / (rho * c);
      else if (h < liquid)
        exact = from + widths[w] * (h - solid) / (liquid - solid);
      else
        exact = to + (h - liquid) / (rho * c);
      /* straight lines: round-off of sums near 1e9 J/m3 */
      cr_assert_float_eq(property_temperature(&fast, h, &slope), exact, 1e-10);
      cr_assert_float_eq(property_potential(&fast, h, &slope), k * (exact - 1500), 1e-8);
      if (widths[w] == 0 && h > solid && h < liquid) cr_assert_eq(slope, 0);
    }
    cr_assert_float_eq(fast.reference_capacity, rho * c, 1e-9 * rho * c,
                       "latent heat is no sensible capacity");
    done();
  }
}

Test(property, latent_heat_is_no_sensible_capacity) {
  int i = add_material(&m, 30, 7000, 600);
  add_latent(&m, i, 270e3, 1700, 1730);
  build(i, 1705, 1725, 64); /* wholly inside */
  cr_assert_float_eq(fast.reference_capacity, 7000 * 600.0, 1e-9 * 7000 * 600);
}

Test(property, a_start_on_a_plateau_is_on_the_liquid_side) {
  int i = add_material(&m, 30, 7000, 600);
  add_latent(&m, i, 270e3, 1700, 1700);
  build(i, 1500, 1900, 512);
  double exact = 7000 * (600.0 * 200 + 270e3);
  cr_assert_float_eq(property_enthalpy(&fast, 1700), exact, 1e-9 * exact);
  cr_assert_float_eq(property_enthalpy(&fast, 1699.999), 7000 * 600 * 199.999,
                     1e-9 * 7000 * 600 * 200);
}

Test(property, beyond_the_range_the_end_slopes_go_on) {
  int i = add_material(&m, 30, 7000, 600);
  build(i, 300, 1300, 64);
  double slope, rho_c = 7000.0 * 600;
  cr_assert_float_eq(property_temperature(&fast, -50 * rho_c, &slope), 250, 1e-9);
  cr_assert_float_eq(slope, 1 / rho_c, 1e-12 / rho_c);
  cr_assert_float_eq(property_temperature(&fast, 1100 * rho_c, &slope), 1400, 1e-9);
  cr_assert_float_eq(property_potential(&fast, 1100 * rho_c, &slope), 30 * 1100.0, 1e-7);
  cr_assert_float_eq(property_enthalpy(&fast, 1400), 1100 * rho_c, 1e-9 * 1100 * rho_c);
  cr_assert_float_eq(property_enthalpy(&fast, 250), -50 * rho_c, 1e-9 * 50 * rho_c);
}

Test(property, many_at_once_are_the_same_bits_as_one_by_one) {
  enum { COUNT = 777 };
  static double h[COUNT], theta[COUNT], by_h[COUNT], t[COUNT], again[COUNT];
  int i = add_fire_code_steel(&m);
  add_latent(&m, i, 70e3, ZERO + 970, ZERO + 970);
  build(i, ZERO + 18, ZERO + 1000, 512);
  for (int k = 0; k < COUNT; k++) /* jumps to and fro over all segments, beyond both ends too */
    h[k] = fast.most * (0.5 + 0.55 * sin(k * 1.7));
  property_potentials(&fast, COUNT, h, theta, by_h);
  property_potentials(&fast, COUNT, h, again, NULL);
  property_temperatures(&fast, COUNT, h, t);
  for (int k = 0; k < COUNT; k++) {
    double slope;
    cr_assert_eq(property_potential(&fast, h[k], &slope), theta[k]);
    cr_assert_eq(slope, by_h[k]);
    cr_assert_eq(again[k], theta[k]);
    cr_assert_eq(property_temperature(&fast, h[k], &slope), t[k]);
  }
}

Test(property, extremes_are_those_of_the_range) {
  int i = add_fire_code_steel(&m);
  build(i, ZERO + 20, ZERO + 700, 512);
  cr_assert_float_eq(fast.reference_capacity, 7850 * 439.80176, 1e-6 * 7850 * 440);
  cr_assert_float_eq(fast.largest_conductivity, 53.334, 1e-9);
  cr_assert_float_eq(fast.smallest_conductivity, 30.69, 1e-9);
  cr_assert_eq(fast.least, 0);
  cr_assert_float_eq(fast.most, material_heat(&m.material[i], fast.from, fast.to),
                     1e-12 * fast.most);
}

Test(property, what_is_not_positive_is_refused_with_its_temperature) {
  static const int which[] = {OF_CONDUCTIVITY, OF_DENSITY, OF_SPECIFIC_HEAT};
  for (int w = 0; w < 3; w++) {
    fresh();
    fault f;
    int i = add_material(&m, 30, 7000, 600);
    set_linear(&m, i, which[w], 100, -0.2); /* below 0 above 500 degC */
    cr_assert_eq(property_build(&fast, &m.material[i], 300, 700, 64, &memory, &f), STATUS_OK);
    cr_assert_eq(property_build(&fast, &m.material[i], 300, 900, 64, &memory, &f),
                 STATUS_BAD_ARGUMENT);
    cr_assert_not_null(strstr(f.is, "matter"), "%s", f.is);
    done();
  }
}

Test(property, out_of_memory_is_told) {
  fault f;
  int i = add_fire_code_steel(&m);
  arena small;
  arena_init(&small, 4096);
  cr_assert_eq(property_build(&fast, &m.material[i], 300, 1200, 512, &small, &f), STATUS_NO_MEMORY);
  arena_free(&small);
}
