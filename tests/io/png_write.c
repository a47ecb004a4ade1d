/* What we write we read back, pixel for pixel and nanometre for nanometre; the same bytes every time. */
#include "io/png_write.h"

#include <png.h>
#include <stdlib.h>

#include "base/limits.h"
#include "base/mem.h"
#include "check.h"
#include "io/file.h"
#include "io/load.h"
#include "io/picture_priv.h"
#include "scratch.h"

enum { NX = 70, NY = 50 };

static uint8_t small[NY * NX * 3];
static uint16_t wide[NY * NX * 3];

static void round_trips(void) {
    error e = { 0 };
    for (int channels = 1; channels <= 3; channels += 2)
        for (int depth = 8; depth <= 16; depth += 8) {
            png_format f = { NX, NY, channels, depth, 5.0 };
            const void *samples = depth == 8 ? (const void *)small : (const void *)wide;
            uint8_t *a = NULL, *b = NULL;
            size_t na = 0, nb = 0;
            CHECK(png_encode(samples, &f, &a, &na, &e) == ST_OK &&
                  png_encode(samples, &f, &b, &nb, &e) == ST_OK);
            CHECK(na == nb && !memcmp(a, b, na));
            picture p = { 0 };
            CHECK(png_decode(a, na, LIMIT_PIXELS, &p, &e) == ST_OK && p.nx == NX && p.ny == NY &&
                  p.bit_depth == depth);
            int wrong = 0;
            for (size_t i = 0; p.px && channels == 1 && i < NX * NY; i++) {
                float want = (float)(depth == 8 ? small[i] / 255.0 : wide[i] / 65535.0);
                wrong += memcmp(&want, &p.px[i], sizeof want) != 0;
            }
            CHECK(wrong == 0 && (p.flags == FLAG(COLOUR)) == (channels == 3));
            CHECK(p.scales.n == 1);
            CHECK_NEAR(p.scales.list[0].x_nm, 5.0, 1e-12);
            picture_free(&p);
            free(a);
            free(b);
        }
}

static void scales_survive(void) {
    static const struct {
        double px_nm, tolerance;
        const char *source;
    } t[] = { { 5.58, 1e-7, "pHYs" },
              { 0.31, 1e-9, "sCAL" },
              { 2615.0, 1e-9, "sCAL" },
              { 999.0, 1e-6, "pHYs" },
              { 0.0, 0.0, "none" } };
    error e = { 0 };
    load_options o = load_defaults();
    for (size_t i = 0; i < sizeof t / sizeof t[0]; i++) {
        png_format f = { NX, NY, 1, 16, t[i].px_nm };
        micrograph m = { 0 };
        CHECK(png_write(scratch("a.png"), wide, &f, &e) == ST_OK &&
              load_file(scratch("a.png"), &o, &m, &e) == ST_OK);
        CHECK(!strcmp(m.px_source, t[i].source));
        if (t[i].px_nm > 0.0) CHECK_NEAR(m.px_nm / t[i].px_nm, 1.0, t[i].tolerance);
        micrograph_free(&m);
        CHECK(tiff_write(scratch("a.tif"), wide, &f, &e) == ST_OK &&
              load_file(scratch("a.tif"), &o, &m, &e) == ST_OK);
        CHECK(m.bit_depth == 16 && m.nx == NX && m.ny == NY);
        if (t[i].px_nm > 0.0 && t[i].px_nm < 1000.0)
            CHECK_NEAR(m.px_nm / t[i].px_nm, 1.0, 1e-6);
        else
            CHECK(isnan(m.px_nm)); /* TIFF has no field for a specimen above the screen's range */
        int wrong = 0;
        for (size_t k = 0; k < NX * NY; k++) wrong += fabs((double)m.px[k] * 65535.0 - wide[k]) > 0.01;
        CHECK(wrong == 0);
        micrograph_free(&m);
    }
}

/* A palette, read back by libpng's own simplified reader. */
static void palettes(void) {
    uint8_t palette[3 * 256], *bytes = NULL, *back = mem_array(NX * NY, 3);
    size_t n = 0, wrong = 0;
    error e = { 0 };
    png_format f = { NX, NY, 1, 8, 5.0 };
    png_image image = { .version = PNG_IMAGE_VERSION };
    for (size_t i = 0; i < sizeof palette; i++) palette[i] = (uint8_t)(i * 37u % 251u);
    CHECK(png_encode_palette(small, palette, &f, &bytes, &n, &e) == ST_OK && bytes[25] == 3); /* colour type of IHDR */
    CHECK(png_image_begin_read_from_memory(&image, bytes, n) && image.width == NX && image.height == NY);
    image.format = PNG_FORMAT_RGB;
    CHECK(back && png_image_finish_read(&image, NULL, back, 0, NULL));
    for (size_t i = 0; back && i < NX * NY; i++) wrong += memcmp(back + 3 * i, palette + 3 * (size_t)small[i], 3) != 0;
    CHECK(wrong == 0);
    free(back);
    free(bytes);
    f.channels = 3;
    CHECK_FAILS(png_encode_palette(small, palette, &f, &bytes, &n, &e), ST_BUG, e, "palette");
}

static void refusals(void) {
    error e = { 0 };
    uint8_t *bytes = NULL;
    size_t n = 0;
    png_format f = { NX, NY, 2, 8, 0.0 };
    CHECK_FAILS(png_encode(small, &f, &bytes, &n, &e), ST_BUG, e, "2 channels");
    f = (png_format){ NX, 0, 1, 8, 0.0 };
    CHECK_FAILS(png_encode(small, &f, &bytes, &n, &e), ST_BAD_INPUT, e, "70 x 0");
    f = (png_format){ NX, NY, 3, 8, 0.0 };
    CHECK_FAILS(tiff_write(scratch("x.tif"), small, &f, &e), ST_BUG, e, "grey");
    f = (png_format){ NX, NY, 1, 8, 0.0 };
    CHECK_FAILS(png_write(scratch("no/x.png"), small, &f, &e), ST_IO, e, "no/x.png");
    CHECK_FAILS(tiff_write(scratch("no/x.tif"), small, &f, &e), ST_IO, e, "no/x.tif");
    CHECK(!bytes);
}

int main(void) {
    for (size_t i = 0; i < NX * NY * 3; i++) {
        wide[i] = (uint16_t)(i * 40503u >> 3);
        small[i] = (uint8_t)(wide[i] >> 7);
    }
    scratch_make();
    round_trips();
    scales_survive();
    palettes();
    refusals();
    scratch_remove(scratch_root);
    return check_done();
}
