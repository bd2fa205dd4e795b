/* problem.h: errors for callers, application/problem+json (RFC 9457). */
#ifndef CORESOAK_PROBLEM_H
#define CORESOAK_PROBLEM_H

#include "buffer.h"
#include "faults.h"
#include "status.h"

/* Exit codes of the command line. */
enum exit_code {
  EXIT_GOOD = 0,       /* verdict "meets", or nothing was required */
  EXIT_MISSES = 1,     /* verdict "misses" or "close" */
  EXIT_BAD_INPUT = 2,  /* document, command or flag */
  EXIT_NOT_SOLVED = 3, /* or the answer could not be written */
  EXIT_OUT_OF_TIME = 4,
  EXIT_NOT_REACHABLE = 5
};

/* Writes a problem document: type "about:blank"-free relative reference "/problems/<slug>", title,
   status, detail (NULL: none), and `faults` (NULL: none). */
void problem_write(buffer *b, int http_status, const char *detail, const fault_list *faults);

/* HTTP status and exit code that a solver's failure answers with: a switch without default. */
int problem_http_status(status s);
int problem_exit_code(status s);

/* The problem document of a failed solve: names the stage and time; "could_be_met" with
 * ERROR_NOT_MET. */
void problem_of_fault(buffer *b, const fault *f);

#endif
