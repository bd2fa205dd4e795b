/* Compressed pieces, unpacked by zlib itself (RFC 1952). */
#include "gzip.h"

#include <criterion/criterion.h>
#include <stdlib.h>
#include <string.h>
#include <zlib.h>

/* Packs in pieces of `room` bytes and unpacks; true if the bytes come back. */
static int returns(const char *bytes, size_t length, size_t room) {
  size_t packed_size = length + length / 10 + 256, packed = 0;
  char *out = malloc(packed_size), *back = malloc(length + 1);
  gzip *g = gzip_open(bytes, length);
  ssize_t n;
  cr_assert(out && back && g);
  while ((n = gzip_read(g, out + packed, room)) > 0) packed += (size_t)n;
  cr_assert_eq(n, 0);
  cr_assert_eq(gzip_read(g, out, room), 0, "the end stays the end");
  gzip_close(g);
  z_stream z = {.next_in = (Bytef *)out,
                .avail_in = (uInt)packed,
                .next_out = (Bytef *)back,
                .avail_out = (uInt)length + 1};
  inflateInit2(&z, 15 + 16);
  int outcome = inflate(&z, Z_FINISH);
  int same = outcome == Z_STREAM_END && z.total_out == length && memcmp(back, bytes, length) == 0;
  inflateEnd(&z);
  free(out);
  free(back);
  return same;
}

Test(gzip, bytes_come_back) {
  enum { LENGTH = 300000 };
  char *bytes = malloc(LENGTH);
  unsigned state = 1;
  for (int i = 0; i < LENGTH; i++) {
    state = state * 1103515245u + 12345u;
    bytes[i] = "0123456789.,[] "[(state >> 16) % 15];
  }
  cr_assert(returns(bytes, LENGTH, 32768));
  cr_assert(returns(bytes, LENGTH, 7));
  cr_assert(returns(bytes, 1, 100));
  cr_assert(returns("", 0, 100));
  free(bytes);
}

Test(gzip, the_same_bytes_give_the_same_bytes) {
  const char text[] = "[1.5, 2.5, 3.5, 1.5, 2.5, 3.5, 1.5, 2.5, 3.5]";
  char first[256], second[256];
  gzip *a = gzip_open(text, sizeof text), *b = gzip_open(text, sizeof text);
  ssize_t n = gzip_read(a, first, sizeof first), k = gzip_read(b, second, sizeof second);
  cr_assert(n > 18 && n == k && memcmp(first, second, (size_t)n) == 0, "no time stamp, no chance");
  cr_assert(memcmp(first + 4, "\0\0\0\0", 4) == 0, "RFC 1952: MTIME 0");
  gzip_close(a);
  gzip_close(b);
}
