/* The overlay: markers centred on their sub-pixel features, counted ones apart from those in the guard frame, borders where
 * cells meet, a ring of the spacing, a scale bar of its length, the strip greyed, the reasons, seamless tiles, and no read
 * outside the picture whatever the features say. */
#include "report/overlay.h"

#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "report/thumbnail.h"

enum { NX = 320, NY = 240 };

typedef struct {
    float px[NX * NY];
    uint32_t cells[NX * NY];
    feature f[3];
    micrograph m;
    texture t;
} scene;

/* Left half cell 1, right half cell 2; one feature in each, a third outside the guard. */
static void scene_make(scene *s, float level) {
    memset(s, 0, sizeof *s);
    for (size_t i = 0; i < (size_t)NX * NY; i++) {
        s->px[i] = level;
        s->cells[i] = i % NX < NX / 2 ? 1 : 2;
    }
    s->px[0] = 0.0f;
    s->px[1] = 1.0f;
    s->f[0] = (feature){ .x = 80.0, .y = 100.0, .weight = 1.0, .in_guard = 1 };
    s->f[1] = (feature){ .x = 240.4, .y = 60.7, .weight = 1.0, .in_guard = 1 };
    s->f[2] = (feature){ .x = 310.0, .y = 140.0, .weight = 1.0 };
    s->m = (micrograph){ .px = s->px, .nx = NX, .ny = NY, .px_nm = 4.0 };
    s->t =
        (texture){ .features = s->f, .n_found = 3, .n_features = 2, .cells = s->cells, .nx = NX, .ny = NY };
    s->t.spacing_acf.value = 30.0;
    s->t.spacing_hex.value = 29.0;
}

/* A drawn overlay with its colours looked up. */
typedef struct {
    overlay_picture p;
    uint8_t *rgb;
} drawn;

static drawn draw(const scene *s) {
    drawn d = { .rgb = NULL };
    error e = { 0 };
    CHECK(overlay_draw(&s->m, &s->t, &d.p, &e) == ST_OK && !e.text[0]);
    d.rgb = mem_array(d.p.nx * d.p.ny, 3);
    for (size_t i = 0; d.rgb && i < d.p.nx * d.p.ny; i++) memcpy(d.rgb + 3 * i, d.p.palette + 3 * (size_t)d.p.index[i], 3);
    return d;
}

static void drawn_free(drawn *d) {
    overlay_free(&d->p);
    free(d->rgb);
}

static const uint8_t *at(const drawn *d, size_t x, size_t y) { return d->rgb + 3 * (y * d->p.nx + x); }
static int is_counted(const uint8_t *p) { return p[0] > 215 && p[1] > 140 && p[1] < 215 && p[2] < 110; }
static int is_frame(const uint8_t *p) { return p[0] > 190 && p[1] < 185 && p[2] > 160; }
static int is_white(const uint8_t *p) { return p[0] > 235 && p[1] > 235 && p[2] > 235; }

/* Centroid and area of a colour in a window. */
static double area_of(const drawn *d, int (*is)(const uint8_t *), size_t x0, size_t y0, size_t x1, size_t y1, double *x, double *y) {
    double area = 0.0;
    *x = *y = 0.0;
    for (size_t v = y0; v < y1; v++)
        for (size_t u = x0; u < x1; u++) {
            if (!is(at(d, u, v))) continue;
            *x += (double)u;
            *y += (double)v;
            area += 1.0;
        }
    *x /= area;
    *y /= area;
    return area;
}

static void check_markers(scene *s) {
    double x, y, r = overlay_marker_radius_px(&s->t, NX);
    CHECK_NEAR(r, 2.7, 1e-12); /* 0.09 of 30 px */
    drawn d = draw(s);
    CHECK(d.p.nx == NX && d.p.plane_y == 0 && d.p.plane_ny == NY && d.p.ny > NY + 20);
    CHECK_NEAR(area_of(&d, is_counted, 70, 90, 90, 110, &x, &y), PI * r * r, 0.35 * PI * r * r);
    CHECK_NEAR(x, 80.0, 0.05);
    CHECK_NEAR(y, 100.0, 0.05);
    area_of(&d, is_counted, 230, 50, 250, 70, &x, &y);
    CHECK_NEAR(x, 240.4, 0.35);
    CHECK_NEAR(y, 60.7, 0.35);
    /* in the guard frame: another colour, and open where the disc is full */
    CHECK(area_of(&d, is_frame, 300, 130, 320, 150, &x, &y) > 6.0);
    CHECK_NEAR(x, 310.0, 0.35);
    CHECK_NEAR(y, 140.0, 0.35);
    CHECK(!is_frame(at(&d, 310, 140)) && !is_counted(at(&d, 310, 140)));
    /* the border: bluish column where the cells meet, plain grey beside it */
    const uint8_t *edge = at(&d, NX / 2 - 1, 30), *plain = at(&d, 100, 30);
    CHECK(edge[2] > edge[0] + 40 && plain[0] == plain[1] && plain[1] == plain[2]);
    CHECK(at(&d, NX / 2, 30)[2] < edge[2] && at(&d, NX / 2 + 1, 30)[0] == plain[0]);
    drawn_free(&d);
    s->f[1].weight = 0.0; /* its cell touches the frame: veiled, lighter than the dark ground */
    for (size_t i = 0; i < (size_t)NX * NY; i++) s->px[i] = i % 7 ? 0.1f : 0.9f;
    d = draw(s);
    CHECK(at(&d, 250, 200)[0] > at(&d, 40, 200)[0] + 40);
    drawn_free(&d);
}

/* Distance of the white ring from its feature, in four directions, against the spacing. */
static void check_ring(scene *s) {
    scene_make(s, 0.2f);
    CHECK_NEAR(overlay_ring_px(&s->t), 30.0, 0.0);
    drawn d = draw(s);
    double x, y;
    CHECK(area_of(&d, is_white, 100, 97, 120, 104, &x, &y) > 5.0); /* right of (80, 100), the counted one nearest to the middle */
    CHECK_NEAR(x, 80.0 + 30.0, 0.3);
    area_of(&d, is_white, 40, 97, 60, 104, &x, &y);
    CHECK_NEAR(x, 80.0 - 30.0, 0.3);
    area_of(&d, is_white, 77, 120, 84, 140, &x, &y);
    CHECK_NEAR(y, 100.0 + 30.0, 0.3);
    drawn_free(&d);
    s->t.spacing_acf.value = MISSING;
    CHECK(isnan(overlay_ring_px(&s->t)));
    d = draw(s);
    CHECK(!(area_of(&d, is_white, 100, 97, 120, 104, &x, &y) > 0.0));
    drawn_free(&d);
}

/* First row of the legend that has a long white run, and the length of that run: the scale bar. */
static size_t bar_pixels(const drawn *d) {
    size_t most = 0;
    for (size_t y = d->p.plane_y + d->p.plane_ny; y < d->p.ny; y++)
        for (size_t x = 0, run = 0; x < d->p.nx; x++) {
            run = is_white(at(d, x, y)) ? run + 1 : 0;
            if (run > most) most = run;
        }
    return most;
}

static void check_bar(scene *s) {
    static const struct {
        double px_nm, length_nm;
    } t[] = { { 4.0, 200.0 }, { 1.3, 50.0 }, { 9.7, 500.0 }, { 75.0, 5000.0 }, { 0.02, 1.0 }, { 2e5, 1e7 } };
    for (size_t k = 0; k < sizeof t / sizeof t[0]; k++) {
        scene_make(s, 0.5f);
        s->m.px_nm = t[k].px_nm;
        CHECK_NEAR(overlay_bar_length(&s->m), t[k].length_nm, 1e-9 * t[k].length_nm);
        drawn d = draw(s);
        CHECK_NEAR((double)bar_pixels(&d), t[k].length_nm / t[k].px_nm, 1.01);
        drawn_free(&d);
    }
    s->m.px_nm = MISSING;
    CHECK_NEAR(overlay_bar_length(&s->m), 50.0, 1e-9); /* px */
}

/* The strip stays where it was, above and below, with little contrast and out of the marks. */
static void check_strip(scene *s) {
    static float strip[5 * NX];
    for (size_t i = 0; i < 5 * (size_t)NX; i++) strip[i] = i % 2 ? 1.0f : 0.0f;
    scene_make(s, 0.5f);
    s->m.strip = strip;
    s->m.strip_rows = 5;
    s->m.strip_top = 2;
    drawn d = draw(s), without;
    double x, y;
    CHECK(d.p.plane_y == 2 && d.p.plane_ny == NY);
    for (size_t v = 0; v < 2; v++) {
        const uint8_t *dark = at(&d, 10, v ? NY + 4 : 1), *light = at(&d, 11, v ? NY + 4 : 1);
        CHECK(dark[0] == dark[2] && dark[0] > 40 && light[0] > dark[0] + 50 && light[0] < 190);
    }
    area_of(&d, is_counted, 70, 92, 90, 112, &x, &y);
    CHECK_NEAR(y, 102.0, 0.05);
    s->m.strip = NULL;
    s->m.strip_rows = s->m.strip_top = 0;
    without = draw(s);
    CHECK(!memcmp(without.rgb, at(&d, 0, 2), (size_t)NX * NY * 3)); /* the plane itself is drawn as ever */
    drawn_free(&d);
    drawn_free(&without);
}

/* White letters over the specimen are greyed, and the texture keeps its contrast. */
static void check_masked(scene *s) {
    unsigned char *masked = mem_array((size_t)NX * NY, 1);
    scene_make(s, 0.3f);
    for (size_t i = 0; i < (size_t)NX * NY; i++) s->px[i] = i % 2 ? 0.2f : 0.3f;
    for (size_t i = 0; masked && i < 40u * NX; i++) { /* a sixth of the picture, white */
        masked[i] = 1;
        s->px[i] = 1.0f;
    }
    s->m.masked = masked;
    drawn d = draw(s);
    const uint8_t *mark = at(&d, 20, 20), *dark = at(&d, 21, 200), *light = at(&d, 20, 200);
    CHECK(mark[0] == mark[2] && mark[0] > 130 && mark[0] < 190 && dark[0] < 10 && light[0] > 245);
    drawn_free(&d);
    free(masked);
}

/* Legible on any ground: the marker's brightness differs from the grey around it, or its rim does. */
static void check_grounds(scene *s) {
    for (int k = 0; k <= 4; k++) {
        scene_make(s, (float)k / 4.0f);
        drawn d = draw(s);
        const uint8_t *core = at(&d, 80, 100), *ground = at(&d, 60, 110);
        CHECK(abs(core[2] - ground[2]) > 60 || abs(core[0] - ground[0]) > 60);
        drawn_free(&d);
    }
}

static void check_reasons(scene *s) {
    scene_make(s, 0.5f);
    drawn plain = draw(s);
    s->t.reasons = FLAG(FEW_PIXELS) | FLAG(BLURRED);
    drawn band = draw(s);
    CHECK(band.p.ny > plain.p.ny && !memcmp(plain.rgb, band.rgb, (size_t)NX * NY * 3)); /* below the picture */
    const uint8_t *b = at(&band, 318, band.p.ny - 2);
    CHECK(b[0] > b[1] + 60);
    drawn_free(&band);
    s->t.reasons = 0;
    s->m.px_nm = MISSING; /* no scale is a reason too */
    band = draw(s);
    b = at(&band, 318, band.p.ny - 2);
    CHECK(b[0] > b[1] + 60);
    drawn_free(&band);
    drawn_free(&plain);
}

/* Larger than one tile each way: every marker is there, also those on the seams, and the ground is the micrograph's. */
static void check_tiles(void) {
    enum { WX = 4200, WY = 900, N = 60 };
    float *px = mem_array((size_t)WX * WY, sizeof *px);
    feature f[N] = { { 0 } };
    for (size_t i = 0; i < (size_t)WX * WY; i++) px[i] = (float)(i % WX) / WX;
    for (size_t k = 0; k < N; k++)
        f[k] = (feature){ .x = 2048.0 + ((double)(k % 6) - 3.0), .y = 20.3 + 14.0 * (double)k, .weight = 1.0, .in_guard = 1 };
    scene s = { .m = { .px = px, .nx = WX, .ny = WY, .px_nm = 5.0 }, .t = { .features = f, .n_found = N, .n_features = N } };
    s.t.spacing_acf.value = s.t.spacing_hex.value = 40.0;
    drawn d = draw(&s);
    double x, y;
    for (size_t k = 0; k < N; k++) {
        size_t row = (size_t)f[k].y;
        area_of(&d, is_counted, 2030, row - 6, 2066, row + 7, &x, &y);
        if (fabs(y - 450.0) < 60.0) continue; /* the ring is near */
        CHECK_NEAR(x, f[k].x, 0.4);
        CHECK_NEAR(y, f[k].y, 0.4);
    }
    CHECK(at(&d, 10, 600)[0] < 4 && abs(at(&d, 2100, 600)[0] - 128) < 4 && at(&d, 4190, 600)[0] > 251);
    drawn_free(&d);
    free(px);
}

static void check_errors(scene *s) {
    overlay_picture p = { 0 };
    error e = { 0 };
    scene_make(s, 0.5f);
    CHECK_FAILS(overlay_draw(&(micrograph){ 0 }, &s->t, &p, &e), ST_BAD_INPUT, e, "empty");
    s->t.nx = NX - 1;
    CHECK_FAILS(overlay_draw(&s->m, &s->t, &p, &e), ST_BUG, e, "319 x 240");
    s->t.nx = NX;
    size_t failures = 0;
    for (size_t n = 1; n < 200; n++) { /* whichever allocation fails */
        e = (error){ 0 };
        mem_fail_after(n);
        status st = overlay_draw(&s->m, &s->t, &p, &e);
        mem_fail_after(0);
        if (st == ST_OK) break;
        CHECK(st == ST_NO_MEMORY && strstr(e.text, "memory") && !p.index);
        failures++;
    }
    CHECK(failures > 5 && p.index);
    overlay_free(&p);
    /* nothing found, no spacing, no cells, tiny and flat */
    texture none = { 0 };
    none.spacing_acf.value = none.spacing_hex.value = MISSING;
    for (size_t i = 0; i < (size_t)NX * NY; i++) s->px[i] = 0.25f;
    micrograph tiny = { .px = s->px, .nx = 32, .ny = 32, .px_nm = 4.0 };
    none.reasons = FLAG(FEATURELESS) | FLAG(NOISY) | FLAG(STREAKS);
    e = (error){ 0 };
    CHECK(overlay_draw(&tiny, &none, &p, &e) == ST_OK && p.nx == 32);
    overlay_free(&p);
    /* features outside the picture, or nowhere */
    s->f[0].x = -1e9;
    s->f[1].y = 1e9;
    s->f[2].x = MISSING;
    CHECK(overlay_draw(&s->m, &s->t, &p, &e) == ST_OK);
    overlay_free(&p);
}

static void check_box(void) {
    uint8_t rgb[4 * 2 * 3], *small = NULL;
    size_t ny = 0;
    error e = { 0 };
    for (size_t i = 0; i < sizeof rgb; i++) rgb[i] = (uint8_t)(10 * (i / 3)); /* 0..70 */
    CHECK(box_average(rgb, 4, 2, 2, &small, &ny, &e) == ST_OK);
    CHECK(ny == 1 && small[0] == 25 && small[3] == 45); /* means of {0,10,40,50} and {20,30,60,70} */
    free(small);
    CHECK(box_average(rgb, 4, 2, 3, &small, &ny, &e) == ST_OK); /* a third of the width: 4/3 px each */
    CHECK(ny == 2 && small[0] == 3);                            /* (0 + 10/3) / (4/3) = 2.5, rounded */
    free(small);
}

int main(void) {
    scene *s = mem_array(1, sizeof *s);
    if (!s) return 1;
    scene_make(s, 0.5f);
    check_markers(s);
    check_ring(s);
    check_bar(s);
    check_strip(s);
    check_masked(s);
    check_grounds(s);
    check_reasons(s);
    check_tiles();
    check_errors(s);
    check_box();
    free(s);
    return check_done();
}
