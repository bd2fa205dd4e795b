/* commands.c: the table of commands, their help, and the way from arguments to one of them. */
#include "command.h"

#include "schema.h"
#include "serve.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define EXIT_CODES                                                                                 \
  "Exit codes:\n"                                                                                  \
  "  0  good: every requirement met, or none asked\n"                                              \
  "  1  verdict misses, or close: some requirement is within its numerical error\n"                \
  "  2  bad input: document, command or flag\n"                                                    \
  "  3  could not solve\n"                                                                         \
  "  4  out of time\n"

const command commands[] = {
    {"serve", "", 0, 0, FOR_SERVE, command_serve, "run the service until it is told to stop",
     "Each flag may also be set in the environment: --body-limit as CORESOAK_BODY_LIMIT.\n"
     "SIGTERM or SIGINT stops it once running jobs have ended.\n"},
    {"solve", "FILE|-", 1, 1, FOR_SOLVE, command_solve,
     "answer a job document here; the result as JSON on standard output",
     "Faults and failures go to standard error, a line each; the last line is the problem as "
     "JSON.\n" EXIT_CODES},
    {"check", "FILE|-", 1, 1, FOR_CHECK, command_check,
     "find every fault of a job document, and what it would cost, without solving it",
     "Standard output is one JSON document: the cost, or the problem with all "
     "faults.\n" EXIT_CODES},
    {"flags", "", 0, 0, 0, command_flags, "print every flag as a Markdown table", NULL},
    {"schema", "", 0, 0, 0, command_schema,
     "print the JSON Schemas of a case, as the specification has them", NULL},
    {"version", "", 0, 0, 0, command_version, "print the version", NULL},
    {"help", "[COMMAND]", 0, 1, 0, command_help, "print this, or the help of a command", NULL},
    {NULL},
};

enum { COMMANDS = sizeof commands / sizeof commands[0] };

const command *command_named(const char *name) {
  for (const command *c = commands; c->name; c++)
    if (strcmp(c->name, name) == 0) return c;
  return NULL;
}

int command_version(const options *o) {
  (void)o;
  return puts("coresoak " CORESOAK_VERSION) < 0 ? EXIT_NOT_SOLVED : EXIT_GOOD;
}

int command_flags(const options *o) {
  (void)o;
  buffer b;
  buffer_init(&b, 0);
  options_table(&b);
  int code = put_out(&b);
  buffer_free(&b);
  return code;
}

static void write_overview(buffer *b) {
  buffer_text(b, "coresoak computes the temperatures inside parts in furnaces and quenches.\n\n"
                 "usage: coresoak COMMAND [FLAGS] [FILE]\n\nCommands:\n");
  for (const command *c = commands; c->name; c++) {
    char usage[64];
    snprintf(usage, sizeof usage, "%s %s", c->name, c->operands);
    buffer_format(b, "  %-16s %s\n", usage, c->about);
  }
  buffer_text(b, "\ncoresoak help COMMAND names the flags of a command.\n\n" EXIT_CODES);
  buffer_text(b, "\nA computed temperature is not a measured one: verify with thermocouples and a "
                 "furnace survey.\n");
}

static void write_help(buffer *b, const command *c) {
  buffer_format(b, "usage: coresoak %s%s%s%s\n\n%s\n", c->name, c->user ? " [FLAGS]" : "",
                c->operands[0] ? " " : "", c->operands, c->about);
  if (c->user) buffer_text(b, "\nFlags (default):\n");
  options_help(b, c->user);
  if (c->more) buffer_format(b, "\n%s", c->more);
}

static int unknown_command(const char *name) {
  const char *names[COMMANDS], *near;
  for (int i = 0; i < COMMANDS; i++) names[i] = commands[i].name;
  near = nearest_name(name, names);
  fprintf(stderr, "coresoak: unknown command %s", name);
  if (near) fprintf(stderr, ": did you mean %s?", near);
  fputs("\ncoresoak --help names the commands\n", stderr);
  return EXIT_BAD_INPUT;
}

static int print_help(const char *name) {
  const command *c = name ? command_named(name) : NULL;
  if (name && !c) return unknown_command(name);
  buffer b;
  buffer_init(&b, 0);
  if (c)
    write_help(&b, c);
  else
    write_overview(&b);
  int code = put_out(&b);
  buffer_free(&b);
  return code;
}

int command_help(const options *o) {
  return print_help(o->operand_count > 0 ? o->operands[0] : NULL);
}

static bool is_help(const char *argument) {
  return strcmp(argument, "--help") == 0 || strcmp(argument, "-h") == 0;
}

static const char *environment_of_process(const char *name) {
  return getenv(name);
}

static int run_command(const command *c, int count, const char **arguments) {
  options o;
  char message[256];
  for (int i = 0; i < count && strcmp(arguments[i], "--") != 0; i++)
    if (is_help(arguments[i])) return print_help(c->name);
  if (options_read(&o, c->user, count, arguments, environment_of_process, message,
                   sizeof message) != 0) {
    fprintf(stderr, "coresoak %s: %s\n", c->name, message);
    return EXIT_BAD_INPUT;
  }
  if (o.operand_count < c->least_operands || o.operand_count > c->most_operands) {
    fprintf(stderr, "usage: coresoak %s%s %s\n", c->name, c->user ? " [FLAGS]" : "", c->operands);
    return EXIT_BAD_INPUT;
  }
  return c->run(&o);
}

int command_line(int count, const char **arguments) {
  if (count <= 0) {
    buffer b;
    buffer_init(&b, 0);
    write_overview(&b);
    if (!b.failed) fputs(b.bytes, stderr);
    buffer_free(&b);
    return EXIT_BAD_INPUT;
  }
  if (is_help(arguments[0])) return print_help(NULL);
  if (strcmp(arguments[0], "--version") == 0) return command_version(NULL);
  const command *c = command_named(arguments[0]);
  return c ? run_command(c, count - 1, arguments + 1) : unknown_command(arguments[0]);
}
