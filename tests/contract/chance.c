/* splitmix64 (G. L. Steele, D. Lea, C. H. Flood, Fast splittable pseudorandom number generators,
 * OOPSLA 2014). */
#include "chance.h"
#include <math.h>

static uint64_t next(chance *c) {
  uint64_t z = c->state += 0x9e3779b97f4a7c15u;
  z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
  z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
  return z ^ (z >> 31);
}

/* A seed is mixed before use: sequences of neighbouring seeds would otherwise be one sequence
 * shifted. */
chance chance_of(uint64_t seed) {
  chance c = {seed ^ 0x5851f42d4c957f2du};
  uint64_t high = next(&c) << 32;
  return (chance){next(&c) ^ high ^ seed * 0xd1342543de82ef95u};
}

double chance_between(chance *c, double low, double high) {
  return low + (high - low) * ((double)(next(c) >> 11) * 0x1p-53);
}

double chance_log(chance *c, double low, double high) {
  double x = exp(chance_between(c, log(low), log(high)));
  double scale = pow(10, 3 - floor(log10(x)));
  return round(x * scale) / scale; /* four digits: the text of a case is the same everywhere */
}

int chance_count(chance *c, int low, int high) {
  return low + (int)(next(c) % (uint64_t)(high - low + 1));
}

bool chance_is(chance *c, double probability) {
  return chance_between(c, 0, 1) < probability;
}
