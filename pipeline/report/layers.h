/* A small copy of a micrograph with what was found on it kept apart, so that a page can show and hide each: layers/<stem>.png holds
 * the grey levels in red, the borders of the cells in green, and in blue what is not counted: cells that the frame cuts, info
 * strip. Centres are in features/<stem>.csv. */
#ifndef SWARD_REPORT_LAYERS_H
#define SWARD_REPORT_LAYERS_H
#include <stddef.h>
#include <stdint.h>

#include "base/status.h"
#include "io/micrograph.h"
#include "metrics/texture.h"
#include "report/thumbnail.h"

/* That PNG in memory; the caller frees *bytes.
 *   in   m the plane that was measured, with its strip; t what was found on it, with its label map (NULL: no borders)
 *   err  ST_BUG t was measured on a plane of another size; ST_NO_MEMORY */
status layers_encode(const micrograph *m, const texture *t, uint8_t **bytes, size_t *n, error *e);

typedef struct {
    small_picture ground; /* JPEG, grey */
    uint8_t *cells, *cut; /* PNG, transparent where there is nothing; owned; cut: cells that the frame cuts */
    size_t n_cells, n_cut;
    size_t nx, ny;
    size_t strip_above, strip_below; /* rows of info strip */
} page_layers;                       /* {0} = empty */

/* At most `width` columns of it.
 *   err  ST_IO, ST_BAD_INPUT no such picture, ST_NO_MEMORY */
status layers_read(const char *path, size_t width, page_layers *out, error *e);
void page_layers_free(page_layers *l);

#endif
