/* steady: states without storage against closed forms (H. S. Carslaw & J. C. Jaeger, Conduction of
   Heat in Solids, 2nd ed. 1959: 3.2 plate, 7.2 hollow cylinder, 9.2 hollow sphere, 1.6 and 4.14
   k(T) and generation). */
#include "steady.h"

#include "make_run.h"
#include "physics.h"

static made m;
static run r;

/* Newton stops at 1e-9 K; profiles come from T(H) of the table, known to 1e-12 K. */
#define SETTLED 1e-8

static double steady_at(int node) {
  return temperature_at(&r, r.stepper.state, node);
}

static void solve(int cells) {
  fault f;
  make_run(&r, &m, 200, 3000, cells);
  r.system.to = 0;
  r.system.at_rest = true;
  status s = steady_solve(&r.stepper, 0, &f);
  cr_assert_eq(s, STATUS_OK, "%s", s ? f.is : "");
}

/* k = a + b (T - 273.15) between two prescribed faces: theta is linear. */
Test(steady, plate_with_conductivity_linear_in_temperature) {
  make_case(&m, "plate");
  int i = add_material(&m, 1, 7800, 500);
  double a = 60, b = -0.03;
  made_curve(&m, i, OF_CONDUCTIVITY)->count = 0;
  add_piece(&m, i, OF_CONDUCTIVITY, (piece){300, 1400, {a, b}, 0, 0});
  add_layer(&m, i, 0.1, 0);
  start_at(&m, 600);
  add_stage(&m, 0, prescribed(constant(1273.15)), prescribed(constant(373.15)));
  solve(16);
  double hot = a * 1000 + b * 1e6 / 2, cold = a * 100 + b * 1e4 / 2;
  for (int k = 0; k < r.mesh.nodes; k++) {
    double theta = hot + (cold - hot) * r.mesh.position[k] / 0.1;
    double exact = (-a + sqrt(a * a + 2 * b * theta)) / b + 273.15;
    /* k falls by half over the plate: cubic rows of 5 K leave 1e-9 of theta's curvature */
    cr_assert_float_eq(steady_at(k), exact, 1e-6, "%g m: %.9g, not %.9g", r.mesh.position[k],
                       steady_at(k), exact);
  }
  double flux = (hot - cold) / 0.1;
  cr_assert_float_eq(r.stepper.heat_rate[HEAT_FIRST], flux, 1e-7 * flux);
  cr_assert_float_eq(r.stepper.heat_rate[HEAT_LAST], -flux, 1e-7 * flux);
  free_run(&r);
}

/* Two layers with a contact, convection on both sides: resistances in a row. */
Test(steady, resistances_in_a_row_for_every_shape) {
  static const char *const names[] = {"plate", "cylinder", "sphere"};
  for (int power = 0; power < 3; power++) {
    make_case(&m, names[power]);
    int a = add_material(&m, 0.3, 500, 900), b = add_material(&m, 40, 7800, 500);
    set_bore(&m, 0.2);
    add_layer(&m, a, 0.05, 0);
    add_layer(&m, b, 0.01, 4e-3);
    start_at(&m, 500);
    add_stage(&m, 0, convects(60, constant(1200)), convects(9, constant(300)));
    solve(24);
    double r0 = power ? 0.1 : 0, r1 = r0 + 0.05, r2 = r0 + 0.06;
    double inner = power == 0 ? 0.05 : power == 1 ? log(r1 / r0) : 1 / r0 - 1 / r1;
    double outer = power == 0 ? 0.01 : power == 1 ? log(r2 / r1) : 1 / r1 - 1 / r2;
    double first = 1 / (60 * pow(r0, power)), contact = 4e-3 / pow(r1, power);
    double last = 1 / (9 * pow(r2, power));
    double flow = 900 / (first + inner / 0.3 + contact + outer / 40 + last);
    cr_assert_float_eq(r.stepper.heat_rate[HEAT_FIRST], flow, 1e-9 * flow, "%s", names[power]);
    cr_assert_float_eq(r.stepper.heat_rate[HEAT_LAST], -flow, 1e-9 * flow);
    int joint = r.mesh.layer[0].last;
    cr_assert_float_eq(steady_at(0), 1200 - flow * first, SETTLED);
    cr_assert_float_eq(steady_at(joint), 1200 - flow * (first + inner / 0.3), SETTLED);
    cr_assert_float_eq(steady_at(joint) - steady_at(joint + 1), flow * contact, SETTLED);
    cr_assert_float_eq(steady_at(r.mesh.nodes - 1), 300 + flow * last, SETTLED);
    free_run(&r);
  }
}

/* T = T_surface + g (R^2 - r^2)/(2 n k), n = 1, 2, 3: second-order volumes are exact for it. */
Test(steady, generation_in_solid_bodies) {
  static const char *const names[] = {"plate", "cylinder", "sphere"};
  static series generation;
  generation = constant(2e6);
  for (int power = 0; power < 3; power++) {
    make_case(&m, names[power]);
    add_layer(&m, add_material(&m, 20, 7800, 500), 0.03, 0)->heat_generation = &generation;
    start_at(&m, 300);
    add_stage(&m, 0, insulated(), convects(500, constant(320)));
    solve(12);
    int n = power + 1;
    double surface = 320 + 2e6 * 0.03 / (n * 500);
    for (int k = 0; k < r.mesh.nodes; k++) {
      double x = r.mesh.position[k];
      double exact = surface + 2e6 * (0.03 * 0.03 - x * x) / (2 * n * 20);
      cr_assert_float_eq(steady_at(k), exact, SETTLED, "%s at %g", names[power], x);
    }
    double made_in = r.stepper.heat_rate[HEAT_GENERATED];
    cr_assert_float_eq(made_in, 2e6 * pow(0.03, n) / n, 1e-10 * made_in);
    cr_assert_float_eq(r.stepper.heat_rate[HEAT_LAST], -made_in, 1e-10 * made_in);
    free_run(&r);
  }
}

/* A flux in, radiation out: T^4 = T_surroundings^4 + q/(emissivity sigma), from far away. */
Test(steady, radiation_root_from_any_start) {
  static const double starts[] = {210, 300, 1000, 2500};
  for (int k = 0; k < 4; k++) {
    make_case(&m, "plate");
    add_layer(&m, add_material(&m, 30, 7800, 500), 0.02, 0);
    start_at(&m, starts[k]);
    add_stage(&m, 0, heated(constant(5e4)), radiates(0.7, constant(300)));
    solve(8);
    double back = pow(pow(300, 4) + 5e4 / (0.7 * STEFAN_BOLTZMANN), 0.25);
    cr_assert_float_eq(steady_at(r.mesh.nodes - 1), back, SETTLED);
    cr_assert_float_eq(steady_at(0), back + 5e4 * 0.02 / 30, SETTLED);
    free_run(&r);
  }
}

/* A node may rest inside a plateau of T(H): only its temperature is determined. */
Test(steady, latent_heat_does_not_matter) {
  make_case(&m, "plate");
  int i = add_material(&m, 30, 7000, 700);
  add_latent(&m, i, 250e3, 800, 800);
  add_layer(&m, i, 0.05, 0);
  start_at(&m, 400);
  add_stage(&m, 0, prescribed(constant(1000)), prescribed(constant(500)));
  solve(10);
  for (int k = 0; k < r.mesh.nodes; k++)
    cr_assert_float_eq(steady_at(k), 1000 - 500 * r.mesh.position[k] / 0.05, 1e-6);
  free_run(&r);
}

Test(steady, nothing_flows_in_equilibrium) {
  make_case(&m, "sphere");
  add_layer(&m, add_material(&m, 30, 7000, 700), 0.05, 0);
  start_at(&m, 350);
  add_stage(&m, 0, insulated(), furnace(20, 0.9, constant(350)));
  solve(8);
  for (int k = 0; k < r.mesh.nodes; k++) cr_assert_float_eq(steady_at(k), 350, SETTLED);
  free_run(&r);
}

/* Heat is generated and cannot leave: there is no steady state. */
Test(steady, a_body_without_an_outlet_is_refused) {
  static series generation;
  fault f = {0};
  generation = constant(1e5);
  make_case(&m, "plate");
  add_layer(&m, add_material(&m, 30, 7000, 700), 0.05, 0)->heat_generation = &generation;
  start_at(&m, 350);
  add_stage(&m, 0, insulated(), insulated());
  make_run(&r, &m, 200, 3000, 8);
  status s = steady_solve(&r.stepper, 0, &f);
  cr_assert(s == STATUS_SINGULAR || s == STATUS_NO_CONVERGENCE || s == STATUS_NOT_FINITE, "%d", s);
  cr_assert_eq(f.status, s);
  cr_assert_gt(strlen(f.is), 0);
  free_run(&r);
}
