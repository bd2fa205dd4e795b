/* cpu.c: affinity mask and control group quota -> number of workers. */
#include "cpu.h"

#include <math.h>
#include <sched.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { LONGEST_LINE = 4096, LONGEST_PATH = 8192 };

static bool read_line(const char *path, char line[LONGEST_LINE]) {
  FILE *f = fopen(path, "re");
  if (!f) return false;
  bool got = fgets(line, LONGEST_LINE, f) != NULL;
  fclose(f);
  if (got) line[strcspn(line, "\n")] = '\0';
  return got;
}

static double ratio(double quota, double period) {
  return quota > 0 && period > 0 ? quota / period : INFINITY;
}

/* cpu.max of one group: "max 100000" or "150000 100000". */
static double quota_of_v2(const char *folder) {
  char path[LONGEST_PATH], line[LONGEST_LINE];
  double quota, period;
  snprintf(path, sizeof path, "%s/cpu.max", folder);
  if (!read_line(path, line) || sscanf(line, "%lf %lf", &quota, &period) != 2) return INFINITY;
  return ratio(quota, period);
}

static double quota_of_v1(const char *folder) {
  char path[LONGEST_PATH], quota[LONGEST_LINE], period[LONGEST_LINE];
  snprintf(path, sizeof path, "%s/cpu.cfs_quota_us", folder);
  if (!read_line(path, quota)) return INFINITY;
  snprintf(path, sizeof path, "%s/cpu.cfs_period_us", folder);
  if (!read_line(path, period)) return INFINITY;
  return ratio(atof(quota), atof(period));
}

/* The least quota of a group and all above it. In a container the group's path may not exist below
 * the mount; then only the mount's own root counts. */
static double least_quota(const char *mount, const char *group, double (*quota_of)(const char *)) {
  char folder[LONGEST_PATH];
  double least = quota_of(mount);
  snprintf(folder, sizeof folder, "%s%s", mount, group);
  size_t top = strlen(mount);
  while (strlen(folder) > top) {
    least = fmin(least, quota_of(folder));
    char *slash = strrchr(folder, '/');
    if (!slash || slash < folder + top) break;
    *slash = '\0';
  }
  return least;
}

/* True if "cpu" is one of the controllers of a line "4:cpu,cpuacct:/group". */
static bool has_cpu(const char *controllers) {
  const char *end = strchr(controllers, ':');
  while (end && controllers < end) {
    size_t length = strcspn(controllers, ",:");
    if (length == 3 && strncmp(controllers, "cpu", 3) == 0) return true;
    controllers += length + 1;
  }
  return false;
}

static double quota_of_line(const char *root, const char *line) {
  char mount[LONGEST_PATH];
  const char *controllers = strchr(line, ':');
  const char *group = controllers ? strchr(controllers + 1, ':') : NULL;
  if (!group) return INFINITY;
  if (controllers[1] == ':') {
    snprintf(mount, sizeof mount, "%s/sys/fs/cgroup", root);
    return least_quota(mount, group + 1, quota_of_v2);
  }
  if (!has_cpu(controllers + 1)) return INFINITY;
  snprintf(mount, sizeof mount, "%s/sys/fs/cgroup/%.*s", root, (int)(group - controllers - 1),
           controllers + 1);
  double quota = least_quota(mount, group + 1, quota_of_v1);
  snprintf(mount, sizeof mount, "%s/sys/fs/cgroup/cpu", root);
  return fmin(quota, least_quota(mount, group + 1, quota_of_v1));
}

double cpu_quota(const char *root) {
  char path[LONGEST_PATH], line[LONGEST_LINE];
  double least = INFINITY;
  snprintf(path, sizeof path, "%s/proc/self/cgroup", root);
  FILE *f = fopen(path, "re");
  if (!f) return INFINITY;
  while (fgets(line, sizeof line, f)) {
    line[strcspn(line, "\n")] = '\0';
    least = fmin(least, quota_of_line(root, line));
  }
  fclose(f);
  return least;
}

int cpu_workers(const char *root) {
  cpu_set_t mask;
  double processors = 1;
  if (sched_getaffinity(0, sizeof mask, &mask) == 0) processors = CPU_COUNT(&mask);
  processors = fmin(processors, ceil(cpu_quota(root)));
  if (processors < 1) return 1;
  return processors > MOST_WORKERS ? MOST_WORKERS : (int)processors;
}
