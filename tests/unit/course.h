/* course.h: a course of temperature given by a formula, shown to a figure as the march would show
 * its steps. */
#ifndef CORESOAK_TESTS_COURSE_H
#define CORESOAK_TESTS_COURSE_H

#include "figure.h"
#include "physics.h"
#include "shape.h"

#include <criterion/criterion.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { MOST_COURSE_STAGES = 8 };

typedef struct course {
  heat_case c;
  stage stages[MOST_COURSE_STAGES];
  double end[MOST_COURSE_STAGES]; /* s from the start of the case */
  int steps[MOST_COURSE_STAGES];  /* of equal length */
  figure figures[2];
  figure_run run[2];
  double (*value)(const struct course *k, int stage, double t); /* K, by which stage sees it */
  const double *rows; /* t, degC, t, degC, ...: for course_rows */
  int count;
  double stage_end[MOST_COURSE_STAGES];
  int asked; /* how often a value was asked for beside the samples */
} course;

#define UNSET_FIGURE                                                                               \
  {                                                                                                \
    .rises_to = NAN, .falls_to = NAN, .above = NAN, .below = NAN, .from = NAN, .to = NAN,          \
    .over = NAN, .face = -1, .constant = 20                                                        \
  }

static inline double celsius(double t) {
  return t + ZERO_CELSIUS;
}

/* Straight between rows. */
static inline double course_rows(const course *k, int stage_index, double t) {
  (void)stage_index;
  int i = 0;
  while (i + 2 < k->count && t > k->rows[2 * (i + 1)]) i++;
  const double *a = k->rows + 2 * i, *b = a + 2;
  if (t <= a[0]) return celsius(a[1]);
  if (t >= b[0]) return celsius(b[1]);
  return celsius(a[1] + (t - a[0]) / (b[0] - a[0]) * (b[1] - a[1]));
}

static inline void course_stage(course *k, double end, int steps) {
  int i = k->c.stages.count++;
  k->c.stages.items = k->stages;
  k->stages[i] = (stage){.name = "s", .end = STAGE_LASTS};
  k->end[i] = end;
  k->steps[i] = steps;
}

static inline void course_steady(course *k) {
  course_stage(k, k->c.stages.count ? k->end[k->c.stages.count - 1] : 0, 0);
  k->stages[k->c.stages.count - 1].end = STAGE_STEADY;
}

static inline figure *course_figure(course *k, const char *kind) {
  int i = k->c.figures.count++;
  k->c.figures.items = k->figures;
  k->c.part.shape = shape_named("plate");
  k->figures[i] = (figure)UNSET_FIGURE;
  k->figures[i].name = kind;
  k->figures[i].kind = figure_kind_named(kind);
  cr_assert_not_null(k->figures[i].kind);
  return &k->figures[i];
}

static inline double course_value(const segment *s, int trace, double t) {
  course *k = s->self;
  (void)trace;
  cr_assert(t >= s->t0 && t <= s->t1, "asked for %g outside of [%g, %g]", t, s->t0, s->t1);
  k->asked++;
  return k->value(k, s->stage, t);
}

static inline double course_sample(const segment *s, int trace, int j) {
  course *k = s->self;
  (void)trace;
  double t = j == SEGMENT_SAMPLES - 1 ? s->t1 : s->t0 + j * (s->t1 - s->t0) / (SEGMENT_SAMPLES - 1);
  return k->value(k, s->stage, t);
}

static inline void course_show(course *k, double t0, double t1, int stage_index, bool begins,
                               bool ends) {
  segment s = {.t0 = t0,
               .t1 = t1,
               .stage = stage_index,
               .stage_begins = begins,
               .stage_ends = ends,
               .value = course_value,
               .sample = course_sample,
               .self = k};
  /* a figure that watches another sees the step before that one has taken it in */
  for (int pass = 0; pass < 2; pass++)
    for (int i = 0; i < k->c.figures.count; i++)
      if (k->figures[i].of.is_figure == (pass == 0)) k->figures[i].kind->observe(&k->run[i], &s);
}

static inline void course_begin(course *k) {
  for (int i = 0; i < k->c.figures.count; i++) {
    k->run[i] =
        (figure_run){.figure = &k->figures[i], .the_case = &k->c, .stage_end = k->stage_end};
    k->run[i].self = calloc(1, k->figures[i].kind->size);
    cr_assert_not_null(k->run[i].self);
    if (k->figures[i].of.is_figure) k->run[i].watched = &k->run[k->figures[i].of.figure];
    k->figures[i].kind->begin(&k->run[i]);
  }
}

/* Shows the whole course to the figures; the answer of figure `which`. */
static inline figure_value course_run(course *k, int which) {
  double start = 0;
  course_begin(k);
  for (int i = 0; i < k->c.stages.count; i++) {
    int n = k->steps[i];
    double width = k->end[i] - start;
    for (int j = 0; j < n; j++)
      course_show(k, start + j * width / n, j == n - 1 ? k->end[i] : start + (j + 1) * width / n, i,
                  j == 0, j == n - 1);
    if (n == 0) course_show(k, start, start, i, true, true);
    start = k->end[i];
  }
  figure_value v = {0};
  k->figures[which].kind->finish(&k->run[which], &v);
  for (int i = 0; i < k->c.figures.count; i++) free(k->run[i].self);
  return v;
}

#define course_of(formula)                                                                         \
  { .value = (formula) }
#define course_from(table)                                                                         \
  {                                                                                                \
    .value = course_rows, .rows = (const double *)(table),                                         \
    .count = (int)(sizeof(table) / sizeof((table)[0]))                                             \
  }

#define check_close(value, expected, within)                                                       \
  cr_expect(fabs((value) - (expected)) <= (within), "%s is %.12g, expected %.12g within %g",       \
            #value, (double)(value), (double)(expected), (double)(within))

#define check_missing(answer, text)                                                                \
  do {                                                                                             \
    figure_value missing = (answer);                                                               \
    cr_expect(!missing.found);                                                                     \
    cr_expect(isnan(missing.value));                                                               \
    cr_assert_not_null(missing.why);                                                               \
    cr_expect(strstr(missing.why, text), "why is \"%s\"", missing.why);                            \
  } while (0)

#endif
