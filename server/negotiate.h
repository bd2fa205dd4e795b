/* negotiate.h: what a caller prefers: Accept, Accept-Encoding, Prefer, If-None-Match. */
#ifndef CORESOAK_NEGOTIATE_H
#define CORESOAK_NEGOTIATE_H

#include <stdbool.h>

/* Index of the media type among `offered` (NULL-terminated; the first is preferred at equal weight)
   that an Accept header (NULL: anything) likes best; -1 if it takes none of them. RFC 9110
   section 12.5.1. */
int negotiate_media(const char *accept, const char *const *offered);

/* True if an Accept-Encoding header (NULL: none) takes gzip at least as gladly as no coding. */
bool negotiate_gzip(const char *accept_encoding);

/* True if a Content-Type is `type`, whatever its parameters, except a charset other than UTF-8. */
bool media_type_is(const char *content_type, const char *type);

/* Prefer (RFC 7240). */
typedef struct preference {
  bool respond_async;
  double wait; /* s, NAN if not given */
} preference;
preference negotiate_prefer(const char *prefer);

/* True if an If-None-Match header (NULL: none) names the tag, given with its quotes; weak
 * comparison. */
bool negotiate_none_match(const char *if_none_match, const char *tag);

#endif
