/* Log lines, and the clocks' text (RFC 3339). */
#include "log.h"
#include "clock.h"

#include <criterion/criterion.h>
#include <jansson.h>
#include <math.h>
#include <unistd.h>

/* What a function writes to stderr, as JSON. */
static json_t *logged(void (*write_it)(void)) {
  char line[4096];
  int ends[2], kept = dup(STDERR_FILENO);
  cr_assert_eq(pipe(ends), 0);
  dup2(ends[1], STDERR_FILENO);
  write_it();
  dup2(kept, STDERR_FILENO);
  close(ends[1]);
  ssize_t n = read(ends[0], line, sizeof line);
  close(ends[0]);
  cr_assert(n > 0 && line[n - 1] == '\n', "one whole line");
  return json_loadb(line, (size_t)n, JSON_REJECT_DUPLICATES, NULL);
}

static void one_line(void) {
  log_line l;
  log_begin(&l, LOG_LEVEL_WARNING, "request");
  log_text(&l, "target", "/a\"b\n");
  log_text(&l, "none", NULL);
  log_text(&l, "empty", "");
  log_number(&l, "seconds", 0.25);
  log_number(&l, "unknown", NAN);
  log_end(&l);
}

Test(log, a_line_is_one_json_object) {
  json_t *j = logged(one_line);
  cr_assert(j);
  cr_assert_str_eq(json_string_value(json_object_get(j, "level")), "warning");
  cr_assert_str_eq(json_string_value(json_object_get(j, "event")), "request");
  cr_assert_str_eq(json_string_value(json_object_get(j, "target")), "/a\"b\n");
  cr_assert_float_eq(json_number_value(json_object_get(j, "seconds")), 0.25, 0);
  cr_assert_eq(json_object_size(j), 5, "what is empty or unknown is left out");
  json_decref(j);
}

/* 2000-03-01T00:00:00Z is 951868800 s after 1970 (POSIX.1, "Seconds Since the Epoch": 11,017 days).
 */
Test(log, moments) {
  char text[CLOCK_TEXT];
  clock_text(951868800.25, text);
  cr_assert_str_eq(text, "2000-03-01T00:00:00.250Z");
  clock_text(0, text);
  cr_assert_str_eq(text, "1970-01-01T00:00:00.000Z");
  clock_text(NAN, text);
  cr_assert_str_eq(text, "");
}
