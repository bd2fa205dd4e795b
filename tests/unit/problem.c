/* problem: documents as RFC 9457 has them, and one answer for every way in which a solve can fail.
 */
#include "problem.h"

#include <criterion/criterion.h>
#include <jansson.h>
#include <math.h>
#include <string.h>

static json_t *parsed(buffer *b) {
  cr_assert_not(b->failed);
  json_t *document = json_loads(b->bytes, JSON_REJECT_DUPLICATES, NULL);
  cr_assert_not_null(document, "%s", b->bytes);
  buffer_free(b);
  return document;
}

static const char *text_of(json_t *document, const char *key) {
  const char *text = json_string_value(json_object_get(document, key));
  return text ? text : "";
}

Test(problem, carries_type_title_status_and_detail) {
  buffer b;
  buffer_init(&b, 0);
  problem_write(&b, 413, "the limit is 4194304 bytes", NULL);
  json_t *document = parsed(&b);
  cr_assert_str_eq(text_of(document, "type"), "/problems/too-large");
  cr_assert_str_eq(text_of(document, "detail"), "the limit is 4194304 bytes");
  cr_assert(strlen(text_of(document, "title")) > 0);
  cr_assert_eq(json_integer_value(json_object_get(document, "status")), 413);
  cr_assert_null(json_object_get(document, "faults"));
  json_decref(document);
}

Test(problem, lists_every_fault) {
  fault_list faults;
  faults_init(&faults);
  faults_add(&faults, "/part/layers/1/thickness", "\"-3 mm\"", "must be greater than %d", 0);
  faults_add(&faults, "", NULL, "has no stages");
  buffer b;
  buffer_init(&b, 0);
  problem_write(&b, 422, NULL, &faults);
  json_t *document = parsed(&b), *list = json_object_get(document, "faults");
  cr_assert_eq(json_array_size(list), 2);
  cr_assert_str_eq(text_of(json_array_get(list, 0), "at"), "/part/layers/1/thickness");
  cr_assert_str_eq(text_of(json_array_get(list, 0), "is"), "must be greater than 0");
  cr_assert_str_eq(text_of(json_array_get(list, 0), "got"), "\"-3 mm\"");
  cr_assert_null(json_object_get(json_array_get(list, 1), "got"));
  cr_assert_str_eq(text_of(document, "detail"), "2 faults");
  cr_assert_null(json_object_get(document, "faults_found"));
  json_decref(document);
  faults_free(&faults);
}

Test(problem, counts_faults_beyond_those_it_lists) {
  fault_list faults;
  faults_init(&faults);
  for (int i = 0; i < MOST_FAULTS + 5; i++) faults_add(&faults, "/x", NULL, "is wrong");
  buffer b;
  buffer_init(&b, 0);
  problem_write(&b, 422, NULL, &faults);
  json_t *document = parsed(&b);
  cr_assert_eq(json_array_size(json_object_get(document, "faults")), MOST_FAULTS);
  cr_assert_eq(json_integer_value(json_object_get(document, "faults_found")), MOST_FAULTS + 5);
  json_decref(document);
  faults_free(&faults);
}

Test(problem, an_unmet_error_says_what_could_be_met) {
  fault f;
  fail(&f, STATUS_ERROR_NOT_MET, "/numerical_error", "0.001 K is finer than %s", "what is reached");
  f.could_be_met = 0.03141;
  buffer b;
  buffer_init(&b, 0);
  problem_of_fault(&b, &f);
  json_t *document = parsed(&b);
  cr_assert_str_eq(text_of(document, "type"), "/problems/error-not-met");
  cr_assert_eq(json_integer_value(json_object_get(document, "status")), 422);
  cr_assert_float_eq(json_number_value(json_object_get(document, "could_be_met")), 0.0315, 1e-12);
  json_t *first = json_array_get(json_object_get(document, "faults"), 0);
  cr_assert_str_eq(text_of(first, "at"), "/numerical_error");
  json_decref(document);
}

Test(problem, a_failed_march_names_stage_and_time) {
  fault f;
  fail(&f, STATUS_NO_CONVERGENCE, "/stages/2", "no step is small enough");
  f.stage = 2;
  f.time = 1234.5;
  buffer b;
  buffer_init(&b, 0);
  problem_of_fault(&b, &f);
  json_t *document = parsed(&b);
  cr_assert_eq(json_integer_value(json_object_get(document, "stage")), 2);
  cr_assert_float_eq(json_number_value(json_object_get(document, "time")), 1234.5, 1e-9);
  cr_assert_null(json_object_get(document, "could_be_met"));
  json_decref(document);
}

/* A failure of the case is never a 5xx that a caller's client would repeat blindly, except for what
   depends on the hour; and no failure ends with exit code 0 or 1, which are verdicts. */
Test(problem, every_failure_has_a_status_and_an_exit_code) {
  for (int s = STATUS_OK + 1; s < STATUS_COUNT; s++) {
    int http = problem_http_status((status)s), code = problem_exit_code((status)s);
    bool of_the_hour = s == STATUS_NO_MEMORY || s == STATUS_OUT_OF_TIME;
    cr_assert_neq(http, 500, "%s", status_message((status)s));
    cr_assert_eq(http >= 500, of_the_hour, "%s", status_message((status)s));
    cr_assert(code >= EXIT_BAD_INPUT && code <= EXIT_OUT_OF_TIME, "%s", status_message((status)s));
    fault f;
    fail(&f, (status)s, "", "%s", "");
    buffer b;
    buffer_init(&b, 0);
    problem_of_fault(&b, &f);
    json_t *document = parsed(&b);
    cr_assert_str_neq(text_of(document, "detail"), "");
    json_decref(document);
  }
  cr_assert_eq(problem_http_status(STATUS_OK), 200);
  cr_assert_eq(problem_exit_code(STATUS_OK), EXIT_GOOD);
}
