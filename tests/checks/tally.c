#include "tally.h"
#include <math.h>
#include <stdarg.h>
#include <stdio.h>

static int passed, failed, waiting;

bool check_near(const char *what, double value, double expected, double tolerance, const char *unit,
                const char *source) {
  bool good = fabs(value - expected) <= tolerance;
  good ? passed++ : failed++;
  printf("%-5s %-44s %14.8g  expected %14.8g  within %9.3g %-8s [%s]\n", good ? "ok" : "FAIL", what,
         value, expected, tolerance, unit, source);
  return good;
}

bool check_true(const char *what, bool holds, const char *detail, ...) {
  va_list arguments;
  holds ? passed++ : failed++;
  printf("%-5s %s: ", holds ? "ok" : "FAIL", what);
  va_start(arguments, detail);
  vprintf(detail, arguments);
  va_end(arguments);
  printf("\n");
  return holds;
}

void check_waits(const char *what, int rows, const char *why) {
  waiting += rows;
  printf("waits %s: %d rows: %s\n", what, rows, why);
}

int tally_finish(void) {
  if (waiting) printf("%d rows wait\n", waiting);
  printf("%d passed, %d failed\n", passed, failed);
  return failed != 0;
}
