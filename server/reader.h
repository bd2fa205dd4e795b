/* reader.h: what the readers of a case share. Only server/read*.c, document.c and library.c include
   it: they are the family that knows the JSON library. */
#ifndef CORESOAK_READER_H
#define CORESOAK_READER_H

#include "document.h"
#include "limit.h"
#include "shape.h"

#include <jansson.h>

enum { LONGEST_PATH = 512, MOST_DEPTH = 32, MOST_ELEMENTS = 1000000, LONGEST_TEXT = 1 << 16 };

/* The reading of one document. Every function that can meet a fault adds it at the current path and
 * goes on. */
typedef struct reader {
  fault_list *faults;
  const library *library;
  document *document;  /* receives warnings */
  arena *memory;       /* of the case or library that is read */
  arena own_memory;    /* of a case, until it is finished */
  heat_case *the_case; /* being filled */
  json_t *root;        /* the finished document: inputs and named series put in place */
  const json_t *given; /* the document as it came */
  char path[LONGEST_PATH];
  size_t length;
  bool no_memory;
  size_t expanded; /* elements of the finished document so far */
  bool in_library; /* reading a file of the library */
  bool shapeless;  /* the shape is unknown: its faces and coordinates cannot be judged */
} reader;

/* ---- the path (read_path.c) ---- */

size_t path_push(reader *r, const char *member); /* returns what path_pop takes */
size_t path_push_index(reader *r, size_t index);
void path_pop(reader *r, size_t length);

/* A fault at the path, or at a member below it (NULL: none); got is rendered from the value (NULL:
 * none). */
void fault_here(reader *r, const json_t *got, const char *is, ...)
    __attribute__((format(printf, 3, 4)));
void fault_at(reader *r, const char *member, const json_t *got, const char *is, ...)
    __attribute__((format(printf, 4, 5)));

/* A warning at the path. */
void warn_here(reader *r, const char *is, ...) __attribute__((format(printf, 2, 3)));

/* Memory of the case; NULL sets r->no_memory. */
void *take(reader *r, size_t count, size_t size);

/* Checks that a value is an object / array / string; adds a fault and returns false if not. */
bool must_be_object(reader *r, const json_t *v);
bool must_be_array(reader *r, const json_t *v, size_t most, const char *what);
bool must_be_text(reader *r, const json_t *v);
bool is_name(const char *text);

/* ---- rows (read_object.c) ---- */

/* Fills `out` from an object by the rows of one or two types (second may be NULL). Members by kinds
   that need names of the case are read too; `skip` names members (NULL-terminated list) that the
   caller reads itself. */
void read_object(reader *r, const json_t *object, const object_type *first,
                 const object_type *second, const char *const *skip, void *out);
/* Only the check of member names, and of exactly one member where the type is a union. */
bool check_members(reader *r, const json_t *object, const object_type *first,
                   const object_type *second);

/* ---- values ---- */

/* One quantity by its dimension; false after a fault. */
bool read_quantity(reader *r, const json_t *v, dimension d, double *out);
/* A temperature below absolute zero is a fault, within round-off of it is put on it; any other
   value passes. */
bool in_scale(reader *r, const json_t *got, dimension d, double *value);
/* "2026-03-01T06:15:00+01:00" (RFC 3339, offset required) to s since 1970-01-01T00:00Z. */
bool read_rfc3339(const char *text, double *out);
/* The same within the range of a row. */
bool read_ranged(reader *r, const json_t *v, const parameter *row, dimension d, double *out);
bool read_contact(reader *r, const json_t *v, double *out);
bool read_table(reader *r, const json_t *v, dimension x, dimension y, bool strict, table *out);
/* The table that is a member of an object, whose "units" may name the columns' units. */
bool read_table_of(reader *r, const json_t *object, const char *member, dimension x, dimension y,
                   table *out);
bool read_series(reader *r, const json_t *v, dimension d, double least, double most, series *out);
bool read_coefficient(reader *r, const json_t *v, coefficient *out);
bool read_curve(reader *r, const json_t *v, dimension d, bool positive, curve *out);
void read_logs(reader *r, const json_t *logs);
bool read_log_column(reader *r, const json_t *name, dimension d, series *out);

/* ---- parts of a case ---- */

int read_material_name(reader *r, const json_t *v); /* index, -1 after a fault */
bool read_material(reader *r, const char *name, const json_t *object, material *out);
void read_part(reader *r, const json_t *v);
void read_points(reader *r, const json_t *v);
bool read_location(reader *r, const json_t *v, location *out);
void read_faces(reader *r, const json_t *v, faces *out);
void read_start(reader *r, const json_t *v);
void read_stages(reader *r, const json_t *v);
void read_until(reader *r, const json_t *v, until *out);
void read_figures(reader *r, const json_t *v);
void read_output(reader *r, const json_t *v);
void read_named_series(reader *r, const json_t *v);
dimension dimension_of_log(reader *r, const char *name); /* by the first use of {"log": name} */
int add_named_series(reader *r, const char *name, dimension d,
                     const series *s); /* index, -1 after a fault */

/* ---- names ---- */

bool read_target(reader *r, const json_t *of, const json_t *in, target *out);
bool read_place_name(reader *r, const char *text, const json_t *in, place *out, bool quiet);
bool read_instant(reader *r, const json_t *v, instant *out);
bool read_instants(reader *r, const json_t *v, int *count, instant **items);
bool read_stage_set(reader *r, const json_t *v, stage_set *out);
int read_face_name(reader *r, const json_t *v);
int stage_named(const reader *r, const char *name);
int layer_named(const reader *r, const char *name);

/* ---- whole ---- */

/* Around the parsing of one document in this thread (read_memory.c). parsing_begins returns false
   out of memory; after parsing_lacks_memory the tree is to be thrown away before parsing_ends. */
bool parsing_begins(void);
bool parsing_lacks_memory(void);
void parsing_ends(void);
/* JSON bytes to a tree with the limits of depth, elements and characters; faults carry line and
 * column. */
json_t *parse_json(const char *bytes, size_t length, fault_list *faults);
/* A copy of a document in which every {"input": NAME} and {"series": NAME} is put in place. */
json_t *expand_document(reader *r, const json_t *given);
/* Canonical text and hash of the finished case. */
int finish_case(reader *r, document *d);
/* Rules that concern more than one member. */
void check_case(reader *r);

#endif
