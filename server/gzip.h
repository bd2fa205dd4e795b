/* gzip.h: bytes compressed piece by piece, so that a large answer holds neither memory nor a
 * thread. */
#ifndef CORESOAK_GZIP_H
#define CORESOAK_GZIP_H

#include <stddef.h>
#include <sys/types.h>

typedef struct gzip gzip;

/* A stream of these bytes, which must stay; NULL out of memory. */
gzip *gzip_open(const char *bytes, size_t length);

/* The next compressed bytes, at most `room`; returns their number, 0 at the end, -1 on a failure.
 */
ssize_t gzip_read(gzip *g, char *out, size_t room);

void gzip_close(gzip *g);

#endif
