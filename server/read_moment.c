/* read_moment.c: moments as RFC 3339 writes them, with their offset from UTC. */
#include "reader.h"

#include <ctype.h>
#include <string.h>

static bool digits(const char *p, int count, int *out) {
  *out = 0;
  for (int i = 0; i < count; i++) {
    if (!isdigit((unsigned char)p[i])) return false;
    *out = *out * 10 + (p[i] - '0');
  }
  return true;
}

static bool is_leap(int year) {
  return (year % 4 == 0 && year % 100 != 0) || year % 400 == 0;
}

static int days_in(int year, int month) {
  static const int days[] = {31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31};
  return days[month - 1] + (month == 2 && is_leap(year));
}

/* Days since 1970-01-01 of a date of the proleptic Gregorian calendar. */
static long days_since_1970(int year, int month, int day) {
  long before = year - 1, days = before * 365 + before / 4 - before / 100 + before / 400 - 719162;
  for (int m = 1; m < month; m++) days += days_in(year, m);
  return days + day - 1;
}

static bool read_date(const char **p, double *out) {
  int year, month, day;
  const char *t = *p;
  if (strlen(t) < 11 || !digits(t, 4, &year) || t[4] != '-' || !digits(t + 5, 2, &month) ||
      t[7] != '-' || !digits(t + 8, 2, &day) || (t[10] != 'T' && t[10] != 't' && t[10] != ' '))
    return false;
  if (year < 1 || month < 1 || month > 12 || day < 1 || day > days_in(year, month)) return false;
  *out = (double)days_since_1970(year, month, day) * 86400;
  *p += 11;
  return true;
}

static bool read_clock(const char **p, double *out) {
  int hour, minute, second;
  const char *t = *p;
  if (strlen(t) < 8 || !digits(t, 2, &hour) || t[2] != ':' || !digits(t + 3, 2, &minute) ||
      t[5] != ':' || !digits(t + 6, 2, &second))
    return false;
  if (hour > 23 || minute > 59 || second > 60) return false;
  *out += hour * 3600 + minute * 60 + second;
  *p += 8;
  if (**p != '.') return true;
  if (!isdigit((unsigned char)(*p)[1])) return false;
  double place = 0.1;
  for (++*p; isdigit((unsigned char)**p); ++*p, place /= 10) *out += (**p - '0') * place;
  return true;
}

static bool read_offset(const char **p, double *out) {
  int hours, minutes;
  const char *t = *p;
  if (*t == 'Z' || *t == 'z') {
    ++*p;
    return true;
  }
  if (strlen(t) < 6 || (*t != '+' && *t != '-') || !digits(t + 1, 2, &hours) || t[3] != ':' ||
      !digits(t + 4, 2, &minutes) || hours > 23 || minutes > 59)
    return false;
  *out -= (*t == '-' ? -1 : 1) * (hours * 3600.0 + minutes * 60.0);
  *p += 6;
  return true;
}

bool read_rfc3339(const char *text, double *out) {
  double seconds = 0;
  if (!read_date(&text, &seconds) || !read_clock(&text, &seconds) ||
      !read_offset(&text, &seconds) || *text)
    return false;
  *out = seconds;
  return true;
}
