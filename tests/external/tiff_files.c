/* D-10 .. D-13, D-15: TIFF files of others against their PNG counterparts and sums by other libraries, and
 * every layout that tiffcp can write of one picture. */
#include "image_files.h"
#include "io/png_write.h"

#define VIDEO "golang.org/x/image/testdata, sums by pillow 9.4.0 and tifffile 20230203"

static void against_png(const char *folder) {
    static const struct {
        const char *tiff, *png;
    } t[] = { { "video-001.tiff", "video-001.png" },
              { "video-001-strip-64.tiff", "video-001.png" },
              { "video-001-tile-64x64.tiff", "video-001.png" },
              { "video-001-uncompressed.tiff", "video-001.png" },
              { "video-001-16bit.tiff", "video-001.png" }, /* 257 times the 8-bit levels */
              { "blue-purple-pink.lzwcompressed.tiff", "blue-purple-pink.png" },
              { "bw-deflate.tiff", "bw-gopher.png" } };
    for (size_t i = 0; i < sizeof t / sizeof t[0]; i++) {
        picture a = { 0 }, b = { 0 };
        error e = { 0 };
        CHECK(decode_path(tiff_decode, folder, t[i].tiff, &a, &e) == ST_OK);
        CHECK(decode_path(png_decode, folder, t[i].png, &b, &e) == ST_OK);
        CHECK_SOURCE((double)same_plane(&a, &b), 1.0, 0.0, "D-10: " VIDEO);
        picture_free(&a);
        picture_free(&b);
    }
}

static void sums(const char *folder) {
    static const struct {
        const char *name;
        int bits;
        double sum;
        const char *source;
    } t[] = { { "video-001-gray.tiff", 8, 1649191, "D-11: " VIDEO },
              { "video-001-gray-16bit.tiff", 16, 423842087, "D-11: " VIDEO },
              { "bw-uncompressed.tiff", 1, 7844, "D-12: white pixels, " VIDEO },
              { "bw-packbits.tiff", 1, 7844, "D-12: white pixels, " VIDEO },
              { "bw-deflate.tiff", 1, 7844, "D-12: white pixels, " VIDEO },
              { "bw-gopher_ccittGroup3.tiff", 1, 7844, "D-12: white pixels, " VIDEO },
              { "bw-gopher_ccittGroup4.tiff", 1, 7844, "D-12: white pixels, " VIDEO } };
    for (size_t i = 0; i < sizeof t / sizeof t[0]; i++) {
        picture p = { 0 };
        error e = { 0 };
        CHECK(decode_path(tiff_decode, folder, t[i].name, &p, &e) == ST_OK && p.bit_depth == t[i].bits &&
              p.flags == 0);
        CHECK_SOURCE(level_sum(&p), t[i].sum, 0.0, t[i].source);
        picture_free(&p);
    }
    picture a = { 0 }, b = { 0 };
    error e = { 0 };
    CHECK(decode_path(tiff_decode, folder, "no_rps.tiff", &a, &e) == ST_OK);
    CHECK(decode_path(tiff_decode, folder, "no_compress.tiff", &b, &e) == ST_OK);
    CHECK_SOURCE((double)same_plane(&a, &b), 1.0, 0.0, "D-13: TIFF 6.0, tag 278, default 2^32 - 1");
    picture_free(&a);
    picture_free(&b);
}

/* One 16-bit picture in every layout. Returns 0 when the program is absent. */
static int layouts(void) {
    static const char *const options[][10] = {
        { "-c", "none", NULL },
        { "-c", "packbits", NULL },
        { "-c", "lzw:2", NULL },
        { "-c", "zip:2", NULL },
        { "-c", "zip", "-r", "7", NULL },
        { "-t", "-w", "64", "-l", "64", NULL },
        { "-B", NULL },
        { "-L", NULL },
        { "-f", "lsb2msb", NULL },
        { "-8", NULL },
        { "-8", "-B", "-c", "lzw", "-t", "-w", "16", "-l", "32", NULL },
        { "-r", "7", NULL }
    }; /* tiffcp separates planes of 8 bits only: tests/io/tiff.c writes those */
    static uint16_t samples[61 * 90];
    for (size_t i = 0; i < sizeof samples / sizeof samples[0]; i++)
        samples[i] = (uint16_t)(i * i * 40503u >> 5);
    png_format f = { 90, 61, 1, 16, 5.0 };
    picture want = { 0 };
    error e = { 0 };
    int present = 1;
    CHECK(tiff_write("external-in.tif", samples, &f, &e) == ST_OK);
    CHECK(decode_path(tiff_decode, "", "external-in.tif", &want, &e) == ST_OK);
    for (size_t i = 0; present && i < sizeof options / sizeof options[0]; i++) {
        const char *arguments[16] = { "tiffcp" };
        size_t n = 1;
        for (size_t k = 0; options[i][k]; k++) arguments[n++] = options[i][k];
        arguments[n++] = "external-in.tif";
        arguments[n++] = "external-out.tif";
        int code = run_program(arguments);
        if (code < 0) {
            printf("skipped: tiffcp (Debian package libtiff-tools) is not installed\n");
            present = 0;
            break;
        }
        picture p = { 0 };
        CHECK(code == 0 && decode_path(tiff_decode, "", "external-out.tif", &p, &e) == ST_OK);
        CHECK_SOURCE((double)same_plane(&p, &want), 1.0, 0.0, "D-15: libtiff-tools 4.5.0, tiffcp");
        if (!same_plane(&p, &want)) printf("  layout %zu: %s\n", i, e.text);
        picture_free(&p);
    }
    picture_free(&want);
    unlink("external-in.tif");
    unlink("external-out.tif");
    return present;
}

int main(void) {
    static const char *const folders[] = { "/usr/share/gocode/src/golang.org/x/image/testdata", NULL };
    int present = layouts();
    const char *folder = first_folder(folders, "golang-golang-x-image-dev");
    if (folder) {
        against_png(folder);
        sums(folder);
    }
    if (check_done()) return 1;
    return folder && present ? 0 : 77;
}
