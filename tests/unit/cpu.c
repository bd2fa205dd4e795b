/* Workers from control groups, in made-up trees of /proc and /sys. Formats: the Linux kernel's
   documentation, cgroup-v2
   ("cpu.max") and sched-bwc ("cpu.cfs_quota_us"). */
#include "cpu.h"

#include <criterion/criterion.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <sys/stat.h>

static char root[64];

static void make_root(void) {
  snprintf(root, sizeof root, P_tmpdir "/coresoak_cpu_XXXXXX");
  cr_assert(mkdtemp(root));
}

static void remove_root(void) {
  char command[128];
  snprintf(command, sizeof command, "rm -rf '%s'", root);
  cr_assert_eq(system(command), 0);
}

/* Writes a file with all folders above it. */
static void put(const char *path, const char *text) {
  char whole[512];
  snprintf(whole, sizeof whole, "%s%s", root, path);
  for (char *c = whole + 1; *c; c++) {
    if (*c != '/') continue;
    *c = '\0';
    mkdir(whole, 0700);
    *c = '/';
  }
  FILE *f = fopen(whole, "w");
  cr_assert(f);
  fputs(text, f);
  fclose(f);
}

TestSuite(cpu, .init = make_root, .fini = remove_root);

Test(cpu, no_group_no_quota) {
  cr_assert(isinf(cpu_quota(root)));
  put("/proc/self/cgroup", "0::/\n");
  cr_assert(isinf(cpu_quota(root)));
  put("/sys/fs/cgroup/cpu.max", "max 100000\n");
  cr_assert(isinf(cpu_quota(root)));
}

Test(cpu, version_2_takes_the_least_of_a_group_and_those_above) {
  put("/proc/self/cgroup", "0::/plant.slice/furnace.service\n");
  put("/sys/fs/cgroup/plant.slice/furnace.service/cpu.max", "400000 100000\n");
  cr_assert_float_eq(cpu_quota(root), 4, 1e-12);
  put("/sys/fs/cgroup/plant.slice/cpu.max", "150000 100000\n");
  cr_assert_float_eq(cpu_quota(root), 1.5, 1e-12);
  put("/sys/fs/cgroup/cpu.max", "50000 100000\n");
  cr_assert_float_eq(cpu_quota(root), 0.5, 1e-12);
}

Test(cpu, version_1_and_mixed) {
  put("/proc/self/cgroup", "5:memory:/x\n4:cpu,cpuacct:/docker/abc\n0::/\n");
  put("/sys/fs/cgroup/cpu,cpuacct/docker/abc/cpu.cfs_quota_us", "-1\n");
  put("/sys/fs/cgroup/cpu,cpuacct/docker/abc/cpu.cfs_period_us", "100000\n");
  cr_assert(isinf(cpu_quota(root)));
  put("/sys/fs/cgroup/cpu,cpuacct/docker/abc/cpu.cfs_quota_us", "250000\n");
  cr_assert_float_eq(cpu_quota(root), 2.5, 1e-12);
}

Test(cpu, a_container_sees_its_own_group_as_the_root) {
  put("/proc/self/cgroup", "4:cpu:/docker/elsewhere\n");
  put("/sys/fs/cgroup/cpu/cpu.cfs_quota_us", "50000\n");
  put("/sys/fs/cgroup/cpu/cpu.cfs_period_us", "100000\n");
  cr_assert_float_eq(cpu_quota(root), 0.5, 1e-12);
}

Test(cpu, workers_round_up_and_are_at_least_one) {
  int all = cpu_workers(root);
  cr_assert(all >= 1 && all <= MOST_WORKERS);
  put("/proc/self/cgroup", "0::/\n");
  put("/sys/fs/cgroup/cpu.max", "10000 100000\n");
  cr_assert_eq(cpu_workers(root), 1);
  put("/sys/fs/cgroup/cpu.max", "150000 100000\n");
  cr_assert_eq(cpu_workers(root), all < 2 ? all : 2);
}

Test(cpu, nonsense_is_no_quota) {
  put("/proc/self/cgroup", "0::/\nhalf a line\n7\n");
  put("/sys/fs/cgroup/cpu.max", "lots of\n");
  cr_assert(isinf(cpu_quota(root)));
  put("/sys/fs/cgroup/cpu.max", "100000 0\n");
  cr_assert(isinf(cpu_quota(root)));
}
