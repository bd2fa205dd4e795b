#include "run_case.h"
#include "document.h"
#include "kind.h"
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

const library *shared_library(void) {
  static library *opened;
  if (opened) return opened;
  fault_list faults;
  faults_init(&faults);
  opened = library_open(&faults);
  for (int i = 0; i < faults.count; i++)
    fprintf(stderr, "library: %s %s\n", faults.items[i].at, faults.items[i].is);
  faults_free(&faults);
  return opened;
}

static void tell_faults(const fault_list *faults, char *why, size_t size) {
  size_t used = 0;
  why[0] = 0;
  for (int i = 0; i < faults->count && used < size; i++)
    used += (size_t)snprintf(why + used, size - used, "%s%s: %s", i ? "; " : "",
                             faults->items[i].at, faults->items[i].is);
}

static json_t *rendered(const document *d, const void *answer, char *why, size_t size) {
  buffer text;
  json_t *result = NULL;
  json_error_t error;
  buffer_init(&text, 0);
  if (d->kind->write(d, answer, MEDIA_JSON, &text) || text.failed) {
    snprintf(why, size, "the result cannot be written");
  } else {
    result = json_loadb(text.bytes, text.length, JSON_REJECT_DUPLICATES, &error);
    if (!result) snprintf(why, size, "the result is no JSON: %s", error.text);
  }
  buffer_free(&text);
  return result;
}

json_t *run_case(const json_t *given, char *why, size_t size) {
  char *text = json_dumps(given, JSON_REAL_PRECISION(17));
  document *d = NULL;
  void *answer = NULL;
  json_t *result = NULL;
  fault_list faults;
  fault f;
  faults_init(&faults);
  if (!text || !shared_library()) goto out;
  if (document_read(text, strlen(text), NULL, shared_library(), &d, &faults)) {
    tell_faults(&faults, why, size);
    goto out;
  }
  if (job_run(d, NULL, &answer, &f) != STATUS_OK) {
    snprintf(why, size, "%s at %s, stage %d, t = %g s: %s", status_message(f.status), f.at, f.stage,
             f.time, f.is);
    if (f.status == STATUS_ERROR_NOT_MET) {
      size_t used = strlen(why);
      snprintf(why + used, size - used, " (could be met: %g K)", f.could_be_met);
    }
    goto out;
  }
  result = rendered(d, answer, why, size);
out:
  if (answer) d->kind->free_answer(answer);
  document_free(d);
  faults_free(&faults);
  free(text);
  return result;
}

static const json_t *walk(const json_t *at, char *path) {
  for (char *save = NULL, *name = strtok_r(path, "/", &save); name && at;
       name = strtok_r(NULL, "/", &save))
    at =
        json_is_array(at) ? json_array_get(at, strtoul(name, NULL, 10)) : json_object_get(at, name);
  return at;
}

const json_t *result_at(const json_t *root, const char *path, ...) {
  char text[256];
  va_list arguments;
  va_start(arguments, path);
  vsnprintf(text, sizeof text, path, arguments);
  va_end(arguments);
  return walk(root, text);
}

double result_number(const json_t *root, const char *path, ...) {
  char text[256];
  va_list arguments;
  va_start(arguments, path);
  vsnprintf(text, sizeof text, path, arguments);
  va_end(arguments);
  const json_t *found = walk(root, text);
  return json_is_number(found) ? json_number_value(found) : NAN;
}
