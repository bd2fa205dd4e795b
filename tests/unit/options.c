/* options: defaults, environment and command line in rising order of strength; every refusal names
 * flag and reason. */
#include "options.h"

#include <criterion/criterion.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char *variable_name, *variable_value;

static const char *one_variable(const char *name) {
  return variable_name && strcmp(name, variable_name) == 0 ? variable_value : NULL;
}

static char message[256];

static int read_words(options *o, unsigned user, int count, const char **words) {
  message[0] = '\0';
  return options_read(o, user, count, words, one_variable, message, sizeof message);
}

#define READ(o, user, ...)                                                                         \
  read_words(o, user, sizeof((const char *[]){__VA_ARGS__}) / sizeof(char *),                      \
             (const char *[]){__VA_ARGS__})

static void set_variable(const char *name, const char *value) {
  variable_name = name;
  variable_value = value;
}

Test(options, have_defaults) {
  options o;
  cr_assert_eq(read_words(&o, FOR_SERVE, 0, NULL), 0, "%s", message);
  cr_assert_str_eq(o.listen, "127.0.0.1:8080");
  cr_assert_eq(o.body_limit, 4194304);
  cr_assert_eq(o.wait, 10);
  cr_assert_null(o.port_file);
  cr_assert_not(o.quiet);
  cr_assert_eq(o.operand_count, 0);
}

Test(options, environment_beats_default_and_command_line_beats_both) {
  options o;
  set_variable("CORESOAK_BODY_LIMIT", "64KiB");
  cr_assert_eq(read_words(&o, FOR_SOLVE, 0, NULL), 0, "%s", message);
  cr_assert_eq(o.body_limit, 65536);
  cr_assert_eq(READ(&o, FOR_SOLVE, "--body-limit", "2048"), 0, "%s", message);
  cr_assert_eq(o.body_limit, 2048);
  cr_assert_eq(READ(&o, FOR_SOLVE, "--body-limit=1.5MiB"), 0, "%s", message);
  cr_assert_eq(o.body_limit, 1572864);
}

Test(options, switches) {
  options o;
  cr_assert_eq(READ(&o, FOR_SOLVE, "--csv"), 0, "%s", message);
  cr_assert(o.csv);
  set_variable("CORESOAK_BRIEF", "true");
  cr_assert_eq(read_words(&o, FOR_SOLVE, 0, NULL), 0, "%s", message);
  cr_assert(o.brief);
  cr_assert_eq(READ(&o, FOR_SOLVE, "--brief=0"), 0, "%s", message);
  cr_assert_not(o.brief);
  set_variable("CORESOAK_BRIEF", "maybe");
  cr_assert_eq(read_words(&o, FOR_SOLVE, 0, NULL), -1);
  cr_assert(strstr(message, "CORESOAK_BRIEF"), "%s", message);
}

Test(options, operands_stand_anywhere) {
  options o;
  cr_assert_eq(READ(&o, FOR_SOLVE, "a.json", "--csv", "-", "--", "--brief"), 0, "%s", message);
  cr_assert_eq(o.operand_count, 3);
  cr_assert_str_eq(o.operands[0], "a.json");
  cr_assert_str_eq(o.operands[1], "-");
  cr_assert_str_eq(o.operands[2], "--brief");
  cr_assert_not(o.brief);
}

static void refused(unsigned user, const char *first, const char *second, const char *because) {
  options o;
  const char *words[] = {first, second};
  cr_assert_eq(read_words(&o, user, second ? 2 : 1, words), -1, "%s was taken", first);
  cr_assert(strstr(message, because), "%s: \"%s\" does not say \"%s\"", first, message, because);
}

Test(options, refusals_say_why) {
  refused(FOR_SERVE, "--worker", "2", "did you mean --workers");
  refused(FOR_SOLVE, "--workers", "2", "unknown flag --workers");
  refused(FOR_SERVE, "--workers", "65", "0 to 64");
  refused(FOR_SERVE, "--workers", "1.5", "whole number");
  refused(FOR_SERVE, "--workers", "two", "whole number");
  refused(FOR_SERVE, "--workers", NULL, "--workers takes");
  refused(FOR_SERVE, "--workers", "-1", "whole number");
  refused(FOR_SERVE, "--workers", "0x10", "whole number");
  refused(FOR_SERVE, "--workers", "", "whole number");
  refused(FOR_SERVE, "--wait", "31", "0 to 30");
  refused(FOR_SERVE, "--wait", "nan", "seconds");
  refused(FOR_SERVE, "--body-limit", "4MB", "MiB");
  refused(FOR_SERVE, "--body-limit", "1023", "1024");
  refused(FOR_SERVE, "-w", NULL, "two dashes");
  refused(0, "--csv", NULL, "unknown flag");
}

Test(options, every_default_is_within_its_own_range) {
  for (int i = 0; i < option_row_count; i++) {
    const option_row *row = &option_rows[i];
    options o;
    char word[128];
    if (!row->fallback) continue;
    snprintf(word, sizeof word, "--%s=%s", row->flag, row->fallback);
    cr_assert_eq(READ(&o, row->users, word), 0, "%s", message);
  }
}

/* The values at both ends of a range are read, one beyond is not. */
Test(options, every_range_holds_at_its_ends) {
  for (int i = 0; i < option_row_count; i++) {
    const option_row *row = &option_rows[i];
    if (row->kind != OPTION_COUNT && row->kind != OPTION_BYTES) continue;
    const double tried[] = {row->least, row->most, row->most + 1};
    for (int j = 0; j < 3; j++) {
      options o;
      char word[128];
      snprintf(word, sizeof word, "--%s=%.0f", row->flag, tried[j]);
      cr_assert_eq(READ(&o, row->users, word), j < 2 ? 0 : -1, "%s", word);
    }
  }
}

Test(options, help_and_table_name_every_flag) {
  buffer help, all;
  buffer_init(&help, 0);
  buffer_init(&all, 0);
  options_help(&help, FOR_SERVE);
  options_table(&all);
  for (int i = 0; i < option_row_count; i++) {
    char flag[64], variable[64];
    snprintf(flag, sizeof flag, "--%s", option_rows[i].flag);
    option_variable(&option_rows[i], variable, sizeof variable);
    cr_assert_eq(strstr(help.bytes, flag) != NULL, (option_rows[i].users & FOR_SERVE) != 0, "%s",
                 flag);
    cr_assert(strstr(all.bytes, flag), "%s", flag);
    cr_assert(strstr(all.bytes, variable), "%s", variable);
  }
  buffer_free(&help);
  buffer_free(&all);
}
