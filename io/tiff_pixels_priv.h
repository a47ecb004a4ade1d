/* The pixels of one TIFF directory. Not for other rooms. */
#ifndef SWARD_IO_TIFF_PIXELS_PRIV_H
#define SWARD_IO_TIFF_PIXELS_PRIV_H
#include <tiffio.h>

#include "io/picture_priv.h"

/* What libtiff complained about while it read: filled by the handlers of tiff.c. */
typedef struct {
    char what[200]; /* the first complaint */
    int damaged;    /* a codec went on where it should have stopped */
} tiff_watch;

/* Reads the directory that all handles stand on into p->px, 0..1, in the stored orientation; sets bit_depth,
 * compression, flags and note.
 *   in   tif[0]; tif[1], tif[2] stand on the same directory when its planes are separate, else NULL
 *        watch of all three; n_bytes of the file
 *   err  ST_BAD_INPUT a variant that is not read (says which), damaged; ST_NO_MEMORY larger than the limits */
status tiff_pixels_read(TIFF *const tif[3], const tiff_watch *watch, size_t n_bytes, size_t max_pixels,
                        picture *p, error *e);

#endif
