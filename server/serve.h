/* serve.h: the service. */
#ifndef CORESOAK_SERVE_H
#define CORESOAK_SERVE_H

#include "options.h"

/* Runs the service until SIGTERM or SIGINT; returns the exit code. */
int command_serve(const options *o);

#endif
