/* XML texts that state a pixel size. Not for other rooms. */
#ifndef SWARD_IO_METADATA_XML_SCALE_PRIV_H
#define SWARD_IO_METADATA_XML_SCALE_PRIV_H
#include "io/picture_priv.h"

/* Each adds scale, time, facts, notes; a text that is no XML of its kind adds a note or nothing. nx: columns of
 * the stored picture. */
/* image: base name of the file meant, for a text that speaks of several; NULL: the file the text stands in. */
void ome_read(const char *text, size_t n, size_t nx, const char *image, picture *p);
void tag_34683_read(const char *text, size_t n, size_t nx, picture *p);
/* base64 of XML; text of another kind under the same tag is left alone. */
void tag_34680_read(const char *text, size_t n, size_t nx, picture *p);

#endif
