/* TIFF in: layouts written by libtiff, each decoded to the same plane; pages; refusals by name; cuts. */
#include <stdint.h>
#include <stdlib.h>
#include <tiffio.h>

#include "base/limits.h"
#include "check.h"
#include "io/file.h"
#include "io/picture_priv.h"
#include "scratch.h"

enum { NX = 67, NY = 45, TILE = 16 };

typedef struct {
    uint16_t bits, samples, photometric, compression, planar, predictor, format;
    int tiled, rows_per_strip;
    const char *mode; /* wl wb w8 */
} form;

static const form plain = {
    8, 1, PHOTOMETRIC_MINISBLACK, COMPRESSION_NONE, PLANARCONFIG_CONTIG, 0, SAMPLEFORMAT_UINT, 0, 7, "wl"
};

static unsigned level(size_t x, size_t y, int bits) {
    unsigned v = (unsigned)(x * 7919 + y * 104729 + x * y * 31);
    return (v ^ v >> 5) & ((1u << bits) - 1u);
}

/* Row y of sample k (or of all samples when chunky) from column x0 on, packed; the fourth sample is alpha. */
static void pack(const form *f, uint8_t *to, size_t x0, size_t nx, size_t y, int plane) {
    size_t bit = 0;
    for (size_t x = x0; x < x0 + nx; x++)
        for (int k = 0; k < (plane < 0 ? f->samples : 1); k++, bit += f->bits) {
            int sample = plane < 0 ? k : plane, alpha = f->samples == 2 ? sample == 1 : sample == 3;
            unsigned v = alpha ? 1u : level(x, y, f->bits);
            if (f->photometric == PHOTOMETRIC_MINISWHITE) v = ((1u << f->bits) - 1u) - v;
            if (f->bits == 16) {
                uint16_t wide = (uint16_t)v;
                memcpy(to + bit / 8, &wide, 2);
            } else
                to[bit / 8] = (uint8_t)(to[bit / 8] | v << (8u - f->bits - bit % 8));
        }
}

static void put_page(TIFF *tif, const form *f, uint32_t nx, uint32_t ny, uint32_t kind) {
    static uint8_t row[4096], tile[TILE * TILE * 8];
    TIFFSetField(tif, TIFFTAG_IMAGEWIDTH, nx);
    TIFFSetField(tif, TIFFTAG_IMAGELENGTH, ny);
    TIFFSetField(tif, TIFFTAG_BITSPERSAMPLE, f->bits);
    TIFFSetField(tif, TIFFTAG_SAMPLESPERPIXEL, f->samples);
    TIFFSetField(tif, TIFFTAG_PHOTOMETRIC, f->photometric);
    TIFFSetField(tif, TIFFTAG_COMPRESSION, f->compression);
    TIFFSetField(tif, TIFFTAG_PLANARCONFIG, f->planar);
    TIFFSetField(tif, TIFFTAG_SAMPLEFORMAT, f->format);
    if (f->predictor) TIFFSetField(tif, TIFFTAG_PREDICTOR, f->predictor);
    if (kind) TIFFSetField(tif, TIFFTAG_SUBFILETYPE, kind);
    if (f->tiled)
        TIFFSetField(tif, TIFFTAG_TILEWIDTH, TILE), TIFFSetField(tif, TIFFTAG_TILELENGTH, TILE);
    else
        TIFFSetField(tif, TIFFTAG_ROWSPERSTRIP, f->rows_per_strip);
    int planes = f->planar == PLANARCONFIG_SEPARATE ? f->samples : 1;
    for (int k = 0; k < planes; k++) {
        int plane = planes > 1 ? k : -1;
        for (uint32_t y = 0; !f->tiled && y < ny; y++) {
            memset(row, 0, sizeof row);
            pack(f, row, 0, nx, y, plane);
            TIFFWriteScanline(tif, row, y, (uint16_t)k);
        }
        for (uint32_t y = 0; f->tiled && y < ny; y += TILE)
            for (uint32_t x = 0; x < nx; x += TILE) {
                size_t bytes = (size_t)TIFFTileRowSize(tif);
                memset(tile, 0, sizeof tile);
                for (uint32_t j = 0; j < TILE; j++) pack(f, tile + j * bytes, x, TILE, y + j, plane);
                TIFFWriteTile(tif, tile, x, y, 0, (uint16_t)k);
            }
    }
    TIFFWriteDirectory(tif);
}

static char *slurp(size_t *n) {
    char *bytes = NULL;
    error e = { 0 };
    if (file_read(scratch("t.tif"), LIMIT_FILE_BYTES, &bytes, n, &e) != ST_OK) exit(1);
    return bytes;
}

static char *make(const form *f, size_t *n) {
    TIFF *tif = TIFFOpen(scratch("t.tif"), f->mode);
    put_page(tif, f, NX, NY, 0);
    TIFFClose(tif);
    return slurp(n);
}

static int wrong_pixels(const picture *p, int bits) {
    int wrong = 0;
    for (size_t i = 0; p->px && i < p->nx * p->ny; i++) {
        float want = (float)((double)level(i % p->nx, i / p->nx, bits) / (double)((1u << bits) - 1u));
        wrong += memcmp(&p->px[i], &want, sizeof want) != 0;
    }
    return p->px ? wrong : -1;
}

static void check_form(const form *f) {
    size_t n = 0;
    char *bytes = make(f, &n);
    picture p = { 0 };
    error e = { 0 };
    CHECK(tiff_decode((const uint8_t *)bytes, n, LIMIT_PIXELS, &p, &e) == ST_OK);
    int ok =
        p.nx == NX && p.ny == NY && p.bit_depth == f->bits && p.flags == 0 && wrong_pixels(&p, f->bits) == 0;
    CHECK(ok);
    if (!ok)
        printf("  bits %d samples %d compression %d planar %d tiled %d mode %s: %s\n", f->bits, f->samples,
               f->compression, f->planar, f->tiled, f->mode, e.text);
    picture_free(&p);
    free(bytes);
}

static void layouts(void) {
    static const uint16_t codecs[] = { COMPRESSION_NONE, COMPRESSION_LZW, COMPRESSION_PACKBITS,
                                       COMPRESSION_ADOBE_DEFLATE, COMPRESSION_DEFLATE };
    static const char *const modes[] = { "wl", "wb", "w8" };
    static const struct {
        uint16_t bits, samples, photometric;
    } kinds[] = { { 1, 1, PHOTOMETRIC_MINISBLACK },  { 1, 1, PHOTOMETRIC_MINISWHITE },
                  { 2, 1, PHOTOMETRIC_MINISBLACK },  { 4, 1, PHOTOMETRIC_MINISWHITE },
                  { 8, 1, PHOTOMETRIC_MINISBLACK },  { 8, 1, PHOTOMETRIC_MINISWHITE },
                  { 16, 1, PHOTOMETRIC_MINISBLACK }, { 16, 1, PHOTOMETRIC_MINISWHITE },
                  { 8, 2, PHOTOMETRIC_MINISBLACK },  { 16, 2, PHOTOMETRIC_MINISBLACK },
                  { 8, 3, PHOTOMETRIC_RGB },         { 8, 4, PHOTOMETRIC_RGB },
                  { 16, 3, PHOTOMETRIC_RGB },        { 16, 4, PHOTOMETRIC_RGB } };
    for (size_t k = 0; k < sizeof kinds / sizeof kinds[0]; k++)
        for (size_t c = 0; c < sizeof codecs / sizeof codecs[0]; c++)
            for (int variant = 0; variant < 4; variant++) {
                form f = plain;
                f.bits = kinds[k].bits, f.samples = kinds[k].samples, f.photometric = kinds[k].photometric;
                f.compression = codecs[c];
                f.mode = modes[(k + c + (size_t)variant) % 3];
                f.tiled = variant & 1;
                f.planar = variant & 2 ? PLANARCONFIG_SEPARATE : PLANARCONFIG_CONTIG;
                if (codecs[c] != COMPRESSION_NONE && codecs[c] != COMPRESSION_PACKBITS && f.bits >= 8)
                    f.predictor = 2;
                check_form(&f);
            }
}

static void pages(void) {
    TIFF *tif = TIFFOpen(scratch("t.tif"), "w");
    form wide = plain;
    wide.bits = 16;
    put_page(tif, &plain, 90, 90, FILETYPE_REDUCEDIMAGE); /* large, but a thumbnail by its own word */
    put_page(tif, &plain, 40, 40, 0);
    put_page(tif, &wide, NX, NY, 0);
    put_page(tif, &plain, NX, NY, 0);
    TIFFClose(tif);
    size_t n = 0;
    char *bytes = slurp(&n);
    picture p = { 0 };
    error e = { 0 };
    CHECK(tiff_decode((const uint8_t *)bytes, n, LIMIT_PIXELS, &p, &e) == ST_OK &&
          p.flags == FLAG(MANY_PAGES));
    CHECK(p.nx == NX && p.bit_depth == 16 && wrong_pixels(&p, 16) == 0 && strstr(p.note, "Page 3 of 4"));
    picture_free(&p);
    const uint8_t *file = (const uint8_t *)bytes;
    CHECK(tiff_decode_page(file, n, 2, LIMIT_PIXELS, &p, &e) == ST_OK && p.nx == 40 && strstr(p.note, "Page 2 of 4"));
    picture_free(&p);
    CHECK(tiff_decode_page(file, n, 4, LIMIT_PIXELS, &p, &e) == ST_OK && p.nx == NX && p.bit_depth == 8);
    picture_free(&p);
    CHECK_FAILS(tiff_decode_page(file, n, 1, LIMIT_PIXELS, &p, &e), ST_BAD_INPUT, e, "thumbnail");
    e = (error){ 0 };
    CHECK_FAILS(tiff_decode_page(file, n, 5, LIMIT_PIXELS, &p, &e), ST_BAD_INPUT, e, "the file has 4");
    free(bytes);
    bytes = make(&plain, &n); /* one page: no choice */
    e = (error){ 0 };
    CHECK(tiff_decode_page((const uint8_t *)bytes, n, 3, LIMIT_PIXELS, &p, &e) == ST_OK && p.nx == NX);
    picture_free(&p);
    free(bytes);
}

static void refuse(form f, const char *words) {
    size_t n = 0;
    char *bytes = make(&f, &n);
    picture p = { 0 };
    error e = { 0 };
    CHECK(tiff_decode((const uint8_t *)bytes, n, LIMIT_PIXELS, &p, &e) == ST_BAD_INPUT && !p.px);
    CHECK(strstr(e.text, words) != NULL);
    if (!strstr(e.text, words)) printf("  wanted '%s', got '%s'\n", words, e.text);
    free(bytes);
}

static void refusals(void) {
    form f = plain;
    f.bits = 16, f.samples = 3, f.photometric = PHOTOMETRIC_ICCLAB;
    refuse(f, "Lab colour");
    f = plain;
    f.photometric = PHOTOMETRIC_MASK;
    refuse(f, "a transparency mask");
    f = plain;
    f.bits = 16, f.format = SAMPLEFORMAT_COMPLEXINT;
    refuse(f, "complex integer samples of 16 bits");
    f = plain;
    f.photometric = PHOTOMETRIC_RGB;
    refuse(f, "colour in 1 samples");
}

static void cuts(void) {
    static const uint16_t codecs[] = { COMPRESSION_NONE, COMPRESSION_LZW, COMPRESSION_PACKBITS,
                                       COMPRESSION_ADOBE_DEFLATE };
    for (size_t c = 0; c < sizeof codecs / sizeof codecs[0]; c++)
        for (int tiled = 0; tiled < 2; tiled++) {
            form f = plain;
            f.compression = codecs[c], f.tiled = tiled;
            size_t n = 0;
            char *bytes = make(&f, &n);
            picture p = { 0 };
            for (size_t k = 1; k < n; k += 1 + k / 16) {
                error e = { 0 };
                char *part = malloc(k); /* its own block, so that a read past the end is seen */
                if (!part) exit(1);
                memcpy(part, bytes, k);
                CHECK(tiff_decode((const uint8_t *)part, k, LIMIT_PIXELS, &p, &e) != ST_OK && e.text[0]);
                free(part);
            }
            free(bytes);
        }
    size_t n = 0;
    char *bytes = make(&plain, &n);
    picture p = { 0 };
    error e;
    CHECK_FAILS(tiff_decode((const uint8_t *)bytes, n, 1000, &p, &e), ST_NO_MEMORY, e, "too large: 67 x 45");
    free(bytes);
}

int main(void) {
    TIFFSetWarningHandler(NULL); /* of the writer */
    scratch_make();
    layouts();
    pages();
    refusals();
    cuts();
    scratch_remove(scratch_root);
    return check_done();
}
