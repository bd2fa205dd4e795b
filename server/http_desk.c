/* http_desk.c: a queue of items and the thread that works them off. The mutex guards the queue and
 * `closing`. */
#include "http_desk.h"

#include <pthread.h>
#include <stdlib.h>

typedef struct paper {
  struct paper *next;
  void *item;
} paper;

struct http_desk {
  void (*work)(void *item, bool closing);
  pthread_mutex_t mutex;
  pthread_cond_t more;
  pthread_t thread;
  paper *first, **end;
  bool closing;
};

static paper *take(http_desk *d) {
  paper *p = d->first;
  if (!p) return NULL;
  d->first = p->next;
  if (!d->first) d->end = &d->first;
  return p;
}

static void *sit(void *self) {
  http_desk *d = self;
  pthread_mutex_lock(&d->mutex);
  for (;;) {
    paper *p = take(d);
    if (!p && d->closing) break;
    if (!p) {
      pthread_cond_wait(&d->more, &d->mutex);
      continue;
    }
    bool closing = d->closing;
    pthread_mutex_unlock(&d->mutex);
    d->work(p->item, closing);
    free(p);
    pthread_mutex_lock(&d->mutex);
  }
  pthread_mutex_unlock(&d->mutex);
  return NULL;
}

http_desk *desk_open(void (*work)(void *item, bool closing)) {
  http_desk *d = calloc(1, sizeof *d);
  if (!d) return NULL;
  d->work = work;
  d->end = &d->first;
  pthread_mutex_init(&d->mutex, NULL);
  pthread_cond_init(&d->more, NULL);
  if (pthread_create(&d->thread, NULL, sit, d) == 0) return d;
  free(d);
  return NULL;
}

bool desk_hand(http_desk *d, void *item) {
  paper *p = calloc(1, sizeof *p);
  if (!p) return false;
  p->item = item;
  pthread_mutex_lock(&d->mutex);
  *d->end = p;
  d->end = &p->next;
  pthread_cond_signal(&d->more);
  pthread_mutex_unlock(&d->mutex);
  return true;
}

void desk_close(http_desk *d) {
  if (!d) return;
  pthread_mutex_lock(&d->mutex);
  d->closing = true;
  pthread_cond_signal(&d->more);
  pthread_mutex_unlock(&d->mutex);
  pthread_join(d->thread, NULL);
  pthread_cond_destroy(&d->more);
  pthread_mutex_destroy(&d->mutex);
  free(d);
}
