/* The JPEG files that come with a compiler's sources (Debian package golang-1.19-src): one picture in every sampling,
 * baseline and progressive, RGB, CMYK, against its PNG, with the tolerance of their own test; pairs that must decode
 * alike; one whose later scans are missing (a legal file). */
#include "image_files.h"

#define SOURCE "golang-1.19-src, image/testdata and image/decode_test.go: mean difference below 8 of 255"

static double mean_difference(const picture *a, const picture *b) {
    double sum = 0.0;
    for (size_t i = 0; a->px && b->px && i < a->nx * a->ny; i++)
        sum += fabs((double)a->px[i] - (double)b->px[i]);
    return a->px && b->px && a->nx == b->nx && a->ny == b->ny ? 255.0 * sum / (double)(a->nx * a->ny)
                                                              : HUGE_VAL;
}

int main(void) {
    static const char *const folders[] = { "/usr/share/go-1.19/src/image/testdata",
                                           "/usr/lib/go-1.19/src/image/testdata", NULL };
    static const char *const pairs[] = { "",         ".q50.410", ".q50.411", ".q50.420",
                                         ".q50.422", ".q50.440", ".q50.444", ".separate.dc.progression" };
    static const struct {
        const char *jpeg, *png;
    } others[] = { { "video-001.rgb.jpeg", "video-001.rgb.png" },
                   { "video-001.cmyk.jpeg", "video-001.cmyk.png" },
                   { "video-001.221212.jpeg", "video-001.221212.png" },
                   { "video-001.progressive.truncated.jpeg", "video-001.progressive.truncated.png" } };
    const char *folder = first_folder(folders, "golang-1.19-src");
    if (!folder) return 77;
    picture png = { 0 };
    error e = { 0 };
    CHECK(decode_path(png_decode, folder, "video-001.png", &png, &e) == ST_OK && png.nx == 150 &&
          png.ny == 103);
    for (size_t i = 0; i < sizeof pairs / sizeof pairs[0]; i++) {
        char name[120];
        picture a = { 0 }, b = { 0 };
        snprintf(name, sizeof name, "video-001%s.jpeg", pairs[i]);
        CHECK(decode_path(jpeg_decode, folder, name, &a, &e) == ST_OK);
        snprintf(name, sizeof name, "video-001%s.progressive.jpeg", pairs[i]);
        CHECK(decode_path(jpeg_decode, folder, name, &b, &e) == ST_OK);
        CHECK_SOURCE(mean_difference(&a, &png), 0.0, 8.0, SOURCE);
        CHECK_SOURCE((double)same_plane(&a, &b), 1.0, 0.0,
                     "golang-1.19-src, image/jpeg/reader_test.go: baseline and progressive decode alike");
        picture_free(&a);
        picture_free(&b);
    }
    for (size_t i = 0; i < sizeof others / sizeof others[0]; i++) {
        picture a = { 0 }, b = { 0 };
        CHECK(decode_path(jpeg_decode, folder, others[i].jpeg, &a, &e) == ST_OK);
        CHECK(a.flags == (FLAG(LOSSY) | FLAG(COLOUR)));
        CHECK(decode_path(png_decode, folder, others[i].png, &b, &e) == ST_OK);
        CHECK_SOURCE(mean_difference(&a, &b), 0.0, 8.0, SOURCE);
        picture_free(&a);
        picture_free(&b);
    }
    picture_free(&png);
    return check_done();
}
