/* plan: which temperatures a case can reach and how fine its mesh starts. */
#include "plan.h"

#include "make_run.h"
#include "observe.h"

static made m;
static run r;

static void plate(void) {
  make_case(&m, "plate");
  add_layer(&m, add_material(&m, 40, 8000, 500), 0.05, 0);
  start_at(&m, 400);
}

static void reach(double *from, double *to) {
  plan_range(&m.the_case, from, to);
}

/* Margin: 2 K and 2 % of the span. */
static void check_reach(double least, double most) {
  double from, to, margin = 2 + 0.02 * (most - least);
  reach(&from, &to);
  cr_assert_float_eq(from, fmax(0, least - margin), 1e-9, "from %g", from);
  cr_assert_float_eq(to, most + margin, 1e-9, "to %g", to);
}

Test(plan, range_spans_starts_and_surroundings) {
  plate();
  add_stage(&m, 100, convects(10, constant(900)), insulated());
  check_reach(400, 900);
  add_stage(&m, 100, radiates(0.5, constant(1100)), prescribed(constant(280)));
  check_reach(280, 1100);
  m.layer[0].start = 250;
  check_reach(250, 1100);
}

Test(plan, range_follows_series_as_far_as_the_stage_goes) {
  static const double x[] = {0, 100, 200}, y[] = {300, 700, 5000};
  plate();
  add_stage(&m, 100, convects(10, rows(3, x, y)), insulated());
  check_reach(300, 700);
  m.stage[0].faces.condition[0] = convects(10, wave(600, 150, 50, 0));
  check_reach(400, 750);
  m.stage[0].faces.condition[0].medium = (series){.kind = SERIES_FIRE};
  double minutes = 100.0 / 60;
  check_reach(293.15, 293.15 + 345 * log10(8 * minutes + 1));
}

Test(plan, range_of_a_log_reaches_to_the_end_of_the_case) {
  static const double x[] = {0, 100, 200}, y[] = {300, 700, 800};
  plate();
  add_stage(&m, 100, insulated(), insulated());
  add_stage(&m, 100, convects(10, rows(3, x, y)), insulated());
  m.stage[1].faces.condition[0].medium.from_case_start = true;
  check_reach(300, 800);
}

Test(plan, range_of_profiles_and_steady_starts) {
  static const double x[] = {0, 0.05}, y[] = {350, 1250};
  plate();
  add_stage(&m, 100, insulated(), insulated());
  m.the_case.start = (start){.kind = START_PROFILE, .profile = {2, x, y}};
  check_reach(350, 1250);
  m.the_case.start = (start){.kind = START_STEADY};
  m.the_case.start.faces =
      (faces){.count = 2, .condition = {prescribed(constant(500)), convects(5, constant(290))}};
  check_reach(290, 500);
}

Test(plan, range_does_not_go_below_absolute_zero_and_is_never_empty) {
  plate();
  start_at(&m, 1);
  add_stage(&m, 100, insulated(), insulated());
  check_reach(1, 1);
  plate();
  m.the_case.start.kind = START_PER_LAYER;
  add_stage(&m, 0, heated(constant(5)), heated(constant(-5)));
  double from, to;
  reach(&from, &to);
  cr_assert_lt(from, to);
}

Test(plan, rungs_rise_and_are_even) {
  cr_assert_eq(plan_rung(1), 12);
  cr_assert_eq(plan_rung(12), 12);
  cr_assert_eq(plan_rung(12.1), 16);
  cr_assert_eq(plan_rung(100), 128);
  int largest = plan_rung(1e9);
  cr_assert_leq(largest, LIMIT_NODES);
  for (int last = 0, n; last < largest; last = n) {
    n = plan_rung(last + 1);
    cr_assert_gt(n, last);
    cr_assert_eq(n % 2, 0, "the coarse twin takes every second node");
  }
}

static march_plan first_plan(void) {
  march_plan p;
  memset(&p, 0, sizeof p);
  make_tables(&r, &m, 280, 1300, 64);
  plan_first(&p, &m.the_case, r.property);
  free_run(&r);
  return p;
}

Test(plan, a_smaller_error_asks_for_more) {
  static const double errors[] = {5, 0.5, 0.1, 0.02, 0.001};
  int cells = 0;
  double tolerance = 1e9;
  plate();
  add_stage(&m, 1000, convects(500, constant(900)), insulated());
  for (int i = 0; i < 5; i++) {
    m.the_case.numerical_error = errors[i];
    march_plan p = first_plan();
    cr_assert_geq(p.cells, cells);
    cr_assert_lt(p.tolerance, tolerance);
    cr_assert_leq(p.tolerance, errors[i], "a step may not take all of the error");
    cr_assert_gt(p.tolerance, 0);
    cells = p.cells;
    tolerance = p.tolerance;
  }
}

Test(plan, end_cells_are_small_where_heat_is_exchanged_and_only_there) {
  plate();
  add_stage(&m, 1000, convects(5000, constant(900)), insulated());
  march_plan p = first_plan();
  double mean = 0.05 / p.cells;
  cr_assert_leq(p.end_cell[0][0], 0.3001 * mean);
  cr_assert_gt(p.end_cell[0][0], 0);
  cr_assert_geq(p.end_cell[0][1], 0.2999 * mean, "nothing crosses the back");
  /* a sharper look asks for a smaller cell: rows every 0.1 s */
  history_every(&m, 0.1);
  march_plan sharp = first_plan();
  cr_assert_lt(sharp.end_cell[0][0], p.end_cell[0][0]);
  /* a gentle flux does not: the error asked for hides it */
  m.stage[0].faces.condition[0] = convects(2, constant(900));
  march_plan gentle = first_plan();
  cr_assert_gt(gentle.end_cell[0][0], sharp.end_cell[0][0]);
}

Test(plan, an_axis_and_a_mirror_have_no_wish) {
  make_case(&m, "sphere");
  add_layer(&m, add_material(&m, 40, 8000, 500), 0.05, 0);
  start_at(&m, 400);
  add_stage(&m, 1000, insulated(), convects(500, constant(900)));
  march_plan p = first_plan();
  cr_assert_eq(p.end_cell[0][0], INFINITY);
  cr_assert(isfinite(p.end_cell[0][1]));
  plate();
  add_stage(&m, 1000, convects(500, constant(900)), convects(500, constant(900)));
  p = first_plan();
  cr_assert(p.halved);
  cr_assert(isfinite(p.end_cell[0][0]));
  cr_assert_eq(p.end_cell[0][1], INFINITY);
}

Test(plan, layers_that_start_apart_are_fine_where_they_meet) {
  plate();
  add_layer(&m, 0, 0.05, 1e-4);
  add_stage(&m, 1000, insulated(), insulated());
  march_plan p = first_plan();
  cr_assert_eq(p.end_cell[0][1], INFINITY);
  cr_assert_eq(p.end_cell[1][0], INFINITY);
  m.layer[1].start = 1200;
  p = first_plan();
  cr_assert(isfinite(p.end_cell[0][1]));
  cr_assert_eq(p.end_cell[0][1], p.end_cell[1][0], "one material, one size");
}
