/* advice.h: what the parts of the advice share: the case seen stage by stage, as far as it is known
 * before it runs. */
#ifndef CORESOAK_ADVICE_H
#define CORESOAK_ADVICE_H

#include "limit.h"
#include "solve.h"

/* One stage. A sink is the temperature that a face is taken towards: furnace, medium, surroundings,
   or the temperature prescribed. */
typedef struct stage_view {
  double earliest, latest;           /* s from the start of the case when it may begin */
  double horizon;                    /* s that it may last; 0 for a steady stage */
  bool exchanges;                    /* a face exchanges heat */
  double coldest_sink, hottest_sink; /* K over the stage and all faces; NAN if none */
  double hottest_sink_at_end;        /* K, over all faces; NAN if none */
  double hottest_before;             /* K: how hot the part may be when the stage begins */
} stage_view;

typedef struct advice {
  const heat_case *c;
  warning *list;
  int count;
  stage_view stage[LIMIT_STAGES];
} advice;

/* Stages that share one piece of advice. */
typedef struct stage_marks {
  int count, first;
  bool in[LIMIT_STAGES];
} stage_marks;

void stage_mark(stage_marks *m, int index);

/* Fills stage[] from the case. */
void advice_look(advice *a);

/* Whether the part has that face: a solid round has no inner one. */
bool advice_has_face(const heat_case *c, int face);

/* Least and most of a series over a stage; false if the series is absent. */
bool advice_range(const advice *a, const series *s, int index, double *least, double *most);

/* Appends a warning; beyond LIMIT_WARNINGS it is dropped. */
void advise(advice *a, const char *at, const char *is, ...) __attribute__((format(printf, 3, 4)));

/* `stage "a"` or `stages "a", "b" and 3 more`. */
void advice_name_stages(const advice *a, const stage_marks *m, char *text, size_t size);

/* Largest heat transfer coefficient that is still a gas's: air, furnace gas, fans; liquids begin
   above it. Common practice: free air 5-15, fans 20-80, oil and water several hundred to thousands
   W/(m2.K). */
#define GAS_COEFFICIENT 100.0

/* Advice on times and targets: until conditions, figures of kind time_to, logs, transfer
 * (advice_schedule.c). */
void advise_on_targets(advice *a);
void advise_on_logs(advice *a);
void advise_on_transfer(advice *a);

#endif
