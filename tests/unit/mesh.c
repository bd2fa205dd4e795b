/* mesh: volumes, conductances, twins, places. Geometry and the steady profiles of Carslaw & Jaeger,
   Conduction of Heat in Solids, 2nd ed. 1959: 3.2 (plane), 7.2 (cylinder), 9.2 (sphere). */
#include "mesh.h"

#include "make_run.h"

static made m;
static run r;

static const char *const names[] = {"plate", "cylinder", "sphere"};

/* Three layers of two materials with a contact, hollow if round: inner radius 0.02, outer 0.06. */
static void layered(const char *name) {
  make_case(&m, name);
  int a = add_material(&m, 40, 7800, 500), b = add_material(&m, 1.2, 2000, 900);
  set_bore(&m, 0.04);
  add_layer(&m, a, 0.010, 0);
  add_layer(&m, b, 0.025, 2e-4);
  add_layer(&m, a, 0.005, 0);
  start_at(&m, 300);
  make_tables(&r, &m, 290, 400, 64);
}

/* One solid layer of radius (or thickness) 0.05. */
static void single(const char *name) {
  make_case(&m, name);
  add_layer(&m, add_material(&m, 40, 7800, 500), 0.05, 0);
  start_at(&m, 300);
  make_tables(&r, &m, 290, 400, 64);
}

static double body_volume(double inner, double outer, int power) {
  return (pow(outer, power + 1) - pow(inner, power + 1)) / (power + 1);
}

/* Integral of dr / A(r). */
static double resistance(double inner, double outer, int power) {
  return power == 0 ? outer - inner : power == 1 ? log(outer / inner) : 1 / inner - 1 / outer;
}

Test(mesh, volumes_sum_to_the_volume_of_each_layer) {
  for (int i = 0; i < 3; i++) {
    layered(names[i]);
    r.end_cell[0][0] = 1e-5;
    r.end_cell[2][1] = 1e-4;
    make_mesh(&r, &m, 40, 1, false);
    double at = i ? 0.02 : 0;
    for (int l = 0; l < 3; l++) {
      double outer = at + m.layer[l].thickness, exact = body_volume(at, outer, i);
      /* round-off of some tens of additions */
      cr_assert_float_eq(mesh_volume(&r.mesh, r.mesh.layer[l].first, r.mesh.layer[l].last), exact,
                         1e-13 * exact);
      cr_assert_float_eq(r.mesh.position[r.mesh.layer[l].first], at, 1e-16);
      cr_assert_float_eq(r.mesh.position[r.mesh.layer[l].last], outer, 1e-16);
      at = outer;
    }
    for (int k = 0; k < r.mesh.nodes; k++) cr_assert_gt(r.mesh.volume[k], 0);
    free_run(&r);
  }
}

/* In a steady hollow body without generation the potential falls by flow x integral of dr/A between
   any two nodes: the conductances must be exact, however graded. */
Test(mesh, conductances_are_exact_for_steady_bodies) {
  for (int i = 0; i < 3; i++) {
    layered(names[i]);
    r.end_cell[0][0] = 2e-6;
    make_mesh(&r, &m, 30, 1, false);
    for (int k = 0; k + 1 < r.mesh.nodes; k++) {
      if (r.mesh.contact[k]) continue;
      double a = r.mesh.position[k], b = r.mesh.position[k + 1];
      double exact = 1 / resistance(a, b, i);
      /* neighbours 2 um apart at 20 mm are known to 1e-16 x 1e4 */
      cr_assert_float_eq(r.mesh.conductance[k], exact, 1e-11 * exact, "%s, node %d", names[i], k);
    }
    free_run(&r);
  }
}

/* A solid round heated evenly has theta = -g r^2/(2 n), n = 2 (cylinder) or 3 (sphere), and g V
   flows out of every inner volume V. */
Test(mesh, conductances_around_an_axis_are_exact_for_a_parabola) {
  for (int i = 1; i < 3; i++) {
    single(names[i]);
    make_mesh(&r, &m, 16, 1, false);
    double g = 1e6, inside = 0;
    for (int k = 0; k + 1 < r.mesh.nodes; k++) {
      double a = r.mesh.position[k], b = r.mesh.position[k + 1];
      inside += g * r.mesh.volume[k];
      double flow = r.mesh.conductance[k] * g * (b * b - a * a) / (2 * (i + 1));
      cr_assert_float_eq(flow, inside, 1e-12 * inside, "%s, node %d", names[i], k);
    }
    cr_assert(r.mesh.solid);
    cr_assert_eq(r.mesh.area[0], 0);
    cr_assert_float_eq(r.mesh.area[1], pow(0.05, i), 1e-15);
    free_run(&r);
  }
}

Test(mesh, contacts_are_conductances_and_at_most_the_largest) {
  static const double given[] = {0, 1e-12, 1e-8, 2e-4};
  static const double expected[] = {1e8, 1e8, 1e8, 5e3};
  for (int i = 0; i < 3; i++)
    for (int k = 0; k < 4; k++) {
      layered(names[i]);
      m.layer[0].contact = given[k];
      make_mesh(&r, &m, 30, 1, false);
      int node = r.mesh.layer[0].last;
      double area = pow(i ? 0.03 : 0.01, i), exact = expected[k] * area;
      cr_assert(r.mesh.contact[node]);
      cr_assert_not(r.mesh.contact[node + 1]);
      cr_assert_float_eq(r.mesh.conductance[node], exact, 1e-12 * exact);
      cr_assert_float_eq(r.mesh.position[node], r.mesh.position[node + 1], 0,
                         "both nodes of an interface lie on it");
      free_run(&r);
    }
}

Test(mesh, areas_and_the_factor_to_the_whole_body) {
  static const double whole[] = {1, 2 * M_PI, 4 * M_PI};
  for (int i = 0; i < 3; i++) {
    layered(names[i]);
    make_mesh(&r, &m, 30, 1, false);
    cr_assert_float_eq(r.mesh.whole, whole[i], 1e-14);
    cr_assert_float_eq(r.mesh.area[0], pow(0.02, i), 1e-16);
    cr_assert_float_eq(r.mesh.area[1], i ? pow(0.06, i) : 1, 1e-15);
    cr_assert_not(r.mesh.solid);
    cr_assert_float_eq(r.mesh.width, i ? 0.06 : 0.04, 1e-16);
    free_run(&r);
  }
}

Test(mesh, every_node_of_the_coarse_twin_is_a_node_of_the_fine_mesh) {
  for (int i = 0; i < 3; i++) {
    static run coarse;
    layered(names[i]);
    make_tables(&coarse, &m, 290, 400, 64);
    r.end_cell[0][0] = coarse.end_cell[0][0] = 1e-4;
    r.end_cell[2][1] = coarse.end_cell[2][1] = 3e-5;
    make_mesh(&r, &m, 48, 1, false);
    make_mesh(&coarse, &m, 48, 2, false);
    for (int l = 0; l < 3; l++) {
      const mesh_layer *f = &r.mesh.layer[l], *c = &coarse.mesh.layer[l];
      cr_assert_eq((f->last - f->first) % 2, 0);
      cr_assert_geq(f->last - f->first, 4);
      cr_assert_eq(c->last - c->first, (f->last - f->first) / 2);
      for (int k = 0; k <= c->last - c->first; k++)
        cr_assert_eq(coarse.mesh.position[c->first + k], r.mesh.position[f->first + 2 * k]);
    }
    double fine = mesh_volume(&r.mesh, 0, r.mesh.nodes - 1);
    cr_assert_float_eq(mesh_volume(&coarse.mesh, 0, coarse.mesh.nodes - 1), fine, 1e-13 * fine);
    free_run(&coarse);
    free_run(&r);
  }
}

Test(mesh, end_cells_have_the_sizes_wanted_and_cells_change_smoothly) {
  single("plate");
  r.end_cell[0][0] = 2e-5;
  r.end_cell[0][1] = 4e-4;
  make_mesh(&r, &m, 48, 1, false);
  int n = r.mesh.nodes;
  cr_assert_eq(n, 49);
  /* the search stops when both gradings are right to 1e-3 */
  cr_assert_float_eq(r.mesh.position[1] - r.mesh.position[0], 2e-5, 2e-3 * 2e-5);
  cr_assert_float_eq(r.mesh.position[n - 1] - r.mesh.position[n - 2], 4e-4, 2e-3 * 4e-4);
  for (int k = 1; k + 1 < n; k++) {
    double ratio = (r.mesh.position[k + 1] - r.mesh.position[k]) /
                   (r.mesh.position[k] - r.mesh.position[k - 1]);
    cr_assert(ratio > 0.7 && ratio < 1.5, "neighbours differ by %g", ratio);
  }
  free_run(&r);
}

Test(mesh, without_a_wish_cells_are_even) {
  single("sphere");
  make_mesh(&r, &m, 20, 1, false);
  for (int k = 0; k < r.mesh.nodes; k++)
    cr_assert_float_eq(r.mesh.position[k], 0.05 * k / 20, 1e-16);
  free_run(&r);
}

Test(mesh, cells_are_shared_by_diffusion_length) {
  layered("plate"); /* thickness / sqrt(diffusivity): 3.12, 30.6, 1.56 */
  make_mesh(&r, &m, 96, 1, false);
  int cells[3];
  for (int l = 0; l < 3; l++) cells[l] = r.mesh.layer[l].last - r.mesh.layer[l].first;
  cr_assert_eq(cells[0], 12); /* an eighth of all at least, so that thin layers are refined too */
  cr_assert_eq(cells[1], 84);
  cr_assert_eq(cells[2], 12);
  free_run(&r);
}

/* ---- places ---- */

static double cubic(double x) {
  return 300 + 900 * x + 4e4 * x * x + 3e6 * x * x * x; /* rises everywhere in 0..0.05 */
}

Test(mesh, a_spot_is_exact_for_a_cubic) {
  static double nodal[200];
  for (int i = 0; i < 3; i++) {
    single(names[i]);
    r.end_cell[0][1] = 1e-4;
    make_mesh(&r, &m, 24, 1, false);
    for (int k = 0; k < r.mesh.nodes; k++) nodal[k] = cubic(r.mesh.position[k]);
    for (int k = 0; k <= 1000; k++) {
      location at = {.coordinate = {0.05 * k / 1000}};
      mesh_spot s = mesh_locate(&r.mesh, &at);
      /* weights of order one on values near 800 */
      cr_assert_float_eq(mesh_spot_value(&s, nodal), cubic(at.coordinate[0]), 1e-11);
    }
    free_run(&r);
  }
}

Test(mesh, a_spot_on_a_node_is_that_node) {
  single("cylinder");
  r.end_cell[0][1] = 1e-5;
  make_mesh(&r, &m, 24, 1, false);
  for (int k = 0; k < r.mesh.nodes; k++) {
    location at = {.coordinate = {r.mesh.position[k]}};
    mesh_spot s = mesh_locate(&r.mesh, &at);
    cr_assert_eq(s.count, 1);
    cr_assert_eq(s.first, k);
  }
  free_run(&r);
}

Test(mesh, a_location_on_an_interface_is_in_its_own_layer) {
  layered("cylinder");
  make_mesh(&r, &m, 30, 1, false);
  location inner = {.coordinate = {0.03}, .layer = 0}, outer = {.coordinate = {0.03}, .layer = 1};
  mesh_spot a = mesh_locate(&r.mesh, &inner), b = mesh_locate(&r.mesh, &outer);
  cr_assert(a.count == 1 && a.first == r.mesh.layer[0].last);
  cr_assert(b.count == 1 && b.first == r.mesh.layer[1].first);
  /* a spot just beside the interface takes nodes of its own layer only */
  location close = {.coordinate = {0.03 + 1e-6}, .layer = 1};
  mesh_spot s = mesh_locate(&r.mesh, &close);
  cr_assert_geq(s.first, r.mesh.layer[1].first);
  cr_assert_leq(s.first + s.count - 1, r.mesh.layer[1].last);
  free_run(&r);
}

Test(mesh, a_monotone_profile_is_never_overshot) {
  static double nodal[200];
  single("plate");
  make_mesh(&r, &m, 24, 1, false);
  for (int k = 0; k < r.mesh.nodes; k++) nodal[k] = k < 12 ? 300 : 1000; /* a shock */
  for (int k = 0; k <= 1000; k++) {
    location at = {.coordinate = {0.05 * k / 1000}};
    mesh_spot s = mesh_locate(&r.mesh, &at);
    double value = mesh_spot_value(&s, nodal);
    cr_assert(value >= 300 && value <= 1000, "%g", value);
  }
  free_run(&r);
}

/* ---- halved ---- */

Test(mesh, half_of_an_odd_number_of_layers_shares_its_middle_node) {
  make_case(&m, "plate");
  int a = add_material(&m, 40, 7800, 500), b = add_material(&m, 1.2, 2000, 900);
  add_layer(&m, a, 0.01, 0);
  add_layer(&m, b, 0.03, 1e-4);
  add_layer(&m, a, 0.01, 1e-4);
  make_tables(&r, &m, 290, 400, 64);
  make_mesh(&r, &m, 24, 1, true);
  const mesh *h = &r.mesh;
  cr_assert(h->halved && h->middle_shared);
  cr_assert_eq(h->layers, 2);
  cr_assert_float_eq(h->position[h->nodes - 1], 0.025, 1e-16);
  cr_assert_float_eq(mesh_volume(h, 0, h->nodes - 1), 0.025, 1e-15);
  cr_assert_eq(mesh_whole_nodes(h), 2 * h->nodes - 1);
  cr_assert_eq(mesh_layer_of(h, 0), 0);
  cr_assert_eq(mesh_layer_of(h, 1), 1);
  cr_assert_eq(mesh_layer_of(h, 2), 0);
  location near = {.coordinate = {0.013}, .layer = 1}, far = {.coordinate = {0.037}, .layer = 1};
  mesh_spot s = mesh_locate(h, &near), t = mesh_locate(h, &far);
  cr_assert_eq(s.first, t.first);
  for (int k = 0; k < s.count; k++)
    cr_assert_float_eq(s.weight[k], t.weight[k], 1e-10, "positions that differ by round-off");
  location back = {.coordinate = {0.05}, .layer = 2};
  t = mesh_locate(h, &back);
  cr_assert(t.count == 1 && t.first == 0);
  free_run(&r);
}

Test(mesh, half_of_an_even_number_of_layers_ends_at_its_middle_interface) {
  make_case(&m, "plate");
  int a = add_material(&m, 40, 7800, 500);
  add_layer(&m, a, 0.01, 0);
  add_layer(&m, a, 0.01, 1e-4);
  make_tables(&r, &m, 290, 400, 64);
  make_mesh(&r, &m, 12, 1, true);
  const mesh *h = &r.mesh;
  cr_assert(h->halved && !h->middle_shared);
  cr_assert_eq(h->layers, 1);
  cr_assert_float_eq(h->position[h->nodes - 1], 0.01, 1e-16);
  cr_assert_eq(mesh_whole_nodes(h), 2 * h->nodes);
  cr_assert_eq(mesh_layer_of(h, 1), 0);
  cr_assert_eq(h->whole_layers, 2);
  free_run(&r);
}

Test(mesh, too_many_nodes_are_refused_and_the_largest_number_is_not) {
  fault f;
  single("plate");
  mesh_plan plan = {LIMIT_NODES - 2, 1, (const double(*)[2])r.end_cell, false};
  cr_assert_eq(mesh_build(&r.mesh, &m.the_case, &plan, r.property, &r.memory, &f), STATUS_OK);
  cr_assert_eq(r.mesh.nodes, LIMIT_NODES - 1);
  plan.cells = LIMIT_NODES;
  cr_assert_eq(mesh_build(&r.mesh, &m.the_case, &plan, r.property, &r.memory, &f),
               STATUS_BEYOND_LIMIT);
  arena small;
  arena_init(&small, 1000);
  plan.cells = 24;
  cr_assert_eq(mesh_build(&r.mesh, &m.the_case, &plan, r.property, &small, &f), STATUS_NO_MEMORY);
  arena_free(&small);
  free_run(&r);
}
