/* embedded.h: data files that are part of the executable. */
#ifndef CORESOAK_EMBEDDED_H
#define CORESOAK_EMBEDDED_H

#include <stddef.h>

typedef struct embedded_file {
  const char *name;  /* file name without its ending */
  const char *bytes; /* terminated by a NUL that does not count */
  size_t length;
} embedded_file;

extern const embedded_file embedded_materials[]; /* sorted; ends with a NULL name */
extern const embedded_file embedded_specification;

#endif
