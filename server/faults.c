/* faults.c: faults collected, and the nearest name to a misspelt one. */
#include "faults.h"

#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

void faults_init(fault_list *f) {
  memset(f, 0, sizeof *f);
}

void faults_free(fault_list *f) {
  for (int i = 0; i < f->count; i++) {
    free(f->items[i].at);
    free(f->items[i].is);
    free(f->items[i].got);
    free(f->items[i].in);
  }
  faults_init(f);
}

void faults_add(fault_list *f, const char *at, const char *got, const char *is, ...) {
  f->found++;
  if (!f->status) f->status = 422;
  if (f->count == MOST_FAULTS) return;
  char text[512];
  va_list arguments;
  va_start(arguments, is);
  vsnprintf(text, sizeof text, is, arguments);
  va_end(arguments);
  request_fault *item = &f->items[f->count];
  *item = (request_fault){.at = strdup(at), .is = strdup(text), .got = got ? strdup(got) : NULL};
  if (!item->at || !item->is || (got && !item->got)) {
    free(item->at);
    free(item->is);
    free(item->got);
    memset(item, 0, sizeof *item);
    f->no_memory = true;
    return;
  }
  f->count++;
}

enum { LONGEST_NAME = 64 };

/* Edit distance with transpositions of neighbours (V. Levenshtein 1966, F. Damerau 1964). */
static int distance(const char *a, const char *b) {
  int n = (int)strlen(a), m = (int)strlen(b);
  if (n > LONGEST_NAME || m > LONGEST_NAME) return LONGEST_NAME;
  int rows[3][LONGEST_NAME + 1];
  for (int j = 0; j <= m; j++) rows[0][j] = j;
  for (int i = 1; i <= n; i++) {
    int *row = rows[i % 3], *above = rows[(i + 2) % 3], *before = rows[(i + 1) % 3];
    row[0] = i;
    for (int j = 1; j <= m; j++) {
      int least = above[j - 1] + (a[i - 1] != b[j - 1]);
      if (above[j] + 1 < least) least = above[j] + 1;
      if (row[j - 1] + 1 < least) least = row[j - 1] + 1;
      bool swapped = i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1];
      if (swapped && before[j - 2] + 1 < least) least = before[j - 2] + 1;
      row[j] = least;
    }
  }
  return rows[n % 3][m];
}

const char *nearest_name(const char *name, const char *const *names) {
  const char *best = NULL;
  int length = (int)strnlen(name, LONGEST_NAME + 1), least = length < 5 ? 2 : 1 + length / 3;
  if (length > LONGEST_NAME) return NULL;
  for (int i = 0; names[i]; i++) {
    int d = distance(name, names[i]);
    int longer = (int)strlen(names[i]) > length ? (int)strlen(names[i]) : length;
    if (d < least && d < longer) {
      least = d;
      best = names[i];
    }
  }
  return best;
}
