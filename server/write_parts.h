/* write_parts.h: what the renderings of a solve share. Private to write_*.c. */
#ifndef CORESOAK_WRITE_PARTS_H
#define CORESOAK_WRITE_PARTS_H

#include "json_out.h"
#include "limit.h"
#include "write_result.h"

typedef struct writing {
  buffer *b;
  const document *d;
  const heat_case *c;
  const heat_result *r;
  const output_units *units;
  double
      end_error[LIMIT_STAGES]; /* s: how sure the end of each stage is, earlier stages counted in */
} writing;

void writing_init(writing *w, const document *d, const heat_result *r, buffer *b);

/* A value in SI, rounded by its error in SI, in the caller's unit. */
void write_value(writing *w, double value, dimension d, double error);

/* The same of a difference or an error: no offset. */
void write_difference(writing *w, double value, dimension d, double error);
void write_error(writing *w, double error, dimension d);

/* An instant of a history or field: as sure as the stage's end if it is one. */
void write_instant(writing *w, double time);

/* A column of the history: its dimension, the error of its values, its name without a prefix. */
dimension column_dimension(const writing *w, const column *col);
double column_error(const writing *w, const column *col);
const char *column_name(const writing *w, const column *col);

/* Sentences that every result carries; NULL-terminated. */
const char *const *cautions_of(const heat_case *c);

/* The parts of the JSON, each a member with its key. */
void write_figures(writing *w);
void write_history(writing *w);
void write_fields(writing *w);

#endif
