/* Text files beside a micrograph. Not for other rooms. */
#ifndef SWARD_IO_SIDECAR_PRIV_H
#define SWARD_IO_SIDECAR_PRIV_H
#include "io/picture_priv.h"

/* Looks beside `path` for NAME.EXT.txt, NAME.txt, NAME.EXT.json, NAME.json (letters of either case) and adds
 * what the first of them that states a size says. A sidecar that cannot be used is named in s->note. */
void sidecar_read(const char *path, scales *s);

#endif
