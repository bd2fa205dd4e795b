/* figure_extreme.c: peak and lowest value of a place, and when. */
#include "figure_kit.h"

typedef struct state {
  bool begun;
  double value;
  double marked,
      when; /* the value that set `when`: later ones must differ by more than round-off */
} state;

static dimension of_place(const figure *f, const heat_case *c) {
  return target_dimension(&f->of, c);
}

static void begin(figure_run *r) {
  state *x = r->self;
  *x = (state){.value = NAN, .marked = NAN, .when = NAN};
}

static void observe_extreme(figure_run *r, const segment *s, int sign) {
  state *x = r->self;
  if (!figure_sees(r, s)) return;
  view v = figure_view(r, s);
  extreme e = view_extreme(&v, sign, x->value);
  if (!x->begun || sign * (e.value - x->value) > 0) x->value = e.value;
  if (!x->begun || sign * (e.value - x->marked) > SAME_TEMPERATURE) {
    x->marked = e.value;
    x->when = e.when;
  }
  x->begun = true;
}

static void observe_peak(figure_run *r, const segment *s) {
  observe_extreme(r, s, 1);
}

static void observe_lowest(figure_run *r, const segment *s) {
  observe_extreme(r, s, -1);
}

static void finish(figure_run *r, figure_value *v) {
  const state *x = r->self;
  bool steady = r->the_case->stages.items[0].end == STAGE_STEADY;
  if (x->begun)
    figure_found(v, x->value, steady ? NAN : x->when, 1);
  else
    figure_missing(v, "none of the stages that count was computed");
}

const figure_kind peak_kind = {
    .name = "peak",
    .about = "The highest value of a place, and when",
    .parameters = FIGURE_NO_PARAMETERS("peak", "No members of its own"),
    .takes_place = true,
    .size = sizeof(state),
    .dimension = of_place,
    .trace = TRACE_PLACE,
    .check = figure_needs_place,
    .begin = begin,
    .observe = observe_peak,
    .finish = finish,
};

const figure_kind lowest_kind = {
    .name = "lowest",
    .about = "The lowest value of a place, and when",
    .parameters = FIGURE_NO_PARAMETERS("lowest", "No members of its own"),
    .takes_place = true,
    .size = sizeof(state),
    .dimension = of_place,
    .trace = TRACE_PLACE,
    .check = figure_needs_place,
    .begin = begin,
    .observe = observe_lowest,
    .finish = finish,
};
