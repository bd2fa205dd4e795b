/* audit.h: what the HTTP library lets through and a careful server must not (RFC 9110, RFC 9112).
 */
#ifndef CORESOAK_AUDIT_H
#define CORESOAK_AUDIT_H

#include "exchange.h"

/* Looks at the target and the headers of a request whose body has not been read. Returns 0, or the
   HTTP status to refuse it with (400, 414, 417, 431, 501, 505), the connection to be closed
   afterwards, and why in *why (a constant).

   Not seen here, because the library has already normalised it: line feeds without carriage return,
   folded header lines, white space inside chunk sizes, what follows a NUL in a header line, a
   header without a name. What the library cannot parse at all it answers itself, with a page
   instead of a problem document. */
int audit_request(const request *q, const char **why);

/* A trace context of version 00 to fe that the W3C's recommendation calls valid. */
bool audit_traceparent(const char *value);

#endif
