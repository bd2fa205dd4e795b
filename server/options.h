/* options.h: every flag of the command line in one table. A flag is read from the command line,
   else from CORESOAK_<FLAG> in the environment, else it has its default. */
#ifndef CORESOAK_OPTIONS_H
#define CORESOAK_OPTIONS_H

#include "buffer.h"
#include <stdbool.h>
#include <stddef.h>

/* The commands that know a flag, as bits. */
enum option_users { FOR_SERVE = 1, FOR_SOLVE = 2, FOR_CHECK = 4, FOR_HELP = 8 };

typedef enum option_kind {
  OPTION_SWITCH, /* bool; takes no value on the command line, 1 / 0 / true / false in the
                    environment */
  OPTION_TEXT,   /* const char * */
  OPTION_COUNT,  /* int */
  OPTION_BYTES,  /* size_t; "65536", "64KiB", "4MiB" */
  OPTION_SECONDS /* double */
} option_kind;

/* Values of all flags. */
typedef struct options {
  /* serve */
  const char *listen;    /* address:port */
  const char *port_file; /* NULL: none */
  int workers;           /* 0: as many as the processors that may be used */
  int queue, kept;       /* most queued jobs; most ended jobs that are kept */
  int connections;
  double header_deadline, body_deadline, idle, drain; /* s */
  int least_rate;                                     /* bytes/s of a body */
  double wait; /* s that a POST waits unless the caller says otherwise */
  bool quiet;
  /* serve, solve, check */
  size_t body_limit;
  double time_limit; /* s for one job; 0: none */
  /* solve */
  bool csv, brief;
  /* operands: what stands beside the flags */
  int operand_count;
  const char *const *operands;
} options;

typedef struct option_row {
  const char *flag; /* without the two dashes */
  option_kind kind;
  size_t offset;
  unsigned users;       /* option_users */
  const char *fallback; /* as a caller would write it; NULL: unset */
  double least, most;   /* of a number */
  const char *value;    /* what stands for the value in help: "N" */
  const char *about;
} option_row;

extern const option_row option_rows[];
extern const int option_row_count;

typedef const char *(*environment)(const char *name); /* getenv, or a stand-in */

/* Fills *o for a command from its default values, the environment and `arguments` (count of them,
   those after the command's name; reordered: operands first). Texts stay where they are. "--" ends
   the flags; "-" is an operand. Returns 0, or -1 with one line in message. */
int options_read(options *o, unsigned user, int count, const char **arguments, environment env,
                 char *message, size_t message_size);

/* CORESOAK_<FLAG> of a flag. */
void option_variable(const option_row *row, char *out, size_t size);

/* The flags of a command as lines of help; and all flags as a Markdown table for the README. */
void options_help(buffer *b, unsigned user);
void options_table(buffer *b);

#endif
