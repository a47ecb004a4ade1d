/* The whole loader: told apart by content, clipping, strip, sources of the pixel size, sidecars, hash,
 * sentences. */
#include "io/load.h"

#include <stdint.h>
#include <stdlib.h>

#include "base/limits.h"
#include "base/mem.h"
#include "check.h"
#include "io/file.h"
#include "io/png_write.h"
#include "scratch.h"

enum { NX = 96, NY = 80 };

static uint8_t pixels[NY * NX];

static void put_png(const char *name, double px_nm) {
    png_format f = { NX, NY, 1, 8, px_nm };
    error e = { 0 };
    CHECK(png_write(scratch(name), pixels, &f, &e) == ST_OK);
}

static micrograph load(const char *name) {
    micrograph m = { 0 };
    error e = { 0 };
    load_options o = load_defaults();
    CHECK(load_file(scratch(name), &o, &m, &e) == ST_OK && !e.text[0]);
    return m;
}

static status refuse(const void *bytes, size_t n, error *e) {
    load_options o = load_defaults();
    micrograph m = { .nx = 77 };
    status st = load_memory(bytes, n, &o, &m, e);
    CHECK(m.nx == 77 && !m.px); /* untouched on failure */
    return st;
}

static void contents(void) {
    put_png("a.png", 5.0);
    put_png("b.tif", 5.0); /* a PNG by content */
    micrograph a = load("a.png"), b = load("b.tif");
    CHECK(a.nx == NX && a.ny == NY && a.file_nx == NX && a.file_ny == NY && a.strip_rows == 0 &&
          a.bit_depth == 8);
    CHECK(!strcmp(a.hash, b.hash) && strlen(a.hash) == 64 && !strcmp(a.px_source, "pHYs"));
    CHECK_NEAR(a.px_nm, 5.0, 1e-12);
    CHECK_NEAR(a.px_u_rel, 0.01, 0.0);
    CHECK_NEAR(a.clipped_low, 0.25, 1e-12); /* as painted in main */
    CHECK_NEAR(a.clipped_high, 10.0 / (NX * NY), 1e-12);
    micrograph_free(&a);
    micrograph_free(&b);
    micrograph_free(&b);

    png_format f = { NX, NY, 1, 8, 0.0 };
    error e = { 0 };
    CHECK(tiff_write(scratch("c.png"), pixels, &f, &e) == ST_OK);
    micrograph c = load("c.png");
    CHECK(isnan(c.px_nm) && isnan(c.px_u_rel) && !strcmp(c.px_source, "none") &&
          c.flags == FLAG(NO_PIXEL_SIZE));
    micrograph_free(&c);

    CHECK_FAILS(refuse("", 0, &e), ST_BAD_INPUT, e, "empty");
    CHECK_FAILS(refuse("file,sample\n", 12, &e), ST_BAD_INPUT, e, "is text, not a picture");
    CHECK_FAILS(refuse("\xff\xd8\xff\xe0zz", 6, &e), ST_BAD_INPUT, e, "the JPEG is truncated or damaged");
    CHECK_FAILS(refuse("GIF89a", 6, &e), ST_BAD_INPUT, e, "is a GIF");
    CHECK_FAILS(refuse("\x01\x02\x03\x04\x05\x06\x07\x08", 8, &e), ST_BAD_INPUT, e, "neither TIFF nor PNG nor JPEG");
    CHECK_FAILS(refuse("\x89PNG", 4, &e), ST_BAD_INPUT, e, "truncated");
    CHECK_FAILS(refuse("\x89PNG\r\n\x1a\n", 8, &e), ST_BAD_INPUT, e, "truncated");
    CHECK_FAILS(refuse("II", 2, &e), ST_BAD_INPUT, e, "truncated");
    CHECK_FAILS(refuse("II*\0\x08\0\0\0", 8, &e), ST_BAD_INPUT, e, "truncated or damaged");
    micrograph m = { 0 };
    load_options o = load_defaults();
    CHECK_FAILS(load_file(scratch("none.png"), &o, &m, &e), ST_IO, e, "No such file");
    CHECK(!strstr(e.text, "none.png"));
    o.max_pixels = NX * NY - 1;
    CHECK_FAILS(load_file(scratch("a.png"), &o, &m, &e), ST_NO_MEMORY, e, "too large");
    png_format small = { 31, 80, 1, 8, 0.0 };
    CHECK(png_write(scratch("small.png"), pixels, &small, &e) == ST_OK);
    o = load_defaults();
    CHECK_FAILS(load_file(scratch("small.png"), &o, &m, &e), ST_BAD_INPUT, e, "31 x 80 pixels; at least 32");
}

static void names(void) {
    static const char *const good[] = { "a.png", "d/a.TIF", "x.y.Tiff", ".a.png", "a.jpg", "a.JPEG" };
    static const char *const bad[] = { "png", ".png", "d/.tif", "a.png.txt", "a.bmp", "", "a.tif/" };
    for (size_t i = 0; i < sizeof good / sizeof good[0]; i++) CHECK(load_knows_name(good[i]));
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) CHECK(!load_knows_name(bad[i]));
}

/* What a sidecar called `name` with this text makes of a picture `image` without a scale of its own. */
static void sidecar(const char *image, const char *name, const char *text, size_t n, double want_nm,
                    const char *note) {
    put_png(image, 0.0);
    scratch_put(name, text, n);
    micrograph m = load(image);
    if (isnan(want_nm))
        CHECK(isnan(m.px_nm));
    else {
        CHECK_NEAR(m.px_nm, want_nm, 1e-9);
        CHECK(!strcmp(m.px_source, "sidecar"));
    }
    CHECK(strstr(m.note, note) != NULL);
    if (!strstr(m.note, note)) printf("  note: %s\n", m.note);
    micrograph_free(&m);
    unlink(scratch(name));
}

static void sidecars(void) {
#define TEXT(s) (s), sizeof(s) - 1
    sidecar("s.png", "s.txt", TEXT("pixel size = 2.5 nm\n"), 2.5, "");
    sidecar("s.png", "s.png.txt", TEXT("px_nm = 5.58"), 5.58, "");
    sidecar("s.png", "S.TXT", TEXT("px_nm = 5.58"), 5.58, "");
    sidecar("s.png", "s.json", TEXT("{\"px_nm\": 4.5}"), 4.5, "");
    sidecar("s.PNG", "S.png.Json", TEXT("\xef\xbb\xbf {\"px_nm\": 4.5}"), 4.5, "");
    sidecar("s.png", "s.txt",
            TEXT("\xff\xfep\0x\0_\0n\0m\0=\0"
                 "3\0"),
            3.0, "");
    sidecar("s.png", "s.txt",
            TEXT("p\0i\0x\0e\0l\0 \0s\0i\0z\0e\0=\0"
                 "3\0 \0\xbc\x03m\0"),
            3000.0, "");
    sidecar("s.png", "s.txt",
            TEXT("\xfe\xff\0p\0x\0_\0n\0m\0=\0"
                 "3"),
            3.0, "");
    sidecar("s.png", "s.txt", TEXT("pixel size = 5.58"), (double)NAN,
            "s.txt: 'pixel size = 5.58' has no unit");
    sidecar("s.png", "s.json", TEXT("{\"px_nm\": }"), (double)NAN, "s.json line 1: not JSON");
    sidecar("s.png", "t.txt", TEXT("px_nm = 5.58"), (double)NAN, "");
    sidecar("s.png", "s.tif.txt", TEXT("px_nm = 5.58"), (double)NAN, "");
#undef TEXT
    /* Of several the one that names the whole file; of two that differ in case the exact one. */
    scratch_put("s.png.txt", "px_nm = 1.5", 11);
    scratch_put("s.txt", "px_nm = 2.5", 11);
    scratch_put("S.txt", "px_nm = 3.5", 11);
    micrograph m = load("s.png");
    CHECK_NEAR(m.px_nm, 1.5, 0.0);
    micrograph_free(&m);
    unlink(scratch("s.png.txt"));
    m = load("s.png");
    CHECK_NEAR(m.px_nm, 2.5, 0.0);
    micrograph_free(&m);
}

static void precedence(void) {
    put_png("p.png", 5.0);
    scratch_put("p.txt", "px_nm = 5.05", 12);
    load_options o = load_defaults();
    micrograph m = { 0 };
    error e = { 0 };
    o.px_nm_sheet = 6.0;
    CHECK(load_file(scratch("p.png"), &o, &m, &e) == ST_OK && !strcmp(m.px_source, "sheet") &&
          m.flags == FLAG(PX_DISAGREE));
    CHECK(strstr(m.note, "6 nm (sheet)") && strstr(m.note, "sidecar says 5.05 nm") &&
          strstr(m.note, "pHYs says 5 nm"));
    micrograph_free(&m);
    o.px_nm_option = 5.04;
    o.px_u_rel = 0.003;
    o.px_nm_sheet = (double)NAN;
    CHECK(load_file(scratch("p.png"), &o, &m, &e) == ST_OK && !strcmp(m.px_source, "option") && m.flags == 0);
    CHECK_NEAR(m.px_u_rel, 0.003, 0.0);
    micrograph_free(&m);
}

static void strip(void) {
    static uint8_t tall[120 * NX];
    memcpy(tall, pixels, sizeof pixels); /* 80 rows of picture, then 40 black ones with bars of writing */
    for (size_t y = 90; y < 110; y++)
        for (size_t x = 6; x < 60; x += 6) tall[y * NX + x] = tall[y * NX + x + 1] = 255;
    png_format f = { NX, 120, 1, 8, 5.0 };
    error e = { 0 };
    CHECK(png_write(scratch("strip.png"), tall, &f, &e) == ST_OK);
    micrograph m = load("strip.png");
    CHECK(m.strip_rows == 40 && m.ny == 80 && m.file_ny == 120);
    CHECK_NEAR(m.clipped_low, 0.25, 1e-12); /* of the plane, not of the strip */
    micrograph_free(&m);
    load_options o = load_defaults();
    o.crop_strip = 0;
    CHECK(load_file(scratch("strip.png"), &o, &m, &e) == ST_OK && m.strip_rows == 0 && m.ny == 120);
    micrograph_free(&m);
}

static void short_of_memory(void) {
    load_options o = load_defaults();
    int done = 0;
    for (size_t n = 1; n < 60 && !done; n++) {
        micrograph m = { 0 };
        error e = { 0 };
        mem_fail_after(n);
        status st = load_file(scratch("a.png"), &o, &m, &e);
        mem_fail_after(0);
        CHECK(st == ST_OK ? m.px != NULL : e.text[0] != '\0' && !m.px);
        done = st == ST_OK && n > 20;
        micrograph_free(&m);
    }
}

int main(void) {
    for (size_t i = 0; i < NX * NY; i++) pixels[i] = (uint8_t)(1 + (i * 2654435761u >> 11) % 254);
    for (size_t i = 0; i < NX * NY / 4; i++) pixels[4 * i + i % 4] = 0;
    for (size_t i = 0, n = 0; n < 10; i += 7)
        if (pixels[i] != 0) pixels[i] = 255, n++;
    scratch_make();
    contents();
    names();
    sidecars();
    precedence();
    strip();
    short_of_memory();
    scratch_remove(scratch_root);
    return check_done();
}
