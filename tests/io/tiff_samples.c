/* TIFF samples that are no plain 8 or 16 bits: packed depths, signed, wide and floating-point values by their own
 * ends, pixels without a value, inks, colours that libtiff converts, orientation, sub-directories, codecs. */
#include <float.h>
#include <stdint.h>
#include <stdlib.h>
#include <tiffio.h>

#include "base/limits.h"
#include "check.h"
#include "io/file.h"
#include "io/picture_priv.h"
#include "scratch.h"

enum { NX = 40, NY = 36 };

static TIFF *begin(uint16_t bits, uint16_t samples, uint16_t photometric, uint16_t format) {
    TIFF *tif = TIFFOpen(scratch("t.tif"), "w");
    TIFFSetField(tif, TIFFTAG_IMAGEWIDTH, NX);
    TIFFSetField(tif, TIFFTAG_IMAGELENGTH, NY);
    TIFFSetField(tif, TIFFTAG_BITSPERSAMPLE, bits);
    TIFFSetField(tif, TIFFTAG_SAMPLESPERPIXEL, samples);
    TIFFSetField(tif, TIFFTAG_PHOTOMETRIC, photometric);
    TIFFSetField(tif, TIFFTAG_PLANARCONFIG, PLANARCONFIG_CONTIG);
    TIFFSetField(tif, TIFFTAG_SAMPLEFORMAT, format);
    TIFFSetField(tif, TIFFTAG_ROWSPERSTRIP, NY);
    return tif;
}

static status end(TIFF *tif, picture *p, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    TIFFClose(tif);
    *e = (error){ 0 };
    *p = (picture){ 0 };
    if (file_read(scratch("t.tif"), LIMIT_FILE_BYTES, &bytes, &n, e) != ST_OK) exit(1);
    status st = tiff_decode((const uint8_t *)bytes, n, LIMIT_PIXELS, p, e);
    free(bytes);
    return st;
}

static void packed(void) {
    for (unsigned bits = 9; bits <= 15; bits++) {
        TIFF *tif = begin((uint16_t)bits, 1, PHOTOMETRIC_MINISBLACK, SAMPLEFORMAT_UINT);
        unsigned top = (1u << bits) - 1u;
        for (uint32_t y = 0; y < NY; y++) {
            uint8_t row[2 * NX] = { 0 };
            for (size_t x = 0; x < NX; x++)
                for (unsigned b = 0; b < bits; b++) /* most significant bit first */
                    if ((x * 977 + y * 131) % (top + 1u) >> (bits - 1 - b) & 1)
                        row[(x * bits + b) / 8] =
                            (uint8_t)(row[(x * bits + b) / 8] | 128u >> (x * bits + b) % 8);
            TIFFWriteScanline(tif, row, y, 0);
        }
        picture p;
        error e;
        CHECK(end(tif, &p, &e) == ST_OK && p.bit_depth == (int)bits);
        double worst = 0.0;
        for (size_t i = 0; p.px && i < NX * NY; i++) {
            double want = (double)((i % NX * 977 + i / NX * 131) % (top + 1u)) / top;
            worst = fmax(worst, fabs((double)p.px[i] - want));
        }
        CHECK_NEAR(worst, 0.0, 1e-7);
        picture_free(&p);
    }
}

/* A ramp of values from low to high in `bits` of `format`; must come back as the ramp 0..1. */
static void values(uint16_t bits, uint16_t format, double low, double high) {
    TIFF *tif = begin(bits, 1, PHOTOMETRIC_MINISBLACK, format);
    for (uint32_t y = 0; y < NY; y++) {
        uint8_t row[8 * NX] = { 0 };
        for (size_t x = 0; x < NX; x++) {
            double t = (double)(y * NX + x) / (NX * NY - 1), v = low + t * (high - low);
            uint8_t *to = row + x * bits / 8;
            if (format == SAMPLEFORMAT_IEEEFP && bits == 32)
                memcpy(to, &(float){ (float)v }, 4);
            else if (format == SAMPLEFORMAT_IEEEFP)
                memcpy(to, &v, 8);
            else if (format == SAMPLEFORMAT_INT && bits == 8)
                *to = (uint8_t)(int8_t)v;
            else if (format == SAMPLEFORMAT_INT && bits == 16)
                memcpy(to, &(int16_t){ (int16_t)v }, 2);
            else if (format == SAMPLEFORMAT_INT && bits == 32)
                memcpy(to, &(int32_t){ (int32_t)v }, 4);
            else if (format == SAMPLEFORMAT_INT)
                memcpy(to, &(int64_t){ (int64_t)v }, 8);
            else if (bits == 24)
                memcpy(to, &(uint32_t){ (uint32_t)v }, 3); /* this machine is little endian, see main */
            else if (bits == 32)
                memcpy(to, &(uint32_t){ (uint32_t)v }, 4);
            else
                memcpy(to, &(uint64_t){ (uint64_t)v }, 8);
        }
        TIFFWriteScanline(tif, row, y, 0);
    }
    picture p;
    error e;
    CHECK(end(tif, &p, &e) == ST_OK && p.bit_depth == bits && !p.flags &&
          strstr(p.note, "became black to white"));
    double worst = 0.0, step = format == SAMPLEFORMAT_IEEEFP ? 1e-6 : 1.0 / (high - low) + 1e-6;
    for (size_t i = 0; p.px && i < NX * NY; i++)
        worst = fmax(worst, fabs((double)p.px[i] - (double)i / (NX * NY - 1)));
    CHECK(worst <= step);
    if (worst > step) printf("  bits %d format %d: %g, %s\n", bits, format, worst, e.text);
    CHECK(p.px && p.px[0] <= 0.0f && p.px[NX * NY - 1] >= 1.0f);
    picture_free(&p);
}

/* IEEE 754-2008 binary16: 1.0 = 3c00, 2.0 = 4000, -2.0 = c000, the smallest subnormal 0001 = 2^-24. */
static void half_floats(void) {
    static const uint16_t codes[4] = { 0xc000, 0x0001, 0x3c00, 0x4000 };
    static const double want[4] = { 0.0, 0.5, 0.75, 1.0 };
    TIFF *tif = begin(16, 1, PHOTOMETRIC_MINISBLACK, SAMPLEFORMAT_IEEEFP);
    uint16_t row[NX];
    for (size_t x = 0; x < NX; x++) row[x] = codes[x % 4];
    for (uint32_t y = 0; y < NY; y++) {
        uint16_t copy[NX];
        memcpy(copy, row, sizeof copy);
        TIFFWriteScanline(tif, copy, y, 0);
    }
    picture p;
    error e;
    CHECK(end(tif, &p, &e) == ST_OK);
    for (size_t x = 0; p.px && x < 4; x++) CHECK_NEAR((double)p.px[x], want[x], 1e-7);
    picture_free(&p);
}

static status with_gaps(size_t gaps, picture *p, error *e) {
    TIFF *tif = begin(32, 1, PHOTOMETRIC_MINISBLACK, SAMPLEFORMAT_IEEEFP);
    for (uint32_t y = 0; y < NY; y++) {
        float row[NX];
        for (size_t x = 0; x < NX; x++) {
            row[x] = y * NX + x < gaps ? (x % 2 ? NAN : -INFINITY) : (float)x;
        }
        TIFFWriteScanline(tif, row, y, 0);
    }
    return end(tif, p, e);
}

static void gaps(void) {
    picture p;
    error e;
    CHECK(with_gaps(14, &p, &e) == ST_OK && p.flags == FLAG(FILLED) &&
          strstr(p.note, "14 pixels held no number"));
    CHECK_NEAR((double)p.px[0], 14.0 / 39.0, 1e-6); /* from the first pixel of the row that has a value */
    picture_free(&p);
    CHECK_FAILS(with_gaps(15, &p, &e), ST_BAD_INPUT, e, "15 of its 1440 pixels hold no number");
}

static void colours(void) {
    /* Inks: (1 - C)(1 - K) each; grey inks are no colour. */
    TIFF *tif = begin(8, 4, PHOTOMETRIC_SEPARATED, SAMPLEFORMAT_UINT);
    for (uint32_t y = 0; y < NY; y++) {
        uint8_t row[4 * NX];
        for (size_t x = 0; x < NX; x++)
            row[4 * x] = row[4 * x + 1] = row[4 * x + 2] = (uint8_t)(5 * x), row[4 * x + 3] = 51;
        TIFFWriteScanline(tif, row, y, 0);
    }
    picture p;
    error e;
    CHECK(end(tif, &p, &e) == ST_OK && p.flags == 0);
    for (size_t x = 0; p.px && x < NX; x++)
        CHECK_NEAR((double)p.px[x], (1.0 - 5.0 * (double)x / 255.0) * 0.8, 1e-6);
    picture_free(&p);
    /* Y in 2 x 2 blocks with two chroma samples, no compression: grey at the middle of chroma. */
    tif = begin(8, 3, PHOTOMETRIC_YCBCR, SAMPLEFORMAT_UINT);
    TIFFSetField(tif, TIFFTAG_YCBCRSUBSAMPLING, 2, 2);
    float reference[6] = { 0, 255, 128, 255, 128, 255 };
    TIFFSetField(tif, TIFFTAG_REFERENCEBLACKWHITE, reference);
    static uint8_t block[NY / 2][NX / 2][6];
    for (size_t y = 0; y < NY / 2; y++)
        for (size_t x = 0; x < NX / 2; x++) {
            uint8_t six[6] = {
                (uint8_t)(8 * x), (uint8_t)(8 * x), (uint8_t)(8 * x), (uint8_t)(8 * x), 128, 128
            };
            memcpy(block[y][x], six, 6);
        }
    TIFFWriteEncodedStrip(tif, 0, block, sizeof block);
    CHECK(end(tif, &p, &e) == ST_OK && p.bit_depth == 8);
    for (size_t x = 0; p.px && x < NX; x++)
        CHECK_NEAR((double)p.px[x], (double)(8 * (x / 2)) / 255.0, 1.01 / 255.0);
    picture_free(&p);
    tif = begin(8, 3, PHOTOMETRIC_CIELAB, SAMPLEFORMAT_UINT); /* L* = 100 is white, 0 black */
    for (uint32_t y = 0; y < NY; y++) {
        uint8_t row[3 * NX] = { 0 };
        for (size_t x = NX / 2; x < NX; x++) row[3 * x] = 255;
        TIFFWriteScanline(tif, row, y, 0);
    }
    CHECK(end(tif, &p, &e) == ST_OK);
    CHECK(p.px && p.px[0] < 0.02f && p.px[NX - 1] > 0.95f);
    picture_free(&p);
}

/* Corner marks: the stored first row is 0.2, the first column 0.6, their corner 1, the rest 0. TIFF 6.0, tag 274. */
static void orientations(void) {
    static const struct {
        size_t corner_x, corner_y; /* 0 or 1: left, top or right, bottom */
        int row_is_column;
    } want[9] = { { 0 },       { 0, 0, 0 }, { 1, 0, 0 }, { 1, 1, 0 }, { 0, 1, 0 },
                  { 0, 0, 1 }, { 1, 0, 1 }, { 1, 1, 1 }, { 0, 1, 1 } };
    for (uint16_t o = 1; o <= 8; o++) {
        TIFF *tif = begin(8, 1, PHOTOMETRIC_MINISBLACK, SAMPLEFORMAT_UINT);
        TIFFSetField(tif, TIFFTAG_ORIENTATION, o);
        TIFFSetField(tif, TIFFTAG_RESOLUTIONUNIT, RESUNIT_CENTIMETER);
        TIFFSetField(tif, TIFFTAG_XRESOLUTION, 2e6);
        TIFFSetField(tif, TIFFTAG_YRESOLUTION, 1e6);
        for (uint32_t y = 0; y < NY; y++) {
            uint8_t row[NX] = { 0 };
            for (size_t x = 0; x < NX; x++) row[x] = !x && !y ? 255 : !y ? 51 : !x ? 153 : 0;
            TIFFWriteScanline(tif, row, y, 0);
        }
        picture p;
        error e;
        CHECK(end(tif, &p, &e) == ST_OK);
        size_t nx = want[o].row_is_column ? NY : NX, ny = want[o].row_is_column ? NX : NY;
        CHECK(p.nx == nx && p.ny == ny);
        size_t cx = want[o].corner_x ? nx - 1 : 0, cy = want[o].corner_y ? ny - 1 : 0, mx = nx / 2,
               my = ny / 2;
        CHECK_NEAR((double)p.px[cy * nx + cx], 1.0, 0.0);
        CHECK_NEAR((double)p.px[cy * nx + mx], want[o].row_is_column ? 0.6 : 0.2, 1e-6);
        CHECK_NEAR((double)p.px[my * nx + cx], want[o].row_is_column ? 0.2 : 0.6, 1e-6);
        CHECK_NEAR(p.scales.list[0].x_nm, want[o].row_is_column ? 10.0 : 5.0, 1e-6);
        picture_free(&p);
    }
}

static void sub_directories(void) {
    TIFF *tif = begin(8, 1, PHOTOMETRIC_MINISBLACK, SAMPLEFORMAT_UINT);
    toff_t places[1] = { 0 };
    uint8_t row[2 * NX] = { 0 };
    TIFFSetField(tif, TIFFTAG_SUBFILETYPE, FILETYPE_REDUCEDIMAGE);
    TIFFSetField(tif, TIFFTAG_SUBIFD, 1, places);
    for (uint32_t y = 0; y < NY; y++) TIFFWriteScanline(tif, row, y, 0);
    TIFFWriteDirectory(tif);
    memset(row, 255, sizeof row);
    TIFFSetField(tif, TIFFTAG_IMAGEWIDTH, NX - 5);
    TIFFSetField(tif, TIFFTAG_IMAGELENGTH, NY);
    TIFFSetField(tif, TIFFTAG_BITSPERSAMPLE, 8);
    TIFFSetField(tif, TIFFTAG_PHOTOMETRIC, PHOTOMETRIC_MINISBLACK);
    for (uint32_t y = 0; y < NY; y++) TIFFWriteScanline(tif, row, y, 0);
    TIFFWriteDirectory(tif);
    picture p;
    error e;
    CHECK(end(tif, &p, &e) == ST_OK && p.nx == NX - 5 && p.px[0] >= 1.0f);
    CHECK(p.flags == FLAG(MANY_PAGES) && strstr(p.note, "A sub-picture was measured"));
    picture_free(&p);
}

static void codecs(void) {
    static const struct {
        uint16_t code;
        const char *name;
        int lossy;
    } c[] = { { COMPRESSION_ZSTD, "zstd", 0 },
              { COMPRESSION_LZMA, "lzma", 0 },
              { COMPRESSION_WEBP, "webp", 1 },
              { COMPRESSION_JPEG, "jpeg", 1 } };
    for (size_t k = 0; k < sizeof c / sizeof c[0]; k++) {
        if (!TIFFIsCODECConfigured(c[k].code)) {
            printf("skipped: libtiff was built without %s\n", c[k].name);
            continue;
        }
        uint16_t samples = c[k].lossy ? 3 : 1;
        TIFF *tif = begin(8, samples,
                          c[k].code == COMPRESSION_JPEG ? PHOTOMETRIC_YCBCR
                          : samples == 3                ? PHOTOMETRIC_RGB
                                                        : PHOTOMETRIC_MINISBLACK,
                          SAMPLEFORMAT_UINT);
        TIFFSetField(tif, TIFFTAG_COMPRESSION, c[k].code);
        if (c[k].code == COMPRESSION_JPEG) TIFFSetField(tif, TIFFTAG_JPEGCOLORMODE, JPEGCOLORMODE_RGB);
        for (uint32_t y = 0; y < NY; y++) {
            uint8_t row[3 * NX];
            for (size_t x = 0; x < NX * samples; x++) row[x] = (uint8_t)(6 * (x / samples));
            TIFFWriteScanline(tif, row, y, 0);
        }
        picture p;
        error e;
        CHECK(end(tif, &p, &e) == ST_OK && !strcmp(p.compression, c[k].name));
        CHECK(!!(p.flags & FLAG(LOSSY)) == c[k].lossy);
        double worst = 0.0;
        for (size_t i = 0; p.px && i < NX * NY; i++)
            worst = fmax(worst, fabs((double)p.px[i] - 6.0 * (double)(i % NX) / 255.0));
        CHECK(worst <= (c[k].lossy ? 6.0 / 255.0 : 1e-7));
        picture_free(&p);
    }
}

int main(void) {
    TIFFSetWarningHandler(NULL); /* of the writer */
    scratch_make();
    packed();
    values(8, SAMPLEFORMAT_INT, -128.0, 127.0);
    values(16, SAMPLEFORMAT_INT, -300.0, 32000.0);
    values(32, SAMPLEFORMAT_INT, -2.1e9, 2.1e9);
    values(64, SAMPLEFORMAT_INT, -4e15, 4e15);
    if (*(const uint8_t *)&(uint16_t){ 1 } == 1) values(24, SAMPLEFORMAT_UINT, 5.0, 16000000.0);
    values(32, SAMPLEFORMAT_UINT, 4.2e9,
           4.29e9); /* a small range far from zero: floats alone would lose it */
    values(64, SAMPLEFORMAT_UINT, 0.0, 1e15);
    values(32, SAMPLEFORMAT_IEEEFP, -12.5, 880.0);
    values(64, SAMPLEFORMAT_IEEEFP, 1e9, 1e9 + 1.0);
    half_floats();
    gaps();
    colours();
    orientations();
    sub_directories();
    codecs();
    scratch_remove(scratch_root);
    return check_done();
}
