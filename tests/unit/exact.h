/* exact.h: a body at one temperature put into a medium at another, with constant properties: the
   series of H. S. Carslaw & J. C. Jaeger, Conduction of Heat in Solids, 2nd ed. 1959: plate 3.11,
   cylinder 7.7, sphere 9.4. */
#ifndef CORESOAK_TESTS_EXACT_H
#define CORESOAK_TESTS_EXACT_H

#include <math.h>

enum { EXACT_TERMS = 80 };

static inline double exact_condition(int power, double bi, double b) {
  if (power == 0) return b * sin(b) - bi * cos(b);
  if (power == 1) return b * j1(b) - bi * j0(b);
  return (1 - bi) * sin(b) - b * cos(b);
}

/* Roots lie about pi apart: a scan in steps of 0.02 with bisection finds all. */
static inline void exact_roots(int power, double bi, double root[EXACT_TERMS]) {
  int count = 0;
  for (double a = 1e-3, step = 0.02; count < EXACT_TERMS; a += step) {
    double low = a, high = a + step, at_low = exact_condition(power, bi, low);
    if (at_low * exact_condition(power, bi, high) > 0) continue;
    for (int i = 0; i < 60; i++) {
      double middle = 0.5 * (low + high);
      if (at_low * exact_condition(power, bi, middle) > 0)
        low = middle;
      else
        high = middle;
    }
    root[count++] = 0.5 * (low + high);
  }
}

/* (T - T_medium)/(T_start - T_medium) at depth ratio x = r/L (0 centre, 1 surface) and Fourier
   number fo = diffusivity t/L^2; L the half thickness or radius. */
static inline double exact_ratio(int power, double bi, double x, double fo) {
  static double root[EXACT_TERMS], roots_of[2] = {-1, -1};
  double sum = 0;
  if (roots_of[0] != power || roots_of[1] != bi) exact_roots(power, bi, root);
  roots_of[0] = power;
  roots_of[1] = bi;
  for (int i = 0; i < EXACT_TERMS; i++) {
    double b = root[i], decay = exp(-b * b * fo);
    if (decay < 1e-18) break;
    double weight, shape;
    if (power == 0) {
      weight = 4 * sin(b) / (2 * b + sin(2 * b));
      shape = cos(b * x);
    } else if (power == 1) {
      weight = 2 / b * j1(b) / (j0(b) * j0(b) + j1(b) * j1(b));
      shape = j0(b * x);
    } else {
      weight = 4 * (sin(b) - b * cos(b)) / (2 * b - sin(2 * b));
      shape = x > 0 ? sin(b * x) / (b * x) : 1;
    }
    sum += weight * shape * decay;
  }
  return sum;
}

#endif
