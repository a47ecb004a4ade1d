/* A small copy of an overlay for the page. */
#ifndef SWARD_REPORT_THUMBNAIL_H
#define SWARD_REPORT_THUMBNAIL_H
#include <stddef.h>
#include <stdint.h>

#include "base/status.h"

/* Mean over the source pixels (shares of pixels included) that each target pixel covers; never enlarges.
 *   in   rgb [ny][nx][3], 0 < width <= nx
 *   out  *small [*small_ny][width][3], the caller frees it; the shape of the picture is kept
 *   err  ST_NO_MEMORY */
status box_average(const uint8_t *rgb, size_t nx, size_t ny, size_t width, uint8_t **small, size_t *small_ny,
                   error *e);

typedef struct {
    uint8_t *jpeg; /* owned */
    size_t n, nx, ny;
} small_picture; /* {0} = empty */

/* A JPEG of grey (channels 1) or RGB (3) samples [ny][nx][channels]. err ST_NO_MEMORY */
status jpeg_make(const uint8_t *samples, size_t nx, size_t ny, int channels, small_picture *out, error *e);

/* Reads a PNG and makes two JPEG copies: the whole averaged to at most `width` columns (0: none), and the middle at full
 * resolution, at most detail_nx x detail_ny (0: none).
 *   out  free both with small_picture_free, also after a failure
 *   err  ST_IO not readable; ST_BAD_INPUT no PNG; ST_NO_MEMORY */
status thumbnail_make(const char *path, size_t width, size_t detail_nx, size_t detail_ny, small_picture *whole,
                      small_picture *detail, error *e);
/* The same for the overlay whose bytes have this mark, remembered in the folder `cache`; either NULL: made anew. */
status thumbnail_recall(const char *cache, const char *mark, const char *path, size_t width, size_t detail_nx, size_t detail_ny,
                        small_picture *whole, small_picture *detail, error *e);
void small_picture_free(small_picture *s);

#endif
