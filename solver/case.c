/* case.c: the members of every object of a case, as data. */
#include "case.h"

#include "limit.h"
#include "shape.h"

#include <math.h>
#include <stdlib.h>

#define ROW(type, name_, kind_, dimension_, member_, flags_, least_, most_, fallback_, of_,        \
            about_)                                                                                \
  {                                                                                                \
    .name = name_, .kind = kind_, .dimension = DIMENSION_##dimension_,                             \
    .offset = offsetof(type, member_), .flags = flags_, .least = least_, .most = most_,            \
    .fallback = fallback_, .of = of_, .about = about_                                              \
  }
#define MEMBER(type, name_, kind_, member_, flags_, of_, about_)                                   \
  ROW(type, name_, kind_, NUMBER, member_, flags_, -INFINITY, INFINITY, NAN, of_, about_)
#define TYPE(name_, type, rows, about_)                                                            \
  {                                                                                                \
    .name = name_, .about = about_, .size = sizeof(type), .parameters = rows,                      \
    .count = COUNT_OF(rows)                                                                        \
  }

enum { REQUIRED = PARAMETER_REQUIRED, ABOVE = PARAMETER_ABOVE, PLANNED = PARAMETER_PLANNED };

/* ---- materials ---- */

static const parameter latent_heat_rows[] = {
    ROW(latent_heat, "heat", VALUE_QUANTITY, ENTHALPY, heat, REQUIRED | ABOVE, 0, INFINITY, NAN,
        NULL, "Heat taken up in heating and released in cooling"),
    ROW(latent_heat, "from", VALUE_QUANTITY, TEMPERATURE, from, REQUIRED, 0, INFINITY, NAN, NULL,
        "Temperature at which the release begins in heating"),
    ROW(latent_heat, "to", VALUE_QUANTITY, TEMPERATURE, to, REQUIRED, 0, INFINITY, NAN, NULL,
        "Temperature at which it ends; may equal from: a sharp front"),
};
const object_type latent_heat_type = TYPE("latent_heat", latent_heat, latent_heat_rows,
                                          "Heat released evenly between two temperatures");

const char *const material_trait_names[] = {"metal", "heating_only", "liquid", "melts", NULL};

/* Offsets count from material.valid_from. */
static const parameter valid_range_rows[] = {
    {.name = "from",
     .kind = VALUE_QUANTITY,
     .dimension = DIMENSION_TEMPERATURE,
     .offset = 0,
     .flags = REQUIRED,
     .least = 0,
     .most = INFINITY,
     .fallback = NAN,
     .about = "Lowest temperature for which the source gives values"},
    {.name = "to",
     .kind = VALUE_QUANTITY,
     .dimension = DIMENSION_TEMPERATURE,
     .offset = offsetof(material, valid_to) - offsetof(material, valid_from),
     .flags = REQUIRED,
     .least = 0,
     .most = INFINITY,
     .fallback = NAN,
     .about = "Highest temperature for which it does"},
};
const object_type valid_range_type = {.name = "valid_range",
                                      .about = "Where a material's values are valid",
                                      .size = 2 * sizeof(double),
                                      .parameters = valid_range_rows,
                                      .count = COUNT_OF(valid_range_rows)};

static const parameter material_rows[] = {
    MEMBER(material, "title", VALUE_TEXT, title, 0, NULL, "One line that says what it is"),
    MEMBER(material, "source", VALUE_TEXT, source, 0, NULL,
           "Where the numbers come from; stands in the record of every result"),
    MEMBER(material, "revision", VALUE_TEXT, revision, 0, NULL, "Of the numbers"),
    MEMBER(material, "note", VALUE_TEXT, note, 0, NULL, "What whoever uses it must know"),
    MEMBER(material, "valid", VALUE_OBJECT, valid_from, 0, &valid_range_type,
           "Where the values are valid: the result warns beyond; the range of the tables unless "
           "given"),
    MEMBER(material, "traits", VALUE_CHOICES, traits, 0, material_trait_names,
           "What advice goes by: metal; heating_only (its specific heat holds the heat of "
           "transformation as on heating); liquid; melts (liquid above its last latent heat)"),
    ROW(material, "conductivity", VALUE_CURVE, CONDUCTIVITY, conductivity, REQUIRED | ABOVE, 0,
        INFINITY, NAN, NULL, "Thermal conductivity"),
    ROW(material, "density", VALUE_CURVE, DENSITY, density, REQUIRED | ABOVE, 0, INFINITY, NAN,
        NULL, "Density"),
    ROW(material, "specific_heat", VALUE_CURVE, SPECIFIC_HEAT, specific_heat, ABOVE, 0, INFINITY,
        NAN, NULL, "Specific heat; or give enthalpy in its place"),
    MEMBER(material, "latent_heat", VALUE_LIST, latent, 0, &latent_heat_type,
           "Heats released over ranges of temperature, beside specific_heat"),
    ROW(material, "max_service", VALUE_QUANTITY, TEMPERATURE, max_service, 0, 0, INFINITY, NAN,
        NULL, "Highest service temperature: the result warns above it"),
};
const object_type material_type =
    TYPE("material", material, material_rows, "A material of the case's own");

/* ---- the part ---- */

static const parameter layer_rows[] = {
    MEMBER(layer, "name", VALUE_NAME, name, 0, NULL, "Name, layer_1, layer_2, ... unless given"),
    MEMBER(layer, "material", VALUE_MATERIAL, material, REQUIRED, NULL, "Material by name"),
    ROW(layer, "thickness", VALUE_QUANTITY, LENGTH, thickness, REQUIRED | ABOVE, 0, 1e4, NAN, NULL,
        "Thickness"),
    ROW(layer, "contact", VALUE_CONTACT, RESISTANCE, contact, 0, 0, INFINITY, 0, NULL,
        "Contact resistance to the next layer, or {\"conductance\": ...}"),
    ROW(layer, "heat_generation", VALUE_OPTIONAL_SERIES, GENERATION, heat_generation, 0, -INFINITY,
        INFINITY, NAN, NULL, "Heat generated in the layer"),
    ROW(layer, "start", VALUE_QUANTITY, TEMPERATURE, start, 0, 0, INFINITY, NAN, NULL,
        "Temperature at the start, in place of the case's"),
};
const object_type layer_type =
    TYPE("layer", layer, layer_rows, "One layer, from front or bore outwards");

static const parameter part_rows[] = {
    MEMBER(part, "shape", VALUE_TEXT, shape, REQUIRED, NULL, "Shape of the part"),
    MEMBER(part, "material", VALUE_MATERIAL, material, 0, NULL,
           "Material by name, of a part without layers"),
    MEMBER(part, "layers", VALUE_LIST, layers, 0, &layer_type,
           "Layers from front to back, or from bore to outside, in place of material and thickness "
           "or diameter"),
    ROW(part, "heat_generation", VALUE_OPTIONAL_SERIES, GENERATION, heat_generation, 0, -INFINITY,
        INFINITY, NAN, NULL, "Heat generated in a part without layers"),
    MEMBER(part, "regions", VALUE_LIST, layers, PLANNED, NULL, "Regions of other materials"),
    MEMBER(part, "contacts", VALUE_LIST, layers, PLANNED, NULL,
           "Contact resistances between regions"),
};
const object_type part_type =
    TYPE("part", part, part_rows, "The part: one shape with its sizes and materials");

/* ---- places ---- */

static const parameter point_rows[] = {
    MEMBER(point, "name", VALUE_NAME, name, REQUIRED, NULL,
           "Name, unique among points, faces, layers and figures"),
    MEMBER(point, "at", VALUE_LOCATION, at, REQUIRED, NULL,
           "\"center\", \"mid_wall\", {\"face\": F, \"depth\": d} or a coordinate"),
};
const object_type point_type = TYPE("point", point, point_rows, "A named point of the section");

/* ---- schedule ---- */

static const parameter until_rows[] = {
    MEMBER(until_form, "of", VALUE_TARGET, of, 0, NULL,
           "Place or accumulating figure that is watched"),
    MEMBER(until_form, "in", VALUE_TEXT, of, 0, NULL,
           "Layer that coldest, hottest, mean or section_difference look at"),
    ROW(until_form, "rises_to", VALUE_LEVEL, ANY, rises_to, 0, -INFINITY, INFINITY, NAN, NULL,
        "True at or above this value"),
    ROW(until_form, "falls_to", VALUE_LEVEL, ANY, falls_to, 0, -INFINITY, INFINITY, NAN, NULL,
        "True at or below this value"),
    ROW(until_form, "within", VALUE_QUANTITY, DIFFERENCE, within, ABOVE, 0, INFINITY, NAN, NULL,
        "Band on both sides of of_set"),
    ROW(until_form, "of_set", VALUE_LEVEL, ANY, of_set, 0, -INFINITY, INFINITY, NAN, NULL,
        "Value that the band lies around"),
    MEMBER(until_form, "all", VALUE_UNTIL, of, 0, NULL, "Conditions that must all be true"),
    MEMBER(until_form, "any", VALUE_UNTIL, of, 0, NULL, "Conditions of which one must be true"),
    ROW(until_form, "held_for", VALUE_QUANTITY, TIME, held_for, 0, 0, LIMIT_DURATION, 0, NULL,
        "Time for which the whole condition must have been true without a break"),
};
const object_type until_type =
    TYPE("until", until_form, until_rows, "A condition that ends a stage");

static const parameter stage_rows[] = {
    MEMBER(stage, "name", VALUE_NAME, name, REQUIRED, NULL, "Name, unique among the stages"),
    MEMBER(stage, "faces", VALUE_FACES, faces, 0, NULL, "Condition of each face, or of all"),
    ROW(stage, "lasts", VALUE_QUANTITY, TIME, lasts, ABOVE, 0, LIMIT_DURATION, NAN, NULL,
        "How long the stage lasts"),
    MEMBER(stage, "until", VALUE_UNTIL, until, 0, &until_type,
           "Condition that ends the stage; needs time_limit"),
    ROW(stage, "time_limit", VALUE_QUANTITY, TIME, time_limit, ABOVE, 0, LIMIT_DURATION, NAN, NULL,
        "Longest time, with until: the stage ends then with a warning"),
    MEMBER(stage, "steady", VALUE_FLAG, steady, 0, NULL,
           "true: the steady state, as the last stage"),
};
const object_type stage_type = TYPE("stage", stage, stage_rows, "One stage of the schedule");

static const parameter start_rows[] = {
    ROW(start, "profile", VALUE_TABLE, LENGTH, profile, 0, -INFINITY, INFINITY, NAN, NULL,
        "Temperature against depth from front or bore; a jump is two points at one depth"),
    MEMBER(start, "steady", VALUE_OBJECT, faces, 0, NULL,
           "{\"faces\": ...}: the steady state of these conditions"),
};
const object_type start_type = {.name = "start",
                                .about = "The temperatures at the start",
                                .size = sizeof(start),
                                .parameters = start_rows,
                                .count = COUNT_OF(start_rows),
                                .one_of = true};

/* ---- figures ---- */

static const parameter requirement_rows[] = {
    ROW(requirement, "at_least", VALUE_LEVEL, ANY, at_least, 0, -INFINITY, INFINITY, NAN, NULL,
        "Smallest value that is good"),
    ROW(requirement, "at_most", VALUE_LEVEL, ANY, at_most, 0, -INFINITY, INFINITY, NAN, NULL,
        "Largest value that is good"),
    MEMBER(requirement, "which", VALUE_TEXT, which, 0, NULL,
           "Component of a stress: tension, compression, or one at a place"),
};
const object_type requirement_type =
    TYPE("requirement", requirement, requirement_rows, "What a figure must be");

static const parameter figure_rows[] = {
    MEMBER(figure, "name", VALUE_NAME, name, REQUIRED, NULL,
           "Name, unique among points, faces, layers and figures"),
    MEMBER(figure, "kind", VALUE_TEXT, kind, REQUIRED, NULL, "Kind of figure"),
    MEMBER(figure, "of", VALUE_TARGET, of, 0, NULL,
           "Place that is watched, or for time_to an accumulating figure"),
    MEMBER(figure, "in", VALUE_TEXT, of, 0, NULL,
           "Layer that coldest, hottest, mean or section_difference look at"),
    MEMBER(figure, "during", VALUE_STAGE_SET, during, 0, NULL,
           "Stages that count; all unless given"),
    MEMBER(figure, "require", VALUE_OPTIONAL, require, 0, &requirement_type,
           "What the value must be"),
};
const object_type figure_type =
    TYPE("figure", figure, figure_rows, "A number that a decision rests on");

/* ---- output ---- */

static const parameter history_rows[] = {
    ROW(output_request, "every", VALUE_QUANTITY, TIME, every, ABOVE, 0, INFINITY, NAN, NULL,
        "Time between rows"),
    MEMBER(output_request, "at", VALUE_INSTANTS, at, 0, NULL, "Times, or \"end:STAGE\""),
    MEMBER(output_request, "of", VALUE_PLACES, of, 0, NULL,
           "Places, \"heat_flow:FACE\" and named series; all points unless given"),
};
const object_type history_type = TYPE("history", output_request, history_rows,
                                      "Values against time; ends of stages are always added");

static const parameter fields_rows[] = {
    ROW(output_request, "every", VALUE_QUANTITY, TIME, every, ABOVE, 0, INFINITY, NAN, NULL,
        "Time between fields"),
    MEMBER(output_request, "at", VALUE_INSTANTS, at, 0, NULL, "Times, or \"end:STAGE\""),
};
const object_type fields_type =
    TYPE("fields", output_request, fields_rows, "The whole section at some instants");

static const parameter output_rows[] = {
    MEMBER(output, "history", VALUE_OBJECT, history, 0, &history_type, "Values against time"),
    MEMBER(output, "fields", VALUE_OBJECT, fields, 0, &fields_type,
           "The whole section at some instants"),
    MEMBER(output, "units", VALUE_TEXT, history, 0, NULL,
           "\"si\", \"us\", or units for temperature, length and time"),
};
const object_type output_type =
    TYPE("output", output, output_rows, "What is to be told beside the figures");

/* ---- the case ---- */

static const parameter case_rows[] = {
    MEMBER(heat_case, "title", VALUE_TEXT, memory, 0, NULL,
           "What the case is about; not part of the case's hash"),
    MEMBER(heat_case, "labels", VALUE_OBJECT, memory, 0, NULL,
           "Names and texts to find the job by; not part of the hash"),
    MEMBER(heat_case, "inputs", VALUE_OBJECT, memory, 0, NULL,
           "Named quantities and material names, used as {\"input\": NAME}"),
    MEMBER(heat_case, "series", VALUE_OBJECT, series, 0, NULL,
           "Named time series, used as {\"series\": NAME}"),
    MEMBER(heat_case, "logs", VALUE_OBJECT, logs, 0, NULL,
           "Furnace logs, used as {\"log\": \"NAME/COLUMN\"}"),
    MEMBER(heat_case, "materials", VALUE_OBJECT, materials, 0, &material_type,
           "Materials of the case's own, by name"),
    MEMBER(heat_case, "part", VALUE_OBJECT, part, REQUIRED, &part_type, "The part"),
    MEMBER(heat_case, "start", VALUE_START, start, 0, &start_type, "The temperatures at the start"),
    MEMBER(heat_case, "stages", VALUE_LIST, stages, REQUIRED, &stage_type, "The schedule"),
    MEMBER(heat_case, "points", VALUE_LIST, points, 0, &point_type, "Named points of the section"),
    MEMBER(heat_case, "figures", VALUE_LIST, figures, 0, &figure_type,
           "The numbers that decisions rest on"),
    MEMBER(heat_case, "output", VALUE_OBJECT, output, 0, &output_type,
           "What is to be told beside the figures"),
    ROW(heat_case, "numerical_error", VALUE_QUANTITY, DIFFERENCE, numerical_error, 0,
        FINEST_NUMERICAL_ERROR, 1000, USUAL_NUMERICAL_ERROR, NULL,
        "Largest error that the arithmetic may make in the temperature of any place that is used"),
};
const object_type case_type =
    TYPE("case", heat_case, case_rows, "One part taken through one schedule");

void heat_case_free(heat_case *c) {
  if (!c) return;
  arena memory = c->memory; /* the case may stand in its own arena */
  arena_free(&memory);
}
