/* face: the heat through a surface and its derivatives against central differences, in every
   combination of what can cross it. */
#include "face.h"

#include "make_case.h"
#include "physics.h"

#include <criterion/criterion.h>

static const double time_x[] = {0, 100, 100, 300}, h_y[] = {20, 60, 900, 400};
static const double medium_y[] = {300, 900, 320, 350};
static const double hot_x[] = {330, 570, 770, 920, 1130}, hot_y[] = {350, 900, 1900, 1300, 450};

/* Bits of a combination. */
enum { FLUX = 1, CONVECTION = 2, BY_SURFACE = 4, RADIATION = 8, MOVING = 16, COMBINATIONS = 32 };

static face_condition combination(int bits) {
  face_condition c = {.kind = FACE_EXCHANGE};
  bool moving = bits & MOVING;
  if (bits & FLUX) c.flux = moving ? wave(2e4, 1e4, 250, 0.3) : constant(2e4);
  if (bits & CONVECTION) {
    c.has_convection = true;
    c.h.by_surface_temperature = bits & BY_SURFACE;
    c.h.over_temperature = (table){5, hot_x, hot_y};
    c.h.over_time = moving ? rows(4, time_x, h_y) : constant(150);
    c.medium = moving ? rows(4, time_x, medium_y) : constant(333);
  }
  if (bits & RADIATION) {
    c.has_radiation = true;
    c.emissivity = 0.8;
    c.view_factor = 0.7;
    c.surroundings =
        moving ? (series){.kind = SERIES_FIRE, .curve = FIRE_STANDARD} : constant(1200);
  }
  return c;
}

static double flux_at(const face_condition *c, double t, double surface) {
  face_state s;
  face_at(c, 0, 0, 100, t, &s);
  return face_exchange(c, &s, surface).flux;
}

Test(face, derivatives_agree_with_central_differences_in_every_combination) {
  for (int bits = 0; bits < COMBINATIONS; bits++) {
    face_condition c = combination(bits);
    for (double t = 2; t < 99; t += 12)
      for (double surface = 310; surface < 1300; surface += 47) {
        face_state s;
        face_at(&c, 0, 0, 100, t, &s);
        face_flux q = face_exchange(&c, &s, surface);
        double dt = 1e-3, dtemp = 1e-2;
        double by_temperature =
            (flux_at(&c, t, surface + dtemp) - flux_at(&c, t, surface - dtemp)) / (2 * dtemp);
        double by_time = (flux_at(&c, t + dt, surface) - flux_at(&c, t - dt, surface)) / (2 * dt);
        /* second order, and fluxes of 1e6 W/m2 known to 1e-10: 1e-10/1e-3 */
        cr_assert_float_eq(q.by_temperature, by_temperature, 1e-6 * fabs(by_temperature) + 1e-6,
                           "bits %d, %g K", bits, surface);
        cr_assert_float_eq(q.by_time, by_time, 1e-6 * fabs(by_time) + 1e-5, "bits %d, %g s", bits,
                           t);
      }
  }
}

Test(face, parts_add_up_to_what_the_laws_say) {
  face_condition c = combination(FLUX | CONVECTION | RADIATION);
  face_state s;
  face_at(&c, 0, 0, 100, 10, &s);
  double surface = 700;
  double exact =
      2e4 + 150 * (333 - surface) + 0.7 * 0.8 * STEFAN_BOLTZMANN * (pow(1200, 4) - pow(surface, 4));
  cr_assert_float_eq(face_exchange(&c, &s, surface).flux, exact, 1e-12 * 2e5);
  cr_assert_float_eq(STEFAN_BOLTZMANN, 5.670374419e-8, 1e-17, "CODATA 2018");
}

Test(face, at_one_temperature_nothing_crosses) {
  face_condition c = furnace(25, 0.8, constant(1173.15));
  face_state s;
  face_at(&c, 0, 0, 100, 10, &s);
  cr_assert_eq(face_exchange(&c, &s, 1173.15).flux, 0);
  cr_assert_lt(face_exchange(&c, &s, 1173.15).by_temperature, 0);
}

Test(face, insulated_and_prescribed_exchange_nothing) {
  face_state s;
  face_condition c = insulated();
  face_at(&c, 0, 0, 100, 10, &s);
  face_flux q = face_exchange(&c, &s, 500);
  cr_assert(q.flux == 0 && q.by_temperature == 0 && q.by_time == 0);
  c = prescribed(rows(4, time_x, medium_y));
  face_at(&c, 0, 0, 100, 50, &s);
  cr_assert_float_eq(s.prescribed, 600, 1e-12);
  cr_assert_float_eq(s.prescribed_slope, 6, 1e-12);
  cr_assert_eq(face_exchange(&c, &s, 500).flux, 0);
}

Test(face, ends_of_an_interval_are_seen_from_inside) {
  face_condition c = combination(CONVECTION | MOVING);
  face_state s;
  face_at(&c, 0, 0, 100, 100, &s);
  cr_assert_float_eq(s.h, 60, 1e-12);
  cr_assert_float_eq(s.medium, 900, 1e-12);
  face_at(&c, 0, 100, 300, 100, &s);
  cr_assert_float_eq(s.h, 900, 1e-12);
  cr_assert_float_eq(s.medium, 320, 1e-12);
}

Test(face, a_log_counts_from_the_start_of_the_case) {
  face_condition c = convects(10, rows(4, time_x, medium_y));
  face_state s;
  face_at(&c, 40, 0, 60, 10, &s);
  cr_assert_float_eq(s.medium, 360, 1e-12);
  c.medium.from_case_start = true;
  face_at(&c, 40, 0, 60, 10, &s);
  cr_assert_float_eq(s.medium, 600, 1e-12);
  cr_assert_float_eq(face_next_break(&c, 40, 0), 60, 1e-12);
  cr_assert_float_eq(face_next_break(&c, 40, 60), 260, 1e-12);
}

Test(face, coefficient_by_surface_temperature_holds_beyond_its_table) {
  face_condition c = combination(CONVECTION | BY_SURFACE);
  face_state s;
  face_at(&c, 0, 0, 100, 10, &s);
  cr_assert_float_eq(face_exchange(&c, &s, 320).flux, 350 * (333.0 - 320), 1e-9);
  cr_assert_float_eq(face_exchange(&c, &s, 1500).flux, 450 * (333.0 - 1500), 1e-9);
  cr_assert_float_eq(face_exchange(&c, &s, 670).flux, 1400 * (333.0 - 670), 1e-8);
  cr_assert_float_eq(face_exchange(&c, &s, 770).flux, 1900 * (333.0 - 770), 1e-8);
}

Test(face, breaks_and_longest_steps_are_those_of_what_is_in_use) {
  static const double x[] = {5, 7}, y[] = {1, 2};
  face_condition c = convects(10, constant(300));
  cr_assert_eq(face_next_break(&c, 0, 0), INFINITY);
  cr_assert_eq(face_longest_step(&c), INFINITY);
  c.surroundings = rows(2, x, y); /* not in use: no radiation */
  cr_assert_eq(face_next_break(&c, 0, 0), INFINITY);
  c.has_radiation = true;
  cr_assert_eq(face_next_break(&c, 0, 0), 5);
  cr_assert_eq(face_next_break(&c, 0, 5), 7);
  c.h.over_time = wave(10, 1, 160, 0);
  c.medium = wave(300, 1, 320, 0);
  cr_assert_eq(face_longest_step(&c), 10);
  c.h.by_surface_temperature = true;
  cr_assert_eq(face_longest_step(&c), 20);
  c = prescribed(rows(2, x, y));
  cr_assert_eq(face_next_break(&c, 0, 6), 7);
  c = heated(rows(2, x, y));
  cr_assert_eq(face_next_break(&c, 0, 0), 5);
  c = insulated();
  cr_assert_eq(face_next_break(&c, 0, 0), INFINITY);
}

Test(face, at_rest_every_series_has_its_last_value) {
  face_condition c = face_at_rest(&(face_condition){
      .kind = FACE_EXCHANGE,
      .has_convection = true,
      .has_radiation = true,
      .emissivity = 0.5,
      .view_factor = 1,
      .h = {.over_time = rows(4, time_x, h_y)},
      .medium = rows(4, time_x, medium_y),
      .surroundings = wave(400, 50, 100, M_PI / 2),
  });
  face_state s;
  face_at(&c, 0, 0, 0, 0, &s);
  cr_assert(s.h == 400 && s.medium == 350);
  cr_assert_float_eq(s.surroundings, 450, 1e-12);
  cr_assert_eq(c.flux.kind, SERIES_NONE);
  face_flux q = face_exchange(&c, &s, 500);
  cr_assert_eq(q.by_time, 0);
  cr_assert_eq(c.emissivity, 0.5);
}
