/* The overlay: size of the plane, a marker centred on its sub-pixel feature, borders where cells meet, a reason band, and
 * no read outside the picture whatever the features say. */
#include "report/overlay.h"

#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "report/canvas.h"
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
    s->f[2] = (feature){ .x = 318.0, .y = 120.0, .weight = 1.0 };
    s->m = (micrograph){ .px = s->px, .nx = NX, .ny = NY, .px_nm = 4.0 };
    s->t =
        (texture){ .features = s->f, .n_found = 3, .n_features = 2, .cells = s->cells, .nx = NX, .ny = NY };
    s->t.spacing_acf.value = 30.0;
    s->t.spacing_hex.value = 29.0;
}

static int is_marker(const uint8_t *p) { return p[0] > 230 && p[1] > 160 && p[1] < 215 && p[2] < 90; }

/* Centroid and area of the marker's colour in a window. */
static void marker_look(const uint8_t *rgb, long x0, long y0, long x1, long y1, double *x, double *y,
                        double *area) {
    *x = *y = *area = 0.0;
    for (long v = y0; v < y1; v++)
        for (long u = x0; u < x1; u++) {
            if (!is_marker(rgb + 3 * (v * NX + u))) continue;
            *x += (double)u;
            *y += (double)v;
            *area += 1.0;
        }
    *x /= *area;
    *y /= *area;
}

static void check_marker(scene *s) {
    size_t rows = 0;
    uint8_t *rgb = NULL;
    error e = { 0 };
    double x, y, area, r = overlay_marker_radius_px(&s->t, NX);
    CHECK_NEAR(r, 2.7, 1e-12); /* 0.09 of 30 px */
    CHECK(overlay_draw(&s->m, &s->t, &rgb, &rows, &e) == ST_OK);
    marker_look(rgb, 70, 90, 90, 110, &x, &y, &area);
    CHECK_NEAR(x, 80.0, 0.01);
    CHECK_NEAR(y, 100.0, 0.01);
    CHECK_NEAR(area, PI * r * r, 0.35 * PI * r * r);
    marker_look(rgb, 230, 50, 250, 70, &x, &y, &area);
    CHECK_NEAR(x, 240.4, 0.35);
    CHECK_NEAR(y, 60.7, 0.35);
    CHECK(!is_marker(rgb + 3 * (120 * NX + 318))); /* hollow outside the guard */
    /* the border: bluish column where the cells meet, plain grey beside it */
    const uint8_t *edge = rgb + 3 * (30 * NX + NX / 2 - 1), *plain = rgb + 3 * (30 * NX + 100);
    CHECK(edge[2] > edge[0] + 40 && plain[0] == plain[1] && plain[1] == plain[2]);
    CHECK(rgb[3 * (30 * NX + NX / 2)] == plain[0]); /* one pixel wide */
    free(rgb);
}

/* Legible on any ground: the marker's brightness differs from the grey around it, or its rim does. */
static void check_grounds(scene *s) {
    for (int k = 0; k <= 4; k++) {
        uint8_t *rgb = NULL;
        size_t rows = 0;
        error e = { 0 };
        scene_make(s, (float)k / 4.0f);
        CHECK(overlay_draw(&s->m, &s->t, &rgb, &rows, &e) == ST_OK);
        const uint8_t *core = rgb + 3 * (100 * NX + 80), *ground = rgb + 3 * (100 * NX + 60);
        CHECK(abs(core[2] - ground[2]) > 60 || abs(core[0] - ground[0]) > 60);
        free(rgb);
    }
}

static void check_band(scene *s) {
    size_t rows = 0;
    uint8_t *plain = NULL, *band = NULL;
    error e = { 0 };
    scene_make(s, 0.5f);
    CHECK(overlay_draw(&s->m, &s->t, &plain, &rows, &e) == ST_OK);
    size_t without = rows;
    CHECK(without > NY && without < NY + 60); /* the legend stands below the picture */
    s->t.reasons = FLAG(FEW_PIXELS) | FLAG(BLURRED);
    CHECK(overlay_draw(&s->m, &s->t, &band, &rows, &e) == ST_OK);
    CHECK(rows > without && !memcmp(plain, band, (size_t)NX * NY * 3)); /* and so do the reasons */
    const uint8_t *b = band + 3 * ((rows - 2) * NX + 300);
    CHECK(b[0] > b[1] + 60);
    free(band);
    s->t.reasons = 0;
    s->m.px_nm = MISSING; /* no scale is a reason too */
    CHECK(overlay_draw(&s->m, &s->t, &band, &rows, &e) == ST_OK);
    CHECK(band[3 * ((rows - 2) * NX + 300)] > band[3 * ((rows - 2) * NX + 300) + 1] + 60);
    free(band);
    free(plain);
}

static void check_errors(scene *s) {
    size_t rows = 0;
    uint8_t *rgb = NULL;
    error e = { 0 };
    scene_make(s, 0.5f);
    CHECK_FAILS(overlay_draw(&(micrograph){ 0 }, &s->t, &rgb, &rows, &e), ST_BAD_INPUT, e, "empty");
    s->t.nx = NX - 1;
    CHECK_FAILS(overlay_draw(&s->m, &s->t, &rgb, &rows, &e), ST_BUG, e, "319 x 240");
    s->t.nx = NX;
    mem_fail_after(1);
    CHECK_FAILS(overlay_draw(&s->m, &s->t, &rgb, &rows, &e), ST_NO_MEMORY, e, "overlay");
    mem_fail_after(2);
    CHECK_FAILS(overlay_draw(&s->m, &s->t, &rgb, &rows, &e), ST_NO_MEMORY, e, "overlay");
    mem_fail_after(0);
    /* nothing found, no spacing, no cells, tiny and flat */
    texture none = { 0 };
    none.spacing_acf.value = none.spacing_hex.value = MISSING;
    for (size_t i = 0; i < (size_t)NX * NY; i++) s->px[i] = 0.25f;
    micrograph tiny = { .px = s->px, .nx = 32, .ny = 32, .px_nm = 4.0 };
    none.reasons = FLAG(FEATURELESS) | FLAG(NOISY) | FLAG(STREAKS);
    CHECK(overlay_draw(&tiny, &none, &rgb, &rows, &e) == ST_OK);
    free(rgb);
    /* features outside the picture are clipped */
    s->f[0].x = -1e9;
    s->f[1].y = 1e9;
    s->f[2].x = MISSING;
    CHECK(overlay_draw(&s->m, &s->t, &rgb, &rows, &e) == ST_OK);
    free(rgb);
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
    check_marker(s);
    check_grounds(s);
    check_band(s);
    check_errors(s);
    check_box();
    CHECK(canvas_text_width("abc", 2) == 34 && canvas_text_width("", 3) == 0);
    free(s);
    return check_done();
}
