/* command_check.c: a job document read and judged without solving it. */
#include "command.h"

#include "json_out.h"
#include "kind.h"
#include "limit.h"

#include <math.h>
#include <stdio.h>

static void write_amount(buffer *b, const char *key, double value) {
  buffer_format(b, ", \"%s\": ", key);
  json_out_number(b, value, INFINITY);
}

static void write_notes(buffer *b, const warning *list, int count, bool *first) {
  for (int i = 0; i < count; i++) {
    buffer_text(b, *first ? "{\"at\": " : ", {\"at\": ");
    json_out_string(b, list[i].at);
    buffer_text(b, ", \"is\": ");
    json_out_string(b, list[i].is);
    buffer_text(b, "}");
    fprintf(stderr, "warning: %s%s%s\n", list[i].at, list[i].at[0] ? ": " : "", list[i].is);
    *first = false;
  }
}

static void write_check(buffer *b, const document *d, const solve_cost *cost) {
  warning advice[LIMIT_WARNINGS];
  int count = d->kind->advise ? d->kind->advise(d, advice) : 0;
  bool first = true;
  buffer_format(
      b, "{\"valid\": true, \"kind\": \"%s\", \"case\": \"sha256:%s\", \"cost\": {\"tasks\": %d",
      d->kind->name, d->hash, d->kind->plan(d));
  write_amount(b, "unknowns", cost->unknowns);
  write_amount(b, "steps", cost->steps);
  write_amount(b, "outputs", cost->outputs);
  write_amount(b, "seconds", cost->seconds);
  buffer_text(b, "}, \"warnings\": [");
  write_notes(b, d->warnings, d->warning_count, &first);
  write_notes(b, advice, count, &first);
  buffer_text(b, "]}\n");
}

/* A case that only the solver finds beyond its limits: told as document faults are. */
static int tell_refusal(const char *path, const fault *f) {
  buffer b;
  buffer_init(&b, 0);
  fprintf(stderr, "%s: %s: %s\n", input_name(path), f->at[0] ? f->at : "the document", f->is);
  problem_of_fault(&b, f);
  if (!b.failed) fputs(b.bytes, stdout);
  buffer_free(&b);
  return problem_exit_code(f->status);
}

int command_check(const options *o) {
  library *materials = NULL;
  document *d = NULL;
  solve_cost cost = {0};
  fault f;
  buffer b;
  buffer_init(&b, 0);
  int code = input_document(o, true, &materials, &d);
  if (code != EXIT_GOOD) goto out;
  if (d->kind->cost(d, &cost, &f) != STATUS_OK) {
    code = tell_refusal(o->operands[0], &f);
    goto out;
  }
  write_check(&b, d, &cost);
  code = put_out(&b);
out:
  buffer_free(&b);
  document_free(d);
  library_free(materials);
  return code;
}
