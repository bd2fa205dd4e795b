/* read_memory.c: memory for parsing. The JSON library's lexer goes on with damaged text where its
   own buffer cannot grow, so a failed allocation is served from a reserve taken beforehand, and
   parsing ends with the next piece of text that it asks for. */
#include "reader.h"

#include <pthread.h>
#include <stdlib.h>

/* Between two pieces: the largest text twice over as its buffer grows and once as a value, and what
   the elements of one piece of 1,024 bytes need (230 bytes for each "{},"). */
enum { RESERVE = 1 << 20, LARGEST_PIECE = 4 * LONGEST_TEXT };

typedef struct reserve {
  char *bytes; /* NULL: not parsing */
  size_t used;
  bool failed;
} reserve;

static _Thread_local reserve parsing;

static void *json_allocate(size_t size) {
  void *memory = malloc(size);
  if (memory || !parsing.bytes) return memory;
  parsing.failed = true;
  size_t rounded = (size + 15) & ~(size_t)15;
  if (size > LARGEST_PIECE || rounded > RESERVE - parsing.used) return NULL;
  memory = parsing.bytes + parsing.used;
  parsing.used += rounded;
  return memory;
}

static void json_release(void *memory) {
  char *p = memory;
  if (parsing.bytes && p >= parsing.bytes && p < parsing.bytes + RESERVE) return;
  free(memory);
}

static void prepare(void) {
  json_set_alloc_funcs(json_allocate, json_release);
  json_object_seed(0);
}

bool parsing_begins(void) {
  static pthread_once_t prepared = PTHREAD_ONCE_INIT;
  pthread_once(&prepared, prepare);
  parsing = (reserve){.bytes = malloc(RESERVE)};
  return parsing.bytes != NULL;
}

bool parsing_lacks_memory(void) {
  return parsing.failed;
}

void parsing_ends(void) {
  free(parsing.bytes);
  parsing.bytes = NULL;
}
