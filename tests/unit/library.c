/* The library: sorted, found by name, its texts those of the files, read from several threads. */
#include "library.h"
#include "embedded.h"

#include <criterion/criterion.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static library *opened;

static void open_library(void) {
  fault_list faults;
  faults_init(&faults);
  opened = library_open(&faults);
  cr_assert_not_null(opened, "%s: %s", faults.count ? faults.items[0].at : "",
                     faults.count ? faults.items[0].is : "");
  cr_assert_eq(faults.found, 0);
  faults_free(&faults);
}

static void close_library(void) {
  library_free(opened);
}

TestSuite(library, .init = open_library, .fini = close_library);

Test(library, holds_every_embedded_file) {
  int files = 0;
  while (embedded_materials[files].name) files++;
  cr_expect_eq(library_count(opened), files);
  for (int i = 0; i < files; i++) {
    const material *m = library_find(opened, embedded_materials[i].name);
    cr_assert_not_null(m, "%s", embedded_materials[i].name);
    cr_expect_str_eq(m->name, embedded_materials[i].name);
    cr_expect(strlen(m->source) > 10, "%s has no source", m->name);
  }
}

Test(library, is_sorted_by_name) {
  const char *const *names = library_names(opened);
  for (int i = 0; i < library_count(opened); i++) {
    cr_expect_str_eq(names[i], library_at(opened, i)->name);
    if (i)
      cr_expect_lt(strcmp(names[i - 1], names[i]), 0, "%s stands before %s", names[i - 1],
                   names[i]);
  }
  cr_expect_null(names[library_count(opened)]);
}

Test(library, knows_no_other_names) {
  cr_expect_null(library_find(opened, "carbon"));
  cr_expect_null(library_find(opened, ""));
  cr_expect_null(library_at(opened, -1));
  cr_expect_null(library_at(opened, library_count(opened)));
  cr_expect_null(library_text(opened, "carbon"));
}

/* The text that is hashed with a case is the file itself, byte by byte. */
Test(library, gives_the_text_of_the_file) {
  char bytes[1 << 14];
  FILE *file = fopen(SOURCE_DIR "/solver/materials/carbon_steel.json", "rb");
  cr_assert_not_null(file);
  size_t length = fread(bytes, 1, sizeof bytes - 1, file);
  bytes[length] = '\0';
  fclose(file);
  cr_expect_str_eq(library_text(opened, "carbon_steel"), bytes);
}

/* EN 1993-1-2:2005, 3.4.1.2 and 3.4.1.3: 425 + 0.773 T - 0.00169 T^2 + 2.22e-6 T^3; 666 + 13002 /
   (738 - T); 545 + 17820 / (T - 731); 54 - 0.0333 T. */
Test(library, reads_pieces_as_the_standard_writes_them) {
  const material *m = library_find(opened, "carbon_steel");
  cr_assert_not_null(m);
  cr_expect_float_eq(curve_value(&m->specific_heat, 273.15 + 300),
                     425 + 0.773 * 300 - 0.00169 * 9e4 + 2.22e-6 * 2.7e7, 1e-9);
  cr_expect_float_eq(curve_value(&m->specific_heat, 273.15 + 700), 666 + 13002. / 38, 1e-9);
  cr_expect_float_eq(curve_value(&m->specific_heat, 273.15 + 800), 545 + 17820. / 69, 1e-9);
  cr_expect_float_eq(curve_value(&m->conductivity, 273.15 + 500), 54 - 0.0333 * 500, 1e-9);
  cr_expect_eq(m->traits & (MATERIAL_METAL | MATERIAL_HEATING_ONLY),
               MATERIAL_METAL | MATERIAL_HEATING_ONLY);
  cr_expect_float_eq(m->valid_from, 293.15, 1e-9);
  cr_expect_float_eq(m->valid_to, 1473.15, 1e-9);
}
