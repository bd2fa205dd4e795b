/* face.c: q = flux + h (T_medium - T) + view x emissivity x sigma (T_surroundings^4 - T^4), with
 * its derivatives. */
#include "face.h"

#include "physics.h"

#include <math.h>

static void read_series(const series *s, double stage_start, double from, double to, double t,
                        double *value, double *slope) {
  double origin = s->from_case_start ? stage_start : 0;
  series_within(s, from + origin, to + origin, t + origin, value, slope);
}

void face_at(const face_condition *c, double stage_start, double from, double to, double t,
             face_state *state) {
  state->flux = state->flux_slope = 0;
  if (c->kind == FACE_PRESCRIBED)
    read_series(&c->temperature, stage_start, from, to, t, &state->prescribed,
                &state->prescribed_slope);
  if (c->kind != FACE_EXCHANGE) return;
  if (c->flux.kind != SERIES_NONE)
    read_series(&c->flux, stage_start, from, to, t, &state->flux, &state->flux_slope);
  if (c->has_convection) {
    if (!c->h.by_surface_temperature)
      read_series(&c->h.over_time, stage_start, from, to, t, &state->h, &state->h_slope);
    read_series(&c->medium, stage_start, from, to, t, &state->medium, &state->medium_slope);
  }
  if (c->has_radiation)
    read_series(&c->surroundings, stage_start, from, to, t, &state->surroundings,
                &state->surroundings_slope);
}

/* h and dh/dT from a table against surface temperature. */
static double h_of_surface(const table *t, double temperature, double *slope) {
  *slope = 0;
  if (temperature <= t->x[0]) return t->y[0];
  if (temperature >= t->x[t->count - 1]) return t->y[t->count - 1];
  int low = 0, high = t->count - 1;
  while (high - low > 1) {
    int middle = (low + high) / 2;
    if (t->x[middle] <= temperature)
      low = middle;
    else
      high = middle;
  }
  *slope = (t->y[high] - t->y[low]) / (t->x[high] - t->x[low]);
  return t->y[low] + *slope * (temperature - t->x[low]);
}

static double cube(double x) {
  return x * x * x;
}

face_flux face_exchange(const face_condition *c, const face_state *state,
                        double surface_temperature) {
  face_flux q = {.flux = state->flux, .by_time = state->flux_slope};
  if (c->kind != FACE_EXCHANGE) return (face_flux){0};
  if (c->has_convection) {
    double h = state->h, h_by_time = state->h_slope, h_by_temperature = 0;
    if (c->h.by_surface_temperature) {
      h = h_of_surface(&c->h.over_temperature, surface_temperature, &h_by_temperature);
      h_by_time = 0;
    }
    double difference = state->medium - surface_temperature;
    q.flux += h * difference;
    q.by_temperature += h_by_temperature * difference - h;
    q.by_time += h_by_time * difference + h * state->medium_slope;
  }
  if (c->has_radiation) {
    double strength = c->view_factor * c->emissivity * STEFAN_BOLTZMANN;
    double a = state->surroundings, s = surface_temperature;
    q.flux += strength * (a - s) * (a + s) * (a * a + s * s);
    q.by_temperature -= strength * 4 * cube(s);
    q.by_time += strength * 4 * cube(a) * state->surroundings_slope;
  }
  return q;
}

static void rest(series *s) {
  if (s->kind == SERIES_NONE) return;
  double value = series_last(s, 0);
  *s = (series){.kind = SERIES_CONSTANT, .value = value};
}

face_condition face_at_rest(const face_condition *c) {
  face_condition still = *c;
  rest(&still.temperature);
  rest(&still.flux);
  rest(&still.medium);
  rest(&still.surroundings);
  rest(&still.h.over_time);
  return still;
}

static void earlier(const series *s, double stage_start, double t, double *least) {
  if (s->kind == SERIES_NONE) return;
  double origin = s->from_case_start ? stage_start : 0;
  double next = series_next_break(s, t + origin) - origin;
  if (next < *least) *least = next;
}

double face_next_break(const face_condition *c, double stage_start, double t) {
  double least = INFINITY;
  if (c->kind == FACE_PRESCRIBED) earlier(&c->temperature, stage_start, t, &least);
  if (c->kind != FACE_EXCHANGE) return least;
  earlier(&c->flux, stage_start, t, &least);
  if (c->has_convection) {
    if (!c->h.by_surface_temperature) earlier(&c->h.over_time, stage_start, t, &least);
    earlier(&c->medium, stage_start, t, &least);
  }
  if (c->has_radiation) earlier(&c->surroundings, stage_start, t, &least);
  return least;
}

static void shorter(const series *s, double *least) {
  if (s->kind == SERIES_NONE) return;
  double longest = series_longest_step(s);
  if (longest < *least) *least = longest;
}

double face_longest_step(const face_condition *c) {
  double least = INFINITY;
  if (c->kind == FACE_PRESCRIBED) shorter(&c->temperature, &least);
  if (c->kind != FACE_EXCHANGE) return least;
  shorter(&c->flux, &least);
  if (c->has_convection) {
    if (!c->h.by_surface_temperature) shorter(&c->h.over_time, &least);
    shorter(&c->medium, &least);
  }
  if (c->has_radiation) shorter(&c->surroundings, &least);
  return least;
}
