/* step.c: Rodas4, see step.h. */
#include "step.h"

#include <math.h>
#include <string.h>

const rosenbrock rodas4 = {
    .gamma = 0.25,
    .a = {{0},
          {1.544},
          {0.9466785280815826, 0.2557011698983284},
          {3.314825187068521, 2.896124015972201, 0.9986419139977817},
          {1.221224509226641, 6.019134481288629, 12.53708332932087, -0.6878860361058950},
          {1.221224509226641, 6.019134481288629, 12.53708332932087, -0.6878860361058950, 1}},
    .c = {{0},
          {-5.6688},
          {-2.430093356833875, -0.2063599157091915},
          {-0.1073529058151375, -9.594562251023355, -20.47028614809616},
          {7.496443313967647, -10.24680431464352, -33.99990352819905, 11.70890893206160},
          {8.083246795921522, -7.981132988064893, -31.52159432874371, 16.31930543123136,
           -6.058818238834054}},
    .alpha = {0, 0.386, 0.21, 0.63, 1, 1},
    .gamma_sum = {0.25, -0.1043, 0.1035, -0.0362, 0, 0},
    .m = {1.221224509226641, 6.019134481288629, 12.53708332932087, -0.6878860361058950, 1, 1},
    .dense = {{10.12623508344586, -7.487995877610167, -34.80091861555747, -7.992771707568823,
               1.025137723295662, 0},
              {-0.6762803392801253, 6.087714651680015, 16.43084320892478, 24.76722511418386,
               -6.594389125716872, 0}},
};

int stepper_init(stepper *s, conduction *system, arena *memory) {
  memset(s, 0, sizeof *s);
  s->system = system;
  s->nodes = system->mesh->nodes;
  double **arrays[] = {&s->state,          &s->next,     &s->stage[0], &s->stage[1],
                       &s->stage[2],       &s->stage[3], &s->stage[4], &s->stage[5],
                       &s->rate,           &s->trial,    &s->work,     &s->interpolant[0],
                       &s->interpolant[1], &s->scale,    &s->lower,    &s->diagonal,
                       &s->upper};
  for (int i = 0; i < COUNT_OF(arrays); i++)
    if (!(*arrays[i] = arena_array(memory, (size_t)s->nodes, sizeof(double)))) return -1;
  const mesh *m = system->mesh;
  for (int l = 0; l < m->layers; l++)
    for (int i = m->layer[l].first; i <= m->layer[l].last; i++)
      s->scale[i] = 1 / m->layer[l].property->reference_capacity;
  return tridiagonal_init(&s->matrix, s->nodes, memory);
}

static void keep_linearisation(stepper *s) {
  conduction_linearise(s->system, s->t, s->state, s->rate);
  s->evaluations++;
  memcpy(s->heat_rate, s->system->heat, sizeof s->heat_rate);
  memcpy(s->heat_by_time, s->system->heat_by_time, sizeof s->heat_by_time);
  memcpy(s->heat_by_state, s->system->heat_by_state, sizeof s->heat_by_state);
}

void stepper_begin(stepper *s, double t) {
  double unused[2];
  s->t = t;
  conduction_prescribe(s->system, t, s->state, unused);
  keep_linearisation(s);
}

static int factor(stepper *s, double gamma_h) {
  const double *volume = s->system->mesh->volume;
  const conduction *c = s->system;
  for (int i = 0; i < s->nodes; i++) {
    s->lower[i] = -gamma_h * c->lower[i];
    s->diagonal[i] = volume[i] - gamma_h * c->diagonal[i];
    s->upper[i] = -gamma_h * c->upper[i];
  }
  s->factorisations++;
  return tridiagonal_factor(&s->matrix, s->lower, s->diagonal, s->upper);
}

/* out = base + sum of weight_j U_j over j < count, in one pass; count is a constant where this is
 * expanded. */
static inline __attribute__((always_inline)) void sum_of(const stepper *s, double *restrict out,
                                                         const double *base, const double *weight,
                                                         const int count) {
  const double *u[RODAS_STAGES];
  double w[RODAS_STAGES];
  for (int j = 0; j < count; j++) {
    u[j] = s->stage[j];
    w[j] = weight[j];
  }
  for (int i = 0; i < s->nodes; i++) {
    double sum = base ? base[i] : 0;
    for (int j = 0; j < count; j++) sum += w[j] * u[j][i];
    out[i] = sum;
  }
}

static void combine(const stepper *s, double *out, const double *base, const double *weight,
                    int count) {
  switch (count) {
  case 0: sum_of(s, out, base, weight, 0); return;
  case 1: sum_of(s, out, base, weight, 1); return;
  case 2: sum_of(s, out, base, weight, 2); return;
  case 3: sum_of(s, out, base, weight, 3); return;
  case 4: sum_of(s, out, base, weight, 4); return;
  case 5: sum_of(s, out, base, weight, 5); return;
  default: sum_of(s, out, base, weight, RODAS_STAGES);
  }
}

static void solve_stage(stepper *s, int k, const double *rate, double h) {
  const rosenbrock *r = &rodas4;
  double gamma_h = r->gamma * h, by_time = gamma_h * r->gamma_sum[k] * h;
  const double *volume = s->system->mesh->volume, *rate_by_time = s->system->by_time;
  double *u = s->stage[k];
  combine(s, s->work, NULL, r->c[k], k);
  for (int i = 0; i < s->nodes; i++)
    u[i] = gamma_h * rate[i] + by_time * rate_by_time[i] + r->gamma * volume[i] * s->work[i];
  tridiagonal_solve(&s->matrix, u);
}

static void heat_stage(stepper *s, int k, const double heat[HEATS], double h) {
  const rosenbrock *r = &rodas4;
  double gamma_h = r->gamma * h;
  for (int q = 0; q < HEATS; q++) {
    double value = gamma_h * heat[q] + gamma_h * r->gamma_sum[k] * h * s->heat_by_time[q];
    if (q != HEAT_GENERATED)
      value += gamma_h * s->heat_by_state[q] * s->stage[k][s->system->heat_node[q]];
    for (int j = 0; j < k; j++) value += r->gamma * r->c[k][j] * s->heat_stage[j][q];
    s->heat_stage[k][q] = value;
  }
}

static double largest(const stepper *s, const double *u) {
  double most = 0;
  for (int i = 0; i < s->nodes; i++) {
    double size = fabs(u[i]) * s->scale[i];
    if (!(size <= most)) most = size;
  }
  return most;
}

double stepper_try(stepper *s, double h) {
  const rosenbrock *r = &rodas4;
  double unused[2];
  s->h = h;
  s->interpolated = false;
  if (factor(s, r->gamma * h) >= 0) return -1;
  solve_stage(s, 0, s->rate, h);
  heat_stage(s, 0, s->heat_rate, h);
  for (int k = 1; k < RODAS_STAGES; k++) {
    combine(s, s->trial, s->state, r->a[k], k);
    double t = s->t + r->alpha[k] * h;
    conduction_prescribe(s->system, t, s->trial, unused);
    conduction_rates(s->system, t, s->trial, s->next);
    s->evaluations++;
    solve_stage(s, k, s->next, h);
    heat_stage(s, k, s->system->heat, h);
  }
  combine(s, s->next, s->state, r->m, RODAS_STAGES);
  conduction_prescribe(s->system, s->t + h, s->next, unused);
  const mesh *m = s->system->mesh;
  for (int q = 0; q < HEATS; q++) {
    s->heat_next[q] = s->heat[q];
    for (int j = 0; j < RODAS_STAGES; j++) s->heat_next[q] += r->m[j] * s->heat_stage[j][q];
  }
  for (int end = 0; end < 2; end++) {
    int node = end ? s->nodes - 1 : 0;
    if (conduction_prescribes(s->system, end))
      s->heat_next[end] += m->volume[node] * (s->next[node] - s->state[node]);
  }
  double error = largest(s, s->stage[RODAS_STAGES - 1]);
  return isfinite(error) && isfinite(largest(s, s->next)) ? error : -2;
}

void stepper_accept(stepper *s) {
  double *swap = s->state;
  s->state = s->next;
  s->next = swap;
  s->t += s->h;
  memcpy(s->heat, s->heat_next, sizeof s->heat);
  keep_linearisation(s);
}

static void interpolate(stepper *s) {
  if (s->interpolated) return;
  for (int k = 0; k < 2; k++) combine(s, s->interpolant[k], NULL, rodas4.dense[k], RODAS_STAGES);
  s->interpolated = true;
}

static double blend(double u, double from, double to, double first, double second) {
  return (1 - u) * from + u * (to + (1 - u) * (first + u * second));
}

static bool held(const stepper *s, int node) {
  return (node == 0 && conduction_prescribes(s->system, 0)) ||
         (node == s->nodes - 1 && conduction_prescribes(s->system, 1));
}

double stepper_node(stepper *s, int node, double t) {
  if (t <= s->t) return s->state[node];
  if (t >= s->t + s->h) return s->next[node];
  interpolate(s);
  if (held(s, node)) {
    double unused[2], *swap = s->work;
    conduction_prescribe(s->system, t, swap, unused);
    return swap[node];
  }
  return blend((t - s->t) / s->h, s->state[node], s->next[node], s->interpolant[0][node],
               s->interpolant[1][node]);
}

void stepper_nodes(stepper *s, double t, double *state) {
  double unused[2];
  if (t <= s->t || t >= s->t + s->h) {
    memcpy(state, t <= s->t ? s->state : s->next, (size_t)s->nodes * sizeof(double));
    return;
  }
  interpolate(s);
  double u = (t - s->t) / s->h;
  for (int i = 0; i < s->nodes; i++)
    state[i] = blend(u, s->state[i], s->next[i], s->interpolant[0][i], s->interpolant[1][i]);
  conduction_prescribe(s->system, t, state, unused);
}

double stepper_heat(stepper *s, int which, double t) {
  if (t <= s->t) return s->heat[which];
  if (t >= s->t + s->h) return s->heat_next[which];
  double u = (t - s->t) / s->h, k[2] = {0, 0};
  for (int i = 0; i < 2; i++)
    for (int j = 0; j < RODAS_STAGES; j++) k[i] += rodas4.dense[i][j] * s->heat_stage[j][which];
  return blend(u, s->heat[which], s->heat_next[which], k[0], k[1]);
}

double stepper_first(const stepper *s, double tolerance, double span, bool jump) {
  const double *volume = s->system->mesh->volume, *by_time = s->system->by_time;
  double rate = 0, change = 0;
  for (int i = 0; i < s->nodes; i++) {
    double scale = s->scale[i] / volume[i];
    rate = fmax(rate, fabs(s->rate[i]) * scale);
    change = fmax(change, fabs(by_time[i]) * scale);
  }
  double h = span / 50;
  if (jump && rate > 0) h = fmin(h, 2 * tolerance / rate);
  if (change > 0) h = fmin(h, 2 * sqrt(tolerance / change));
  return h;
}
