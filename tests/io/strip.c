/* The strip on pictures of known truth: many kinds of specimen under many styles of strip, rows exact; the
 * same specimens without a strip, with writing on the picture, with saturated bands: no rows. */
#include "io/strip_priv.h"

#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>

/* needs size_t and FILE before it */
#include <jpeglib.h>

#include "check.h"
#include "io/picture_priv.h"

typedef struct {
    size_t nx, ny;
    float *px;
} canvas;

static uint64_t seed;

static double uniform01(void) { /* xorshift64*, Vigna 2016 */
    seed ^= seed >> 12;
    seed ^= seed << 25;
    seed ^= seed >> 27;
    return (double)((seed * 2685821657736338717u) >> 11) / 9007199254740992.0;
}

/* Normal deviates from a table of sums of 12: enough for noise. */
static double gauss(void) {
    static double table[4096];
    static int made;
    for (; made < 4096; made++) {
        table[made] = -6.0;
        for (int i = 0; i < 12; i++) table[made] += uniform01();
    }
    return table[(size_t)(uniform01() * 4096.0)];
}

/* ---- specimens ---- */

typedef enum {
    NOISY,        /* dense hillocks, shot noise */
    NOISELESS,    /* the same without */
    CLIPPED,      /* pores at level 0 over half of the field */
    SATURATED,    /* tops at level 1 */
    DARK,         /* levels 0 to 4 */
    BLANK,        /* one level */
    QUIET,        /* one level, noise of one level */
    SPARSE,       /* a few smooth hillocks on a flat ground, noiseless */
    GRADIENT,     /* brightness falls from top to bottom, noise */
    LOW_CONTRAST, /* 20 levels in all */
    SPECIMENS
} specimen;

static double hillocks(double x, double y, double pitch) {
    /* Jittered lattice of cones, the highest of the neighbours: cheap and rough enough. */
    double best = 0.0;
    long ix = (long)floor(x / pitch), iy = (long)floor(y / pitch);
    for (long j = iy - 1; j <= iy + 1; j++)
        for (long i = ix - 1; i <= ix + 1; i++) {
            uint32_t h = (uint32_t)(i * 73856093) ^ (uint32_t)(j * 19349663);
            h = (h ^ (h >> 13)) * 1274126177u;
            double cx = ((double)i + 0.5 + 0.5 * ((h & 1023) / 1023.0 - 0.5)) * pitch;
            double cy = ((double)j + 0.5 + 0.5 * (((h >> 10) & 1023) / 1023.0 - 0.5)) * pitch;
            double z = 1.0 - 1.5 * sqrt((x - cx) * (x - cx) + (y - cy) * (y - cy)) / pitch;
            if (z > best) best = z;
        }
    return best;
}

static void paint_specimen(canvas *c, specimen kind, double pitch, double levels) {
    for (size_t y = 0; y < c->ny; y++)
        for (size_t x = 0; x < c->nx; x++) {
            double h = kind == BLANK || kind == QUIET ? 0.0 : hillocks((double)x, (double)y, pitch), v = 0.45;
            switch (kind) {
            case NOISY:
                v = 0.15 + 0.7 * h + 0.05 * gauss();
                break;
            case NOISELESS:
                v = 0.15 + 0.7 * h;
                break;
            case CLIPPED:
                v = 1.6 * h - 0.6 + 0.03 * gauss();
                break;
            case SATURATED:
                v = 1.6 * h + 0.1 + 0.03 * gauss();
                break;
            case DARK:
                v = (2.0 * h - 0.5 + 0.7 * gauss()) / 255.0;
                break;
            case QUIET:
                v = 0.4 + 1.0 / 255.0 * gauss();
                break;
            case SPARSE: {
                double s = hillocks((double)x, (double)y, 5.0 * pitch);
                v = 0.2 + 0.7 * (s > 0.6 ? (s - 0.6) / 0.4 : 0.0);
                break;
            }
            case GRADIENT:
                v = 0.8 - 0.6 * (double)y / (double)c->ny + 0.1 * h + 0.03 * gauss();
                break;
            case LOW_CONTRAST:
                v = 0.4 + 0.06 * h + 0.008 * gauss();
                break;
            case BLANK:
            case SPECIMENS:
                break;
            }
            v = v < 0.0 ? 0.0 : v > 1.0 ? 1.0 : v;
            c->px[y * c->nx + x] = (float)(floor(v * levels + 0.5) / levels);
        }
}

/* ---- strips ---- */

static void fill(canvas *c, size_t x0, size_t y0, size_t x1, size_t y1, double v) {
    for (size_t y = y0; y < y1 && y < c->ny; y++)
        for (size_t x = x0; x < x1 && x < c->nx; x++) c->px[y * c->nx + x] = (float)v;
}

static const uint8_t glyphs[][7] = {
    /* clang-format off */
    { 14, 17, 19, 21, 25, 17, 14 }, { 4, 12, 4, 4, 4, 4, 14 }, { 14, 17, 1, 6, 8, 16, 31 }, { 31, 1, 6, 1, 1, 17, 14 },
    { 2, 6, 10, 18, 31, 2, 2 }, { 31, 16, 30, 1, 1, 17, 14 }, { 6, 8, 16, 30, 17, 17, 14 }, { 31, 1, 2, 4, 8, 8, 8 },
    { 17, 18, 20, 24, 20, 18, 17 }, { 17, 17, 17, 17, 17, 10, 4 }, { 17, 27, 21, 21, 17, 17, 17 }, { 0, 0, 22, 25, 17, 17, 17 },
    { 0, 0, 26, 21, 21, 21, 21 }, { 0, 31, 0, 0, 31, 0, 0 }, { 0, 0, 0, 0, 0, 12, 12 }
    /* clang-format on */
};

/* Letters of 5 x 7 dots, `dot` px each, softened at the edges when `soft` (as smoothed type is). */
static void write_text(canvas *c, size_t x, size_t y, int letters, size_t dot, double ink, int soft) {
    for (int k = 0; k < letters; k++, x += 6 * dot) {
        const uint8_t *g = glyphs[(size_t)(uniform01() * 14.99)];
        if (x + 6 * dot >= c->nx || uniform01() < 0.15) continue;
        for (size_t j = 0; j < 7 * dot; j++)
            for (size_t i = 0; i < 5 * dot; i++) {
                if (!(g[j / dot] >> (4 - i / dot) & 1) || y + j >= c->ny) continue;
                float *p = &c->px[(y + j) * c->nx + x + i];
                int edge = soft && (i % dot == 0 || i % dot == dot - 1) && uniform01() < 0.6;
                double mix = edge ? 0.3 + 0.6 * uniform01() : 1.0;
                *p = (float)(floor(((1.0 - mix) * (double)*p + mix * ink) * 255.0 + 0.5) / 255.0);
            }
    }
}

typedef enum {
    WHITE_ON_BLACK,
    BLACK_ON_WHITE,
    LINE_OVER_BLACK, /* one bright line, then black */
    THICK_LINE,      /* three grey rows, then dark grey */
    TABLE,           /* grey cells, dark borders */
    BOXED,           /* black strip in a white frame */
    FRAMED,          /* white with a black frame that leaves specimen around it */
    GREY_TWO_LINES,  /* two lines of writing on mid grey */
    LOGO,            /* a block of shaded grey beside the writing */
    NOISY_BLACK,     /* black strip, noise of one level */
    STYLES
} style;

static void paint_writing(canvas *c, size_t top, size_t rows, double ink, int lines, int soft) {
    size_t dot = rows / (size_t)(lines * 11);
    if (dot < 1) dot = 1;
    for (int l = 0; l < lines; l++) {
        size_t y = top + rows * (size_t)l / (size_t)lines + (rows / (size_t)lines - 7 * dot) / 2;
        write_text(c, 12, y, (int)(c->nx / (6 * dot) / 2), dot, ink, soft);
    }
    size_t x = c->nx * 7 / 10, mid = top + rows / 2;
    fill(c, x, mid, x + c->nx / 5, mid + 2, ink); /* scale bar with its ends */
    fill(c, x, mid - 3, x + 1, mid + 5, ink);
    fill(c, x + c->nx / 5, mid - 3, x + c->nx / 5 + 1, mid + 5, ink);
}

static void paint_table(canvas *c, size_t top, size_t rows) {
    fill(c, 0, top, c->nx, c->ny, 0.75);
    paint_writing(c, top + rows / 2, rows - rows / 2, 0.0, 1, 0);
    write_text(c, 20, top + 3, 8, 1, 0.0, 0);
    fill(c, 0, top, c->nx, top + 1, 0.25);
    fill(c, 0, top + rows / 2, c->nx, top + rows / 2 + 1, 0.25);
    fill(c, 0, c->ny - 1, c->nx, c->ny, 0.25);
    for (size_t k = 0; k < 8; k++) {
        size_t x = k * c->nx / 8;
        fill(c, x, top, x + 1, c->ny, 0.25);
    }
}

static void paint_strip(canvas *c, style s, size_t rows, int soft) {
    size_t top = c->ny - rows;
    double paper = s == BLACK_ON_WHITE || s == FRAMED ? 1.0
                   : s == GREY_TWO_LINES              ? 128.0 / 255.0
                   : s == THICK_LINE                  ? 0.2
                                                      : 0.0;
    double ink = paper > 0.6 ? 0.0 : 1.0;
    if (s == TABLE) {
        paint_table(c, top, rows);
        return;
    }
    if (s == FRAMED) {
        fill(c, 2, top, c->nx - 2, c->ny - 2, 0.0);
        fill(c, 3, top + 1, c->nx - 3, c->ny - 3, 1.0);
        paint_writing(c, top + 2, rows - 6, ink, 1, soft);
        return;
    }
    fill(c, 0, top, c->nx, c->ny, paper);
    paint_writing(c, top, rows, ink, s == GREY_TWO_LINES ? 2 : 1, soft);
    if (s == LINE_OVER_BLACK) fill(c, 0, top, c->nx, top + 1, 1.0);
    if (s == THICK_LINE) fill(c, 0, top, c->nx, top + 3, 0.6);
    if (s == BOXED) {
        fill(c, 0, top, c->nx, top + 1, 1.0);
        fill(c, 0, c->ny - 1, c->nx, c->ny, 1.0);
        fill(c, 0, top, 1, c->ny, 1.0);
        fill(c, c->nx - 1, top, c->nx, c->ny, 1.0);
    }
    if (s == LOGO)
        for (size_t y = top + 2; y + 2 < c->ny; y++)
            for (size_t x = c->nx - rows - 4; x < c->nx - 4; x++)
                c->px[y * c->nx + x] =
                    (float)(floor(128.0 + 90.0 * sin((double)x * 0.3) * cos((double)y * 0.2)) / 255.0);
    if (s == NOISY_BLACK)
        for (size_t i = top * c->nx; i < c->ny * c->nx; i++) {
            double v = (double)c->px[i] + floor(gauss() + 0.5) / 255.0;
            c->px[i] = (float)(v < 0.0 ? 0.0 : v > 1.0 ? 1.0 : v);
        }
}

static canvas canvas_make(size_t nx, size_t ny) {
    canvas c = { nx, ny, calloc(nx * ny, sizeof(float)) };
    if (!c.px) abort();
    return c;
}

/* Pairs that no one could tell apart: the paper continues the specimen without a trace. */
static int invisible(specimen k, style s) { return (k == DARK && s == NOISY_BLACK); }

static void sweep_strips(size_t nx, size_t ny, double levels) {
    canvas clean = canvas_make(nx, ny), c = canvas_make(nx, ny);
    static const double shares[] = { 0.04, 0.07, 0.12 };
    for (int k = 0; k < SPECIMENS; k++) {
        paint_specimen(&clean, (specimen)k, 11.0 + 3.0 * k, levels);
        for (int s = 0; s < STYLES; s++)
            for (int r = 0; r < 3; r++) {
                size_t rows = (size_t)(shares[r] * (double)ny) + (size_t)(uniform01() * 4.0);
                if (rows < 24) rows = 24;
                if (invisible((specimen)k, (style)s)) continue;
                memcpy(c.px, clean.px, nx * ny * sizeof(float));
                paint_strip(&c, (style)s, rows, r % 2);
                size_t got = strip_find(c.px, nx, ny);
                CHECK(got == rows);
                if (got != rows)
                    printf("  specimen %d style %d %zux%zu: %zu rows, found %zu\n", k, s, nx, ny, rows, got);
            }
    }
    free(clean.px);
    free(c.px);
}

static void sweep_bare(size_t nx, size_t ny, double levels) {
    canvas c = canvas_make(nx, ny);
    for (int k = 0; k < SPECIMENS; k++)
        for (int trap = 0; trap < 4; trap++) {
            paint_specimen(&c, (specimen)k, 9.0 + 4.0 * trap, levels);
            size_t y = ny - ny / 10;
            if (trap == 1) write_text(&c, 10, y, 20, 2, 1.0, 1); /* writing on the picture */
            if (trap == 1) fill(&c, nx / 2, y + 10, nx / 2 + nx / 4, y + 13, 1.0); /* and a bar */
            if (trap == 2) fill(&c, 0, ny - 12, nx, ny, 1.0);                      /* saturated to the end */
            if (trap == 3) fill(&c, 0, y, nx, y + 5, 1.0);                         /* saturated band */
            size_t got = strip_find(c.px, nx, ny);
            CHECK(got == 0);
            if (got) printf("  specimen %d trap %d %zux%zu: found %zu\n", k, trap, nx, ny, got);
        }
    free(c.px);
}

/* Paper with a scale bar and not a word; the bar with or without ticks. */
static void bars_alone(size_t nx, size_t ny) {
    canvas c = canvas_make(nx, ny);
    for (int k = 0; k < SPECIMENS; k++)
        for (int paper = 0; paper < 2; paper++) {
            size_t rows = 24, y = ny - 12, x1 = 20 + nx / 4;
            double ink = paper ? 0.0 : 1.0;
            paint_specimen(&c, (specimen)k, 17.0, 255.0);
            fill(&c, 0, ny - rows, nx, ny, (double)paper);
            fill(&c, 20, y, x1, y + 4, ink);
            if (k % 2) {
                fill(&c, 20, y - 3, 22, y + 7, ink);
                fill(&c, x1 - 2, y - 3, x1, y + 7, ink);
            }
            size_t got = strip_find(c.px, nx, ny);
            CHECK(got == rows);
            if (got != rows) printf("  bar alone: specimen %d paper %d: found %zu\n", k, paper, got);
            paint_specimen(&c, (specimen)k, 17.0, 255.0);
            fill(&c, 20, y, x1, y + 4, ink); /* on the specimen itself */
            CHECK(strip_find(c.px, nx, ny) == 0);
        }
    free(c.px);
}

static void upside_down(canvas *c) {
    for (size_t y = 0; y < c->ny / 2; y++)
        for (size_t x = 0; x < c->nx; x++) {
            float *a = &c->px[y * c->nx + x], *b = &c->px[(c->ny - 1 - y) * c->nx + x], t = *a;
            *a = *b;
            *b = t;
        }
}

static void strips_on_top(size_t nx, size_t ny) {
    canvas c = canvas_make(nx, ny), clean = canvas_make(nx, ny);
    for (int k = 0; k < SPECIMENS; k++) {
        paint_specimen(&clean, (specimen)k, 11.0 + 3.0 * k, 255.0);
        CHECK(strip_find_top(clean.px, nx, ny) == 0);
        for (int s = 0; s < STYLES; s++) {
            if (invisible((specimen)k, (style)s)) continue;
            memcpy(c.px, clean.px, nx * ny * sizeof(float));
            paint_strip(&c, (style)s, 30, s % 2);
            upside_down(&c);
            size_t got = strip_find_top(c.px, nx, ny);
            CHECK(got == 30);
            if (got != 30) printf("  top: specimen %d style %d: found %zu\n", k, s, got);
        }
    }
    free(clean.px);
    free(c.px);
}

/* A box at the left, the right or in the middle, with or without specimen below it. */
static void narrow_strips(size_t nx, size_t ny) {
    canvas c = canvas_make(nx, ny), clean = canvas_make(nx, ny), box = canvas_make(nx * 6 / 10, 34);
    for (int k = 0; k < SPECIMENS; k++) {
        paint_specimen(&clean, (specimen)k, 11.0 + 3.0 * k, 255.0);
        for (int place = 0; place < 3; place++)
            for (int paper = 0; paper < 2; paper++) {
                size_t x0 = (size_t)place * (nx - box.nx) / 2, below = place == 1 ? 5 : 0;
                memcpy(c.px, clean.px, nx * ny * sizeof(float));
                fill(&box, 0, 0, box.nx, box.ny, paper ? 1.0 : 0.0);
                paint_writing(&box, 0, box.ny, paper ? 0.0 : 1.0, 1, 0);
                for (size_t y = 0; y < box.ny; y++)
                    memcpy(&c.px[(ny - below - box.ny + y) * nx + x0], box.px + y * box.nx,
                           box.nx * sizeof(float));
                size_t got = strip_find(c.px, nx, ny), want = box.ny + below;
                /* Where specimen and paper share a level the box has no edge: rather none than a wrong one. */
                int unclear = k == CLIPPED || k == SATURATED || k == DARK;
                CHECK(got == want || (unclear && got == 0));
                if (got != want && !(unclear && got == 0))
                    printf("  narrow: specimen %d place %d paper %d: found %zu of %zu\n", k, place, paper,
                           got, want);
            }
    }
    free(c.px);
    free(clean.px);
    free(box.px);
}

/* Through a JPEG file of this quality and back. */
static void through_jpeg(canvas *c, int quality) {
    struct jpeg_compress_struct j;
    struct jpeg_error_mgr manager;
    unsigned char *bytes = NULL, *row = malloc(c->nx);
    unsigned long n = 0;
    j.err = jpeg_std_error(&manager);
    jpeg_create_compress(&j);
    jpeg_mem_dest(&j, &bytes, &n);
    j.image_width = (JDIMENSION)c->nx, j.image_height = (JDIMENSION)c->ny;
    j.input_components = 1, j.in_color_space = JCS_GRAYSCALE;
    jpeg_set_defaults(&j);
    jpeg_set_quality(&j, quality, TRUE);
    jpeg_start_compress(&j, TRUE);
    for (size_t y = 0; y < c->ny && row; y++) {
        for (size_t x = 0; x < c->nx; x++) row[x] = (unsigned char)(c->px[y * c->nx + x] * 255.0f + 0.5f);
        jpeg_write_scanlines(&j, &row, 1);
    }
    jpeg_finish_compress(&j);
    jpeg_destroy_compress(&j);
    picture p = { 0 };
    error e = { 0 };
    CHECK(jpeg_decode(bytes, n, (size_t)1 << 24, &p, &e) == ST_OK);
    if (p.px) memcpy(c->px, p.px, c->nx * c->ny * sizeof *c->px);
    picture_free(&p);
    free(bytes);
    free(row);
}

static void lossy_strips(size_t nx, size_t ny) {
    canvas c = canvas_make(nx, ny), clean = canvas_make(nx, ny);
    for (int k = 0; k < SPECIMENS; k++) {
        paint_specimen(&clean, (specimen)k, 11.0 + 3.0 * k, 255.0);
        for (int s = 0; s < STYLES; s++) {
            if (s == FRAMED || s == TABLE || s == LOGO || k == DARK)
                continue; /* not promised after a lossy file */
            memcpy(c.px, clean.px, nx * ny * sizeof(float));
            size_t rows = 40 + (size_t)s, rule = s == THICK_LINE ? 3 : 0;
            paint_strip(&c, (style)s, rows, 1);
            through_jpeg(&c, 75);
            size_t got = strip_find(c.px, nx, ny);
            /* Grey paper under a specimen of nearly the same grey may be missed; never half a strip. */
            int faint = s == GREY_TWO_LINES && (k == BLANK || k == LOW_CONTRAST || k == QUIET);
            int good = (got + 2 + rule >= rows && got <= rows + 8) || (faint && got == 0);
            CHECK(good);
            if (!good) printf("  jpeg: specimen %d style %d: found %zu of %zu\n", k, s, got, rows);
        }
    }
    free(clean.px);
    for (int k = 0; k < SPECIMENS; k++)
        for (int trap = k % 2; trap < 4; trap += 2) {
            paint_specimen(&c, (specimen)k, 9.0 + 4.0 * trap, 255.0);
            size_t y = ny - ny / 10;
            if (trap == 1) write_text(&c, 10, y, 20, 2, 1.0, 1);
            if (trap == 2) fill(&c, 0, ny - 12, nx, ny, 1.0);
            if (trap == 3) fill(&c, 0, y, nx, y + 5, 1.0);
            through_jpeg(&c, 75);
            size_t got = strip_find(c.px, nx, ny) + strip_find_top(c.px, nx, ny);
            CHECK(got == 0);
            if (got) printf("  jpeg: specimen %d trap %d: found %zu\n", k, trap, got);
        }
    free(c.px);
}

int main(void) {
    seed = 20260314;
    sweep_strips(400, 300, 255.0);
    sweep_strips(256, 360, 65535.0);
    sweep_bare(320, 240, 255.0);
    sweep_bare(256, 300, 65535.0);
    bars_alone(400, 300);
    strips_on_top(400, 300);
    narrow_strips(400, 300);
    lossy_strips(400, 304);
    canvas tiny = canvas_make(31, 31);
    CHECK(strip_find(tiny.px, 31, 31) == 0);
    free(tiny.px);
    return check_done();
}
