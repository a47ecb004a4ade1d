/* What the tags of a TIFF say about the pixel size, the strip and the time. Not for other rooms. */
#ifndef SWARD_IO_TIFF_TAGS_PRIV_H
#define SWARD_IO_TIFF_TAGS_PRIV_H
#include <tiffio.h>

#include "io/picture_priv.h"

/* Reads the tags that speak of the directory at offset `at` into p->scales, p->strip_stated, p->acquired_at and p->note.
 * Private blocks stand on the first page and count when it is as wide as the measured one. Leaves `tif` on
 * any page. */
void tiff_tags_read(TIFF *tif, toff_t at, picture *p);

/* Instrument blocks, NUL-terminated copies; `nx`, `ny`: the stored picture. */
void tag_34118_read(const char *text, size_t nx, picture *p);
void tag_34682_read(const char *text, size_t nx, size_t ny, picture *p);

#endif
