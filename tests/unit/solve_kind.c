/* solve_kind: the row "solve" from a document's bytes to an answer in every form it offers. */
#include "solve_kind.h"

#include <criterion/criterion.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

static const char plate[] =
    "{\"part\": {\"shape\": \"plate\", \"thickness\": \"40 mm\", \"material\": \"carbon_steel\"},"
    " \"start\": \"20 degC\","
    " \"stages\": ["
    "  {\"name\": \"warm\", \"lasts\": \"30 min\", \"faces\": {\"all\": {\"furnace\": "
    "{\"temperature\": \"600 degC\","
    "   \"h\": 25, \"emissivity\": 0.8}}}},"
    "  {\"name\": \"cool\", \"lasts\": \"30 min\", \"faces\": {\"all\": {\"convection\": {\"h\": "
    "12, \"medium\": \"20 degC\"}}}}],"
    " \"points\": [{\"name\": \"mid\", \"at\": \"center\"}],"
    " \"figures\": [{\"name\": \"top\", \"kind\": \"peak\", \"of\": \"mid\", \"require\": "
    "{\"at_least\": \"900 degC\"}}],"
    " \"output\": {\"history\": {\"every\": \"1 min\"}}}";

static library *materials;
static document *d;

static void read_plate(void) {
  fault_list faults;
  faults_init(&faults);
  materials = library_open(&faults);
  cr_assert_not_null(materials);
  cr_assert_eq(document_read(plate, strlen(plate), NULL, materials, &d, &faults), 0, "%s %s",
               faults.count ? faults.items[0].at : "", faults.count ? faults.items[0].is : "");
  faults_free(&faults);
}

static void let_go(void) {
  document_free(d);
  library_free(materials);
}

TestSuite(solve_kind, .init = read_plate, .fini = let_go);

Test(solve_kind, is_found_by_name_and_path) {
  cr_assert_eq(job_kinds[0], &solve_kind);
  cr_assert_eq(job_kind_named("solve"), &solve_kind);
  cr_assert_eq(job_kind_at_path("solves"), &solve_kind);
  cr_assert_null(job_kind_named("solves"));
  cr_assert_null(job_kind_at_path(""));
}

Test(solve_kind, kinds_have_names_of_their_own_and_whole_rows) {
  for (int i = 0; job_kinds[i]; i++) {
    const job_kind *k = job_kinds[i];
    cr_assert(k->read && k->plan && k->run && k->fold && k->write && k->verdict && k->cost);
    cr_assert(k->free_question && k->free_part && k->free_answer && k->about);
    for (int j = 0; j < i; j++) {
      cr_assert_str_neq(k->name, job_kinds[j]->name);
      cr_assert_str_neq(k->path, job_kinds[j]->path);
    }
  }
}

Test(solve_kind, answers_in_every_form) {
  void *answer = NULL;
  fault f;
  cr_assert_eq(job_run(d, NULL, &answer, &f), STATUS_OK);
  cr_assert_eq(d->kind->verdict(answer), VERDICT_MISSES);
  const media forms[] = {MEDIA_JSON, MEDIA_CSV, MEDIA_TEXT};
  const char *const signs[] = {"\"verdict\": \"misses\"", "time [s],mid [degC]\r\n", "MISSES"};
  for (int i = 0; i < 3; i++) {
    buffer b;
    buffer_init(&b, 0);
    cr_assert_eq(d->kind->write(d, answer, forms[i], &b), 0);
    cr_assert_not(b.failed);
    cr_assert(strstr(b.bytes, signs[i]), "\"%s\" is not in\n%s", signs[i], b.bytes);
    buffer_free(&b);
  }
  d->kind->free_answer(answer);
}

Test(solve_kind, tells_the_cost_before_solving) {
  solve_cost cost = {0};
  fault f;
  cr_assert_eq(d->kind->cost(d, &cost, &f), STATUS_OK);
  cr_assert_gt(cost.unknowns, 0);
  cr_assert_gt(cost.steps, 0);
  cr_assert_gt(cost.seconds, 0);
}

static status end_beyond_fraction(void *self, double fraction) {
  return fraction > *(const double *)self ? STATUS_OUT_OF_TIME : STATUS_OK;
}

Test(solve_kind, a_run_out_of_time_says_where_and_leaves_nothing) {
  double most = 0;
  solve_control control = {end_beyond_fraction, &most};
  void *answer = &most;
  fault f;
  cr_assert_eq(job_run(d, &control, &answer, &f), STATUS_OUT_OF_TIME);
  cr_assert_null(answer);
  cr_assert_eq(f.status, STATUS_OUT_OF_TIME);
  cr_assert(f.stage >= 0 && isfinite(f.time));
  cr_assert_str_eq(f.at, f.stage == 0 ? "/stages/0" : "/stages/1");
  cr_assert(strstr(f.is, f.stage == 0 ? "\"warm\"" : "\"cool\""), "%s", f.is);
  cr_assert(strstr(f.is, " s from the start of the case"), "%s", f.is);
}
