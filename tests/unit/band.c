/* band: the twisted tridiagonal solver against LAPACK's dgtsv and dgesv on random diagonally
   dominant systems of every small size. */
#include "band.h"

#include <criterion/criterion.h>
#include <lapacke.h>
#include <math.h>
#include <stdint.h>
#include <string.h>

enum { MOST = 400 };

static uint64_t seed = 88172645463325252u;

/* xorshift64 of G. Marsaglia, Journal of Statistical Software 8 (14), 2003; in [-1, 1). */
static double chance(void) {
  seed ^= seed << 13;
  seed ^= seed >> 7;
  seed ^= seed << 17;
  return (double)(seed >> 11) / 4503599627370496.0 - 1;
}

typedef struct system_of {
  int n;
  double lower[MOST], diagonal[MOST], upper[MOST], b[MOST];
} system_of;

static void random_system(system_of *s, int n) {
  s->n = n;
  for (int i = 0; i < n; i++) {
    s->lower[i] = i ? chance() : NAN; /* not read */
    s->upper[i] = i < n - 1 ? chance() : NAN;
    double others = (i ? fabs(s->lower[i]) : 0) + (i < n - 1 ? fabs(s->upper[i]) : 0);
    s->diagonal[i] = (chance() < 0 ? -1 : 1) * (others + 0.05 + fabs(chance()));
    s->b[i] = chance();
  }
}

/* Rows dominate by at least 0.05 of about 2, so the condition number stays below about 100 and the
   forward error of either method below 100 x 1e-16 x a few. */
#define TOLERANCE 1e-13

static void solve_by_both_ends(const system_of *s, double *x) {
  arena memory;
  tridiagonal t;
  arena_init(&memory, 0);
  cr_assert_eq(tridiagonal_init(&t, s->n, &memory), 0);
  cr_assert_eq(tridiagonal_factor(&t, s->lower, s->diagonal, s->upper), -1);
  memcpy(x, s->b, (size_t)s->n * sizeof *x);
  tridiagonal_solve(&t, x);
  arena_free(&memory);
}

Test(band, agrees_with_the_general_tridiagonal_solver) {
  static system_of s;
  for (int n = 1; n <= MOST; n += n < 20 ? 1 : 37) {
    double x[MOST], lower[MOST], diagonal[MOST], upper[MOST], reference[MOST];
    random_system(&s, n);
    solve_by_both_ends(&s, x);
    for (int i = 0; i < n; i++) {
      if (i) lower[i - 1] = s.lower[i];
      diagonal[i] = s.diagonal[i];
      upper[i] = i < n - 1 ? s.upper[i] : 0;
      reference[i] = s.b[i];
    }
    cr_assert_eq(LAPACKE_dgtsv(LAPACK_COL_MAJOR, n, 1, lower, diagonal, upper, reference, n), 0);
    for (int i = 0; i < n; i++)
      cr_assert_float_eq(x[i], reference[i], TOLERANCE * (1 + fabs(reference[i])), "n %d row %d", n,
                         i);
  }
}

Test(band, agrees_with_a_dense_solver) {
  static system_of s;
  static double a[60 * 60];
  for (int n = 1; n <= 60; n += 3) {
    double x[MOST], reference[MOST];
    lapack_int pivots[60];
    random_system(&s, n);
    solve_by_both_ends(&s, x);
    memset(a, 0, sizeof a);
    for (int i = 0; i < n; i++) {
      if (i) a[i * n + i - 1] = s.lower[i];
      a[i * n + i] = s.diagonal[i];
      if (i < n - 1) a[i * n + i + 1] = s.upper[i];
      reference[i] = s.b[i];
    }
    cr_assert_eq(LAPACKE_dgesv(LAPACK_ROW_MAJOR, n, 1, a, n, pivots, reference, 1), 0);
    for (int i = 0; i < n; i++)
      cr_assert_float_eq(x[i], reference[i], TOLERANCE * (1 + fabs(reference[i])), "n %d row %d", n,
                         i);
  }
}

Test(band, one_factorisation_serves_many_right_hand_sides) {
  static system_of s;
  arena memory;
  tridiagonal t;
  arena_init(&memory, 0);
  random_system(&s, 51);
  cr_assert_eq(tridiagonal_init(&t, 51, &memory), 0);
  cr_assert_eq(tridiagonal_factor(&t, s.lower, s.diagonal, s.upper), -1);
  for (int k = 0; k < 5; k++) {
    double x[51], b[51];
    for (int i = 0; i < 51; i++) b[i] = x[i] = chance();
    tridiagonal_solve(&t, x);
    for (int i = 0; i < 51; i++) {
      double row = s.diagonal[i] * x[i] + (i ? s.lower[i] * x[i - 1] : 0) +
                   (i < 50 ? s.upper[i] * x[i + 1] : 0);
      cr_assert_float_eq(row, b[i], TOLERANCE);
    }
  }
  arena_free(&memory);
}

Test(band, a_singular_row_is_named) {
  static const int sizes[] = {1, 2, 3, 4, 7, 8};
  arena memory;
  arena_init(&memory, 0);
  for (int k = 0; k < 6; k++) {
    int n = sizes[k];
    for (int bad = 0; bad < n; bad++) {
      double lower[8] = {0}, diagonal[8], upper[8] = {0};
      tridiagonal t;
      for (int i = 0; i < n; i++) diagonal[i] = i == bad ? 0 : 2;
      cr_assert_eq(tridiagonal_init(&t, n, &memory), 0);
      cr_assert_eq(tridiagonal_factor(&t, lower, diagonal, upper), bad);
      diagonal[bad] = NAN;
      cr_assert_eq(tridiagonal_factor(&t, lower, diagonal, upper), bad);
      diagonal[bad] = INFINITY;
      cr_assert_eq(tridiagonal_factor(&t, lower, diagonal, upper), bad);
      diagonal[bad] = 2;
      cr_assert_eq(tridiagonal_factor(&t, lower, diagonal, upper), -1);
    }
  }
  arena_free(&memory);
}

Test(band, a_pivot_that_cancels_is_found) {
  /* rows 0 and 1 are multiples: the second pivot is 4 - 2 x 2 = 0; n = 5 so that both are above
     the middle */
  double lower[] = {0, 2, 0, 0, 0}, diagonal[] = {1, 4, 1, 1, 1}, upper[] = {2, 0, 0, 0, 0};
  arena memory;
  tridiagonal t;
  arena_init(&memory, 0);
  cr_assert_eq(tridiagonal_init(&t, 5, &memory), 0);
  cr_assert_eq(tridiagonal_factor(&t, lower, diagonal, upper), 1);
  arena_free(&memory);
}

Test(band, out_of_memory_is_told) {
  arena memory;
  tridiagonal t;
  arena_init(&memory, 3 * 64);
  cr_assert_eq(tridiagonal_init(&t, 8, &memory), -1);
  arena_free(&memory);
}
