/* gzip.c: RFC 1952 through zlib. */
#include "gzip.h"

#include <stdbool.h>
#include <stdint.h>
#include <stdlib.h>
#include <zlib.h>

enum {
  LEVEL = 3, /* digits of results: half a per cent larger than level 6, in a third of the time */
  WINDOW = 15 + 16, /* + 16: gzip rather than zlib framing */
  MEMORY = 8,
  LARGEST_PIECE = 1 << 30
};

struct gzip {
  z_stream stream;
  const char *bytes;
  size_t left;
  bool ended;
};

gzip *gzip_open(const char *bytes, size_t length) {
  gzip *g = calloc(1, sizeof *g);
  if (!g) return NULL;
  g->bytes = bytes;
  g->left = length;
  if (deflateInit2(&g->stream, LEVEL, Z_DEFLATED, WINDOW, MEMORY, Z_DEFAULT_STRATEGY) == Z_OK)
    return g;
  free(g);
  return NULL;
}

ssize_t gzip_read(gzip *g, char *out, size_t room) {
  if (g->ended) return 0;
  if (room > LARGEST_PIECE) room = LARGEST_PIECE;
  uInt piece = g->left > LARGEST_PIECE ? LARGEST_PIECE : (uInt)g->left;
  g->stream.next_in = (Bytef *)(uintptr_t)g->bytes;
  g->stream.avail_in = piece;
  g->stream.next_out = (Bytef *)out;
  g->stream.avail_out = (uInt)room;
  int outcome = deflate(&g->stream, piece == g->left ? Z_FINISH : Z_NO_FLUSH);
  size_t taken = piece - g->stream.avail_in;
  g->bytes += taken;
  g->left -= taken;
  g->ended = outcome == Z_STREAM_END;
  if (outcome != Z_OK && outcome != Z_STREAM_END) return -1;
  return (ssize_t)(room - g->stream.avail_out);
}

void gzip_close(gzip *g) {
  if (!g) return;
  deflateEnd(&g->stream);
  free(g);
}
