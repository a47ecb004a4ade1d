/* What was found, drawn on the micrograph: cells, markers, the guard frame, a scale bar, one spacing as a ruler. */
#ifndef SWARD_REPORT_OVERLAY_H
#define SWARD_REPORT_OVERLAY_H
#include <stdint.h>

#include "base/status.h"
#include "io/micrograph.h"
#include "metrics/texture.h"

/* RGB, [ny][nx][3], plane size (strip cropped). Needs t->cells for the cell borders. Caller frees *rgb. */
status overlay_draw(const micrograph *m, const texture *t, uint8_t **rgb, error *e);

#endif
