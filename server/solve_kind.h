/* solve_kind.h: the row of the job kind "solve": a case in, its result out, in one task. */
#ifndef CORESOAK_SOLVE_KIND_H
#define CORESOAK_SOLVE_KIND_H

#include "kind.h"

extern const job_kind solve_kind;

#endif
