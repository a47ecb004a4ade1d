/* What the tags of a TIFF say about the pixel size. Not for other rooms. */
#ifndef SWARD_IO_TIFF_TAGS_PRIV_H
#define SWARD_IO_TIFF_TAGS_PRIV_H
#include <tiffio.h>

#include "io/picture_priv.h"

/* Reads tags of the directory that `tif` stands on into p->scales, p->strip_stated, p->acquired_at. */
void tiff_tags_read(TIFF *tif, picture *p);

#endif
