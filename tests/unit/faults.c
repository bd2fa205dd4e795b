/* Faults are collected, counted beyond those kept, and helped by the nearest known name. */
#include "faults.h"

#include <criterion/criterion.h>

static const char *const names[] = {"thickness", "material", "conductivity", "h", "name", NULL};

Test(faults, keeps_each_with_its_place) {
  fault_list list;
  faults_init(&list);
  cr_expect_eq(list.status, 0);
  faults_add(&list, "/part/layers/1/thickness", "\"-3 mm\"", "must be greater than %d", 0);
  faults_add(&list, "", NULL, "has no stages");
  cr_assert_eq(list.count, 2);
  cr_expect_eq(list.status, 422);
  cr_expect_str_eq(list.items[0].at, "/part/layers/1/thickness");
  cr_expect_str_eq(list.items[0].is, "must be greater than 0");
  cr_expect_str_eq(list.items[0].got, "\"-3 mm\"");
  cr_expect_null(list.items[1].got);
  faults_free(&list);
  cr_expect_eq(list.count, 0);
}

Test(faults, counts_those_that_it_cannot_keep) {
  fault_list list;
  faults_init(&list);
  for (int i = 0; i < MOST_FAULTS + 7; i++) faults_add(&list, "/x", NULL, "is wrong");
  cr_expect_eq(list.count, MOST_FAULTS);
  cr_expect_eq(list.found, MOST_FAULTS + 7);
  faults_free(&list);
}

Test(faults, name_the_nearest) {
  cr_expect_str_eq(nearest_name("thicknes", names), "thickness");
  cr_expect_str_eq(nearest_name("thikness", names), "thickness");
  cr_expect_str_eq(nearest_name("conductivty", names), "conductivity");
  cr_expect_str_eq(nearest_name("matreial", names), "material");
  cr_expect_str_eq(nearest_name("nmae", names), "name");
}

Test(faults, name_none_that_is_far) {
  cr_expect_null(nearest_name("porosity", names));
  cr_expect_null(nearest_name("x", names));
  cr_expect_null(nearest_name("", names));
  char endless[2000];
  for (size_t i = 0; i < sizeof endless; i++) endless[i] = 'a';
  endless[sizeof endless - 1] = '\0';
  cr_expect_null(nearest_name(endless, names));
}
