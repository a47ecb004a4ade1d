/* PNG out: overlays (palette), figures (RGB) and synthetic micrographs (grey). Deterministic bytes for the same pixels. */
#ifndef SWARD_IO_PNG_WRITE_H
#define SWARD_IO_PNG_WRITE_H
#include <stddef.h>
#include <stdint.h>

#include "base/status.h"

typedef struct {
    size_t nx, ny;
    int channels;  /* 1 grey, 3 RGB */
    int bit_depth; /* 8 or 16 */
    double px_nm;  /* written as pHYs when > 0 (pixels per metre), else no scale */
} png_format;

/* Encodes to memory. `samples` are [ny][nx][channels], uint8_t or uint16_t (host order). Caller frees *bytes. */
status png_encode(const void *samples, const png_format *f, uint8_t **bytes, size_t *n, error *e);
/* The same with a palette: samples (one channel of 8 bits) are places in it, its 256 colours
 * red, green, blue one after the other. */
status png_encode_palette(const uint8_t *samples, const uint8_t *palette, const png_format *f, uint8_t **bytes, size_t *n,
                          error *e);
/* png_encode + atomic write. */
status png_write(const char *path, const void *samples, const png_format *f, error *e);

/* Grey TIFF, uncompressed, 8 or 16 bit, resolution tags (per centimetre) when px_nm > 0. Atomic. */
status tiff_write(const char *path, const void *samples, const png_format *f, error *e);

#endif
