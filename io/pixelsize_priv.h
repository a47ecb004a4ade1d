/* Which statement about the pixel size counts. Not for other rooms. */
#ifndef SWARD_IO_PIXELSIZE_PRIV_H
#define SWARD_IO_PIXELSIZE_PRIV_H
#include "io/micrograph.h"
#include "io/picture_priv.h"

/* Fills px_nm, px_u_rel, px_source, y_stretch (height over width of a pixel), the statements, and the flags
 * and note that belong to them. `px_u_rel` is the uncertainty
 * of a source that implies none of its own. */
void pixelsize_choose(const scales *s, double px_u_rel, micrograph *m);

#endif
