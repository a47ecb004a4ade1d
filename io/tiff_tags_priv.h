/* What the tags of a TIFF say about the pixel size, the strip and the time. Not for other rooms. */
#ifndef SWARD_IO_TIFF_TAGS_PRIV_H
#define SWARD_IO_TIFF_TAGS_PRIV_H
#include <tiffio.h>

#include "io/picture_priv.h"

/* Reads the tags that speak of the directory at offset `at` into p->scales, p->strip_stated, p->acquired_at and p->note.
 * Private blocks stand on the first page and count when it is as wide as the measured one. Leaves `tif` on
 * any page. */
void tiff_tags_read(TIFF *tif, toff_t at, const uint8_t *file, size_t n_file, picture *p);

/* Private blocks of the directory the handle stands on; nx, ny: the measured picture. */
void tiff_private_read(TIFF *tif, size_t nx, size_t ny, picture *p);
/* Tag 33560, which stands on any of the first four directories, with offsets into the file. */
void tiff_private_table(TIFF *tif, const uint8_t *file, size_t n_file, size_t nx, picture *p);

#endif
