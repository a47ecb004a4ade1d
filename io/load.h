/* Bytes of an image file -> micrograph. Survives anything; memory stays within the limits. */
#ifndef SWARD_IO_LOAD_H
#define SWARD_IO_LOAD_H
#include <stdint.h>

#include "base/status.h"
#include "base/text.h"
#include "io/micrograph.h"

/* What a standard of known pitch said about the pixels of one magnification. */
typedef struct {
    char name[160], date[32];
    double px_x_nm, px_y_nm, u_rel;
    double nominal_px_nm, magnification; /* of the micrographs it is for; NAN or 0: not known, at least one is */
    size_t width_px;
} scale_standard;

typedef struct {
    double px_nm_option; /* --px, nm per pixel; NAN: none. Outranks all */
    double px_nm_sheet;  /* sample sheet column px_nm; NAN: none */
    double px_u_rel;     /* relative standard uncertainty of a stated pixel size when the source gives none */
    double bar_nm;       /* what the burnt-in scale bar stands for, nm; NAN: the user does not say */
    int crop_strip;      /* find and crop the info strip */
    int find_marks;      /* find what is drawn over the specimen */
    int correct_tilt;    /* stretch the rows of a tilted view the instrument has not corrected */
    const scale_standard *standard; /* replaces the instrument's own pixel size where it applies; NULL: none; borrowed */
    size_t page;         /* of a file with several pages, from 1; 0: the largest that is no thumbnail */
    size_t max_pixels;   /* refuse larger pictures */
    size_t max_bytes;    /* refuse larger files */
} load_options;

load_options load_defaults(void); /* no stated size, px_u_rel 0.01, crop and marks on, the limits of base/limits.h */

/* Reads, decodes, finds pixel size (sidecar beside `path` included) and strip. The pixel size is that of the most
 * specific source: option, sheet, sidecar, instrument tags, description, sCAL, and TIFF resolution or PNG pHYs only below
 * 1 um. Of pixels that are not square the rows are resampled to the width and PX_UNEQUAL says so. A tilted view
 * (up to 60 degrees, by the file's own word, not corrected by the instrument) gets its rows stretched by 1/cos(tilt) and the
 * flag TILT_CORRECTED; what cannot be corrected gets TILT_KNOWN. Scale bars, letters and the like inside the field are masked (MARKS). A 16-bit file of a detector of fewer bits counts by its levels.
 *   out  m   as described in micrograph.h; untouched on failure
 *   own  caller frees m with micrograph_free
 *   err  ST_IO cannot be read; ST_BAD_INPUT empty, truncated, not an image, a variant that is not read (says which);
 *        ST_NO_MEMORY larger than the limits. The sentence does not repeat the path. */
status load_file(const char *path, const load_options *o, micrograph *m, error *e);

/* The same when the n bytes of `path` are already read: the path only leads to the sidecar; NULL: none. */
status load_bytes(const uint8_t *bytes, size_t n, const char *path, const load_options *o, micrograph *m, error *e);

/* Names and SHA-256 of the text files load_file would ask about the picture: what else its pixel size may depend on. */
void sidecar_text(const char *path, textbuf *out);

/* The same for bytes in memory, without sidecar (used by the fuzz targets). */
status load_memory(const uint8_t *bytes, size_t n, const load_options *o, micrograph *m, error *e);

/* 1 when the file name ends like an image this program reads (png tif tiff jpg jpeg, any case). */
int load_knows_name(const char *path);

#endif
