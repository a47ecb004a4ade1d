/* PNG out, through libpng, into memory and from there to disk in one rename. Settings are fixed and no time
 * or text chunk is written, so the same pixels give the same bytes (for one version of zlib). The second
 * place with libpng's longjmp; png_encode is the frame it returns to. */
#include "io/png_write.h"

#include <math.h>
#include <png.h>
#include <setjmp.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/file.h"

typedef struct {
    uint8_t *bytes;
    size_t n, room;
    char what[160];
} sink;

static void on_error(png_structp png, png_const_charp text) {
    sink *s = png_get_error_ptr(png);
    snprintf(s->what, sizeof s->what, "%s", text);
    png_longjmp(png, 1);
}

static void on_warning(png_structp png, png_const_charp text) { (void)png, (void)text; }

static void on_write(png_structp png, png_bytep from, size_t n) {
    sink *s = png_get_io_ptr(png);
    if (n > s->room - s->n) {
        size_t room = s->room ? s->room : (size_t)1 << 16;
        while (room < s->n + n) room *= 2;
        uint8_t *bytes = mem_grow(s->bytes, room, 1);
        if (!bytes) png_error(png, "not enough memory");
        s->bytes = bytes;
        s->room = room;
    }
    memcpy(s->bytes + s->n, from, n);
    s->n += n;
}

static void on_flush(png_structp png) { (void)png; }

/* pHYs holds whole pixels per metre up to 2^31 - 1 (0.466 nm) and readers take it for a screen's above 1 um;
 * sCAL says the same of the specimen in full digits and is written beyond those two ends. */
static void put_scale(png_structp png, png_infop info, double px_nm) {
    if (!(px_nm > 0.0) || !isfinite(px_nm)) return;
    double per_metre = 1e9 / px_nm;
    if (per_metre >= 1.0 && per_metre <= 2147483647.0) {
        png_uint_32 k = (png_uint_32)llround(per_metre);
        png_set_pHYs(png, info, k, k, PNG_RESOLUTION_METER);
    }
    if (per_metre > 2147483647.0 || px_nm >= 1000.0) {
        char text[32];
        snprintf(text, sizeof text, "%.9g", px_nm * 1e-9);
        png_set_sCAL_s(png, info, PNG_SCALE_METER, text, text);
    }
}

static void put_palette(png_structp png, png_infop info, const uint8_t *palette) {
    png_color colours[256];
    for (size_t i = 0; i < 256; i++) colours[i] = (png_color){ palette[3 * i], palette[3 * i + 1], palette[3 * i + 2] };
    png_set_PLTE(png, info, colours, 256);
}

/* Everything that may longjmp. */
static void encode(png_structp png, png_infop info, const uint8_t *samples, const uint8_t *palette, const png_format *f) {
    static const uint16_t one = 1;
    uint8_t low_first = 0;
    memcpy(&low_first, &one, 1);
    png_set_user_limits(png, (png_uint_32)LIMIT_SIDE, (png_uint_32)LIMIT_SIDE);
    int kind = palette ? PNG_COLOR_TYPE_PALETTE : f->channels == 3 ? PNG_COLOR_TYPE_RGB : PNG_COLOR_TYPE_GRAY;
    png_set_IHDR(png, info, (png_uint_32)f->nx, (png_uint_32)f->ny, f->bit_depth, kind, PNG_INTERLACE_NONE,
                 PNG_COMPRESSION_TYPE_DEFAULT, PNG_FILTER_TYPE_DEFAULT);
    png_set_compression_level(png, 4);
    png_set_compression_strategy(png, 1); /* Z_FILTERED */
    png_set_filter(png, PNG_FILTER_TYPE_BASE, palette ? PNG_FILTER_NONE : PNG_FILTER_SUB);
    if (palette) put_palette(png, info, palette);
    put_scale(png, info, f->px_nm);
    png_write_info(png, info);
    if (f->bit_depth == 16 && low_first) png_set_swap(png);
    size_t row = f->nx * (size_t)f->channels * (size_t)(f->bit_depth / 8);
    for (size_t y = 0; y < f->ny; y++) png_write_row(png, samples + y * row);
    png_write_end(png, NULL);
}

static status check_format(const png_format *f, error *e) {
    if ((f->channels != 1 && f->channels != 3) || (f->bit_depth != 8 && f->bit_depth != 16))
        return fail(e, ST_BUG, "no picture is written with %d channels of %d bits", f->channels,
                    f->bit_depth);
    if (!f->nx || !f->ny || f->nx > LIMIT_SIDE || f->ny > LIMIT_SIDE)
        return fail(e, ST_BAD_INPUT, "a picture of %zu x %zu pixels cannot be written; a side is 1 to %zu",
                    f->nx, f->ny, LIMIT_SIDE);
    return ST_OK;
}

static status to_memory(const void *samples, const uint8_t *palette, const png_format *f, uint8_t **bytes, size_t *n, error *e) {
    status st = check_format(f, e);
    if (st != ST_OK) return st;
    sink *s = mem_array(1, sizeof *s); /* on the heap: whole after a longjmp */
    if (!s) return NO_MEMORY(e, "the PNG");
    png_structp png = png_create_write_struct(PNG_LIBPNG_VER_STRING, s, on_error, on_warning);
    png_infop info = png ? png_create_info_struct(png) : NULL;
    if (!info)
        st = NO_MEMORY(e, "the PNG");
    else if (setjmp(png_jmpbuf(png)))
        st = fail(e, ST_NO_MEMORY, "the PNG cannot be written: %s", s->what);
    else {
        png_set_write_fn(png, s, on_write, on_flush);
        encode(png, info, samples, palette, f);
    }
    png_destroy_write_struct(&png, &info);
    if (st == ST_OK) {
        *bytes = s->bytes;
        *n = s->n;
        s->bytes = NULL;
    }
    free(s->bytes);
    free(s);
    return st;
}

status png_encode(const void *samples, const png_format *f, uint8_t **bytes, size_t *n, error *e) {
    return to_memory(samples, NULL, f, bytes, n, e);
}

status png_encode_palette(const uint8_t *samples, const uint8_t *palette, const png_format *f, uint8_t **bytes, size_t *n,
                          error *e) {
    if (f->channels != 1 || f->bit_depth != 8)
        return fail(e, ST_BUG, "a palette goes with one channel of 8 bits, not with %d of %d", f->channels, f->bit_depth);
    return to_memory(samples, palette, f, bytes, n, e);
}

status png_write(const char *path, const void *samples, const png_format *f, error *e) {
    uint8_t *bytes = NULL;
    size_t n = 0;
    status st = png_encode(samples, f, &bytes, &n, e);
    if (st == ST_OK) st = file_write(path, bytes, n, e);
    free(bytes);
    return st;
}
