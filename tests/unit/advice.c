/* advice: every warning that is known before a case runs, once provoked and once not. The tube
   blank below is the quiet case from which each test departs. */
#include "figure.h"
#include "limit.h"
#include "physics.h"
#include "shape.h"
#include "solve.h"

#include <criterion/criterion.h>
#include <math.h>
#include <string.h>

enum { HEAT_UP, TRANSFER, QUENCH, STAGES };
enum { INNER, OUTER };

static const piece steel_conductivity = {.from = 0, .to = 1e4, .poly = {30}};
static const piece steel_density = {.from = 0, .to = 1e4, .poly = {7850}};
static const piece steel_specific_heat = {.from = 0, .to = 1e4, .poly = {600}};

/* A case with all that it points to, so that a test may change any of it. */
typedef struct bench {
  heat_case c;
  material material;
  layer layer;
  stage stages[STAGES];
  condition_node condition;
  figure figure;
  log_facts log;
  warning warnings[LIMIT_WARNINGS];
  int count;
} bench;

static double kelvin(double celsius) {
  return celsius + ZERO_CELSIUS;
}

static series constant(double value) {
  return (series){.kind = SERIES_CONSTANT, .value = value};
}

static face_condition furnace(double celsius) {
  return (face_condition){.kind = FACE_EXCHANGE,
                          .furnace = true,
                          .has_convection = true,
                          .has_radiation = true,
                          .h = {.over_time = constant(20)},
                          .medium = constant(kelvin(celsius)),
                          .emissivity = 0.8,
                          .view_factor = 1,
                          .surroundings = constant(kelvin(celsius))};
}

static face_condition air(double celsius) {
  face_condition f = furnace(celsius);
  f.furnace = false;
  f.h.over_time = constant(12);
  return f;
}

static face_condition convection(double h, double celsius) {
  return (face_condition){.kind = FACE_EXCHANGE,
                          .has_convection = true,
                          .h = {.over_time = constant(h)},
                          .medium = constant(kelvin(celsius))};
}

static const face_condition insulated = {.kind = FACE_INSULATED};

static void both_faces(stage *g, face_condition f) {
  g->faces.count = 2;
  g->faces.condition[INNER] = g->faces.condition[OUTER] = f;
}

/* A solid bar, 120 mm, austenite: heated to 850 degC in a furnace at 880, 20 s through air, oil for
 * 15 min. */
static void lay_out(bench *b) {
  *b = (bench){0};
  b->material = (material){.name = "austenite",
                           .conductivity = {1, &steel_conductivity},
                           .density = {1, &steel_density},
                           .specific_heat = {1, &steel_specific_heat},
                           .valid_to = 1500,
                           .max_service = NAN,
                           .traits = MATERIAL_METAL};
  b->layer = (layer){.name = "layer_1", .thickness = 0.06, .start = NAN};
  heat_case *c = &b->c;
  c->part.shape = shape_named("cylinder");
  c->part.material = -1;
  c->part.sizes[0] = 0.12;
  c->part.sizes[1] = 0;
  c->part.sizes[2] = c->part.sizes[3] = NAN;
  c->part.layers.count = 1;
  c->part.layers.items = &b->layer;
  c->materials.count = 1;
  c->materials.items = &b->material;
  c->start = (start){.kind = START_UNIFORM, .temperature = kelvin(25)};
  c->stages.count = STAGES;
  c->stages.items = b->stages;
  b->stages[HEAT_UP] = (stage){.name = "heat_up", .end = STAGE_UNTIL, .time_limit = 43200};
  b->condition = (condition_node){.kind = UNTIL_RISES_TO,
                                  .of = {.place = {.kind = PLACE_COLDEST, .layer = -1}},
                                  .level = kelvin(850)};
  b->stages[HEAT_UP].until = (until){.count = 1, .nodes = &b->condition};
  both_faces(&b->stages[HEAT_UP], furnace(880));
  b->stages[TRANSFER] = (stage){.name = "transfer", .end = STAGE_LASTS, .lasts = 20};
  both_faces(&b->stages[TRANSFER], air(30));
  b->stages[QUENCH] = (stage){.name = "quench", .end = STAGE_LASTS, .lasts = 900};
  both_faces(&b->stages[QUENCH], convection(1200, 60));
}

static void make_hollow(bench *b) {
  b->c.part.sizes[1] = 0.04;
  b->layer.thickness = 0.04;
  for (int i = 0; i < STAGES; i++) b->stages[i].faces.condition[INNER] = insulated;
}

/* How many warnings stand at a place and say something. */
static int advised(bench *b, const char *at, const char *says) {
  b->count = case_advice(&b->c, b->warnings, 0);
  int found = 0;
  for (int i = 0; i < b->count; i++)
    found += !strcmp(b->warnings[i].at, at) && strstr(b->warnings[i].is, says);
  return found;
}

static void expect(bench *b, const char *at, const char *says) {
  cr_expect_eq(advised(b, at, says), 1, "nothing at %s says \"%s\"", at, says);
  cr_expect_eq(b->count, 1, "%d warnings, the first: %s %s", b->count, b->warnings[0].at,
               b->warnings[0].is);
}

static void expect_quiet(bench *b) {
  b->count = case_advice(&b->c, b->warnings, 0);
  cr_expect_eq(b->count, 0, "%s %s", b->warnings[0].at, b->warnings[0].is);
}

Test(advice, a_sound_case_draws_none) {
  bench b;
  lay_out(&b);
  expect_quiet(&b);
}

Test(advice, appends_and_stops_at_the_limit) {
  bench b;
  lay_out(&b);
  b.stages[HEAT_UP].faces.condition[OUTER].assumed = true;
  b.c.part.sizes[2] = 0.1;
  b.warnings[0] = (warning){.at = "/first", .is = "was there"};
  cr_expect_eq(case_advice(&b.c, b.warnings, 1), 3);
  cr_expect_str_eq(b.warnings[0].at, "/first");
  cr_expect_eq(case_advice(&b.c, b.warnings, LIMIT_WARNINGS - 1), LIMIT_WARNINGS);
  cr_expect_eq(case_advice(&b.c, b.warnings, LIMIT_WARNINGS), LIMIT_WARNINGS);
}

/* ---- materials ---- */

Test(advice, heating_curve_in_a_quench_offers_austenite) {
  bench b;
  lay_out(&b);
  b.material.traits |= MATERIAL_HEATING_ONLY;
  expect(&b, "/part/layers/0/material", "austenite");
  cr_expect(strstr(b.warnings[0].is, "\"transfer\""), "%s", b.warnings[0].is);
}

Test(advice, heating_curve_of_the_parts_own_material_is_pointed_at) {
  bench b;
  lay_out(&b);
  b.material.traits |= MATERIAL_HEATING_ONLY;
  b.c.part.material = 0;
  expect(&b, "/part/material", "austenite");
  b.c.part.material = -1;
  expect(&b, "/part/layers/0/material", "austenite");
}

Test(advice, heating_curve_is_fine_while_heating_and_below_the_transformation) {
  bench b;
  lay_out(&b);
  b.material.traits |= MATERIAL_HEATING_ONLY;
  b.c.stages.count = 1;
  expect_quiet(&b);
  lay_out(&b);
  b.material.traits |= MATERIAL_HEATING_ONLY;
  b.condition.level = kelvin(600);
  both_faces(&b.stages[HEAT_UP], furnace(620));
  expect_quiet(&b);
}

Test(advice, heating_curve_in_a_fire_on_one_side_is_fine) {
  bench b;
  lay_out(&b);
  b.material.traits |= MATERIAL_HEATING_ONLY;
  make_hollow(&b);
  b.c.stages.count = 1;
  b.stages[HEAT_UP].end = STAGE_LASTS;
  b.stages[HEAT_UP].lasts = 3600;
  b.stages[HEAT_UP].faces.condition[OUTER] = furnace(950);
  b.stages[HEAT_UP].faces.condition[INNER] = convection(9, 20);
  cr_expect_eq(advised(&b, "/part/layers/0/material", "austenite"), 0);
}

Test(advice, heating_curve_cooled_in_the_furnace_counts_too) {
  static const double t[] = {0, 3600, 36000}, y[] = {25 + 273.15, 860 + 273.15, 200 + 273.15};
  bench b;
  lay_out(&b);
  b.material.traits |= MATERIAL_HEATING_ONLY;
  b.c.stages.count = 1;
  b.stages[HEAT_UP].end = STAGE_LASTS;
  b.stages[HEAT_UP].lasts = 36000;
  face_condition f = furnace(860);
  f.medium = f.surroundings = (series){.kind = SERIES_TABLE, .table = {3, t, y}};
  both_faces(&b.stages[HEAT_UP], f);
  expect(&b, "/part/layers/0/material", "austenite");
}

Test(advice, a_hot_start_that_cools_is_a_quench_as_well) {
  bench b;
  lay_out(&b);
  b.material.traits |= MATERIAL_HEATING_ONLY;
  b.c.start.temperature = kelvin(860);
  b.c.stages.count = 1;
  b.c.stages.items = &b.stages[QUENCH];
  expect(&b, "/part/layers/0/material", "\"quench\"");
  b.c.start.temperature = kelvin(500);
  expect_quiet(&b);
}

Test(advice, a_liquid_layer_is_more_than_conduction) {
  bench b;
  lay_out(&b);
  b.material.traits = MATERIAL_LIQUID;
  expect(&b, "/part/layers/0/material", "liquid");
  b.material.traits = MATERIAL_MELTS;
  expect_quiet(&b);
}

/* ---- the part ---- */

Test(advice, a_long_cylinder_shorter_than_two_diameters_has_ends) {
  bench b;
  lay_out(&b);
  b.c.part.sizes[2] = 0.2;
  expect(&b, "/part/length", "two diameters");
  b.c.part.sizes[2] = 0.24;
  expect_quiet(&b);
}

Test(advice, a_bore_that_sees_surroundings_sees_itself) {
  bench b;
  lay_out(&b);
  make_hollow(&b);
  expect_quiet(&b);
  b.stages[TRANSFER].faces.condition[INNER] = air(20);
  expect(&b, "/stages/1/faces/inner", "most of what it sees is itself");
  b.stages[TRANSFER].faces.condition[INNER] = b.stages[TRANSFER].faces.condition[OUTER];
  expect(&b, "/stages/1/faces", "most of what it sees is itself");
  b.stages[TRANSFER].faces.condition[INNER] = convection(5, 30);
  cr_expect_eq(advised(&b, "/stages/1/faces", "itself"), 0);
}

Test(advice, a_bore_of_a_furnace_is_not_said_to_see_surroundings) {
  bench b;
  lay_out(&b);
  make_hollow(&b);
  b.stages[HEAT_UP].faces.condition[INNER] = furnace(870);
  expect_quiet(&b);
}

Test(advice, a_bore_narrower_than_half_its_length_is_hardly_reached) {
  bench b;
  lay_out(&b);
  make_hollow(&b);
  b.stages[HEAT_UP].faces.condition[INNER] = furnace(880);
  b.c.part.sizes[2] = 0.6;
  expect(&b, "/part/bore", "narrower than half of its length");
  b.stages[HEAT_UP].faces.condition[INNER] = insulated;
  expect_quiet(&b);
  b.stages[HEAT_UP].faces.condition[INNER] = furnace(880);
  b.c.part.sizes[1] = 0.3;
  b.c.part.sizes[0] = 0.38;
  b.layer.thickness = 0.04;
  b.c.part.sizes[2] = 0.58;
  cr_expect_eq(advised(&b, "/part/bore", "narrower"), 0);
}

/* ---- faces ---- */

Test(advice, a_face_that_nobody_names_is_insulated_and_said_so) {
  bench b;
  lay_out(&b);
  make_hollow(&b);
  for (int i = 0; i < STAGES; i++) b.stages[i].faces.condition[INNER].assumed = true;
  expect(&b, "/stages/0/faces",
         "face \"inner\" is not named in stages \"heat_up\", \"transfer\", \"quench\"");
  for (int i = 0; i < STAGES; i++) b.stages[i].faces.condition[INNER].assumed = i == QUENCH;
  expect(&b, "/stages/2/faces", "in stage \"quench\"");
}

Test(advice, a_solid_bar_has_no_inner_face_to_name) {
  bench b;
  lay_out(&b);
  for (int i = 0; i < STAGES; i++) {
    b.stages[i].faces.condition[INNER] = insulated;
    b.stages[i].faces.condition[INNER].assumed = true;
  }
  expect_quiet(&b);
}

Test(advice, a_stage_without_any_exchange_is_meant_so) {
  bench b;
  lay_out(&b);
  make_hollow(&b);
  both_faces(&b.stages[TRANSFER], insulated);
  b.stages[TRANSFER].faces.condition[INNER].assumed =
      b.stages[TRANSFER].faces.condition[OUTER].assumed = true;
  expect_quiet(&b);
}

Test(advice, convection_of_a_gas_above_500_degC_wants_radiation) {
  bench b;
  lay_out(&b);
  both_faces(&b.stages[HEAT_UP], convection(40, 880));
  expect(&b, "/stages/0/faces", "no radiation in stage \"heat_up\"");
}

Test(advice, hot_metal_in_air_wants_radiation_too) {
  bench b;
  lay_out(&b);
  both_faces(&b.stages[TRANSFER], convection(12, 30));
  expect(&b, "/stages/1/faces", "no radiation in stage \"transfer\"");
}

Test(advice, below_500_degC_or_in_a_liquid_no_radiation_is_missed) {
  bench b;
  lay_out(&b);
  both_faces(&b.stages[HEAT_UP], convection(40, 450));
  b.condition.level = kelvin(420);
  both_faces(&b.stages[TRANSFER], convection(12, 30));
  expect_quiet(&b);
  lay_out(&b);
  both_faces(&b.stages[HEAT_UP], convection(400, 880)); /* salt bath */
  expect_quiet(&b);
}

Test(advice, after_the_quench_the_part_is_cold_and_may_be_tempered_by_air) {
  bench b;
  lay_out(&b);
  b.stages[HEAT_UP] = b.stages[QUENCH];
  b.stages[HEAT_UP].name = "first_quench";
  b.c.start.temperature = kelvin(860);
  b.stages[TRANSFER] = (stage){.name = "temper", .end = STAGE_LASTS, .lasts = 7200};
  both_faces(&b.stages[TRANSFER], convection(40, 180));
  b.c.stages.count = 2;
  expect_quiet(&b);
  b.stages[HEAT_UP].lasts = 5;
  expect(&b, "/stages/1/faces", "no radiation");
}

/* ---- times and targets ---- */

Test(advice, a_target_within_10_K_of_the_furnace_is_uncertain) {
  bench b;
  lay_out(&b);
  b.condition.level = kelvin(871);
  expect(&b, "/stages/0/until", "within 10 K");
  b.condition.level = kelvin(869);
  expect_quiet(&b);
}

Test(advice, a_band_around_the_furnace_ends_where_the_band_begins) {
  bench b;
  lay_out(&b);
  b.condition.kind = UNTIL_WITHIN;
  b.condition.level = kelvin(880);
  b.condition.band = 5;
  expect(&b, "/stages/0/until", "within 10 K");
  b.condition.band = 15;
  expect_quiet(&b);
}

Test(advice, a_difference_of_the_section_is_no_such_target) {
  bench b;
  lay_out(&b);
  b.condition.of.place.kind = PLACE_SECTION_DIFFERENCE;
  b.condition.level = kelvin(875);
  expect_quiet(&b);
}

Test(advice, a_target_just_above_the_bath_is_uncertain) {
  bench b;
  lay_out(&b);
  b.condition.kind = UNTIL_FALLS_TO;
  b.condition.level = kelvin(65);
  b.stages[QUENCH].end = STAGE_UNTIL;
  b.stages[QUENCH].until = b.stages[HEAT_UP].until;
  b.stages[QUENCH].time_limit = 3600;
  b.stages[HEAT_UP].end = STAGE_LASTS;
  b.stages[HEAT_UP].lasts = 7200;
  expect(&b, "/stages/2/until", "within 10 K");
  b.condition.level = kelvin(80);
  expect_quiet(&b);
}

Test(advice, a_figure_time_to_has_such_a_target_too) {
  bench b;
  lay_out(&b);
  b.figure = (figure){.name = "hot",
                      .kind = figure_kind_named("time_to"),
                      .rises_to = kelvin(875),
                      .falls_to = NAN,
                      .of = {.place = {.kind = PLACE_CENTER, .layer = -1}}};
  b.c.figures.count = 1;
  b.c.figures.items = &b.figure;
  expect(&b, "/figures/0/rises_to", "within 10 K");
  b.figure.rises_to = kelvin(840);
  expect_quiet(&b);
}

Test(advice, a_bath_after_a_furnace_wants_a_transfer_stage) {
  bench b;
  lay_out(&b);
  b.stages[TRANSFER] = b.stages[QUENCH];
  b.c.stages.count = 2;
  expect(&b, "/stages/1", "no transfer stage");
  b.stages[TRANSFER].faces.condition[OUTER].h.over_time = constant(60); /* a fan, not a bath */
  b.stages[TRANSFER].faces.condition[OUTER].has_radiation = true;
  b.stages[TRANSFER].faces.condition[OUTER].surroundings = constant(kelvin(30));
  b.stages[TRANSFER].faces.condition[INNER] = b.stages[TRANSFER].faces.condition[OUTER];
  expect_quiet(&b);
}

Test(advice, a_bath_given_by_surface_temperature_is_a_bath) {
  static const double t[] = {333, 1133}, h[] = {350, 450};
  bench b;
  lay_out(&b);
  face_condition oil = convection(0, 60);
  oil.h = (coefficient){.by_surface_temperature = true, .over_temperature = {2, t, h}};
  b.stages[TRANSFER] = b.stages[QUENCH];
  both_faces(&b.stages[TRANSFER], oil);
  b.c.stages.count = 2;
  expect(&b, "/stages/1", "no transfer stage");
}

/* ---- logs ---- */

static const double log_time[] = {0, 3600}, log_value[] = {300, 1150};

static void read_log(bench *b) {
  lay_out(b);
  b->stages[HEAT_UP].end = STAGE_LASTS;
  b->stages[HEAT_UP].lasts = 3600;
  face_condition f = furnace(880);
  f.medium = f.surroundings = (series){.kind = SERIES_TABLE,
                                       .from_case_start = true,
                                       .table = {2, log_time, log_value},
                                       .log = "F3/zone_1"};
  both_faces(&b->stages[HEAT_UP], f);
  b->log = (log_facts){.name = "F3",
                       .first = 0,
                       .last = 3600,
                       .widest_gap = 60,
                       .gap_at = 0,
                       .rows = 61,
                       .dated = true,
                       .has_offset = true};
  b->c.logs.count = 1;
  b->c.logs.items = &b->log;
}

Test(advice, a_whole_log_draws_none) {
  bench b;
  read_log(&b);
  expect_quiet(&b);
}

Test(advice, a_log_that_ends_early_is_held_and_said_so) {
  bench b;
  read_log(&b);
  b.log.last = 3000;
  expect(&b, "/logs/F3", "ends 600 s before");
  b.stages[HEAT_UP].end = STAGE_UNTIL;
  b.stages[HEAT_UP].time_limit = 7200;
  b.condition.level = kelvin(800);
  expect(&b, "/logs/F3", "may run until 7200 s");
}

Test(advice, a_log_that_begins_late_is_held_and_said_so) {
  bench b;
  read_log(&b);
  b.log.first = 120;
  expect(&b, "/logs/F3", "begins 120 s after");
}

Test(advice, a_gap_in_a_log_is_a_straight_line) {
  bench b;
  read_log(&b);
  b.log.widest_gap = 900;
  b.log.gap_at = 1200;
  expect(&b, "/logs/F3", "gap of 900 s, from 1200 s on");
}

Test(advice, a_log_without_offset_may_be_shifted) {
  bench b;
  read_log(&b);
  b.log.has_offset = false;
  expect(&b, "/logs/F3", "started_at");
}

Test(advice, a_log_that_nobody_reads_is_left_alone) {
  bench b;
  read_log(&b);
  both_faces(&b.stages[HEAT_UP], furnace(880));
  b.log.has_offset = false;
  b.log.last = 10;
  expect_quiet(&b);
}

Test(advice, a_logs_name_is_escaped_in_its_pointer) {
  bench b;
  read_log(&b);
  b.log.name = "F3/a~b";
  b.stages[HEAT_UP].faces.condition[OUTER].medium.log = "F3/a~b/zone_1";
  b.log.has_offset = false;
  expect(&b, "/logs/F3~1a~0b", "started_at");
}
