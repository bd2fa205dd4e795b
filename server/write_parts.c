/* write_parts.c: units and rounding of what a result holds. */
#include "write_parts.h"

#include "figure.h"
#include "shape.h"

#include <math.h>
#include <string.h>

void writing_init(writing *w, const document *d, const heat_result *r, buffer *b) {
  *w = (writing){.b = b, .d = d, .c = d->question, .r = r, .units = &d->units};
  double error = 0;
  for (int i = 0; i < r->stages && i < LIMIT_STAGES; i++) {
    error = fmax(error, r->stage[i].end_error);
    w->end_error[i] = error;
  }
}

void write_value(writing *w, double value, dimension d, double error) {
  json_out_number(w->b, quantity_out(value, d, w->units),
                  quantity_out_difference(error, d, w->units));
}

void write_difference(writing *w, double value, dimension d, double error) {
  json_out_number(w->b, quantity_out_difference(value, d, w->units),
                  quantity_out_difference(error, d, w->units));
}

void write_error(writing *w, double error, dimension d) {
  if (isfinite(error))
    json_out_error(w->b, quantity_out_difference(error, d, w->units));
  else
    buffer_text(w->b, "null");
}

void write_instant(writing *w, double time) {
  double error = 0;
  for (int i = 0; i < w->r->stages && i < LIMIT_STAGES; i++)
    if (w->r->stage[i].end == time) error = w->end_error[i];
  write_value(w, time, DIMENSION_TIME, error);
}

dimension column_dimension(const writing *w, const column *col) {
  switch (col->kind) {
  case COLUMN_PLACE: return target_dimension(&(target){.place = col->place}, w->c);
  case COLUMN_HEAT_FLOW: return w->c->part.shape->power_unit;
  case COLUMN_SERIES: return w->c->series.items[col->index].dimension;
  }
  return DIMENSION_NUMBER;
}

double column_error(const writing *w, const column *col) {
  switch (col->kind) {
  case COLUMN_PLACE: return w->r->numerics.error_estimate;
  case COLUMN_HEAT_FLOW: return INFINITY; /* not estimated: six digits */
  case COLUMN_SERIES: return 0;           /* the caller's own numbers */
  }
  return 0;
}

const char *column_name(const writing *w, const column *col) {
  if (col->kind != COLUMN_HEAT_FLOW) return col->name;
  return col->index < 0 ? "all" : w->c->part.shape->faces[col->index];
}

#define CAUTIONS                                                                                   \
  "A computed temperature is not a measured one: verify with thermocouples in the part and a "     \
  "survey of the furnace before a schedule is released.",                                          \
      "The numerical error covers the arithmetic alone. Properties, heat transfer coefficients, "  \
      "emissivities and the furnace temperature are taken as given, and their uncertainty is "     \
      "usually larger.",                                                                           \
      "Follow the codes, specifications and licensed practice that apply where the part is "       \
      "treated and used; a verdict here does not replace them."

static const char *const cautions[] = {CAUTIONS, NULL};
static const char *const cautions_with_stress[] = {
    CAUTIONS,
    "Stress figures are elastic only: no yielding, creep, phase change or earlier residual stress. "
    "A value beyond the yield strength says that the part yields, not what stress it carries.",
    NULL};

const char *const *cautions_of(const heat_case *c) {
  for (int i = 0; i < c->figures.count; i++)
    if (strcmp(c->figures.items[i].kind->name, "stress") == 0) return cautions_with_stress;
  return cautions;
}
