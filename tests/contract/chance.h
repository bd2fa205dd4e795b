/* chance.h: repeatable chance. */
#ifndef CONTRACT_CHANCE_H
#define CONTRACT_CHANCE_H

#include <stdbool.h>
#include <stdint.h>

typedef struct chance {
  uint64_t state;
} chance;

/* The same seed gives the same numbers on every machine. */
chance chance_of(uint64_t seed);

double chance_between(chance *c, double low, double high);
double chance_log(chance *c, double low, double high); /* even in the logarithm */
int chance_count(chance *c, int low, int high);        /* low..high, both possible */
bool chance_is(chance *c, double probability);

#endif
