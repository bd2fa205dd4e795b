/* real.c PROGRAM EXAMPLE: the executable itself, from its start to SIGTERM: times, memory, log, and
   the same bytes for one caller, for 64 at once and for the command line. */
#include "client.h"
#include "clock.h"
#include "trial.h"

#include <fcntl.h>
#include <pthread.h>
#include <signal.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

enum { CALLERS = 64, FEW_CALLERS = 8, MOST_ARGUMENTS = 16 };

#ifdef CORESOAK_SANITIZED
static const bool measured =
    false; /* a sanitizer's times and memory say nothing of the program's */
#else
static const bool measured = true;
#endif

static const char *program, *example_path;
static char *example;
static int port;

typedef struct running {
  pid_t pid;
  char folder[64], port_file[96], log[96];
} running;

static char *read_file(const char *path) {
  FILE *f = fopen(path, "rb");
  buffer b;
  char piece[4096];
  size_t n;
  buffer_init(&b, 0);
  buffer_text(&b, "");
  while (f && (n = fread(piece, 1, sizeof piece, f)) > 0) buffer_add(&b, piece, n);
  if (f) fclose(f);
  return b.bytes;
}

/* Starts a program with its output going to a file. */
static pid_t launch(const char *const *arguments, const char *output, int descriptor) {
  pid_t pid = fork();
  if (pid != 0) return pid;
  int file = open(output, O_WRONLY | O_CREAT | O_TRUNC, 0600);
  if (file < 0 || dup2(file, descriptor) < 0) _exit(126);
  execv(program, (char *const *)(uintptr_t)arguments);
  _exit(127);
}

static bool wait_for_port(const running *r) {
  for (int i = 0; i < 20000; i++) {
    char *text = read_file(r->port_file);
    port = text ? atoi(text) : 0;
    free(text);
    if (port > 0) return true;
    if (waitpid(r->pid, NULL, WNOHANG) == r->pid) return false;
    usleep(500);
  }
  return false;
}

/* Starts the service; returns the seconds until it said that it is ready, -1 if it never did. */
static double serve(running *r, const char *const *flags) {
  const char *arguments[MOST_ARGUMENTS] = {program, "serve", "--listen", "127.0.0.1:0",
                                           "--port-file"};
  int count = 6;
  snprintf(r->folder, sizeof r->folder, P_tmpdir "/coresoak_real_XXXXXX");
  if (!mkdtemp(r->folder)) return -1;
  snprintf(r->port_file, sizeof r->port_file, "%s/port", r->folder);
  snprintf(r->log, sizeof r->log, "%s/log", r->folder);
  arguments[5] = r->port_file;
  for (int i = 0; flags[i]; i++) arguments[count++] = flags[i];
  double began = clock_steady();
  r->pid = launch(arguments, r->log, STDERR_FILENO);
  if (!wait_for_port(r)) return -1;
  answer a = ask(port, "GET", "/readyz", NULL, NULL);
  double took = clock_steady() - began;
  bool ready = a.status == 200;
  answer_free(&a);
  return ready ? took : -1;
}

/* Shows what the service said, where that may help to see why it failed. */
static void show_log(const running *r) {
  char *log = read_file(r->log);
  printf("%s", log ? log : "");
  free(log);
}

/* Sends SIGTERM; returns the exit code, -1 if it does not end by itself. */
static int terminate(const running *r) {
  int state;
  kill(r->pid, SIGTERM);
  for (int i = 0; i < 3000; i++) {
    if (waitpid(r->pid, &state, WNOHANG) == r->pid) {
      if (state != 0) show_log(r);
      return WIFEXITED(state) ? WEXITSTATUS(state) : -1;
    }
    usleep(10000);
  }
  kill(r->pid, SIGKILL);
  waitpid(r->pid, &state, 0);
  return -1;
}

static void clean(const running *r) {
  unlink(r->port_file);
  unlink(r->log);
  rmdir(r->folder);
}

/* A number of /proc/PID/status, in kB. */
static long status_of(pid_t pid, const char *name) {
  char path[64];
  snprintf(path, sizeof path, "/proc/%d/status", (int)pid);
  char *text = read_file(path);
  const char *at = text ? strstr(text, name) : NULL;
  long value = at ? atol(at + strlen(name)) : -1;
  free(text);
  return value;
}

/* Clock ticks that a process has used. */
static long ticks_of(pid_t pid) {
  char path[64];
  unsigned long user = 0, system = 0;
  snprintf(path, sizeof path, "/proc/%d/stat", (int)pid);
  char *text = read_file(path);
  const char *at = text ? strrchr(text, ')') : NULL;
  if (at) sscanf(at, ") %*c %*d %*d %*d %*d %*d %*u %*u %*u %*u %*u %lu %lu", &user, &system);
  free(text);
  return (long)(user + system);
}

static void starting(void) {
  static const char *const flags[] = {"--quiet", NULL};
  double best = 1e9;
  running r = {0};
  for (int i = 0; i < 5; i++) {
    double took = serve(&r, flags);
    if (!check(took > 0, "start %d: ready after %.1f ms", i + 1, 1000 * took)) return;
    if (took < best) best = took;
    if (i == 4) {
      long memory = status_of(r.pid, "VmRSS:"), before = ticks_of(r.pid);
      sleep(1);
      long used = ticks_of(r.pid) - before;
      check(!measured || (memory > 0 && memory < 40000), "idle memory %.1f MB (less than 40)",
            (double)memory / 1000);
      check(!measured || used <= 1, "idle it uses no time (%ld ticks in a second)", used);
    }
    check(terminate(&r) == 0, "SIGTERM: exit 0");
    clean(&r);
  }
  check(!measured || best < 0.1, "start to ready: %.1f ms (less than 100)", 1000 * best);
}

typedef struct caller {
  answer answer;
  pthread_t thread;
} caller;

static void *call(void *self) {
  caller *c = self;
  c->answer = post(port, "/v1/solves", "Prefer: wait=30\r\n", example);
  return NULL;
}

static void same_bytes(void) {
  static const char *const flags[] = {"--connections", "256", NULL};
  caller callers[CALLERS];
  running r = {0};
  int same = 0, count = measured ? CALLERS : FEW_CALLERS;
  if (!check(serve(&r, flags) > 0, "the service starts")) return;
  answer alone = post(port, "/v1/solves", NULL, example);
  check(alone.status == 200 && alone.body.length > 500, "the example is solved (%d, %zu bytes)",
        alone.status, alone.body.length);
  for (int i = 0; i < count; i++) pthread_create(&callers[i].thread, NULL, call, &callers[i]);
  for (int i = 0; i < count; i++) {
    pthread_join(callers[i].thread, NULL);
    const answer *a = &callers[i].answer;
    same += a->status == 200 && a->body.length == alone.body.length && alone.body.length > 0 &&
            memcmp(a->body.bytes, alone.body.bytes, a->body.length) == 0;
    answer_free(&callers[i].answer);
  }
  check(same == count, "%d callers at once get the bytes of one alone (%d)", count, same);

  const char *const arguments[] = {program, "solve", example_path, NULL};
  char output[128];
  int state = -1;
  snprintf(output, sizeof output, "%s/solved", r.folder);
  waitpid(launch(arguments, output, STDOUT_FILENO), &state, 0);
  char *offline = read_file(output);
  check(WIFEXITED(state) && offline && alone.body.bytes && strcmp(offline, alone.body.bytes) == 0,
        "the command line prints the same bytes (exit %d)",
        WIFEXITED(state) ? WEXITSTATUS(state) : -1);
  free(offline);
  unlink(output);
  answer_free(&alone);
  check(terminate(&r) == 0, "SIGTERM after work: exit 0");
  clean(&r);
}

/* Counts the lines of a log, and those that are JSON objects with time, level and event. */
static void count_lines(char *text, int *lines, int *good) {
  char *rest = NULL;
  *lines = *good = 0;
  for (char *line = strtok_r(text, "\n", &rest); line; line = strtok_r(NULL, "\n", &rest)) {
    json_t *j = json_loads(line, JSON_REJECT_DUPLICATES, NULL);
    ++*lines;
    *good += json_is_string(json_object_get(j, "time")) &&
             json_is_string(json_object_get(j, "level")) &&
             json_is_string(json_object_get(j, "event"));
    json_decref(j);
  }
}

static void logging(void) {
  static const char *const flags[] = {NULL};
  running r = {0};
  int lines, good;
  if (!check(serve(&r, flags) > 0, "the service starts")) return;
  answer a =
      post(port, "/v1/solves",
           "traceparent: 00-0af7651916cd43dd8448eb211c80319c-b7ad6b7169203331-01\r\n", example);
  answer_free(&a);
  a = ask(port, "GET", "/a\"b", NULL, NULL);
  answer_free(&a);
  check(terminate(&r) == 0, "SIGTERM: exit 0");
  char *log = read_file(r.log);
  check(log && strstr(log, "\"event\": \"started\"") && strstr(log, "\"event\": \"job_ended\"") &&
            strstr(log, "\"event\": \"request\"") && strstr(log, "\"event\": \"stopped\""),
        "the log tells of start, request, job and stop");
  check(log && strstr(log, "0af7651916cd43dd8448eb211c80319c"), "and of the trace");
  count_lines(log, &lines, &good);
  check(lines > 4 && good == lines, "each of its lines is a JSON object (%d of %d)", good, lines);
  free(log);
  clean(&r);
}

static void busy_address(void) {
  static const char *const flags[] = {"--quiet", NULL};
  running r = {0};
  char where[32], output[128];
  int state = -1;
  if (!check(serve(&r, flags) > 0, "the service starts")) return;
  snprintf(where, sizeof where, "127.0.0.1:%d", port);
  snprintf(output, sizeof output, "%s/second", r.folder);
  const char *const arguments[] = {program, "serve", "--listen", where, NULL};
  waitpid(launch(arguments, output, STDERR_FILENO), &state, 0);
  char *told = read_file(output);
  check(WIFEXITED(state) && WEXITSTATUS(state) == 2 && told && strstr(told, where),
        "a second service at the same address: exit 2, and it names the address");
  free(told);
  unlink(output);
  check(terminate(&r) == 0, "SIGTERM: exit 0");
  clean(&r);
}

int main(int count, char **arguments) {
  if (count != 3) return 2;
  program = arguments[1];
  example_path = arguments[2];
  example = read_file(example_path);
  if (!check(example && *example, "the example is there")) return tally();
  starting();
  same_bytes();
  logging();
  busy_address();
  free(example);
  return tally();
}
