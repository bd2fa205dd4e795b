/* until: stages that end by conditions, with crossings known exactly. A front that is prescribed
   follows its series to round-off; the mean of a plate of constant properties under a constant flux
   q rises by exactly q/(rho c L) per second. */
#include "until.h"

#include "make_attempt.h"

static made m;
static trial t;

#define RHO_C 4e6
#define WIDTH 0.05

/* Plate of 300 K whose front follows `front` and whose back takes up `flux`. */
static void plate(series front, double flux) {
  make_case(&m, "plate");
  add_layer(&m, add_material(&m, 40, 8000, 500), WIDTH, 0);
  start_at(&m, 300);
  add_stage(&m, 0, front.kind ? prescribed(front) : insulated(), heated(constant(flux)));
}

static stage_result end_by(int count, const condition_node *nodes, double held_for, double limit) {
  end_stage_by(&m, count, nodes, held_for, limit);
  make_attempt(&t, &m, 200, 900, 8);
  run_attempt(&t, 0.05);
  stage_result end = t.attempt->outcome.stage[0];
  return end;
}

/* Events are bisected to 1e-13 of the step and landed on; T = T(H) is known to 1e-12 K. */
#define LANDS 1e-6

static const place front = {.kind = PLACE_FACE, .index = 0, .layer = -1};
static const place mean = {.kind = PLACE_MEAN, .layer = -1};

static void check_end(stage_result got, double at) {
  cr_assert_eq(got.ended_by, ENDED_UNTIL, "ended by %d at %.9g", got.ended_by, got.end);
  cr_assert_float_eq(got.end, at, LANDS, "%.12g, not %.12g", got.end, at);
  free_attempt(&t);
}

Test(until, mean_rises_to_a_level_under_a_flux) {
  double rate = 2e4 / (RHO_C * WIDTH); /* 0.1 K/s */
  plate((series){0}, 2e4);
  condition_node node = leaf(UNTIL_RISES_TO, mean, 417.25, 0);
  check_end(end_by(1, &node, 0, 5000), 117.25 / rate);
  plate((series){0}, -2e4);
  node = leaf(UNTIL_FALLS_TO, mean, 250, 0);
  check_end(end_by(1, &node, 0, 5000), 50 / rate);
  plate((series){0}, 2e4);
  node = leaf(UNTIL_WITHIN, mean, 400, 7);
  check_end(end_by(1, &node, 0, 5000), 93 / rate);
}

Test(until, a_prescribed_front_rises_and_falls_on_a_sine) {
  series sine = wave(300, 100, 1000, 0);
  plate(sine, 0);
  condition_node node = leaf(UNTIL_RISES_TO, front, 350, 0);
  check_end(end_by(1, &node, 0, 5000), 1000 * asin(0.5) / (2 * M_PI));
  plate(sine, 0);
  node = leaf(UNTIL_FALLS_TO, front, 250, 0);
  check_end(end_by(1, &node, 0, 5000), 1000 * (M_PI + asin(0.5)) / (2 * M_PI));
}

static condition_node group(until_kind kind, int first_child, int children) {
  return (condition_node){.kind = kind, .first_child = first_child, .children = children};
}

Test(until, all_waits_for_the_last_and_any_takes_the_first) {
  double rate = 2e4 / (RHO_C * WIDTH);
  condition_node nodes[3] = {group(UNTIL_ALL, 1, 2), leaf(UNTIL_RISES_TO, mean, 320, 0),
                             leaf(UNTIL_RISES_TO, mean, 350, 0)};
  plate((series){0}, 2e4);
  check_end(end_by(3, nodes, 0, 5000), 50 / rate);
  nodes[0].kind = UNTIL_ANY;
  plate((series){0}, 2e4);
  check_end(end_by(3, nodes, 0, 5000), 20 / rate);
}

/* The front (ramp 0.5 K/s) is at 400 after 200 s and above 450 after 300 s: (>= 450 or <= 301) and
   (front within 10 of 460), reached first at 300 s. */
Test(until, groups_within_groups) {
  static const double x[] = {0, 1000}, y[] = {300, 800};
  condition_node nodes[5] = {
      group(UNTIL_ALL, 1, 2), group(UNTIL_ANY, 3, 2), leaf(UNTIL_WITHIN, front, 460, 10),
      leaf(UNTIL_RISES_TO, front, 450, 0), leaf(UNTIL_FALLS_TO, front, 301, 0)};
  plate(rows(2, x, y), 0);
  check_end(end_by(5, nodes, 0, 5000), 300);
}

Test(until, held_for_counts_from_the_crossing) {
  static const double x[] = {0, 400}, y[] = {300, 500};
  condition_node node = leaf(UNTIL_RISES_TO, front, 400, 0);
  plate(rows(2, x, y), 0);
  check_end(end_by(1, &node, 333.3, 5000), 200 + 333.3);
}

/* Above 350 K the sine stays for a third of its period of 1000 s. */
Test(until, held_for_starts_anew_after_a_break) {
  double third = 1000.0 / 3, first = 1000.0 / 12;
  condition_node node = leaf(UNTIL_RISES_TO, front, 350, 0);
  plate(wave(300, 100, 1000, 0), 0);
  check_end(end_by(1, &node, third - 1, 5000), first + third - 1);
  plate(wave(300, 100, 1000, 0), 0);
  stage_result never = end_by(1, &node, third + 1, 4000);
  cr_assert_eq(never.ended_by, ENDED_TIME_LIMIT);
  cr_assert_eq(never.end, 4000);
  free_attempt(&t);
  /* interrupted once by a dip, then held */
  static const double x[] = {0, 100, 200, 220, 240, 2000}, y[] = {300, 400, 400, 340, 400, 400};
  plate(rows(6, x, y), 0);
  check_end(end_by(1, &node, 500, 5000), 220 + 20 * 10.0 / 60 + 500);
}

Test(until, within_a_band_over_an_extreme) {
  /* the top of the sine, 400, is still in the band: it is entered once on the way up */
  condition_node node = leaf(UNTIL_WITHIN, front, 380, 20.001);
  plate(wave(300, 100, 1000, 0), 0);
  double exact = 1000 * asin(0.59999) / (2 * M_PI);
  check_end(end_by(1, &node, 100, 5000), exact + 100);
}

Test(until, a_band_has_two_sides) {
  static const double x[] = {0, 400}, y[] = {500, 300};
  condition_node node = leaf(UNTIL_WITHIN, front, 380, 20);
  plate(rows(2, x, y), 0); /* falls by 0.5 K/s from above */
  check_end(end_by(1, &node, 0, 5000), 200);
  plate(rows(2, x, y), 0); /* inside for 80 s only, from 200 to 280 s */
  stage_result never = end_by(1, &node, 81, 1000);
  cr_assert_eq(never.ended_by, ENDED_TIME_LIMIT);
  free_attempt(&t);
}

Test(until, true_at_the_start_ends_the_stage_at_once) {
  condition_node node = leaf(UNTIL_FALLS_TO, mean, 300.5, 0);
  plate((series){0}, 2e4);
  stage_result end = end_by(1, &node, 0, 5000);
  cr_assert_eq(end.ended_by, ENDED_UNTIL);
  cr_assert_eq(end.end, 0);
  cr_assert_eq(t.attempt->outcome.steps, 0);
  cr_assert(t.attempt->observer.started_true[0]);
  free_attempt(&t);
}

Test(until, true_at_the_start_must_still_be_held) {
  double rate = 2e4 / (RHO_C * WIDTH);
  condition_node node = leaf(UNTIL_FALLS_TO, mean, 305, 0);
  plate((series){0}, 2e4);
  check_end(end_by(1, &node, 49.9, 5000), 49.9);
  plate((series){0}, 2e4); /* true for 5/rate = 50 s only */
  cr_assert_float_eq(5 / rate, 50, 1e-12);
  stage_result never = end_by(1, &node, 50.1, 800);
  cr_assert_eq(never.ended_by, ENDED_TIME_LIMIT);
  free_attempt(&t);
}

Test(until, a_jump_can_fulfil_a_condition) {
  static const double x[] = {0, 700, 700, 900}, y[] = {300, 310, 600, 600};
  condition_node node = leaf(UNTIL_RISES_TO, front, 500, 0);
  plate(rows(4, x, y), 0);
  stage_result end = end_by(1, &node, 0, 5000);
  cr_assert_eq(end.ended_by, ENDED_UNTIL);
  cr_assert_float_eq(end.end, 700, 1e-3, "%.9g: at the jump or in the first step after it",
                     end.end);
  free_attempt(&t);
}

Test(until, time_limit_ends_what_is_never_fulfilled) {
  condition_node node = leaf(UNTIL_RISES_TO, mean, 800, 0);
  plate((series){0}, 2e4);
  stage_result end = end_by(1, &node, 0, 1234.5);
  cr_assert_eq(end.ended_by, ENDED_TIME_LIMIT);
  cr_assert_eq(end.end, 1234.5);
  cr_assert_not(t.attempt->observer.ends[0].known);
  free_attempt(&t);
}

/* What the twin run needs to tell the error of the end: who decided, its value and its rate. */
Test(until, the_end_remembers_who_decided_and_how_fast) {
  condition_node nodes[3] = {group(UNTIL_ANY, 1, 2), leaf(UNTIL_RISES_TO, mean, 700, 0),
                             leaf(UNTIL_RISES_TO, mean, 350, 0)};
  plate((series){0}, 2e4);
  end_by(3, nodes, 0, 5000);
  const until_end *end = &t.attempt->observer.ends[0];
  cr_assert(end->known);
  cr_assert_eq(end->leaf, 2);
  cr_assert_float_eq(end->t, 500, LANDS);
  cr_assert_float_eq(end->value, 350, 1e-7);
  cr_assert_float_eq(end->rate, 0.1, 1e-6);
  free_attempt(&t);
}

/* A surface that a quench cools by 100 K/s, with loose steps: the end is true and close all the
 * same. */
Test(until, a_quench_is_landed_on) {
  static const double levels[] = {900, 700, 500, 350};
  for (int k = 0; k < 4; k++) {
    make_case(&m, "plate");
    add_layer(&m, add_material(&m, 40, 8000, 500), WIDTH, 0);
    start_at(&m, 1200);
    add_stage(&m, 100, convects(5000, constant(300)), insulated());
    condition_node node = leaf(UNTIL_FALLS_TO, front, levels[k], 0);
    end_stage_by(&m, 1, &node, 0, 5000);
    make_attempt(&t, &m, 200, 1300, 16);
    run_attempt(&t, 1);
    double slope,
        surface = property_temperature(&t.property[0], t.attempt->stepper.state[0], &slope);
    cr_assert_eq(t.attempt->outcome.stage[0].ended_by, ENDED_UNTIL);
    /* 1e-9 of a step of seconds at 100 K/s */
    cr_assert(surface <= levels[k] + 1e-10 && surface > levels[k] - 1e-6, "%.12g", surface);
    free_attempt(&t);
  }
}

Test(until, a_condition_on_each_kind_of_place) {
  static const place_kind kinds[] = {PLACE_COLDEST, PLACE_HOTTEST, PLACE_CENTER, PLACE_MID_WALL};
  for (int k = 0; k < 4; k++) {
    condition_node node = leaf(UNTIL_RISES_TO, whole_place(kinds[k]), 400, 0);
    plate((series){0}, 2e4);
    cr_assert_eq(end_by(1, &node, 0, 5000).ended_by, ENDED_UNTIL);
    const attempt *a = t.attempt;
    double least = a->observer.least[0], most = a->observer.most[0], slope;
    double back =
        property_temperature(&t.property[0], a->stepper.state[a->stepper.nodes - 1], &slope);
    double coldest = property_temperature(&t.property[0], a->stepper.state[0], &slope);
    cr_assert_float_eq(least, 300, 1e-9);
    /* landed on from behind: true at the end, and by no more than 1e-9 of a step */
    double reached = kinds[k] == PLACE_COLDEST ? coldest : back;
    if (kinds[k] == PLACE_HOTTEST || kinds[k] == PLACE_COLDEST)
      cr_assert(reached >= 400 - 1e-11 && reached < 400 + 1e-7, "%.12g", reached);
    if (kinds[k] == PLACE_HOTTEST) cr_assert_float_eq(most, back, 1e-9);
    if (kinds[k] == PLACE_CENTER) cr_assert(coldest < 400 && back > 400);
    free_attempt(&t);
  }
}
