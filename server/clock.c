/* clock.c: the two clocks. */
#include "clock.h"

#include <math.h>
#include <stdio.h>
#include <time.h>

static double seconds_of(clockid_t clock) {
  struct timespec now;
  clock_gettime(clock, &now);
  return (double)now.tv_sec + 1e-9 * (double)now.tv_nsec;
}

double clock_wall(void) {
  return seconds_of(CLOCK_REALTIME);
}

double clock_steady(void) {
  return seconds_of(CLOCK_MONOTONIC);
}

void clock_text(double wall, char out[CLOCK_TEXT]) {
  out[0] = '\0';
  if (!isfinite(wall)) return;
  double whole = floor(wall);
  time_t second = (time_t)whole;
  struct tm utc;
  if (!gmtime_r(&second, &utc)) return;
  char day[CLOCK_TEXT];
  strftime(day, sizeof day, "%Y-%m-%dT%H:%M:%S", &utc);
  snprintf(out, CLOCK_TEXT, "%.19s.%03dZ", day, (int)((wall - whole) * 1000));
}

int clock_condition_init(pthread_cond_t *condition) {
  pthread_condattr_t steady;
  if (pthread_condattr_init(&steady) != 0) return -1;
  pthread_condattr_setclock(&steady, CLOCK_MONOTONIC);
  int outcome = pthread_cond_init(condition, &steady);
  pthread_condattr_destroy(&steady);
  return outcome == 0 ? 0 : -1;
}

void clock_wait(pthread_cond_t *condition, pthread_mutex_t *held, double seconds) {
  struct timespec until;
  double at = clock_steady() + seconds;
  until.tv_sec = (time_t)at;
  until.tv_nsec = (long)((at - floor(at)) * 1e9);
  pthread_cond_timedwait(condition, held, &until);
}
