/* write_csv.c: the history as comma-separated values (RFC 4180). */
#include "write_parts.h"

#include <math.h>
#include <string.h>

/* A field in quotes where RFC 4180 needs them. */
static void write_cell(buffer *b, const char *text) {
  if (!strpbrk(text, ",\"\r\n")) {
    buffer_text(b, text);
    return;
  }
  buffer_text(b, "\"");
  for (const char *c = text; *c; c++) buffer_add(b, *c == '"' ? "\"\"" : c, *c == '"' ? 2 : 1);
  buffer_text(b, "\"");
}

static void write_heading_cell(writing *w, const char *prefix, const char *name, dimension d) {
  buffer heading;
  buffer_init(&heading, 0);
  buffer_format(&heading, "%s%s [%s]", prefix, name, quantity_label(d, w->units));
  if (heading.failed)
    w->b->failed = true;
  else
    write_cell(w->b, heading.bytes);
  buffer_free(&heading);
}

static void write_heading(writing *w) {
  write_heading_cell(w, "", "time", DIMENSION_TIME);
  for (int i = 0; i < w->r->history.columns; i++) {
    const column *col = &w->c->output.history.of.items[i];
    buffer_text(w->b, ",");
    write_heading_cell(w, col->kind == COLUMN_HEAT_FLOW ? "heat_flow:" : "", column_name(w, col),
                       column_dimension(w, col));
  }
  buffer_text(w->b, "\r\n");
}

static void write_row(writing *w, int row) {
  const history *h = &w->r->history;
  write_instant(w, h->time[row]);
  for (int i = 0; i < h->columns; i++) {
    const column *col = &w->c->output.history.of.items[i];
    buffer_add(w->b, ",", 1);
    write_value(w, h->value[(size_t)row * (size_t)h->columns + (size_t)i], column_dimension(w, col),
                column_error(w, col));
  }
  buffer_add(w->b, "\r\n", 2);
}

void write_result_csv(const document *d, const heat_result *r, buffer *b) {
  writing w;
  writing_init(&w, d, r, b);
  write_heading(&w);
  for (int i = 0; i < r->history.rows; i++) write_row(&w, i);
}
