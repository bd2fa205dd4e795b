/* The same equations by SUNDIALS CVODE: variable-order BDF, banded direct solver, the exact
   Jacobian, absolute tolerances that are the same kelvin at every node, restarted at every break of
   the conditions. */
#include "probe.h"
#include <cvode/cvode.h>
#include <math.h>
#include <nvector/nvector_serial.h>
#include <string.h>
#include <sunlinsol/sunlinsol_band.h>
#include <sunmatrix/sunmatrix_band.h>

typedef struct bdf {
  probe *p;
  SUNContext context;
  N_Vector state, tolerance, look;
  SUNMatrix matrix;
  SUNLinearSolver solver;
  void *memory;
  bool begun;
} bdf;

static int rates(realtype t, N_Vector state, N_Vector rate, void *self) {
  probe *p = self;
  double *f = N_VGetArrayPointer(rate);
  conduction_rates(&p->system, t, N_VGetArrayPointer(state), f);
  for (int i = 0; i < p->mesh.nodes; i++) f[i] /= p->mesh.volume[i];
  return 0;
}

static int jacobian(realtype t, N_Vector state, N_Vector rate, SUNMatrix j, void *self, N_Vector a,
                    N_Vector b, N_Vector c) {
  probe *p = self;
  const conduction *s = &p->system;
  int n = p->mesh.nodes;
  (void)rate, (void)b, (void)c;
  conduction_linearise(&p->system, t, N_VGetArrayPointer(state), N_VGetArrayPointer(a));
  for (int i = 0; i < n; i++) {
    double scale = 1 / p->mesh.volume[i];
    SM_ELEMENT_B(j, i, i) = s->diagonal[i] * scale;
    if (i) SM_ELEMENT_B(j, i, i - 1) = s->lower[i] * scale;
    if (i < n - 1) SM_ELEMENT_B(j, i, i + 1) = s->upper[i] * scale;
  }
  return 0;
}

static int begin(bdf *b, double t) {
  if (b->begun) return CVodeReInit(b->memory, t, b->state);
  b->begun = true;
  int bad = CVodeInit(b->memory, rates, t, b->state);
  if (!bad) bad = CVodeSVtolerances(b->memory, 0, b->tolerance);
  if (!bad) bad = CVodeSetUserData(b->memory, b->p);
  if (!bad) bad = CVodeSetLinearSolver(b->memory, b->solver, b->matrix);
  if (!bad) bad = CVodeSetJacFn(b->memory, jacobian);
  if (!bad) bad = CVodeSetMaxNumSteps(b->memory, 1000000);
  return bad;
}

static void record_until(bdf *b, double start, double t) {
  probe *p = b->p;
  double enthalpy[MOST_PROBES];
  while (p->next < p->looks && p->look[p->next] - start <= t * (1 + 1e-13)) {
    double at = p->look[p->next] - start;
    N_Vector from = b->state;
    if (at < t && !CVodeGetDky(b->memory, at, 0, b->look)) from = b->look;
    for (int i = 0; i < p->count; i++) enthalpy[i] = NV_Ith_S(from, p->nodes[i]);
    probe_record(p, enthalpy);
  }
}

static int march_interval(bdf *b, double start, double from, double to) {
  realtype t = from;
  b->p->system.from = from;
  b->p->system.to = to;
  if (begin(b, from) || CVodeSetStopTime(b->memory, to)) return -1;
  while (t < to * (1 - 1e-14)) {
    if (CVode(b->memory, to, b->state, &t, CV_ONE_STEP) < 0) return -1;
    record_until(b, start, t);
  }
  long steps = 0;
  CVodeGetNumSteps(b->memory, &steps);
  b->p->steps += steps;
  return 0;
}

static int march_stage(bdf *b, int index, double start) {
  probe *p = b->p;
  const stage *g = &p->the_case->stages.items[index];
  p->system.stage_start = start;
  march_conditions(&p->system, &g->faces);
  for (double t = 0; t < g->lasts * (1 - 1e-12);) {
    double to = g->lasts;
    for (int end = 0; end < 2; end++)
      if (p->system.condition[end])
        to = fmin(to, face_next_break(p->system.condition[end], start, t + 1e-9));
    if (march_interval(b, start, t, to)) return -1;
    t = to;
  }
  return 0;
}

static void bdf_open(bdf *b, probe *p, double tolerance) {
  int n = p->mesh.nodes;
  memset(b, 0, sizeof *b);
  b->p = p;
  SUNContext_Create(NULL, &b->context);
  b->state = N_VNew_Serial(n, b->context);
  b->tolerance = N_VNew_Serial(n, b->context);
  b->look = N_VNew_Serial(n, b->context);
  b->matrix = SUNBandMatrix(n, 1, 1, b->context);
  b->solver = SUNLinSol_Band(b->state, b->matrix, b->context);
  b->memory = CVodeCreate(CV_BDF, b->context);
  for (int i = 0; i < n; i++) NV_Ith_S(b->tolerance, i) = tolerance / p->stepper.scale[i];
}

static void bdf_close(bdf *b) {
  CVodeFree(&b->memory);
  SUNLinSolFree(b->solver);
  SUNMatDestroy(b->matrix);
  N_VDestroy(b->state);
  N_VDestroy(b->tolerance);
  N_VDestroy(b->look);
  SUNContext_Free(&b->context);
}

int bdf_march(probe *p, double tolerance) {
  bdf b;
  fault f;
  double start = 0;
  bdf_open(&b, p, tolerance);
  p->next = 0;
  p->steps = 0;
  p->balance = NAN;
  int bad = march_start(p->the_case, &p->stepper, &f) != STATUS_OK;
  memcpy(N_VGetArrayPointer(b.state), p->stepper.state, (size_t)p->mesh.nodes * sizeof(double));
  for (int i = 0; i < p->the_case->stages.count && !bad; i++) {
    bad = march_stage(&b, i, start);
    start += p->the_case->stages.items[i].lasts;
  }
  bdf_close(&b);
  return bad ? -1 : 0;
}
