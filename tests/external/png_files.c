/* D-01 .. D-09, D-16: PNG of the PngSuite against sums decoded by a decoder that shares no code with libpng
 * (python3-png), against the pixels in its .sng texts, and our own output under pngcheck. */
#include <math.h>

#include "image_files.h"
#include "io/pixelsize_priv.h"
#include "io/png_write.h"

#define SUITE "PngSuite (W. van Schaik), sums by python3-png"

static void grey_sums(const char *suite) {
    static const struct {
        const char *name;
        size_t nx;
        int bits;
        double sum;
    } t[] = { { "basn0g01.png", 32, 1, 500 },       { "basn0g02.png", 32, 2, 1536 },
              { "basn0g04.png", 32, 4, 7168 },      { "basn0g08.png", 32, 8, 130056 },
              { "basn0g16.png", 32, 16, 37857070 }, { "basn0g01-30.png", 30, 1, 498 },
              { "basn0g02-29.png", 29, 2, 1266 },   { "basn0g04-31.png", 31, 4, 6510 },
              { "basn4a08.png", 32, 8, 130080 },    { "basn4a16.png", 32, 16, 33242928 },
              { "ftbbn0g04.png", 32, 4, 10343 },    { "ftbwn0g16.png", 32, 16, 45185017 },
              { "ftp0n0g08.png", 32, 8, 117825 } };
    for (size_t i = 0; i < sizeof t / sizeof t[0]; i++) {
        picture p = { 0 };
        error e = { 0 };
        CHECK(decode_path(png_decode, suite, t[i].name, &p, &e) == ST_OK);
        CHECK(p.nx == t[i].nx && p.ny == t[i].nx && p.bit_depth == t[i].bits && p.flags == 0);
        CHECK_SOURCE(level_sum(&p), t[i].sum, 0.0, "D-01: " SUITE);
        CHECK_SOURCE(mean_level(&p), t[i].sum / ((double)(t[i].nx * t[i].nx) * ((1 << t[i].bits) - 1)), 1e-6,
                     "D-02: linear scaling of sample depth, PNG (ISO/IEC 15948)");
        picture_free(&p);
    }
}

static void colour_sums(const char *suite) {
    static const struct {
        const char *name;
        double top, r, g, b;
    } t[] = { { "basn2c08.png", 255, 195840, 195840, 195840 },
              { "basn2c16.png", 65535, 33553920, 33553920, 11534120 },
              { "basn6a08.png", 255, 103072, 195840, 96992 },
              { "basn6a16.png", 65535, 33553652, 33553652, 16776692 },
              { "basn3p08.png", 255, 138560, 138560, 114112 },
              { "basn3p04-31i.png", 255, 66351, 177480, 125579 } };
    for (size_t i = 0; i < sizeof t / sizeof t[0]; i++) {
        picture p = { 0 };
        error e = { 0 };
        CHECK(decode_path(png_decode, suite, t[i].name, &p, &e) == ST_OK && p.flags == FLAG(COLOUR));
        double n = (double)(p.nx * p.ny),
               want = (0.2126 * t[i].r + 0.7152 * t[i].g + 0.0722 * t[i].b) / (n * t[i].top);
        CHECK_SOURCE(mean_level(&p), want, 1e-6, "D-01: " SUITE ", luminance weights of Rec. ITU-R BT.709");
        picture_free(&p);
    }
}

static void every_pixel(const char *suite) {
    picture p = { 0 };
    error e = { 0 };
    char *path = path_join(suite, "basn0g16.sng"), *text = NULL;
    size_t n = 0, seen = 0;
    CHECK(decode_path(png_decode, suite, "basn0g16.png", &p, &e) == ST_OK);
    CHECK(file_read(path, LIMIT_TEXT_FILE_BYTES, &text, &n, &e) == ST_OK);
    char *at = text ? strstr(text, "pixels hex") : NULL;
    for (at = at ? at + 10 : NULL; at && seen < p.nx * p.ny; seen++) {
        char *next = NULL;
        double want = (double)strtoul(at, &next, 16);
        if (next == at) break;
        CHECK_SOURCE(round((double)p.px[seen] * 65535.0), want, 0.0,
                     "D-01: basn0g16.sng, the file's pixels as text");
        at = next;
    }
    CHECK(seen == 32 * 32);
    free(text);
    free(path);
    picture_free(&p);
}

static void scales_and_damage(const char *folder, const char *suite) {
    picture a = { 0 }, b = { 0 };
    error e = { 0 };
    micrograph m = { 0 };
    CHECK(decode_path(png_decode, folder, "gray-gradient.png", &a, &e) == ST_OK);
    CHECK(decode_path(png_decode, folder, "gray-gradient.interlaced.png", &b, &e) == ST_OK);
    CHECK_SOURCE((double)same_plane(&a, &b), 1.0, 0.0, "D-03: Adam7, PNG (ISO/IEC 15948)");
    CHECK_SOURCE(level_sum(&b), 120.0, 0.0, "D-01: " SUITE);
    CHECK_SOURCE((double)b.scales.n, 0.0, 0.0, "D-08: pHYs unit 0 is a ratio only");
    picture_free(&a);
    picture_free(&b);
    CHECK(decode_path(png_decode, suite, "basn3p04-31i.png", &a, &e) == ST_OK && a.scales.n == 1);
    CHECK_SOURCE(a.scales.list[0].x_nm, 1e9 / 2835.0, 1e-6, "D-07: pHYs 2835 per metre");
    pixelsize_choose(&a.scales, 0.01, &m);
    CHECK(isnan(m.px_nm) && strstr(m.note, "screen or print resolution"));
    picture_free(&a);

    static const char *const broken[] = { "invalid-crc32.png", "invalid-noend.png", "invalid-palette.png",
                                          "invalid-trunc.png", "invalid-zlib.png" };
    for (size_t i = 0; i < sizeof broken / sizeof broken[0]; i++) { /* D-09 */
        e = (error){ 0 };
        CHECK(decode_path(png_decode, folder, broken[i], &a, &e) == ST_BAD_INPUT && strlen(e.text) > 20 &&
              !a.px);
    }
}

static void own_output(void) {
    static uint16_t samples[64 * 50 * 3];
    for (size_t i = 0; i < sizeof samples / sizeof samples[0]; i++) samples[i] = (uint16_t)(i * 40503u);
    for (int k = 0; k < 8; k++) {
        png_format f = { 64, 50, k & 1 ? 3 : 1, k & 2 ? 16 : 8, k & 4 ? 0.3 : 5.0 };
        char name[] = "external-own-0.png";
        name[13] = (char)('0' + k);
        error e = { 0 };
        CHECK(png_write(name, samples, &f, &e) == ST_OK);
        int code = run_program((const char *const[]){ "pngcheck", "-q", name, NULL });
        if (code < 0)
            printf("skipped: pngcheck is not installed\n");
        else
            CHECK_SOURCE((double)code, 0.0, 0.0, "D-16: pngcheck");
        picture p = { 0 };
        CHECK(decode_path(png_decode, "", name, &p, &e) == ST_OK && p.scales.n == 1);
        CHECK_SOURCE(p.scales.list[0].x_nm, f.px_nm, 1e-12,
                     "D-06: px_nm = 1e9 / pixels per metre; sCAL in metres");
        picture_free(&p);
        unlink(name);
    }
}

int main(void) {
    static const char *const folders[] = { "/usr/share/go-1.19/src/image/png/testdata",
                                           "/usr/lib/go-1.19/src/image/png/testdata", NULL };
    own_output();
    const char *folder = first_folder(folders, "golang-1.19-src");
    if (!folder) return check_done() ? 1 : 77;
    char *suite = path_join(folder, "pngsuite");
    grey_sums(suite);
    colour_sums(suite);
    every_pixel(suite);
    scales_and_damage(folder, suite);
    free(suite);
    return check_done();
}
