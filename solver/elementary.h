/* elementary.h: exponentials, logarithms and circular functions in a fixed order of plain
   additions, multiplications and divisions, so that the same argument gives the same bits on every
   IEEE 754 machine. Built with -ffp-contract=off. All are within one unit in the last place of the
   exact value where the result is normal, allocate nothing and touch no state. NAN in, NAN out. */
#ifndef CORESOAK_ELEMENTARY_H
#define CORESOAK_ELEMENTARY_H

/* e^x: 0 below -745.2, INFINITY above 709.8. */
double elementary_exp(double x);

/* 10^x: 0 below -323.4, INFINITY above 308.26. */
double elementary_exp10(double x);

/* Natural and decimal logarithm: -INFINITY at 0, NAN below 0, INFINITY at INFINITY. */
double elementary_log(double x);
double elementary_log10(double x);

/* x^y for x >= 0 (NAN for x < 0). x^0 and 1^y are 1; 0^y is 0 for y > 0 and INFINITY for y < 0. */
double elementary_pow(double x, double y);

/* Sine and cosine of an angle in radians, |x| <= 2^30; NAN beyond, where the angle's own spacing
   of 1e-7 would decide the answer. */
double elementary_sin(double x);
double elementary_cos(double x);

#endif
