/* Pixel size from a periodic standard. The flattened picture is tapered (Hann) and autocorrelated; dividing by
 * the taper's own autocorrelation gives a map whose peaks are the lattice. Without the taper the ends of the
 * picture pull every peak towards zero by about P^2 / (4 pi^2 L), a tenth of a percent for coarse gratings.
 * Peaks are located by a quadratic over a window, indexed outward from the shortest two, and two lattice vectors
 * fitted to all of them by weighted least squares; for lines the reciprocal vector is fitted to points on the
 * ridges. Both are then sharpened on the lines of the spectrum (grating_waves.c). That the vectors are equally long, and at 90 or 60 degrees, gives the metric of the pixels: width,
 * height and skew. The uncertainty is the scatter of the four quarters of the picture measured alike, so that
 * distortion of the field counts. Does not: correct distortion, or read rectangular grids. */
#include "metrics/grating.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "metrics/filter.h"
#include "metrics/grating_priv.h"
#include "metrics/spectrum.h"
#include "metrics/linear.h"

typedef struct {
    acf2d c;         /* divided by the taper's */
    double *wx, *wy; /* [max_lag + 1] taper's autocorrelation, 1 at lag 0 */
    long lag;
} lattice_map;

typedef struct {
    vec a, b; /* lines: a is the reciprocal vector, cycles per px */
    int lines;
    size_t n;
    double residual;
} lattice_fit;

static double cross(vec a, vec b) { return a.x * b.y - a.y * b.x; }
static double dot(vec a, vec b) { return a.x * b.x + a.y * b.y; }
static double norm(vec a) { return sqrt(dot(a, a)); }
static vec at(vec a, double m, vec b, double n) { return (vec){ m * a.x + n * b.x, m * a.y + n * b.y }; }

/* ---- the map ---- */

static double hann(size_t i, size_t n) { return 0.5 - 0.5 * cos(2.0 * PI * ((double)i + 0.5) / (double)n); }

/* sum w(i) w(i + d) / sum w(i)^2 for d = 0 .. lag */
static double *taper_acf(size_t n, size_t lag) {
    double *r = mem_array(lag + 1, sizeof *r);
    for (size_t d = 0; r && d <= lag; d++) {
        double s = 0.0;
        for (size_t i = 0; i + d < n; i++) s += hann(i, n) * hann(i + d, n);
        r[d] = s;
    }
    for (size_t d = lag; r && d > 0; d--) r[d] /= r[0];
    if (r) r[0] = 1.0;
    return r;
}

static void map_free(lattice_map *m) {
    acf2d_free(&m->c);
    free(m->wx);
    free(m->wy);
    *m = (lattice_map){ 0 };
}

/* Part x0, y0, nx, ny of the flattened plane f of `stride` columns. */
static status map_make(const float *f, size_t stride, size_t x0, size_t y0, size_t nx, size_t ny,
                       lattice_map *m, error *e) {
    float *g = mem_array(nx * ny, sizeof *g);
    double sum = 0.0, weight = 0.0;
    if (!g) return NO_MEMORY(e, "the grating");
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++) {
            double w = hann(x, nx) * hann(y, ny);
            sum += w * (double)f[(y0 + y) * stride + x0 + x];
            weight += w;
        }
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++)
            g[y * nx + x] =
                (float)(((double)f[(y0 + y) * stride + x0 + x] - sum / weight) * hann(x, nx) * hann(y, ny));
    status st = acf2d_make(g, nx, ny, (nx < ny ? nx : ny) / 2, &m->c, e);
    free(g);
    if (st != ST_OK) return st;
    m->lag = (long)m->c.max_lag;
    m->wx = taper_acf(nx, m->c.max_lag);
    m->wy = taper_acf(ny, m->c.max_lag);
    if (!m->wx || !m->wy) return NO_MEMORY(e, "the grating");
    for (long dy = 0; dy <= m->lag; dy++)
        for (long dx = -m->lag; dx <= m->lag; dx++) {
            double overlap = (1.0 - (double)labs(dx) / (double)nx) * (1.0 - (double)dy / (double)ny);
            float *v = &m->c.values[dy * (2 * m->lag + 1) + dx + m->lag];
            *v = (float)((double)*v * overlap / (m->wx[labs(dx)] * m->wy[dy]));
        }
    return ST_OK;
}

static double value(const lattice_map *m, long dx, long dy) {
    if (dy < 0) dx = -dx, dy = -dy;
    return (double)m->c.values[dy * (2 * m->lag + 1) + dx + m->lag];
}

static double weight_at(const lattice_map *m, vec d) {
    long x = labs(lround(d.x)), y = labs(lround(d.y));
    return x > m->lag || y > m->lag ? 0.0 : m->wx[x] * m->wy[y];
}

static int inside(const lattice_map *m, vec d, long margin) {
    return fabs(d.x) <= (double)(m->lag - margin) && fabs(d.y) <= (double)(m->lag - margin);
}

/* ---- one peak ---- */

/* Vertex of the least-squares quadratic over +-w about d; moves its window along. 0: no maximum nearby. */
static int refine(const lattice_map *m, long w, vec *d) {
    double n = (double)(2 * w + 1), i2 = 0.0, i4 = 0.0;
    for (long i = -w; i <= w; i++) i2 += (double)(i * i), i4 += (double)(i * i * i * i);
    double s2 = n * i2, s4 = n * i4, s22 = i2 * i2;
    for (int turn = 0; turn < 6; turn++) {
        long cx = lround(d->x), cy = lround(d->y);
        if (!inside(m, (vec){ (double)cx, (double)cy }, w + 1)) return 0;
        double f = 0, fx = 0, fy = 0, fxx = 0, fyy = 0, fxy = 0;
        for (long y = -w; y <= w; y++)
            for (long x = -w; x <= w; x++) {
                double v = value(m, cx + x, cy + y), u = (double)x, t = (double)y;
                f += v, fx += u * v, fy += t * v, fxx += u * u * v, fyy += t * t * v, fxy += u * t * v;
            }
        double sum = (fxx + fyy - 2.0 * s2 * f / (n * n)) / (s4 + s22 - 2.0 * s2 * s2 / (n * n));
        double difference = (fxx - fyy) / (s4 - s22), bx = fx / s2, by = fy / s2, c = fxy / s22;
        double xx = sum + difference, yy = sum - difference; /* second derivatives */
        double det = xx * yy - c * c;
        if (!(xx < 0.0) || !(det > 0.0)) return 0;
        vec step = { -(yy * bx - c * by) / det, -(xx * by - c * bx) / det };
        if (fabs(step.x) > (double)w || fabs(step.y) > (double)w) return 0;
        *d = (vec){ (double)cx + step.x, (double)cy + step.y };
        if (lround(d->x) == cx && lround(d->y) == cy) break;
    }
    return 1;
}

static long window_of(double spacing) {
    long w = lround(0.18 * spacing);
    return w < 2 ? 2 : w > 12 ? 12 : w;
}

/* ---- the two shortest vectors ---- */

static int is_peak(const lattice_map *m, long x, long y) {
    double v = value(m, x, y);
    for (long j = -2; j <= 2; j++)
        for (long i = -2; i <= 2; i++)
            if ((i || j) && value(m, x + i, y + j) > v) return 0;
    return 1;
}

/* Where the radial mean has its first minimum: nothing closer to the origin is a lattice point. */
static double core_radius(const lattice_map *m) {
    double before = 2.0;
    for (long r = 1; r < m->lag - 2; r++) {
        double s = 0.0;
        for (int k = 0; k < 64; k++) {
            double t = PI * k / 64.0;
            s += value(m, lround((double)r * cos(t)), lround((double)r * sin(t)));
        }
        s /= 64.0;
        if (s > before) return (double)r;
        before = s;
    }
    return (double)m->lag;
}

/* The shortest peak at least half as high as the highest, at more than 30 degrees to `other` when that is given. */
static int shortest(const lattice_map *m, double core, const vec *other, vec *out) {
    double top = 0.0, best = HUGE_VAL;
    for (int pass = 0; pass < 2; pass++)
        for (long y = 0; y < m->lag - 2; y++)
            for (long x = -m->lag + 3; x < m->lag - 2; x++) {
                vec d = { (double)x, (double)y };
                double v = value(m, x, y), r = norm(d);
                if (r < core || r > 0.8 * (double)m->lag || v <= 0.0 || (y == 0 && x < 0)) continue;
                if (pass == 0 ? v <= top : (v < 0.5 * top || r >= best)) continue;
                if (!is_peak(m, x, y)) continue;
                if (other && fabs(cross(*other, d)) < 0.5 * norm(*other) * r) continue;
                if (pass == 0)
                    top = v;
                else
                    best = r, *out = d;
            }
    return best < HUGE_VAL && top > 0.03;
}

/* ---- lines ---- */

/* Direction in which the map hardly falls: that of the lines, or -1. */
static double ridge_direction(const lattice_map *m) {
    double best = -HUGE_VAL, angle = -1.0, across = 0.0;
    for (int k = 0; k < 720; k++) {
        double t = PI * k / 720.0, s = 0.0;
        int n = 0;
        for (long r = m->lag / 8; r < m->lag * 6 / 10; r++, n++)
            s += value(m, lround((double)r * cos(t)), lround((double)r * sin(t)));
        s /= n;
        if (s > best) best = s, angle = t;
    }
    /* Against the highest value across: the next ridge. */
    double core = core_radius(m);
    for (long r = lround(core); r < m->lag - 2; r++) {
        double v = value(m, lround(-(double)r * sin(angle)), lround((double)r * cos(angle)));
        if (v > across) across = v;
    }
    return across > 0.03 && best > 0.6 * across ? angle : -1.0;
}

/* Top of the ridge near d along the unit vector u: vertex of a parabola over +-w, averaged across the ridge. */
static int ridge_top(const lattice_map *m, vec u, double w, vec *d) {
    double s2 = 0.0, s4 = 0.0, f0 = 0.0, f1 = 0.0, f2 = 0.0, n = 0.0;
    long half = lround(2.0 * w);
    for (long k = -half; k <= half; k++) { /* even about 0: the sums of odd powers vanish */
        double t = 0.5 * (double)k;
        double v = acf2d_at(&m->c, d->x + t * u.x, d->y + t * u.y);
        if (isnan(v)) return 0;
        n += 1.0, s2 += t * t, s4 += t * t * t * t, f0 += v, f1 += t * v, f2 += t * t * v;
    }
    double bend = (f2 - s2 * f0 / n) / (s4 - s2 * s2 / n), step = -f1 / s2 / (2.0 * bend);
    if (!(bend < 0.0) || fabs(step) > w) return 0;
    *d = (vec){ d->x + step * u.x, d->y + step * u.y };
    return 1;
}

/* Reciprocal vector g with g . d = k on ridge k, by least squares over points of the ridges out to `reach`. */
static int fit_lines(const lattice_map *m, double reach, lattice_fit *fit) {
    double sxx = 0, sxy = 0, syy = 0, sx = 0, sy = 0, skk = 0, sw = 0;
    vec g = fit->a, u = { g.x / norm(g), g.y / norm(g) }, along = { -u.y, u.x };
    double period = 1.0 / norm(g), w = fmax(2.0, 0.18 * period);
    size_t n = 0;
    for (int k = 0; k * period < reach; k++)
        for (double t = -reach; t <= reach; t += fmax(2.0, reach / 40.0)) {
            vec d = at(u, k * period, along, t);
            if ((k == 0 && fabs(t) < period) || norm(d) > reach || !ridge_top(m, u, w, &d)) continue;
            double weight = weight_at(m, d) * weight_at(m, d);
            sxx += weight * d.x * d.x, sxy += weight * d.x * d.y, syy += weight * d.y * d.y;
            sx += weight * d.x * k, sy += weight * d.y * k, skk += weight * k * k, sw += weight;
            n++;
        }
    double det = sxx * syy - sxy * sxy;
    if (n < 8 || !(det > 0.0)) return 0;
    fit->a = (vec){ (sx * syy - sy * sxy) / det, (sy * sxx - sx * sxy) / det };
    fit->n = n;
    double rest = skk - fit->a.x * sx - fit->a.y * sy;
    fit->residual = sqrt(fmax(rest, 0.0) / sw) / norm(fit->a);
    return 1;
}

/* ---- lattice ---- */

static int fit_lattice(const lattice_map *m, double reach, lattice_fit *fit) {
    double mm = 0, mn = 0, nn = 0, mx = 0, my = 0, nx = 0, ny = 0, sw = 0, rest = 0;
    double shortest_px = fmin(norm(fit->a), norm(fit->b));
    long w = window_of(shortest_px), most = (long)ceil(2.0 * reach / shortest_px);
    size_t count = 0;
    for (long i = 0; i <= most; i++)
        for (long j = i ? -most : 1; j <= most; j++) {
            vec want = at(fit->a, (double)i, fit->b, (double)j), d = want;
            if (norm(want) > reach || !refine(m, w, &d)) continue;
            if (norm((vec){ d.x - want.x, d.y - want.y }) > 0.25 * shortest_px) continue;
            double k = weight_at(m, d) * weight_at(m, d), p = (double)i, q = (double)j;
            mm += k * p * p, mn += k * p * q, nn += k * q * q, sw += k;
            mx += k * p * d.x, my += k * p * d.y, nx += k * q * d.x, ny += k * q * d.y;
            rest += k * dot(d, d);
            count++;
        }
    double det = mm * nn - mn * mn;
    if (count < 4 || !(det > 0.0)) return 0;
    fit->a = (vec){ (mx * nn - nx * mn) / det, (my * nn - ny * mn) / det };
    fit->b = (vec){ (nx * mm - mx * mn) / det, (ny * mm - my * mn) / det };
    fit->n = count;
    rest -= fit->a.x * mx + fit->a.y * my + fit->b.x * nx + fit->b.y * ny;
    fit->residual = sqrt(fmax(rest, 0.0) / sw);
    return 1;
}

/* Outward in three steps, so that a wrong index cannot happen. */
static int fit_outward(const lattice_map *m, lattice_fit *fit) {
    double end = (double)m->lag - 4.0,
           first = 2.5 * (fit->lines ? 1.0 / norm(fit->a) : fmax(norm(fit->a), norm(fit->b)));
    const double reaches[] = { fmin(first, end), fmin(fmax(first, 0.5 * end), end), end, end };
    int ok = 1;
    for (int k = 0; ok && k < 4; k++)
        ok = fit->lines ? fit_lines(m, reaches[k], fit) : fit_lattice(m, reaches[k], fit);
    return ok;
}

static status find(const lattice_map *m, grating_kind kind, lattice_fit *fit, error *e) {
    double core = core_radius(m),
           ridge = kind == GRATING_SQUARE || kind == GRATING_HEXAGONAL ? -1.0 : ridge_direction(m);
    *fit = (lattice_fit){ .lines = kind == GRATING_LINES || ridge >= 0.0 };
    if (fit->lines) {
        vec u = { -sin(ridge), cos(ridge) }, d;
        double best = 0.0, period = 0.0;
        for (double r = core; ridge >= 0.0 && r < 0.7 * (double)m->lag; r += 1.0) {
            d = (vec){ r * u.x, r * u.y };
            double v = acf2d_at(&m->c, d.x, d.y);
            if (v > 1.1 * best)
                best = v, period = r;
            else if (best > 0.0 && r > 1.5 * period)
                break;
        }
        d = (vec){ period * u.x, period * u.y };
        if (!(best > 0.03) || !ridge_top(m, u, fmax(2.0, 0.18 * period), &d))
            return fail(e, ST_NO_RESULT, "no lines of a regular pitch stand out of the picture");
        fit->a = (vec){ u.x / norm(d), u.y / norm(d) };
    } else {
        if (!shortest(m, core, NULL, &fit->a) || !shortest(m, core, &fit->a, &fit->b))
            return fail(e, ST_NO_RESULT,
                        "no lattice stands out of the picture: is this a grating or a grid?");
    }
    if (!fit_outward(m, fit))
        return fail(e, ST_NO_RESULT, "the lattice of the picture is not regular enough to be a standard");
    return ST_OK;
}

/* The shortest pair of the same lattice, at 60 to 90 degrees. */
static void reduce(lattice_fit *fit) {
    for (int turn = 0; turn < 20; turn++) {
        if (dot(fit->b, fit->b) < dot(fit->a, fit->a)) {
            vec t = fit->a;
            fit->a = fit->b, fit->b = t;
        }
        double k = round(dot(fit->a, fit->b) / dot(fit->a, fit->a));
        if (!(fabs(k) > 0.5)) break;
        fit->b = at(fit->b, 1.0, fit->a, -k);
    }
    if (dot(fit->a, fit->b) < 0.0) fit->b = (vec){ -fit->b.x, -fit->b.y };
}

/* ---- pixels from the lattice ---- */

/* |A| = |B| = 1 pitch and A . B = cosine fix the metric: a' G a = 1, b' G b = 1, a' G b = cosine. */
static int metric(const lattice_fit *f, double cosine, double out[3]) {
    vec a = f->a, b = f->b;
    double rows[3][4] = { { a.x * a.x, 2.0 * a.x * a.y, a.y * a.y, 1.0 },
                          { b.x * b.x, 2.0 * b.x * b.y, b.y * b.y, 1.0 },
                          { a.x * b.x, a.x * b.y + a.y * b.x, a.y * b.y, cosine } };
    double x[3];
    if (!linear_solve(&rows[0][0], 3, 1e-12, x)) return 0;
    double xx = x[0], xy = x[1], yy = x[2];
    if (!(xx > 0.0) || !(yy > 0.0) || !(xx * yy > xy * xy)) return 0;
    out[0] = sqrt(xx);
    out[1] = sqrt(yy);
    out[2] = 90.0 - acos(xy / sqrt(xx * yy)) * 180.0 / PI;
    return 1;
}

static int pixels(const lattice_fit *f, grating_kind kind, double out[3]) {
    if (f->lines) {
        out[0] = out[1] = norm(f->a);
        out[2] = 0.0;
        return out[0] > 0.0;
    }
    return metric(f, kind == GRATING_HEXAGONAL ? 0.5 : 0.0, out);
}

static status tell_kind(const lattice_fit *f, grating_kind kind, grating *g, error *e) {
    double angle = acos(dot(f->a, f->b) / (norm(f->a) * norm(f->b))) * 180.0 / PI,
           ratio = norm(f->b) / norm(f->a);
    g->kind = f->lines               ? GRATING_LINES
              : kind != GRATING_AUTO ? kind
              : angle > 75.0         ? GRATING_SQUARE
                                     : GRATING_HEXAGONAL;
    if (f->lines) return ST_OK;
    double wanted = g->kind == GRATING_SQUARE ? 90.0 : 60.0;
    if (fabs(angle - wanted) > 12.0 || ratio > 1.25)
        return fail(
            e, ST_NO_RESULT,
            "the lattice has sides of %.2f and %.2f pixels at %.1f degrees: neither square nor hexagonal",
            norm(f->a), norm(f->b), angle);
    return ST_OK;
}

/* The lattice by its reciprocal vectors, sharpened, and back. */
static status sharpen(const patch *p, lattice_fit *fit, error *e) {
    if (fit->lines) return waves_refine(p, &fit->a, NULL, e);
    double det = cross(fit->a, fit->b);
    if (!(fabs(det) > 0.0)) return ST_OK;
    vec g1 = { fit->b.y / det, -fit->b.x / det }, g2 = { -fit->a.y / det, fit->a.x / det };
    status st = waves_refine(p, &g1, &g2, e);
    det = cross(g1, g2);
    if (st != ST_OK || !(fabs(det) > 0.0)) return st;
    fit->a = (vec){ g2.y / det, -g2.x / det };
    fit->b = (vec){ -g1.y / det, g1.x / det };
    return ST_OK;
}

/* Scatter of the quarters: standard uncertainty of their mean, widened so that two of them hold 95 % although there are
 * but four (Student, three degrees of freedom: 3.18 against 1.96). */
static status quarters(const float *f, const plane *p, const lattice_fit *whole, grating_kind kind,
                       double u[3], error *e) {
    const double few = 3.18 / 1.96;
    double found[4][3];
    size_t nx = p->nx / 2, ny = p->ny / 2;
    for (int k = 0; k < 4; k++) {
        lattice_map m = { 0 };
        lattice_fit fit = *whole;
        patch part = { f, p->nx, (size_t)(k % 2) * (p->nx - nx), (size_t)(k / 2) * (p->ny - ny), nx, ny };
        status st = map_make(f, p->nx, part.x0, part.y0, nx, ny, &m, e);
        int ok = st == ST_OK && fit_outward(&m, &fit);
        map_free(&m);
        if (ok) st = sharpen(&part, &fit, e);
        ok = ok && st == ST_OK && pixels(&fit, kind, found[k]);
        if (st != ST_OK) return st;
        if (!ok)
            return fail(e, ST_NO_RESULT,
                        "a quarter of the picture does not show the lattice: it does not fill the field");
    }
    for (int q = 0; q < 3; q++) {
        double mean = 0.0, square = 0.0;
        for (int k = 0; k < 4; k++) mean += found[k][q] / 4.0;
        for (int k = 0; k < 4; k++) square += (found[k][q] - mean) * (found[k][q] - mean);
        u[q] = few * sqrt(square / 3.0 / 4.0);
    }
    return ST_OK;
}

static double direction(vec a) {
    double t = atan2(-a.y, a.x) * 180.0 / PI; /* y runs down */
    return t > 90.0 ? t - 180.0 : t <= -90.0 ? t + 180.0 : t;
}

status grating_measure(const plane *p, grating_kind kind, grating *out, error *e) {
    float *f = mem_array(p->nx * p->ny, sizeof *f);
    lattice_map m = { 0 };
    lattice_fit fit = { 0 };
    grating g = { 0 };
    double size[3] = { 0.0, 0.0, 0.0 }, u[3] = { 0.0, 0.0, 0.0 };
    status st = f ? flatten(p, f, e) : NO_MEMORY(e, "the grating");
    if (st == ST_OK) st = map_make(f, p->nx, 0, 0, p->nx, p->ny, &m, e);
    if (st == ST_OK) st = find(&m, kind, &fit, e);
    if (st != ST_OK) goto done;
    if (!fit.lines) reduce(&fit);
    double period = fit.lines ? 1.0 / norm(fit.a) : norm(fit.b),
           side = (double)(p->nx < p->ny ? p->nx : p->ny);
    if (side < GRATING_PERIODS * period) {
        st =
            fail(e, ST_NO_RESULT,
                 "only %.1f periods fit into the picture, at least %d are needed: take a lower magnification",
                 side / period, GRATING_PERIODS);
        goto done;
    }
    patch whole = { f, p->nx, 0, 0, p->nx, p->ny };
    st = sharpen(&whole, &fit, e);
    if (st == ST_OK) st = tell_kind(&fit, kind, &g, e);
    if (st == ST_OK && !pixels(&fit, g.kind, size))
        st = fail(e, ST_NO_RESULT, "the lattice gives no pixel size");
    if (st == ST_OK) st = quarters(f, p, &fit, g.kind, u, e);
    if (st != ST_OK) goto done;
    double square = norm(fit.a) * norm(fit.a);
    vec a = fit.lines ? (vec){ fit.a.x / square, fit.a.y / square } : fit.a;
    g.ax = a.x, g.ay = a.y, g.bx = fit.b.x, g.by = fit.b.y;
    g.px_x = size[0], g.px_y = size[1], g.skew_deg = size[2];
    g.u_x = u[0], g.u_y = u[1], g.skew_u_deg = fit.lines ? MISSING : u[2];
    g.angle_deg = direction(a);
    g.n_peaks = fit.n, g.residual_px = fit.residual;
    *out = g;
done:
    map_free(&m);
    free(f);
    return st;
}
