/* case.h: what is asked. One part taken through one schedule, finished: every default filled in,
   every unit gone, every name resolved. SI and kelvin. All memory belongs to the case's arena. */
#ifndef CORESOAK_CASE_H
#define CORESOAK_CASE_H

#include "arena.h"
#include "face.h"
#include "parameter.h"
#include "property.h"
#include "series.h"

typedef struct shape shape;             /* shape.h */
typedef struct figure_kind figure_kind; /* figure.h */

enum { MOST_FACES = 6, MOST_SIZES = 4, MOST_COORDINATES = 3 };

/* ---- the part ---- */

typedef struct layer {
  const char *name;        /* "layer_1", ... if not given */
  int material;            /* index into heat_case.materials */
  double thickness;        /* m */
  double contact;          /* resistance to the next layer, m2.K/W; 0 for the last */
  series *heat_generation; /* W/m3; NULL if none; times from the start of the stage */
  double start;            /* K; NAN: the case's start */
} layer;

typedef struct part {
  const shape *shape;
  double sizes[MOST_SIZES]; /* in the order of the shape's row, m; NAN where not given */
  int material;             /* of a part without layers; the reader makes one layer of it */
  series *heat_generation;  /* likewise */
  LIST(layer) layers;       /* from front or bore outwards; at least one after reading */
} part;

/* ---- places ---- */

typedef enum place_kind {
  PLACE_POINT,
  PLACE_FACE,
  PLACE_COLDEST,
  PLACE_HOTTEST,
  PLACE_MEAN,
  PLACE_SECTION_DIFFERENCE,
  PLACE_CENTER,
  PLACE_MID_WALL
} place_kind;

typedef struct place {
  place_kind kind;
  int index; /* of the point or face */
  int layer; /* "in": the layer looked at; -1 the whole section */
} place;

/* What a condition or a figure watches: a place, or an accumulating figure of the case. */
typedef struct target {
  bool is_figure;
  int figure;
  place place;
} target;

/* A position in the section: coordinates from front, axis or corner; in 1-D only the first counts.
   `layer` says on which side of an interface. */
typedef struct location {
  double coordinate[MOST_COORDINATES]; /* m */
  int layer;
} location;

typedef struct point {
  const char *name;
  location at;
} point;

/* A time from the start of the case, or the end of a stage (just before a jump). */
typedef struct instant {
  double time; /* s; used if end_of_stage < 0 */
  int end_of_stage;
} instant;

/* Stages of a figure's `during`; NULL items: all stages. */
typedef struct stage_set {
  int count;
  const int *items;
} stage_set;

/* ---- schedule ---- */

typedef struct faces {
  int count; /* faces of the shape */
  face_condition condition[MOST_FACES];
} faces;

typedef enum start_kind { START_PER_LAYER, START_UNIFORM, START_PROFILE, START_STEADY } start_kind;

typedef struct start {
  start_kind kind;    /* PER_LAYER: every layer has its own (or the only stage is steady) */
  double temperature; /* START_UNIFORM, K */
  table profile;      /* START_PROFILE: depth from front or bore (m) -> K */
  faces faces; /* START_STEADY: conditions of the steady state, series at their value at t = 0 */
} start;

typedef enum until_kind {
  UNTIL_RISES_TO,
  UNTIL_FALLS_TO,
  UNTIL_WITHIN,
  UNTIL_ALL,
  UNTIL_ANY
} until_kind;

/* One node of a condition; groups list their children by index into until.nodes. */
typedef struct condition_node {
  until_kind kind;
  target of;
  double level; /* rises_to, falls_to, of_set: in the target's unit */
  double band;  /* UNTIL_WITHIN, K: |T - level| <= band */
  int first_child, children;
} condition_node;

typedef struct until {
  int count;                   /* 0: none */
  const condition_node *nodes; /* nodes[0] is the root */
  double held_for;             /* s without a break; 0: at once */
} until;

typedef enum stage_end { STAGE_LASTS, STAGE_UNTIL, STAGE_STEADY } stage_end;

typedef struct stage {
  const char *name;
  faces faces;
  stage_end end;
  double lasts;      /* STAGE_LASTS, s */
  until until;       /* STAGE_UNTIL */
  double time_limit; /* STAGE_UNTIL, s */
  bool steady;       /* as given; `end` is set from lasts, until, steady by the reader */
} stage;

/* ---- figures ---- */

typedef struct requirement {
  double at_least, at_most; /* in the figure's unit, SI and kelvin; NAN if absent */
  int which; /* stress only: index of the component (stress_part_named); 0 if not named */
} requirement;

enum figure_count { COUNT_TOTAL, COUNT_LONGEST };
enum figure_direction { DIRECTION_RISE, DIRECTION_FALL };

/* One figure; a kind uses the members that its row names, the others are unset (NAN, NULL). */
typedef struct figure {
  const char *name;
  const figure_kind *kind;
  target of;
  stage_set during;
  requirement *require;      /* NULL if none */
  double rises_to, falls_to; /* time_to */
  double above, below;       /* time_at_temperature, K */
  int count;                 /* enum figure_count */
  double from, to;           /* time_between, rate, K */
  instant *time;             /* at, heat_absorbed, heat_flow, stress; NULL: the end of the case */
  int direction;             /* rate; enum figure_direction */
  double over;               /* rate, s; NAN: 1 s falling, 60 s rising */
  int face;                  /* heat_absorbed, heat_flow; -1: all */
  double reference, z;       /* lethality: K, K; equivalent_age: reference K */
  double activation_energy;  /* J/mol */
  table rate;                /* accumulated: K -> 1/s */
  double constant;           /* tempering */
  double datum;              /* maturity, K */
  curve elastic_modulus, expansion; /* stress: Pa, 1/K against temperature */
  double poisson;
  location *at; /* stress; NULL: largest over the section */
} figure;

/* ---- what is to be told ---- */

typedef enum output_times { OUTPUT_NONE, OUTPUT_EVERY, OUTPUT_AT } output_times;

typedef enum column_kind { COLUMN_PLACE, COLUMN_HEAT_FLOW, COLUMN_SERIES } column_kind;

typedef struct column {
  column_kind kind;
  const char *name; /* as the caller wrote it: key in the result */
  place place;      /* COLUMN_PLACE */
  int index;        /* face of a heat flow, or named series */
} column;

typedef struct columns {
  int count;
  const column *items;
} columns;

typedef struct output_request {
  output_times times; /* set by the reader from `every` and `at` */
  double every;       /* s */
  LIST(instant) at;
  columns of; /* history only; default: all points */
} output_request;

typedef struct output {
  output_request history, fields;
} output;

/* A series of the case's own `series` object or a log's column, used or not. */
typedef struct named_series {
  const char *name;
  dimension dimension;
  series series;
} named_series;

/* A log as far as advice needs it. */
typedef struct log_facts {
  const char *name;
  double first, last, widest_gap, gap_at; /* s from the start of the case */
  int rows;
  bool dated;      /* RFC 3339 times */
  bool has_offset; /* started_at given, or the first row is time 0 */
} log_facts;

typedef struct heat_case {
  part part;
  LIST(material) materials; /* those that are used */
  start start;
  LIST(stage) stages;
  LIST(point) points;
  LIST(figure) figures;
  output output;
  LIST(named_series) series;
  LIST(log_facts) logs;
  double numerical_error; /* K */
  arena memory;
} heat_case;

/* Members of every object of a case, for the reader and the schema (case.c). `part` has those of
   its shape (shape.h) and these; a figure those of its kind (figure.h) and these. */
extern const char
    *const material_trait_names[]; /* in the order of the bits of enum material_traits */
extern const object_type valid_range_type, part_type, layer_type, material_type, latent_heat_type,
    stage_type, until_type, point_type, figure_type, requirement_type, output_type, history_type,
    fields_type, start_type, case_type;

/* The forms of one node of an `until` and of a start, before names are resolved. */
typedef struct until_form {
  target of;
  double rises_to, falls_to, within, of_set, held_for;
} until_form; /* `all` and `any` hold lists of the same and are read by hand */

/* Frees a case with all that it holds; NULL is fine. */
void heat_case_free(heat_case *c);

#endif
