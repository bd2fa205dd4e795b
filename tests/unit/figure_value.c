/* Figures that are values: at, peak, lowest, heat_absorbed, heat_flow; and the table itself. */
#include "course.h"

static double hump(const course *k, int stage_index, double t) {
  (void)k;
  (void)stage_index;
  return 700 - 0.01 * (t - 137) * (t - 137);
}

static double jump(const course *k, int stage_index, double t) {
  (void)k;
  return stage_index ? 300 - t / 1000 : 500 + t;
}

/* ---- the table ---- */

Test(figure_table, names_are_those_of_the_api_and_each_is_found) {
  static const char *const names[] = {"time_to",        "time_at_temperature",
                                      "time_between",   "at",
                                      "peak",           "lowest",
                                      "rate",           "heat_absorbed",
                                      "heat_flow",      "lethality",
                                      "equivalent_age", "accumulated",
                                      "tempering",      "maturity",
                                      "stress"};
  int count = 0;
  while (figure_kinds[count]) count++;
  cr_assert_eq(count, COUNT_OF(names));
  for (int i = 0; i < count; i++) cr_expect_str_eq(figure_kind_named(names[i])->name, names[i]);
  cr_expect_null(figure_kind_named("time"));
}

Test(figure_table, rows_are_complete) {
  for (int i = 0; figure_kinds[i]; i++) {
    const figure_kind *k = figure_kinds[i];
    cr_expect(k->about && k->dimension && k->begin && k->observe && k->finish, "%s", k->name);
    cr_expect_eq(k->accumulates, k->value_at != NULL, "%s", k->name);
    cr_expect_gt(k->size, 0);
    for (int j = 0; j < k->parameters.count; j++) {
      const parameter *p = &k->parameters.parameters[j];
      cr_expect(p->name && p->about, "%s, member %d", k->name, j);
      cr_expect(p->offset >= offsetof(figure, rises_to) && p->offset < sizeof(figure), "%s.%s",
                k->name, p->name);
      cr_expect(p->kind != VALUE_CHOICE || p->of, "%s.%s", k->name, p->name);
      cr_expect(p->about[strlen(p->about) - 1] != '.', "%s.%s", k->name, p->name);
    }
  }
}

Test(figure_table, dimension_of_a_target) {
  course k = course_of(hump);
  course_figure(&k, "tempering");
  target difference = {.place = {.kind = PLACE_SECTION_DIFFERENCE, .layer = -1}};
  target mean = {.place = {.kind = PLACE_MEAN, .layer = -1}},
         sum = {.is_figure = true, .figure = 0};
  cr_expect_eq(target_dimension(&difference, &k.c), DIMENSION_DIFFERENCE);
  cr_expect_eq(target_dimension(&mean, &k.c), DIMENSION_TEMPERATURE);
  cr_expect_eq(target_dimension(&sum, &k.c), DIMENSION_NUMBER);
}

Test(figure_table, only_time_to_watches_figures) {
  course k = course_of(hump);
  figure *f = course_figure(&k, "peak");
  course_figure(&k, "maturity");
  f->of = (target){.is_figure = true, .figure = 1};
  for (int i = 0; figure_kinds[i]; i++) {
    const char *member = "";
    if (!figure_kinds[i]->takes_place || !strcmp(figure_kinds[i]->name, "time_to")) continue;
    cr_assert_not_null(figure_kinds[i]->check, "%s", figure_kinds[i]->name);
    cr_expect_not_null(figure_kinds[i]->check(f, &k.c, &member), "%s", figure_kinds[i]->name);
    cr_expect_str_eq(member, "of");
  }
}

/* ---- at ---- */

static figure_value value_at_instant(course *k, const char *kind, instant *when) {
  figure *f = course_figure(k, kind);
  course_stage(k, 100, 6);
  course_stage(k, 300, 6);
  f->time = when;
  return course_run(k, 0);
}

Test(at, inside_a_step) {
  course k = course_of(hump);
  instant when = {.time = 123.4, .end_of_stage = -1};
  check_close(value_at_instant(&k, "at", &when).value, 700 - 0.01 * 13.6 * 13.6, 1e-9);
}

Test(at, the_end_of_a_stage_is_just_before_a_jump) {
  course a = course_of(jump), b = course_of(jump), c = course_of(jump);
  instant end = {.time = NAN, .end_of_stage = 0}, same = {.time = 100, .end_of_stage = -1};
  instant later = {.time = 101, .end_of_stage = -1};
  cr_expect_eq(value_at_instant(&a, "at", &end).value, 600);
  cr_expect_eq(value_at_instant(&b, "at", &same).value, 600);
  check_close(value_at_instant(&c, "at", &later).value, 300 - 0.101, 1e-9);
}

Test(at, start_and_end) {
  course a = course_of(jump), b = course_of(jump);
  instant start = {.time = 0, .end_of_stage = -1}, end = {.time = 300, .end_of_stage = -1};
  cr_expect_eq(value_at_instant(&a, "at", &start).value, 500);
  check_close(value_at_instant(&b, "at", &end).value, 299.7, 1e-9);
}

Test(at, beyond_the_end_has_no_value) {
  course k = course_of(hump);
  instant when = {.time = 300.1, .end_of_stage = -1};
  check_missing(value_at_instant(&k, "at", &when), "ends before");
}

Test(at, outside_of_during_has_no_value) {
  static const int first[] = {0};
  course k = course_of(hump);
  instant when = {.time = 200, .end_of_stage = -1};
  figure *f = course_figure(&k, "at");
  course_stage(&k, 100, 6);
  course_stage(&k, 300, 6);
  f->time = &when;
  f->during = (stage_set){1, first};
  check_missing(course_run(&k, 0), "no stage that counts");
}

Test(at, a_steady_state_is_seen_by_its_end) {
  course k = course_of(jump);
  instant end = {.end_of_stage = 1};
  figure *f = course_figure(&k, "at");
  course_stage(&k, 100, 6);
  course_steady(&k);
  f->time = &end;
  check_close(course_run(&k, 0).value, 299.9, 1e-9);
}

Test(at, a_steady_state_alone_is_seen_at_any_time) {
  course k = course_of(hump);
  instant when = {.time = 5, .end_of_stage = -1};
  figure *f = course_figure(&k, "at");
  course_steady(&k);
  f->time = &when;
  check_close(course_run(&k, 0).value, 700 - 187.69, 1e-9);
}

/* ---- peak and lowest ---- */

Test(peak, between_the_samples) {
  for (int steps = 1; steps < 40; steps += 3) {
    course k = course_of(hump);
    course_figure(&k, "peak");
    course_stage(&k, 300, steps);
    figure_value v = course_run(&k, 0);
    check_close(v.value, 700, 1e-6);
    check_close(v.when, 137, 0.02);
  }
}

Test(peak, at_an_end) {
  course a = course_of(hump), b = course_of(hump);
  course_figure(&a, "peak");
  course_stage(&a, 100, 10);
  check_close(course_run(&a, 0).when, 100, 0);
  course_figure(&b, "lowest");
  course_stage(&b, 300, 10);
  figure_value v = course_run(&b, 0);
  check_close(v.when, 300, 0);
  check_close(v.value, 700 - 0.01 * 163 * 163, 1e-9);
}

static double noisy_hold(const course *k, int stage_index, double t) {
  (void)k;
  (void)stage_index;
  return t < 100 ? 500 + t : 600 + 1e-10 * (t - 100);
}

Test(peak, of_a_hold_is_dated_at_its_beginning) {
  course k = course_of(noisy_hold);
  course_figure(&k, "peak");
  course_stage(&k, 1000, 100);
  check_close(course_run(&k, 0).when, 100, 1e-6);
}

Test(peak, of_a_steady_state) {
  course k = course_of(hump);
  course_figure(&k, "peak");
  course_steady(&k);
  figure_value v = course_run(&k, 0);
  cr_expect(v.found);
  check_close(v.value, 700 - 187.69, 1e-9);
  cr_expect(isnan(v.when));
}

Test(peak, does_not_see_a_steady_state_after_other_stages) {
  course k = course_of(jump);
  course_figure(&k, "lowest");
  course_stage(&k, 100, 6);
  course_steady(&k);
  check_close(course_run(&k, 0).value, 500, 1e-9);
}

/* ---- heat ---- */

Test(heat_absorbed, up_to_a_time_and_in_all) {
  course a = course_of(hump), b = course_of(hump);
  instant when = {.time = 50, .end_of_stage = -1};
  check_close(value_at_instant(&a, "heat_absorbed", &when).value, 0.01 * (137.0 * 137 - 87.0 * 87),
              1e-9);
  check_close(value_at_instant(&b, "heat_absorbed", NULL).value, 0.01 * (137.0 * 137 - 163.0 * 163),
              1e-9);
}

Test(heat_absorbed, only_in_the_stages_of_during) {
  static const int second[] = {1};
  course k = course_of(hump);
  figure *f = course_figure(&k, "heat_absorbed");
  course_stage(&k, 100, 6);
  course_stage(&k, 300, 6);
  f->during = (stage_set){1, second};
  check_close(course_run(&k, 0).value, 0.01 * (37.0 * 37 - 163.0 * 163), 1e-9);
}

Test(heat_absorbed, dimensions_follow_the_shape) {
  static const char *const shape_names[] = {"plate", "cylinder", "sphere"};
  static const dimension energy[] = {DIMENSION_ENERGY_PER_AREA, DIMENSION_ENERGY_PER_LENGTH,
                                     DIMENSION_ENERGY};
  static const dimension power[] = {DIMENSION_FLUX, DIMENSION_POWER_PER_LENGTH, DIMENSION_POWER};
  course k = course_of(hump);
  figure *f = course_figure(&k, "heat_absorbed");
  for (int i = 0; i < 3; i++) {
    k.c.part.shape = shape_named(shape_names[i]);
    cr_expect_eq(figure_kind_named("heat_absorbed")->dimension(f, &k.c), energy[i]);
    cr_expect_eq(figure_kind_named("heat_flow")->dimension(f, &k.c), power[i]);
  }
}

Test(heat_absorbed, of_a_steady_state_has_no_answer) {
  course k = course_of(hump);
  course_figure(&k, "heat_absorbed");
  course_steady(&k);
  check_missing(course_run(&k, 0), "steady");
}

Test(heat_flow, at_a_time_at_the_end_and_steady) {
  course a = course_of(hump), b = course_of(hump), c = course_of(hump);
  instant when = {.time = 137, .end_of_stage = -1};
  check_close(value_at_instant(&a, "heat_flow", &when).value, 700, 1e-9);
  check_close(value_at_instant(&b, "heat_flow", NULL).value, 700 - 0.01 * 163 * 163, 1e-9);
  course_figure(&c, "heat_flow");
  course_steady(&c);
  check_close(course_run(&c, 0).value, 700 - 187.69, 1e-9);
}
