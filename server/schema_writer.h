/* schema_writer.h: what the files of the schema generator share. Private to schema*.c. */
#ifndef CORESOAK_SCHEMA_WRITER_H
#define CORESOAK_SCHEMA_WRITER_H

#include "buffer.h"
#include "parameter.h"

enum { MOST_SCHEMA_TYPES = 64 };

/* Values that have a schema of their own beside the object types. */
typedef enum form {
  FORM_NAME,
  FORM_QUANTITY,
  FORM_SERIES,
  FORM_COEFFICIENT,
  FORM_CONTACT,
  FORM_PROPERTY,
  FORM_TABLE,
  FORM_MATERIAL_NAME,
  FORM_PLACE,
  FORM_COLUMN,
  FORM_LOCATION,
  FORM_INSTANT,
  FORM_STAGE_SET,
  FORM_FACES,
  FORM_START,
  FORM_LOG,
  FORMS
} form;

/* Writes schemas one after the other; whatever one refers to is remembered and written later. */
typedef struct schema_writer {
  buffer *b;
  int written; /* schemas so far */
  int types;   /* object types referred to, in the order of their first mention */
  const object_type *type[MOST_SCHEMA_TYPES];
  unsigned wanted[FORMS], done[FORMS]; /* a bit for every dimension that a form is used with */
  const char *tag;  /* of the union whose variant is being written: "plate", "peak" */
  bool takes_place; /* the figure kind that is being written has `of` */
} schema_writer;

/* Opens the schema of that name; the caller writes its members, and closes it with "}". */
void schema_open(schema_writer *w, const char *name);

/* A "$ref" member; what it refers to is remembered. A form that does not depend on the dimension
   ignores it. */
void schema_refer_type(schema_writer *w, const object_type *t);
void schema_refer_form(schema_writer *w, form f, dimension d);

/* Writes every form that was referred to and not written yet; true if there was one. */
bool schema_write_forms(schema_writer *w);

/* `"type": "array", "items": {"$ref": ...}` and the most items there may be. */
void schema_list_of(schema_writer *w, const object_type *t);

/* Members of an object type, "name": {...}, each after a comma unless *first; sets *first false. */
void schema_properties(schema_writer *w, const object_type *t, bool *first);

/* A member that its row does not describe alone: a map from names, the tag of a union, units. True
   if p was one; false leaves it to the row. With p NULL: the members of a document that have no
   row. */
bool schema_special(schema_writer *w, const object_type *t, const parameter *p);

/* Members of a type that have no row, each after a comma: what stands around a case, enthalpy. */
void schema_extra_members(schema_writer *w, const object_type *t);

#endif
