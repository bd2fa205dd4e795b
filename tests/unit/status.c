/* status: every failure has its own words, and a fault tells where and why. */
#include "status.h"

#include <criterion/criterion.h>
#include <math.h>
#include <string.h>

Test(status, messages_are_there_and_differ) {
  for (int i = 0; i < STATUS_COUNT; i++) {
    cr_assert_gt(strlen(status_message((status)i)), 0);
    for (int j = 0; j < i; j++)
      cr_assert_str_neq(status_message((status)i), status_message((status)j));
  }
  cr_assert_str_eq(status_message(STATUS_OK), "ok");
  cr_assert_str_eq(status_message(STATUS_SINGULAR), "singular system");
}

Test(status, a_number_beyond_the_list_has_a_message_too) {
  cr_assert_str_eq(status_message((status)STATUS_COUNT), "unknown");
  cr_assert_str_eq(status_message((status)-1), "unknown");
}

Test(status, fail_fills_the_fault_and_returns_its_status) {
  fault f;
  memset(&f, 0x55, sizeof f);
  cr_assert_eq(fail(&f, STATUS_SINGULAR, "/stages/3", "row %d of %s", 7, "mesh"), STATUS_SINGULAR);
  cr_assert_eq(f.status, STATUS_SINGULAR);
  cr_assert_str_eq(f.at, "/stages/3");
  cr_assert_str_eq(f.is, "row 7 of mesh");
  cr_assert_eq(f.stage, -1);
  cr_assert(isnan(f.time));
  cr_assert(isnan(f.could_be_met));
}

Test(status, fail_does_without_a_fault_and_without_a_place) {
  fault f;
  cr_assert_eq(fail(NULL, STATUS_NO_MEMORY, "", "nothing"), STATUS_NO_MEMORY);
  cr_assert_eq(fail(&f, STATUS_NO_MEMORY, NULL, "nothing"), STATUS_NO_MEMORY);
  cr_assert_str_eq(f.at, "");
}

Test(status, long_texts_are_cut_and_terminated) {
  fault f;
  char text[1000];
  memset(text, 'a', sizeof text - 1);
  text[sizeof text - 1] = 0;
  cr_assert_eq(fail(&f, STATUS_BAD_ARGUMENT, text, "%s", text), STATUS_BAD_ARGUMENT);
  cr_assert_eq(strlen(f.at), sizeof f.at - 1);
  cr_assert_eq(strlen(f.is), sizeof f.is - 1);
}
