/* special.h: reference cases whose rows are derived from several solves, or need a body that the
   case does not name. Each function checks all rows of its case (check_near, check_waits). */
#ifndef CHECKS_SPECIAL_H
#define CHECKS_SPECIAL_H

#include <jansson.h>

typedef void special_case(const json_t *neutral);

special_case check_periodic_wall, check_library_properties, check_gas_curve, check_lethality,
    check_tempering, check_maturity, check_flux_forward;

#endif
