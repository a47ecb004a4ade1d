/* The true levels of a 16-bit picture. Not for other rooms. */
#ifndef SWARD_IO_LEVELS_PRIV_H
#define SWARD_IO_LEVELS_PRIV_H
#include <stddef.h>

/* Bits of the detector behind n levels of a 16-bit file, 8 10 12 14 or 16, and the level of the file that is
 * the detector's top; px [n] is rescaled so that this top is 1. */
int levels_find(float *px, size_t n, unsigned *top);

#endif
