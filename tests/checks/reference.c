/* All cases of reference_cases.json that one-dimensional shapes and figures can express, each row
   within its own tolerance; what must wait is listed. With names as arguments ("R34") only these.
 */
#include "adapt.h"
#include "rows.h"
#include "run_case.h"
#include "special.h"
#include "tally.h"
#include <math.h>
#include <stdio.h>
#include <string.h>

static const struct {
  const char *id;
  special_case *check;
} special[] = {
    {"R59", check_periodic_wall}, {"R61", check_library_properties}, {"R63", check_gas_curve},
    {"R79", check_lethality},     {"R81", check_tempering},          {"R83", check_maturity},
    {"R90", check_flux_forward},
};

/* Rows that are no question to the service. */
static const struct {
  const char *id, *quantity, *why;
} left_out[] = {
    {"R26", NULL, "a thin rod cooled along its side: a body that the service does not have"},
    {"R34", "lambda",
     "the root of the exact solution itself, a number of no body; what follows from it is checked"},
};

/* Numerical errors asked for where half of the tightest tolerance is not right. */
static const struct {
  const char *id;
  double kelvin;
} stated_errors[] = {
    {"R34", 0.25}, /* a sharp front is first order in the number of cells */
};

static const char *left_out_because(const char *id, const char *quantity) {
  for (size_t i = 0; i < sizeof left_out / sizeof *left_out; i++)
    if (!strcmp(left_out[i].id, id) &&
        (!left_out[i].quantity || !strcmp(left_out[i].quantity, quantity)))
      return left_out[i].why;
  return NULL;
}

/* The numerical error that a case is run at: half of the tightest tolerance of its temperatures. */
static double error_asked(const json_t *neutral) {
  const char *id = json_string_value(json_object_get(neutral, "id"));
  for (size_t i = 0; i < sizeof stated_errors / sizeof *stated_errors; i++)
    if (!strcmp(stated_errors[i].id, id)) return stated_errors[i].kelvin;
  double least = 1;
  size_t i;
  const json_t *row;
  json_array_foreach(json_object_get(neutral, "expect"), i, row) {
    const char *unit = json_string_value(json_object_get(row, "unit"));
    if (!strcmp(unit, "degC") || !strcmp(unit, "K"))
      least = fmin(least, neutral_number(row, "tol", 1));
  }
  return fmax(0.001, least / 2);
}

static void drop_empty(json_t *object, const char *name) {
  if (json_array_size(json_object_get(object, name)) == 0) json_object_del(object, name);
}

/* Lists that nothing was added to are left out, as a caller would. */
static void tidy_document(json_t *document) {
  json_t *output = json_object_get(document, "output"),
         *history = json_object_get(output, "history");
  if (json_array_size(json_object_get(history, "of")) == 0 ||
      json_array_size(json_object_get(history, "at")) == 0)
    json_object_del(output, "history");
  if (json_object_size(output) == 0) json_object_del(document, "output");
  drop_empty(document, "points");
  drop_empty(document, "figures");
}

static void describe(char *text, size_t size, const char *id, const json_t *row) {
  static const char *const where[] = {"x", "r", "t", "t_in_period", "T"};
  size_t used = (size_t)snprintf(text, size, "%s %s", id,
                                 json_string_value(json_object_get(row, "quantity")));
  for (size_t i = 0; i < sizeof where / sizeof *where && used < size; i++)
    if (json_object_get(row, where[i]))
      used += (size_t)snprintf(text + used, size - used, " %s=%g", where[i],
                               neutral_number(row, where[i], NAN));
  if (json_object_get(row, "side") && used < size)
    snprintf(text + used, size - used, " %s", json_string_value(json_object_get(row, "side")));
}

static void check_rows(const adapted *a, const json_t *result, const char *id) {
  char what[160], source[600];
  size_t i;
  const json_t *row;
  json_array_foreach(json_object_get(a->neutral, "expect"), i, row) {
    const char *quantity = json_string_value(json_object_get(row, "quantity"));
    const char *own = json_string_value(json_object_get(row, "source"));
    const char *why = left_out_because(id, quantity);
    const row_kind *kind = row_kind_named(quantity);
    describe(what, sizeof what, id, row);
    snprintf(source, sizeof source, "%s%s%s", own ? own : "", own ? ": " : "",
             json_string_value(json_object_get(a->neutral, "source")));
    if (why)
      check_waits(what, 1, why);
    else
      check_near(what, kind ? kind->answer(a, result, row, (int)i) : NAN,
                 neutral_number(row, "value", NAN), neutral_number(row, "tol", 0),
                 json_string_value(json_object_get(row, "unit")), source);
  }
}

static void ask_rows(adapted *a, const char *id) {
  size_t i;
  const json_t *row;
  json_array_foreach(json_object_get(a->neutral, "expect"), i, row) {
    const char *quantity = json_string_value(json_object_get(row, "quantity"));
    const row_kind *kind = row_kind_named(quantity);
    if (kind && !left_out_because(id, quantity)) kind->ask(a, row, (int)i);
  }
}

static void check_case(const json_t *neutral) {
  const char *id = json_string_value(json_object_get(neutral, "id"));
  int rows = (int)json_array_size(json_object_get(neutral, "expect"));
  adapted a;
  char why[600] = "";
  const char *cannot = left_out_because(id, "");
  if (!cannot)
    cannot = adapt(&a, neutral);
  else
    a.document = NULL;
  if (cannot) {
    check_waits(id, rows, cannot);
    adapt_free(&a);
    return;
  }
  ask_rows(&a, id);
  tidy_document(a.document);
  json_object_set_new(a.document, "numerical_error", json_real(error_asked(neutral)));
  json_t *result = run_case(a.document, why, sizeof why);
  if (!result) {
    char *text = json_dumps(a.document, 0);
    printf("      %s: %s\n      %s\n", id, why, text);
    free(text);
  }
  check_rows(&a, result, id);
  json_decref(result);
  adapt_free(&a);
}

static void check_by_id(const json_t *neutral) {
  const char *id = json_string_value(json_object_get(neutral, "id"));
  for (size_t i = 0; i < sizeof special / sizeof *special; i++)
    if (!strcmp(special[i].id, id)) {
      special[i].check(neutral);
      return;
    }
  check_case(neutral);
}

static bool wanted(const char *id, int count, char **names) {
  for (int i = 1; i < count; i++)
    if (!strcmp(names[i], id)) return true;
  return count == 1;
}

int main(int count, char **names) {
  json_error_t error;
  json_t *file = json_load_file(SOURCE_DIR "/tests/checks/reference_cases.json", 0, &error);
  const json_t *neutral;
  size_t i;
  if (!check_true("reference_cases.json can be read", file != NULL, "%s",
                  file ? "yes" : error.text))
    return tally_finish();
  json_array_foreach(json_object_get(file, "cases"), i,
                     neutral) if (wanted(json_string_value(json_object_get(neutral, "id")), count,
                                         names)) check_by_id(neutral);
  json_decref(file);
  return tally_finish();
}
