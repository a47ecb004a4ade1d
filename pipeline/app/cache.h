/* Measured micrographs remembered in OUT/cache by content, measuring protocol and version: a second run reads them
 * instead of measuring again, with the same bits. A damaged or foreign entry is as good as none. */
#ifndef SWARD_APP_CACHE_H
#define SWARD_APP_CACHE_H
#include "base/status.h"
#include "metrics/texture.h"

/* 1: `t` holds the texture (without its label map; texture_free) and overlay_hash what the overlay's file had. */
int cache_get(const char *folder, const char *key, texture *t, char overlay_hash[65]);

/* err ST_IO, ST_NO_MEMORY; the caller may go on without */
status cache_put(const char *folder, const char *key, const texture *t, const char *overlay_hash, error *e);

#endif
