/* shape.c: the table of shapes. */
#include "shape.h"

#include "mesh.h"

#include <math.h>
#include <string.h>

#define SIZE_OF(name_, index, flags_, about_)                                                      \
  {                                                                                                \
    .name = name_, .kind = VALUE_QUANTITY, .dimension = DIMENSION_LENGTH,                          \
    .offset = offsetof(part, sizes) + (index) * sizeof(double), .flags = flags_, .least = 0,       \
    .most = 1e4, .fallback = NAN, .about = about_                                                  \
  }

enum { PLATE_THICKNESS };
enum { ROUND_DIAMETER, ROUND_BORE, ROUND_LENGTH };

static const parameter plate_sizes[] = {
    SIZE_OF("thickness", PLATE_THICKNESS, PARAMETER_ABOVE, "Distance from front to back"),
};

static const parameter cylinder_sizes[] = {
    SIZE_OF("diameter", ROUND_DIAMETER, PARAMETER_ABOVE, "Outer diameter"),
    SIZE_OF("bore", ROUND_BORE, 0, "Diameter of the hole, 0 if there is none"),
    SIZE_OF("length", ROUND_LENGTH, PARAMETER_ABOVE,
            "Length, used for advice only: a long cylinder has no ends"),
};

static const parameter sphere_sizes[] = {
    SIZE_OF("diameter", ROUND_DIAMETER, PARAMETER_ABOVE, "Outer diameter"),
    SIZE_OF("bore", ROUND_BORE, 0, "Diameter of the cavity, 0 if there is none"),
};

static double layers_thickness(const part *p) {
  double sum = 0;
  for (int i = 0; i < p->layers.count; i++) sum += p->layers.items[i].thickness;
  return sum;
}

static double plate_extent(const part *p, double *origin) {
  *origin = 0;
  return p->layers.count ? layers_thickness(p) : p->sizes[PLATE_THICKNESS];
}

static double bore_of(const part *p) {
  return isfinite(p->sizes[ROUND_BORE]) ? p->sizes[ROUND_BORE] : 0;
}

static double round_extent(const part *p, double *origin) {
  *origin = bore_of(p) / 2;
  return p->layers.count ? layers_thickness(p) : (p->sizes[ROUND_DIAMETER] - bore_of(p)) / 2;
}

static bool plate_hollow(const part *p) {
  (void)p;
  return true;
}

static bool round_hollow(const part *p) {
  return bore_of(p) > 0;
}

#define SIZES(array, name_, about_)                                                                \
  {                                                                                                \
    .name = name_, .about = about_, .size = sizeof(part), .parameters = array,                     \
    .count = COUNT_OF(array)                                                                       \
  }

static const shape plate = {
    .name = "plate",
    .about = "A flat section, one-dimensional through its thickness",
    .dimensions = 1,
    .power = 0,
    .coordinates = {"x"},
    .faces = {"front", "back"},
    .sizes = SIZES(plate_sizes, "plate", "Sizes of a plate"),
    .extent = plate_extent,
    .hollow = plate_hollow,
    .build = mesh_build,
    .energy = DIMENSION_ENERGY_PER_AREA,
    .power_unit = DIMENSION_FLUX,
};

static const shape cylinder = {
    .name = "cylinder",
    .about = "A long round, solid or with a bore, one-dimensional along its radius",
    .dimensions = 1,
    .power = 1,
    .coordinates = {"r"},
    .faces = {"inner", "outer"},
    .sizes = SIZES(cylinder_sizes, "cylinder", "Sizes of a long cylinder"),
    .extent = round_extent,
    .hollow = round_hollow,
    .build = mesh_build,
    .energy = DIMENSION_ENERGY_PER_LENGTH,
    .power_unit = DIMENSION_POWER_PER_LENGTH,
};

static const shape sphere = {
    .name = "sphere",
    .about = "A ball, solid or hollow, one-dimensional along its radius",
    .dimensions = 1,
    .power = 2,
    .coordinates = {"r"},
    .faces = {"inner", "outer"},
    .sizes = SIZES(sphere_sizes, "sphere", "Sizes of a sphere"),
    .extent = round_extent,
    .hollow = round_hollow,
    .build = mesh_build,
    .energy = DIMENSION_ENERGY,
    .power_unit = DIMENSION_POWER,
};

const shape *const shapes[] = {&plate, &cylinder, &sphere, NULL};
const char *const shapes_planned[] = {"rectangular_bar", "short_cylinder", "block", NULL};

const shape *shape_named(const char *name) {
  for (int i = 0; shapes[i]; i++)
    if (!strcmp(shapes[i]->name, name)) return shapes[i];
  return NULL;
}

int shape_face(const shape *s, const char *name) {
  for (int i = 0; s->faces[i]; i++)
    if (!strcmp(s->faces[i], name)) return i;
  return -1;
}
