/* run_warnings: every warning that only a run can give, once provoked and once not. */
#include "document.h"
#include "kind.h"
#include "solve.h"

#include <criterion/criterion.h>
#include <stdio.h>
#include <string.h>

/* The number of warnings of a case that stand at a pointer and hold a text. */
static int warned(const char *text, const char *at, const char *what) {
  fault_list faults;
  document *d = NULL;
  heat_result *r = NULL;
  fault f;
  faults_init(&faults);
  library *materials = library_open(&faults);
  cr_assert_not_null(materials);
  int read = document_read(text, strlen(text), job_kind_named("solve"), materials, &d, &faults);
  cr_assert_eq(read, 0, "%s %s", faults.count ? faults.items[0].at : "",
               faults.count ? faults.items[0].is : "");
  cr_assert_eq(solve_case(d->question, NULL, &r, &f), STATUS_OK, "%s", f.is);
  int count = 0;
  for (int i = 0; i < r->warnings; i++)
    count += !strcmp(r->warning[i].at, at) && strstr(r->warning[i].is, what) != NULL;
  heat_result_free(r);
  document_free(d);
  library_free(materials);
  faults_free(&faults);
  return count;
}

/* A plate of a material that starts at one temperature and has another on both faces for ten
 * minutes. */
static int plate_warned(const char *material, const char *own, double start, double faces,
                        const char *what) {
  char text[1024];
  snprintf(text, sizeof text,
           "{\"part\": {\"shape\": \"plate\", \"thickness\": \"20 mm\", \"material\": \"%s\"}, "
           "\"materials\": {%s}, "
           "\"start\": %g, \"stages\": [{\"name\": \"s\", \"faces\": {\"all\": {\"temperature\": "
           "%g}}, \"lasts\": \"10 min\"}], "
           "\"points\": [{\"name\": \"middle\", \"at\": \"center\"}], \"output\": {\"history\": "
           "{\"every\": \"1 min\"}}, "
           "\"numerical_error\": 2}",
           material, own, start, faces);
  return warned(text, "/part/material", what);
}

Test(run_warnings, a_property_beyond_its_table) {
  cr_expect_eq(plate_warned("carbon_steel", "", 100, 1240, "beyond the table"), 1);
  cr_expect_eq(plate_warned("carbon_steel", "", 100, 1100, "beyond the table"), 0);
  cr_expect_eq(plate_warned("carbon_steel", "", -30, 100, "beyond the table"), 1);
}

Test(run_warnings, a_layer_above_its_service_temperature) {
  static const char own[] = "\"plain\": {\"conductivity\": 25, \"density\": 7800, "
                            "\"specific_heat\": 600, \"max_service\": \"500 degC\"}";
  cr_expect_eq(plate_warned("plain", own, 20, 520, "highest service temperature"), 1);
  cr_expect_eq(plate_warned("plain", own, 20, 490, "highest service temperature"), 0);
}

Test(run_warnings, a_layer_that_melts) {
  cr_expect_eq(plate_warned("water_ice", "", -20, 15, "liquid"), 1);
  cr_expect_eq(plate_warned("water_ice", "", -20, -2, "liquid"), 0);
}

/* A plate in a furnace at 860 degC until its core rises to a target. */
static int heated_warned(double start, double target, const char *limit, const char *what) {
  char text[1024];
  snprintf(text, sizeof text,
           "{\"part\": {\"shape\": \"plate\", \"thickness\": \"50 mm\", \"material\": "
           "\"stainless_steel\"}, \"start\": %g, "
           "\"stages\": [{\"name\": \"heat\", \"faces\": {\"all\": {\"furnace\": {\"temperature\": "
           "860, \"h\": 20, \"emissivity\": 0.8}}}, "
           "\"until\": {\"of\": \"coldest\", \"rises_to\": %g}, \"time_limit\": \"%s\"}]}",
           start, target, limit);
  return warned(text, "/stages/0/until", what);
}

Test(run_warnings, a_stage_that_its_time_limit_ended) {
  cr_expect_eq(heated_warned(25, 800, "10 min", "time_limit"), 1);
  cr_expect_eq(heated_warned(25, 800, "5 h", "time_limit"), 0);
}

Test(run_warnings, a_condition_true_at_the_start) {
  cr_expect_eq(heated_warned(810, 800, "5 h", "was true when"), 1);
  cr_expect_eq(heated_warned(25, 800, "5 h", "was true when"), 0);
}

Test(run_warnings, a_target_that_is_approached_slowly_tells_what_a_degree_costs) {
  cr_expect_eq(heated_warned(25, 859.5, "9 h", "K/h: 1 K more or less"), 1);
  cr_expect_eq(heated_warned(25, 700, "9 h", "K/h: 1 K more or less"), 0);
}
