/* arena.c: blocks of memory in a list, the newest first. */
#include "arena.h"

#include <stdint.h>
#include <stdlib.h>
#include <string.h>

enum { ALIGNMENT = 64, USUAL_BLOCK = 1 << 14 };

struct arena_block {
  struct arena_block *next;
  size_t size, used;
  char *bytes; /* first aligned byte behind the header */
};

void arena_init(arena *a, size_t limit) {
  memset(a, 0, sizeof *a);
  a->limit = limit;
}

static size_t rounded(size_t bytes) {
  return (bytes + ALIGNMENT - 1) & ~(size_t)(ALIGNMENT - 1);
}

static struct arena_block *block_new(size_t size) {
  struct arena_block *block = malloc(sizeof *block + ALIGNMENT + size);
  if (!block) return NULL;
  uintptr_t first = (uintptr_t)(block + 1);
  block->bytes = (char *)(block + 1) + (ALIGNMENT - first % ALIGNMENT) % ALIGNMENT;
  block->size = size;
  block->used = 0;
  return block;
}

int arena_reserve(arena *a, size_t bytes) {
  bytes = rounded(bytes);
  if (a->blocks && a->blocks->size - a->blocks->used >= bytes) return 0;
  struct arena_block *block = block_new(bytes);
  if (!block) return -1;
  block->next = a->blocks;
  a->blocks = block;
  return 0;
}

void *arena_take(arena *a, size_t bytes) {
  if (bytes > SIZE_MAX / 2) return NULL;
  bytes = rounded(bytes ? bytes : 1);
  if (a->limit && bytes > a->limit - a->used) return NULL;
  if (!a->blocks || a->blocks->size - a->blocks->used < bytes) {
    size_t doubled = a->blocks ? a->blocks->size * 2 : USUAL_BLOCK;
    if (doubled > (size_t)1 << 22) doubled = (size_t)1 << 22;
    if (arena_reserve(a, bytes > doubled ? bytes : doubled)) return NULL;
  }
  void *taken = a->blocks->bytes + a->blocks->used;
  a->blocks->used += bytes;
  a->used += bytes;
  return memset(taken, 0, bytes);
}

void *arena_array(arena *a, size_t count, size_t size) {
  if (size && count > SIZE_MAX / 2 / size) return NULL;
  return arena_take(a, count * size);
}

char *arena_text(arena *a, const char *text, size_t n) {
  char *copy = arena_take(a, n + 1);
  if (copy) memcpy(copy, text, n);
  return copy;
}

void arena_rewind(arena *a) {
  for (struct arena_block *b = a->blocks; b; b = b->next) b->used = 0;
  a->used = 0;
  /* only the newest block, the largest, is filled again: the others go back */
  if (!a->blocks) return;
  struct arena_block *rest = a->blocks->next;
  a->blocks->next = NULL;
  while (rest) {
    struct arena_block *next = rest->next;
    free(rest);
    rest = next;
  }
}

void arena_free(arena *a) {
  if (!a) return;
  while (a->blocks) {
    struct arena_block *next = a->blocks->next;
    free(a->blocks);
    a->blocks = next;
  }
  a->used = 0;
}
