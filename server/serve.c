/* serve.c: the command "serve": the service from start to SIGTERM. */
#include "serve.h"

#include "clock.h"
#include "log.h"
#include "problem.h"
#include "service.h"

#include <math.h>
#include <signal.h>
#include <stdbool.h>
#include <stdio.h>
#include <string.h>
#include <sys/resource.h>
#include <unistd.h>

enum { OTHER_DESCRIPTORS = 64 };

/* Blocks the signals that end the service, before any thread exists, so that only sigwait sees
 * them. */
static void hold_signals(sigset_t *ending) {
  sigemptyset(ending);
  sigaddset(ending, SIGTERM);
  sigaddset(ending, SIGINT);
  pthread_sigmask(SIG_BLOCK, ending, NULL);
  signal(SIGPIPE, SIG_IGN);
}

/* Writes the port beside its place and moves it there, so that who waits for the file never reads
 * half. */
static int write_port(const char *path, int port) {
  char beside[4096];
  if (!path) return 0;
  snprintf(beside, sizeof beside, "%s.new", path);
  FILE *f = fopen(beside, "we");
  if (!f) return -1;
  int failed = fprintf(f, "%d\n", port) < 0;
  failed |= fclose(f) != 0;
  return failed || rename(beside, path) != 0 ? -1 : 0;
}

/* As many descriptors as the connections need, if the system lets us. */
static void allow_descriptors(int connections) {
  struct rlimit limit;
  rlim_t wanted = (rlim_t)connections + OTHER_DESCRIPTORS;
  if (getrlimit(RLIMIT_NOFILE, &limit) != 0 || limit.rlim_cur >= wanted) return;
  limit.rlim_cur = wanted < limit.rlim_max ? wanted : limit.rlim_max;
  setrlimit(RLIMIT_NOFILE, &limit);
  if (limit.rlim_cur < wanted)
    log_event(LOG_LEVEL_WARNING, "few_descriptors", "note",
              "the system allows fewer open files than --connections asks for");
}

/* There is no key at this door: who may come in is for the address or a proxy to decide. */
static void warn_of_open_address(const char *listen) {
  bool here = strncmp(listen, "127.", 4) == 0 || strncmp(listen, "[::1]:", 6) == 0 ||
              strncmp(listen, "localhost:", 10) == 0;
  if (!here)
    log_event(LOG_LEVEL_WARNING, "open_address", "note",
              "whoever reaches this address may use the service: keep it inside a trusted network "
              "or behind a proxy that asks who is calling");
}

static void log_start(const service *s, double seconds) {
  log_line l;
  log_begin(&l, LOG_LEVEL_INFO, "started");
  log_text(&l, "version", CORESOAK_VERSION);
  log_number(&l, "port", service_port(s));
  log_number(&l, "pid", getpid());
  log_number(&l, "seconds", seconds);
  log_text(&l, "ready", service_is_ready(s) ? "yes" : "no");
  log_end(&l);
}

static void log_stop(long cancelled) {
  log_line l;
  log_begin(&l, LOG_LEVEL_INFO, "stopped");
  log_number(&l, "jobs_cancelled", (double)cancelled);
  log_end(&l);
}

/* A material that cannot be read is a defect of the build, told by its first fault. */
static int tell_library(const fault_list *faults) {
  const request_fault *first = &faults->items[0];
  fprintf(stderr, "coresoak: the materials cannot be read: %s %s\n",
          faults->count && first->at ? first->at : "", faults->count ? first->is : "out of memory");
  return EXIT_NOT_SOLVED;
}

int command_serve(const options *o) {
  double began = clock_steady();
  sigset_t ending;
  char message[256];
  fault_list faults;
  int signal_number, outcome = EXIT_BAD_INPUT;
  faults_init(&faults);
  hold_signals(&ending);
  allow_descriptors(o->connections);
  service *s = NULL;
  library *materials = library_open(&faults);
  if (!materials) {
    outcome = tell_library(&faults);
    goto out;
  }
  s = service_open(o, job_kinds, materials, message, sizeof message);
  if (!s) {
    fprintf(stderr, "coresoak: %s\n", message);
    goto out;
  }
  if (write_port(o->port_file, service_port(s)) != 0) {
    fprintf(stderr, "coresoak: cannot write %s\n", o->port_file);
    goto out;
  }
  log_start(s, clock_steady() - began);
  warn_of_open_address(o->listen);
  sigwait(&ending, &signal_number);
  log_event(LOG_LEVEL_INFO, "stopping", "signal", signal_number == SIGINT ? "SIGINT" : "SIGTERM");
  outcome = EXIT_GOOD;
out:
  if (s) {
    long cancelled = service_close(s);
    if (outcome == EXIT_GOOD) log_stop(cancelled);
  }
  library_free(materials);
  faults_free(&faults);
  return outcome;
}
