/* Thermoelastic stress across plate, cylinder and sphere, and the figure made of it. */
#include "stress.h"

#include "course.h"

enum { MOST = 401 };

typedef struct bar {
  section s;
  double position[MOST], volume[MOST], temperature[MOST];
  piece modulus_piece, expansion_piece;
  curve modulus, expansion;
  elastic e;
} bar;

static piece constant(double value) {
  return (piece){.from = -INFINITY, .to = INFINITY, .poly = {value}};
}

/* Nodes finer towards both ends, as a graded mesh has them. */
static void bar_init(bar *b, int power, int nodes, double from, double to,
                     double (*temperature)(double)) {
  b->s = (section){nodes, b->position, b->volume, power};
  for (int i = 0; i < nodes; i++) {
    double u = (double)i / (nodes - 1), graded = u - 0.1 * sin(2 * M_PI * u);
    b->position[i] = i == nodes - 1 ? to : from + (to - from) * graded;
    b->temperature[i] = temperature(b->position[i]);
  }
}

static void bar_material(bar *b, double modulus, double expansion, double poisson) {
  b->modulus_piece = constant(modulus);
  b->expansion_piece = constant(expansion);
  b->modulus = (curve){1, &b->modulus_piece};
  b->expansion = (curve){1, &b->expansion_piece};
  b->e = (elastic){.modulus = &b->modulus, .poisson = poisson};
  strain_table_init(&b->e.strain, &b->expansion);
}

/* ---- reference case R87: free plate, parabola; Timoshenko & Goodier, Theory of Elasticity,
 * thermal stress ---- */

static double parabola_87(double x) {
  return celsius(60 + 15 * (1 - (x / 0.02 - 1) * (x / 0.02 - 1)));
}

Test(stress, plate_with_a_parabola) {
  for (int nodes = 6; nodes < 100; nodes += 17) {
    bar b;
    bar_init(&b, 0, nodes, 0, 0.04, parabola_87);
    bar_material(&b, 205e9, 1.25e-5, 0.3);
    check_close(stress_at(&b.e, &b.s, b.temperature, 0.02).component[0], -18.30357142857143e6, 10);
    check_close(stress_at(&b.e, &b.s, b.temperature, 0.01).component[0], -4.575892857142858e6, 10);
    check_close(stress_at(&b.e, &b.s, b.temperature, 0).component[0], 36.60714285714286e6, 10);
    check_close(stress_at(&b.e, &b.s, b.temperature, 0.04).component[0], 36.60714285714286e6, 10);
  }
}

/* ---- reference case R89: sphere, parabola ---- */

static double parabola_89(double r) {
  return celsius(100 + 250 * (1 - r * r / 9e-4));
}

Test(stress, sphere_with_a_parabola) {
  for (int nodes = 6; nodes < 100; nodes += 17) {
    bar b;
    bar_init(&b, 2, nodes, 0, 0.03, parabola_89);
    bar_material(&b, 70e9, 8e-6, 0.22);
    static const double at[] = {0, 0.015, 0.03};
    static const double radial[] = {-71.7948717948718e6, -53.84615384615384e6, 0};
    static const double hoop[] = {-71.7948717948718e6, -35.8974358974359e6, 71.7948717948718e6};
    for (int i = 0; i < 3; i++) {
      stress_state s = stress_at(&b.e, &b.s, b.temperature, at[i]);
      check_close(s.component[0], radial[i], 10);
      check_close(s.component[1], hoop[i], 10);
    }
  }
}

/* ---- solid cylinder with a parabola T = T1 (1 - r^2/b^2): the integrals of the same book by hand
 * ---- */

static double parabola_round(double r) {
  return celsius(20 + 100 * (1 - r * r / 0.01));
}

Test(stress, solid_cylinder_with_a_parabola) {
  bar b;
  double s0 = 200e9 * 1.2e-5 * 100 / (4 * 0.7);
  bar_init(&b, 1, 12, 0, 0.1, parabola_round);
  bar_material(&b, 200e9, 1.2e-5, 0.3);
  for (int n = 0; n < 11; n++) {
    double r = 0.01 * n;
    double q = r * r / 0.01;
    stress_state s = stress_at(&b.e, &b.s, b.temperature, r);
    check_close(s.component[0], -s0 * (1 - q), 20);
    check_close(s.component[1], -s0 * (1 - 3 * q), 20);
    check_close(s.component[2], -s0 * (2 - 4 * q), 20);
  }
}

/* ---- hollow cylinder, steady conduction T = Ta ln(b/r)/ln(b/a): Timoshenko & Goodier, thermal
   stress in the long cylinder with concentric hole ---- */

#define INNER 0.05
#define OUTER 0.08

static double logarithm(double r) {
  return celsius(20 + 150 * log(OUTER / r) / log(OUTER / INNER));
}

Test(stress, hollow_cylinder_with_steady_conduction) {
  double m = log(OUTER / INNER), k = 200e9 * 1.2e-5 * 150 / (2 * 0.7 * m);
  double c = INNER * INNER / (OUTER * OUTER - INNER * INNER);
  double error[2] = {0, 0};
  for (int run = 0; run < 2; run++) {
    bar b;
    bar_init(&b, 1, run ? 41 : 21, INNER, OUTER, logarithm);
    bar_material(&b, 200e9, 1.2e-5, 0.3);
    for (int n = 0; n < 11; n++) {
      double r = INNER + 0.0029 * n;
      stress_state s = stress_at(&b.e, &b.s, b.temperature, r);
      double l = log(OUTER / r), q = OUTER * OUTER / (r * r);
      double exact[3] = {k * (-l - c * (1 - q) * m), k * (1 - l - c * (1 + q) * m),
                         k * (1 - 2 * l - 2 * c * m)};
      for (int i = 0; i < 3; i++) error[run] = fmax(error[run], fabs(s.component[i] - exact[i]));
    }
  }
  cr_expect(error[0] < 2e-4 * k, "%g of %g Pa", error[0], k);
  cr_expect(error[1] < error[0] / 6, "%g after %g: at least third order", error[1], error[0]);
}

/* ---- hollow sphere, steady conduction T = Ta a/(b - a) (b/r - 1): Timoshenko & Goodier, the
 * sphere ---- */

static double hyperbola(double r) {
  return celsius(20 + 150 * INNER / (OUTER - INNER) * (OUTER / r - 1));
}

Test(stress, hollow_sphere_with_steady_conduction) {
  double a = INNER, o = OUTER, k = 200e9 * 1.2e-5 * 150 / 0.7 * a * o / (o * o * o - a * a * a);
  bar b;
  bar_init(&b, 2, 61, a, o, hyperbola);
  bar_material(&b, 200e9, 1.2e-5, 0.3);
  for (int n = 0; n < 11; n++) {
    double r = a + 0.0029 * n;
    stress_state s = stress_at(&b.e, &b.s, b.temperature, r);
    double sum = (o * o + o * a + a * a), cube = a * a * o * o / (r * r * r);
    check_close(s.component[0], k * (a + o - sum / r + cube), 3e-5 * k * o);
    check_close(s.component[1], k * (a + o - sum / (2 * r) - cube / 2), 3e-5 * k * o);
  }
}

/* ---- what must hold whatever the properties ---- */

static double uniform(double x) {
  (void)x;
  return celsius(731);
}

static double steep(double x) {
  return celsius(20 + 900 * exp(-x / 0.005));
}

static double straight(double x) {
  return celsius(20 + 5000 * x);
}

/* E and alpha against temperature; a curve with a rational term and several pieces. */
static const piece soft[] = {{.from = 273.15, .to = 873.15, .poly = {210e9, -5e7, -4e4}},
                             {.from = 873.15, .to = 1273.15, .poly = {225.6e9, -1e8}}};
static const piece swelling[] = {
    {.from = 293.15, .to = 773.15, .poly = {1.1e-5, 1e-8}},
    {.from = 773.15, .to = 1023.15, .poly = {1.5e-5, 0, 0, 0, 0}, .rational = 1e-4, .pole = 400},
    {.from = 1023.15, .to = 1373.15, .poly = {1.6e-5}}};

static void bar_changing(bar *b) {
  b->modulus = (curve){2, soft};
  b->expansion = (curve){3, swelling};
  b->e = (elastic){.modulus = &b->modulus, .poisson = 0.3};
  strain_table_init(&b->e.strain, &b->expansion);
}

Test(stress, a_uniform_temperature_is_free_of_it) {
  for (int power = 0; power <= 2; power++)
    for (int hollow = 0; hollow <= 1; hollow++) {
      bar b;
      stress_extreme largest, smallest;
      bar_init(&b, power, 31, hollow * 0.02, 0.1, uniform);
      bar_changing(&b);
      stress_extremes(&b.e, &b.s, b.temperature, &largest, &smallest);
      cr_expect(fabs(largest.value) < 50 && fabs(smallest.value) < 50, "power %d: %g, %g Pa", power,
                largest.value, smallest.value); /* of E alpha dT = 2e9 Pa */
    }
}

Test(stress, a_straight_profile_bends_a_plate_without_stress) {
  bar b;
  stress_extreme largest, smallest;
  bar_init(&b, 0, 31, 0, 0.1, straight);
  bar_material(&b, 200e9, 1.2e-5, 0.3);
  stress_extremes(&b.e, &b.s, b.temperature, &largest, &smallest);
  cr_expect(fabs(largest.value) < 10 && fabs(smallest.value) < 10);
}

/* Force and moment over a free plate are zero, also with E(T) and alpha(T); summed here by the
 * trapezoidal rule. */
Test(stress, a_plate_carries_neither_force_nor_moment) {
  bar b;
  double force = 0, moment = 0, size = 0;
  enum { FINE = 40000 };
  bar_init(&b, 0, 81, 0, 0.1, steep);
  bar_changing(&b);
  for (int i = 0; i <= FINE; i += 10) {
    double x = 0.1 * i / FINE, s = stress_at(&b.e, &b.s, b.temperature, x).component[0];
    double weight = i == 0 || i == FINE ? 0.5 : 1;
    force += weight * s;
    moment += weight * s * (x - 0.05);
    size += weight * fabs(s);
  }
  cr_expect(fabs(force) < 2e-3 * size, "force %g of %g", force, size);
  cr_expect(fabs(moment) < 2e-3 * 0.05 * size, "moment %g of %g", moment, size);
}

/* Radial equilibrium d(r^p sr)/dr = p r^(p-1) st, and no axial force, for a steep profile and
 * constant E. */
Test(stress, rounds_are_in_equilibrium) {
  for (int power = 1; power <= 2; power++) {
    bar b;
    double axial = 0, d = 1e-6;
    bar_init(&b, power, 121, 0.02, 0.1, steep);
    bar_material(&b, 200e9, 1.2e-5, 0.3);
    for (int n = 0; n < 62; n++) {
      double r = 0.0203 + 0.0013 * n;
      stress_state below = stress_at(&b.e, &b.s, b.temperature, r - d),
                   above = stress_at(&b.e, &b.s, b.temperature, r + d);
      stress_state here = stress_at(&b.e, &b.s, b.temperature, r);
      double change =
          (pow(r + d, power) * above.component[0] - pow(r - d, power) * below.component[0]) /
          (2 * d);
      double hoop = power * pow(r, power - 1) * here.component[1];
      check_close(change, hoop, 1e-3 * 200e9 * 1.2e-5 * 900 * pow(r, power - 1));
    }
    if (power == 2) continue;
    for (int n = 0; n < 2000; n++) {
      double r = 0.02 + 2e-5 + 4e-5 * n;
      axial += stress_at(&b.e, &b.s, b.temperature, r).component[2] * r * 4e-5;
    }
    cr_expect(fabs(axial) < 1e-3 * 200e9 * 1.2e-5 * 900 * 0.1 * 0.005, "%g", axial);
  }
}

Test(stress, thermal_strain_is_the_integral_of_the_coefficient) {
  bar b;
  bar_changing(&b);
  check_close(thermal_strain(&b.e.strain, celsius(20)), 0, 1e-18);
  for (int n = 0; n < 34; n++) {
    double t = -50 + 37 * n;
    double sum = 0, step = (t - 20) / 20000; /* midpoint rule: right to a step of the jumps */
    for (int i = 0; i < 20000; i++)
      sum += step * curve_value(&b.expansion, celsius(20 + (i + 0.5) * step));
    check_close(thermal_strain(&b.e.strain, celsius(t)), sum, 5e-8);
  }
}

Test(stress, two_nodes_at_one_place_count_once) {
  bar a, b;
  bar_init(&a, 0, 21, 0, 0.04, parabola_87);
  bar_init(&b, 0, 21, 0, 0.04, parabola_87);
  for (int i = 21; i > 8; i--) {
    b.position[i] = b.position[i - 1];
    b.temperature[i] = b.temperature[i - 1];
  }
  b.s.nodes = 22;
  bar_material(&a, 205e9, 1.25e-5, 0.3);
  bar_material(&b, 205e9, 1.25e-5, 0.3);
  for (int n = 0; n < 14; n++) {
    double x = 0.003 * n;
    cr_expect_eq(stress_at(&a.e, &a.s, a.temperature, x).component[0],
                 stress_at(&b.e, &b.s, b.temperature, x).component[0]);
  }
}

/* ---- the figure ---- */

static bar shown;
static double profile_now[MOST];

/* The parabola of R87 with a height that rises and falls: most at 40 s. */
static double height(double t) {
  return t < 0 ? 0 : t / 40 * exp(1 - t / 40);
}

static const double *course_profile(const segment *s, double t) {
  cr_assert(t >= s->t0 && t <= s->t1);
  for (int i = 0; i < shown.s.nodes; i++)
    profile_now[i] = celsius(60) + height(t) * (shown.temperature[i] - celsius(60));
  return profile_now;
}

static figure *stress_figure(course *k, layer *only) {
  figure *f = course_figure(k, "stress");
  bar_init(&shown, 0, 25, 0, 0.04, parabola_87);
  bar_material(&shown, 205e9, 1.25e-5, 0.3);
  k->c.part.layers.count = 1;
  k->c.part.layers.items = only;
  f->elastic_modulus = shown.modulus;
  f->expansion = shown.expansion;
  f->poisson = 0.3;
  return f;
}

static figure_value run_stress(course *k, double end, int steps) {
  figure_value v = {0};
  course_begin(k);
  for (int j = 0; j < steps || j == 0; j++) {
    segment s = {.t0 = steps ? end * j / steps : end,
                 .t1 = steps ? end * (j + 1) / steps : end,
                 .stage_begins = j == 0,
                 .stage_ends = j >= steps - 1,
                 .section = &shown.s,
                 .profile = course_profile,
                 .self = k};
    k->figures[0].kind->observe(&k->run[0], &s);
  }
  k->figures[0].kind->finish(&k->run[0], &v);
  free(k->run[0].self);
  return v;
}

Test(stress_figure, largest_over_section_and_time) {
  static const int steps[] = {2, 7, 100};
  for (int i = 0; i < COUNT_OF(steps); i++) {
    course k = course_of(NULL);
    layer only = {.name = "layer_1"};
    stress_figure(&k, &only);
    course_stage(&k, 100, 1);
    figure_value v = run_stress(&k, 100, steps[i]);
    cr_assert(v.found);
    cr_assert_eq(v.parts, 2);
    cr_expect_str_eq(v.part[0].name, "tension");
    cr_expect_str_eq(v.part[1].name, "compression");
    check_close(v.part[0].value / 36.60714285714286e6, 1, steps[i] < 5 ? 0.02 : 1e-4);
    check_close(v.part[1].value / 18.30357142857143e6, 1,
                steps[i] < 5 ? 0.02 : 1e-4); /* a positive number */
    check_close(v.part[0].when, 40, steps[i] < 5 ? 10 : 0.5);
    check_close(v.part[1].where, 0.02, 1e-12);
    cr_expect_eq(v.part[0].where, 0); /* the first of two equal places */
    cr_expect_eq(v.value, v.part[0].value);
  }
}

Test(stress_figure, value_is_that_of_the_part_required) {
  course k = course_of(NULL);
  layer only = {.name = "layer_1"};
  requirement need = {.at_least = NAN, .at_most = 20e6, .which = 1};
  figure *f = stress_figure(&k, &only);
  const char *member;
  course_stage(&k, 100, 1);
  f->require = &need;
  cr_expect_null(f->kind->check(f, &k.c, &member));
  figure_value v = run_stress(&k, 100, 50);
  cr_expect_eq(v.value, v.part[1].value);
  need.at_most = -20e6;
  cr_expect_not_null(f->kind->check(f, &k.c, &member));
  cr_expect_str_eq(member, "require");
}

Test(stress_figure, components_at_a_place_and_time) {
  course k = course_of(NULL);
  layer only = {.name = "layer_1"};
  location where = {.coordinate = {0.02}};
  instant when = {.time = 40, .end_of_stage = -1};
  figure *f = stress_figure(&k, &only);
  course_stage(&k, 100, 1);
  f->at = &where;
  f->time = &when;
  figure_value v = run_stress(&k, 100, 7);
  cr_assert_eq(v.parts, 1);
  cr_expect_str_eq(v.part[0].name, "in_plane");
  check_close(v.part[0].value, -18.30357142857143e6, 10);
  when.time = 101;
  check_missing(run_stress(&k, 100, 7), "ends before");
}

Test(stress_figure, largest_at_one_time_and_in_a_steady_state) {
  course k = course_of(NULL), still = course_of(NULL);
  layer only = {.name = "layer_1"};
  instant when = {.time = 20, .end_of_stage = -1};
  figure *f = stress_figure(&k, &only);
  course_stage(&k, 100, 1);
  f->time = &when;
  check_close(run_stress(&k, 100, 7).part[0].value, height(20) * 36.60714285714286e6, 10);
  stress_figure(&still, &only);
  course_steady(&still);
  check_close(run_stress(&still, 40, 0).part[0].value, 36.60714285714286e6, 10);
}

Test(stress_figure, names_of_parts) {
  course k = course_of(NULL);
  layer only = {.name = "layer_1"};
  location where = {0};
  figure *f = stress_figure(&k, &only);
  cr_expect_eq(stress_part_named(f, &k.c, "tension"), 0);
  cr_expect_eq(stress_part_named(f, &k.c, "compression"), 1);
  cr_expect_eq(stress_part_named(f, &k.c, "in_plane"), -1);
  f->at = &where;
  cr_expect_eq(stress_part_named(f, &k.c, "in_plane"), 0);
  cr_expect_eq(stress_part_named(f, &k.c, "tension"), -1);
  k.c.part.shape = shape_named("cylinder");
  cr_expect_eq(stress_part_named(f, &k.c, "axial"), 2);
  k.c.part.shape = shape_named("sphere");
  cr_expect_eq(stress_part_named(f, &k.c, "axial"), -1);
  cr_expect_eq(stress_part_named(f, &k.c, "hoop"), 1);
}

Test(stress_figure, is_for_one_material_with_a_positive_modulus) {
  course k = course_of(NULL);
  layer layers[2] = {{.material = 0}, {.material = 1}};
  figure *f = stress_figure(&k, layers);
  const char *member = "";
  piece none = constant(0);
  cr_expect_null(f->kind->check(f, &k.c, &member));
  k.c.part.layers.count = 2;
  cr_expect_not_null(f->kind->check(f, &k.c, &member));
  layers[1].material = 0;
  cr_expect_null(f->kind->check(f, &k.c, &member));
  layers[0].contact = 1e-4;
  cr_expect_not_null(f->kind->check(f, &k.c, &member));
  k.c.part.layers.count = 1;
  f->elastic_modulus = (curve){1, &none};
  layers[0].contact = 0;
  cr_expect_not_null(f->kind->check(f, &k.c, &member));
  cr_expect_str_eq(member, "elastic_modulus");
}
