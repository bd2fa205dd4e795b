/* write_text.c: the answer of a solve as lines that a person reads at a furnace: clock times as
   h:mm:ss, durations in words, each requirement with what is to spare. */
#include "figure.h"
#include "shape.h"
#include "write_parts.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

enum { MINUTE = 60, HOUR = 3600 };

static void write_clock(buffer *b, double seconds) {
  long s = lround(seconds);
  buffer_format(b, "%ld:%02ld:%02ld", s / HOUR, s % HOUR / MINUTE, s % MINUTE);
}

static void write_duration(buffer *b, double seconds) {
  double size = fabs(seconds);
  if (seconds < 0) buffer_text(b, "-");
  if (size < 2 * MINUTE) {
    json_out_number(b, round(size * 10) / 10, 0);
    buffer_text(b, " s");
  } else if (size < 2 * HOUR) {
    long s = lround(size);
    buffer_format(b, "%ld min", s / MINUTE);
    if (s % MINUTE) buffer_format(b, " %ld s", s % MINUTE);
  } else {
    long minutes = lround(size / MINUTE);
    buffer_format(b, "%ld h %02ld min", minutes / 60, minutes % 60);
  }
}

/* Four digits, or tenths where those are finer: what a reader takes in. */
static void write_short(buffer *b, double value) {
  double step = 10, size = fabs(value);
  for (double limit = 100; size < limit && step < 1e8; limit /= 10) step *= 10;
  json_out_number(b, size < 1e9 ? round(value * step) / step : value, INFINITY);
}

/* Stress, energy and power run over many sizes: told in k, M or G of their unit. */
static bool takes_prefix(const char *label) {
  return strncmp(label, "Pa", 2) == 0 || strcmp(label, "J") == 0 || strcmp(label, "W") == 0 ||
         strncmp(label, "J/m", 3) == 0 || strncmp(label, "W/m", 3) == 0;
}

static void write_prefixed(buffer *b, double value, const char *label) {
  static const struct {
    double factor;
    const char *prefix;
  } steps[] = {{1e9, "G"}, {1e6, "M"}, {1e3, "k"}, {0, ""}};
  int i = 0;
  while (fabs(value) < steps[i].factor) i++;
  write_short(b, i < 3 ? value / steps[i].factor : value);
  buffer_format(b, " %s%s", steps[i].prefix, label);
}

static void write_label(writing *w, const char *label) {
  if (strcmp(label, "1") != 0) buffer_format(w->b, " %s", label);
}

/* A value with its unit; a time as a duration. */
static void write_quantity(writing *w, double value, dimension d) {
  const char *label = quantity_label(d, w->units);
  if (d == DIMENSION_TIME) {
    write_duration(w->b, value);
  } else if (takes_prefix(label)) {
    write_prefixed(w->b, quantity_out(value, d, w->units), label);
  } else {
    write_short(w->b, quantity_out(value, d, w->units));
    write_label(w, label);
  }
}

/* The dimension of a difference of two such values. */
static dimension of_difference(dimension d) {
  return d == DIMENSION_TEMPERATURE ? DIMENSION_DIFFERENCE : d;
}

/* " ± 0.12 K" */
static void write_uncertainty(writing *w, double error, dimension of) {
  dimension d = of_difference(of);
  const char *label = quantity_label(d, w->units);
  if (!isfinite(error) || error <= 0) return;
  buffer_text(w->b, " ± ");
  if (d == DIMENSION_TIME && error < 2 * MINUTE) {
    json_out_error(w->b, error);
    buffer_text(w->b, " s");
  } else if (d == DIMENSION_TIME || takes_prefix(label)) {
    write_quantity(w, error, d);
  } else {
    write_error(w, error, d);
    write_label(w, label);
  }
}

static const char *ending_words(stage_ended e) {
  switch (e) {
  case ENDED_LASTS: return "as scheduled";
  case ENDED_UNTIL: return "condition reached";
  case ENDED_TIME_LIMIT: return "stopped by its time limit";
  case ENDED_STEADY: return "steady state";
  }
  return "";
}

static void write_stage_lines(writing *w) {
  buffer_text(w->b, "\nStages\n");
  for (int i = 0; i < w->r->stages; i++) {
    const stage_result *s = &w->r->stage[i];
    buffer_format(w->b, "  %-20s ", w->c->stages.items[i].name);
    write_clock(w->b, s->start);
    buffer_text(w->b, " to ");
    write_clock(w->b, s->end);
    buffer_format(w->b, ", %s", ending_words(s->ended_by));
    if (s->ended_by == ENDED_UNTIL) write_uncertainty(w, s->end_error, DIMENSION_TIME);
    buffer_text(w->b, "\n");
  }
}

static void write_bounds(writing *w, const requirement *q, dimension d) {
  if (isfinite(q->at_least)) {
    buffer_text(w->b, " at least ");
    write_quantity(w, q->at_least, d);
  }
  if (isfinite(q->at_least) && isfinite(q->at_most)) buffer_text(w->b, " and");
  if (isfinite(q->at_most)) {
    buffer_text(w->b, " at most ");
    write_quantity(w, q->at_most, d);
  }
}

static void write_judgement(writing *w, const figure_result *f, const requirement *q) {
  buffer_text(w->b, "; required");
  if (q->which >= 0 && q->which < f->value.parts)
    buffer_format(w->b, " %s", f->value.part[q->which].name);
  write_bounds(w, q, f->dimension);
  buffer_text(w->b, f->met ? ": met" : ": NOT MET");
  if (!isfinite(f->margin)) return;
  buffer_text(w->b, f->met ? " with " : " by ");
  write_quantity(w, fabs(f->margin), of_difference(f->dimension));
  if (f->met) buffer_text(w->b, " to spare");
  if (f->close) buffer_text(w->b, ", which is within the numerical error");
}

static void write_parts_of_figure(writing *w, const figure_result *f) {
  for (int i = 0; i < f->value.parts; i++) {
    buffer_format(w->b, "%s%s ", i ? ", " : "", f->value.part[i].name);
    write_quantity(w, f->value.part[i].value, f->dimension);
    if (isnan(f->value.part[i].when)) continue;
    buffer_text(w->b, " at ");
    write_clock(w->b, f->value.part[i].when);
  }
}

static void write_figure_value(writing *w, const figure_result *f) {
  if (f->value.parts > 0) {
    write_parts_of_figure(w, f);
    return;
  }
  write_quantity(w, f->value.value, f->dimension);
  write_uncertainty(w, f->error, f->dimension);
  if (!isnan(f->value.when)) {
    buffer_text(w->b, " at ");
    write_clock(w->b, f->value.when);
  }
}

static const char *watched_name(const heat_case *c, const target *t) {
  if (t->is_figure) return c->figures.items[t->figure].name;
  switch (t->place.kind) {
  case PLACE_POINT: return c->points.items[t->place.index].name;
  case PLACE_FACE: return c->part.shape->faces[t->place.index];
  case PLACE_COLDEST: return "coldest";
  case PLACE_HOTTEST: return "hottest";
  case PLACE_MEAN: return "mean";
  case PLACE_SECTION_DIFFERENCE: return "section difference";
  case PLACE_CENTER: return "center";
  case PLACE_MID_WALL: return "mid wall";
  }
  return "";
}

/* " (time at temperature, coldest in core)" */
static void write_subject(writing *w, const figure *asked) {
  buffer_text(w->b, " (");
  for (const char *c = asked->kind->name; *c; c++) buffer_add(w->b, *c == '_' ? " " : c, 1);
  if (asked->kind->takes_place) {
    buffer_format(w->b, ", %s", watched_name(w->c, &asked->of));
    int layer = asked->of.is_figure ? -1 : asked->of.place.layer;
    if (layer >= 0) buffer_format(w->b, " in %s", w->c->part.layers.items[layer].name);
  }
  buffer_text(w->b, ")");
}

static void write_figure_lines(writing *w) {
  if (w->r->figures == 0) return;
  buffer_text(w->b, "\nFigures\n");
  for (int i = 0; i < w->r->figures; i++) {
    const figure *asked = &w->c->figures.items[i];
    const figure_result *f = &w->r->figure[i];
    buffer_format(w->b, "  %-20s ", asked->name);
    if (f->value.found)
      write_figure_value(w, f);
    else
      buffer_format(w->b, "no value, %s", f->value.why ? f->value.why : "not reached");
    write_subject(w, asked);
    if (f->required && asked->require) write_judgement(w, f, asked->require);
    buffer_text(w->b, "\n");
  }
}

static const char *verdict_words(verdict v) {
  switch (v) {
  case VERDICT_NONE: return "none: nothing was required";
  case VERDICT_MEETS: return "MEETS: every requirement is met";
  case VERDICT_CLOSE:
    return "CLOSE: none is missed, but some are within their numerical error; ask for a smaller "
           "one";
  case VERDICT_MISSES: return "MISSES: at least one requirement is not met";
  }
  return "";
}

static void write_notes(writing *w) {
  int noticed = w->d->warning_count, found = w->r->warnings;
  if (noticed + found > 0) buffer_text(w->b, "\nWarnings\n");
  for (int i = 0; i < noticed + found; i++) {
    const warning *it = i < noticed ? &w->d->warnings[i] : &w->r->warning[i - noticed];
    buffer_format(w->b, "  %s%s%s\n", it->at, it->at[0] ? ": " : "", it->is);
  }
  buffer_text(w->b, "\nCautions\n");
  for (const char *const *s = cautions_of(w->c); *s; s++) buffer_format(w->b, "  %s\n", *s);
}

void write_result_text(const document *d, const heat_result *r, buffer *b) {
  writing w;
  writing_init(&w, d, r, b);
  buffer_format(b, "%s\n", d->title ? d->title : "Untitled case");
  for (int i = 0; i < d->label_count; i++)
    buffer_format(b, "%s%s %s%s", i ? ", " : "", d->labels[i].name, d->labels[i].value,
                  i + 1 == d->label_count ? "\n" : "");
  write_stage_lines(&w);
  write_figure_lines(&w);
  buffer_format(b, "\nVerdict   %s\n", verdict_words(r->verdict));
  if (isfinite(r->numerics.error_estimate)) {
    buffer_text(b, "Numerical error of temperatures: ");
    write_error(&w, r->numerics.error_estimate, DIMENSION_DIFFERENCE);
    buffer_format(b, " %s\n", quantity_label(DIMENSION_DIFFERENCE, w.units));
  }
  write_notes(&w);
}
