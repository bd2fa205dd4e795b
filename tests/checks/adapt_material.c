#include "adapt.h"
#include <string.h>

/* Range given to formulas that the neutral form states without one, degC: every case stays inside,
   and every formula is positive in it. */
static const double formula_from = -200, formula_to = 1500;

static json_t *curve(const json_t *neutral) {
  const json_t *poly = json_object_get(neutral, "poly");
  if (poly)
    return json_pack("{s:[{s:f,s:f,s:O}]}", "pieces", "from", formula_from, "to", formula_to,
                     "poly", poly);
  const json_t *table = json_object_get(neutral, "table");
  if (table) return json_pack("{s:O}", "table", table);
  return json_is_number(neutral) ? json_incref((json_t *)neutral) : NULL;
}

/* Solid and liquid with a sharp front between: properties jump at the melting point. */
static json_t *melting(const json_t *m) {
  const json_t *solid = json_object_get(m, "solid"), *liquid = json_object_get(m, "liquid");
  double melt = neutral_number(m, "T_melt", 0), cold = melt - 100, hot = melt + 100;
  json_t *made = json_object();
  static const char *const names[][2] = {{"k", "conductivity"}, {"c", "specific_heat"}};
  for (int i = 0; i < 2; i++) {
    double s = neutral_number(solid, names[i][0], 0), l = neutral_number(liquid, names[i][0], 0);
    json_object_set_new(
        made, names[i][1],
        json_pack("{s:[[f,f],[f,f],[f,f],[f,f]]}", "table", cold, s, melt, s, melt, l, hot, l));
  }
  json_object_set(made, "density", json_object_get(solid, "rho"));
  json_object_set_new(made, "latent_heat",
                      json_pack("[{s:O,s:f,s:f}]", "heat", json_object_get(m, "latent_heat"),
                                "from", melt, "to", melt));
  return made;
}

static json_t *library_name(const char *text) {
  if (strstr(text, "EN 1993-1-2 carbon steel")) return json_string("carbon_steel");
  if (strstr(text, "EN 1992-1-2 concrete")) return json_string("concrete_lower_1_5");
  return NULL;
}

json_t *adapt_material(const json_t *m) {
  if (json_is_string(m)) return library_name(json_string_value(m));
  const json_t *named = json_object_get(m, "material");
  if (named) return library_name(json_string_value(named));
  if (json_object_get(m, "solid")) return melting(m);
  json_t *made = json_object();
  double rho_c = neutral_number(m, "rho_c", 0);
  json_object_set_new(made, "conductivity", curve(json_object_get(m, "k")));
  if (rho_c > 0) {
    json_object_set_new(made, "density", json_real(1000));
    json_object_set_new(made, "specific_heat", json_real(rho_c / 1000));
  } else { /* a steady case may leave both out: then they do not matter */
    const json_t *rho = json_object_get(m, "rho"), *c = json_object_get(m, "c");
    json_object_set_new(made, "density", rho ? curve(rho) : json_real(1000));
    json_object_set_new(made, "specific_heat", c ? curve(c) : json_real(1000));
  }
  const json_t *latent = json_object_get(m, "latent_heat");
  if (latent)
    json_object_set_new(made, "latent_heat",
                        json_pack("[{s:O,s:O,s:O}]", "heat", latent, "from",
                                  json_object_get(m, "solidus"), "to",
                                  json_object_get(m, "liquidus")));
  return made;
}
