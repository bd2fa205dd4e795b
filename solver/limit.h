/* limit.h: every number that a caller can grow, with its largest value. The reader refuses what is
   beyond (422 with the limit and the value); the solver relies on it. */
#ifndef CORESOAK_LIMITS_H
#define CORESOAK_LIMITS_H

enum {
  LIMIT_LAYERS = 32,
  LIMIT_STAGES = 64,
  LIMIT_POINTS = 64,
  LIMIT_FIGURES = 64,
  LIMIT_MATERIALS = 64, /* defined in one case */
  LIMIT_NAMED_SERIES = 256,
  LIMIT_CONDITIONS = 32,        /* leaves and groups in one `until` */
  LIMIT_TABLE_ROWS = 20000,     /* of a series, a property, a log */
  LIMIT_ZONES = 200,            /* of a line */
  LIMIT_LATENT_HEATS = 8,       /* of one material */
  LIMIT_PIECES = 512,           /* of one property */
  LIMIT_OUTPUTS = 20000,        /* instants of history; of fields together with their nodes below */
  LIMIT_COLUMNS = 256,          /* columns of a history */
  LIMIT_FIELD_VALUES = 2000000, /* instants x nodes */
  LIMIT_HISTORY_VALUES = 2000000,
  LIMIT_NODES = 4096,   /* of a one-dimensional section */
  LIMIT_STEPS = 400000, /* accepted and rejected, of one run */
  LIMIT_WARNINGS = 64,
  LIMIT_NAME = 64,  /* bytes of a name */
  LIMIT_TEXT = 400, /* bytes of a title or label */
  LIMIT_LABELS = 32
};

#define LIMIT_DURATION         3.2e9 /* s, of a stage: a century */
#define FINEST_NUMERICAL_ERROR 1e-3  /* K */
#define USUAL_NUMERICAL_ERROR  0.5   /* K */

#endif
