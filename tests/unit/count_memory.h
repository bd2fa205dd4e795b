/* count_memory.h: counts calls of the allocator and makes them fail. For a test program of one
   file, linked with -Wl,--wrap=malloc,--wrap=calloc,--wrap=realloc,--wrap=free
   (tests/CMakeLists.txt); calls from shared libraries are not seen. */
#ifndef CORESOAK_TESTS_COUNT_MEMORY_H
#define CORESOAK_TESTS_COUNT_MEMORY_H

#include <stddef.h>

void *__real_malloc(size_t size);
void *__real_calloc(size_t count, size_t size);
void *__real_realloc(void *old, size_t size);
void __real_free(void *old);
void *__wrap_malloc(size_t size);
void *__wrap_calloc(size_t count, size_t size);
void *__wrap_realloc(void *old, size_t size);
void __wrap_free(void *old);

static int allocations;     /* calls so far */
static int allocations_out; /* blocks not given back */
static int fail_at = -1;    /* the call that fails; -1 none */
static int fail_ever;       /* and all after it */

static int allocation_fails(void) {
  int call = allocations++;
  return fail_at >= 0 && (call == fail_at || (fail_ever && call > fail_at));
}

static void *handed_out(void *memory) {
  allocations_out += memory != NULL;
  return memory;
}

void *__wrap_malloc(size_t size) {
  return allocation_fails() ? NULL : handed_out(__real_malloc(size));
}

void *__wrap_calloc(size_t count, size_t size) {
  return allocation_fails() ? NULL : handed_out(__real_calloc(count, size));
}

void *__wrap_realloc(void *old, size_t size) {
  if (allocation_fails()) return NULL;
  allocations_out -= old != NULL;
  return handed_out(__real_realloc(old, size));
}

void __wrap_free(void *old) {
  allocations_out -= old != NULL;
  __real_free(old);
}

#endif
