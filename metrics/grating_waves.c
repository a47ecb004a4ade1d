/* Frequencies of a periodic picture to a small part of a line of its spectrum. Peaks of an autocorrelation are pulled
 * by whatever varies slowly beneath them, a few hundredths of a percent on dots of little contrast; the maximum of a spectral
 * line under a Hann taper is not, as soon as eight periods fit: the next line's side lobes are then below 1e-3, and the
 * wider tapers with lower ones pay in noise. Each maximum is found by Newton's method on |F(k)|^2, whose derivatives are
 * moments of the same sum. */
#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/grating_priv.h"

typedef struct {
    double re, im;
} cplx;

/* F and its derivatives but for powers of -2 pi i: sums of w f x^a y^b exp(-2 pi i k.r). */
typedef struct {
    cplx f, x, y, xx, xy, yy;
} moments;

/* Taper and coordinate about the middle along one axis. */
typedef struct {
    double *w, *t;
    cplx *wave;
    size_t n;
} axis;

static double taper(size_t i, size_t n) {
    return 0.5 - 0.5 * cos(2.0 * PI * ((double)i + 0.5) / (double)n);
}

static int axis_make(size_t n, axis *a) {
    *a = (axis){ mem_array(2 * n, sizeof *a->w), NULL, mem_array(n, sizeof *a->wave), n };
    if (!a->w || !a->wave) return 0;
    a->t = a->w + n;
    for (size_t i = 0; i < n; i++) {
        a->w[i] = taper(i, n);
        a->t[i] = (double)i + 0.5 - 0.5 * (double)n;
    }
    return 1;
}

static void axis_free(axis *a) {
    free(a->w);
    free(a->wave);
}

static void axis_tune(axis *a, double k) {
    for (size_t i = 0; i < a->n; i++) {
        double phase = -2.0 * PI * k * a->t[i];
        a->wave[i] = (cplx){ a->w[i] * cos(phase), a->w[i] * sin(phase) };
    }
}

static void add(cplx *s, cplx v, cplx w, double k) {
    s->re += k * (v.re * w.re - v.im * w.im);
    s->im += k * (v.re * w.im + v.im * w.re);
}

static moments look(const patch *p, axis *ax, axis *ay, vec k) {
    moments m = { { 0.0, 0.0 }, { 0.0, 0.0 }, { 0.0, 0.0 }, { 0.0, 0.0 }, { 0.0, 0.0 }, { 0.0, 0.0 } };
    axis_tune(ax, k.x);
    axis_tune(ay, k.y);
    for (size_t y = 0; y < p->ny; y++) {
        const float *row = p->f + (p->y0 + y) * p->stride + p->x0;
        cplx a = { 0 }, b = { 0 }, c = { 0 };
        for (size_t x = 0; x < p->nx; x++) {
            double re = (double)row[x] * ax->wave[x].re, im = (double)row[x] * ax->wave[x].im, t = ax->t[x];
            a.re += re, a.im += im;
            b.re += t * re, b.im += t * im;
            c.re += t * t * re, c.im += t * t * im;
        }
        double t = ay->t[y];
        add(&m.f, a, ay->wave[y], 1.0);
        add(&m.x, b, ay->wave[y], 1.0);
        add(&m.y, a, ay->wave[y], t);
        add(&m.xx, c, ay->wave[y], 1.0);
        add(&m.xy, b, ay->wave[y], t);
        add(&m.yy, a, ay->wave[y], t * t);
    }
    return m;
}

static double re_conj(cplx a, cplx b) { return a.re * b.re + a.im * b.im; }
static double im_conj(cplx a, cplx b) { return a.re * b.im - a.im * b.re; }

/* The maximum of |F|^2 near *k; returns its height, 0 when Newton leaves the line. */
static double climb(const patch *p, axis *ax, axis *ay, vec *k) {
    enum { STEPS = 8 };
    vec at = *k, start = *k;
    double power = 0.0;
    for (int step = 0; step < STEPS; step++) {
        moments m = look(p, ax, ay, at);
        power = re_conj(m.f, m.f);
        /* dF/dk = -2 pi i M1, d2F/dk2 = -4 pi^2 M2 */
        double c1 = 4.0 * PI, c2 = 8.0 * PI * PI, gx = c1 * im_conj(m.f, m.x), gy = c1 * im_conj(m.f, m.y);
        double hxx = c2 * (re_conj(m.x, m.x) - re_conj(m.f, m.xx)), hyy = c2 * (re_conj(m.y, m.y) - re_conj(m.f, m.yy)),
               hxy = c2 * (re_conj(m.x, m.y) - re_conj(m.f, m.xy)), det = hxx * hyy - hxy * hxy;
        if (!(hxx < 0.0) || !(det > 0.0)) return 0.0;
        double dx = -(hyy * gx - hxy * gy) / det, dy = -(hxx * gy - hxy * gx) / det;
        at = (vec){ at.x + dx, at.y + dy };
        if (!(fabs(at.x - start.x) * (double)p->nx < 1.0) || !(fabs(at.y - start.y) * (double)p->ny < 1.0)) return 0.0;
        if (fabs(dx) * (double)p->nx + fabs(dy) * (double)p->ny < 1e-7) break;
    }
    *k = at;
    return power;
}

enum { HARMONICS = 6 };
static const int harmonics[HARMONICS][2] = { { 1, 0 }, { 0, 1 }, { 1, 1 }, { 1, -1 }, { 2, 0 }, { 0, 2 } };

/* Least squares over the lines found, weights their powers. */
typedef struct {
    double mm, mn, nn, mx, my, nx, ny;
} sums;

static void take_line(const patch *p, axis *ax, axis *ay, int m, int n, const vec *g1, const vec *g2, sums *s) {
    vec k = { m * g1->x + (g2 ? n * g2->x : 0.0), m * g1->y + (g2 ? n * g2->y : 0.0) };
    if (fabs(k.x) >= 0.45 || fabs(k.y) >= 0.45) return;
    double w = climb(p, ax, ay, &k), a = (double)m, b = (double)n;
    s->mm += w * a * a, s->mn += w * a * b, s->nn += w * b * b;
    s->mx += w * a * k.x, s->my += w * a * k.y, s->nx += w * b * k.x, s->ny += w * b * k.y;
}

status waves_refine(const patch *p, vec *g1, vec *g2, error *e) {
    axis ax = { 0 }, ay = { 0 };
    sums s = { 0 };
    status st = ST_OK;
    if (!axis_make(p->nx, &ax) || !axis_make(p->ny, &ay)) {
        st = NO_MEMORY(e, "the grating");
        goto done;
    }
    for (int h = 0; h < HARMONICS; h++)
        if (g2 || !harmonics[h][1]) take_line(p, &ax, &ay, harmonics[h][0], harmonics[h][1], g1, g2, &s);
    double det = s.mm * s.nn - s.mn * s.mn;
    if (!g2 && s.mm > 0.0)
        *g1 = (vec){ s.mx / s.mm, s.my / s.mm };
    else if (g2 && det > 1e-6 * s.mm * s.nn) {
        *g1 = (vec){ (s.mx * s.nn - s.nx * s.mn) / det, (s.my * s.nn - s.ny * s.mn) / det };
        *g2 = (vec){ (s.nx * s.mm - s.mx * s.mn) / det, (s.ny * s.mm - s.my * s.mn) / det };
    }
done:
    axis_free(&ax);
    axis_free(&ay);
    return st;
}
