/* json_out.h: results as JSON straight from arrays. A non-finite number is never written: json_number returns false and
   marks the buffer failed. */
#ifndef CORESOAK_JSON_OUT_H
#define CORESOAK_JSON_OUT_H

#include "buffer.h"

/* A quoted, escaped string. */
void json_string(buffer *b, const char *text);

/* A number rounded to a hundredth of its error, never coarser than six digits, at most 17 digits; no -0, no NaN, no
   needless zeros; the same bytes on every machine. error 0 or NAN: 12 significant digits. */
bool json_number(buffer *b, double value, double error);

#endif
