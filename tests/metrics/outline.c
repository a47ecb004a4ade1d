/* Outlines: radius, sign and centres of rendered bodies; nothing in noise; comparison with other features. */
#include "metrics/outline.h"

#include <stdio.h>
#include <string.h>

#include "base/mem.h"
#include "check.h"
#include "metrics/filter.h"
#include "metrics/layers.h"

enum { NX = 400, NY = 320 };

/* Share of the centres well inside that are farther than `most` from every true one. */
static double astray_share(const detection *d, const layer_bodies *b, double a, double most) {
    double astray = 0.0, n = 0.0;
    for (size_t i = 0; i < d->n; i++) {
        const feature *f = &d->features[i];
        double nearest = HUGE_VAL;
        if (f->x < a || f->y < a || f->x >= NX - a || f->y >= NY - a) continue;
        for (size_t k = 0; k < b->n; k++) nearest = fmin(nearest, hypot(f->x - b->x[k], f->y - b->y[k]));
        astray += nearest > most * a;
        n += 1.0;
    }
    return n > 0.0 ? astray / n : 1.0;
}

static void bodies_found(layer_bodies *b, float *f) {
    static const double distance[] = { 16.0, 25.0, 52.0 };
    for (int i = 0; i < 6; i++) {
        double a = distance[i / 2];
        layer_look l = {
            .a = a, .rim = 0.6, .contact = 0.4, .ground = 0.3, .noise = 0.02, .grains = 2, .pores = i % 2
        };
        dice d = { 0x9e3779b97f4a7c15u + (uint64_t)i };
        error e = { ST_OK, "" };
        outline o;
        detection det = { 0 };
        layer_place(&l, NX, NY, b, &d);
        layer_draw(&l, b, f, NX, NY, &d);
        CHECK(outline_look(f, NX, NY, 0, &o, &e) == ST_OK);
        CHECK(o.sign == (l.pores ? -1 : 1));
        CHECK(o.radius_px > 0.36 * a && o.radius_px < 0.56 * a);
        CHECK(o.concentration > 2.5 * o.opposite);
        CHECK(outline_detect(f, NX, NY, &o, &det, &e) == ST_OK);
        /* A gap where grains meet may pass for a body: no more than one in a hundred. */
        double astray = astray_share(&det, b, a, a < 20.0 ? 0.15 : 0.10);
        printf("a %.0f: radius %.3f a, %zu bodies, %.4f astray\n", a, o.radius_px / a, det.n, astray);
        CHECK(astray <= 0.01);
        CHECK_NEAR(det.body_radius_px, o.radius_px, 0.0);
        CHECK(det.scale_px > 0.9 * a && det.scale_px < 1.2 * a);
        detection_free(&det);
        /* Asked for the other sign, it does not offer these bodies. */
        outline other;
        CHECK(outline_look(f, NX, NY, -o.sign, &other, &e) == ST_OK);
        CHECK(other.sign == 0 || other.radius_px < 0.5 * o.radius_px || other.radius_px > 2.0 * o.radius_px);
    }
}

/* Smoothed noise, also skewed and folded: no sign is so much the stronger that a scale may rest on it. */
static void nothing_in_noise(float *f) {
    for (int i = 0; i < 12; i++) {
        dice d = { 0x2545f4914f6cdd1du + (uint64_t)i };
        error e = { ST_OK, "" };
        outline o;
        memset(f, 0, NX * NY * sizeof *f);
        add_noise(f, NX * NY, 1.0, &d);
        CHECK(filter_gauss(f, NX, NY, 0.7 * pow(1.4, i % 8), f, &e) == ST_OK);
        CHECK(outline_look(f, NX, NY, 0, &o, &e) == ST_OK);
        CHECK(!(o.concentration >= 8.0 && o.concentration >= 1.8 * o.opposite));
    }
}

static void comparison(void) {
    feature body[3] = { { .x = 50.0, .y = 50.0 }, { .x = 70.0, .y = 50.0 }, { .x = 60.0, .y = 67.0 } };
    feature other[6] = {
        { .x = 50.5, .y = 50.0, .response = 1.0 },  { .x = 66.0, .y = 51.0, .response = 1.0 },
        { .x = 75.0, .y = 51.0, .response = 1.0 },  { .x = 60.0, .y = 66.0, .response = 1.0 },
        { .x = 150.0, .y = 90.0, .response = 0.2 }, { .x = 170.0, .y = 90.0, .response = 0.8 }
    };
    detection a = { .features = body, .n = 3, .body_radius_px = 10.0 }, b = { .features = other, .n = 6 };
    outline_match m;
    error e = { ST_OK, "" };
    CHECK(outline_compare(&a, &b, NX, NY, &m, &e) == ST_OK);
    CHECK_NEAR(m.alike, 2.0 / 3.0, 1e-12); /* the second body is split */
    CHECK_NEAR(m.faint, 1.0 / 6.0, 1e-12);
    CHECK_NEAR(m.apart, 1.0 / 6.0, 1e-12);
    mem_fail_after(1);
    CHECK(outline_compare(&a, &b, NX, NY, &m, &e) == ST_NO_MEMORY);
    mem_fail_after(0);
}

static void refusals(float *f) {
    error e = { ST_OK, "" };
    outline o = { .radius_px = 1.0 }, five = { .radius_px = 8.0, .sign = 1 };
    detection d = { 0 };
    memset(f, 0, NX * NY * sizeof *f);
    CHECK(outline_look(f, NX, NY, 0, &o, &e) == ST_OK && o.sign == 0 && !isfinite(o.radius_px));
    CHECK(outline_detect(f, NX, NY, &five, &d, &e) == ST_NO_RESULT && strstr(e.text, "outlines") &&
          !d.features);
    for (size_t k = 1; k < 6; k++) {
        mem_fail_after(k);
        CHECK(outline_look(f, NX, NY, 0, &o, &e) == ST_NO_MEMORY);
        mem_fail_after(0);
    }
}

int main(void) {
    layer_bodies *b = malloc(sizeof *b);
    float *f = plane_new(NX, NY);
    if (!b) abort();
    bodies_found(b, f);
    nothing_in_noise(f);
    comparison();
    refusals(f);
    free(f);
    free(b);
    return check_done();
}
