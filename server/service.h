/* service.h: the service as a whole: store, workers, routes, HTTP. It knows no kind of job by name.
 */
#ifndef CORESOAK_SERVICE_H
#define CORESOAK_SERVICE_H

#include "kind.h"
#include "library.h"
#include "options.h"

typedef struct service service;

/* Starts everything and tests itself; returns once requests are answered. `kinds` (NULL-terminated)
   and `materials` (NULL: no library) are kept, as are the options' texts. NULL with one line in
   message when it cannot start; a failed self-test is no reason: then it runs and is never ready.
 */
service *service_open(const options *o, const job_kind *const *kinds, const library *materials,
                      char *message, size_t size);

int service_port(const service *s);
bool service_is_ready(const service *s);

/* Refuses new jobs, lets those it has end for at most o->drain seconds, cancels the rest, answers
   whoever waits, closes, frees. Returns the number of jobs that were cancelled. */
long service_close(service *s);

#endif
