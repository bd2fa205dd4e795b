/* random_case.h: a case made by chance, within what parts in furnaces and quenches are like and
 * somewhat beyond. */
#ifndef CONTRACT_RANDOM_CASE_H
#define CONTRACT_RANDOM_CASE_H

#include <jansson.h>
#include <stdint.h>

/* A document of the API (new reference) without its numerical_error: plate, cylinder or sphere,
   solid or hollow, one to five layers, Biot numbers from 0.01 to 500, ramps, jumps, quenches,
   coefficients by surface temperature, radiation, contact resistance, latent heat over narrow and
   wide ranges, prescribed temperatures, generation, ends by condition. `about` (size bytes)
   receives a line that tells what it is. */
json_t *random_case(uint64_t seed, char *about, size_t size);

#endif
