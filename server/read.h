/* read.h: from a parsed document to a finished question. */
#ifndef CORESOAK_READ_H
#define CORESOAK_READ_H

#include "document.h"

struct reader;

/* Reads the case of a solve (job_kind.read): `json` is a json_t *. Returns 0, or -1 with faults in
 * the reader's list. */
int read_solve(struct reader *r, void *json, document *d);

#endif
