/* write_result.h: the answer of a solve, rendered: JSON for programs, CSV of the history, text for
   a reader. The document must be that of a solve (its question a heat_case), the result that of the
   same case. Each appends to the buffer; b->failed tells of memory, of the buffer's limit, or of a
   number that is not finite. */
#ifndef CORESOAK_WRITE_RESULT_H
#define CORESOAK_WRITE_RESULT_H

#include "buffer.h"
#include "document.h"
#include "result.h"

/* The whole result as one JSON object. */
void write_result_json(const document *d, const heat_result *r, buffer *b);

/* The history as comma-separated values (RFC 4180): a heading with units, then a row an instant.
   Only the heading if the case asks for no history. */
void write_result_csv(const document *d, const heat_result *r, buffer *b);

/* Stages, figures, verdict, warnings and cautions as lines of text. */
void write_result_text(const document *d, const heat_result *r, buffer *b);

#endif
