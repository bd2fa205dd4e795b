/* shape: the rows of the table, and what they say of a part. */
#include "shape.h"

#include "make_case.h"

#include <criterion/criterion.h>

Test(shape, rows_are_found_by_name_and_only_those) {
  static const char *const names[] = {"plate", "cylinder", "sphere"};
  for (int i = 0; i < 3; i++) {
    const shape *s = shape_named(names[i]);
    cr_assert_not_null(s);
    cr_assert_str_eq(s->name, names[i]);
    cr_assert_eq(s->power, i);
    cr_assert_eq(s->dimensions, 1);
    cr_assert_not_null(s->build);
  }
  cr_assert_null(shape_named("Plate"));
  cr_assert_null(shape_named(""));
  for (int i = 0; shapes_planned[i]; i++) cr_assert_null(shape_named(shapes_planned[i]));
}

Test(shape, faces_are_found_inner_before_outer) {
  const shape *plate = shape_named("plate"), *sphere = shape_named("sphere");
  cr_assert_eq(shape_face(plate, "front"), 0);
  cr_assert_eq(shape_face(plate, "back"), 1);
  cr_assert_eq(shape_face(plate, "outer"), -1);
  cr_assert_eq(shape_face(sphere, "inner"), 0);
  cr_assert_eq(shape_face(sphere, "outer"), 1);
  cr_assert_eq(shape_face(shape_named("cylinder"), "outer"), 1);
}

Test(shape, extent_comes_from_the_sizes_or_from_the_layers) {
  static made m;
  double origin;
  make_case(&m, "plate");
  part *p = &m.the_case.part;
  cr_assert(isnan(p->shape->extent(p, &origin)));
  p->sizes[0] = 0.05;
  cr_assert_float_eq(p->shape->extent(p, &origin), 0.05, 0);
  cr_assert_eq(origin, 0);
  add_layer(&m, 0, 0.02, 0);
  add_layer(&m, 0, 0.01, 1e-4);
  cr_assert_float_eq(p->shape->extent(p, &origin), 0.03, 1e-17, "sum of two numbers: round-off");

  make_case(&m, "cylinder");
  p->sizes[0] = 0.12;
  cr_assert_float_eq(p->shape->extent(p, &origin), 0.06, 1e-17);
  cr_assert_eq(origin, 0);
  set_bore(&m, 0.04);
  cr_assert_float_eq(p->shape->extent(p, &origin), 0.04, 1e-17);
  cr_assert_float_eq(origin, 0.02, 0);
}

Test(shape, only_a_bore_makes_a_round_hollow) {
  static made m;
  make_case(&m, "sphere");
  part *p = &m.the_case.part;
  cr_assert_not(p->shape->hollow(p));
  set_bore(&m, 0);
  cr_assert_not(p->shape->hollow(p));
  set_bore(&m, 1e-3);
  cr_assert(p->shape->hollow(p));
  make_case(&m, "plate");
  cr_assert(p->shape->hollow(p), "a plate has two faces");
}

Test(shape, sizes_describe_members_of_the_part) {
  for (int i = 0; shapes[i]; i++) {
    const object_type *t = &shapes[i]->sizes;
    cr_assert_gt(t->count, 0);
    for (int k = 0; k < t->count; k++) {
      size_t first = offsetof(part, sizes), at = t->parameters[k].offset;
      cr_assert_geq(at, first);
      cr_assert_leq(at, first + (MOST_SIZES - 1) * sizeof(double));
      cr_assert_eq((at - first) % sizeof(double), 0);
      cr_assert_eq(t->parameters[k].dimension, DIMENSION_LENGTH);
    }
  }
}
