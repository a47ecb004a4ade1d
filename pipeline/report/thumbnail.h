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
status box_average(const uint8_t *rgb, size_t nx, size_t ny, size_t width, uint8_t **small, size_t *small_ny, error *e);

/* Reads a PNG, averages it to at most `width` columns, encodes it as PNG with 32 levels per channel.
 *   out  *png n bytes, the caller frees it; nx, ny its size
 *   err  ST_IO not readable; ST_BAD_INPUT no PNG; ST_NO_MEMORY */
status thumbnail_png(const char *path, size_t width, uint8_t **png, size_t *n, size_t *nx, size_t *ny, error *e);

#endif
