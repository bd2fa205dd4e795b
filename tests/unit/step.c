/* step: the tableau of Rodas4 against the order conditions of E. Hairer & G. Wanner, Solving
   Ordinary Differential Equations II, 2nd ed. 1996, IV.7; orders measured by halving; heat and
   interpolant. */
#include "step.h"

#include "exact.h"
#include "make_run.h"

#include <complex.h>
#include <lapacke.h>

enum { S = RODAS_STAGES };

/* ---- the tableau ---- */

/* The method in its original form: k_i = h f(y + sum alpha_ij k_j) + h J sum gamma_ij k_j. */
typedef struct original {
  double alpha[S][S], gamma[S][S], b[S], beta[S][S];
} original;

/* (IV.7.24): with U = Gamma k, A = alpha inv(Gamma), C = 1/gamma - inv(Gamma), m = b inv(Gamma). */
static original untransformed(void) {
  original o = {0};
  double inverse[S * S] = {0};
  for (int i = 0; i < S; i++)
    for (int j = 0; j <= i; j++)
      inverse[i * S + j] = (i == j ? 1 / rodas4.gamma : 0) - (j < i ? rodas4.c[i][j] : 0);
  cr_assert_eq(LAPACKE_dtrtri(LAPACK_ROW_MAJOR, 'L', 'N', S, inverse, S), 0);
  for (int i = 0; i < S; i++)
    for (int j = 0; j < S; j++) {
      o.gamma[i][j] = j <= i ? inverse[i * S + j] : 0;
      for (int k = 0; k < i; k++)
        o.alpha[i][j] += rodas4.a[i][k] * (j <= k ? inverse[k * S + j] : 0);
      o.beta[i][j] = o.alpha[i][j] + o.gamma[i][j];
    }
  for (int j = 0; j < S; j++)
    for (int k = j; k < S; k++) o.b[j] += rodas4.m[k] * inverse[k * S + j];
  return o;
}

/* Weights b of a result H + sum m_j U_j. */
static void weights_of(const original *o, const double m[S], double b[S]) {
  for (int j = 0; j < S; j++) {
    b[j] = 0;
    for (int k = 0; k < S; k++) b[j] += m[k] * o->gamma[k][j];
  }
}

static void times(const double matrix[S][S], const double x[S], double out[S]) {
  double sum[S] = {0};
  for (int i = 0; i < S; i++)
    for (int j = 0; j < S; j++) sum[i] += matrix[i][j] * x[j];
  memcpy(out, sum, sizeof sum);
}

static double dot(const double b[S], const double x[S]) {
  double sum = 0;
  for (int i = 0; i < S; i++) sum += b[i] * x[i];
  return sum;
}

/* Left sides of (IV.7.15): one, two for order 3, four for order 4; the right sides are u/1 ..
 * u^4/24. */
typedef struct conditions {
  double tau1, tau2, tau31, tau32, tau41, tau42, tau43, tau44;
} conditions;

static conditions conditions_of(const original *o, const double b[S]) {
  double one[S], alpha[S], square[S], cube[S], beta[S], twice[S], thrice[S], mixed[S], curved[S];
  for (int i = 0; i < S; i++) {
    one[i] = 1;
    alpha[i] = 0;
    for (int j = 0; j < S; j++) alpha[i] += o->alpha[i][j];
    square[i] = alpha[i] * alpha[i];
    cube[i] = square[i] * alpha[i];
  }
  times(o->beta, one, beta);
  times(o->beta, beta, twice);
  times(o->beta, twice, thrice);
  times(o->beta, square, curved);
  times(o->alpha, beta, mixed);
  for (int i = 0; i < S; i++) mixed[i] *= alpha[i];
  return (conditions){dot(b, one),  dot(b, beta),  dot(b, square), dot(b, twice),
                      dot(b, cube), dot(b, mixed), dot(b, curved), dot(b, thrice)};
}

/* Coefficients are printed with 16 digits, and U is sums of products up to 40. */
#define PRINTED 1e-14

static void check_order_three(const conditions *c, double u) {
  cr_assert_float_eq(c->tau1, u, PRINTED);
  cr_assert_float_eq(c->tau2, u * u / 2, PRINTED);
  cr_assert_float_eq(c->tau31, u * u * u / 3, PRINTED);
  cr_assert_float_eq(c->tau32, u * u * u / 6, PRINTED);
}

Test(step, main_weights_fulfil_all_conditions_of_order_four) {
  original o = untransformed();
  conditions c = conditions_of(&o, o.b);
  check_order_three(&c, 1);
  cr_assert_float_eq(c.tau41, 1.0 / 4, PRINTED);
  cr_assert_float_eq(c.tau42, 1.0 / 8, PRINTED);
  cr_assert_float_eq(c.tau43, 1.0 / 12, PRINTED);
  cr_assert_float_eq(c.tau44, 1.0 / 24, PRINTED);
}

/* error = U_6: the embedded result leaves it out. */
Test(step, embedded_weights_fulfil_order_three_and_no_more) {
  original o = untransformed();
  double m[S], b[S];
  memcpy(m, rodas4.m, sizeof m);
  m[S - 1] = 0;
  weights_of(&o, m, b);
  conditions c = conditions_of(&o, b);
  check_order_three(&c, 1);
  double most = fmax(fmax(fabs(c.tau41 - 1.0 / 4), fabs(c.tau42 - 1.0 / 8)),
                     fmax(fabs(c.tau43 - 1.0 / 12), fabs(c.tau44 - 1.0 / 24)));
  cr_assert_gt(most, 1e-4, "an embedded method of order 4 would see no error");
}

Test(step, sums_of_rows_are_the_nodes_that_the_method_uses) {
  original o = untransformed();
  for (int i = 0; i < S; i++) {
    double alpha = 0, gamma = 0;
    for (int j = 0; j < S; j++) {
      alpha += o.alpha[i][j];
      gamma += o.gamma[i][j];
    }
    cr_assert_float_eq(alpha, rodas4.alpha[i], PRINTED, "alpha of stage %d", i + 1);
    cr_assert_float_eq(gamma, rodas4.gamma_sum[i], PRINTED, "gamma of stage %d", i + 1);
  }
}

/* (IV.7.29): alpha_sj + gamma_sj = b_j, and the same for the embedded method one stage earlier. */
Test(step, method_is_stiffly_accurate) {
  original o = untransformed();
  double m[S], b[S];
  memcpy(m, rodas4.m, sizeof m);
  m[S - 1] = 0;
  weights_of(&o, m, b);
  for (int j = 0; j < S; j++) {
    cr_assert_float_eq(o.beta[S - 1][j], o.b[j], PRINTED);
    cr_assert_float_eq(o.beta[S - 2][j], b[j], PRINTED);
  }
}

/* R(z) = 1 + z b (I - z B)^-1 1 by forward substitution, B lower triangular. */
static double complex stability(const original *o, double complex z) {
  double complex x[S], sum = 0;
  for (int i = 0; i < S; i++) {
    x[i] = 1;
    for (int j = 0; j < i; j++) x[i] += z * o->beta[i][j] * x[j];
    x[i] /= 1 - z * o->beta[i][i];
    sum += o->b[i] * x[i];
  }
  return 1 + z * sum;
}

Test(step, method_is_l_stable) {
  original o = untransformed();
  for (double y = 1e-3; y < 1e6; y *= 1.1)
    cr_assert_leq(cabs(stability(&o, y * I)), 1 + 1e-12, "|R(%g i)| = %g", y,
                  cabs(stability(&o, y * I)));
  for (double x = 1; x < 1e9; x *= 2)
    cr_assert_lt(cabs(stability(&o, -x)), 1, "R(-%g) = %g", x, cabs(stability(&o, -x)));
  cr_assert_lt(cabs(stability(&o, -1e9)), 1e-6, "R tends to 0");
}

/* y(u) = (1-u) y0 + u (y1 + (1-u)(k0 + u k1)): its weights fulfil order 3 at every u. */
Test(step, interpolant_fulfils_order_three_everywhere) {
  original o = untransformed();
  for (double u = 0; u <= 1.0001; u += 0.05) {
    double m[S], b[S];
    for (int j = 0; j < S; j++)
      m[j] = u * (rodas4.m[j] + (1 - u) * (rodas4.dense[0][j] + u * rodas4.dense[1][j]));
    weights_of(&o, m, b);
    conditions c = conditions_of(&o, b);
    check_order_three(&c, u);
  }
}

/* ---- the step ---- */

static made m;
static run r;
static const double ramp_x[] = {0, 4000}, ramp_y[] = {300, 1500};

/* Smooth and nonlinear: k(T), c(T), radiation, a sine of generation, a contact. */
static void smooth_problem(const char *name, face_condition last) {
  static series generation;
  generation = wave(4e4, 3e4, 3000, 0);
  make_case(&m, name);
  int a = add_material(&m, 1, 7800, 1), b = add_material(&m, 1, 2500, 900);
  set_linear(&m, a, OF_CONDUCTIVITY, 50, -0.025);
  set_linear(&m, a, OF_SPECIFIC_HEAT, 450, 0.3);
  set_linear(&m, b, OF_CONDUCTIVITY, 5, 4e-3);
  set_bore(&m, 0.02);
  add_layer(&m, b, 0.02, 0);
  add_layer(&m, a, 0.03, 2e-4)->heat_generation = &generation;
  start_at(&m, 300);
  add_stage(&m, 2000, heated(constant(500)), last);
  make_run(&r, &m, 280, 1300, 10);
}

/* ---- orders ---- */

/* Smooth and nonlinear by radiation, with cells so thick that steps of some 10 s are not stiff
   (h lambda about 1): there the classical order shows. */
static void thick_problem(face_condition last) {
  static series generation;
  generation = wave(4e4, 3e4, 3000, 0);
  make_case(&m, "cylinder");
  set_bore(&m, 0.1);
  add_layer(&m, add_material(&m, 40, 7800, 600), 0.2, 0)->heat_generation = &generation;
  start_at(&m, 300);
  add_stage(&m, 2000, convects(60, wave(600, 200, 2500, 1)), last);
  make_run(&r, &m, 280, 1300, 4);
}

typedef struct finals {
  double temperature[64], heat[HEATS];
} finals;

static void keep_finals(finals *end) {
  memset(end, 0, sizeof *end);
  conduction_temperatures(&r.mesh, r.stepper.state, end->temperature);
  memcpy(end->heat, r.stepper.heat, sizeof end->heat);
  free_run(&r);
}

/* Order between two runs of `steps` and twice as many, against one of 32 times as many. */
static double measured_order(void (*problem)(face_condition), face_condition last, int steps,
                             int heat) {
  static finals end[3];
  double error[2] = {0};
  for (int k = 0; k < 3; k++) {
    problem(last);
    take_steps(&r, 2000, k == 0 ? steps : k == 1 ? 2 * steps : 32 * steps);
    keep_finals(&end[k]);
  }
  for (int k = 0; k < 2; k++)
    for (int i = 0; i < 64; i++)
      error[k] = fmax(error[k], fabs(end[k].temperature[i] - end[2].temperature[i]));
  if (heat >= 0)
    for (int k = 0; k < 2; k++) error[k] = fabs(end[k].heat[heat] - end[2].heat[heat]);
  return log2(error[0] / error[1]);
}

/* A tenth of an order and more is left for what is not yet asymptotic. */
Test(step, order_by_halving_is_four) {
  face_condition lasts[] = {furnace(25, 0.8, wave(900, 300, 4000, 0)),
                            prescribed(wave(500, 150, 4000, 0)), insulated()};
  for (int k = 0; k < 3; k++) {
    double order = measured_order(thick_problem, lasts[k], 40, -1);
    cr_assert(order > 3.7 && order < 4.6, "face %d: order %g", k, order);
    for (int q = 0; q < 2; q++) {
      if (q == HEAT_LAST && lasts[k].kind == FACE_INSULATED) continue;
      order = measured_order(thick_problem, lasts[k], 80, q);
      cr_assert(order > 3.5, "face %d: order of heat %d %g", k, q, order);
    }
  }
}

static void stiff_problem(face_condition last) {
  smooth_problem("cylinder", last);
}

/* Thin cells (h lambda about 50) and k(T), c(T) from tables with continuous first derivatives:
   stiff order reduction (Hairer & Wanner, IV.15) and the joints of the rows leave at least 1.5. */
Test(step, order_in_the_stiff_case_with_tables_does_not_collapse) {
  double order = measured_order(stiff_problem, furnace(25, 0.8, rows(2, ramp_x, ramp_y)), 20, -1);
  cr_assert_gt(order, 1.5, "order %g", order);
}

static double interpolant_error(double h) {
  double told[9][64], most = 0;
  thick_problem(furnace(25, 0.8, wave(900, 300, 4000, 0)));
  take_steps(&r, 400, 400);
  stepper *s = &r.stepper;
  double t = s->t;
  cr_assert_geq(stepper_try(s, h), 0);
  for (int k = 1; k < 10; k++) stepper_nodes(s, t + h * k / 10, told[k - 1]);
  for (int k = 1; k < 10; k++) {
    take_steps(&r, h / 10, 20);
    for (int i = 0; i < r.mesh.nodes; i++)
      most = fmax(most, fabs(s->state[i] - told[k - 1][i]) * s->scale[i]);
  }
  free_run(&r);
  return most;
}

/* The local error of an interpolant of order 3 falls by 2^4. */
Test(step, interpolant_has_its_order_between_the_ends) {
  double coarse = interpolant_error(40), fine = interpolant_error(20), order = log2(coarse / fine);
  cr_assert(order > 3.7 && order < 4.6, "errors %g and %g K: order %g", coarse, fine, order);
}

Test(step, interpolant_meets_both_ends) {
  smooth_problem("sphere", furnace(25, 0.8, rows(2, ramp_x, ramp_y)));
  take_steps(&r, 100, 10);
  stepper *s = &r.stepper;
  double t = s->t, h = 30, profile[64];
  cr_assert_geq(stepper_try(s, h), 0);
  for (int i = 0; i < r.mesh.nodes; i++) {
    cr_assert_eq(stepper_node(s, i, t), s->state[i]);
    cr_assert_eq(stepper_node(s, i, t + h), s->next[i]);
    /* values near 1e9 J/m3 over a billionth of the step */
    cr_assert_float_eq(stepper_node(s, i, t + h * 1e-9), s->state[i], 1e-7 * fabs(s->state[i]));
    cr_assert_float_eq(stepper_node(s, i, t + h * (1 - 1e-9)), s->next[i], 1e-7 * fabs(s->next[i]));
  }
  stepper_nodes(s, t + 0.3 * h, profile);
  for (int i = 0; i < r.mesh.nodes; i++) cr_assert_eq(stepper_node(s, i, t + 0.3 * h), profile[i]);
  for (int q = 0; q < HEATS; q++) {
    cr_assert_eq(stepper_heat(s, q, t), s->heat[q]);
    cr_assert_eq(stepper_heat(s, q, t + h), s->heat_next[q]);
  }
  free_run(&r);
}

Test(step, heat_through_faces_and_generated_is_what_is_stored) {
  face_condition lasts[] = {furnace(25, 0.8, rows(2, ramp_x, ramp_y)),
                            prescribed(rows(2, ramp_x, ramp_y)), heated(constant(2e4))};
  for (int k = 0; k < 3; k++) {
    smooth_problem("sphere", lasts[k]);
    double before = conduction_content(&r.mesh, r.stepper.state);
    double first = r.stepper.heat[0];
    take_steps(&r, 2000, 37);
    double stored = conduction_content(&r.mesh, r.stepper.state) - before;
    const double *q = r.stepper.heat;
    double given = q[0] + q[1] + q[2] - first;
    /* round-off of 37 x 13 terms */
    cr_assert_float_eq(given, stored, 1e-12 * fabs(stored), "%.17g against %.17g", given, stored);
    free_run(&r);
  }
}

Test(step, interpolated_heat_is_what_the_interpolated_state_stores) {
  smooth_problem("plate", furnace(25, 0.8, rows(2, ramp_x, ramp_y)));
  take_steps(&r, 100, 10);
  stepper *s = &r.stepper;
  double state[64], before = conduction_content(&r.mesh, s->state), t = s->t;
  double at_start = s->heat[0] + s->heat[1] + s->heat[2];
  cr_assert_geq(stepper_try(s, 50), 0);
  stepper_nodes(s, t + 17, state);
  double heat =
      stepper_heat(s, 0, t + 17) + stepper_heat(s, 1, t + 17) + stepper_heat(s, 2, t + 17);
  double stored = conduction_content(&r.mesh, state) - before;
  cr_assert_float_eq(heat - at_start, stored, 1e-11 * fabs(stored));
  free_run(&r);
}

Test(step, prescribed_nodes_are_exact_at_every_time) {
  smooth_problem("cylinder", prescribed(rows(2, ramp_x, ramp_y)));
  stepper *s = &r.stepper;
  int last = r.mesh.nodes - 1;
  cr_assert_geq(stepper_try(s, 100), 0);
  for (double t = 0; t <= 100; t += 12.5) {
    double h = stepper_node(s, last, t), slope;
    double told = property_temperature(property_at(&r, last), h, &slope);
    cr_assert_float_eq(told, 300 + 0.3 * t, 1e-11, "at %g: %g", t, told);
  }
  free_run(&r);
}

/* The error told is U_6, the difference of order 4 and order 3: it falls by 2^4, and is no smaller
   than the true local error. */
Test(step, error_told_is_not_below_the_true_one) {
  double told[2];
  for (int k = 0; k < 2; k++) {
    double h = k ? 20 : 40, end[64], truth = 0;
    thick_problem(furnace(25, 0.8, wave(900, 300, 4000, 0)));
    take_steps(&r, 400, 400);
    told[k] = stepper_try(&r.stepper, h);
    memcpy(end, r.stepper.next, (size_t)r.mesh.nodes * sizeof(double));
    take_steps(&r, h, 64);
    for (int i = 0; i < r.mesh.nodes; i++)
      truth = fmax(truth, fabs(end[i] - r.stepper.state[i]) * r.stepper.scale[i]);
    cr_assert_geq(told[k], truth, "told %g, true %g", told[k], truth);
    free_run(&r);
  }
  double order = log2(told[0] / told[1]);
  cr_assert(order > 3.6 && order < 4.6, "order %g", order);
}

Test(step, failures_are_told_apart) {
  smooth_problem("plate", furnace(25, 0.8, rows(2, ramp_x, ramp_y)));
  double keep = r.mesh.volume[3];
  r.mesh.volume[3] = NAN;
  cr_assert_eq(stepper_try(&r.stepper, 1), -1, "a pivot that is not finite");
  r.mesh.volume[3] = keep;
  cr_assert_geq(stepper_try(&r.stepper, 1), 0);
  r.stepper.rate[3] = NAN;
  cr_assert_eq(stepper_try(&r.stepper, 1), -2);
  free_run(&r);
}

Test(step, a_step_tried_leaves_the_state_alone) {
  smooth_problem("plate", furnace(25, 0.8, rows(2, ramp_x, ramp_y)));
  double before[64], first[64];
  memcpy(before, r.stepper.state, (size_t)r.mesh.nodes * sizeof(double));
  double error = stepper_try(&r.stepper, 7);
  memcpy(first, r.stepper.next, (size_t)r.mesh.nodes * sizeof(double));
  cr_assert_geq(stepper_try(&r.stepper, 50), 0);
  cr_assert_eq(stepper_try(&r.stepper, 7), error);
  cr_assert_arr_eq(r.stepper.state, before, (size_t)r.mesh.nodes * sizeof(double));
  cr_assert_arr_eq(r.stepper.next, first, (size_t)r.mesh.nodes * sizeof(double));
  free_run(&r);
}

/* A plate at 400 K put into 500 K: the surface node's rate is h (500 - 400)/(rho c cell/2). */
Test(step, first_step_is_the_shortest_of_its_three_rules) {
  double tolerance = 0.1;
  make_case(&m, "plate");
  add_layer(&m, add_material(&m, 40, 8000, 500), 0.04, 0);
  start_at(&m, 400);
  add_stage(&m, 1000, convects(200, constant(500)), insulated());
  make_run(&r, &m, 390, 510, 16);
  double rate = 200 * 100.0 / (8000 * 500.0 * 0.04 / 32);
  cr_assert_float_eq(stepper_first(&r.stepper, tolerance, 1000, true), 2 * tolerance / rate,
                     1e-9 * tolerance / rate);
  cr_assert_float_eq(stepper_first(&r.stepper, tolerance, 1000, false), 20, 1e-12);
  cr_assert_float_eq(stepper_first(&r.stepper, tolerance, 1, true), 0.02, 1e-12);
  free_run(&r);
  /* from equilibrium into a ramp of 2 K/s: only the change of the rate is felt */
  static const double x[] = {0, 1000}, y[] = {400, 2400};
  m.stage[0].faces.condition[0] = convects(200, rows(2, x, y));
  make_run(&r, &m, 390, 2500, 16);
  double change = 200 * 2.0 / (8000 * 500.0 * 0.04 / 32);
  cr_assert_float_eq(stepper_first(&r.stepper, tolerance, 1000, true), 2 * sqrt(tolerance / change),
                     1e-9);
  free_run(&r);
}

/* Against the series of Carslaw & Jaeger: with tiny steps what is left is the mesh's error, which
   falls by 4 when the cells are halved. */
Test(step, order_in_space_by_halving_is_two) {
  static const char *const names[] = {"plate", "cylinder", "sphere"};
  for (int power = 0; power < 3; power++) {
    double error[2];
    for (int k = 0; k < 2; k++) {
      int cells = k ? 24 : 12;
      double bi = 2, radius = 0.05, diffusivity = 40 / (8000 * 500.0);
      double end = 0.3 * radius * radius / diffusivity;
      make_case(&m, names[power]);
      add_layer(&m, add_material(&m, 40, 8000, 500), radius, 0);
      start_at(&m, 1000);
      /* a plate is insulated at its middle plane, the others have an axis there */
      add_stage(&m, end, insulated(), convects(bi * 40 / radius, constant(300)));
      make_run(&r, &m, 290, 1010, cells);
      take_steps(&r, end, 400);
      error[k] = 0;
      for (int i = 0; i < r.mesh.nodes; i++) {
        double exact = 300 + 700 * exact_ratio(power, bi, r.mesh.position[i] / radius, 0.3);
        error[k] = fmax(error[k], fabs(temperature_at(&r, r.stepper.state, i) - exact));
      }
      free_run(&r);
    }
    double order = log2(error[0] / error[1]);
    cr_assert(order > 1.85 && order < 2.3, "%s: errors %g and %g K: order %g", names[power],
              error[0], error[1], order);
  }
}
