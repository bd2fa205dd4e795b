/* write_result.c: the result of a solve as JSON. */
#include "write_result.h"

#include "shape.h"
#include "write_parts.h"

#include <math.h>

static void write_stages(writing *w) {
  buffer_text(w->b, "\"stages\": [");
  for (int i = 0; i < w->r->stages; i++) {
    const stage_result *s = &w->r->stage[i];
    buffer_text(w->b, i ? ",\n    {\"name\": " : "\n    {\"name\": ");
    json_out_string(w->b, w->c->stages.items[i].name);
    buffer_text(w->b, ", \"start\": ");
    write_instant(w, s->start);
    buffer_text(w->b, ", \"end\": ");
    write_instant(w, s->end);
    if (s->ended_by == ENDED_UNTIL) {
      buffer_text(w->b, ", \"end_error\": ");
      write_error(w, s->end_error, DIMENSION_TIME);
    }
    buffer_format(w->b, ", \"ended_by\": \"%s\"}", stage_ended_names[s->ended_by]);
  }
  buffer_text(w->b, "\n  ]");
}

static void write_energy(writing *w) {
  const energy_balance *e = &w->r->energy;
  const shape *s = w->c->part.shape;
  bool first = true;
  buffer_text(w->b, "\"energy\": {\"absorbed\": {");
  for (int i = 0; i < e->faces; i++) {
    bool absent = i == 0 && !s->hollow(&w->c->part);
    if (absent) continue;
    if (!first) buffer_text(w->b, ", ");
    json_out_string(w->b, s->faces[i]);
    buffer_text(w->b, ": ");
    write_value(w, e->absorbed[i], s->energy, e->error);
    first = false;
  }
  buffer_text(w->b, "}, \"stored\": ");
  write_value(w, e->stored, s->energy, e->error);
  buffer_text(w->b, ", \"generated\": ");
  write_value(w, e->generated, s->energy, e->error);
  buffer_text(w->b, ", \"balance_error\": ");
  json_out_error(w->b, e->balance_error);
  buffer_text(w->b, "}");
}

static void write_numerics(writing *w) {
  const numerics *n = &w->r->numerics;
  buffer_text(w->b, "\"numerics\": {\"error_estimate\": ");
  write_error(w, n->error_estimate, DIMENSION_DIFFERENCE);
  buffer_format(w->b,
                ", \"unknowns\": %d, \"steps\": %d, \"rejected\": %d, \"runs\": %d, \"method\": ",
                n->unknowns, n->steps, n->rejected, n->runs);
  json_out_string(w->b, n->method);
  buffer_text(w->b, "}");
}

static void write_source(writing *w, const material *m) {
  buffer source;
  buffer_init(&source, 0);
  buffer_text(&source, m->source ? m->source : "defined in the case");
  if (m->revision && *m->revision) buffer_format(&source, " (revision %s)", m->revision);
  if (source.failed)
    w->b->failed = true;
  else
    json_out_string(w->b, source.bytes);
  buffer_free(&source);
}

static void write_record(writing *w) {
  buffer_text(w->b, "\"record\": {\"case\": \"sha256:");
  buffer_text(w->b, w->d->hash);
  buffer_text(w->b, "\", \"service\": \"" CORESOAK_VERSION "\", \"materials\": {");
  for (int i = 0; i < w->c->materials.count; i++) {
    if (i > 0) buffer_text(w->b, ", ");
    json_out_string(w->b, w->c->materials.items[i].name);
    buffer_text(w->b, ": ");
    write_source(w, &w->c->materials.items[i]);
  }
  buffer_text(w->b, "}, \"recipe\": null}");
}

static void write_warning(writing *w, const warning *it, bool first) {
  buffer_text(w->b, first ? "\n    {\"at\": " : ",\n    {\"at\": ");
  json_out_string(w->b, it->at);
  buffer_text(w->b, ", \"is\": ");
  json_out_string(w->b, it->is);
  buffer_text(w->b, "}");
}

static void write_warnings(writing *w) {
  int noticed = w->d->warning_count, found = w->r->warnings;
  buffer_text(w->b, "\"warnings\": [");
  for (int i = 0; i < noticed; i++) write_warning(w, &w->d->warnings[i], i == 0);
  for (int i = 0; i < found; i++) write_warning(w, &w->r->warning[i], i == 0 && noticed == 0);
  buffer_text(w->b, noticed + found > 0 ? "\n  ]" : "]");
}

static void write_cautions(writing *w) {
  const char *const *sentences = cautions_of(w->c);
  buffer_text(w->b, "\"cautions\": [");
  for (int i = 0; sentences[i]; i++) {
    buffer_text(w->b, i ? ",\n    " : "\n    ");
    json_out_string(w->b, sentences[i]);
  }
  buffer_text(w->b, "\n  ]");
}

static void write_units(writing *w) {
  const struct {
    const char *name;
    dimension dimension;
  } rows[] = {{"temperature", DIMENSION_TEMPERATURE},
              {"temperature_difference", DIMENSION_DIFFERENCE},
              {"time", DIMENSION_TIME},
              {"length", DIMENSION_LENGTH},
              {"energy", w->c->part.shape->energy},
              {"heat_flow", w->c->part.shape->power_unit}};
  buffer_text(w->b, "\"units\": {");
  for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
    buffer_format(w->b, i ? ", \"%s\": " : "\"%s\": ", rows[i].name);
    json_out_string(w->b, quantity_label(rows[i].dimension, w->units));
  }
  buffer_text(w->b, "}");
}

void write_result_json(const document *d, const heat_result *r, buffer *b) {
  writing w;
  writing_init(&w, d, r, b);
  buffer_text(b, "{\n  \"verdict\": ");
  if (verdict_names[r->verdict])
    json_out_string(b, verdict_names[r->verdict]);
  else
    buffer_text(b, "null");
  static void (*const parts[])(writing *) = {
      write_figures,  write_stages, write_history,  write_fields,   write_energy,
      write_numerics, write_record, write_warnings, write_cautions, write_units};
  for (size_t i = 0; i < sizeof parts / sizeof parts[0]; i++) {
    if (parts[i] == write_history && w.c->output.history.times == OUTPUT_NONE) continue;
    if (parts[i] == write_fields && w.c->output.fields.times == OUTPUT_NONE) continue;
    buffer_text(b, ",\n  ");
    parts[i](&w);
  }
  buffer_text(b, "\n}\n");
}
