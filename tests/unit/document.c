/* A job document: its canonical text and hash, the kind that is expected of it, where JSON breaks,
 * many threads. */
#include "document.h"
#include "kind.h"

#include <criterion/criterion.h>
#include <pthread.h>
#include <stdio.h>
#include <string.h>

static const char request[] =
    "{\"title\": \"x\", \"inputs\": {\"t\": 0.0625},\n"
    " \"stages\": [{\"name\": \"s\", \"lasts\": 60}], \"start\": 20,\n"
    " \"part\": {\"thickness\": {\"input\": \"t\"}, \"shape\": \"plate\", \"material\": "
    "\"mine\"},\n"
    " \"materials\": {\"mine\": {\"specific_heat\": 500, \"conductivity\": 45, \"density\": "
    "7850},\n"
    "  \"unused\": {\"specific_heat\": 1, \"conductivity\": 1, \"density\": 1}}}";

static const char canonical[] =
    "{\"materials\":{\"mine\":{\"conductivity\":45,\"density\":7850,\"specific_heat\":500}},"
    "\"part\":{\"material\":\"mine\",\"shape\":\"plate\",\"thickness\":0.0625},"
    "\"stages\":[{\"lasts\":60,\"name\":\"s\"}],\"start\":20}";

/* Of that text, by sha256sum of GNU coreutils. */
static const char digest[] = "256015a8f122db18ddea713efac7b6a3cf4a3e5fa2c13ac75b13d3698a11d376";

static library *materials;

static void open_library(void) {
  fault_list faults;
  faults_init(&faults);
  materials = library_open(&faults);
  cr_assert_not_null(materials);
}

static void close_library(void) {
  library_free(materials);
}

TestSuite(document, .init = open_library, .fini = close_library);

Test(document, has_a_canonical_text_and_its_digest) {
  fault_list faults;
  document *d = NULL;
  faults_init(&faults);
  cr_assert_eq(document_read(request, strlen(request), NULL, materials, &d, &faults), 0);
  cr_expect_str_eq(d->finished, canonical);
  cr_expect_eq(d->finished_length, strlen(canonical));
  cr_expect_str_eq(d->hash, digest);
  document_free(d);
}

static int read_nothing(struct reader *r, void *json, document *d) {
  (void)r, (void)json, (void)d;
  return 0;
}

Test(document, is_of_the_kind_that_its_address_implies) {
  static const job_kind other = {.name = "other", .read = read_nothing};
  static const char named[] = "{\"kind\": \"solve\"}";
  fault_list faults;
  document *d = NULL;
  faults_init(&faults);
  cr_assert_eq(document_read(request, strlen(request), job_kinds[0], materials, &d, &faults), 0);
  cr_expect_eq(d->kind, job_kinds[0]);
  document_free(d);
  cr_assert_eq(document_read(named, strlen(named), &other, materials, &d, &faults), -1);
  cr_expect_null(d);
  cr_expect_str_eq(faults.items[0].at, "/kind");
  cr_expect(strstr(faults.items[0].is, "other is expected"), "%s", faults.items[0].is);
  faults_free(&faults);
}

/* Line and column are those of the character at which reading ends, counted from 1. */
static void expect_place(const char *text, size_t length, const char *place) {
  fault_list faults;
  document *d = NULL;
  faults_init(&faults);
  cr_assert_eq(document_read(text, length, NULL, materials, &d, &faults), -1);
  cr_assert_eq(faults.count, 1);
  cr_expect_eq(faults.status, 400);
  cr_expect_str_eq(faults.items[0].at, "");
  cr_expect(strstr(faults.items[0].is, place), "\"%s\" does not name %s", faults.items[0].is,
            place);
  faults_free(&faults);
}

Test(document, tells_where_json_breaks) {
  expect_place("{\"a\": 1,\n \"b\": }", 17, "line 2, column 7");
  expect_place("{\"a\": \"\xff\"}", 10, "line 1, column 8");
  expect_place("{\n\n  \"\xc3\xa4\": \"\xff\"}", 14, "line 3, column 9");
  expect_place("\xef\xbb\xbf{}", 5, "line 1, column 1");
  expect_place("{\"a\": 1}\n]", 10, "line 2, column 1");
}

Test(document, ends_at_a_nul) {
  expect_place("{}\0{}", 5, "line 1, column 3");
}

/* Whoever reads first, every thread gets the same. */
static void *read_often(void *unused) {
  (void)unused;
  for (int i = 0; i < 200; i++) {
    fault_list faults;
    document *d = NULL;
    faults_init(&faults);
    if (document_read(request, strlen(request), NULL, materials, &d, &faults)) return NULL;
    bool same = !strcmp(d->hash, digest);
    document_free(d);
    if (!same) return NULL;
  }
  return materials;
}

Test(document, is_read_by_many_threads_at_once) {
  enum { THREADS = 8 };
  pthread_t thread[THREADS];
  void *good[THREADS];
  for (int i = 0; i < THREADS; i++)
    cr_assert_eq(pthread_create(&thread[i], NULL, read_often, NULL), 0);
  for (int i = 0; i < THREADS; i++) {
    pthread_join(thread[i], &good[i]);
    cr_expect_eq(good[i], materials);
  }
}
