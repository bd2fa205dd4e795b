/* cpu.h: how many processors this process may use. */
#ifndef CORESOAK_CPU_H
#define CORESOAK_CPU_H

enum { MOST_WORKERS = 64 };

/* Workers that fit the processors: the smaller of the affinity mask and the quota of the control
   group (version 2, else version 1; of the process's own group and all above it), a part of a
   processor counted as one, from 1 to MOST_WORKERS. `root` stands before /proc and /sys: "" but in
   tests. */
int cpu_workers(const char *root);

/* The quota alone, in processors; INFINITY if there is none. */
double cpu_quota(const char *root);

#endif
