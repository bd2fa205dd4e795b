/* Every allocation of reading a document fails once: then reading ends cleanly, with nothing lost,
 * or does without it.
 */
#include "count_memory.h"
#include "document.h"
#include "kind.h"

#include <criterion/criterion.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { MOST_ALLOCATIONS = 100000, MOST_BYTES = 1 << 16 };

char *__wrap_strdup(const char *text);

char *__wrap_strdup(const char *text) {
  size_t size = strlen(text) + 1;
  char *copy = __wrap_malloc(size);
  return copy ? memcpy(copy, text, size) : NULL;
}

static library *materials;
static char request[MOST_BYTES];
static size_t length;

static void load(const char *folder) {
  char path[512];
  snprintf(path, sizeof path, "%s/tests/reader/%s/request.json", SOURCE_DIR, folder);
  FILE *file = fopen(path, "rb");
  cr_assert_not_null(file, "%s", path);
  length = fread(request, 1, sizeof request, file);
  fclose(file);
}

static void open_library(void) {
  fault_list faults;
  faults_init(&faults);
  materials = library_open(&faults);
  cr_assert_not_null(materials);
}

static void close_library(void) {
  library_free(materials);
}

TestSuite(document_memory, .init = open_library, .fini = close_library);

/* Reads with the nth allocation failing; returns document_read's answer, and tells what was lost.
 */
static int read_failing(int nth, int *lost, fault_list *faults, bool *untouched) {
  document *d = NULL;
  int before = allocations_out;
  allocations = 0;
  fail_at = nth;
  faults_init(faults);
  int answer = document_read(request, length, NULL, materials, &d, faults);
  *untouched = allocations <= nth;
  fail_at = -1;
  if (answer == 0) document_free(d);
  *lost = allocations_out - before;
  return answer;
}

/* Fails each in turn until reading needs no more of them. `answer`: what reading gives with all its
 * memory. */
static void fail_each(int answer) {
  fault_list faults;
  for (int nth = 0; nth < MOST_ALLOCATIONS; nth++) {
    int lost;
    bool untouched;
    int got = read_failing(nth, &lost, &faults, &untouched);
    int held = 0;
    for (int i = 0; i < faults.count; i++)
      held += (faults.items[i].at != NULL) + (faults.items[i].is != NULL) +
              (faults.items[i].got != NULL) + (faults.items[i].in != NULL);
    cr_assert_eq(lost, held, "allocation %d failed: %d blocks are lost", nth, lost - held);
    if (untouched) {
      cr_assert_eq(got, answer);
      faults_free(&faults);
      return;
    }
    if (got == -1)
      cr_assert(faults.no_memory || faults.count > 0, "allocation %d failed and no reason is told",
                nth);
    if (answer == 0 && got == -1)
      cr_assert(faults.no_memory, "allocation %d failed and the case is blamed: %s %s", nth,
                faults.count ? faults.items[0].at : "", faults.count ? faults.items[0].is : "");
    faults_free(&faults);
  }
  cr_assert_fail("reading never ended");
}

Test(document_memory, of_a_whole_case) {
  load("valid/tube_blank");
  fail_each(0);
}

Test(document_memory, of_layers_and_their_points) {
  load("valid/layers");
  fail_each(0);
}

Test(document_memory, of_every_kind_of_figure) {
  load("valid/figures_of_every_kind");
  fail_each(0);
}

Test(document_memory, of_a_dated_log) {
  load("valid/log_dated");
  fail_each(0);
}

Test(document_memory, of_materials_of_the_cases_own) {
  load("valid/material_of_tables_and_pieces");
  fail_each(0);
  load("valid/material_of_an_enthalpy_table");
  fail_each(0);
}

Test(document_memory, of_named_series_and_nested_conditions) {
  load("valid/named_series");
  fail_each(0);
  load("valid/until_nested");
  fail_each(0);
}

/* Thousands: every 89th of them fails. */
Test(document_memory, of_the_library) {
  enum { STEP = 89 };
  bool opened = false;
  for (int nth = 0; !opened && nth < MOST_ALLOCATIONS; nth += STEP) {
    fault_list faults;
    int before = allocations_out;
    faults_init(&faults);
    allocations = 0;
    fail_at = nth;
    library *l = library_open(&faults);
    opened = allocations <= nth;
    fail_at = -1;
    cr_assert_eq(l != NULL, opened, "allocation %d failed", nth);
    cr_assert(opened || faults.no_memory, "allocation %d failed and no reason is told", nth);
    library_free(l);
    faults_free(&faults);
    cr_assert_eq(allocations_out, before, "allocation %d failed: blocks are lost", nth);
  }
  cr_assert(opened);
}

Test(document_memory, of_many_faults) {
  load("invalid/every_fault_at_once");
  fail_each(-1);
}
