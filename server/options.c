/* options.c: the table of flags and its reader. */
#include "options.h"

#include "faults.h"

#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define AT(member) offsetof(options, member)

enum { FOR_JOBS = FOR_SERVE | FOR_SOLVE | FOR_CHECK, MOST_FLAGS = 64 };

/* No flag is named "port" or "service...": a cluster that runs a service named coresoak puts
   variables of those names into every container. */
const option_row option_rows[] = {
    {"listen", OPTION_TEXT, AT(listen), FOR_SERVE, "127.0.0.1:8080", 0, 0, "ADDRESS:PORT",
     "where to listen; port 0 takes a free one"},
    {"port-file", OPTION_TEXT, AT(port_file), FOR_SERVE, NULL, 0, 0, "FILE",
     "write the port to this file once the service is ready"},
    {"workers", OPTION_COUNT, AT(workers), FOR_SERVE, "0", 0, 64, "N",
     "jobs solved at once; 0: as many as the processors that it may use"},
    {"queue", OPTION_COUNT, AT(queue), FOR_SERVE, "256", 1, 1000000, "N",
     "most jobs that wait; beyond it a job is refused with 503"},
    {"kept", OPTION_COUNT, AT(kept), FOR_SERVE, "1000", 1, 1000000, "N",
     "most ended jobs whose results are kept"},
    {"connections", OPTION_COUNT, AT(connections), FOR_SERVE, "512", 8, 65536, "N",
     "most open connections"},
    {"header-deadline", OPTION_SECONDS, AT(header_deadline), FOR_SERVE, "10", 0.1, 3600, "S",
     "seconds in which a request's headers must have come"},
    {"body-deadline", OPTION_SECONDS, AT(body_deadline), FOR_SERVE, "60", 0.1, 3600, "S",
     "seconds in which a request's body must have come"},
    {"least-rate", OPTION_COUNT, AT(least_rate), FOR_SERVE, "1024", 0, 1e9, "BYTES",
     "slowest rate of a body, in bytes a second, before its connection is closed"},
    {"idle", OPTION_SECONDS, AT(idle), FOR_SERVE, "60", 1, 3600, "S",
     "seconds that an idle connection stays open"},
    {"drain", OPTION_SECONDS, AT(drain), FOR_SERVE, "20", 0, 3600, "S",
     "seconds that jobs may take to end after SIGTERM"},
    {"wait", OPTION_SECONDS, AT(wait), FOR_SERVE, "10", 0, 30, "S",
     "seconds that a request waits for its result unless it says otherwise"},
    {"quiet", OPTION_SWITCH, AT(quiet), FOR_SERVE, NULL, 0, 0, NULL,
     "log no requests, only events"},
    {"body-limit", OPTION_BYTES, AT(body_limit), FOR_JOBS, "4MiB", 1024, 1073741824.0, "BYTES",
     "largest job document"},
    {"time-limit", OPTION_SECONDS, AT(time_limit), FOR_SERVE | FOR_SOLVE, "300", 0, 864000, "S",
     "seconds that one job may take; 0: no limit"},
    {"csv", OPTION_SWITCH, AT(csv), FOR_SOLVE, NULL, 0, 0, NULL,
     "print the history as comma-separated values"},
    {"brief", OPTION_SWITCH, AT(brief), FOR_SOLVE, NULL, 0, 0, NULL,
     "print stages, figures and verdict for a reader"},
};

const int option_row_count = sizeof option_rows / sizeof option_rows[0];

void option_variable(const option_row *row, char *out, size_t size) {
  snprintf(out, size, "CORESOAK_%s", row->flag);
  for (char *c = out + strlen("CORESOAK_"); *c; c++)
    *c = *c == '-' ? '_' : (char)(*c - ('a' <= *c && *c <= 'z' ? 'a' - 'A' : 0));
}

/* A number without anything after it; NAN if it is none. */
static double number_in(const char *text, char **rest) {
  char *end;
  double value = strtod(text, &end);
  bool plain = end != text && strspn(text, "0123456789.") == (size_t)(end - text);
  *rest = end;
  return plain && isfinite(value) ? value : NAN;
}

static double bytes_in(const char *text) {
  static const struct {
    const char *name;
    double factor;
  } suffixes[] = {{"", 1}, {"KiB", 1024}, {"MiB", 1048576}, {"GiB", 1073741824}};
  char *rest;
  double value = number_in(text, &rest);
  for (size_t i = 0; i < sizeof suffixes / sizeof suffixes[0]; i++)
    if (strcmp(rest, suffixes[i].name) == 0) return value * suffixes[i].factor;
  return NAN;
}

static int switch_in(const char *text) {
  if (strcmp(text, "1") == 0 || strcmp(text, "true") == 0) return 1;
  if (strcmp(text, "0") == 0 || strcmp(text, "false") == 0) return 0;
  return -1;
}

static double value_in(const option_row *row, const char *text) {
  if (row->kind == OPTION_BYTES) return bytes_in(text);
  char *rest;
  double value = number_in(text, &rest);
  if (*rest != '\0' || (row->kind == OPTION_COUNT && value != floor(value))) return NAN;
  return value;
}

/* What a row expects, for messages and help. */
static const char *expected(const option_row *row) {
  switch (row->kind) {
  case OPTION_SWITCH: return "1, 0, true or false";
  case OPTION_TEXT: return "a text";
  case OPTION_COUNT: return "a whole number";
  case OPTION_BYTES: return "a number of bytes such as 65536, 64KiB or 4MiB";
  case OPTION_SECONDS: return "a number of seconds";
  }
  return "";
}

/* Stores a value given as text; `name` is how the caller named the flag. Returns 0, or -1 with a
 * message. */
static int store(options *o, const option_row *row, const char *name, const char *text,
                 char *message, size_t size) {
  char *at = (char *)o + row->offset;
  if (row->kind == OPTION_TEXT) {
    memcpy(at, &text, sizeof text);
    return 0;
  }
  if (row->kind == OPTION_SWITCH) {
    int on = switch_in(text);
    if (on >= 0) *(bool *)at = on == 1;
    if (on >= 0) return 0;
  } else {
    double value = value_in(row, text);
    if (value >= row->least && value <= row->most) {
      if (row->kind == OPTION_COUNT) *(int *)(void *)at = (int)value;
      if (row->kind == OPTION_BYTES) *(size_t *)(void *)at = (size_t)value;
      if (row->kind == OPTION_SECONDS) *(double *)(void *)at = value;
      return 0;
    }
    if (!isnan(value)) {
      snprintf(message, size, "%s must be %.10g to %.10g, got \"%s\"", name, row->least, row->most,
               text);
      return -1;
    }
  }
  snprintf(message, size, "%s takes %s, got \"%s\"", name, expected(row), text);
  return -1;
}

static int store_defaults(options *o, environment env, unsigned user, char *message, size_t size) {
  memset(o, 0, sizeof *o);
  for (int i = 0; i < option_row_count; i++) {
    const option_row *row = &option_rows[i];
    char variable[64];
    option_variable(row, variable, sizeof variable);
    const char *given = row->users & user ? env(variable) : NULL;
    if (row->fallback && store(o, row, row->flag, row->fallback, message, size) != 0) return -1;
    if (given && *given && store(o, row, variable, given, message, size) != 0) return -1;
  }
  return 0;
}

static const option_row *row_named(const char *flag, size_t length, unsigned user) {
  for (int i = 0; i < option_row_count; i++) {
    const option_row *row = &option_rows[i];
    if ((row->users & user) && strlen(row->flag) == length && strncmp(row->flag, flag, length) == 0)
      return row;
  }
  return NULL;
}

static int unknown_flag(const char *argument, size_t length, unsigned user, char *message,
                        size_t size) {
  const char *names[MOST_FLAGS + 1];
  char given[64];
  int count = 0;
  for (int i = 0; i < option_row_count && count < MOST_FLAGS; i++)
    if (option_rows[i].users & user) names[count++] = option_rows[i].flag;
  names[count] = NULL;
  snprintf(given, sizeof given, "%.*s", (int)length, argument);
  const char *near = nearest_name(given, names);
  snprintf(message, size, near ? "unknown flag --%s: did you mean --%s?" : "unknown flag --%s",
           given, near);
  return -1;
}

/* Reads one flag at arguments[*i], which may take the next argument as its value. */
static int read_flag(options *o, unsigned user, int count, const char **arguments, int *i,
                     char *message, size_t size) {
  const char *flag = arguments[*i] + 2, *equals = strchr(flag, '=');
  size_t length = equals ? (size_t)(equals - flag) : strlen(flag);
  const option_row *row = row_named(flag, length, user);
  if (!row) return unknown_flag(flag, length, user, message, size);
  const char *text = equals ? equals + 1 : NULL;
  if (!text && row->kind == OPTION_SWITCH) text = "1";
  if (!text && *i + 1 < count) text = arguments[++*i];
  if (!text) {
    snprintf(message, size, "--%s takes %s", row->flag, expected(row));
    return -1;
  }
  char name[64];
  snprintf(name, sizeof name, "--%s", row->flag);
  return store(o, row, name, text, message, size);
}

int options_read(options *o, unsigned user, int count, const char **arguments, environment env,
                 char *message, size_t message_size) {
  if (store_defaults(o, env, user, message, message_size) != 0) return -1;
  int operands = 0;
  bool flags = true;
  for (int i = 0; i < count; i++) {
    const char *argument = arguments[i];
    if (flags && strcmp(argument, "--") == 0) {
      flags = false;
    } else if (flags && strncmp(argument, "--", 2) == 0) {
      if (read_flag(o, user, count, arguments, &i, message, message_size) != 0) return -1;
    } else if (flags && argument[0] == '-' && argument[1] != '\0') {
      snprintf(message, message_size, "unknown flag %s: flags have two dashes", argument);
      return -1;
    } else {
      arguments[operands++] = argument;
    }
  }
  o->operand_count = operands;
  o->operands = arguments;
  return 0;
}

void options_help(buffer *b, unsigned user) {
  for (int i = 0; i < option_row_count; i++) {
    const option_row *row = &option_rows[i];
    if (!(row->users & user)) continue;
    char flag[64];
    snprintf(flag, sizeof flag, "--%s%s%s", row->flag, row->value ? " " : "",
             row->value ? row->value : "");
    buffer_format(b, "  %-26s %s", flag, row->about);
    if (row->fallback) buffer_format(b, " (%s)", row->fallback);
    buffer_text(b, "\n");
  }
}

void options_table(buffer *b) {
  buffer_text(b, "| flag | in the environment | default | what it sets | commands |\n"
                 "| --- | --- | --- | --- | --- |\n");
  for (int i = 0; i < option_row_count; i++) {
    const option_row *row = &option_rows[i];
    char variable[64];
    option_variable(row, variable, sizeof variable);
    buffer_format(b, "| `--%s%s%s` | `%s` | %s | %s |", row->flag, row->value ? " " : "",
                  row->value ? row->value : "", variable, row->fallback ? row->fallback : "",
                  row->about);
    buffer_format(b, "%s%s%s |\n", row->users & FOR_SERVE ? " serve" : "",
                  row->users & FOR_SOLVE ? " solve" : "", row->users & FOR_CHECK ? " check" : "");
  }
}
