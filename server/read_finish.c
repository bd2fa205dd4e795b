/* read_finish.c: the canonical text of a finished case, materials expanded, and its hash. */
#include "reader.h"

#include <nettle/sha2.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* The library's own text of each material that is used. */
static int put_materials(reader *r, json_t *finished) {
  json_t *materials = json_object();
  const heat_case *c = r->the_case;
  for (int i = 0; i < c->materials.count; i++) {
    const char *name = c->materials.items[i].name;
    json_t *own = json_object_get(json_object_get(r->root, "materials"), name);
    const char *text = own ? NULL : library_text(r->library, name);
    json_t *value = own    ? json_incref(own)
                    : text ? parse_json(text, strlen(text), r->faults)
                           : NULL;
    if (!value || json_object_set_new(materials, name, value)) {
      json_decref(materials);
      return -1;
    }
  }
  return json_object_set_new(finished, "materials", materials);
}

static void hash_text(document *d) {
  uint8_t digest[SHA256_DIGEST_SIZE];
  struct sha256_ctx sha;
  sha256_init(&sha);
  sha256_update(&sha, d->finished_length, (const uint8_t *)d->finished);
  sha256_digest(&sha, sizeof digest, digest);
  for (int i = 0; i < SHA256_DIGEST_SIZE; i++) snprintf(d->hash + 2 * i, 3, "%02x", digest[i]);
}

int finish_case(reader *r, document *d) {
  static const char *const outside[] = {"title", "labels", "inputs", "kind", "job", NULL};
  json_t *finished = json_copy(r->root);
  for (int i = 0; finished && outside[i]; i++) json_object_del(finished, outside[i]);
  char *text = NULL;
  if (finished && !put_materials(r, finished))
    text = json_dumps(finished, JSON_SORT_KEYS | JSON_COMPACT);
  json_decref(finished);
  d->finished = text ? arena_text(&d->memory, text, strlen(text)) : NULL;
  d->finished_length = text ? strlen(text) : 0;
  free(text);
  if (!d->finished) return -1;
  hash_text(d);
  return 0;
}
