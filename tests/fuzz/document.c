/* Any bytes as a job document: read or refused with a reason, never more. What is read keeps the
   promises on which the solver relies, and its canonical text is read again as the same case. */
#include "document.h"
#include "figure.h"
#include "kind.h"
#include "mutate.h"
#include "shape.h"

#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

int LLVMFuzzerInitialize(int *count, char ***arguments);
int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t length);

static library *materials;

int LLVMFuzzerInitialize(int *count, char ***arguments) {
  (void)count, (void)arguments;
  fault_list faults;
  faults_init(&faults);
  materials = library_open(&faults);
  if (!materials) abort();
  return 0;
}

static void promise(bool kept) {
  if (!kept) abort();
}

static void check_table(const table *t) {
  promise(t->count >= 1);
  for (int i = 0; i < t->count; i++) {
    promise(isfinite(t->x[i]) && isfinite(t->y[i]));
    promise(i == 0 || t->x[i] >= t->x[i - 1]);
  }
}

static void check_series(const series *s) {
  if (s->kind == SERIES_TABLE) check_table(&s->table);
  if (s->kind == SERIES_CONSTANT || s->kind == SERIES_SINE) promise(isfinite(s->value));
  if (s->kind == SERIES_SINE)
    promise(s->period > 0 && isfinite(s->amplitude) && isfinite(s->phase));
}

static void check_condition(const face_condition *c) {
  if (c->kind == FACE_PRESCRIBED) check_series(&c->temperature);
  if (c->kind != FACE_EXCHANGE) return;
  check_series(&c->flux);
  promise(c->has_convection || c->has_radiation || c->flux.kind != SERIES_NONE);
  if (c->has_convection) check_series(&c->medium);
  if (c->has_convection && c->h.by_surface_temperature) check_table(&c->h.over_temperature);
  if (c->has_convection && !c->h.by_surface_temperature) check_series(&c->h.over_time);
  if (!c->has_radiation) return;
  check_series(&c->surroundings);
  promise(c->emissivity >= 0 && c->emissivity <= 1 && c->view_factor >= 0 && c->view_factor <= 1);
}

static void check_place(const place *p, const heat_case *c) {
  promise(p->layer >= -1 && p->layer < c->part.layers.count);
  if (p->kind == PLACE_POINT) promise(p->index >= 0 && p->index < c->points.count);
  if (p->kind == PLACE_FACE) promise(p->index >= 0 && c->part.shape->faces[p->index] != NULL);
}

static void check_target(const target *t, const heat_case *c) {
  if (t->is_figure)
    promise(t->figure >= 0 && t->figure < c->figures.count &&
            c->figures.items[t->figure].kind->accumulates);
  else
    check_place(&t->place, c);
}

static void check_until(const until *u, const heat_case *c) {
  promise(u->count >= 1);
  for (int i = 0; i < u->count; i++) {
    const condition_node *n = &u->nodes[i];
    if (n->kind == UNTIL_ALL || n->kind == UNTIL_ANY) {
      promise(n->children >= 1 && n->first_child > i && n->first_child + n->children <= u->count);
    } else {
      promise(isfinite(n->level));
      check_target(&n->of, c);
    }
  }
}

static void check_stage(const stage *s, const heat_case *c) {
  for (int i = 0; i < s->faces.count; i++) check_condition(&s->faces.condition[i]);
  if (s->end == STAGE_LASTS) promise(s->lasts > 0 && isfinite(s->lasts));
  if (s->end == STAGE_UNTIL) {
    promise(s->time_limit > 0 && isfinite(s->time_limit));
    check_until(&s->until, c);
  }
}

static void check_case(const heat_case *c) {
  double origin, extent = c->part.shape->extent(&c->part, &origin), sum = 0;
  promise(c->part.layers.count >= 1 && extent > 0 && isfinite(extent));
  for (int i = 0; i < c->part.layers.count; i++) {
    const layer *l = &c->part.layers.items[i];
    promise(l->thickness > 0 && l->contact >= 0 && l->material >= 0 &&
            l->material < c->materials.count);
    promise(isfinite(l->start) || c->start.kind != START_PER_LAYER ||
            c->stages.items[0].end == STAGE_STEADY);
    sum += l->thickness;
  }
  promise(fabs(sum - extent) <= 1e-9 * extent);
  promise(c->stages.count >= 1);
  for (int i = 0; i < c->stages.count; i++) check_stage(&c->stages.items[i], c);
  for (int i = 0; i < c->points.count; i++) {
    const location *at = &c->points.items[i].at;
    promise(at->coordinate[0] >= origin * (1 - 1e-9) - 1e-12 &&
            at->coordinate[0] <= (origin + extent) * (1 + 1e-9));
    promise(at->layer >= 0 && at->layer < c->part.layers.count);
  }
  for (int i = 0; i < c->figures.count; i++)
    if (c->figures.items[i].kind->takes_place) check_target(&c->figures.items[i].of, c);
  promise(c->numerical_error >= 0.9e-3);
}

/* The finished text is a case too, and the same one. */
static void check_finished(const document *d) {
  document *again = NULL;
  fault_list faults;
  faults_init(&faults);
  int answer = document_read(d->finished, d->finished_length, d->kind, materials, &again, &faults);
  promise(answer == 0);
  promise(strcmp(again->hash, d->hash) == 0);
  document_free(again);
  faults_free(&faults);
}

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t length) {
  document *d = NULL;
  fault_list faults;
  faults_init(&faults);
  if (document_read((const char *)bytes, length, NULL, materials, &d, &faults) == 0) {
    promise(faults.found == 0);
    check_case(d->question);
    check_finished(d);
    document_free(d);
  } else {
    promise(faults.count > 0 && (faults.status == 400 || faults.status == 422));
  }
  faults_free(&faults);
  return 0;
}
