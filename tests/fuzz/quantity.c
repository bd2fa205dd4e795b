/* Any text as a quantity of any dimension: a finite number, or a refusal that leaves the value
 * alone. */
#include "units.h"

#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t length);

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t length) {
  char text[256], hint[40];
  if (length >= sizeof text) return 0;
  memcpy(text, bytes, length);
  text[length] = '\0';
  for (int d = 0; d < DIMENSION_COUNT; d++) {
    double value = 42;
    unit_outcome outcome = quantity_read(text, (dimension)d, &value, hint, sizeof hint);
    if (outcome == UNIT_OK ? !isfinite(value) : value != 42) abort();
    if (strlen(hint) >= sizeof hint) abort();
  }
  return 0;
}
