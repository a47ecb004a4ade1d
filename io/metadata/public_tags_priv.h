/* The public tags about scale and time, which TIFF directories and Exif blocks share. Not for other rooms. */
#ifndef SWARD_IO_METADATA_PUBLIC_TAGS_PRIV_H
#define SWARD_IO_METADATA_PUBLIC_TAGS_PRIV_H
#include <stddef.h>
#include <stdint.h>

#include "io/picture_priv.h"

/* Resolution and description together (tags 282, 283, 296, 270): a line `unit=` in the text redefines the resolution.
 *   in   text  the description or NULL; x, y pixels per unit, 0: unknown; unit as tag 296: 1 none, 2 inch, 3 cm
 *   out  p->scales. XML is left to the caller */
void public_scale(const char *text, double x, double y, unsigned unit, picture *p);

/* Tag 306 when no better date is known. */
void public_date(const char *text, picture *p);

/* An Exif block: the n bytes from its byte order on. Anything damaged ends the reading; nothing is refused.
 *   in   p->nx as stored
 *   out  scales, date, software of p; returns the orientation, 1 to 8 */
int exif_read(const uint8_t *bytes, size_t n, picture *p);

#endif
