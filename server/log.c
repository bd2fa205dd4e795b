/* log.c: one JSON line an event. */
#include "log.h"

#include "clock.h"
#include "json_out.h"

#include <math.h>
#include <unistd.h>

enum { LONGEST_LINE = 16384 };

static const char *const level_names[] = {"info", "warning", "error"};

void log_begin(log_line *l, log_level level, const char *event) {
  char now[CLOCK_TEXT];
  clock_text(clock_wall(), now);
  buffer_init(&l->text, LONGEST_LINE);
  buffer_format(&l->text, "{\"time\": \"%s\", \"level\": \"%s\", \"event\": \"%s\"", now,
                level_names[level], event);
}

void log_text(log_line *l, const char *name, const char *value) {
  if (!value || !*value) return;
  buffer_format(&l->text, ", \"%s\": ", name);
  json_out_string(&l->text, value);
}

void log_number(log_line *l, const char *name, double value) {
  if (!isfinite(value)) return;
  buffer_format(&l->text, ", \"%s\": ", name);
  json_out_number(&l->text, value, INFINITY);
}

void log_end(log_line *l) {
  buffer_text(&l->text, "}\n");
  if (!l->text.failed && l->text.length > 0) {
    ssize_t written = write(STDERR_FILENO, l->text.bytes, l->text.length);
    (void)written; /* there is nowhere left to report to */
  }
  buffer_free(&l->text);
}

void log_event(log_level level, const char *event, const char *name, const char *value) {
  log_line l;
  log_begin(&l, level, event);
  log_text(&l, name, value);
  log_end(&l);
}
