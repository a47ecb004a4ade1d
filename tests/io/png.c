/* PNG in: every colour type and depth from our own encoder and from libpng directly, interlaced, damaged,
 * cut. */
#include <png.h>
#include <stdint.h>
#include <stdlib.h>

#include "base/limits.h"
#include "check.h"
#include "io/picture_priv.h"
#include "io/png_write.h"

enum { NX = 41, NY = 37 };

typedef struct {
    uint8_t bytes[1 << 16];
    size_t n;
} memory;

static void to_memory(png_structp png, png_bytep from, size_t n) {
    memory *m = png_get_io_ptr(png);
    if (m->n + n > sizeof m->bytes) png_error(png, "test buffer");
    memcpy(m->bytes + m->n, from, n);
    m->n += n;
}

/* The level of pixel (x, y) in a picture of `depth` bits. */
static unsigned level(size_t x, size_t y, int depth) {
    unsigned v = (unsigned)(x * 7919 + y * 104729 + x * y * 31);
    return (v ^ v >> 5) & ((1u << depth) - 1u);
}

/* Writes NX x NY through libpng; type as PNG_COLOR_TYPE_*, colours equal unless `coloured`. */
static void make(memory *m, int type, int depth, int interlace, int coloured) {
    png_structp png = png_create_write_struct(PNG_LIBPNG_VER_STRING, NULL, NULL, NULL);
    png_infop info = png_create_info_struct(png);
    static uint8_t rows[NY][NX * 8];
    uint8_t *pointers[NY];
    memset(rows, 0, sizeof rows);
    m->n = 0;
    int colours = type & PNG_COLOR_MASK_COLOR && type != PNG_COLOR_TYPE_PALETTE ? 3 : 1;
    int samples = colours + (type & PNG_COLOR_MASK_ALPHA ? 1 : 0);
    for (size_t y = 0; y < NY; y++) {
        pointers[y] = rows[y];
        for (size_t x = 0; x < NX; x++)
            for (int k = 0; k < samples; k++) {
                unsigned v = k == colours ? 9u : level(x + (coloured ? (size_t)k : 0), y, depth);
                size_t at = x * (size_t)samples + (size_t)k;
                if (depth == 16)
                    rows[y][2 * at] = (uint8_t)(v >> 8), rows[y][2 * at + 1] = (uint8_t)v;
                else if (depth == 8)
                    rows[y][at] = (uint8_t)v;
                else
                    rows[y][at * (size_t)depth / 8] |=
                        (uint8_t)(v << (8 - depth - (int)(at * (size_t)depth % 8)));
            }
    }
    png_set_write_fn(png, m, to_memory, NULL);
    png_set_IHDR(png, info, NX, NY, depth, type, interlace, PNG_COMPRESSION_TYPE_DEFAULT,
                 PNG_FILTER_TYPE_DEFAULT);
    if (type == PNG_COLOR_TYPE_PALETTE) {
        png_color p[256];
        for (int i = 0; i < 256; i++)
            p[i] = (png_color){ (png_byte)(255 - i), (png_byte)(255 - i),
                                (png_byte)(255 - (coloured ? i / 2 : i)) };
        png_set_PLTE(png, info, p, 1 << depth);
    }
    png_set_gAMA(png, info, 0.45455);
    png_set_rows(png, info, pointers);
    png_write_png(png, info, PNG_TRANSFORM_IDENTITY, NULL);
    png_destroy_write_struct(&png, &info);
}

static void variants(void) {
    static memory m;
    static const struct {
        int type, depth;
    } kinds[] = { { PNG_COLOR_TYPE_GRAY, 1 },        { PNG_COLOR_TYPE_GRAY, 2 },
                  { PNG_COLOR_TYPE_GRAY, 4 },        { PNG_COLOR_TYPE_GRAY, 8 },
                  { PNG_COLOR_TYPE_GRAY, 16 },       { PNG_COLOR_TYPE_GRAY_ALPHA, 8 },
                  { PNG_COLOR_TYPE_GRAY_ALPHA, 16 }, { PNG_COLOR_TYPE_RGB, 8 },
                  { PNG_COLOR_TYPE_RGB, 16 },        { PNG_COLOR_TYPE_RGB_ALPHA, 8 },
                  { PNG_COLOR_TYPE_RGB_ALPHA, 16 } };
    for (size_t i = 0; i < sizeof kinds / sizeof kinds[0]; i++)
        for (int interlace = 0; interlace < 2; interlace++) {
            int depth = kinds[i].depth, wrong = 0;
            picture p = { 0 };
            error e = { 0 };
            make(&m, kinds[i].type, depth, interlace, 0);
            CHECK(png_decode(m.bytes, m.n, LIMIT_PIXELS, &p, &e) == ST_OK);
            CHECK(p.nx == NX && p.ny == NY && p.bit_depth == depth && p.flags == 0);
            for (size_t k = 0; p.px && k < NX * NY; k++) {
                float want = (float)((double)level(k % NX, k / NX, depth) / (double)((1u << depth) - 1u));
                wrong +=
                    memcmp(&p.px[k], &want, sizeof want) != 0; /* equal channels: that channel, exactly */
            }
            CHECK(wrong == 0);
            picture_free(&p);
        }
}

static void colours(void) {
    static memory m;
    picture p = { 0 };
    error e = { 0 };
    make(&m, PNG_COLOR_TYPE_RGB, 8, 0, 1);
    CHECK(png_decode(m.bytes, m.n, LIMIT_PIXELS, &p, &e) == ST_OK && p.flags == FLAG(COLOUR));
    double want = (0.2126 * level(5, 3, 8) + 0.7152 * level(6, 3, 8) + 0.0722 * level(7, 3, 8)) / 255.0;
    CHECK_NEAR((double)p.px[3 * NX + 5], want, 1e-6);
    picture_free(&p);
    for (int depth = 1; depth <= 8; depth *= 2) {
        make(&m, PNG_COLOR_TYPE_PALETTE, depth, 1, 0);
        CHECK(png_decode(m.bytes, m.n, LIMIT_PIXELS, &p, &e) == ST_OK && p.flags == 0 &&
              p.bit_depth == depth);
        CHECK_NEAR((double)p.px[3 * NX + 5], (255.0 - level(5, 3, depth)) / 255.0, 1e-7);
        picture_free(&p);
    }
    make(&m, PNG_COLOR_TYPE_PALETTE, 8, 0, 1);
    CHECK(png_decode(m.bytes, m.n, LIMIT_PIXELS, &p, &e) == ST_OK && p.flags == FLAG(COLOUR));
    picture_free(&p);
}

static void damaged(void) {
    static memory m, cut;
    picture p = { 0 };
    error e = { 0 };
    make(&m, PNG_COLOR_TYPE_GRAY, 8, 0, 0);
    for (size_t n = 9; n < m.n; n += 1 + n / 40) { /* no cut is ever taken for a picture */
        e = (error){ 0 };
        CHECK(png_decode(m.bytes, n, LIMIT_PIXELS, &p, &e) == ST_BAD_INPUT && strlen(e.text) > 20);
    }
    int accepted = 0;
    for (size_t k = 8; k < m.n; k += 3) { /* nor one bit of image data turned; chunk sums catch it */
        cut = m;
        cut.bytes[k] ^= 4;
        e = (error){ 0 };
        status st = png_decode(cut.bytes, cut.n, LIMIT_PIXELS, &p, &e);
        CHECK((st == ST_OK) == (e.text[0] == '\0'));
        accepted += st == ST_OK; /* in the gAMA chunk: skipped, the image stays */
        picture_free(&p);
    }
    CHECK(accepted < 12);
    CHECK_FAILS(png_decode(m.bytes, m.n, NX * NY - 1, &p, &e), ST_NO_MEMORY, e, "too large: 41 x 37");
    cut = m;
    static const uint8_t vast[] = { 0, 0, 0xff, 0, 0, 0, 0xff, 0 }; /* 65280 x 65280 */
    memcpy(cut.bytes + 16, vast, 8);
    CHECK(png_decode(cut.bytes, cut.n, LIMIT_PIXELS, &p, &e) != ST_OK && !p.px);
    /* A bomb keeps within every other limit; a small blank picture is nobody's harm. */
    e = (error){ 0 };
    CHECK_FAILS(picture_credible(16000, 16000, 250000, &e), ST_BAD_INPUT, e, "decompression bomb");
    CHECK(picture_credible(2048, 2048, 100, &e) == ST_OK && picture_credible(16000, 16000, 16000 * 1000, &e) == ST_OK);
}

int main(void) {
    variants();
    colours();
    damaged();
    return check_done();
}
