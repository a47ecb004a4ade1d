/* Text files beside a micrograph. Not for other rooms. */
#ifndef SWARD_IO_METADATA_SIDECAR_PRIV_H
#define SWARD_IO_METADATA_SIDECAR_PRIV_H
#include "io/picture_priv.h"

/* Looks beside `path` for NAME.EXT.txt, NAME.txt, NAME-EXT.hdr, NAME.hdr, NAME.EXT.json, NAME.json (letters of
 * either case) and adds to the decoded picture what the first of them that states a size says: size, strip
 * rows, facts. A sidecar that cannot be used is named in p->scales.note. */
void sidecar_read(const char *path, picture *p);

#endif
