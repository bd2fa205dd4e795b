/* write_history.c: history and fields as JSON, straight from the arrays. */
#include "write_parts.h"

#include "shape.h"

#include <math.h>

static void write_column(writing *w, int index) {
  const column *col = &w->c->output.history.of.items[index];
  const history *h = &w->r->history;
  dimension d = column_dimension(w, col);
  double error = quantity_out_difference(column_error(w, col), d, w->units);
  json_out_string(w->b, column_name(w, col));
  buffer_text(w->b, ": [");
  for (int i = 0; i < h->rows; i++) {
    if (i > 0) buffer_add(w->b, ", ", 2);
    json_out_number(
        w->b, quantity_out(h->value[(size_t)i * (size_t)h->columns + (size_t)index], d, w->units),
        error);
  }
  buffer_text(w->b, "]");
}

enum { GROUP_POINTS, GROUP_PLACES, GROUP_HEAT_FLOW, GROUP_SERIES, GROUPS };
static const char *const group_names[GROUPS] = {"points", "places", "heat_flow", "series"};

static int group_of(const column *col) {
  switch (col->kind) {
  case COLUMN_PLACE: return col->place.kind == PLACE_POINT ? GROUP_POINTS : GROUP_PLACES;
  case COLUMN_HEAT_FLOW: return GROUP_HEAT_FLOW;
  case COLUMN_SERIES: return GROUP_SERIES;
  }
  return GROUP_PLACES;
}

static void write_group(writing *w, int group) {
  int written = 0;
  for (int i = 0; i < w->r->history.columns; i++) {
    if (group_of(&w->c->output.history.of.items[i]) != group) continue;
    if (written++ == 0)
      buffer_format(w->b, ",\n    \"%s\": {", group_names[group]);
    else
      buffer_text(w->b, ",\n      ");
    write_column(w, i);
  }
  if (written > 0) buffer_text(w->b, "}");
}

void write_history(writing *w) {
  const history *h = &w->r->history;
  buffer_text(w->b, "\"history\": {\n    \"time\": [");
  for (int i = 0; i < h->rows; i++) {
    if (i > 0) buffer_add(w->b, ", ", 2);
    write_instant(w, h->time[i]);
  }
  buffer_text(w->b, "]");
  for (int group = 0; group < GROUPS; group++) write_group(w, group);
  buffer_text(w->b, "\n  }");
}

static void write_array(writing *w, const double *value, int count, dimension d, double error) {
  double shown_error = quantity_out_difference(error, d, w->units);
  buffer_text(w->b, "[");
  for (int i = 0; i < count; i++) {
    if (i > 0) buffer_add(w->b, ", ", 2);
    json_out_number(w->b, quantity_out(value[i], d, w->units), shown_error);
  }
  buffer_text(w->b, "]");
}

void write_fields(writing *w) {
  buffer_text(w->b, "\"fields\": [");
  for (int i = 0; i < w->r->fields; i++) {
    const field *f = &w->r->field[i];
    buffer_text(w->b, i ? ",\n    {\"time\": " : "\n    {\"time\": ");
    write_instant(w, f->time);
    buffer_format(w->b, ",\n     \"%s\": ", w->c->part.shape->coordinates[0]);
    write_array(w, f->position, f->nodes, DIMENSION_LENGTH, 0);
    buffer_text(w->b, ",\n     \"temperature\": ");
    write_array(w, f->temperature, f->nodes, DIMENSION_TEMPERATURE, w->r->numerics.error_estimate);
    buffer_text(w->b, "}");
  }
  buffer_text(w->b, "\n  ]");
}
