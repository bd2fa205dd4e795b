/* problem.c: what a caller is told when something failed (RFC 9457). */
#include "problem.h"

#include "json_out.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

typedef struct problem_row {
  int status;
  const char *slug, *title;
} problem_row;

static const problem_row by_http_status[] = {
    {400, "malformed", "The request cannot be read"},
    {404, "not-found", "There is nothing at this address"},
    {405, "method-not-allowed", "This address does not take that method"},
    {406, "not-acceptable", "The answer is not offered in that form"},
    {408, "too-slow", "The request came too slowly"},
    {409, "job-state", "The state of the job does not allow this"},
    {410, "cancelled", "The job was cancelled"},
    {411, "length-required", "The request must state its length"},
    {413, "too-large", "The request is larger than the limit"},
    {414, "target-too-long", "The address is too long"},
    {415, "media-type", "The request is not in a form that is read here"},
    {417, "expectation", "The expectation cannot be met"},
    {422, "invalid-case", "The document is well-formed but not a valid case"},
    {429, "too-many-requests", "Too many requests"},
    {431, "headers-too-large", "The headers are larger than the limit"},
    {500, "defect", "The service failed"},
    {501, "not-implemented", "The request uses what is not offered"},
    {503, "busy", "The service cannot take this now"},
    {504, "out-of-time", "The job did not end within its time"},
    {505, "version", "The version of HTTP is not offered"},
    {507, "full", "The service has no room to store this"},
};

static const problem_row unknown_row = {0, "error", "The request failed"};

static const problem_row *row_of(int http_status) {
  for (size_t i = 0; i < sizeof by_http_status / sizeof by_http_status[0]; i++)
    if (by_http_status[i].status == http_status) return &by_http_status[i];
  return &unknown_row;
}

/* A failed case is the case's own (422): sent again it fails again, so nothing that invites a
   repeat, and never a 500. What depends on the hour is told as such: no memory now 503, over the
   time allowed 504, cancelled 410. */
int problem_http_status(status s) {
  switch (s) {
  case STATUS_OK: return 200;
  case STATUS_BAD_ARGUMENT:
  case STATUS_BEYOND_LIMIT:
  case STATUS_SINGULAR:
  case STATUS_NOT_FINITE:
  case STATUS_NO_CONVERGENCE:
  case STATUS_ERROR_NOT_MET: return 422;
  case STATUS_NO_MEMORY: return 503;
  case STATUS_CANCELLED: return 410;
  case STATUS_OUT_OF_TIME: return 504;
  case STATUS_COUNT: break;
  }
  return 500;
}

int problem_exit_code(status s) {
  switch (s) {
  case STATUS_OK: return EXIT_GOOD;
  case STATUS_BAD_ARGUMENT:
  case STATUS_BEYOND_LIMIT: return EXIT_BAD_INPUT;
  case STATUS_SINGULAR:
  case STATUS_NOT_FINITE:
  case STATUS_NO_CONVERGENCE:
  case STATUS_ERROR_NOT_MET:
  case STATUS_NO_MEMORY:
  case STATUS_CANCELLED: return EXIT_NOT_SOLVED;
  case STATUS_OUT_OF_TIME: return EXIT_OUT_OF_TIME;
  case STATUS_COUNT: break;
  }
  return EXIT_NOT_SOLVED;
}

static problem_row row_of_failure(status s) {
  problem_row row = *row_of(problem_http_status(s));
  switch (s) {
  case STATUS_BEYOND_LIMIT:
    row.slug = "beyond-limit";
    row.title = "The case is beyond a limit";
    break;
  case STATUS_SINGULAR:
    row.slug = "singular";
    row.title = "The equations of the case have no single solution";
    break;
  case STATUS_NOT_FINITE:
    row.slug = "not-finite";
    row.title = "The computation left the finite numbers";
    break;
  case STATUS_NO_CONVERGENCE:
    row.slug = "no-convergence";
    row.title = "The computation did not converge";
    break;
  case STATUS_ERROR_NOT_MET:
    row.slug = "error-not-met";
    row.title = "The numerical error asked for cannot be met within the limits";
    break;
  case STATUS_NO_MEMORY: row.slug = "no-memory"; break;
  case STATUS_OK:
  case STATUS_BAD_ARGUMENT:
  case STATUS_CANCELLED:
  case STATUS_OUT_OF_TIME:
  case STATUS_COUNT: break;
  }
  return row;
}

static void open_document(buffer *b, const problem_row *row, int http_status, const char *detail) {
  buffer_format(b, "{\"type\": \"/problems/%s\", \"title\": ", row->slug);
  json_out_string(b, row->title);
  buffer_format(b, ", \"status\": %d", http_status);
  if (detail) {
    buffer_text(b, ", \"detail\": ");
    json_out_string(b, detail);
  }
}

static void write_member(buffer *b, const char *name, const char *text) {
  if (!text) return;
  buffer_format(b, ", \"%s\": ", name);
  json_out_string(b, text);
}

static void write_faults(buffer *b, const fault_list *faults) {
  buffer_text(b, ", \"faults\": [");
  for (int i = 0; i < faults->count; i++) {
    const request_fault *f = &faults->items[i];
    buffer_text(b, i ? ", {\"at\": " : "{\"at\": ");
    json_out_string(b, f->at ? f->at : "");
    write_member(b, "is", f->is ? f->is : "");
    write_member(b, "got", f->got);
    write_member(b, "in", f->in);
    buffer_text(b, "}");
  }
  buffer_text(b, "]");
  if (faults->found > faults->count) buffer_format(b, ", \"faults_found\": %d", faults->found);
}

void problem_write(buffer *b, int http_status, const char *detail, const fault_list *faults) {
  char counted[64];
  if (!detail && faults && faults->found > 0) {
    snprintf(counted, sizeof counted, faults->found == 1 ? "%d fault" : "%d faults", faults->found);
    detail = counted;
  }
  open_document(b, row_of(http_status), http_status, detail);
  if (faults && faults->count > 0) write_faults(b, faults);
  buffer_text(b, "}\n");
}

void problem_of_fault(buffer *b, const fault *f) {
  problem_row row = row_of_failure(f->status);
  open_document(b, &row, problem_http_status(f->status),
                f->is[0] ? f->is : status_message(f->status));
  if (f->stage >= 0) buffer_format(b, ", \"stage\": %d", f->stage);
  if (isfinite(f->time)) {
    buffer_text(b, ", \"time\": ");
    json_out_number(b, f->time, 0);
  }
  if (isfinite(f->could_be_met)) {
    buffer_text(b, ", \"could_be_met\": ");
    json_out_error(b, f->could_be_met);
  }
  buffer_text(b, ", \"faults\": [{\"at\": ");
  json_out_string(b, f->at);
  write_member(b, "is", f->is[0] ? f->is : status_message(f->status));
  buffer_text(b, "}]}\n");
}
