/* json_out.h: results as JSON straight from arrays. A non-finite number is never written:
   json_out_number returns false and marks the buffer failed. */
#ifndef CORESOAK_JSON_OUT_H
#define CORESOAK_JSON_OUT_H

#include "buffer.h"

/* A quoted, escaped string. Bytes that are not UTF-8 become U+FFFD. */
void json_out_string(buffer *b, const char *text);

/* A number rounded to a hundredth of its error, never coarser than six digits, at most 15 digits;
   no -0, no NaN, no needless zeros; the same bytes on every machine. error 0 or NAN: 12 significant
   digits; INFINITY: six. A value below a millionth of its error is round-off and written 0. */
bool json_out_number(buffer *b, double value, double error);

/* An error itself: three digits, rounded up. */
bool json_out_error(buffer *b, double error);

#endif
