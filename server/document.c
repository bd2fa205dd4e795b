/* document.c: a job document: kind, job, title and labels around a question. */
#include "document.h"

#include "kind.h"
#include "reader.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static void read_labels(reader *r, const json_t *v) {
  document *d = r->document;
  size_t before = path_push(r, "labels");
  if (must_be_object(r, v) && json_object_size(v) > LIMIT_LABELS) {
    fault_here(r, NULL, "has %zu labels; the limit is %d", json_object_size(v), LIMIT_LABELS);
  } else if (json_is_object(v)) {
    label *labels = arena_array(&d->memory, json_object_size(v) + 1, sizeof *labels);
    const char *name;
    json_t *value;
    if (!labels) r->no_memory = true;
    json_object_foreach((json_t *)v, name, value) {
      size_t inner = path_push(r, name);
      if (!is_name(name)) fault_here(r, NULL, "a name has 1 to 64 letters, digits, _ or -");
      if (must_be_text(r, value) && labels) {
        label *l = &labels[d->label_count++];
        l->name = arena_text(&d->memory, name, strlen(name));
        l->value = arena_text(&d->memory, json_string_value(value), json_string_length(value));
        if (!l->name || !l->value) r->no_memory = true;
      }
      path_pop(r, inner);
    }
    d->labels = labels;
  }
  path_pop(r, before);
}

/* ---- job ---- */

static void read_priority(reader *r, const json_t *v, job_wishes *job) {
  if (json_is_integer(v) && json_integer_value(v) >= -1000 && json_integer_value(v) <= 1000)
    job->priority = (int)json_integer_value(v);
  else
    fault_here(r, v, "must be a whole number from -1000 to 1000");
}

static void read_moment(reader *r, const json_t *v, double *out) {
  if (!json_is_string(v) || !read_rfc3339(json_string_value(v), out))
    fault_here(r, v,
               "must be a moment as RFC 3339 with an offset, such as 2026-03-01T06:15:00+01:00");
}

static void read_not_before(reader *r, const json_t *v, job_wishes *job) {
  read_moment(r, v, &job->not_before);
}

static void read_expires_at(reader *r, const json_t *v, job_wishes *job) {
  read_moment(r, v, &job->expires_at);
}

static void read_time_limit(reader *r, const json_t *v, job_wishes *job) {
  if (read_quantity(r, v, DIMENSION_TIME, &job->time_limit) && !(job->time_limit > 0))
    fault_here(r, v, "must be greater than 0");
}

static void read_id(reader *r, const json_t *v, job_wishes *job) {
  if (!must_be_text(r, v)) return;
  if (!is_name(json_string_value(v)))
    fault_here(r, v, "a name has 1 to 64 letters, digits, _ or -");
  job->id = arena_text(&r->document->memory, json_string_value(v), json_string_length(v));
  if (!job->id) r->no_memory = true;
}

static const char *const job_members[] = {"priority",   "not_before", "expires_at",
                                          "time_limit", "id",         NULL};
static void (*const job_readers[])(reader *r, const json_t *v, job_wishes *job) = {
    read_priority, read_not_before, read_expires_at, read_time_limit, read_id};

static void read_job_member(reader *r, const char *name, const json_t *v) {
  for (int i = 0; job_members[i]; i++) {
    if (strcmp(job_members[i], name)) continue;
    job_readers[i](r, v, &r->document->job);
    return;
  }
  const char *near = nearest_name(name, job_members);
  fault_here(r, NULL, "unknown member of job%s%s%s", near ? "; did you mean \"" : "",
             near ? near : "", near ? "\"?" : "");
}

static void read_job(reader *r, const json_t *v) {
  const char *name;
  json_t *value;
  size_t before = path_push(r, "job");
  if (must_be_object(r, v)) {
    json_object_foreach((json_t *)v, name, value) {
      size_t inner = path_push(r, name);
      read_job_member(r, name, value);
      path_pop(r, inner);
    }
  }
  path_pop(r, before);
}

/* ---- kind, labels, title ---- */

static void unknown_kind(reader *r, const json_t *v) {
  const char *names[8];
  int n = 0;
  for (int i = 0; job_kinds[i] && n < 7; i++) names[n++] = job_kinds[i]->name;
  names[n] = NULL;
  const char *near = json_is_string(v) ? nearest_name(json_string_value(v), names) : NULL;
  fault_here(r, v, "unknown kind of job%s%s%s", near ? "; did you mean \"" : "", near ? near : "",
             near ? "\"?" : "");
}

static const job_kind *read_kind(reader *r, const json_t *v, const job_kind *expected) {
  if (!v) return expected ? expected : job_kinds[0];
  size_t before = path_push(r, "kind");
  const job_kind *k = json_is_string(v) ? job_kind_named(json_string_value(v)) : NULL;
  if (!k)
    unknown_kind(r, v);
  else if (expected && k != expected)
    fault_here(r, v, "does not belong here: %s is expected", expected->name);
  path_pop(r, before);
  return expected ? expected : k;
}

/* Members of the document that are no members of the case. */
static void check_outer_members(reader *r, const json_t *root) {
  const char *names[LIMIT_TEXT];
  int n = 0;
  for (int i = 0; i < case_type.count; i++) names[n++] = case_type.parameters[i].name;
  names[n++] = "kind";
  names[n++] = "job";
  names[n] = NULL;
  const char *name;
  json_t *value;
  json_object_foreach((json_t *)root, name, value) {
    bool known = false;
    for (int i = 0; names[i]; i++) known = known || !strcmp(names[i], name);
    if (known) continue;
    const char *near = nearest_name(name, names);
    fault_at(r, name, NULL, "unknown member of a case%s%s%s", near ? "; did you mean \"" : "",
             near ? near : "", near ? "\"?" : "");
  }
}

static void read_title(reader *r, const json_t *v) {
  size_t before = path_push(r, "title");
  if (must_be_text(r, v)) {
    r->document->title =
        arena_text(&r->document->memory, json_string_value(v), json_string_length(v));
    if (!r->document->title) r->no_memory = true;
  }
  path_pop(r, before);
}

int document_read(const char *bytes, size_t length, const struct job_kind *expected,
                  const library *materials, document **out, fault_list *faults) {
  json_t *root = parse_json(bytes, length, faults);
  document *d = root ? calloc(1, sizeof *d) : NULL;
  int outcome = -1;
  *out = NULL;
  if (!d) {
    if (root) faults->no_memory = true;
    goto out;
  }
  arena_init(&d->memory, 0);
  d->job = (job_wishes){.not_before = NAN, .expires_at = NAN, .time_limit = NAN};
  reader r = {.faults = faults, .library = materials, .document = d};
  check_outer_members(&r, root);
  d->kind = read_kind(&r, json_object_get(root, "kind"), expected);
  if (json_object_get(root, "title")) read_title(&r, json_object_get(root, "title"));
  if (json_object_get(root, "labels")) read_labels(&r, json_object_get(root, "labels"));
  if (json_object_get(root, "job")) read_job(&r, json_object_get(root, "job"));
  int read = d->kind ? d->kind->read(&r, root, d) : -1;
  if (r.no_memory) faults->no_memory = true;
  if (read == 0 && !faults->found && !faults->no_memory) outcome = 0;
out:
  json_decref(root);
  if (outcome == 0)
    *out = d;
  else
    document_free(d);
  return outcome;
}

void document_free(document *d) {
  if (!d) return;
  if (d->question && d->kind) d->kind->free_question(d->question);
  arena_free(&d->memory);
  free(d);
}
