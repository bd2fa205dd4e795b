/* command.h: the table of commands and what they share. */
#ifndef CORESOAK_COMMAND_H
#define CORESOAK_COMMAND_H

#include "document.h"
#include "options.h"
#include "problem.h"

typedef struct command {
  const char *name;
  const char *operands; /* as in the usage line; "" if none */
  int least_operands, most_operands;
  unsigned user;                /* which flags it knows: option_users; 0 for none */
  int (*run)(const options *o); /* returns an exit code */
  const char *about;            /* one line */
  const char *more; /* what its own help says besides; ends with a line end; NULL: nothing */
} command;

extern const command commands[]; /* ends with a NULL name */
const command *command_named(const char *name);

int command_solve(const options *o);
int command_check(const options *o);
int command_flags(const options *o);
int command_version(const options *o);
int command_help(const options *o);

/* The whole command line: arguments after the program's name. Returns the exit code. */
int command_line(int count, const char **arguments);

/* Reads a file, or standard input for "-", of at most `limit` bytes. Returns 0 and bytes to be
   freed, or -1 with the HTTP status that a service would answer with (413 if too large, else 400)
   and one line in message. */
int input_read(const char *path, size_t limit, char **bytes, size_t *length, int *http_status,
               char *message, size_t message_size);

/* How messages name the input: "standard input" for "-". */
const char *input_name(const char *path);

/* Reads a job document from the operand with the built-in library. Returns 0, or an exit code after
   every fault was told (see tell_faults). */
int input_document(const options *o, bool problem_on_stdout, library **materials, document **d);

/* Tells faults, a line each on stderr, and as a problem document on stderr (its last line) or
 * stdout. */
void tell_faults(const char *path, const fault_list *faults, const char *detail, int http_status,
                 bool problem_on_stdout);

/* Writes a buffer to standard output. Returns EXIT_GOOD, or EXIT_NOT_SOLVED with a line on stderr
   if the buffer failed or the output cannot be written. */
int put_out(const buffer *b);

#endif
