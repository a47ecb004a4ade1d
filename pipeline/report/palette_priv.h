/* The 256 colours of an overlay: 128 greys for the micrograph, the rest for the inks laid over it. Not for other rooms. */
#ifndef SWARD_REPORT_PALETTE_PRIV_H
#define SWARD_REPORT_PALETTE_PRIV_H
#include <stddef.h>
#include <stdint.h>

#include "report/pen_priv.h"

typedef struct {
    uint8_t colour[256][3];
    uint8_t nearest[1 << 15]; /* place of the nearest colour, by the upper 5 bits of red, green, blue;
                                0: not asked for yet */
} palette;

/* Greys, then mixtures of each ink with greys, denser for fewer inks. */
void palette_make(const ink *inks, size_t n, palette *p);

/* Pixels of a cairo RGB24 or ARGB32 surface as places in the palette. */
void palette_index(palette *p, const uint32_t *pixels, size_t n, uint8_t *index);

#endif
