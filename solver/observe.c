/* observe.c: what a run is told by the march: figures, history, fields, and the record. */
#include "observe.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#define SAME_TIME(a, b) (fabs((a) - (b)) <= 1e-9 * (1 + fabs(a)))

double case_longest(const heat_case *c) {
  double sum = 0;
  for (int i = 0; i < c->stages.count; i++) {
    const stage *g = &c->stages.items[i];
    sum += g->end == STAGE_LASTS ? g->lasts : g->end == STAGE_UNTIL ? g->time_limit : 0;
  }
  return sum;
}

/* ---- instants ---- */

static int rising(const void *a, const void *b) {
  double x = *(const double *)a, y = *(const double *)b;
  return x < y ? -1 : x > y;
}

/* Times that an output request names, rising, without ends of stages. */
static status due_times(const output_request *r, const heat_case *c, double **out, int *count,
                        arena *memory, const char *where, fault *f) {
  double longest = case_longest(c);
  double wanted =
      r->times == OUTPUT_EVERY ? floor(longest / r->every * (1 + 1e-12)) + 1 : r->at.count;
  *count = 0;
  if (r->times == OUTPUT_NONE) return STATUS_OK;
  if (wanted > LIMIT_OUTPUTS)
    return fail(f, STATUS_BEYOND_LIMIT, where, "up to %.0f instants would be told; the limit is %d",
                wanted, LIMIT_OUTPUTS);
  *out = arena_array(memory, (size_t)wanted + 1, sizeof(double));
  if (!*out) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  for (int i = 0; i < (int)wanted; i++) {
    if (r->times == OUTPUT_EVERY)
      (*out)[(*count)++] = i * r->every;
    else if (r->at.items[i].end_of_stage < 0)
      (*out)[(*count)++] = r->at.items[i].time;
  }
  if (r->times == OUTPUT_AT) qsort(*out, (size_t)*count, sizeof(double), rising);
  return STATUS_OK;
}

static int column_trace(observer *o, const column *k) {
  if (k->kind == COLUMN_SERIES) return -1;
  trace_request r = {.kind = k->kind == COLUMN_PLACE ? TRACE_PLACE : TRACE_HEAT_FLOW,
                     .place = k->place,
                     .face = k->index};
  return watch_request(&o->watch, &r);
}

static status init_history(observer *o, arena *memory, fault *f) {
  const output_request *r = &o->the_case->output.history;
  status bad = due_times(r, o->the_case, &o->due, &o->dues, memory, "/output/history", f);
  if (bad || r->times == OUTPUT_NONE) return bad;
  o->history_capacity = o->dues + o->the_case->stages.count + 2;
  double values = (double)o->history_capacity * r->of.count;
  if (values > LIMIT_HISTORY_VALUES)
    return fail(f, STATUS_BEYOND_LIMIT, "/output/history",
                "up to %.0f values would be told; the limit is %d", values, LIMIT_HISTORY_VALUES);
  o->history.columns = r->of.count;
  o->history_time = arena_array(memory, (size_t)o->history_capacity, sizeof(double));
  o->history_value =
      arena_array(memory, (size_t)o->history_capacity * (size_t)r->of.count, sizeof(double));
  if (!o->history_time || !o->history_value) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  o->history.time = o->history_time;
  o->history.value = o->history_value;
  for (int i = 0; i < r->of.count; i++) o->column_trace[i] = column_trace(o, &r->of.items[i]);
  return STATUS_OK;
}

static status init_fields(observer *o, arena *memory, fault *f) {
  const output_request *r = &o->the_case->output.fields;
  status bad =
      due_times(r, o->the_case, &o->field_due, &o->field_dues, memory, "/output/fields", f);
  if (bad || r->times == OUTPUT_NONE) return bad;
  o->field_capacity = o->field_dues + o->the_case->stages.count + 1;
  int nodes = o->watch.section.nodes;
  double values = (double)o->field_capacity * nodes;
  if (values > LIMIT_FIELD_VALUES)
    return fail(f, STATUS_BEYOND_LIMIT, "/output/fields",
                "up to %.0f values would be told; the limit is %d", values, LIMIT_FIELD_VALUES);
  o->field = arena_array(memory, (size_t)o->field_capacity, sizeof *o->field);
  if (!o->field) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  for (int i = 0; i < o->field_capacity; i++) {
    o->field[i].nodes = nodes;
    o->field[i].position = o->watch.section.position;
    if (!(o->field[i].temperature = arena_array(memory, (size_t)nodes, sizeof(double))))
      return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  }
  return STATUS_OK;
}

/* ---- figures ---- */

static int figure_trace(observer *o, const figure *g) {
  trace_request r = {.kind = g->kind->trace, .face = g->face};
  if (g->kind->takes_place) {
    if (g->of.is_figure) return -1;
    r = (trace_request){.kind = TRACE_PLACE, .place = g->of.place};
  } else if (g->kind->trace == TRACE_PLACE) {
    return -1; /* it looks at profiles */
  }
  return watch_request(&o->watch, &r);
}

static status init_figures(observer *o, arena *memory, fault *f) {
  const heat_case *c = o->the_case;
  o->run = arena_array(memory, (size_t)c->figures.count + 1, sizeof *o->run);
  if (!o->run) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  for (int i = 0; i < c->figures.count; i++) {
    figure_run *r = &o->run[i];
    r->figure = &c->figures.items[i];
    r->the_case = c;
    r->trace = figure_trace(o, r->figure);
    r->stage_end = o->stage_end;
    r->self = arena_take(memory, r->figure->kind->size + 1);
    if (!r->self) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
    if (r->figure->kind->takes_place && r->figure->of.is_figure)
      r->watched = &o->run[r->figure->of.figure];
    r->figure->kind->begin(r);
  }
  return STATUS_OK;
}

static void figures_see(observer *o, const segment *g) {
  /* a figure that watches another must see the step before that one has taken it in */
  for (int pass = 0; pass < 2; pass++)
    for (int i = 0; i < o->the_case->figures.count; i++) {
      figure_run *r = &o->run[i];
      if ((r->watched == NULL) == (pass == 1)) r->figure->kind->observe(r, g);
    }
}

/* ---- the record ---- */

/* A figure that looks at profiles or at heat uses temperatures too: the extremes of the section, or
 * the face. */
static int add_places_of(observer *o, const figure *g) {
  place extremes[2] = {{.kind = PLACE_COLDEST, .layer = -1}, {.kind = PLACE_HOTTEST, .layer = -1}};
  if (g->kind->takes_place) return 0;
  for (int i = 0; i < 2; i++) {
    place face = {.kind = PLACE_FACE, .index = i, .layer = -1};
    bool of_heat = g->kind->trace != TRACE_PLACE;
    if (of_heat && g->face >= 0 && g->face != i) continue;
    if (watch_add_place(&o->watch, of_heat ? &face : &extremes[i]) < 0) return -1;
  }
  return 0;
}

static status init_record(observer *o, arena *memory, fault *f) {
  for (int i = 0; i < o->the_case->figures.count; i++)
    if (add_places_of(o, &o->the_case->figures.items[i]))
      return fail(f, STATUS_BEYOND_LIMIT, "", "too many places are watched");
  for (int i = 0; i < o->the_case->points.count; i++) {
    place p = {.kind = PLACE_POINT, .index = i, .layer = -1};
    if (watch_add_place(&o->watch, &p) < 0)
      return fail(f, STATUS_BEYOND_LIMIT, "", "too many places are watched");
  }
  for (int i = 0; i < o->watch.count; i++)
    if (o->watch.trace[i].request.kind == TRACE_PLACE) o->place_trace[o->places++] = i;
  if (o->reference) {
    o->last_difference = arena_array(
        memory, (size_t)o->the_case->stages.count * (size_t)o->places + 1, sizeof(double));
    return o->last_difference ? STATUS_OK : fail(f, STATUS_NO_MEMORY, "", "out of memory");
  }
  record *r = &o->record;
  r->columns = o->places;
  r->capacity = o->the_case->stages.count * MOST_RECORD_ROWS;
  r->row = arena_array(memory, (size_t)r->capacity, sizeof *r->row);
  r->value = arena_array(memory, (size_t)r->capacity * (size_t)(r->columns + 1), sizeof(double));
  r->interval = arena_array(memory, LIMIT_STAGES + LIMIT_TABLE_ROWS, sizeof(double));
  if (!r->row || !r->value || !r->interval) return fail(f, STATUS_NO_MEMORY, "", "out of memory");
  return STATUS_OK;
}

static void thin(record *r) {
  int kept = r->stage_first;
  for (int i = r->stage_first + 1; i < r->rows; i += 2, kept++) {
    r->row[kept] = r->row[i];
    memmove(r->value + (size_t)kept * r->columns, r->value + (size_t)i * r->columns,
            (size_t)r->columns * sizeof(double));
  }
  r->rows = kept;
  r->stride *= 2;
}

static void record_step(observer *o, double t, bool ends) {
  record *r = &o->record;
  if (++r->skipped < r->stride && !ends) return;
  r->skipped = 0;
  if (r->rows - r->stage_first >= MOST_RECORD_ROWS - 1) thin(r);
  if (r->rows >= r->capacity) return;
  r->row[r->rows] = (record_row){
      .stage = o->stage, .t = t, .since = t - o->jump_at, .interval = r->intervals - 1};
  for (int i = 0; i < r->columns; i++)
    r->value[(size_t)r->rows * r->columns + i] = watch_value(&o->watch, o->place_trace[i], t);
  r->rows++;
}

static bool counts(const record *r, const record_row *row) {
  return row->interval < 0 || row->since >= EARLIEST_SHARE * r->interval[row->interval];
}

/* The reference's rows that lie in the step. */
static void compare_step(observer *o, double t1) {
  const record *r = &o->reference->record;
  while (o->reference_row < r->rows) {
    const record_row *row = &r->row[o->reference_row];
    if (row->stage > o->stage || (row->stage == o->stage && row->t > t1 && !SAME_TIME(row->t, t1)))
      return;
    if (row->stage == o->stage && counts(r, row))
      for (int i = 0; i < r->columns; i++) {
        double value = watch_value(&o->watch, o->place_trace[i], row->t);
        double difference = fabs(value - r->value[(size_t)o->reference_row * r->columns + i]);
        o->last_difference[(size_t)o->stage * r->columns + i] = difference;
        if (!(difference <= o->difference)) o->difference = difference;
      }
    o->reference_row++;
  }
}

static void compare_end(observer *o, double t0, double t1) {
  const until_end *e = &o->reference->ends[o->stage];
  if (!e->known || !o->until.until || e->t < t0 || (e->t > t1 && !SAME_TIME(e->t, t1))) return;
  o->end_difference[o->stage] = fabs(until_leaf_value(&o->until, e->leaf, e->t) - e->value);
}

/* ---- rows and fields ---- */

static double series_column(const observer *o, int index, double t) {
  const series *s = &o->the_case->series.items[index].series;
  return series_before(s, s->from_case_start ? o->start + t : t);
}

static void history_row(observer *o, double t) {
  if (o->history.rows >= o->history_capacity) return;
  const columns *k = &o->the_case->output.history.of;
  double *row = o->history_value + (size_t)o->history.rows * k->count;
  o->history_time[o->history.rows++] = o->start + t;
  for (int i = 0; i < k->count; i++)
    row[i] = k->items[i].kind == COLUMN_SERIES ? series_column(o, k->items[i].index, t)
                                               : watch_value(&o->watch, o->column_trace[i], t);
}

/* An instant that falls on the end of a step belongs to that step, just before a jump; unless the
 * end is taken anyway. */
static bool due_in_step(double t, double t1, bool end_is_taken) {
  return SAME_TIME(t, t1) ? !end_is_taken : t < t1;
}

static void history_step(observer *o, double t1, bool ends) {
  if (o->the_case->output.history.times == OUTPUT_NONE) return;
  while (o->due_next < o->dues) {
    double t = o->due[o->due_next] - o->start;
    if (!due_in_step(t, t1, ends)) break;
    bool again = o->history.rows && o->history_time[o->history.rows - 1] == o->due[o->due_next];
    if (!again) history_row(o, fmin(fmax(t, 0), t1));
    if (!again) o->history_time[o->history.rows - 1] = o->due[o->due_next];
    o->due_next++;
  }
  if (!ends) return;
  while (o->due_next < o->dues && SAME_TIME(o->due[o->due_next] - o->start, t1)) o->due_next++;
  history_row(o, t1);
}

static bool field_at_end(const observer *o) {
  const output_request *r = &o->the_case->output.fields;
  if (r->times == OUTPUT_EVERY) return true;
  for (int i = 0; i < r->at.count; i++)
    if (r->at.items[i].end_of_stage == o->stage) return true;
  return false;
}

static void take_field(observer *o, double t) {
  if (o->fields >= o->field_capacity) return;
  field *k = &o->field[o->fields++];
  k->time = o->start + t;
  memcpy((double *)k->temperature, watch_profile(&o->watch, t), (size_t)k->nodes * sizeof(double));
}

static void field_step(observer *o, double t1, bool ends) {
  if (o->the_case->output.fields.times == OUTPUT_NONE) return;
  bool at_end = ends && field_at_end(o);
  while (o->field_due_next < o->field_dues) {
    double t = o->field_due[o->field_due_next] - o->start;
    if (!due_in_step(t, t1, at_end)) break;
    take_field(o, fmin(fmax(t, 0), t1));
    o->field_due_next++;
  }
  if (!at_end) return;
  while (o->field_due_next < o->field_dues &&
         SAME_TIME(o->field_due[o->field_due_next] - o->start, t1))
    o->field_due_next++;
  take_field(o, t1);
}

/* ---- ranges ---- */

/* T rises with H: the extremes of H are kept, and turned into temperatures when all is done. */
static void note_ranges(observer *o, const double *state) {
  const mesh *m = o->mesh;
  for (int i = 0; i < m->layers; i++) {
    const mesh_layer *l = &m->layer[i];
    double least = o->least_state[i], most = o->most_state[i];
    for (int node = l->first; node <= l->last; node++) {
      least = state[node] < least ? state[node] : least;
      most = state[node] > most ? state[node] : most;
    }
    o->least_state[i] = least;
    o->most_state[i] = most;
  }
}

void observe_ranges(observer *o) {
  double slope;
  for (int i = 0; i < o->mesh->layers; i++) {
    const property *p = o->mesh->layer[i].property;
    o->least[i] = property_temperature(p, o->least_state[i], &slope);
    o->most[i] = property_temperature(p, o->most_state[i], &slope);
    if (o->least_state[i] < p->least || o->most_state[i] > p->most) o->beyond_table = true;
  }
}

/* ---- what the march tells ---- */

static void begins(void *self, int stage, double start, stepper *s) {
  observer *o = self;
  const struct stage *g = &o->the_case->stages.items[stage];
  o->stage = stage;
  o->start = start;
  o->fresh = true;
  o->jump_at = 0;
  o->record.stage_first = o->record.rows;
  o->record.stride = 1;
  o->record.skipped = 0;
  note_ranges(o, s->state);
  if (until_begin(&o->until, g->end == STAGE_UNTIL ? &g->until : NULL, stage, &o->watch, o->run))
    o->out_of_memory = true;
}

static void close_interval(observer *o, double t) {
  record *r = &o->record;
  if (r->intervals) r->interval[r->intervals - 1] = t - o->jump_at;
}

static void jumped(void *self, double t) {
  observer *o = self;
  if (!o->reference) {
    if (t > 0) close_interval(o, t); /* that of an earlier stage is closed already */
    if (o->record.intervals < LIMIT_STAGES + LIMIT_TABLE_ROWS) o->record.intervals++;
  }
  o->jump_at = t;
}

/* An instant without duration: a stage that was over at once, or the steady state. */
static void instant_seen(observer *o, stepper *s) {
  watch_step(&o->watch, s, o->start, true);
  o->stage_end[o->stage] = o->start + s->t;
  segment g = watch_segment(&o->watch, o->stage, true, true);
  figures_see(o, &g);
  history_step(o, s->t, true);
  field_step(o, s->t, true);
}

static bool fulfilled_at_start(void *self, stepper *s) {
  observer *o = self;
  watch_step(&o->watch, s, o->start, true);
  if (!until_at_start(&o->until)) return false;
  o->started_true[o->stage] = true;
  instant_seen(o, s);
  return true;
}

static void passed(void *self, stepper *s) {
  instant_seen(self, s);
}

static double event(void *self, stepper *s) {
  observer *o = self;
  watch_step(&o->watch, s, o->start, false);
  return until_event(&o->until);
}

static void accepted(void *self, stepper *s, bool ends) {
  observer *o = self;
  double t1 = s->t + s->h;
  watch_step(&o->watch, s, o->start, false);
  if (ends) o->stage_end[o->stage] = o->start + t1;
  if (o->reference) {
    compare_end(o, s->t, t1);
    compare_step(o, t1);
  } else {
    record_step(o, t1, ends);
    if (ends) close_interval(o, t1);
    if (ends) o->ends[o->stage] = o->until.end;
  }
  segment g = watch_segment(&o->watch, o->stage, o->fresh, ends);
  figures_see(o, &g);
  history_step(o, t1, ends);
  field_step(o, t1, ends);
  note_ranges(o, s->next);
  until_accepted(&o->until);
  o->fresh = false;
}

static void rests(void *self, stepper *s, double start) {
  observer *o = self;
  o->start = start;
  o->jump_at = 0;
  instant_seen(o, s);
  note_ranges(o, s->state);
  if (!o->reference)
    record_step(o, 0, true);
  else
    compare_step(o, 0);
}

status observe_init(observer *o, const heat_case *c, const mesh *m, const observer *reference,
                    arena *memory, fault *f) {
  memset(o, 0, sizeof *o);
  o->the_case = c;
  o->mesh = m;
  o->reference = reference;
  for (int i = 0; i < LIMIT_LAYERS; i++) {
    o->least[i] = o->least_state[i] = INFINITY;
    o->most[i] = o->most_state[i] = -INFINITY;
  }
  for (int i = 0; i < LIMIT_STAGES; i++) o->stage_end[i] = NAN;
  status bad = watch_init(&o->watch, c, m, memory, f);
  if (!bad) bad = init_figures(o, memory, f);
  if (!bad) bad = init_history(o, memory, f);
  if (!bad) bad = init_fields(o, memory, f);
  for (int i = 0; i < c->stages.count && !bad; i++)
    if (until_add_traces(&c->stages.items[i].until, &o->watch))
      bad = fail(f, STATUS_BEYOND_LIMIT, "/stages", "too many places are watched");
  if (!bad) bad = init_record(o, memory, f);
  o->march = (march_watch){.self = o,
                           .begins = begins,
                           .fulfilled_at_start = fulfilled_at_start,
                           .event = event,
                           .accepted = accepted,
                           .jumped = jumped,
                           .passed = passed,
                           .rests = rests};
  return bad;
}

/* ---- two runs ---- */

static double history_difference(const observer *a, const observer *b) {
  double most = 0;
  const columns *k = &a->the_case->output.history.of;
  int rows = a->history.rows < b->history.rows ? a->history.rows : b->history.rows;
  for (int row = 0; row < rows; row++)
    for (int i = 0; i < k->count; i++) {
      if (k->items[i].kind != COLUMN_PLACE) continue;
      size_t at = (size_t)row * k->count + i;
      double difference = fabs(a->history.value[at] - b->history.value[at]);
      if (!(difference <= most)) most = difference;
    }
  return most;
}

/* Every node of the coarse field has the same place in the fine one: they are matched by position
 * and side. */
static double field_difference(const observer *fine, const observer *coarse) {
  double most = 0;
  int fields = fine->fields < coarse->fields ? fine->fields : coarse->fields;
  for (int k = 0; k < fields; k++) {
    const field *a = &fine->field[k], *b = &coarse->field[k];
    int i = 0;
    for (int j = 0; j < b->nodes; j++) {
      while (i < a->nodes - 1 && a->position[i] < b->position[j] - 1e-12 * fine->mesh->width) i++;
      if (j && b->position[j] == b->position[j - 1] && i < a->nodes - 1) i++;
      double difference = fabs(a->temperature[i] - b->temperature[j]);
      if (!(difference <= most)) most = difference;
    }
  }
  return most;
}

double observe_difference(const observer *fine, const observer *coarse) {
  double most = coarse->difference;
  double others[] = {history_difference(fine, coarse), field_difference(fine, coarse)};
  for (int i = 0; i < 2; i++)
    if (!(others[i] <= most)) most = others[i];
  return most;
}
