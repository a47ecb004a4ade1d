/* JPEG in: grey and colour, baseline and progressive, inks, density, comments, cuts, floods of scans. */
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>

/* needs size_t and FILE before it */
#include <jpeglib.h>

#include "base/limits.h"
#include "check.h"
#include "io/load.h"
#include "io/picture_priv.h"

enum { NX = 96, NY = 64 };

typedef struct {
    J_COLOR_SPACE space;
    int channels, progressive, density_unit, density, quality;
    const char *comment;
} form;

static int paint(size_t x, size_t y) {
    return (int)(128.0 + 90.0 * sin((double)x / 9.0) * cos((double)y / 7.0));
}

static unsigned char *make(const form *f, unsigned long *n) {
    struct jpeg_compress_struct j;
    struct jpeg_error_mgr manager;
    unsigned char *bytes = NULL;
    j.err = jpeg_std_error(&manager);
    jpeg_create_compress(&j);
    *n = 0;
    jpeg_mem_dest(&j, &bytes, n);
    j.image_width = NX, j.image_height = NY;
    j.input_components = f->channels;
    j.in_color_space = f->space;
    jpeg_set_defaults(&j);
    jpeg_set_quality(&j, f->quality, TRUE);
    if (f->progressive) jpeg_simple_progression(&j);
    if (f->density) j.density_unit = (UINT8)f->density_unit, j.X_density = j.Y_density = (UINT16)f->density;
    jpeg_start_compress(&j, TRUE);
    if (f->comment) jpeg_write_marker(&j, JPEG_COM, (const JOCTET *)f->comment, (unsigned)strlen(f->comment));
    for (size_t y = 0; y < NY; y++) {
        JSAMPLE row[4 * NX];
        for (size_t x = 0; x < NX; x++)
            for (int k = 0; k < f->channels; k++)
                row[(int)x * f->channels + k] = (JSAMPLE)(k == 3 ? 255 : paint(x, y));
        JSAMPROW rows = row;
        jpeg_write_scanlines(&j, &rows, 1);
    }
    jpeg_finish_compress(&j);
    jpeg_destroy_compress(&j);
    return bytes;
}

static void forms(void) {
    static const form f[] = { { JCS_GRAYSCALE, 1, 0, 0, 0, 95, NULL },
                              { JCS_GRAYSCALE, 1, 1, 0, 0, 95, NULL },
                              { JCS_RGB, 3, 0, 0, 0, 95, NULL },
                              { JCS_RGB, 3, 1, 0, 0, 95, NULL },
                              { JCS_CMYK, 4, 0, 0, 0, 95, NULL } };
    for (size_t i = 0; i < sizeof f / sizeof f[0]; i++) {
        unsigned long n;
        unsigned char *bytes = make(&f[i], &n);
        picture p = { 0 };
        error e = { 0 };
        CHECK(jpeg_decode(bytes, n, LIMIT_PIXELS, &p, &e) == ST_OK && p.nx == NX && p.ny == NY &&
              p.bit_depth == 8);
        CHECK((p.flags & ~FLAG(COLOUR)) == FLAG(LOSSY) && !strcmp(p.compression, "jpeg"));
        double worst = 0.0;
        for (size_t k = 0; p.px && k < NX * NY; k++)
            worst = fmax(worst, fabs((double)p.px[k] - paint(k % NX, k / NX) / 255.0));
        CHECK(worst < 12.0 / 255.0);
        picture_free(&p);
        for (unsigned long k = 4; k + 2 < n; k += 1 + k / 12) { /* every cut is refused with a sentence */
            e = (error){ 0 };
            unsigned char *part = malloc(k);
            if (!part) exit(1);
            memcpy(part, bytes, k);
            CHECK(jpeg_decode(part, k, LIMIT_PIXELS, &p, &e) == ST_BAD_INPUT && e.text[0] && !p.px);
            free(part);
        }
        CHECK_FAILS(jpeg_decode(bytes, n, 1000, &p, &e), ST_NO_MEMORY, e, "too large: 96 x 64");
        free(bytes);
    }
}

/* CMYK without the marker of the writer that inverts inks: inks as inks. libjpeg writes that marker always, so it
 * is cut out here. */
static void upright_inks(void) {
    form f = { JCS_CMYK, 4, 0, 0, 0, 95, NULL };
    unsigned long n;
    unsigned char *bytes = make(&f, &n);
    for (unsigned long i = 2; i + 4 < n; i++)
        if (bytes[i] == 0xff && bytes[i + 1] == 0xee) {
            unsigned long k = 2u + ((unsigned long)bytes[i + 2] << 8 | bytes[i + 3]);
            memmove(bytes + i, bytes + i + k, n - i - k);
            n -= k;
            break;
        }
    picture p = { 0 };
    error e = { 0 };
    CHECK(jpeg_decode(bytes, n, LIMIT_PIXELS, &p, &e) == ST_OK);
    CHECK(p.px && p.px[0] <= 0.0f && p.px[NX * NY / 2] <= 0.01f); /* full black ink everywhere */
    picture_free(&p);
    free(bytes);
}

static double pixel_size(int unit, int density, const char *comment, const char **source) {
    static micrograph m;
    form f = { JCS_GRAYSCALE, 1, 0, unit, density, 90, comment };
    unsigned long n;
    unsigned char *bytes = make(&f, &n);
    load_options o = load_defaults();
    error e = { 0 };
    m = (micrograph){ 0 };
    CHECK(load_memory(bytes, n, &o, &m, &e) == ST_OK);
    *source = m.px_source;
    double nm = m.px_nm;
    free(m.px);
    m.px = NULL;
    free(bytes);
    return nm;
}

int main(void) {
    const char *source;
    forms();
    upright_inks();
    CHECK(isnan(pixel_size(1, 300, NULL, &source)) && !strcmp(source, "none"));
    CHECK_NEAR(pixel_size(2, 50000, NULL, &source), 200.0, 1e-9);
    CHECK(!strcmp(source, "resolution"));
    CHECK_NEAR(pixel_size(1, 50800, NULL, &source), 500.0, 1e-9);
    CHECK(isnan(pixel_size(0, 50000, NULL, &source))); /* a ratio only */
    CHECK_NEAR(pixel_size(1, 96, "pixel size = 4.5 nm", &source), 4.5, 1e-9);
    CHECK(!strcmp(source, "description"));
    return check_done();
}
