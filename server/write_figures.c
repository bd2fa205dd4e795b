/* write_figures.c: the figures of a result as JSON. */
#include "write_parts.h"

#include <math.h>

/* s: when an extreme was reached is told to a hundredth of this; extremes are flat, so more would
 * be noise. */
#define ERROR_OF_WHEN 1.0

static void write_when(writing *w, const char *key, double when) {
  if (isnan(when)) return;
  buffer_format(w->b, ", \"%s\": ", key);
  write_value(w, when, DIMENSION_TIME, ERROR_OF_WHEN);
}

static void write_where(writing *w, double where) {
  if (isnan(where)) return;
  buffer_text(w->b, ", \"at\": ");
  write_value(w, where, DIMENSION_LENGTH, INFINITY);
}

static void write_why(writing *w, const figure_result *f) {
  buffer_text(w->b, "{\"value\": null, \"unit\": ");
  json_out_string(w->b, quantity_label(f->dimension, w->units));
  buffer_text(w->b, ", \"error\": null, \"why\": ");
  json_out_string(w->b, f->value.why ? f->value.why : "not reached in the time computed");
}

/* tension and compression have a place and a time of their own; the components at one place and
 * time do not. */
static void write_named_parts(writing *w, const figure_result *f) {
  for (int i = 0; i < f->value.parts; i++) {
    buffer_text(w->b, ", ");
    json_out_string(w->b, f->value.part[i].name);
    buffer_text(w->b, ": {\"value\": ");
    write_value(w, f->value.part[i].value, f->dimension, f->error);
    write_where(w, f->value.part[i].where);
    write_when(w, "time", f->value.part[i].when);
    buffer_text(w->b, "}");
  }
}

static void write_found(writing *w, const figure_result *f) {
  buffer_text(w->b, "{\"value\": ");
  write_value(w, f->value.value, f->dimension, f->error);
  buffer_text(w->b, ", \"unit\": ");
  json_out_string(w->b, quantity_label(f->dimension, w->units));
  buffer_text(w->b, ", \"error\": ");
  write_error(w, f->error, f->dimension);
  write_where(w, f->value.where);
  write_when(w, "at_time", f->value.when);
  write_named_parts(w, f);
}

static void write_requirement(writing *w, const figure_result *f) {
  if (!f->required) return;
  buffer_format(w->b, ", \"met\": %s, \"margin\": ", f->met ? "true" : "false");
  if (isfinite(f->margin))
    write_difference(w, f->margin, f->dimension, f->error);
  else
    buffer_text(w->b, "null");
  if (f->close) buffer_text(w->b, ", \"close\": true");
}

void write_figures(writing *w) {
  buffer_text(w->b, "\"figures\": {");
  for (int i = 0; i < w->r->figures; i++) {
    const figure_result *f = &w->r->figure[i];
    buffer_text(w->b, i ? ",\n    " : "\n    ");
    json_out_string(w->b, w->c->figures.items[i].name);
    buffer_text(w->b, ": ");
    if (f->value.found)
      write_found(w, f);
    else
      write_why(w, f);
    write_requirement(w, f);
    buffer_text(w->b, "}");
  }
  buffer_text(w->b, w->r->figures ? "\n  }" : "}");
}
