/* conduction: dF/dH, dF/dt and the derivatives of the heat through the faces against central
   differences, in every combination of conditions; sums that energy conservation demands. */
#include "conduction.h"

#include "make_run.h"

static made m;
static run r;

static const double gen_x[] = {0, 200}, gen_y[] = {1e5, 9e5};
static const double ramp_x[] = {0, 200}, ramp_y[] = {500, 900};
static const double h_x[] = {300, 600, 1300}, h_y[] = {80, 900, 300};

enum { INSULATED, CONVECTS, BY_SURFACE, RADIATES, FLUX, PRESCRIBED, CONDITIONS };

static face_condition condition(int kind) {
  switch (kind) {
  case CONVECTS: return convects(250, rows(2, ramp_x, ramp_y));
  case BY_SURFACE: {
    face_condition c = convects(0, rows(2, ramp_x, ramp_y));
    c.h.by_surface_temperature = true;
    c.h.over_temperature = (table){3, h_x, h_y};
    return c;
  }
  case RADIATES: return furnace(20, 0.8, rows(2, ramp_x, ramp_y));
  case FLUX: return heated(rows(2, gen_x, gen_y));
  case PRESCRIBED: return prescribed(rows(2, ramp_x, ramp_y));
  default: return insulated();
  }
}

/* Two layers (k and c linear in T, no kinks) with a contact, one with generation. */
static void system_of(const char *name, int first, int last, bool generates) {
  static series generation;
  generation = rows(2, gen_x, gen_y);
  make_case(&m, name);
  int a = add_material(&m, 1, 7800, 1), b = add_material(&m, 1, 2400, 1);
  set_linear(&m, a, OF_CONDUCTIVITY, 55, -0.03);
  set_linear(&m, a, OF_SPECIFIC_HEAT, 440, 0.4);
  set_linear(&m, b, OF_CONDUCTIVITY, 1.5, 2e-3);
  set_linear(&m, b, OF_SPECIFIC_HEAT, 900, 0.2);
  set_bore(&m, 0.03);
  add_layer(&m, a, 0.02, 0);
  layer *outer = add_layer(&m, b, 0.03, 3e-4);
  if (generates) outer->heat_generation = &generation;
  start_at(&m, 400);
  add_stage(&m, 200, condition(first), condition(last));
  make_run(&r, &m, 290, 1400, 12);
  for (int i = 0; i < r.mesh.nodes; i++) {
    double t = 650 + 250 * sin(1.3 * i) + 11 * i; /* K: rough on purpose */
    r.stepper.state[i] = property_enthalpy(property_at(&r, i), t);
  }
}

typedef struct sample {
  double rate[64], heat[HEATS];
} sample;

static void rates_at(double t, const double *state, sample *s) {
  double copy[64], unused[2];
  memcpy(copy, state, (size_t)r.mesh.nodes * sizeof(double));
  conduction_prescribe(&r.system, t, copy, unused);
  conduction_rates(&r.system, t, copy, s->rate);
  memcpy(s->heat, r.system.heat, sizeof s->heat);
}

/* Steps of 0.02 K and 0.01 s: properties are cubic in rows of some kelvins, so the central
   difference is right to 1e-5 of the derivative; fluxes of 1e6 carry round-off of 1e-9. */
static void close_enough(double a, double b, double scale, const char *what, int i, int j) {
  cr_assert_float_eq(a, b, 2e-5 * scale + 1e-9, "%s (%d, %d): %.9g, by difference %.9g", what, i, j,
                     a, b);
}

static void check_state_derivatives(double t) {
  int n = r.mesh.nodes;
  double state[64], held[2], rate[64];
  memcpy(state, r.stepper.state, (size_t)n * sizeof(double));
  conduction_prescribe(&r.system, t, state, held);
  conduction_linearise(&r.system, t, state, rate);
  double lower[64], diagonal[64], upper[64], by_state[2];
  int node[2];
  memcpy(lower, r.system.lower, (size_t)n * sizeof(double));
  memcpy(diagonal, r.system.diagonal, (size_t)n * sizeof(double));
  memcpy(upper, r.system.upper, (size_t)n * sizeof(double));
  memcpy(by_state, r.system.heat_by_state, sizeof by_state);
  memcpy(node, r.system.heat_node, sizeof node);
  for (int j = 0; j < n; j++) {
    if (conduction_prescribes(&r.system, 0) && j == 0) continue;
    if (conduction_prescribes(&r.system, 1) && j == n - 1) continue;
    double dh = 0.02 * 4e6, keep = state[j];
    sample up, down;
    state[j] = keep + dh;
    rates_at(t, state, &up);
    state[j] = keep - dh;
    rates_at(t, state, &down);
    state[j] = keep;
    double scale = fabs(diagonal[j]);
    for (int i = 0; i < n; i++) {
      double exact = (up.rate[i] - down.rate[i]) / (2 * dh);
      double told = i == j ? diagonal[i] : i == j + 1 ? lower[i] : i == j - 1 ? upper[i] : 0;
      close_enough(told, exact, scale, "dF/dH", i, j);
    }
    for (int end = 0; end < 2; end++) {
      double exact = (up.heat[end] - down.heat[end]) / (2 * dh);
      close_enough(j == node[end] ? by_state[end] : 0, exact, scale, "dQ/dH", end, j);
    }
  }
}

static void check_time_derivatives(double t) {
  int n = r.mesh.nodes;
  double state[64], held[2], rate[64];
  memcpy(state, r.stepper.state, (size_t)n * sizeof(double));
  conduction_prescribe(&r.system, t, state, held);
  conduction_linearise(&r.system, t, state, rate);
  double by_time[64], heat_by_time[HEATS], dt = 0.01, scale = 0;
  memcpy(by_time, r.system.by_time, (size_t)n * sizeof(double));
  memcpy(heat_by_time, r.system.heat_by_time, sizeof heat_by_time);
  for (int i = 0; i < n; i++) scale += fabs(by_time[i]);
  sample up, down;
  rates_at(t + dt, state, &up);
  rates_at(t - dt, state, &down);
  for (int i = 0; i < n; i++)
    cr_assert_float_eq(by_time[i], (up.rate[i] - down.rate[i]) / (2 * dt), 1e-5 * scale + 1e-6,
                       "dF/dt of node %d", i);
  for (int q = 0; q < HEATS; q++)
    cr_assert_float_eq(heat_by_time[q], (up.heat[q] - down.heat[q]) / (2 * dt), 1e-5 * scale + 1e-6,
                       "dQ/dt of %d: %.9g, by difference %.9g", q, heat_by_time[q],
                       (up.heat[q] - down.heat[q]) / (2 * dt));
}

Test(conduction, jacobian_agrees_with_central_differences_in_all_combinations) {
  static const char *const names[] = {"plate", "cylinder", "sphere"};
  for (int s = 0; s < 3; s++)
    for (int first = 0; first < CONDITIONS; first++)
      for (int last = 0; last < CONDITIONS; last++)
        for (int generates = 0; generates < 2; generates++) {
          system_of(names[s], first, last, generates);
          check_state_derivatives(77);
          check_time_derivatives(77);
          free_run(&r);
        }
}

/* What flows between nodes cancels: the sum of all rates is what crosses the faces and is generated
   (a prescribed node's own storing is told apart). */
Test(conduction, rates_sum_to_the_heat_that_enters) {
  for (int first = 0; first < CONDITIONS; first++)
    for (int last = 0; last < CONDITIONS; last++) {
      sample s;
      system_of("sphere", first, last, true);
      rates_at(50, r.stepper.state, &s);
      double sum = 0, size = 0;
      for (int i = 0; i < r.mesh.nodes; i++) {
        sum += s.rate[i];
        size += fabs(s.rate[i]);
      }
      for (int q = 0; q < HEATS; q++) size += fabs(s.heat[q]);
      double heat = s.heat[HEAT_FIRST] + s.heat[HEAT_LAST] + s.heat[HEAT_GENERATED];
      cr_assert_float_eq(sum, heat, 1e-13 * size, "round-off of %d terms", r.mesh.nodes);
      free_run(&r);
    }
}

Test(conduction, one_temperature_everywhere_and_outside_rests) {
  sample s;
  make_case(&m, "cylinder");
  add_layer(&m, add_material(&m, 50, 7800, 500), 0.02, 0);
  add_layer(&m, add_material(&m, 0.2, 200, 900), 0.02, 1e-3);
  start_at(&m, 700);
  add_stage(&m, 10, insulated(), furnace(30, 0.9, constant(700)));
  make_run(&r, &m, 290, 900, 12);
  rates_at(5, r.stepper.state, &s);
  /* T(H(T)) = T to 1e-12 K, over conductances up to 1e3 W/K */
  for (int i = 0; i < r.mesh.nodes; i++) cr_assert_float_eq(s.rate[i], 0, 1e-7);
  free_run(&r);
}

Test(conduction, generated_heat_is_g_times_volume) {
  sample s;
  system_of("cylinder", INSULATED, INSULATED, true);
  rates_at(50, r.stepper.state, &s);
  double volume = (0.065 * 0.065 - 0.035 * 0.035) / 2, g = 3e5;
  cr_assert_float_eq(s.heat[HEAT_GENERATED], g * volume, 1e-12 * g * volume);
  double slope;
  cr_assert_float_eq(conduction_generation(&r.system, &r.mesh.layer[1], 50, &slope), g, 1e-9);
  cr_assert_float_eq(slope, 4e3, 1e-9);
  r.system.at_rest = true;
  cr_assert_eq(conduction_generation(&r.system, &r.mesh.layer[1], 50, &slope), 9e5);
  cr_assert_eq(slope, 0);
  cr_assert_eq(conduction_generation(&r.system, &r.mesh.layer[0], 50, &slope), 0);
  free_run(&r);
}

Test(conduction, prescribed_nodes_take_their_temperature_and_its_rate) {
  double rate[2];
  system_of("plate", PRESCRIBED, CONVECTS, false);
  conduction_prescribe(&r.system, 50, r.stepper.state, rate);
  cr_assert_float_eq(temperature_at(&r, r.stepper.state, 0), 600, 1e-11);
  double capacity = 7800 * (440 + 0.4 * (600 - 273.15));
  cr_assert_float_eq(rate[0], 2 * capacity, 1e-6 * capacity, "2 K/s times rho c");
  cr_assert_eq(rate[1], 0);
  cr_assert(conduction_prescribes(&r.system, 0));
  cr_assert_not(conduction_prescribes(&r.system, 1));
  free_run(&r);
}

Test(conduction, temperatures_and_states_are_inverses_and_content_is_their_sum) {
  double temperature[64], state[64], given[64], sum = 0;
  system_of("sphere", INSULATED, INSULATED, false);
  for (int i = 0; i < r.mesh.nodes; i++) given[i] = 400 + 13 * i;
  conduction_state(&r.mesh, given, state);
  conduction_temperatures(&r.mesh, state, temperature);
  for (int i = 0; i < r.mesh.nodes; i++) {
    cr_assert_float_eq(temperature[i], given[i], 2e-12);
    int of = r.mesh.layer[0].last < i;
    sum += r.mesh.volume[i] * material_heat(&m.material[of], r.property[of].from, given[i]);
  }
  /* the table's rows against quadrature: 1e-7 of the content */
  cr_assert_float_eq(conduction_content(&r.mesh, state), sum, 1e-7 * sum);
  free_run(&r);
}

Test(conduction, out_of_memory_is_told) {
  system_of("plate", INSULATED, INSULATED, false);
  conduction c;
  arena small;
  arena_init(&small, 256);
  cr_assert_eq(conduction_init(&c, &r.mesh, &small), -1);
  arena_free(&small);
  free_run(&r);
}
