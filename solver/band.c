/* band.c: A x = b for tridiagonal A, by elimination from both ends to the middle row (twisted
 * factorisation). */
#include "band.h"

#include <math.h>

int tridiagonal_init(tridiagonal *t, int n, arena *memory) {
  t->size = n;
  t->reciprocal = arena_array(memory, (size_t)n, sizeof(double));
  t->eliminate = arena_array(memory, (size_t)n, sizeof(double));
  t->substitute = arena_array(memory, (size_t)n, sizeof(double));
  t->inner = arena_array(memory, 1, sizeof(double));
  return t->reciprocal && t->eliminate && t->substitute && t->inner ? 0 : -1;
}

static int bad_pivot(double pivot) {
  return !(fabs(pivot) > 0) || !isfinite(pivot);
}

int tridiagonal_factor(tridiagonal *t, const double *lower, const double *diagonal,
                       const double *upper) {
  int n = t->size, middle = n / 2;
  double *r = t->reciprocal, pivot;
  for (int i = 0; i < middle; i++) {
    t->eliminate[i] = i ? lower[i] * r[i - 1] : 0;
    pivot = diagonal[i] - (i ? t->eliminate[i] * upper[i - 1] : 0);
    if (bad_pivot(pivot)) return i;
    r[i] = 1 / pivot;
    t->substitute[i] = upper[i] * r[i];
  }
  for (int i = n - 1; i > middle; i--) {
    t->eliminate[i] = i < n - 1 ? upper[i] * r[i + 1] : 0;
    pivot = diagonal[i] - (i < n - 1 ? t->eliminate[i] * lower[i + 1] : 0);
    if (bad_pivot(pivot)) return i;
    r[i] = 1 / pivot;
    t->substitute[i] = lower[i] * r[i];
  }
  pivot = diagonal[middle];
  t->eliminate[middle] = t->inner[0] = t->substitute[middle] = 0;
  if (middle > 0) {
    t->eliminate[middle] = lower[middle] * r[middle - 1];
    pivot -= t->eliminate[middle] * upper[middle - 1];
  }
  if (middle < n - 1) {
    t->inner[0] = upper[middle] * r[middle + 1];
    pivot -= t->inner[0] * lower[middle + 1];
  }
  if (bad_pivot(pivot)) return middle;
  r[middle] = 1 / pivot;
  return -1;
}

void tridiagonal_solve(const tridiagonal *t, double *b) {
  int n = t->size, middle = n / 2;
  const double *e = t->eliminate, *s = t->substitute, *r = t->reciprocal;
  int below = n - 1 - middle; /* rows under the middle: middle or middle - 1 of them */
  for (int k = 1; k < middle; k++) {
    b[k] -= e[k] * b[k - 1];
    if (k < below) b[n - 1 - k] -= e[n - 1 - k] * b[n - k];
  }
  double x = b[middle];
  if (middle > 0) x -= e[middle] * b[middle - 1];
  if (below > 0) x -= t->inner[0] * b[middle + 1];
  b[middle] = x * r[middle];
  for (int k = 1; k <= middle; k++) {
    b[middle - k] = b[middle - k] * r[middle - k] - s[middle - k] * b[middle - k + 1];
    if (k <= below)
      b[middle + k] = b[middle + k] * r[middle + k] - s[middle + k] * b[middle + k - 1];
  }
}
