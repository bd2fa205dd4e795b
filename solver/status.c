/* status.c: names of failures. */
#include "status.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

const char *status_message(status s) {
  static const char *const messages[] = {
#define X(name, message) message,
      SOLVER_STATUSES(X)
#undef X
  };
  return (unsigned)s < STATUS_COUNT ? messages[s] : "unknown";
}

status fail(fault *f, status s, const char *at, const char *is, ...) {
  if (!f) return s;
  memset(f, 0, sizeof *f);
  f->status = s;
  f->stage = -1;
  f->time = NAN;
  f->could_be_met = NAN;
  snprintf(f->at, sizeof f->at, "%s", at ? at : "");
  va_list arguments;
  va_start(arguments, is);
  vsnprintf(f->is, sizeof f->is, is, arguments);
  va_end(arguments);
  return s;
}
