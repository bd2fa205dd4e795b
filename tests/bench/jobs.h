/* jobs.h: the standing jobs of the benchmarks, as cases of the API. */
#ifndef BENCH_JOBS_H
#define BENCH_JOBS_H

#include "document.h"

typedef struct bench_job {
  const char *name, *about;
  const char *text; /* the case, JSON */
  int cells;        /* of the mesh that both integrators march on */
  int looks;        /* instants per interval between breaks at which errors are measured */
} bench_job;

/* NULL-terminated by name. P1 steel plate in furnace and quench; P2 steps of the medium with
   constant properties, Bi 1 and 50 (exact answer known); P3 three-layer hollow cylinder; P4 casting
   in a mould, latent heat over 30 K and over 2 K. */
extern const bench_job bench_jobs[];

/* Reads a case with the library of materials; NULL with the faults told on stderr. Free with
 * document_free. */
document *bench_read(const char *text, size_t length);

/* Monotonic time, s; and processor time of the calling thread, s, which other programs on the
 * machine do not lengthen. */
double bench_now(void);
double bench_cpu(void);

#endif
