/* Layers of bodies in contact: spacing, relief and count on rendered layers of known truth, and what is no layer. */
#include "metrics/layer.h"

#include <stdio.h>

#include "base/mem.h"
#include "check.h"
#include "metrics/layers.h"
#include "metrics/measure.h"

enum { NX = 460, NY = 380 };

/* What the eye sees at once and a smoothed picture does not show: rims, grains, islands, both polarities. */
static const layer_look looks[] = {
    /* clang-format off */
    { .a = 30.0, .rim = 0.3, .contact = 0.4, .ground = 0.20, .noise = 0.02, .grains = 1, .jitter = 0.01, .seed = 3 },
    { .a = 30.0, .rim = 1.0, .contact = 0.3, .ground = 0.30, .noise = 0.03, .grains = 3, .jitter = 0.02, .vacancies = 0.03, .seed = 5 },
    { .a = 27.0, .rim = 0.5, .contact = 0.6, .ground = 0.35, .noise = 0.03, .grains = 2, .jitter = 0.02, .island = 0.9, .seed = 7 },
    { .a = 19.0, .rim = 0.5, .contact = 0.4, .ground = 0.10, .noise = 0.03, .grains = 4, .jitter = 0.02, .island = 0.8, .pores = 1, .seed = 9 },
    { .a = 34.0, .rim = 0.7, .contact = 0.3, .ground = 0.25, .noise = 0.02, .grains = 5, .jitter = 0.03, .spread = 0.06, .vacancies = 0.05, .seed = 11 },
    { .a = 22.0, .rim = 0.8, .contact = 0.5, .ground = 0.15, .noise = 0.02, .grains = 3, .jitter = 0.01, .round = 1, .island = 0.6, .seed = 13 },
    { .a = 44.0, .rim = 0.6, .contact = 0.5, .ground = 0.30, .noise = 0.04, .grains = 1, .jitter = 0.01, .vacancies = 0.08, .pores = 1, .seed = 17 },
    /* clang-format on */
};

static size_t inside(const layer_bodies *b, double margin) {
    size_t n = 0;
    for (size_t i = 0; i < b->n; i++)
        n += b->x[i] >= margin && b->y[i] >= margin && b->x[i] < NX - margin && b->y[i] < NY - margin;
    return n;
}

/* Share of the bodies well inside that have a feature in their middle. */
static double found_share(const layer_bodies *b, const texture *t, double a) {
    size_t good = 0;
    for (size_t i = 0; i < b->n; i++) {
        if (b->x[i] < a || b->y[i] < a || b->x[i] >= NX - a || b->y[i] >= NY - a) continue;
        size_t near = 0;
        for (size_t k = 0; k < t->n_found; k++)
            near += hypot(t->features[k].x - b->x[i], t->features[k].y - b->y[i]) < 0.15 * a;
        good += near == 1;
    }
    return (double)good / (double)inside(b, a);
}

static void rendered_layers(void) {
    layer_bodies *b = malloc(sizeof *b);
    float *f = plane_new(NX, NY);
    if (!b) abort();
    for (size_t i = 0; i < sizeof looks / sizeof *looks; i++) {
        const layer_look *l = &looks[i];
        dice d = { l->seed * 0x9e3779b97f4a7c15u };
        layer_place(l, NX, NY, b, &d);
        layer_draw(l, b, f, NX, NY, &d);
        plane p = { .px = f, .nx = NX, .ny = NY, .bit_depth = 16 };
        measure_options o = measure_defaults();
        texture t = { 0 };
        error e = { ST_OK, "" };
        CHECK(measure_plane(&p, &o, &t, &e) == ST_OK);
        double want = layer_first_shell(b, l->a, NX, NY);
        printf("layer %zu: %zu bodies, spacing %.2f for %.2f, stretch %.3f\n", i, inside(b, 0.0),
               t.spacing_acf.value, want, t.stretch.value);
        CHECK_NEAR(t.spacing_acf.value / want, 1.0, 0.02);
        CHECK(t.relief == (l->pores ? RELIEF_PORE : RELIEF_HILLOCK));
        CHECK(!(t.flags & (FLAG(RELIEF_UNSURE) | FLAG(CONTRADICTION) | FLAG(STRETCHED))));
        CHECK(found_share(b, &t, l->a) >= (l->vacancies > 0.0 ? 0.92 : 0.98));
        CHECK(!t.reasons);
        texture_free(&t);
    }
    free(f);
    free(b);
}

/* Discs thrown at random, overlapping or not: bodies to count, but no distance of neighbours. */
static void scattered_discs(void) {
    layer_bodies *b = malloc(sizeof *b);
    float *f = plane_new(NX, NY);
    if (!b) abort();
    for (int apart = 0; apart < 2; apart++) {
        layer_look l = { .a = 18.0, .rim = 0.5, .ground = 0.3, .noise = 0.02 };
        dice d = { 0x9e3779b97f4a7c15u };
        b->n = 0;
        for (int k = 0; k < 4000 && b->n < 170; k++) {
            double x = dice_uniform(&d) * NX, y = dice_uniform(&d) * NY;
            if (apart && layer_has(b, x, y, 1.1 * l.a)) continue;
            b->x[b->n] = x;
            b->y[b->n] = y;
            b->r[b->n++] = 0.5 * l.a;
        }
        layer_draw(&l, b, f, NX, NY, &d);
        plane p = { .px = f, .nx = NX, .ny = NY, .bit_depth = 16 };
        measure_options o = measure_defaults();
        texture t = { 0 };
        error e = { ST_OK, "" };
        CHECK(measure_plane(&p, &o, &t, &e) == ST_OK);
        CHECK(!(t.flags & FLAG(LAYER)));
        CHECK(t.clark_evans.value < 1.5);
        if (!apart) CHECK(!isfinite(t.spacing_acf.value));
        texture_free(&t);
    }
    free(f);
    free(b);
}

static feature *lattice(double a, double jitter, double stretch, size_t *n) {
    feature *f = calloc(4000, sizeof *f);
    dice d = { 0x2545f4914f6cdd1du };
    if (!f) abort();
    *n = 0;
    for (int j = 0; j < 60; j++)
        for (int i = 0; i < 60; i++) {
            double x = a * (i + 0.5 * (j % 2)) + jitter * a * dice_normal(&d),
                   y = a * sqrt(0.75) * j + jitter * a * dice_normal(&d);
            x *= stretch;
            if (x < NX && y < NY) f[(*n)++] = (feature){ .x = x, .y = y };
        }
    return f;
}

static void shells_of_points(void) {
    first_shell s;
    size_t n;
    feature *f = lattice(17.3, 0.0, 1.0, &n);
    error e = { ST_OK, "" };
    CHECK(layer_shell(f, n, NX, NY, &s, &e) == ST_OK);
    CHECK_NEAR(s.mean_px, 17.3, 1e-9);
    CHECK(layer_distinct(&s));
    CHECK_NEAR(hypot(s.e1, s.e2), 0.0, 1e-9);
    mem_fail_after(1);
    CHECK(layer_shell(f, n, NX, NY, &s, &e) == ST_NO_MEMORY);
    mem_fail_after(0);
    CHECK(layer_shell(f, 4, NX, NY, &s, &e) == ST_OK && s.n_pairs == 0 && !isfinite(s.mean_px) &&
          !layer_distinct(&s));
    free(f);
    f = lattice(17.3, 0.02, 1.06, &n); /* pulled along x: distances there 6 % longer */
    CHECK(layer_shell(f, n, NX, NY, &s, &e) == ST_OK);
    CHECK_NEAR((1.0 + s.e1) / (1.0 - s.e1), 1.06, 0.005);
    CHECK_NEAR(s.e2, 0.0, 0.005);
    free(f);
    f = lattice(17.3, 0.20, 1.0, &n); /* so disordered that no shell stands apart */
    CHECK(layer_shell(f, n, NX, NY, &s, &e) == ST_OK && !layer_distinct(&s));
    free(f);
}

int main(void) {
    shells_of_points();
    rendered_layers();
    scattered_discs();
    return check_done();
}
