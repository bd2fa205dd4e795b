/* watch: places, heat and heat flow along a step, against the nodes themselves and against
 * derivatives. */
#include "watch.h"

#include "make_run.h"

static made m;
static run r;
static watch w;
static const double ramp_x[] = {0, 4000}, ramp_y[] = {500, 1500};

/* Two layers on a bore of 30 mm, 20 + 15 mm, in the middle of a step of 30 s. */
static void in_a_step(const char *name, face_condition last) {
  fault f;
  static series generation;
  generation = wave(2e5, 1e5, 900, 0);
  make_case(&m, name);
  int a = add_material(&m, 1, 7800, 1), b = add_material(&m, 2, 2500, 900);
  set_linear(&m, a, OF_CONDUCTIVITY, 55, -0.03);
  set_linear(&m, a, OF_SPECIFIC_HEAT, 440, 0.4);
  set_bore(&m, 0.03);
  add_layer(&m, a, 0.02, 0);
  add_layer(&m, b, 0.015, 2e-4)->heat_generation = &generation;
  start_at(&m, 400);
  add_stage(&m, 1000, convects(300, constant(320)), last);
  double origin = strcmp(name, "plate") ? 0.015 : 0;
  add_point(&m, origin + 0.0071, 0);
  add_point(&m, origin + 0.02, 0);
  add_point(&m, origin + 0.02, 1);
  add_point(&m, origin + 0.035, 1);
  make_run(&r, &m, 280, 1600, 20);
  take_steps(&r, 200, 100);
  cr_assert_eq(watch_init(&w, &m.the_case, &r.mesh, &r.memory, &f), STATUS_OK);
  cr_assert_geq(stepper_try(&r.stepper, 30), 0);
  watch_step(&w, &r.stepper, 1e4, false);
}

static int trace_of(place p) {
  int i = watch_add_place(&w, &p);
  cr_assert_geq(i, 0);
  return i;
}

static void nodes_at(double t, double *temperature) {
  double state[64];
  stepper_nodes(&r.stepper, t, state);
  conduction_temperatures(&r.mesh, state, temperature);
}

Test(watch, places_are_what_the_nodes_say) {
  in_a_step("cylinder", furnace(30, 0.8, rows(2, ramp_x, ramp_y)));
  double node[64];
  for (double t = 200; t <= 230; t += 7.5) {
    nodes_at(t, node);
    for (int in = -1; in < 2; in++) {
      int first = in < 1 ? 0 : r.mesh.layer[1].first;
      int last = in == 0 ? r.mesh.layer[0].last : r.mesh.nodes - 1;
      double least = INFINITY, most = 0, sum = 0, volume = 0;
      for (int i = first; i <= last; i++) {
        least = fmin(least, node[i]);
        most = fmax(most, node[i]);
        sum += r.mesh.volume[i] * node[i];
        volume += r.mesh.volume[i];
      }
      cr_assert_eq(watch_value(&w, trace_of((place){PLACE_COLDEST, 0, in}), t), least);
      cr_assert_eq(watch_value(&w, trace_of((place){PLACE_HOTTEST, 0, in}), t), most);
      cr_assert_eq(watch_value(&w, trace_of((place){PLACE_SECTION_DIFFERENCE, 0, in}), t),
                   most - least);
      cr_assert_float_eq(watch_value(&w, trace_of((place){PLACE_MEAN, 0, in}), t), sum / volume,
                         1e-10);
    }
    cr_assert_eq(watch_value(&w, trace_of(face_place(0)), t), node[0]);
    cr_assert_eq(watch_value(&w, trace_of(face_place(1)), t), node[r.mesh.nodes - 1]);
    cr_assert_eq(watch_value(&w, trace_of(point_place(1)), t), node[r.mesh.layer[0].last]);
    cr_assert_eq(watch_value(&w, trace_of(point_place(2)), t), node[r.mesh.layer[1].first]);
    cr_assert_eq(watch_value(&w, trace_of(point_place(3)), t), node[r.mesh.nodes - 1]);
    mesh_spot s = mesh_locate(&r.mesh, &m.point[0].at);
    cr_assert_eq(watch_value(&w, trace_of(point_place(0)), t), mesh_spot_value(&s, node));
  }
  free_run(&r);
}

Test(watch, mid_wall_is_half_way_and_center_is_the_axis) {
  in_a_step("cylinder", insulated());
  double node[64];
  nodes_at(210, node);
  location half = {.coordinate = {0.015 + 0.0175}, .layer = 0};
  mesh_spot s = mesh_locate(&r.mesh, &half);
  cr_assert_eq(watch_value(&w, trace_of(whole_place(PLACE_MID_WALL)), 210),
               mesh_spot_value(&s, node));
  free_run(&r);

  fault f;
  make_case(&m, "sphere");
  add_layer(&m, add_material(&m, 30, 7800, 500), 0.03, 0);
  start_at(&m, 400);
  add_stage(&m, 1000, insulated(), convects(300, constant(900)));
  make_run(&r, &m, 280, 1000, 8);
  cr_assert_eq(watch_init(&w, &m.the_case, &r.mesh, &r.memory, &f), STATUS_OK);
  cr_assert_geq(stepper_try(&r.stepper, 5), 0);
  watch_step(&w, &r.stepper, 0, false);
  nodes_at(3, node);
  cr_assert_eq(watch_value(&w, trace_of(whole_place(PLACE_CENTER)), 3), node[0]);
  cr_assert_float_eq(watch_value(&w, trace_of(whole_place(PLACE_MID_WALL)), 3), node[4], 1e-12);
  free_run(&r);
}

Test(watch, samples_are_values_at_equal_parts_of_the_step) {
  in_a_step("sphere", furnace(30, 0.8, rows(2, ramp_x, ramp_y)));
  int traces[] = {trace_of(point_place(0)), trace_of(whole_place(PLACE_MEAN)),
                  trace_of(face_place(1))};
  for (int order = 0; order < 2; order++) { /* spots before and after the profile is there */
    for (int k = 0; k < 3; k++)
      for (int j = 0; j < SEGMENT_SAMPLES; j++)
        cr_assert_float_eq(watch_sample(&w, traces[k], j),
                           watch_value(&w, traces[k], 200 + 30.0 * j / (SEGMENT_SAMPLES - 1)),
                           1e-9);
    watch_step(&w, &r.stepper, 1e4, false);
  }
  free_run(&r);
}

static int heat_trace(trace_kind kind, int face) {
  trace_request q = {.kind = kind, .face = face};
  int i = watch_request(&w, &q);
  cr_assert_geq(i, 0);
  return i;
}

/* d heat/dt = heat flow, whatever crosses; both in the shape's own unit. Heat is a polynomial of
   third order along the step, so its derivative is right to the step's own error, 1e-4 of the flow.
 */
Test(watch, heat_flow_is_the_rate_of_heat) {
  static const char *const names[] = {"plate", "cylinder", "sphere"};
  face_condition lasts[] = {furnace(30, 0.8, rows(2, ramp_x, ramp_y)),
                            prescribed(rows(2, ramp_x, ramp_y)), heated(constant(1e4)),
                            insulated()};
  for (int s = 0; s < 3; s++)
    for (int k = 0; k < 4; k++) {
      in_a_step(names[s], lasts[k]);
      if (k == 1) { /* a first step from 400 K into 500 K rings: look at a later, shorter one */
        take_steps(&r, 100, 100);
        cr_assert_geq(stepper_try(&r.stepper, 2), 0);
        watch_step(&w, &r.stepper, 1e4, false);
      }
      double middle = r.stepper.t + 0.5 * r.stepper.h, d = 0.01 * r.stepper.h, both = 0;
      for (int face = 0; face < 2; face++) {
        int heat = heat_trace(TRACE_HEAT, face), flow = heat_trace(TRACE_HEAT_FLOW, face);
        double rate =
            (watch_value(&w, heat, middle + d) - watch_value(&w, heat, middle - d)) / (2 * d);
        double told = watch_value(&w, flow, middle);
        cr_assert_float_eq(told, rate, 3e-4 * fabs(rate) + 1e-9,
                           "%s, condition %d, face %d: %g, %g", names[s], k, face, told, rate);
        both += told;
      }
      double all = watch_value(&w, heat_trace(TRACE_HEAT_FLOW, -1), middle);
      cr_assert_float_eq(all, both, 1e-12 * (1 + fabs(both)));
      free_run(&r);
    }
}

Test(watch, heat_flow_through_a_face_by_its_law) {
  static const double whole[] = {1, 2 * M_PI, 4 * M_PI};
  static const char *const names[] = {"plate", "cylinder", "sphere"};
  for (int s = 0; s < 3; s++) {
    in_a_step(names[s], insulated());
    double node[64], area = whole[s] * pow(s ? 0.015 : 1, s);
    nodes_at(213, node);
    double exact = area * 300 * (320 - node[0]);
    cr_assert_float_eq(watch_value(&w, heat_trace(TRACE_HEAT_FLOW, 0), 213), exact,
                       1e-12 * fabs(exact));
    cr_assert_eq(watch_value(&w, heat_trace(TRACE_HEAT_FLOW, 1), 213), 0);
    free_run(&r);
  }
}

Test(watch, the_same_place_is_one_trace_and_there_is_a_limit) {
  in_a_step("plate", insulated());
  int a = trace_of(point_place(1)), b = trace_of(whole_place(PLACE_MEAN));
  cr_assert_neq(a, b);
  cr_assert_eq(trace_of(point_place(1)), a);
  cr_assert_eq(trace_of(whole_place(PLACE_MEAN)), b);
  cr_assert_neq(trace_of((place){PLACE_MEAN, 0, 1}), b);
  cr_assert_neq(heat_trace(TRACE_HEAT, 0), heat_trace(TRACE_HEAT, 1));
  cr_assert_neq(heat_trace(TRACE_HEAT, 0), heat_trace(TRACE_HEAT_FLOW, 0));
  while (w.count < MOST_TRACES) heat_trace(TRACE_HEAT, 100 + w.count);
  trace_request q = {.kind = TRACE_HEAT, .face = 99};
  cr_assert_eq(watch_request(&w, &q), -1);
  cr_assert_eq(trace_of(point_place(1)), a, "one that is there is still found");
  free_run(&r);
}

Test(watch, a_still_instant_is_the_state_itself) {
  in_a_step("cylinder", furnace(30, 0.8, rows(2, ramp_x, ramp_y)));
  watch_step(&w, &r.stepper, 1e4, true);
  double slope;
  for (double t = 0; t < 500; t += 100) {
    double exact = property_temperature(property_at(&r, 0), r.stepper.state[0], &slope);
    cr_assert_eq(watch_value(&w, trace_of(face_place(0)), t), exact);
  }
  segment g = watch_segment(&w, 0, true, true);
  cr_assert_eq(g.t0, g.t1);
  free_run(&r);
}

Test(watch, a_segment_speaks_in_times_of_the_case) {
  in_a_step("cylinder", furnace(30, 0.8, rows(2, ramp_x, ramp_y)));
  int mean = trace_of(whole_place(PLACE_MEAN));
  segment g = watch_segment(&w, 3, true, false);
  cr_assert_float_eq(g.t0, 1e4 + 200, 1e-9);
  cr_assert_float_eq(g.t1, 1e4 + 230, 1e-9);
  cr_assert(g.stage == 3 && g.stage_begins && !g.stage_ends);
  cr_assert_float_eq(g.value(&g, mean, 1e4 + 212), watch_value(&w, mean, 212), 1e-10);
  cr_assert_eq(g.sample(&g, mean, 2), watch_sample(&w, mean, 2));
  double node[64];
  nodes_at(1e4 + 221 - 1e4, node);
  const double *profile = g.profile(&g, 1e4 + 221);
  cr_assert_eq(g.section->nodes, r.mesh.nodes);
  for (int i = 0; i < r.mesh.nodes; i++) {
    cr_assert_float_eq(profile[i], node[i], 1e-10);
    cr_assert_eq(g.section->position[i], r.mesh.position[i]);
    cr_assert_eq(g.section->volume[i], r.mesh.volume[i]);
  }
  cr_assert_eq(g.section->power, 1);
  free_run(&r);
}

Test(watch, a_halved_section_is_given_whole) {
  for (int layers = 1; layers <= 2; layers++) {
    fault f;
    make_case(&m, "plate");
    int a = add_material(&m, 30, 7800, 500);
    for (int i = 0; i < layers; i++) add_layer(&m, a, 0.06 / layers, 1e-4);
    start_at(&m, 400);
    add_stage(&m, 1000, convects(300, constant(900)), convects(300, constant(900)));
    make_tables(&r, &m, 280, 1000, 64);
    make_mesh(&r, &m, 8, 1, true);
    make_stepper(&r);
    cr_assert_eq(march_start(&m.the_case, &r.stepper, &f), STATUS_OK);
    march_conditions(&r.system, &m.stage[0].faces);
    cr_assert_null(r.system.condition[1], "nothing crosses the mirror");
    r.system.to = 1000;
    stepper_begin(&r.stepper, 0);
    cr_assert_eq(watch_init(&w, &m.the_case, &r.mesh, &r.memory, &f), STATUS_OK);
    cr_assert_geq(stepper_try(&r.stepper, 5), 0);
    watch_step(&w, &r.stepper, 0, false);
    const double *profile = watch_profile(&w, 4);
    int n = w.section.nodes;
    double volume = 0;
    cr_assert_eq(n, layers == 1 ? 17 : 18);
    for (int i = 0; i < n; i++) {
      cr_assert_eq(profile[i], profile[n - 1 - i]);
      cr_assert_float_eq(w.section.position[i] + w.section.position[n - 1 - i], 0.06, 1e-16);
      if (i) cr_assert_geq(w.section.position[i], w.section.position[i - 1]);
      volume += w.section.volume[i];
    }
    cr_assert_float_eq(volume, 0.06, 1e-16 * 64);
    cr_assert_eq(watch_value(&w, trace_of(face_place(1)), 4),
                 watch_value(&w, trace_of(face_place(0)), 4));
    double front = watch_value(&w, heat_trace(TRACE_HEAT, 0), 4);
    cr_assert_gt(front, 0);
    cr_assert_eq(watch_value(&w, heat_trace(TRACE_HEAT, 1), 4), front);
    cr_assert_float_eq(watch_value(&w, heat_trace(TRACE_HEAT, -1), 4), 2 * front, 1e-12 * front);
    free_run(&r);
  }
}
