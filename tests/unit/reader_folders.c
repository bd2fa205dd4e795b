/* Every folder of tests/reader: what is read, and every fault of what is refused.

   valid/NAME/request.json   with expect.json {"case": {POINTER: value, ...} facts of the finished
   case (case_facts.h), "document": {POINTER: value}, "finished": {POINTER: value} of its canonical
   JSON, "warnings": [{"at", "is contains"}], "hash as"/"hash unlike": another valid folder}
   invalid/NAME/request.json (or request.txt, bytes that are not JSON) with expect.json {"status",
                             "faults": [{"at", "is contains"}]}: all of them, in any order, and no
   others */
#include "case_facts.h"
#include "document.h"
#include "kind.h"

#include <criterion/criterion.h>
#include <dirent.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define READER SOURCE_DIR "/tests/reader"

enum { PATH = 512, FEWEST_INVALID = 60 };

static library *materials;
static int failures;
static char now[PATH];

static void complain(const char *form, const char *a, const char *b) {
  failures++;
  char text[1024];
  snprintf(text, sizeof text, form, a, b);
  fprintf(stderr, "%s: %s\n", now, text);
}

static char *file_text(const char *folder, const char *name, size_t *length) {
  char path[PATH];
  snprintf(path, sizeof path, "%s/%s/%s", READER, folder, name);
  FILE *file = fopen(path, "rb");
  if (!file) return NULL;
  char *text = malloc(1 << 23);
  *length = fread(text, 1, (1 << 23) - 1, file);
  text[*length] = '\0';
  fclose(file);
  return text;
}

static char *request_text(const char *folder, size_t *length) {
  char *text = file_text(folder, "request.json", length);
  return text ? text : file_text(folder, "request.txt", length);
}

static json_t *expectation(const char *folder) {
  size_t length;
  char *text = file_text(folder, "expect.json", &length);
  json_error_t error;
  json_t *expect = text ? json_loadb(text, length, JSON_REJECT_DUPLICATES, &error) : NULL;
  if (!expect) complain("has no expect.json that can be read%s%s", "", "");
  free(text);
  return expect;
}

/* ---- values by JSON Pointer (RFC 6901) ---- */

static void unescape(char *token) {
  char *out = token;
  for (; *token; token++)
    if (token[0] == '~' && (token[1] == '0' || token[1] == '1'))
      *out++ = *++token == '0' ? '~' : '/';
    else
      *out++ = *token;
  *out = '\0';
}

static const json_t *at_pointer(const json_t *value, const char *pointer) {
  char token[PATH];
  while (value && *pointer == '/') {
    size_t n = strcspn(pointer + 1, "/");
    snprintf(token, sizeof token, "%.*s", (int)n, pointer + 1);
    unescape(token);
    value = json_is_array(value) ? json_array_get(value, (size_t)atoi(token))
                                 : json_object_get(value, token);
    pointer += n + 1;
  }
  return value;
}

static bool same(const json_t *a, const json_t *b) {
  if (json_is_number(a) && json_is_number(b)) {
    double x = json_number_value(a), y = json_number_value(b);
    return fabs(x - y) <= 1e-9 * fmax(1e-12, fmax(fabs(x), fabs(y)));
  }
  if (json_is_array(a) && json_is_array(b)) {
    if (json_array_size(a) != json_array_size(b)) return false;
    for (size_t i = 0; i < json_array_size(a); i++)
      if (!same(json_array_get(a, i), json_array_get(b, i))) return false;
    return true;
  }
  return json_equal(a, b);
}

static void expect_facts(const json_t *facts, json_t *wanted) {
  const char *pointer;
  json_t *value;
  json_object_foreach(wanted, pointer, value) {
    const json_t *got = at_pointer(facts, pointer);
    if (got && same(got, value)) continue;
    char *text = got ? json_dumps(got, JSON_ENCODE_ANY | JSON_COMPACT) : strdup("nothing");
    complain("%s is %s", pointer, text);
    free(text);
  }
}

/* ---- what is read ---- */

static document *read_folder(const char *folder, fault_list *faults) {
  size_t length = 0;
  document *d = NULL;
  char *text = request_text(folder, &length);
  if (!text) complain("has no request%s%s", "", "");
  faults_init(faults);
  if (text && document_read(text, length, NULL, materials, &d, faults)) d = NULL;
  free(text);
  return d;
}

static json_t *document_facts(const document *d) {
  json_t *labels = json_object();
  for (int i = 0; i < d->label_count; i++)
    json_object_set_new(labels, d->labels[i].name, json_string(d->labels[i].value));
  return json_pack("{s:s, s:o, s:o, s:i, s:o, s:o, s:o, s:o, s:b, s:s, s:s}", "kind", d->kind->name,
                   "title", fact_text(d->title), "labels", labels, "priority", d->job.priority,
                   "not_before", fact_number(d->job.not_before), "expires_at",
                   fact_number(d->job.expires_at), "time_limit", fact_number(d->job.time_limit),
                   "id", fact_text(d->job.id), "us", d->units.us, "temperature_unit",
                   quantity_label(DIMENSION_TEMPERATURE, &d->units), "time_unit",
                   quantity_label(DIMENSION_TIME, &d->units));
}

static bool contains(const char *text, const json_t *part) {
  return !part || strstr(text, json_string_value(part));
}

static void expect_warnings(const document *d, const json_t *wanted) {
  if ((size_t)d->warning_count != json_array_size(wanted))
    complain("has another number of warnings than expected%s%s", "", "");
  for (size_t i = 0; i < json_array_size(wanted); i++) {
    const json_t *w = json_array_get(wanted, i);
    const char *at = json_string_value(json_object_get(w, "at"));
    bool found = false;
    for (int j = 0; j < d->warning_count; j++)
      found |= !strcmp(d->warnings[j].at, at) &&
               contains(d->warnings[j].is, json_object_get(w, "is contains"));
    if (!found) complain("no such warning at %s%s", at, "");
  }
}

static void expect_hash(const document *d, const json_t *other, bool equal) {
  if (!other) return;
  char folder[PATH];
  fault_list faults;
  snprintf(folder, sizeof folder, "valid/%s", json_string_value(other));
  document *o = read_folder(folder, &faults);
  if (!o)
    complain("the folder %s of the other hash cannot be read%s", folder, "");
  else if (!strcmp(o->hash, d->hash) != equal)
    complain(equal ? "its hash is not that of %s%s" : "its hash is that of %s%s", folder, "");
  document_free(o);
  faults_free(&faults);
}

static void expect_finished(const document *d, json_t *wanted) {
  json_error_t error;
  json_t *finished = json_loadb(d->finished, d->finished_length, JSON_REJECT_DUPLICATES, &error);
  if (!finished)
    complain("its finished case is not JSON: %s%s", error.text, "");
  else
    expect_facts(finished, wanted);
  json_decref(finished);
}

/* The finished case is a case too, and the same one. */
static void expect_same_again(const document *d) {
  fault_list faults;
  document *again = NULL;
  faults_init(&faults);
  if (document_read(d->finished, d->finished_length, d->kind, materials, &again, &faults))
    complain("its finished case is refused: %s %s", faults.items[0].at, faults.items[0].is);
  else if (strcmp(d->hash, again->hash))
    complain("its finished case has another hash%s%s", "", "");
  document_free(again);
  faults_free(&faults);
}

static void check_valid(const char *folder) {
  fault_list faults;
  json_t *expect = expectation(folder), *facts = NULL;
  document *d = read_folder(folder, &faults);
  for (int i = 0; i < faults.count; i++)
    complain("refused at %s: %s", faults.items[i].at, faults.items[i].is);
  if (!d || !expect) {
    if (!faults.count) complain("was not read%s%s", "", "");
    goto out;
  }
  facts = case_facts(d->question);
  expect_facts(facts, json_object_get(expect, "case"));
  json_decref(facts);
  facts = document_facts(d);
  expect_facts(facts, json_object_get(expect, "document"));
  json_decref(facts);
  expect_finished(d, json_object_get(expect, "finished"));
  expect_same_again(d);
  expect_warnings(d, json_object_get(expect, "warnings"));
  expect_hash(d, json_object_get(expect, "hash as"), true);
  expect_hash(d, json_object_get(expect, "hash unlike"), false);
out:
  document_free(d);
  json_decref(expect);
  faults_free(&faults);
}

/* ---- what is refused ---- */

static bool fault_expected(const json_t *wanted, const request_fault *f) {
  for (size_t i = 0; i < json_array_size(wanted); i++) {
    const json_t *w = json_array_get(wanted, i);
    if (!strcmp(json_string_value(json_object_get(w, "at")), f->at) &&
        contains(f->is, json_object_get(w, "is contains")))
      return true;
  }
  return false;
}

static bool fault_found(const json_t *w, const fault_list *faults) {
  for (int i = 0; i < faults->count; i++)
    if (!strcmp(json_string_value(json_object_get(w, "at")), faults->items[i].at) &&
        contains(faults->items[i].is, json_object_get(w, "is contains")))
      return true;
  return false;
}

static void check_invalid(const char *folder) {
  fault_list faults;
  json_t *expect = expectation(folder), *wanted = json_object_get(expect, "faults");
  document *d = read_folder(folder, &faults);
  if (d) complain("was read without a fault%s%s", "", "");
  if (faults.status != json_integer_value(json_object_get(expect, "status")))
    complain("has another status%s%s", "", "");
  for (int i = 0; i < faults.count; i++)
    if (!fault_expected(wanted, &faults.items[i]))
      complain("unexpected fault at \"%s\": %s", faults.items[i].at, faults.items[i].is);
  for (size_t i = 0; i < json_array_size(wanted); i++) {
    const json_t *w = json_array_get(wanted, i), *is = json_object_get(w, "is contains");
    if (!fault_found(w, &faults))
      complain("no fault at \"%s\" that tells \"%s\"", json_string_value(json_object_get(w, "at")),
               is ? json_string_value(is) : "anything");
  }
  if (!json_array_size(wanted)) complain("expects no fault%s%s", "", "");
  document_free(d);
  json_decref(expect);
  faults_free(&faults);
}

static int for_each_folder(const char *group, void (*check)(const char *folder)) {
  char path[PATH];
  int count = 0;
  snprintf(path, sizeof path, "%s/%s", READER, group);
  struct dirent **entries;
  int n = scandir(path, &entries, NULL, alphasort);
  for (int i = 0; i < n; i++) {
    if (entries[i]->d_name[0] != '.') {
      snprintf(now, sizeof now, "%s/%s", group, entries[i]->d_name);
      check(now);
      count++;
    }
    free(entries[i]);
  }
  if (n >= 0) free(entries);
  return count;
}

static void open_library(void) {
  fault_list faults;
  faults_init(&faults);
  materials = library_open(&faults);
  cr_assert_not_null(materials);
  failures = 0;
}

static void close_library(void) {
  library_free(materials);
}

TestSuite(reader_folders, .init = open_library, .fini = close_library);

Test(reader_folders, valid_ones_are_read) {
  int count = for_each_folder("valid", check_valid);
  cr_expect(count >= 20, "only %d folders", count);
  cr_expect_eq(failures, 0, "%d expectations do not hold", failures);
}

Test(reader_folders, invalid_ones_are_refused_with_every_fault) {
  int count = for_each_folder("invalid", check_invalid);
  cr_expect(count >= FEWEST_INVALID, "only %d folders", count);
  cr_expect_eq(failures, 0, "%d expectations do not hold", failures);
}
