/* symmetry.h: finds that a case is its own mirror image, so that half of it need be computed. The
   mesh then covers the half from the front; places, faces, fields and heat are unfolded where they
   are looked up (mesh, watch). */
#ifndef CORESOAK_SYMMETRY_H
#define CORESOAK_SYMMETRY_H

#include "case.h"

/* True for a plate whose layers, start and every stage's two faces are mirror images. */
bool case_is_symmetric(const heat_case *c);

#endif
