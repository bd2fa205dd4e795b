/* arena: what is taken is aligned, zeroed and apart; limits and failures leave it usable. Linked
   with the allocator wrapped, so that calls can be counted and made to fail. */
#include "arena.h"

#include "count_memory.h"

#include <criterion/criterion.h>
#include <stdint.h>
#include <string.h>

static int all_zero(const unsigned char *bytes, size_t n) {
  for (size_t i = 0; i < n; i++)
    if (bytes[i]) return 0;
  return 1;
}

Test(arena, pieces_are_aligned_zeroed_and_apart) {
  arena a;
  arena_init(&a, 0);
  static const size_t sizes[] = {1, 63, 64, 65, 1000, 16384, 100000, 8};
  unsigned char *taken[8];
  for (int i = 0; i < 8; i++) {
    taken[i] = arena_take(&a, sizes[i]);
    cr_assert_not_null(taken[i]);
    cr_assert_eq((uintptr_t)taken[i] % 64, 0);
    cr_assert(all_zero(taken[i], sizes[i]));
    memset(taken[i], i + 1, sizes[i]);
  }
  for (int i = 0; i < 8; i++)
    for (size_t k = 0; k < sizes[i]; k++) cr_assert_eq(taken[i][k], i + 1);
  arena_free(&a);
}

Test(arena, limit_is_met_and_one_beyond_refused) {
  arena a;
  arena_init(&a, 256);
  cr_assert_not_null(arena_take(&a, 192));
  cr_assert_null(arena_take(&a, 65), "65 bytes take 128 with their alignment");
  cr_assert_not_null(arena_take(&a, 64));
  cr_assert_null(arena_take(&a, 1));
  cr_assert_eq(a.used, 256);
  arena_free(&a);
}

Test(arena, sizes_that_overflow_are_refused) {
  arena a;
  arena_init(&a, 0);
  cr_assert_null(arena_array(&a, SIZE_MAX / 4, 8));
  cr_assert_null(arena_array(&a, (size_t)1 << 33, (size_t)1 << 33));
  cr_assert_null(arena_take(&a, SIZE_MAX));
  cr_assert_not_null(arena_array(&a, 0, 8));
  cr_assert_not_null(arena_array(&a, 3, 8));
  arena_free(&a);
}

Test(arena, text_is_copied_and_terminated) {
  arena a;
  arena_init(&a, 0);
  const char given[] = "soaking pit";
  char *copy = arena_text(&a, given, 7);
  cr_assert_str_eq(copy, "soaking");
  cr_assert_neq(copy, given);
  cr_assert_str_eq(arena_text(&a, "", 0), "");
  arena_free(&a);
}

Test(arena, reserved_memory_is_taken_without_asking_the_system) {
  arena a;
  arena_init(&a, 0);
  cr_assert_eq(arena_reserve(&a, 100 * 640), 0);
  int before = allocations;
  for (int i = 0; i < 100; i++) cr_assert_not_null(arena_take(&a, 600));
  cr_assert_eq(allocations, before);
  cr_assert_not_null(arena_take(&a, 64));
  cr_assert_eq(allocations, before + 1);
  arena_free(&a);
}

Test(arena, rewinding_keeps_memory_and_zeroes_it_again) {
  arena a;
  arena_init(&a, 0);
  unsigned char *first = arena_take(&a, 4096);
  memset(first, 7, 4096);
  arena_rewind(&a);
  cr_assert_eq(a.used, 0);
  int before = allocations;
  unsigned char *again = arena_take(&a, 4096);
  cr_assert_eq(again, first);
  cr_assert(all_zero(again, 4096));
  cr_assert_eq(allocations, before);
  arena_free(&a);
}

Test(arena, failing_memory_leaves_it_usable) {
  arena a;
  arena_init(&a, 0);
  unsigned char *first = arena_take(&a, 64);
  memset(first, 9, 64);
  fail_at = allocations;
  fail_ever = 1;
  cr_assert_null(arena_take(&a, 1 << 20));
  cr_assert_eq(arena_reserve(&a, 1 << 20), -1);
  cr_assert_null(arena_text(&a, "x", 1 << 20));
  cr_assert_not_null(arena_take(&a, 64), "what is left of the first block still serves");
  fail_at = -1;
  cr_assert_not_null(arena_take(&a, 1 << 20));
  for (int i = 0; i < 64; i++) cr_assert_eq(first[i], 9);
  arena_free(&a);
}

Test(arena, may_be_used_again_after_free) {
  arena a;
  arena_init(&a, 0);
  arena_free(NULL);
  arena_free(&a);
  cr_assert_not_null(arena_take(&a, 10));
  arena_free(&a);
  cr_assert_eq(a.used, 0);
  cr_assert_eq(allocations_out, 0, "all memory is given back");
  cr_assert_not_null(arena_take(&a, 10));
  arena_free(&a);
}
