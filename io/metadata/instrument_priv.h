/* Text blocks of instruments, wherever they stand: in a private TIFF tag or in a file beside the picture. Not
 * for other rooms. */
#ifndef SWARD_IO_METADATA_INSTRUMENT_PRIV_H
#define SWARD_IO_METADATA_INSTRUMENT_PRIV_H
#include "io/picture_priv.h"

/* All take NUL-terminated copies; the stored picture is p->nx x p->ny, or nx x ny where the picture is not
 * decoded yet. They add the scale, strip rows, time, facts, and notes on what does not fit. */
void tag_34118_read(const char *text, size_t nx, picture *p);
void tag_34682_read(const char *text, size_t nx, size_t ny, picture *p);

/* Sections [MAIN] and [SEM]: a .hdr file, or the chunks of tag 50431. */
void main_block_read(const char *text, scale_rank rank, const char *name, size_t nx, size_t ny, picture *p);
/* [SemImageFile]; `image` is the picture's own name, to compare with the one in the block. */
void sem_image_file_read(const char *text, const char *image, size_t nx, size_t ny, picture *p);
/* Lines of "$CM_KEY value" and "$$SM_KEY value". */
void dollar_block_read(const char *text, size_t nx, picture *p);

/* The name in a path of either kind of system; points into it. */
const char *instrument_bare_name(const char *path);

/* Dates as instruments write them: "11 Apr 2023", "2016-05-16", "2020/08/31", with a clock "8:40:47" or
 * "05:06:40 PM" or NULL. day_first: "31.08.2020" and "31/08/2020", else "08/31/2020". Sets p->acquired_at. */
void instrument_time(const char *date, const char *clock, int day_first, picture *p);

#endif
