/* Rendered micrographs: same seed same bytes, the truth is true (lattice cells against geometry, patterns against
 * their known nearest-neighbour distances, border weights against the frame), every option does what it says. */
#include "app/render.h"

#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"

static render_options small(void) {
    render_options o = render_defaults();
    o.nx = 224;
    o.ny = 168;
    o.pattern = PATTERN_HEX;
    o.px_nm = 9.7;
    o.spacing_nm = 16.3 * 9.7;
    return o;
}

static rendering made(const render_options *o) {
    rendering r = { 0 };
    error e = { 0 };
    CHECK(render_make(o, &r, &e) == ST_OK);
    if (e.text[0]) printf("%s\n", e.text);
    return r;
}

static double level(const rendering *r, size_t k) {
    return r->bit_depth == 16 ? ((const uint16_t *)r->samples)[k] / 65535.0 : ((const uint8_t *)r->samples)[k] / 255.0;
}

/* Mean and standard deviation of a plane, of the difference to another one where given. */
static void moments(const rendering *r, const rendering *minus, double *mean, double *sd) {
    double s = 0.0, q = 0.0, n = (double)(r->nx * r->ny);
    for (size_t k = 0; k < r->nx * r->ny; k++) {
        double v = level(r, k) - (minus ? level(minus, k) : 0.0);
        s += v;
        q += v * v;
    }
    *mean = s / n;
    *sd = sqrt(q / n - s / n * s / n);
}

static int differs(const render_options *a, const render_options *b) {
    rendering ra = made(a), rb = made(b);
    int d = ra.bit_depth != rb.bit_depth || memcmp(ra.samples, rb.samples, ra.nx * ra.ny) != 0;
    rendering_free(&ra);
    rendering_free(&rb);
    return d;
}

/* Nearest neighbour of centres that lie `guard` inside the frame, under a stretch. */
static void neighbours(const rendering *r, double guard, double stretch, double deg, double *mean, double *least,
                       double *most) {
    double c = cos(deg * PI / 180.0), s = -sin(deg * PI / 180.0), sum = 0.0, n = 0.0;
    *least = HUGE_VAL;
    *most = 0.0;
    for (size_t i = 0; i < r->n; i++) {
        if (r->x[i] < guard || r->y[i] < guard || r->x[i] > (double)r->nx - guard || r->y[i] > (double)r->ny - guard)
            continue;
        double best = HUGE_VAL;
        for (size_t k = 0; k < r->n; k++) {
            double dx = r->x[k] - r->x[i], dy = r->y[k] - r->y[i];
            double u = (c * dx + s * dy) / sqrt(stretch), v = (c * dy - s * dx) * sqrt(stretch);
            if (k != i && u * u + v * v < best) best = u * u + v * v;
        }
        best = sqrt(best);
        sum += best;
        n += 1.0;
        *least = fmin(*least, best);
        *most = fmax(*most, best);
    }
    *mean = sum / n;
}

static void determinism(void) {
    render_options o = small(), other = small();
    o.electrons = 30.0;
    o.rough = 0.1;
    o.streaks = 0.1;
    rendering a = made(&o), b = made(&o);
    CHECK(a.n == b.n && !memcmp(a.samples, b.samples, a.nx * (a.ny + a.strip_rows)));
    CHECK(!memcmp(a.x, b.x, a.n * sizeof *a.x) && !memcmp(a.y, b.y, a.n * sizeof *a.y));
    rendering_free(&a);
    rendering_free(&b);
    CHECK(a.samples == NULL && a.x == NULL);
    other.seed = 2;
    o = small();
    CHECK(differs(&o, &other));
}

/* A lattice without jitter: every whole basin is the hexagon of the density, every neighbour one spacing away. */
static void lattice(double stretch, double deg) {
    render_options o = small();
    o.pattern = PATTERN_HEX;
    o.disorder = 0.0;
    o.height_spread = 0.0;
    o.height_by_size = 0.0;
    o.stretch = stretch;
    o.stretch_angle_deg = deg;
    rendering r = made(&o);
    double d = r.spacing_px, mean, least, most, area = 0.0, frame = (double)(r.nx * r.ny), weights = 0.0;
    neighbours(&r, 2.0 * d, stretch, deg, &mean, &least, &most);
    CHECK_NEAR(mean / d, 1.0, 0.025); /* the scaling to a whole number leaves half a feature in the frame's edge */
    CHECK(most - least < 1e-6 * d);
    size_t whole = 0;
    for (size_t k = 0; k < r.n; k++) {
        if (isnan(r.basin_ecd_px[k])) continue;
        whole++;
        CHECK_NEAR(r.basin_ecd_px[k] / mean, sqrt(2.0 * sqrt(3.0) / PI), 0.02); /* 2 sqrt(A / pi), A = sqrt(3)/2 d^2 */
        area += r.basin_weight[k] * PI * r.basin_ecd_px[k] * r.basin_ecd_px[k] / 4.0;
        weights += r.basin_weight[k];
    }
    CHECK(whole > r.n / 2 && whole < r.n);
    CHECK_NEAR(area / frame, 1.0, 0.06); /* Miles-Lantuejoul: the weighted basins stand for the whole frame */
    CHECK_NEAR(weights / (double)r.n, 1.0, 0.06);
    rendering_free(&r);
}

/* Nearest-neighbour distance over the spacing of the density, from a study with 12 pictures a pattern, N = 960. */
static void patterns(void) {
    static const struct { pattern p; double disorder, nn; } t[] = {
        { PATTERN_HEX, 0.08, 0.860 }, { PATTERN_HEX, 0.16, 0.734 }, { PATTERN_LLOYD, 4.0, 0.802 },
        { PATTERN_LLOYD, 1.0, 0.694 }, { PATTERN_RSA, 0.70, 0.776 }, { PATTERN_RSA, 0.60, 0.713 },
        { PATTERN_MATERN, 0.48, 0.647 }, { PATTERN_RANDOM, 0.0, 0.465 } /* 1 / (2 sqrt(density)) = 0.4653 */ };
    for (size_t k = 0; k < sizeof t / sizeof t[0]; k++) {
        render_options o = small();
        o.nx = 320;
        o.ny = 240;
        o.spacing_nm = 8.1 * o.px_nm;
        o.pattern = t[k].p;
        o.disorder = t[k].disorder;
        rendering r = made(&o);
        double mean, least, most;
        CHECK_NEAR(r.spacing_px / 8.1, 1.0, 0.005);
        CHECK_NEAR(r.density_per_px2 * 320.0 * 240.0, (double)r.n, 1e-6);
        neighbours(&r, 16.0, 1.0, 0.0, &mean, &least, &most);
        CHECK_NEAR(mean / r.spacing_px, t[k].nn, 0.022);
        if (t[k].p == PATTERN_RSA || t[k].p == PATTERN_MATERN)
            CHECK_NEAR(least / r.spacing_px, t[k].disorder, 0.05); /* the hard core, but for the scaling */
        CHECK((t[k].p == PATTERN_RANDOM) == (r.n_hidden > 3));
        rendering_free(&r);
    }
}

/* Patches of a second population: both spacings as said, the density of all as asked. */
static void populations(void) {
    render_options o = small();
    o.nx = 320;
    o.ny = 240;
    o.spacing_nm = 9.0 * o.px_nm;
    o.pattern = PATTERN_RSA;
    o.second_share = 0.4;
    o.second_spacing = 1.8;
    rendering r = made(&o);
    CHECK_NEAR(r.spacing_px, 9.0, 0.03);
    CHECK_NEAR(r.second_px / r.first_px, 1.8, 1e-9);
    double share = (double)r.n_second * r.second_px * r.second_px; /* area each takes, but for the same factor */
    CHECK_NEAR(share / (share + (double)(r.n - r.n_second) * r.first_px * r.first_px), 0.4, 0.1);
    CHECK_NEAR(r.first_px / r.spacing_px, sqrt(0.6 + 0.4 / 1.8 / 1.8), 0.08); /* areas add: (1 - f)/a^2 + f/b^2 = 1/d^2 */
    rendering_free(&r);
    o.second_share = 0.0;
    r = made(&o);
    CHECK(r.n_second == 0 && isnan(r.first_px) && isnan(r.second_px));
    rendering_free(&r);
}

static void noise_is_poisson(double electrons) {
    render_options o = small();
    o.contrast = 0.001; /* a flat field at half of full signal */
    o.bit_depth = 16;
    o.electrons = electrons;
    rendering r = made(&o);
    double mean, sd;
    moments(&r, NULL, &mean, &sd);
    CHECK_NEAR(mean, 0.5, 0.005);
    CHECK_NEAR(sd * sd * electrons / 0.5, 1.0, 0.03);
    rendering_free(&r);
}

static void look(void) {
    render_options o = small(), flat = small(), v;
    rendering plain = made(&o), r;
    double mean, sd;
    size_t clipped = 0, inside = 0, n = plain.nx * plain.ny;
    for (size_t k = 0; k < n; k++) {
        double g = level(&plain, k);
        clipped += g <= 0.0 || g >= 1.0;
        inside += g > 0.145 && g < 0.855;
    }
    CHECK(clipped < n / 2000);
    CHECK((double)inside > 0.993 * (double)n); /* contrast 0.7 spans 0.15 to 0.85 */
    v = o;
    v.contrast = 2.0;
    r = made(&v);
    for (size_t k = 0; k < n; k++) clipped += level(&r, k) <= 0.0 || level(&r, k) >= 1.0;
    CHECK(clipped > n / 20);
    rendering_free(&r);

    v = o; /* pores are the inverse */
    v.relief = RELIEF_PORE;
    r = made(&v);
    for (size_t k = 0; k < n; k++) inside += fabs(level(&r, k) + level(&plain, k) - 1.0) < 0.02;
    CHECK(inside >= n);
    rendering_free(&r);

    v = o; /* the same surface in finer steps */
    v.bit_depth = 16;
    r = made(&v);
    moments(&r, &plain, &mean, &sd);
    CHECK_NEAR(sd, 1.0 / 255.0 / sqrt(12.0), 0.1 / 255.0);
    rendering_free(&r);

    v = o;
    v.streaks = 0.2;
    r = made(&v);
    moments(&r, &plain, &mean, &sd);
    CHECK_NEAR(sd / v.contrast, 0.2, 0.05);
    rendering_free(&r);

    flat.contrast = 0.001;
    flat.gradient = 0.4;
    flat.bit_depth = 16;
    r = made(&flat);
    double lo = 1.0, hi = 0.0;
    for (size_t k = 0; k < n; k++) {
        lo = fmin(lo, level(&r, k));
        hi = fmax(hi, level(&r, k));
    }
    CHECK_NEAR(hi - lo, 0.5 * 0.4, 0.01);
    rendering_free(&r);

    v = o; /* a sparse surface shows its floor */
    v.fill = 0.45;
    v.blur_px = 0.0;
    r = made(&v);
    size_t floor_px = 0;
    for (size_t k = 0; k < n; k++) floor_px += level(&r, k) < 0.16;
    CHECK_NEAR((double)floor_px / (double)n, 1.0 - 0.45 * 0.45 * PI / (2.0 * sqrt(3.0)), 0.04);
    rendering_free(&r);
    rendering_free(&plain);
}

/* Each option moves the picture and, where it is one of the look, leaves the features where they are. */
static void every_option(void) {
    render_options base = small(), v[16];
    size_t n = 0;
    for (size_t k = 0; k < sizeof v / sizeof v[0]; k++) v[k] = base;
    v[n++].edge = 0.3;
    v[n++].rough = 0.1;
    v[n++].electrons = 50.0;
    v[n++].blur_px = 2.0;
    v[n++].contrast = 0.3;
    v[n++].gradient = 0.3;
    v[n++].streaks = 0.1;
    v[n++].height_spread = 0.3;
    v[n++].exponent = 2.0;
    v[n++].bell = 1;
    v[n++].fill = 0.8;
    v[n++].height_by_size = 1.0;
    size_t look_only = n;
    v[n++].stretch = 1.2;
    v[n++].pattern = PATTERN_RSA;
    v[n++].disorder = 0.1;
    v[n++].spacing_nm = 200.0;
    rendering a = made(&base);
    for (size_t k = 0; k < n; k++) {
        rendering b = made(v + k);
        CHECK(memcmp(a.samples, b.samples, a.nx * a.ny) != 0);
        int same = a.n == b.n && !memcmp(a.x, b.x, a.n * sizeof *a.x);
        CHECK(same == (k < look_only));
        rendering_free(&b);
    }
    rendering_free(&a);
}

static void strip(void) {
    render_options o = small(), without = small();
    without.strip = 0;
    static const size_t heights[] = { 200, 481, 768 };
    o.nx = without.nx = 200;
    for (size_t k = 0; k < sizeof heights / sizeof heights[0]; k++) {
        o.ny = without.ny = heights[k];
        rendering a = made(&o), b = made(&without);
        double share = (double)a.strip_rows / (double)(a.ny + a.strip_rows);
        CHECK(share >= 0.04 && share <= 0.09);
        CHECK(b.strip_rows == 0 && a.ny == heights[k]);
        CHECK(!memcmp(a.samples, b.samples, a.nx * a.ny)); /* the plane does not know of its strip */
        size_t light = 0, dark = 0;
        for (size_t i = a.nx * a.ny; i < a.nx * (a.ny + a.strip_rows); i++) {
            light += level(&a, i) > 0.8;
            dark += level(&a, i) < 0.2;
        }
        CHECK(light > 20 && dark > 20);
        rendering_free(&a);
        rendering_free(&b);
    }
    o = small();
    rendering a = made(&o);
    o.show_scale = 0;
    rendering b = made(&o);
    o.label = "lot 7";
    rendering c = made(&o);
    size_t at = a.nx * a.ny, n = a.nx * a.strip_rows;
    CHECK(memcmp((uint8_t *)a.samples + at, (uint8_t *)b.samples + at, n) != 0);
    CHECK(memcmp((uint8_t *)c.samples + at, (uint8_t *)b.samples + at, n) != 0);
    rendering_free(&a);
    rendering_free(&b);
    rendering_free(&c);
}

static void refusals(void) {
    error e = { 0 };
    rendering r = { 0 };
    render_options o = small();
#define REFUSED(change, words)                                    \
    do {                                                          \
        o = small();                                              \
        change;                                                   \
        CHECK_FAILS(render_make(&o, &r, &e), ST_BAD_INPUT, e, words); \
        CHECK(r.samples == NULL);                                 \
    } while (0)
    REFUSED(o.spacing_nm = MISSING, "spacing_nm");
    REFUSED(o.px_nm = 0.0, "px_nm");
    REFUSED(o.spacing_nm = 3000.0, "puts 0.4");
    REFUSED(o.nx = 31, "31 x 168");
    REFUSED(o.nx = o.ny = 60000, "60000");
    REFUSED(o.pattern = PATTERN_RSA; o.disorder = 0.8, "disorder is 0.8");
    REFUSED(o.pattern = PATTERN_MATERN; o.disorder = 0.0, "disorder is 0");
    REFUSED(o.bit_depth = 12, "bits is 12");
    REFUSED(o.second_share = 0.95, "second_share");
    REFUSED(o.stretch = 0.9, "stretch is 0.9");
    REFUSED(o.exponent = 0.0, "exponent");
    REFUSED(o.contrast = 0.0, "contrast");
    REFUSED(o.electrons = -1.0, "noise");
    CHECK(render_make(&o, &r, NULL) == ST_BAD_INPUT);
}

static void no_memory(void) {
    render_options o = small();
    o.nx = o.ny = 32;
    o.strip = 0;
    o.spacing_nm = 7.0 * o.px_nm;
    o.rough = 0.1;
    o.streaks = 0.1;
    o.second_share = 0.3;
    static const pattern each[] = { PATTERN_HEX, PATTERN_LLOYD, PATTERN_MATERN };
    for (size_t p = 0; p < sizeof each / sizeof each[0]; p++) {
        o.pattern = each[p];
        size_t n = 1;
        for (; n < 200; n++) {
            rendering r = { 0 };
            error e = { 0 };
            mem_fail_after(n);
            status st = render_make(&o, &r, &e);
            mem_fail_after(0);
            if (st == ST_OK) {
                rendering_free(&r);
                break;
            }
            CHECK(st == ST_NO_MEMORY && e.text[0] && !r.samples && !r.x);
        }
        CHECK(n > 10 && n < 200);
    }
}

int main(void) {
    determinism();
    lattice(1.0, 0.0);
    lattice(1.3, 35.0);
    patterns();
    populations();
    noise_is_poisson(18.0);
    noise_is_poisson(180.0);
    look();
    every_option();
    strip();
    refusals();
    no_memory();
    return check_done();
}
