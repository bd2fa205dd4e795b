/* The elementary functions against the C library's in extended precision (64 bits of mantissa). */
#include "elementary.h"

#include <criterion/criterion.h>
#include <math.h>
#include <stdint.h>
#include <string.h>

enum { MANY = 200000 };

static uint64_t seed = 88172645463325252u;

/* xorshift (Marsaglia, 2003), uniform in [0, 1). */
static double any(void) {
  seed ^= seed << 13;
  seed ^= seed >> 7;
  seed ^= seed << 17;
  return (double)(seed >> 11) / 9007199254740992.0;
}

static double between(double a, double b) {
  return a + (b - a) * any();
}

/* Distance in units of the last place of the exact value. */
static double ulps(double got, long double exact) {
  double nearest = fabs((double)exact), unit = nextafter(nearest, INFINITY) - nearest;
  return (double)(fabsl((long double)got - exact) / unit);
}

typedef struct compared {
  const char *name;
  double (*ours)(double);
  long double (*exact)(long double);
  double from, to;
  int logarithmic; /* x = 10^u */
} compared;

static long double power_of_ten(long double x) {
  return powl(10, x);
}

static const compared table[] = {
    {"exp", elementary_exp, expl, -708, 709, 0},
    {"exp", elementary_exp, expl, -1, 1, 0},
    {"exp near 0", elementary_exp, expl, -20, -3, 1},
    {"exp10", elementary_exp10, power_of_ten, -307, 308, 0},
    {"exp10", elementary_exp10, power_of_ten, -2, 2, 0},
    {"log", elementary_log, logl, -307, 308, 1},
    {"log", elementary_log, logl, 0.5, 2, 0},
    {"log near 1", elementary_log, logl, 1 - 1e-5, 1 + 1e-5, 0},
    {"log10", elementary_log10, log10l, -307, 308, 1},
    {"log10", elementary_log10, log10l, 0.5, 2, 0},
    {"sin", elementary_sin, sinl, -7, 7, 0},
    {"sin far out", elementary_sin, sinl, -1e6, 1e6, 0},
    {"sin near 0", elementary_sin, sinl, -100, 0, 1},
    {"cos", elementary_cos, cosl, -7, 7, 0},
    {"cos far out", elementary_cos, cosl, -1e6, 1e6, 0},
};

Test(elementary, is_within_one_unit_in_the_last_place) {
  for (size_t i = 0; i < sizeof table / sizeof *table; i++) {
    const compared *c = &table[i];
    double worst = 0, at = 0;
    for (int j = 0; j < MANY; j++) {
      double x = between(c->from, c->to);
      if (c->logarithmic) x = pow(10, x);
      double d = ulps(c->ours(x), c->exact(x));
      if (d > worst) {
        worst = d;
        at = x;
      }
    }
    cr_expect(worst <= 1.0, "%s from %g to %g: %g units at %.17g", c->name, c->from, c->to, worst,
              at);
    cr_expect(worst > 0, "%s: an error of exactly 0 means that nothing was compared", c->name);
  }
}

Test(elementary, power_is_within_one_unit_in_the_last_place) {
  double worst = 0;
  for (int j = 0; j < MANY; j++) {
    double x = pow(10, between(-8, 8)), y = between(-30, 30);
    double d = ulps(elementary_pow(x, y), powl(x, y));
    if (d > worst) worst = d;
  }
  /* powl itself is good to a few units of its 64 bits */
  cr_expect(worst <= 1.0, "%g units", worst);
}

Test(elementary, sine_and_cosine_near_multiples_of_a_quarter_turn) {
  for (int i = -100000; i <= 100000; i++) {
    double x = i * 1.5707963267948966;
    cr_assert(ulps(elementary_sin(x), sinl(x)) <= 1.0, "sin %.17g", x);
    cr_assert(ulps(elementary_cos(x), cosl(x)) <= 1.0, "cos %.17g", x);
  }
}

static int same_bits(double a, double b) {
  return !memcmp(&a, &b, sizeof a);
}

Test(elementary, special_values) {
  cr_expect(elementary_exp(0) == 1);
  cr_expect(elementary_exp(-INFINITY) == 0);
  cr_expect(isinf(elementary_exp(INFINITY)));
  cr_expect(isinf(elementary_exp(709.79)));
  cr_expect(isfinite(elementary_exp(709.78)));
  cr_expect(elementary_exp(-745.2) == 0);
  cr_expect(elementary_exp(-745.1) > 0);
  cr_expect(isnan(elementary_exp(NAN)));
  cr_expect(elementary_exp10(2) == 100);
  cr_expect(elementary_exp10(-INFINITY) == 0);
  cr_expect(isinf(elementary_exp10(INFINITY)));
  cr_expect(isnan(elementary_exp10(NAN)));
  cr_expect(same_bits(elementary_log(1), 0.0));
  cr_expect(elementary_log(0) == -INFINITY);
  cr_expect(isnan(elementary_log(-1)));
  cr_expect(elementary_log(INFINITY) == INFINITY);
  cr_expect(isnan(elementary_log(NAN)));
  for (int k = 0; k <= 22; k++) cr_expect(elementary_log10(pow(10, k)) == k, "log10 of 1e%d", k);
  cr_expect(elementary_sin(0) == 0);
  cr_expect(elementary_cos(0) == 1);
  cr_expect(isnan(elementary_sin(INFINITY)));
  cr_expect(isnan(elementary_cos(NAN)));
  cr_expect(isnan(elementary_sin(1.1e9)));
}

Test(elementary, smallest_numbers) {
  double least = 4.9406564584124654e-324;
  cr_expect(fabs(elementary_log(least) - -744.44007192138126) < 2e-13);
  cr_expect(fabs(elementary_log10(least) - -323.30621534311581) < 1e-13);
  cr_expect(ulps(elementary_exp(-720), expl(-720)) <= 1.0);
}

Test(elementary, power_at_the_edges) {
  cr_expect(elementary_pow(0, 0) == 1);
  cr_expect(elementary_pow(1, NAN) == 1);
  cr_expect(elementary_pow(0, 2) == 0);
  cr_expect(elementary_pow(0, -2) == INFINITY);
  cr_expect(isnan(elementary_pow(-2, 2)));
  cr_expect(elementary_pow(INFINITY, -1) == 0);
  cr_expect(elementary_pow(10, 400) == INFINITY);
  cr_expect(elementary_pow(10, -400) == 0);
  cr_expect(elementary_pow(3, 4) == 81);
}
