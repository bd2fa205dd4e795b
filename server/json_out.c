/* json_out.c: numbers and strings of JSON. The usual number takes no library call: value x
   10^decimals, rounded to a whole number and printed with its point put back; what does not fit
   there goes through printf, which rounds exactly. */
#include "json_out.h"

#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum {
  LEAST_DIGITS = 6,
  USUAL_DIGITS = 12,
  MOST_DIGITS = 15, /* what a double holds of any decimal number */
  ERROR_DIGITS = 3,
  PLAIN_FROM = -5, /* decimal exponents written without an exponent: from here */
  PLAIN_TO = 14,   /* up to here */
  LARGEST_EXACT_POWER = 22,
  NUMBER_BYTES = 48
};

static const double ROUND_OFF = 1e-6; /* of its error: a value below is noise around zero */
static const double ROUND_OFF_OF_UNITS = 1e-12; /* 0.1 K is 0.18000000000000002 degF */
static const double WHOLE_LIMIT = 1e15;         /* value + 1/2 is still exact below */
static const double STEP_OF_ERROR = 0.01; /* numbers are rounded to this part of their error */

/* 10^-22 to 10^22, those from 1 on exact. */
static const double powers_of_ten[2 * LARGEST_EXACT_POWER + 1] = {
    1e-22, 1e-21, 1e-20, 1e-19, 1e-18, 1e-17, 1e-16, 1e-15, 1e-14, 1e-13, 1e-12, 1e-11,
    1e-10, 1e-9,  1e-8,  1e-7,  1e-6,  1e-5,  1e-4,  1e-3,  1e-2,  1e-1,  1e0,   1e1,
    1e2,   1e3,   1e4,   1e5,   1e6,   1e7,   1e8,   1e9,   1e10,  1e11,  1e12,  1e13,
    1e14,  1e15,  1e16,  1e17,  1e18,  1e19,  1e20,  1e21,  1e22};
static const double *const power_of_ten = powers_of_ten + LARGEST_EXACT_POWER;

/* The exponent of what printf wrote by %e. */
static int printed_exponent(const char *text) {
  return (int)strtol(strchr(text, 'e') + 1, NULL, 10);
}

/* floor(log10 value) of a positive finite value: from its binary exponent, then by one comparison.
   1233/4096 stands for log10 2: close enough over this range, in which no power of two is within a
   thousandth of a power of ten but 1. */
static int decimal_exponent(double value) {
  if (value >= 1e-20 && value < 1e22) {
    uint64_t bits;
    memcpy(&bits, &value, sizeof bits);
    int binary = (int)(bits >> 52) - 1023;
    int least = ((binary + 4096) * 1233 >> 12) - 1233;
    return least + (value >= powers_of_ten[LARGEST_EXACT_POWER + least + 1]);
  }
  char text[NUMBER_BYTES];
  snprintf(text, sizeof text, "%.*e", MOST_DIGITS, value);
  return printed_exponent(text);
}

/* Digits after the point (negative: zeros before it) that a value with this error deserves. */
static int decimals_for(int exponent, double error) {
  int least = LEAST_DIGITS - 1 - exponent;
  if (isnan(error) || error == 0) return USUAL_DIGITS - 1 - exponent;
  if (isinf(error)) return least;
  int decimals = -decimal_exponent(fabs(error) * STEP_OF_ERROR);
  int most = MOST_DIGITS - 1 - exponent;
  if (decimals < least) decimals = least;
  return decimals > most ? most : decimals;
}

static const char digit_pairs[] = "00010203040506070809101112131415161718192021222324"
                                  "25262728293031323334353637383940414243444546474849"
                                  "50515253545556575859606162636465666768697071727374"
                                  "75767778798081828384858687888990919293949596979899";

/* Digits of a whole number, ending at `end`; returns their start. */
static char *print_digits(char *end, uint64_t whole) {
  char *at = end;
  while (whole >= 100) {
    at -= 2;
    memcpy(at, digit_pairs + 2 * (whole % 100), 2);
    whole /= 100;
  }
  if (whole >= 10) {
    at -= 2;
    memcpy(at, digit_pairs + 2 * whole, 2);
  } else {
    *--at = (char)('0' + whole);
  }
  return at;
}

/* whole / 10^decimals as text, ending at `end` or at the zeros left out before it (*stop); returns
 * its start. */
static char *print_whole(char *end, uint64_t whole, int decimals, char **stop) {
  char *at = print_digits(end, whole), *point = end - decimals;
  *stop = end;
  if (decimals == 0) return at;
  while (at >= point) *--at = '0';
  for (char *digit = at; digit < point; digit++) digit[-1] = *digit;
  point[-1] = '.';
  while ((*stop)[-1] == '0') --*stop;
  if ((*stop)[-1] == '.') --*stop;
  return at - 1;
}

/* Text of `count` digits with the first at 10^exponent, for what print_whole cannot hold. */
static void add_digits(buffer *b, const char *digits, int count, int exponent) {
  while (count > 1 && digits[count - 1] == '0') count--;
  if (exponent < PLAIN_FROM || exponent > PLAIN_TO) {
    buffer_format(b, count > 1 ? "%.1s.%.*se%d" : "%.1s%.*se%d", digits, count - 1, digits + 1,
                  exponent);
  } else if (exponent < 0) {
    buffer_format(b, "0.%.*s%.*s", -exponent - 1, "0000", count, digits);
  } else if (count > exponent + 1) {
    buffer_format(b, "%.*s.%.*s", exponent + 1, digits, count - exponent - 1,
                  digits + exponent + 1);
  } else {
    buffer_format(b, "%.*s%.*s", count, digits, exponent + 1 - count, "00000000000000");
  }
}

static void add_exactly(buffer *b, double value, int significant) {
  char text[NUMBER_BYTES], digits[NUMBER_BYTES];
  snprintf(text, sizeof text, "%.*e", significant - 1, value);
  int count = 0;
  for (const char *c = text; *c != 'e'; c++)
    if (*c != '.') digits[count++] = *c;
  add_digits(b, digits, count, printed_exponent(text));
}

/* A positive finite value with that many decimals. */
static void add_rounded(buffer *b, double value, int exponent, int decimals, bool negative) {
  double scaled = decimals >= 0 && decimals <= LARGEST_EXACT_POWER && exponent >= PLAIN_FROM
                      ? value * power_of_ten[decimals]
                      : INFINITY;
  if (scaled < WHOLE_LIMIT) {
    char text[NUMBER_BYTES] = "", *stop;
    char *at = print_whole(text + sizeof text, (uint64_t)(scaled + 0.5), decimals, &stop);
    if (negative) *--at = '-';
    buffer_add(b, at, (size_t)(stop - at));
    return;
  }
  if (negative) buffer_add(b, "-", 1);
  add_exactly(b, value, decimals + exponent + 1);
}

bool json_out_number(buffer *b, double value, double error) {
  if (!isfinite(value)) {
    b->failed = true;
    return false;
  }
  double size = fabs(value);
  if (size == 0 || (isfinite(error) && size < fabs(error) * ROUND_OFF)) {
    buffer_add(b, "0", 1);
  } else {
    int exponent = decimal_exponent(size);
    add_rounded(b, size, exponent, decimals_for(exponent, error), value < 0);
  }
  return !b->failed;
}

bool json_out_error(buffer *b, double error) {
  if (!isfinite(error)) return json_out_number(b, error, 0);
  char text[NUMBER_BYTES];
  snprintf(text, sizeof text, "%.*e", ERROR_DIGITS - 1, fabs(error));
  double rounded = strtod(text, NULL);
  if (rounded < fabs(error) * (1 - ROUND_OFF_OF_UNITS)) { /* one more in the last digit */
    snprintf(text, sizeof text, "1e%d", printed_exponent(text) - (ERROR_DIGITS - 1));
    rounded += strtod(text, NULL);
  }
  return json_out_number(b, isfinite(rounded) ? rounded : error, INFINITY);
}

/* Bytes of the UTF-8 sequence at c, 0 if it is none (RFC 3629). */
static int sequence_length(const unsigned char *c) {
  if (c[0] < 0x80) return 1;
  int length = c[0] >= 0xF0 ? 4 : c[0] >= 0xE0 ? 3 : 2;
  if (c[0] < 0xC2 || c[0] > 0xF4) return 0;
  for (int i = 1; i < length; i++)
    if ((c[i] & 0xC0) != 0x80) return 0;
  bool overlong = (c[0] == 0xE0 && c[1] < 0xA0) || (c[0] == 0xF0 && c[1] < 0x90);
  bool surrogate = c[0] == 0xED && c[1] > 0x9F;
  bool beyond = c[0] == 0xF4 && c[1] > 0x8F;
  return overlong || surrogate || beyond ? 0 : length;
}

static void escaped(buffer *b, unsigned char c) {
  switch (c) {
  case '"': buffer_text(b, "\\\""); break;
  case '\\': buffer_text(b, "\\\\"); break;
  case '\n': buffer_text(b, "\\n"); break;
  case '\t': buffer_text(b, "\\t"); break;
  case '\r': buffer_text(b, "\\r"); break;
  default: buffer_format(b, "\\u%04x", c);
  }
}

void json_out_string(buffer *b, const char *text) {
  const unsigned char *c = (const unsigned char *)text, *plain = c;
  buffer_add(b, "\"", 1);
  while (*c) {
    int length = sequence_length(c);
    if (length > 0 && *c >= 0x20 && *c != '"' && *c != '\\') {
      c += length;
      continue;
    }
    buffer_add(b, plain, (size_t)(c - plain));
    if (length == 0)
      buffer_text(b, "\xEF\xBF\xBD");
    else
      escaped(b, *c);
    plain = ++c;
  }
  buffer_add(b, plain, (size_t)(c - plain));
  buffer_add(b, "\"", 1);
}
