/* Micrographs and predictions remembered in OUT/cache, so that a second run neither measures nor predicts again what has
 * not changed, with the same bits. The key says what a value depends on; whoever makes it must leave nothing out. */
#ifndef SWARD_APP_CACHE_H
#define SWARD_APP_CACHE_H
#include "app/examine.h"
#include "app/pack.h"
#include "link/predict.h"

/* What an examined micrograph (before examine_finish) came to, as bytes. Reading: 0 when the bytes are
 * no such thing; `x` is then to be freed all the same. */
int cache_examined(pack *p, examined *x);

/* 1: x (examined_free) is as it was put. */
int cache_get(const char *folder, const char *key, examined *x);
/* err ST_IO, ST_NO_MEMORY */
status cache_put(const char *folder, const char *key, const examined *x, error *e);

/* The same for predictions (prediction_free). */
int cache_get_prediction(const char *folder, const char *key, prediction *d);
status cache_put_prediction(const char *folder, const char *key, const prediction *d, error *e);

/* Names the layout of the bytes; part of every key. */
void cache_layout_text(textbuf *out);

#endif
