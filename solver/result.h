/* result.h: what is answered: data only, in SI and kelvin. It holds only what the case determines.
 */
#ifndef CORESOAK_RESULT_H
#define CORESOAK_RESULT_H

#include "case.h"
#include "figure.h"

typedef enum verdict { VERDICT_NONE, VERDICT_MEETS, VERDICT_CLOSE, VERDICT_MISSES } verdict;
extern const char *const verdict_names[]; /* NULL for none, "meets", "close", "misses" */

typedef struct figure_result {
  figure_value value;
  dimension dimension;
  double error; /* numerical, in the value's unit; INFINITY if it could not be told */
  bool required, met, close;
  double margin; /* distance to the nearer bound, positive when met; NAN if no value */
} figure_result;

typedef enum stage_ended { ENDED_LASTS, ENDED_UNTIL, ENDED_TIME_LIMIT, ENDED_STEADY } stage_ended;
extern const char *const stage_ended_names[]; /* "lasts", "until", "time_limit", "steady" */

typedef struct stage_result {
  double start, end; /* s from the start of the case */
  double end_error;  /* s; 0 unless ended by until */
  stage_ended ended_by;
} stage_result;

/* Rows of a history: times[row], value[row * columns + column]; K, W.. (heat flow: positive into
   the part), or the series' own unit. A jump at a stage's end gives one row, just before it. */
typedef struct history {
  int rows, columns;
  const double *time;
  const double *value;
} history;

typedef struct field {
  double time;
  int nodes;
  const double *position;    /* m; an interface appears once for each side */
  const double *temperature; /* K */
} field;

typedef struct warning {
  char at[96]; /* JSON Pointer into the case */
  char is[320];
} warning;

typedef struct energy_balance {
  int faces;
  double absorbed[MOST_FACES]; /* per face, in the shape's energy unit, positive into the part */
  double stored, generated;    /* likewise */
  double balance_error; /* residual over the larger of the heat that moved and half of the enthalpy
                           range x volume */
  double error;         /* numerical, of each heat above: largest difference of the two runs */
} energy_balance;

typedef struct numerics {
  double error_estimate; /* K: largest difference of the two runs over all places used */
  int unknowns, steps, rejected;
  int runs; /* marches made, coarse ones included */
  const char *method;
} numerics;

typedef struct heat_result {
  verdict verdict;
  int figures;
  figure_result *figure;
  int stages;
  stage_result *stage;
  history history; /* columns as in the case */
  int fields;
  field *field;
  energy_balance energy;
  numerics numerics;
  int warnings;
  warning *warning;
  arena memory;
} heat_result;

/* Frees a result with all that it holds; NULL is fine. */
void heat_result_free(heat_result *r);

#endif
