#include "rows.h"
#include "run_case.h"
#include <math.h>
#include <string.h>

static const double pi = 3.14159265358979323846;

/* ---- asking ---- */

static void add_unique(json_t *array, json_t *value) {
  for (size_t i = 0; i < json_array_size(array); i++)
    if (json_equal(json_array_get(array, i), value)) {
      json_decref(value);
      return;
    }
  json_array_append_new(array, value);
}

/* Where in rising order a time belongs; histories want it so. */
static void add_time(adapted *a, double t) {
  size_t i = 0;
  for (; i < json_array_size(a->times); i++) {
    double other = json_number_value(json_array_get(a->times, i));
    if (other == t) return;
    if (other > t) break;
  }
  json_array_insert_new(a->times, i, json_real(t));
}

static double row_time(const adapted *a, const json_t *row) {
  return a->period > 0 ? PERIODS_BEFORE * a->period + neutral_number(row, "t_in_period", 0)
                       : neutral_number(row, "t", a->longest);
}

static void ask_instant(adapted *a, const json_t *row) {
  if (a->steady)
    add_unique(a->times, json_string("end:stage_1"));
  else
    add_time(a, row_time(a, row));
}

/* Which side of an interface a row means: its own word, or the end of the layer that it names. */
static const char *side_of(const adapted *a, const json_t *row, double at) {
  const char *side = json_string_value(json_object_get(row, "side"));
  for (int i = 0; i < a->interfaces; i++) {
    if (fabs(at - a->interface[i]) > 1e-9) continue;
    if (side) return strncmp(side, "outer", 5) ? a->first : a->last;
    return neutral_number(row, "layer", i) > i ? a->last : a->first;
  }
  return NULL;
}

static json_t *location(const adapted *a, const json_t *row) {
  double at = neutral_number(row, a->coordinate, 0);
  if (fabs(at - a->end) < 1e-9) return json_pack("{s:s}", "face", a->last);
  if (fabs(at - a->origin) < 1e-9)
    return at > 0 || a->coordinate[0] == 'x' ? json_pack("{s:s}", "face", a->first)
                                             : json_string("center");
  const char *side = side_of(a, row, at);
  return side ? json_pack("{s:f,s:s}", a->coordinate, at, "side", side)
              : json_pack("{s:f}", a->coordinate, at);
}

/* Index of the row's point, made if it is new. */
static size_t point_of(const adapted *a, const json_t *row) {
  json_t *at = location(a, row);
  size_t i = 0;
  for (; i < json_array_size(a->points); i++)
    if (json_equal(json_object_get(json_array_get(a->points, i), "at"), at)) break;
  if (i == json_array_size(a->points)) {
    json_array_append_new(a->points,
                          json_pack("{s:o,s:O}", "name", json_sprintf("p%zu", i), "at", at));
    json_array_append_new(a->of, json_sprintf("p%zu", i));
  }
  json_decref(at);
  return i;
}

static void ask_temperature(adapted *a, const json_t *row, int index) {
  (void)index;
  point_of(a, row);
  ask_instant(a, row);
}

static void ask_mean(adapted *a, const json_t *row, int index) {
  (void)index;
  add_unique(a->of, json_string("mean"));
  ask_instant(a, row);
}

static json_t *row_instant(const adapted *a, const json_t *row) {
  return a->steady ? json_string("end:stage_1") : json_real(row_time(a, row));
}

static void add_figure(adapted *a, const char *kind, int index, json_t *more) {
  json_t *figure = json_pack("{s:o,s:s}", "name", json_sprintf("f%d", index), "kind", kind);
  json_object_update_new(figure, more);
  json_array_append_new(a->figures, figure);
}

static void ask_heat_absorbed(adapted *a, const json_t *row, int index) {
  add_figure(a, "heat_absorbed", index, json_pack("{s:o}", "time", row_instant(a, row)));
}

static void ask_flow(adapted *a, const json_t *row, int index, const char *face) {
  add_figure(a, "heat_flow", index,
             json_pack("{s:s,s:o}", "face", face, "time", row_instant(a, row)));
}

static void ask_first_flow(adapted *a, const json_t *row, int index) {
  ask_flow(a, row, index, a->first);
}

static void ask_last_flow(adapted *a, const json_t *row, int index) {
  ask_flow(a, row, index, a->last);
}

static void ask_field(adapted *a, const json_t *row, int index) {
  (void)index;
  json_t *output = json_object_get(a->document, "output"),
         *fields = json_object_get(output, "fields");
  if (!fields) {
    fields = json_pack("{s:[]}", "at");
    json_object_set_new(output, "fields", fields);
  }
  add_unique(json_object_get(fields, "at"), row_instant(a, row));
}

static void ask_cooling_time(adapted *a, const json_t *row, int index) {
  json_t *name = json_sprintf("p%zu", point_of(a, row));
  add_figure(a, "time_between", index,
             json_pack("{s:o,s:i,s:i}", "of", name, "from", 800, "to", 500));
}

static void ask_stress(adapted *a, const json_t *row, int index) {
  const json_t *m = json_object_get(a->neutral, "material");
  add_figure(a, "stress", index,
             json_pack("{s:O,s:O,s:O,s:o,s:o}", "elastic_modulus", json_object_get(m, "E"),
                       "expansion", json_object_get(m, "alpha"), "poisson",
                       json_object_get(m, "nu"), "at", location(a, row), "time",
                       row_instant(a, row)));
}

static void ask_wave(adapted *a, const json_t *row, int index) {
  (void)index;
  point_of(a, row);
  for (int i = 0; i < LOOKS; i++) add_time(a, (PERIODS_BEFORE + (double)i / LOOKS) * a->period);
}

/* ---- answering ---- */

/* Row of the history at the time asked. */
static int history_row(const adapted *a, const json_t *result, double t) {
  const json_t *times = result_at(result, "history/time");
  if (a->steady) return (int)json_array_size(times) - 1;
  for (size_t i = 0; i < json_array_size(times); i++)
    if (fabs(json_number_value(json_array_get(times, i)) - t) <= 1e-9 * (1 + t)) return (int)i;
  return -1;
}

static double answer_temperature(const adapted *a, const json_t *result, const json_t *row,
                                 int index) {
  (void)index;
  return result_number(result, "history/points/p%zu/%d", point_of(a, row),
                       history_row(a, result, row_time(a, row)));
}

static double answer_mean(const adapted *a, const json_t *result, const json_t *row, int index) {
  (void)index;
  return result_number(result, "history/places/mean/%d", history_row(a, result, row_time(a, row)));
}

static double answer_figure(const adapted *a, const json_t *result, const json_t *row, int index) {
  (void)a, (void)row;
  return result_number(result, "figures/f%d/value", index);
}

static double answer_out_of_face(const adapted *a, const json_t *result, const json_t *row,
                                 int index) {
  return -answer_figure(a, result, row, index);
}

static double answer_stress(const adapted *a, const json_t *result, const json_t *row, int index) {
  (void)a;
  const char *component = json_string_value(json_object_get(row, "quantity")) + strlen("stress_");
  double pascal = result_number(result, "figures/f%d/%s", index, component);
  if (isnan(pascal)) pascal = result_number(result, "figures/f%d/%s/value", index, component);
  return pascal / 1e6;
}

static const json_t *field_at(const adapted *a, const json_t *result, const json_t *row) {
  const json_t *fields = json_object_get(result, "fields"), *f;
  size_t i;
  json_array_foreach(fields, i,
                     f) if (a->steady || fabs(neutral_number(f, "time", NAN) - row_time(a, row)) <=
                                             1e-9 * row_time(a, row)) return f;
  return NULL;
}

/* Depth at which the profile first rises through a level, straight between nodes. */
static double answer_depth(const adapted *a, const json_t *result, const json_t *row, int index) {
  (void)index;
  const json_t *f = field_at(a, result, row);
  double level = neutral_number(row, "T", 0);
  for (int i = 1;; i++) {
    double x0 = result_number(f, "%s/%d", a->coordinate, i - 1),
           x1 = result_number(f, "%s/%d", a->coordinate, i);
    double t0 = result_number(f, "temperature/%d", i - 1),
           t1 = result_number(f, "temperature/%d", i);
    if (isnan(x1)) return NAN;
    if (t0 < level && t1 >= level) return x0 + (level - t0) / (t1 - t0) * (x1 - x0);
  }
}

/* The profile is almost straight in the frozen layer and level beyond the front: the front stands
   where the straight line through the last two nodes that are wholly frozen reaches the melting
   point. */
static double answer_front(const adapted *a, const json_t *result, const json_t *row, int index) {
  (void)index;
  const json_t *f = field_at(a, result, row);
  double melt = neutral_number(json_object_get(a->neutral, "material"), "T_melt", 0);
  int last = -1;
  for (int i = 0;; i++) {
    double t = result_number(f, "temperature/%d", i);
    if (isnan(t) || t > melt - 0.05) break;
    last = i;
  }
  if (last < 2) return NAN;
  double x0 = result_number(f, "x/%d", last - 1), x1 = result_number(f, "x/%d", last);
  double t0 = result_number(f, "temperature/%d", last - 1),
         t1 = result_number(f, "temperature/%d", last);
  return x1 + (melt - t1) / (t1 - t0) * (x1 - x0);
}

void first_harmonic(int count, const double *times, const double *values, double period,
                    double *amplitude, double *phase) {
  double s = 0, c = 0;
  for (int i = 0; i < count; i++) {
    s += values[i] * sin(2 * pi * times[i] / period);
    c += values[i] * cos(2 * pi * times[i] / period);
  }
  *amplitude = hypot(s, c) * 2 / count;
  *phase = atan2(c, s);
}

static void wave(const adapted *a, const json_t *result, const json_t *row, double *amplitude,
                 double *phase) {
  double times[LOOKS], values[LOOKS];
  for (int i = 0; i < LOOKS; i++) {
    times[i] = (PERIODS_BEFORE + (double)i / LOOKS) * a->period;
    values[i] = result_number(result, "history/points/p%zu/%d", point_of(a, row),
                              history_row(a, result, times[i]));
  }
  first_harmonic(LOOKS, times, values, a->period, amplitude, phase);
}

static double answer_amplitude(const adapted *a, const json_t *result, const json_t *row,
                               int index) {
  double amplitude, phase;
  (void)index;
  wave(a, result, row, &amplitude, &phase);
  return amplitude;
}

static double answer_lag(const adapted *a, const json_t *result, const json_t *row, int index) {
  double amplitude, phase;
  (void)index;
  wave(a, result, row, &amplitude, &phase);
  return fmod(2 * pi - phase, 2 * pi) / (2 * pi) * a->period;
}

static const row_kind kinds[] = {
    {"T", ask_temperature, answer_temperature},
    {"T_mean", ask_mean, answer_mean},
    {"heat_absorbed", ask_heat_absorbed, answer_figure},
    {"heat_flow", ask_first_flow, answer_figure},
    {"heat_loss_inner", ask_first_flow, answer_out_of_face},
    {"heat_loss_outer", ask_last_flow, answer_out_of_face},
    {"flux_out_left", ask_first_flow, answer_out_of_face},
    {"front_position", ask_field, answer_front},
    {"depth_of_T", ask_field, answer_depth},
    {"t85", ask_cooling_time, answer_figure},
    {"stress_in_plane", ask_stress, answer_stress},
    {"stress_radial", ask_stress, answer_stress},
    {"stress_hoop", ask_stress, answer_stress},
    {"amplitude", ask_wave, answer_amplitude},
    {"time_lag", ask_wave, answer_lag},
};

const row_kind *row_kind_named(const char *quantity) {
  for (size_t i = 0; i < sizeof kinds / sizeof *kinds; i++)
    if (!strcmp(kinds[i].quantity, quantity)) return &kinds[i];
  return NULL;
}
