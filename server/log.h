/* log.h: one JSON line an event, to stderr. */
#ifndef CORESOAK_LOG_H
#define CORESOAK_LOG_H

#include "buffer.h"

typedef enum log_level { LOG_LEVEL_INFO, LOG_LEVEL_WARNING, LOG_LEVEL_ERROR } log_level;

typedef struct log_line {
  buffer text;
} log_line;

/* Begins a line with its time, level and the event's name ("request", "job_ended"). */
void log_begin(log_line *l, log_level level, const char *event);

/* Adds a member; a text of NULL or "" and a number that is not finite are left out. */
void log_text(log_line *l, const char *name, const char *value);
void log_number(log_line *l, const char *name, double value);

/* Writes the line with one call, so that lines of several threads do not mix, and frees it. */
void log_end(log_line *l);

/* A line with one text and nothing else. */
void log_event(log_level level, const char *event, const char *name, const char *value);

#endif
