/* elementary.c: reduction of the argument to a short interval, then the Taylor series there.

   exp:  x = n ln 2 + r, |r| <= ln 2 / 2,  e^x = 2^n e^r
   log:  x = 2^n m, m in [sqrt 1/2, sqrt 2), s = (m - 1)/(m + 1),  log m = 2 (s + s^3/3 + s^5/5 +
   ...) sin, cos:  x = n pi/2 + r, |r| <= pi/4

   Intermediate results that would cost the last digit are kept as an unevaluated sum of two doubles
   (Dekker, Numerische Mathematik 18, 1971: sum, product by splitting). Constants are the leading
   bits of ln 2 and pi/2, cut so that n times a piece is exact (Cody & Waite, Software Manual for
   the Elementary Functions, 1980). */
#include "elementary.h"

#include <math.h>
#include <stdbool.h>
#include <stdint.h>
#include <string.h>

/* high + low, |low| at most half a unit in the last place of high. */
typedef struct wide {
  double high, low;
} wide;

static wide sum_of(double a, double b) {
  double s = a + b, part = s - a;
  return (wide){s, (a - (s - part)) + (b - part)};
}

/* sum_of for |a| >= |b|. */
static wide quick_sum(double a, double b) {
  double s = a + b;
  return (wide){s, b - (s - a)};
}

static void split(double a, double *high, double *low) {
  double c = 134217729.0 * a; /* 2^27 + 1 */
  *high = c - (c - a);
  *low = a - *high;
}

static wide product_of(double a, double b) {
  double p = a * b, ah, al, bh, bl;
  split(a, &ah, &al);
  split(b, &bh, &bl);
  return (wide){p, ((ah * bh - p) + ah * bl + al * bh) + al * bl};
}

static wide wide_product(wide a, wide b) {
  wide p = product_of(a.high, b.high);
  return quick_sum(p.high, p.low + (a.high * b.low + a.low * b.high));
}

static wide wide_sum(wide a, wide b) {
  wide s = sum_of(a.high, b.high);
  return quick_sum(s.high, s.low + (a.low + b.low));
}

static double nearest(double x) {
  return (double)(int64_t)(x < 0 ? x - 0.5 : x + 0.5);
}

/* c[0] + c[1] x + ... + c[count - 1] x^(count - 1). */
static double polynomial(const double *c, int count, double x) {
  double value = c[count - 1];
  for (int i = count - 2; i >= 0; i--) value = value * x + c[i];
  return value;
}

/* 2^n for -1022 <= n <= 1023. */
static double power_of_two(int n) {
  uint64_t bits = (uint64_t)(n + 1023) << 52;
  double value;
  memcpy(&value, &bits, sizeof value);
  return value;
}

static double scale(double x, int n) {
  if (n > 1023) return x * power_of_two(1023) * power_of_two(n - 1023);
  if (n < -1022) return x * power_of_two(n + 100) * power_of_two(-100);
  return x * power_of_two(n);
}

/* ---- exponentials ---- */

#define LN2_1  0x1.62e42fee00000p-1  /* 32 bits */
#define LN2_2  0x1.a39ef35600000p-33 /* the next 32 */
#define LN2_3  0x1.93c7673007e5fp-65
#define LOG2_E 0x1.71547652b82fep+0

#define EXP_LARGEST  709.782712893384
#define EXP_SMALLEST -745.1332191019412

/* e^r - 1 - r over r^2, |r| <= 0.35: the first term left out is below 2e-18. */
static double exp_tail(double r) {
  static const double c[] = {1.0 / 2,       1.0 / 6,        1.0 / 24,        1.0 / 120,
                             1.0 / 720,     1.0 / 5040,     1.0 / 40320,     1.0 / 362880,
                             1.0 / 3628800, 1.0 / 39916800, 1.0 / 479001600, 1.0 / 6227020800};
  return polynomial(c, 12, r);
}

static double exp_of(wide x) {
  if (isnan(x.high)) return x.high;
  if (x.high > EXP_LARGEST) return INFINITY;
  if (x.high < EXP_SMALLEST) return 0;
  double n = nearest(x.high * LOG2_E);
  wide r = sum_of(x.high - n * LN2_1, -n * LN2_2);
  double low = r.low + (x.low - n * LN2_3);
  wide one = quick_sum(1, r.high);
  double rest = one.low + r.high * r.high * exp_tail(r.high);
  return scale(one.high + (rest + low * (one.high + rest)), (int)n);
}

double elementary_exp(double x) {
  return exp_of((wide){x, 0});
}

static const wide ln_10 = {0x1.26bb1bbb55516p+1, -0x1.f48ad494ea3e9p-53};

double elementary_exp10(double x) {
  if (!(fabs(x) < 400)) return isnan(x) ? x : x > 0 ? INFINITY : 0;
  return exp_of(wide_product(ln_10, (wide){x, 0}));
}

/* ---- logarithms ---- */

/* 2 (1/5 + z/7 + z^2/9 + ...), z = s^2 <= 0.0295: the first term left out is below 1e-18 of the
 * sum. */
static double log_tail(double z) {
  static const double c[] = {2.0 / 5,  2.0 / 7,  2.0 / 9,  2.0 / 11, 2.0 / 13,
                             2.0 / 15, 2.0 / 17, 2.0 / 19, 2.0 / 21};
  return polynomial(c, 9, z);
}

/* x = 2^n m, m in [sqrt 1/2, sqrt 2), for 0 < x < INFINITY. */
static double mantissa(double x, int *n) {
  int shift = 0;
  if (x < power_of_two(-1022)) {
    x *= power_of_two(54);
    shift = -54;
  }
  uint64_t bits;
  memcpy(&bits, &x, sizeof bits);
  *n = (int)(bits >> 52) - 1023 + shift;
  bits = (bits & 0xfffffffffffffu) | (uint64_t)1023 << 52;
  memcpy(&x, &bits, sizeof x);
  if (x >= 1.4142135623730951) {
    x *= 0.5;
    ++*n;
  }
  return x;
}

/* For 0 < x < INFINITY, to about 1e-19 of the result. */
static wide log_of(double x) {
  int n;
  double f = mantissa(x, &n) - 1;
  wide below = sum_of(2, f);
  double quotient = f / below.high;
  wide back = product_of(quotient, below.high);
  wide s = quick_sum(quotient, (((f - back.high) - back.low) - quotient * below.low) / below.high);
  wide z = wide_product(s, s), cube = wide_product(s, z);
  wide third = wide_product(cube, (wide){0x1.5555555555555p-1, 0x1.5555555555555p-55});
  third.low += cube.high * z.high * log_tail(z.high);
  wide m = wide_sum((wide){2 * s.high, 2 * s.low}, third);
  wide whole = sum_of(n * LN2_1, n * LN2_2);
  whole.low += n * LN2_3;
  return wide_sum(whole, m);
}

static bool log_is_special(double x, double *value) {
  *value = isnan(x) || x < 0 ? NAN : x > 0 ? INFINITY : -INFINITY;
  return !(x > 0 && x < INFINITY);
}

double elementary_log(double x) {
  double special;
  if (log_is_special(x, &special)) return special;
  return log_of(x).high;
}

double elementary_log10(double x) {
  static const wide log10_e = {0x1.bcb7b1526e50ep-2, 0x1.95355baaafad3p-57};
  double special;
  if (log_is_special(x, &special)) return special;
  return wide_product(log_of(x), log10_e).high;
}

double elementary_pow(double x, double y) {
  if (y == 0 || x == 1) return 1;
  if (isnan(y) || isnan(x) || x < 0) return NAN;
  if (x == 0) return y > 0 ? 0 : INFINITY;
  if (isinf(x)) return y > 0 ? INFINITY : 0;
  double rough = log_of(x).high * y;
  if (!(fabs(rough) < 1000)) return rough > 0 ? INFINITY : 0;
  return exp_of(wide_product(log_of(x), (wide){y, 0}));
}

/* ---- sine and cosine ---- */

/* pi/2 in pieces of 23 bits: n times a piece is exact for |n| <= 2^30. */
static const double half_pi[6] = {0x1.921fb4p+0,  0x1.4442dp-24,  0x1.846988p-48,
                                  0x1.8cc514p-72, 0x1.80dc1cp-95, 0x1.a25204p-120};

#define TWO_OVER_PI   0x1.45f306dc9c883p-1
#define LARGEST_ANGLE 1073741824.0 /* 2^30 */

/* Remainder of x by pi/2; the quarter it lies in, 0 .. 3, in *quarter. */
static wide quarter_of(double x, int *quarter) {
  double n = nearest(x * TWO_OVER_PI);
  *quarter = (int)((int64_t)n & 3);
  wide r = {x - n * half_pi[0], 0};
  for (int i = 1; i < 6; i++) {
    wide s = sum_of(r.high, -n * half_pi[i]);
    r = quick_sum(s.high, s.low + r.low);
  }
  return r;
}

static double sine_near_zero(wide r) {
  double z = r.high * r.high;
  static const double c[] = {
      -1.0 / 6,        1.0 / 120,        -1.0 / 5040,          1.0 / 362880,
      -1.0 / 39916800, 1.0 / 6227020800, -1.0 / 1307674368000, 1.0 / 355687428096000};
  double tail = polynomial(c, 8, z);
  return r.high + (r.low * (1 - 0.5 * z) + r.high * z * tail);
}

static double cosine_near_zero(wide r) {
  double z = r.high * r.high, half = 0.5 * z, most = 1 - half;
  static const double c[] = {
      1.0 / 24,        -1.0 / 720,         1.0 / 40320,         -1.0 / 3628800,
      1.0 / 479001600, -1.0 / 87178291200, 1.0 / 20922789888000};
  double tail = polynomial(c, 7, z);
  return most + (((1 - most) - half) + (z * z * tail - r.high * r.low));
}

static double circular(double x, int shift) {
  if (!(fabs(x) <= LARGEST_ANGLE)) return NAN;
  int quarter;
  wide r = quarter_of(x, &quarter);
  switch ((quarter + shift) & 3) {
  case 0: return sine_near_zero(r);
  case 1: return cosine_near_zero(r);
  case 2: return -sine_near_zero(r);
  default: return -cosine_near_zero(r);
  }
}

double elementary_sin(double x) {
  return circular(x, 0);
}

double elementary_cos(double x) {
  return circular(x, 1);
}
