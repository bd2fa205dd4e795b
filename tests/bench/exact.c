/* P2: a plate, insulated at x = 0, that meets a medium at x = L: the classical eigenvalue series
   (H. S. Carslaw & J. C. Jaeger, Conduction of Heat in Solids, 2nd ed. 1959, ch. III), zeta tan
   zeta = Bi. */
#include "probe.h"
#include <math.h>

enum { TERMS = 2000 };

static const double pi = 3.14159265358979323846;

static double root(int k, double bi) {
  double low = k * pi, high = k * pi + pi / 2;
  for (int i = 0; i < 200; i++) {
    double middle = 0.5 * (low + high);
    if (middle * tan(middle) < bi)
      low = middle;
    else
      high = middle;
  }
  return 0.5 * (low + high);
}

/* Share of the temperature difference that is left. */
static double left(const double *zeta, double fourier, double x) {
  double sum = 0;
  for (int k = 0; k < TERMS; k++) {
    double z = zeta[k], e = z * z * fourier;
    if (e > 700) break;
    sum += 4 * sin(z) / (2 * z + sin(2 * z)) * exp(-e) * cos(z * x);
  }
  return sum;
}

void exact_march(probe *p) {
  static double zeta[TERMS];
  const face_condition *c = &p->the_case->stages.items[0].faces.condition[1];
  double length = p->mesh.width, k = p->properties[0].largest_conductivity;
  double diffusivity = k / p->properties[0].reference_capacity,
         bi = c->h.over_time.value * length / k;
  double medium = c->medium.value, start = p->the_case->start.temperature;
  for (int i = 0; i < TERMS; i++) zeta[i] = root(i, bi);
  for (int j = 0; j < p->looks; j++)
    for (int i = 0; i < p->count; i++)
      p->value[j][i] =
          medium + (start - medium) * left(zeta, diffusivity * p->look[j] / (length * length),
                                           p->mesh.position[p->nodes[i]] / length);
}
