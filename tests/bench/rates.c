/* Rates of the whole service: reading and writing JSON, solves in process and over HTTP with as
   many workers, time from start to ready, memory when idle. rates [SECONDS]: how long each rate is
   measured (3). */
#include "client.h"
#include "jobs.h"
#include "kind.h"
#include <jansson.h>
#include <math.h>
#include <pthread.h>
#include <signal.h>
#include <stdatomic.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

enum { MOST_THREADS = 64 };

typedef struct load {
  const char *text; /* the case */
  size_t length;
  double until; /* bench_now() at which to stop */
  int port;     /* over HTTP; 0: in process */
  atomic_long done, failed;
} load;

static char *read_file(const char *path, size_t *length) {
  FILE *f = fopen(path, "rb");
  char *text = NULL;
  if (!f) return NULL;
  fseek(f, 0, SEEK_END);
  long size = ftell(f);
  rewind(f);
  if (size > 0 && (text = calloc(1, (size_t)size + 1))) *length = fread(text, 1, (size_t)size, f);
  fclose(f);
  return text;
}

/* ---- in process ---- */

/* The case from bytes to bytes; the number of bytes of the answer, 0 on failure. */
static size_t solve_once(const char *text, size_t length) {
  document *d = bench_read(text, length);
  void *answer = NULL;
  fault f;
  buffer out;
  size_t written = 0;
  buffer_init(&out, 0);
  if (d && job_run(d, NULL, &answer, &f) == STATUS_OK &&
      !d->kind->write(d, answer, MEDIA_JSON, &out))
    written = out.length;
  if (answer) d->kind->free_answer(answer);
  buffer_free(&out);
  document_free(d);
  return written;
}

static void *solve_in_process(void *self) {
  load *l = self;
  while (bench_now() < l->until) solve_once(l->text, l->length) ? l->done++ : l->failed++;
  return NULL;
}

static void *solve_over_http(void *self) {
  load *l = self;
  int s = client_open(l->port);
  while (s >= 0 && bench_now() < l->until) {
    int status = client_call(s, "/v1/solves", l->text, l->length, NULL);
    status == 200 ? l->done++ : l->failed++;
    if (status >= 0) continue;
    close(s);
    s = client_open(l->port);
  }
  if (s >= 0) close(s);
  return NULL;
}

/* Solves a second by so many threads. */
static double rate_of(load *l, void *(*work)(void *), int threads, double seconds) {
  pthread_t thread[MOST_THREADS];
  double began = bench_now();
  l->done = l->failed = 0;
  l->until = began + seconds;
  for (int i = 0; i < threads; i++) pthread_create(&thread[i], NULL, work, l);
  for (int i = 0; i < threads; i++) pthread_join(thread[i], NULL);
  if (l->failed) printf("  (%ld failed)\n", l->failed);
  return (double)l->done / (bench_now() - began);
}

/* ---- the service ---- */

typedef struct server {
  pid_t process;
  int port;
  double ready_after; /* s */
} server;

static int port_in(const char *path) {
  FILE *f = fopen(path, "r");
  int port = 0;
  if (!f) return 0;
  if (fscanf(f, "%d", &port) != 1) port = 0;
  fclose(f);
  return port;
}

static bool ready(int port) {
  int s = client_open(port);
  int status = s < 0 ? -1 : client_call(s, "/readyz", NULL, 0, NULL);
  if (s >= 0) close(s);
  return status == 200;
}

/* Starts the service on a free port with so many workers and waits until it is ready. */
static int start_server(server *out, int workers) {
  char file[] = CORESOAK_BINARY "-port-XXXXXX", number[16];
  int handle = mkstemp(file);
  if (handle < 0) return -1;
  close(handle);
  snprintf(number, sizeof number, "%d", workers);
  double began = bench_now();
  *out = (server){.process = fork()};
  if (out->process == 0) {
    execl(CORESOAK_BINARY, "coresoak", "serve", "--listen", "127.0.0.1:0", "--workers", number,
          "--port-file", file, "--quiet", (char *)NULL);
    _exit(127);
  }
  while (bench_now() - began < 10 && !(out->port = port_in(file))) usleep(500);
  while (bench_now() - began < 10 && out->port && !ready(out->port)) usleep(500);
  out->ready_after = bench_now() - began;
  unlink(file);
  return out->port ? 0 : -1;
}

static void stop_server(const server *s) {
  kill(s->process, SIGTERM);
  waitpid(s->process, NULL, 0);
}

static double resident_mib(pid_t process) {
  char path[64], line[256];
  double kib = NAN;
  snprintf(path, sizeof path, "/proc/%d/status", (int)process);
  FILE *f = fopen(path, "r");
  while (f && fgets(line, sizeof line, f))
    if (!strncmp(line, "VmRSS:", 6)) kib = strtod(line + 6, NULL);
  if (f) fclose(f);
  return kib / 1024;
}

/* ---- JSON ---- */

/* A case whose furnace follows a log of many rows, to time the reading of numbers. */
static char *long_case(int rows) {
  json_t *list = json_array();
  for (int i = 0; i < rows; i++)
    json_array_append_new(list, json_pack("[f,f]", i * 10.5, 20 + fmod(i * 0.37, 900)));
  json_t *face = json_pack("{s:{s:i,s:{s:o}}}", "convection", "h", 20, "medium", "table", list);
  json_t *d = json_pack("{s:{s:s,s:f,s:s},s:i,s:[{s:s,s:i,s:{s:o}}]}", "part", "shape", "plate",
                        "thickness", 0.05, "material", "carbon_steel", "start", 20, "stages",
                        "name", "heat", "lasts", 1000, "faces", "all", face);
  char *text = json_dumps(d, JSON_REAL_PRECISION(8));
  json_decref(d);
  return text;
}

static void tell_reading(const char *what, const char *text, size_t length, double numbers,
                         double seconds) {
  long count = 0;
  double began = bench_cpu();
  do {
    document *d = bench_read(text, length);
    if (!d) return;
    document_free(d);
    count++;
  } while (bench_cpu() - began < seconds);
  double each = (bench_cpu() - began) / (double)count;
  printf("reading %-28s %8.1f us a case, %6.1f MB/s", what, each * 1e6,
         (double)length / each / 1e6);
  if (numbers > 0) printf(", %5.0f ns a number", each / numbers * 1e9);
  printf("\n");
}

static void tell_writing(double seconds) {
  static const char text[] = "{\"part\": {\"shape\": \"plate\", \"thickness\": 0.05, \"material\": "
                             "\"carbon_steel\"}, \"start\": 20, \"stages\": ["
                             "{\"name\": \"heat\", \"lasts\": 20000, \"faces\": {\"all\": "
                             "{\"furnace\": {\"temperature\": 900, \"h\": 20,"
                             " \"emissivity\": 0.8}}}}], \"output\": {\"history\": {\"every\": 2, "
                             "\"of\": [\"coldest\", \"hottest\", \"mean\","
                             " \"front\", \"back\", \"mid_wall\", \"section_difference\"]}}}";
  document *d = bench_read(text, strlen(text));
  void *answer = NULL;
  fault f;
  buffer out;
  long count = 0;
  if (!d || job_run(d, NULL, &answer, &f)) return;
  const heat_result *r = answer;
  double numbers = (double)r->history.rows * (r->history.columns + 1), began = bench_cpu();
  buffer_init(&out, 0);
  do {
    buffer_clear(&out);
    if (d->kind->write(d, answer, MEDIA_JSON, &out)) break;
    count++;
  } while (bench_cpu() - began < seconds);
  double each = (bench_cpu() - began) / (double)count;
  printf("writing %-28s %8.1f us, %6.1f MB/s, %5.0f ns a number\n", "a history of 10,001 rows",
         each * 1e6, (double)out.length / each / 1e6, each / numbers * 1e9);
  buffer_free(&out);
  d->kind->free_answer(answer);
  document_free(d);
}

/* In process and over HTTP by turns, the best of each: what else the machine does falls on both. */
static void tell_service(load *l, int workers, double seconds) {
  enum { TURNS = 5 };
  server s;
  if (start_server(&s, workers)) {
    printf("the service does not start\n");
    return;
  }
  double idle = resident_mib(s.process), inside = 0, outside = 0;
  l->port = s.port;
  rate_of(l, solve_over_http, 2 * workers, 0.3);
  for (int i = 0; i < TURNS; i++) {
    inside = fmax(inside, rate_of(l, solve_in_process, workers, seconds / TURNS));
    outside = fmax(outside, rate_of(l, solve_over_http, 2 * workers, seconds / TURNS));
  }
  printf("%d workers: %7.1f solves/s in process, %7.1f over HTTP (%d connections): %.2f of it\n",
         workers, inside, outside, 2 * workers, outside / inside);
  printf("  ready %.0f ms after start; %.1f MiB resident when idle, %.1f after the load\n",
         s.ready_after * 1e3, idle, resident_mib(s.process));
  stop_server(&s);
}

int main(int count, char **words) {
  double seconds = count > 1 ? atof(words[1]) : 5;
  load l = {0};
  enum { ROWS = 20000 };
  char *table = long_case(ROWS);
  l.text = read_file(SOURCE_DIR "/api-spec/examples/tube_blank.json", &l.length);
  if (!l.text || !table || !solve_once(l.text, l.length)) {
    fprintf(stderr, "the tube-blank example does not solve\n");
    return 1;
  }
  tell_reading("the tube-blank example", l.text, l.length, 0, seconds / 3);
  tell_reading("a table of 20,000 rows", table, strlen(table), 2.0 * ROWS, seconds / 3);
  tell_writing(seconds / 3);
  long processors = sysconf(_SC_NPROCESSORS_ONLN);
  tell_service(&l, 1, seconds);
  if (processors > 1)
    tell_service(&l, processors > MOST_THREADS / 2 ? MOST_THREADS / 2 : (int)processors, seconds);
  free((char *)(size_t)l.text);
  free(table);
  return 0;
}
