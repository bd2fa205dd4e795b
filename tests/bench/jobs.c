#include "jobs.h"
#include "case.h"
#include <stdio.h>
#include <string.h>
#include <time.h>

static const char steel_plate[] = "{\"part\": {\"shape\": \"plate\", \"thickness\": 0.05, "
                                  "\"material\": \"carbon_steel\"}, \"start\": 20,"
                                  " \"stages\": [{\"name\": \"heat\", \"lasts\": 15840, \"faces\": "
                                  "{\"front\": {\"insulated\": true}, \"back\": {\"furnace\":"
                                  " {\"temperature\": {\"ramp\": {\"from\": 20, \"to\": 900, "
                                  "\"rate\": \"200 K/h\"}}, \"h\": 25, \"emissivity\": 0.8}}}},"
                                  " {\"name\": \"soak\", \"lasts\": 7200, \"faces\": {\"front\": "
                                  "{\"insulated\": true}, \"back\": {\"furnace\":"
                                  " {\"temperature\": 900, \"h\": 25, \"emissivity\": 0.8}}}},"
                                  " {\"name\": \"quench\", \"lasts\": 1200, \"faces\": {\"front\": "
                                  "{\"insulated\": true}, \"back\": {\"furnace\":"
                                  " {\"temperature\": 60, \"h\": 1500, \"emissivity\": 0.8}}}}]}";

#define STEP_OF_MEDIUM(h)                                                                          \
  "{\"part\": {\"shape\": \"plate\", \"thickness\": 0.05, \"material\": \"m\"}, \"materials\": "   \
  "{\"m\": {"                                                                                      \
  " \"conductivity\": 40, \"density\": 8000, \"specific_heat\": 500}}, \"start\": 20,"             \
  " \"stages\": [{\"name\": \"heat\", \"lasts\": 250, \"faces\": {\"front\": {\"insulated\": "     \
  "true},"                                                                                         \
  " \"back\": {\"convection\": {\"h\": " h ", \"medium\": 900}}}}]}"

static const char three_layers[] =
    "{\"part\": {\"shape\": \"cylinder\", \"bore\": 1.0, \"layers\": ["
    "{\"material\": \"refractory\", \"thickness\": 0.15, \"contact\": 1e-3},"
    "{\"material\": \"insulation\", \"thickness\": 0.1, \"contact\": 5e-4},"
    "{\"material\": \"carbon_steel\", \"thickness\": 0.01}]}, \"start\": 20, \"materials\": {"
    "\"refractory\": {\"conductivity\": {\"table\": [[0, 2.6], [1500, 1.7]]}, \"density\": 2800,"
    " \"specific_heat\": {\"table\": [[0, 900], [1500, 1275]]}},"
    "\"insulation\": {\"conductivity\": {\"table\": [[0, 0.2], [1500, 0.38]]}, \"density\": 800,"
    " \"specific_heat\": {\"table\": [[0, 850], [1500, 1150]]}}},"
    " \"stages\": [{\"name\": \"heat\", \"lasts\": 136080, \"faces\": {\"inner\": {\"furnace\": "
    "{\"temperature\":"
    " {\"table\": [[0, 20], [49680, 1400]]}, \"h\": 100, \"emissivity\": 0.8}},"
    " \"outer\": {\"furnace\": {\"temperature\": 20, \"h\": 8, \"emissivity\": 0.85}}}}]}";

#define CASTING(solidus)                                                                           \
  "{\"part\": {\"shape\": \"plate\", \"layers\": [{\"material\": \"alloy\", \"thickness\": "       \
  "0.025, \"contact\": 1e-3,"                                                                      \
  " \"start\": 1550}, {\"material\": \"sand\", \"thickness\": 0.1, \"start\": 20}]}, "             \
  "\"materials\": {"                                                                               \
  "\"alloy\": {\"conductivity\": 30, \"density\": 7000, \"specific_heat\": 700,"                   \
  " \"latent_heat\": [{\"heat\": 271428.57, \"from\": " solidus ", \"to\": 1480}]},"               \
  "\"sand\": {\"conductivity\": 0.8, \"density\": 1600, \"specific_heat\": 1000}},"                \
  " \"stages\": [{\"name\": \"cool\", \"lasts\": 7200, \"faces\": {\"front\": {\"insulated\": "    \
  "true},"                                                                                         \
  " \"back\": {\"furnace\": {\"temperature\": 20, \"h\": 10, \"emissivity\": 0.8}}}}]}"

const bench_job bench_jobs[] = {
    {"P1", "steel plate, furnace and quench", steel_plate, 40, 100},
    {"P2 Bi 1", "constant properties, step of the medium", STEP_OF_MEDIUM("800"), 160, 200},
    {"P2 Bi 50", "constant properties, step of the medium", STEP_OF_MEDIUM("40000"), 160, 200},
    {"P3", "hollow cylinder of three layers", three_layers, 44, 100},
    {"P4 30 K", "casting in a mould, latent heat over 30 K", CASTING("1450"), 44, 200},
    {"P4 2 K", "casting in a mould, latent heat over 2 K", CASTING("1478"), 44, 200},
    {0},
};

document *bench_read(const char *text, size_t length) {
  static library *materials;
  fault_list faults;
  document *d = NULL;
  faults_init(&faults);
  if (!materials) materials = library_open(&faults);
  if (!materials || document_read(text, length, NULL, materials, &d, &faults))
    for (int i = 0; i < faults.count; i++)
      fprintf(stderr, "%s: %s\n", faults.items[i].at, faults.items[i].is);
  faults_free(&faults);
  return d;
}

static double seconds_on(clockid_t clock) {
  struct timespec t;
  clock_gettime(clock, &t);
  return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

double bench_now(void) {
  return seconds_on(CLOCK_MONOTONIC);
}

double bench_cpu(void) {
  return seconds_on(CLOCK_THREAD_CPUTIME_ID);
}
