/* schema.h: the JSON Schemas (2020-12) of a case, made from the rows that the reader fills structs
   from: what a reader takes and what the specification says cannot part. */
#ifndef CORESOAK_SCHEMA_H
#define CORESOAK_SCHEMA_H

#include "buffer.h"
#include "options.h"

/* One JSON object: name of a schema -> schema. They refer to each other at
   "#/components/schemas/<name>", so that they stand in api-spec/openapi.json as they are. "case" is
   the job document of a solve. b->failed tells of memory. */
void schema_write(buffer *b);

/* The command `schema`: prints them. Returns an exit code. */
int command_schema(const options *o);

#endif
