/* arena.h: memory that is taken piece by piece and given back at once. */
#ifndef CORESOAK_ARENA_H
#define CORESOAK_ARENA_H

#include "status.h"
#include <stddef.h>

typedef struct arena {
  struct arena_block *blocks;
  size_t used, limit; /* bytes handed out; most that may be (0: no limit) */
} arena;

/* An empty arena; takes no memory yet. */
void arena_init(arena *a, size_t limit);

/* Makes sure that `bytes` more can be taken without asking the system. Returns 0, or -1 out of
 * memory. */
MUST_USE int arena_reserve(arena *a, size_t bytes);

/* `bytes` zeroed bytes, aligned to 64; NULL when memory or the limit is exhausted. */
MUST_USE void *arena_take(arena *a, size_t bytes);

/* count items of size bytes each, zeroed; NULL also on overflow. */
MUST_USE void *arena_array(arena *a, size_t count, size_t size);

/* A copy of a text of n bytes, terminated. */
MUST_USE char *arena_text(arena *a, const char *text, size_t n);

/* Forgets everything taken but keeps the memory for the next use. */
void arena_rewind(arena *a);

/* Gives all memory back; the arena may be used again. NULL is fine. */
void arena_free(arena *a);

#endif
