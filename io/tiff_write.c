/* A grey TIFF, uncompressed, one strip, little endian: the plainest file every program reads. The ten tags of
 * a baseline grey picture (TIFF 6.0, 1992, section 4) are laid down by hand: bytes then depend on nothing but
 * the pixels. Resolution is in pixels per centimetre. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/file.h"
#include "io/png_write.h"

typedef struct {
    uint8_t *to;
} cursor;

static void put(cursor *c, uint32_t v, int bytes) {
    for (int i = 0; i < bytes; i++) *c->to++ = (uint8_t)(v >> (8 * i));
}

enum { TYPE_SHORT = 3, TYPE_LONG = 4, TYPE_RATIONAL = 5 };

static void put_tag(cursor *c, uint32_t tag, uint32_t type, uint32_t value) {
    put(c, tag, 2);
    put(c, type, 2);
    put(c, 1, 4);
    put(c, value, 4);
}

/* v as a fraction of two 32-bit numbers, to 9 digits. */
static void put_rational(cursor *c, double v) {
    double scale = 1.0;
    while (v * scale < 1e8 && scale < 1e9) scale *= 10.0;
    put(c, (uint32_t)llround(v * scale), 4);
    put(c, (uint32_t)llround(scale), 4);
}

status tiff_write(const char *path, const void *samples, const png_format *f, error *e) {
    if (f->channels != 1 || (f->bit_depth != 8 && f->bit_depth != 16))
        return fail(e, ST_BUG, "TIFF is written in grey of 8 or 16 bits, not %d channels of %d bits",
                    f->channels, f->bit_depth);
    if (!f->nx || !f->ny || f->nx > LIMIT_SIDE || f->ny > LIMIT_SIDE || f->nx * f->ny > LIMIT_PIXELS)
        return fail(e, ST_BAD_INPUT, "a picture of %zu x %zu pixels cannot be written", f->nx, f->ny);
    double per_cm = f->px_nm > 0.0 ? 1e7 / f->px_nm : 0.0;
    int scaled = per_cm >= 1e-3 && per_cm <= 4e9;
    uint32_t tags = scaled ? 12 : 9;
    size_t width = (size_t)f->bit_depth / 8, data = f->nx * f->ny * width;
    size_t head = 8 + 2 + 12 * (size_t)tags + 4 + 16;
    uint8_t *bytes = mem_array(head + data, 1);
    if (!bytes) return NO_MEMORY(e, "the TIFF");
    cursor c = { bytes };
    memcpy(c.to, "II*\0", 4);
    c.to += 4;
    put(&c, 8, 4);
    put(&c, tags, 2);
    uint32_t rationals = (uint32_t)(head - 16);
    put_tag(&c, 256, TYPE_LONG, (uint32_t)f->nx);
    put_tag(&c, 257, TYPE_LONG, (uint32_t)f->ny);
    put_tag(&c, 258, TYPE_SHORT, (uint32_t)f->bit_depth);
    put_tag(&c, 259, TYPE_SHORT, 1); /* no compression */
    put_tag(&c, 262, TYPE_SHORT, 1); /* black is zero */
    put_tag(&c, 273, TYPE_LONG, (uint32_t)head);
    put_tag(&c, 277, TYPE_SHORT, 1);
    put_tag(&c, 278, TYPE_LONG, (uint32_t)f->ny);
    put_tag(&c, 279, TYPE_LONG, (uint32_t)data);
    if (scaled) {
        put_tag(&c, 282, TYPE_RATIONAL, rationals);
        put_tag(&c, 283, TYPE_RATIONAL, rationals + 8);
        put_tag(&c, 296, TYPE_SHORT, 3); /* centimetre */
    }
    put(&c, 0, 4);
    put_rational(&c, scaled ? per_cm : 1.0);
    put_rational(&c, scaled ? per_cm : 1.0);
    if (width == 1)
        memcpy(c.to, samples, data);
    else
        for (size_t i = 0; i < f->nx * f->ny; i++) put(&c, ((const uint16_t *)samples)[i], 2);
    status st = file_write(path, bytes, head + data, e);
    free(bytes);
    return st;
}
