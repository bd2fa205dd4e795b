/* observe.h: probes, history, fields and figures of one run, fed by the march; and the record by
   which two runs are compared. An observer never changes a temperature. */
#ifndef CORESOAK_OBSERVE_H
#define CORESOAK_OBSERVE_H

#include "march.h"
#include "until.h"

enum { MOST_RECORD_ROWS = 200 }; /* of one stage; thinned beyond */

/* The shortest time after a jump that counts in the comparison of two runs, as a share of the time
   to the next jump; history and fields count at their own instants however early. */
#define EARLIEST_SHARE 2e-3

typedef struct record_row {
  int stage;
  double t;     /* s from the stage's start */
  double since; /* the same from the last jump */
  int interval; /* between jumps */
} record_row;

/* Temperatures of every place used, at the ends of steps. */
typedef struct record {
  int rows, capacity, columns, stage_first;
  int stride, skipped; /* of the stage under way: every stride-th step is kept */
  record_row *row;
  double *value; /* [rows x columns] */
  int intervals;
  double *interval; /* lengths, s */
} record;

typedef struct observer {
  const heat_case *the_case;
  const mesh *mesh;
  watch watch;
  march_watch march; /* to hand to the march */
  until_watch until;
  until_end ends[LIMIT_STAGES];

  figure_run *run; /* of each figure */
  double stage_end[LIMIT_STAGES];

  int stage;
  double start;   /* of the stage */
  bool fresh;     /* no step of the stage yet */
  double jump_at; /* stage time of the last jump */

  double *due; /* times of history rows, rising; and how many are done */
  int dues, due_next;
  history history;
  int history_capacity;
  double *history_time, *history_value;
  int column_trace[LIMIT_COLUMNS];

  double *field_due;
  int field_dues, field_due_next;
  field *field;
  int fields, field_capacity;

  int places; /* traces that are temperatures of places used: the record's columns */
  int place_trace[MOST_TRACES];
  record record;
  const struct observer *reference; /* compare with this run; NULL: be one */
  int reference_row;
  double difference;       /* K: largest at the record's rows */
  double *last_difference; /* [stages x places], K: at the last row of each stage */
  double
      end_difference[LIMIT_STAGES]; /* of the deciding leaf's value at the time of the reference */

  double least_state[LIMIT_LAYERS],
      most_state[LIMIT_LAYERS];                   /* H, by layer of the mesh, at ends of steps */
  double least[LIMIT_LAYERS], most[LIMIT_LAYERS]; /* K, of the same: set by observe_ranges */
  bool beyond_table; /* a state left the range of the property tables */
  bool started_true[LIMIT_STAGES];
  bool out_of_memory;
} observer;

/* Gets ready for one run. Memory from `memory`. With `reference`, the finished observer of the fine
   run, the two are compared along the way. BEYOND_LIMIT when the outputs asked for are too many. */
MUST_USE status observe_init(observer *o, const heat_case *c, const mesh *m,
                             const observer *reference, arena *memory, fault *f);

/* Largest difference (K) between two finished runs: record, history columns that are places,
   fields. `fine` has a node between any two of `coarse`. */
double observe_difference(const observer *fine, const observer *coarse);

/* The run is over: fills least, most and beyond_table. */
void observe_ranges(observer *o);

/* Longest the case can take, s. */
double case_longest(const heat_case *c);

#endif
