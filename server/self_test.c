/* self_test.c: three systems A x = b with A of small whole numbers, x_i = 1 + i mod 7, and b = A x
 * exact in doubles. */
#include "self_test.h"

#include <lapacke.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

enum { SIZE = 60, BELOW = 2, ROWS = 3 * BELOW + 1 };

static const double LARGEST_ERROR = 1e-12; /* condition number below 100, so 1e-14 is usual */

/* Present in OpenBLAS only; any other LAPACK links as well. */
extern void openblas_set_num_threads(int threads) __attribute__((weak));
extern char *openblas_get_corename(void) __attribute__((weak));

void arithmetic_in_one_thread(void) {
  if (openblas_set_num_threads) openblas_set_num_threads(1);
}

const char *arithmetic_kernel(void) {
  return openblas_get_corename ? openblas_get_corename() : "unknown";
}

/* Entry of the system with `below` diagonals on each side: 4 (6) on the diagonal, -1 beside it;
 * above it -2 when it is not symmetric. */
static double entry(int row, int column, int below, bool symmetric) {
  int distance = row > column ? row - column : column - row;
  if (distance > below) return 0;
  if (distance == 0) return 2 * below + 2;
  return column > row && !symmetric ? -2 : -1;
}

static double known(int i) {
  return 1 + i % 7;
}

static void right_hand_side(int below, bool symmetric, double b[SIZE]) {
  for (int i = 0; i < SIZE; i++) {
    b[i] = 0;
    for (int j = 0; j < SIZE; j++) b[i] += entry(i, j, below, symmetric) * known(j);
  }
}

/* Largest of solution error and residual. */
static double error_of(int below, bool symmetric, const double x[SIZE]) {
  double b[SIZE], worst = 0;
  right_hand_side(below, symmetric, b);
  for (int i = 0; i < SIZE; i++) {
    double residual = b[i];
    for (int j = 0; j < SIZE; j++) residual -= entry(i, j, below, symmetric) * x[j];
    double error = fmax(fabs(residual), fabs(x[i] - known(i)));
    if (!(error <= worst)) worst = error;
  }
  return worst;
}

static double tridiagonal_error(void) {
  double lower[SIZE], diagonal[SIZE], upper[SIZE], x[SIZE];
  for (int i = 0; i < SIZE; i++) {
    diagonal[i] = entry(i, i, 1, false);
    upper[i] = entry(i, i + 1, 1, false);
    lower[i] = entry(i + 1, i, 1, false);
  }
  right_hand_side(1, false, x);
  if (LAPACKE_dgtsv(LAPACK_COL_MAJOR, SIZE, 1, lower, diagonal, upper, x, SIZE) != 0) return NAN;
  return error_of(1, false, x);
}

/* Lower band: A(i, j) at band[i - j + j * leading]. */
static double cholesky_error(void) {
  double band[SIZE * (BELOW + 1)] = {0}, x[SIZE];
  for (int j = 0; j < SIZE; j++)
    for (int i = j; i < SIZE && i <= j + BELOW; i++)
      band[i - j + j * (BELOW + 1)] = entry(i, j, BELOW, true);
  right_hand_side(BELOW, true, x);
  if (LAPACKE_dpbtrf(LAPACK_COL_MAJOR, 'L', SIZE, BELOW, band, BELOW + 1) != 0) return NAN;
  if (LAPACKE_dpbtrs(LAPACK_COL_MAJOR, 'L', SIZE, BELOW, 1, band, BELOW + 1, x, SIZE) != 0)
    return NAN;
  return error_of(BELOW, true, x);
}

/* General band with room for fill: A(i, j) at band[2 BELOW + i - j + j * ROWS]. */
static double band_error(void) {
  double band[SIZE * ROWS] = {0}, x[SIZE];
  lapack_int pivots[SIZE];
  for (int j = 0; j < SIZE; j++)
    for (int i = 0; i < SIZE; i++)
      if (i - j <= BELOW && j - i <= BELOW)
        band[2 * BELOW + i - j + j * ROWS] = entry(i, j, BELOW, false);
  right_hand_side(BELOW, false, x);
  if (LAPACKE_dgbsv(LAPACK_COL_MAJOR, SIZE, BELOW, BELOW, 1, band, ROWS, pivots, x, SIZE) != 0)
    return NAN;
  return error_of(BELOW, false, x);
}

bool self_test(char *message, size_t size) {
  static const struct {
    const char *name;
    double (*error)(void);
  } systems[] = {{"tridiagonal", tridiagonal_error},
                 {"band Cholesky", cholesky_error},
                 {"band with pivoting", band_error}};
  for (size_t i = 0; i < sizeof systems / sizeof systems[0]; i++) {
    double error = systems[i].error();
    if (error <= LARGEST_ERROR) continue;
    snprintf(message, size, "the %s system is off by %.3g", systems[i].name, error);
    return false;
  }
  return true;
}
