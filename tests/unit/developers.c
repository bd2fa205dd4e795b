/* What DEVELOPERS.md and README.md say of the tree is so. */
#include "embedded.h"
#include "figure.h"
#include "kind.h"
#include "limit.h"
#include "options.h"
#include "shape.h"

#include <criterion/criterion.h>
#include <dirent.h>
#include <jansson.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

/* Text of a file of the tree, to be freed. */
static char *text_of(const char *path) {
  char full[512];
  snprintf(full, sizeof full, "%s/%s", SOURCE_DIR, path);
  FILE *file = fopen(full, "rb");
  cr_assert(file, "%s cannot be read", path);
  buffer b;
  char chunk[4096];
  size_t length;
  buffer_init(&b, 0);
  while ((length = fread(chunk, 1, sizeof chunk, file)) > 0) buffer_add(&b, chunk, length);
  fclose(file);
  cr_assert(!b.failed && b.bytes);
  return b.bytes;
}

/* Whether a text stands in a unit test other than this one. */
static bool is_in_a_unit_test(const char *text) {
  DIR *folder = opendir(SOURCE_DIR "/tests/unit");
  bool found = false;
  cr_assert_not_null(folder);
  for (struct dirent *entry; !found && (entry = readdir(folder));) {
    char path[300];
    if (entry->d_name[0] == '.' || strcmp(entry->d_name, "developers.c") == 0) continue;
    snprintf(path, sizeof path, "tests/unit/%s", entry->d_name);
    char *source = text_of(path);
    found = strstr(source, text) != NULL;
    free(source);
  }
  closedir(folder);
  return found;
}

/* Names between backticks that look like files of the tree lead to one. */
static int check_paths(const char *page) {
  static const char *const folders[] = {"solver/", "server/",   "tests/",
                                        "deploy/", "api-spec/", NULL};
  char *text = text_of(page), path[512];
  int checked = 0;
  for (char *at = strchr(text, '`'); at; at = strchr(at, '`')) {
    size_t ticks = strspn(at, "`");
    if (ticks > 1) { /* a fence */
      at += ticks;
      continue;
    }
    char *end = strchr(++at, '`');
    if (!end) break;
    size_t length = (size_t)(end - at);
    bool is_path = false;
    for (int i = 0; folders[i]; i++) is_path |= strncmp(at, folders[i], strlen(folders[i])) == 0;
    if (is_path && length < 200 && !memchr(at, ' ', length) && !memchr(at, '\n', length) &&
        !memmem(at, length, "NAME", 4)) {
      snprintf(path, sizeof path, "%s/%.*s", SOURCE_DIR, (int)length, at);
      cr_expect(access(path, F_OK) == 0, "%s names %.*s, which is not there", page, (int)length,
                at);
      checked++;
    }
    at = end + 1;
  }
  free(text);
  return checked;
}

Test(developers, the_files_that_the_pages_name_are_there) {
  cr_expect_gt(check_paths("DEVELOPERS.md"), 30);
  cr_expect_gt(check_paths("README.md"), 2);
}

Test(developers, every_figure_kind_is_tested_and_specified) {
  for (int i = 0; figure_kinds[i]; i++) {
    char quoted[80], schema[80];
    snprintf(quoted, sizeof quoted, "\"%s\"", figure_kinds[i]->name);
    snprintf(schema, sizeof schema, "\"figure_%s\":", figure_kinds[i]->name);
    cr_expect(is_in_a_unit_test(quoted), "no unit test names %s", quoted);
    cr_expect(strstr(embedded_specification.bytes, schema), "the specification lacks %s", schema);
  }
  cr_expect(!is_in_a_unit_test("\"figure_that_is_not\""));
}

Test(developers, every_shape_is_tested_and_specified_and_no_planned_one_is_a_row) {
  for (int i = 0; shapes[i]; i++) {
    char quoted[80], schema[80];
    snprintf(quoted, sizeof quoted, "\"%s\"", shapes[i]->name);
    snprintf(schema, sizeof schema, "\"part_%s\":", shapes[i]->name);
    cr_expect(is_in_a_unit_test(quoted), "no unit test names %s", quoted);
    cr_expect(strstr(embedded_specification.bytes, schema), "the specification lacks %s", schema);
  }
  for (int i = 0; shapes_planned[i]; i++) cr_expect(!shape_named(shapes_planned[i]));
}

Test(developers, every_job_kind_is_complete_and_specified) {
  for (int i = 0; job_kinds[i]; i++) {
    const job_kind *k = job_kinds[i];
    char path[80];
    snprintf(path, sizeof path, "\"/v1/%s\":", k->path);
    cr_expect(strstr(embedded_specification.bytes, path), "the specification lacks %s", path);
    cr_expect(k->read && k->plan && k->run && k->fold && k->write && k->verdict && k->cost &&
                  k->free_question && k->free_part && k->free_answer,
              "%s lacks a function", k->name);
  }
}

Test(developers, every_material_file_has_a_title_a_source_and_a_revision) {
  int count = 0;
  for (; embedded_materials[count].name; count++) {
    json_t *m =
        json_loadb(embedded_materials[count].bytes, embedded_materials[count].length, 0, NULL);
    cr_assert(m, "%s is not JSON", embedded_materials[count].name);
    const char *const members[] = {"title", "source", "revision"};
    for (int i = 0; i < 3; i++) {
      const char *text = json_string_value(json_object_get(m, members[i]));
      cr_expect(text && *text, "%s has no %s", embedded_materials[count].name, members[i]);
    }
    json_decref(m);
  }
  cr_expect_geq(count, 40);
}

Test(developers, readme_holds_the_table_of_flags) {
  buffer b;
  char *readme = text_of("README.md");
  buffer_init(&b, 0);
  options_table(&b);
  cr_assert(!b.failed);
  cr_expect(strstr(readme, b.bytes), "README.md must hold what `coresoak flags` prints:\n%s",
            b.bytes);
  buffer_free(&b);
  free(readme);
}

Test(developers, readme_names_every_shape_and_every_figure_kind) {
  char *readme = text_of("README.md"), quoted[80];
  for (int i = 0; shapes[i]; i++) {
    snprintf(quoted, sizeof quoted, "`%s`", shapes[i]->name);
    cr_expect(strstr(readme, quoted), "README.md lacks %s", quoted);
  }
  for (int i = 0; figure_kinds[i]; i++) {
    snprintf(quoted, sizeof quoted, "`%s`", figure_kinds[i]->name);
    cr_expect(strstr(readme, quoted), "README.md lacks %s", quoted);
  }
  free(readme);
}

/* The limits that README.md tells are those of the program. */
Test(developers, readme_tells_the_limits) {
  static const struct {
    const char *what;
    int limit;
  } rows[] = {{"layers", LIMIT_LAYERS},
              {"stages", LIMIT_STAGES},
              {"points", LIMIT_POINTS},
              {"figures", LIMIT_FIGURES},
              {"rows of a table or a log", LIMIT_TABLE_ROWS},
              {"instants of a history", LIMIT_OUTPUTS},
              {"columns of a history", LIMIT_COLUMNS},
              {"temperatures across the section", LIMIT_NODES},
              {"steps of one run", LIMIT_STEPS}};
  char *readme = text_of("README.md");
  for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
    char row[120];
    snprintf(row, sizeof row, "| %s | %d |", rows[i].what, rows[i].limit);
    cr_expect(strstr(readme, row), "README.md lacks \"%s\"", row);
  }
  free(readme);
}
