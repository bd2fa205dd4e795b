#include "probe.h"
#include "shape.h"
#include <math.h>
#include <stdio.h>
#include <string.h>

static void add_node(probe *p, int node) {
  for (int i = 0; i < p->count; i++)
    if (p->nodes[i] == node) return;
  if (p->count < MOST_PROBES) p->nodes[p->count++] = node;
}

static void choose_nodes(probe *p) {
  for (int i = 0; i < p->mesh.layers; i++) {
    const mesh_layer *l = &p->mesh.layer[i];
    add_node(p, l->first);
    add_node(p, (l->first + l->last) / 2);
    add_node(p, l->last);
  }
}

static double next_break(const heat_case *c, int stage, double start, double t) {
  double next = INFINITY;
  const faces *f = &c->stages.items[stage].faces;
  for (int i = 0; i < f->count; i++)
    next = fmin(next, face_next_break(&f->condition[i], start, t + 1e-9));
  return next;
}

/* Instants evenly over every interval between breaks. */
static void choose_looks(probe *p) {
  double start = 0;
  for (int i = 0; i < p->the_case->stages.count; i++) {
    double lasts = p->the_case->stages.items[i].lasts;
    for (double t = 0; t < lasts * (1 - 1e-12);) {
      double to = fmin(lasts, next_break(p->the_case, i, start, t));
      for (int j = 1; j <= p->job->looks && p->looks < MOST_LOOKS; j++)
        p->look[p->looks++] = start + t + (to - t) * j / p->job->looks;
      t = to;
    }
    start += lasts;
  }
}

int probe_open(probe *p, const bench_job *job) {
  fault f = {0};
  double from, to;
  memset(p, 0, sizeof *p);
  p->job = job;
  arena_init(&p->memory, 0);
  p->document = bench_read(job->text, strlen(job->text));
  if (!p->document) return -1;
  p->the_case = p->document->question;
  double cells[LIMIT_LAYERS][2];
  for (int i = 0; i < LIMIT_LAYERS; i++) cells[i][0] = cells[i][1] = INFINITY;
  mesh_plan plan = {.cells = job->cells, .keep_every = 1, .end_cell = cells};
  plan_range(p->the_case, &from, &to);
  if (properties_build(p->the_case, from, to, &p->properties, &p->memory, &f) ||
      p->the_case->part.shape->build(&p->mesh, p->the_case, &plan, p->properties, &p->memory, &f) ||
      conduction_init(&p->system, &p->mesh, &p->memory) ||
      stepper_init(&p->stepper, &p->system, &p->memory)) {
    fprintf(stderr, "%s: %s\n", job->name, f.is);
    return -1;
  }
  choose_nodes(p);
  choose_looks(p);
  return 0;
}

void probe_close(probe *p) {
  arena_free(&p->memory);
  document_free(p->document);
}

void probe_record(probe *p, const double *enthalpy) {
  double temperature, slope;
  for (int i = 0; i < p->count; i++) {
    for (int l = 0; l < p->mesh.layers; l++)
      if (p->nodes[i] >= p->mesh.layer[l].first && p->nodes[i] <= p->mesh.layer[l].last) {
        temperature = property_temperature(p->mesh.layer[l].property, enthalpy[i], &slope);
        p->value[p->next][i] = temperature;
      }
  }
  p->next++;
}
