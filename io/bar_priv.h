/* The scale bar burnt into a micrograph. Not for other rooms. */
#ifndef SWARD_IO_BAR_PRIV_H
#define SWARD_IO_BAR_PRIV_H
#include <stddef.h>

/* Length of the scale bar in px [ny][nx], outer edge to outer edge, or 0: none is found. Looked for in the
 * strips (rows 0 .. top - 1 and ny - bottom .. ny - 1), and where there are none, as a saturated bar on the
 * picture. To be asked only when the user says that there is a bar. */
size_t bar_find(const float *px, size_t nx, size_t ny, size_t top, size_t bottom);

#endif
