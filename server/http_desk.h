/* http_desk.h: one thread for answers that take long to make (a large document to read, a large
   history to write), so that the threads that move bytes stay free. */
#ifndef CORESOAK_HTTP_DESK_H
#define CORESOAK_HTTP_DESK_H

#include <stdbool.h>

typedef struct http_desk http_desk;

/* `work` is called for each item in order of arrival, from the desk's thread; closing: not to begin
   anything long. NULL out of memory or threads. */
http_desk *desk_open(void (*work)(void *item, bool closing));

/* Hands an item over; false out of memory. */
bool desk_hand(http_desk *d, void *item);

/* Ends the item at work, and calls `work` with closing for the rest. NULL is fine. */
void desk_close(http_desk *d);

#endif
