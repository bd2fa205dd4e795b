/* write_result: a result built by hand, rendered and read back by a general JSON library; every
 * allocation fails once. */
#include "write_result.h"

#include "figure.h"
#include "kind.h"
#include "shape.h"

#include <criterion/criterion.h>
#include <jansson.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* The writers' memory comes from this file's buffer, whose nth growth can be made to fail. */
static int growths_left = -1;

static void *failing_realloc(void *old, size_t size) {
  if (growths_left == 0) return NULL;
  if (growths_left > 0) growths_left--;
  return realloc(old, size);
}

#define realloc failing_realloc
#include "../../server/buffer.c"
#undef realloc

/* A bored cylinder through two stages: the first ends by a condition, the second by its length. */
static stage stages[] = {{.name = "heat_up", .end = STAGE_UNTIL}, {.name = "soak"}};
static point points[] = {{.name = "mid"}, {.name = "skin, \"top\""}};
static requirement at_least_30_min = {.at_least = 1800, .at_most = NAN, .which = -1};
static requirement at_most_25_k = {.at_least = NAN, .at_most = 25};
static figure_kind kind_time = {.name = "time_at_temperature"};
static figure_kind kind_peak = {.name = "peak", .takes_place = true};
static figure_kind kind_time_to = {.name = "time_to"};
static figure_kind kind_stress = {.name = "stress"};
static figure figures[] = {
    {.name = "soaked", .kind = &kind_time, .require = &at_least_30_min},
    {.name = "even",
     .kind = &kind_peak,
     .of = {.place = {PLACE_SECTION_DIFFERENCE, 0, -1}},
     .require = &at_most_25_k},
    {.name = "never", .kind = &kind_time_to},
    {.name = "hottest", .kind = &kind_peak, .of = {.place = {PLACE_POINT, 0, -1}}},
    {.name = "pull", .kind = &kind_stress}};
static material materials[] = {{.name = "steel_a", .source = "a handbook", .revision = "2"},
                               {.name = "mine"}};
static named_series series_rows[] = {{.name = "zone", .dimension = DIMENSION_TEMPERATURE}};
static column columns_rows[] = {
    {.kind = COLUMN_PLACE, .name = "mid", .place = {PLACE_POINT, 0, -1}},
    {.kind = COLUMN_PLACE, .name = "skin, \"top\"", .place = {PLACE_POINT, 1, -1}},
    {.kind = COLUMN_PLACE,
     .name = "section_difference",
     .place = {PLACE_SECTION_DIFFERENCE, 0, -1}},
    {.kind = COLUMN_HEAT_FLOW, .name = "heat_flow:outer", .index = 1},
    {.kind = COLUMN_SERIES, .name = "zone", .index = 0}};
static heat_case the_case;

static figure_result found[5];
static stage_result ends[] = {{0, 12855.4321, 4.02, ENDED_UNTIL},
                              {12855.4321, 14955.4321, 0, ENDED_LASTS}};
static const double row_time[] = {0, 60, 12855.4321};
static double row_value[] = {298.15, 298.15,    0,  0,         298.15, /* row 0 */
                             298.55, 300.05678, 10, 25000.123, 302.35, /* row 1 */
                             1125.5, 1126.25,   1,  -30,       1133.15};
static const double positions[] = {0.02, 0.06};
static const double field_values[] = {1125.5, 1126.2512345};
static field fields[] = {{12855.4321, 2, positions, field_values}};
static warning run_warnings[] = {{"/stages/0/until", "a \"quoted\" word"}};
static warning read_warnings[] = {{"/part/diameter", "bare length"}};
static heat_result the_result;
static document the_document;

static figure_result figure_of(double value, dimension d, double error) {
  figure_result f = {.dimension = d, .error = error, .margin = NAN};
  f.value = (figure_value){.found = true, .value = value, .when = NAN, .where = NAN};
  return f;
}

static void build_figures(void) {
  found[0] = figure_of(2500.123456, DIMENSION_TIME, 3.1);
  found[0].required = found[0].met = true;
  found[0].margin = 700.123456;
  found[1] = figure_of(24.98, DIMENSION_DIFFERENCE, 0.1);
  found[1].value.when = 1234.5678;
  found[1].required = found[1].met = found[1].close = true;
  found[1].margin = 0.02;
  found[2] = figure_of(NAN, DIMENSION_TIME, NAN);
  found[2].value.found = false;
  found[2].value.why = "mid stayed below 900 degC";
  found[3] = figure_of(1126.25, DIMENSION_TEMPERATURE, 0.12);
  found[4] = figure_of(2.5e8, DIMENSION_STRESS, INFINITY);
  found[4].value.parts = 2;
  found[4].value.part[0].name = "tension";
  found[4].value.part[0].value = 2.5e8;
  found[4].value.part[0].when = 15.04;
  found[4].value.part[0].where = 0.02;
  found[4].value.part[1].name = "compression";
  found[4].value.part[1].value = -4e8;
  found[4].value.part[1].when = NAN;
  found[4].value.part[1].where = NAN;
}

static void build(void) {
  the_case = (heat_case){.numerical_error = 0.5};
  the_case.part.shape = shape_named("cylinder");
  the_case.part.sizes[0] = 0.12;
  the_case.part.sizes[1] = 0.04;
  the_case.materials.count = 2;
  the_case.materials.items = materials;
  the_case.stages.count = 2;
  the_case.stages.items = stages;
  the_case.points.count = 2;
  the_case.points.items = points;
  the_case.figures.count = 5;
  the_case.figures.items = figures;
  the_case.series.count = 1;
  the_case.series.items = series_rows;
  the_case.output.history.times = OUTPUT_EVERY;
  the_case.output.history.of.count = 5;
  the_case.output.history.of.items = columns_rows;
  the_case.output.fields.times = OUTPUT_AT;
  build_figures();
  the_result = (heat_result){
      .verdict = VERDICT_CLOSE, .figures = 5, .figure = found, .stages = 2, .stage = ends};
  the_result.history.rows = 3;
  the_result.history.columns = 5;
  the_result.history.time = row_time;
  the_result.history.value = row_value;
  the_result.fields = 1;
  the_result.field = fields;
  the_result.energy = (energy_balance){2, {1.2e7, 3.5e7}, 4.7e7, 0, 1e-12};
  the_result.numerics = (numerics){0.123456, 61, 412, 7, 2, "a method"};
  the_result.warnings = 1;
  the_result.warning = run_warnings;
  the_document = (document){
      .question = &the_case, .title = "Tube blank", .warnings = read_warnings, .warning_count = 1};
  memset(the_document.hash, 'a', 64);
  growths_left = -1;
}

static json_t *rendered(void) {
  buffer b;
  buffer_init(&b, 0);
  write_result_json(&the_document, &the_result, &b);
  cr_assert_not(b.failed);
  json_error_t e;
  json_t *result = json_loadb(b.bytes, b.length, JSON_REJECT_DUPLICATES, &e);
  cr_assert_not_null(result, "%s at %d:%d\n%s", e.text, e.line, e.column, b.bytes);
  buffer_free(&b);
  return result;
}

/* A value by its path: names and indices parted by slashes. */
static json_t *at(json_t *from, const char *path) {
  char name[64];
  while (from && *path) {
    size_t length = strcspn(path, "/");
    snprintf(name, sizeof name, "%.*s", (int)length, path);
    from = json_is_array(from) ? json_array_get(from, (size_t)atoi(name))
                               : json_object_get(from, name);
    path += length + (path[length] == '/');
  }
  return from;
}

static void number_is(json_t *result, const char *path, double expected) {
  cr_assert(json_is_number(at(result, path)), "%s is no number", path);
  cr_assert_float_eq(json_number_value(at(result, path)), expected, 1e-12 * fmax(1, fabs(expected)),
                     "%s is %.15g, not %.15g", path, json_number_value(at(result, path)), expected);
}

static void text_is(json_t *result, const char *path, const char *expected) {
  cr_assert(json_is_string(at(result, path)), "%s is no text", path);
  cr_assert_str_eq(json_string_value(at(result, path)), expected, "%s", path);
}

TestSuite(write_result, .init = build);

Test(write_result, figures_carry_value_unit_error_and_judgement) {
  json_t *r = rendered();
  text_is(r, "verdict", "close");
  number_is(r, "figures/soaked/value", 2500.12); /* 3.1 s: to 0.01 s */
  text_is(r, "figures/soaked/unit", "s");
  number_is(r, "figures/soaked/error", 3.1);
  cr_assert(json_is_true(at(r, "figures/soaked/met")));
  number_is(r, "figures/soaked/margin", 700.123);
  cr_assert_null(at(r, "figures/soaked/close"));
  cr_assert_null(at(r, "figures/soaked/at_time"));
  cr_assert(json_is_true(at(r, "figures/even/close")));
  number_is(r, "figures/even/at_time", 1234.57);
  text_is(r, "figures/even/unit", "K");
  cr_assert_null(at(r, "figures/hottest/met"));
  json_decref(r);
}

Test(write_result, a_figure_without_a_value_says_why) {
  json_t *r = rendered();
  cr_assert(json_is_null(at(r, "figures/never/value")));
  cr_assert(json_is_null(at(r, "figures/never/error")));
  text_is(r, "figures/never/why", "mid stayed below 900 degC");
  text_is(r, "figures/never/unit", "s");
  json_decref(r);
}

Test(write_result, a_required_figure_without_a_value_has_no_margin) {
  found[2].required = true;
  json_t *r = rendered();
  cr_assert(json_is_false(at(r, "figures/never/met")));
  cr_assert(json_is_null(at(r, "figures/never/margin")));
  json_decref(r);
}

Test(write_result, stress_has_named_parts_and_its_caution) {
  json_t *r = rendered();
  number_is(r, "figures/pull/tension/value", 2.5e8);
  number_is(r, "figures/pull/tension/at", 0.02);
  number_is(r, "figures/pull/tension/time", 15.04);
  number_is(r, "figures/pull/compression/value", -4e8);
  cr_assert_null(at(r, "figures/pull/compression/at"));
  cr_assert(json_is_null(at(r, "figures/pull/error"))); /* could not be told */
  cr_assert_eq(json_array_size(at(r, "cautions")), 4);
  json_decref(r);
  the_result.figures = the_case.figures.count = 4;
  r = rendered();
  cr_assert_eq(json_array_size(at(r, "cautions")), 3);
  json_decref(r);
}

Test(write_result, stages_tell_how_they_ended_and_how_sure_that_is) {
  json_t *r = rendered();
  text_is(r, "stages/0/name", "heat_up");
  text_is(r, "stages/0/ended_by", "until");
  number_is(r, "stages/0/end", 12855.43); /* 4 s: to 0.01 s */
  number_is(r, "stages/0/end_error", 4.02);
  number_is(r, "stages/1/start", 12855.43);
  number_is(r, "stages/1/end", 14955.43); /* no surer than the stage before */
  text_is(r, "stages/1/ended_by", "lasts");
  cr_assert_null(at(r, "stages/1/end_error"));
  json_decref(r);
}

Test(write_result, history_is_sorted_into_points_places_heat_flow_and_series) {
  json_t *r = rendered();
  number_is(r, "history/time/1", 60);
  number_is(r, "history/time/2", 12855.43);
  number_is(r, "history/points/mid/0", 25);
  number_is(r, "history/points/mid/1", 25.4);
  number_is(r, "history/points/skin, \"top\"/1", 26.9068); /* six digits are finer than 0.001 K */
  number_is(r, "history/places/section_difference/1", 10);
  number_is(r, "history/heat_flow/outer/1", 25000.1);
  number_is(r, "history/series/zone/2", 860);
  cr_assert_eq(json_object_size(at(r, "history")), 5);
  json_decref(r);
}

Test(write_result, fields_name_the_coordinate_of_the_shape) {
  json_t *r = rendered();
  number_is(r, "fields/0/time", 12855.43);
  number_is(r, "fields/0/r/1", 0.06);
  number_is(r, "fields/0/temperature/1", 853.101);
  json_decref(r);
}

Test(write_result, what_was_not_asked_is_left_out) {
  the_case.output.history.times = the_case.output.fields.times = OUTPUT_NONE;
  the_result.verdict = VERDICT_NONE;
  the_result.figures = 0;
  json_t *r = rendered();
  cr_assert(json_is_null(at(r, "verdict")));
  cr_assert_null(at(r, "history"));
  cr_assert_null(at(r, "fields"));
  cr_assert_eq(json_object_size(at(r, "figures")), 0);
  json_decref(r);
}

Test(write_result, energy_names_the_faces_that_the_part_has) {
  json_t *r = rendered();
  number_is(r, "energy/absorbed/inner", 1.2e7);
  number_is(r, "energy/absorbed/outer", 3.5e7);
  number_is(r, "energy/balance_error", 1e-12);
  json_decref(r);
  the_case.part.sizes[1] = 0;
  r = rendered();
  cr_assert_null(at(r, "energy/absorbed/inner"));
  number_is(r, "energy/absorbed/outer", 3.5e7);
  json_decref(r);
}

Test(write_result, record_warnings_and_numerics) {
  json_t *r = rendered();
  cr_assert_eq(strlen(json_string_value(at(r, "record/case"))), strlen("sha256:") + 64);
  text_is(r, "record/materials/steel_a", "a handbook (revision 2)");
  text_is(r, "record/materials/mine", "defined in the case");
  cr_assert(json_is_null(at(r, "record/recipe")));
  text_is(r, "warnings/0/at", "/part/diameter");
  text_is(r, "warnings/1/is", "a \"quoted\" word");
  number_is(r, "numerics/error_estimate", 0.124); /* rounded up */
  number_is(r, "numerics/unknowns", 61);
  text_is(r, "units/temperature", "degC");
  text_is(r, "units/energy", "J/m");
  json_decref(r);
}

/* 10 K are 18 degF and 25 degC are 77 degF (definition of the degree Fahrenheit). */
Test(write_result, differences_convert_without_offset) {
  cr_assert_eq(output_units_set(&the_document.units, "temperature", "degF"), 0);
  json_t *r = rendered();
  number_is(r, "history/points/mid/0", 77);
  number_is(r, "history/places/section_difference/1", 18);
  number_is(r, "figures/even/value", 44.964);
  number_is(r, "figures/even/margin", 0.036);
  number_is(r, "figures/even/error", 0.18);
  number_is(r, "figures/hottest/value", 1567.58);
  number_is(r, "figures/hottest/error", 0.216);
  number_is(r, "numerics/error_estimate", 0.223);
  text_is(r, "figures/hottest/unit", "degF");
  text_is(r, "units/temperature", "degF");
  json_decref(r);
}

Test(write_result, a_number_that_is_not_finite_fails_the_whole) {
  row_value[7] = NAN;
  buffer b;
  buffer_init(&b, 0);
  write_result_json(&the_document, &the_result, &b);
  cr_assert(b.failed);
  buffer_clear(&b);
  write_result_csv(&the_document, &the_result, &b);
  cr_assert(b.failed);
  buffer_free(&b);
}

/* Quotes doubled, fields with a comma quoted, lines ended by CR LF (RFC 4180, section 2). */
Test(write_result, history_as_csv) {
  buffer b;
  buffer_init(&b, 0);
  write_result_csv(&the_document, &the_result, &b);
  cr_assert_not(b.failed);
  cr_assert_str_eq(b.bytes,
                   "time [s],mid [degC],\"skin, \"\"top\"\" [degC]\",section_difference [K],"
                   "heat_flow:outer [W/m],zone [degC]\r\n"
                   "0,25,25,0,0,25\r\n"
                   "60,25.4,26.9068,10,25000.1,29.2\r\n"
                   "12855.43,852.35,853.1,1,-30,860\r\n");
  buffer_free(&b);
}

static void contains(const char *text, const char *part) {
  cr_assert(strstr(text, part), "\"%s\" is not in\n%s", part, text);
}

Test(write_result, text_for_a_reader) {
  found[2].required = true;
  figures[2].require = &at_least_30_min;
  buffer b;
  buffer_init(&b, 0);
  write_result_text(&the_document, &the_result, &b);
  cr_assert_not(b.failed);
  contains(b.bytes, "Tube blank\n");
  contains(b.bytes, "0:00:00 to 3:34:15, condition reached ± 4.02 s");
  contains(b.bytes, "41 min 40 s ± 3.1 s (time at temperature); required at least 30 min: met with "
                    "11 min 40 s to spare");
  contains(b.bytes, "24.98 K ± 0.1 K at 0:20:35 (peak, section difference); required at most 25 K: "
                    "met with 0.02 K to spare, which is within");
  contains(b.bytes,
           "no value, mid stayed below 900 degC (time to); required at least 30 min: NOT MET\n");
  contains(b.bytes, "853.1 degC ± 0.12 K (peak, mid)");
  contains(b.bytes, "tension 250 MPa at 0:00:15, compression -400 MPa");
  contains(b.bytes, "Verdict   CLOSE");
  contains(b.bytes, "/part/diameter: bare length");
  contains(b.bytes, "verify with thermocouples");
  buffer_free(&b);
}

static void render_all(buffer *b) {
  write_result_json(&the_document, &the_result, b);
  write_result_csv(&the_document, &the_result, b);
  write_result_text(&the_document, &the_result, b);
}

Test(write_result, every_allocation_fails_once) {
  int n = 0;
  bool failed = true;
  for (; failed; n++) {
    buffer b;
    buffer_init(&b, 0);
    growths_left = n;
    render_all(&b);
    failed = b.failed;
    if (!failed) cr_assert_gt(growths_left, -1);
    buffer_free(&b);
    cr_assert_lt(n, 1000);
  }
  cr_assert_gt(n, 10, "only %d allocations were seen", n);
}

Test(write_result, same_result_same_bytes) {
  buffer first, second;
  buffer_init(&first, 0);
  buffer_init(&second, 0);
  render_all(&first);
  render_all(&second);
  cr_assert_eq(first.length, second.length);
  cr_assert_eq(memcmp(first.bytes, second.bytes, first.length), 0);
  buffer_free(&first);
  buffer_free(&second);
}
