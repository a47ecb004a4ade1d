/* The info strip (data bar) at the bottom or top of a micrograph. Not for other rooms. */
#ifndef SWARD_IO_STRIP_PRIV_H
#define SWARD_IO_STRIP_PRIV_H
#include <stddef.h>

/* Rows of the strip at the bottom of px [ny][nx], 0: none is found. Needs scratch memory; without it: 0. */
size_t strip_find(const float *px, size_t nx, size_t ny);
/* The same for a strip at the top, over the whole width. */
size_t strip_find_top(const float *px, size_t nx, size_t ny);

#endif
