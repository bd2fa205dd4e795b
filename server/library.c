/* library.c: the materials embedded at build, read once by the same reader as a case's own. */
#include "library.h"

#include "embedded.h"
#include "reader.h"

#include <stdlib.h>
#include <string.h>

struct library {
  int count;
  material *items;    /* in the order of the embedded files: sorted by name */
  const char **names; /* NULL-terminated */
  arena memory;
};

static int read_file(reader *r, const embedded_file *file, material *out) {
  json_t *root = parse_json(file->bytes, file->length, r->faults);
  if (!root) return -1;
  size_t before = path_push(r, file->name);
  bool good = read_material(r, file->name, root, out);
  path_pop(r, before);
  json_decref(root);
  return good ? 0 : -1;
}

library *library_open(fault_list *faults) {
  int count = 0;
  while (embedded_materials[count].name) count++;
  library *l = calloc(1, sizeof *l);
  if (!l) {
    faults->no_memory = true;
    return NULL;
  }
  arena_init(&l->memory, 0);
  l->items = arena_array(&l->memory, (size_t)count + 1, sizeof *l->items);
  l->names = arena_array(&l->memory, (size_t)count + 1, sizeof *l->names);
  reader r = {.faults = faults, .memory = &l->memory, .in_library = true};
  bool good = l->items && l->names;
  for (int i = 0; good && i < count; i++) {
    good = read_file(&r, &embedded_materials[i], &l->items[i]) == 0;
    l->names[i] = l->items[i].name;
    l->count++;
  }
  if (r.no_memory || !l->items || !l->names) faults->no_memory = true;
  if (good && !faults->no_memory) return l;
  library_free(l);
  return NULL;
}

void library_free(library *l) {
  if (!l) return;
  arena_free(&l->memory);
  free(l);
}

const material *library_find(const library *l, const char *name) {
  for (int i = 0; l && i < l->count; i++)
    if (!strcmp(l->items[i].name, name)) return &l->items[i];
  return NULL;
}

int library_count(const library *l) {
  return l->count;
}

const material *library_at(const library *l, int index) {
  return index >= 0 && index < l->count ? &l->items[index] : NULL;
}

const char *const *library_names(const library *l) {
  return l->names;
}

const char *library_text(const library *l, const char *name) {
  (void)l;
  for (int i = 0; embedded_materials[i].name; i++)
    if (!strcmp(embedded_materials[i].name, name)) return embedded_materials[i].bytes;
  return NULL;
}
