/* command_input.c: a job document from a file, and its faults as lines. */
#include "command.h"

#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { READ_AT_ONCE = 65536 };

static int read_all(FILE *file, size_t limit, buffer *b) {
  char *chunk = malloc(READ_AT_ONCE);
  if (!chunk) return -1;
  size_t length;
  buffer_init(b, limit);
  buffer_text(b, "");
  while (!b->failed && (length = fread(chunk, 1, READ_AT_ONCE, file)) > 0)
    buffer_add(b, chunk, length);
  free(chunk);
  return ferror(file) ? -1 : 0;
}

int input_read(const char *path, size_t limit, char **bytes, size_t *length, int *http_status,
               char *message, size_t message_size) {
  bool standard = strcmp(path, "-") == 0;
  buffer b;
  buffer_init(&b, limit);
  errno = 0;
  *http_status = 400;
  FILE *file = standard ? stdin : fopen(path, "rb");
  if (!file || read_all(file, limit, &b) != 0) {
    snprintf(message, message_size, "cannot be read: %s", strerror(errno ? errno : EIO));
    goto out;
  }
  if (b.failed) {
    *http_status = 413;
    snprintf(message, message_size, "is larger than %zu bytes (--body-limit)", limit);
    goto out;
  }
  *bytes = b.bytes;
  *length = b.length;
  *http_status = 200;
out:
  if (file && !standard) fclose(file);
  if (*http_status != 200) buffer_free(&b);
  return *http_status == 200 ? 0 : -1;
}

const char *input_name(const char *path) {
  return strcmp(path, "-") == 0 ? "standard input" : path;
}

void tell_faults(const char *path, const fault_list *faults, const char *detail, int http_status,
                 bool problem_on_stdout) {
  buffer b;
  buffer_init(&b, 0);
  if (detail) fprintf(stderr, "%s %s\n", input_name(path), detail);
  for (int i = 0; faults && i < faults->count; i++) {
    const request_fault *f = &faults->items[i];
    fprintf(stderr, "%s: %s: %s", input_name(path), f->at && f->at[0] ? f->at : "the document",
            f->is ? f->is : "is not valid");
    if (f->got) fprintf(stderr, " (got %s)", f->got);
    fputs("\n", stderr);
  }
  if (faults && faults->found > faults->count)
    fprintf(stderr, "and %d more\n", faults->found - faults->count);
  problem_write(&b, http_status, detail, faults);
  if (!b.failed) fputs(b.bytes, problem_on_stdout ? stdout : stderr);
  buffer_free(&b);
}

int input_document(const options *o, bool problem_on_stdout, library **materials, document **d) {
  const char *path = o->operands[0];
  char *bytes = NULL, message[256];
  size_t length = 0;
  int http_status = 0, code = EXIT_BAD_INPUT;
  fault_list faults;
  faults_init(&faults);
  if (input_read(path, o->body_limit, &bytes, &length, &http_status, message, sizeof message) !=
      0) {
    tell_faults(path, NULL, message, http_status, problem_on_stdout);
    goto out;
  }
  *materials = library_open(&faults);
  if (!*materials) {
    tell_faults("the built-in materials", &faults, "cannot be read", 500, problem_on_stdout);
    code = EXIT_NOT_SOLVED;
    goto out;
  }
  if (document_read(bytes, length, NULL, *materials, d, &faults) != 0) {
    tell_faults(path, &faults, faults.no_memory ? "cannot be read: out of memory" : NULL,
                faults.no_memory ? 503 : faults.status, problem_on_stdout);
    code = faults.no_memory ? EXIT_NOT_SOLVED : EXIT_BAD_INPUT;
    goto out;
  }
  code = EXIT_GOOD;
out:
  free(bytes);
  faults_free(&faults);
  return code;
}

int put_out(const buffer *b) {
  if (b->failed) {
    fputs("coresoak: the answer cannot be written: out of memory, or a number is not finite\n",
          stderr);
    return EXIT_NOT_SOLVED;
  }
  if (fwrite(b->bytes, 1, b->length, stdout) != b->length || fflush(stdout) != 0) {
    fprintf(stderr, "coresoak: standard output cannot be written: %s\n", strerror(errno));
    return EXIT_NOT_SOLVED;
  }
  return EXIT_GOOD;
}
