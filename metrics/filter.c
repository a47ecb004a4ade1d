/* Flattening, noise and Gaussian filters on a float plane; edges are mirrored (half-sample symmetric: ..1 0
 * | 0 1..). Method: sampled kernels cut at 5 sigma. From 4 px on, the smoothing is split into three
 * (variances add): down to a grid m px wide with sigma m, the rest on the coarse grid, up again with sigma
 * m, m = floor(sigma / 2). What aliasing leaves is below 1e-6 of the amplitude, and the cost per pixel no
 * longer grows with sigma. The down and up steps use the full-resolution mirrored plane, so that the edge is
 * exact too. Sums over a neighbourhood run in a fixed order: same input, same bits. Not for planes with
 * missing pixels. */
#include "metrics/filter.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"

static const double cut = 5.0; /* of sigma: leaves out 6e-7 of the weight */

/* Index of the mirrored plane: period 2 n, symmetric about -1/2. */
static size_t mirror(long i, size_t n) {
    long period = 2 * (long)n;
    i %= period;
    if (i < 0) i += period;
    return (size_t)(i < (long)n ? i : period - 1 - i);
}

/* ---- flattening ---- */

enum { TERMS = 10, BLOCKS = 32 };

static void cubic_terms(double u, double v, double *t) {
    t[0] = 1.0;
    t[1] = u;
    t[2] = v;
    t[3] = u * u;
    t[4] = u * v;
    t[5] = v * v;
    t[6] = u * u * u;
    t[7] = u * u * v;
    t[8] = u * v * v;
    t[9] = v * v * v;
}

/* Solves the normal equations by Cholesky; a direction the data do not span (a plane one block wide) gets 0.
 * */
static void solve_normal(double a[TERMS][TERMS], const double *b, double *x) {
    double y[TERMS];
    for (int i = 0; i < TERMS; i++) {
        double diagonal = a[i][i];
        for (int j = 0; j <= i; j++) {
            double s = a[i][j];
            for (int k = 0; k < j; k++) s -= a[i][k] * a[j][k];
            if (j < i)
                a[i][j] = a[j][j] > 0.0 ? s / a[j][j] : 0.0;
            else
                a[i][i] = s > 1e-9 * diagonal ? sqrt(s) : 0.0;
        }
        double s = b[i];
        for (int k = 0; k < i; k++) s -= a[i][k] * y[k];
        y[i] = a[i][i] > 0.0 ? s / a[i][i] : 0.0;
    }
    for (int i = TERMS - 1; i >= 0; i--) {
        double s = y[i];
        for (int k = i + 1; k < TERMS; k++) s -= a[k][i] * x[k];
        x[i] = a[i][i] > 0.0 ? s / a[i][i] : 0.0;
    }
}

static double block_sum(const plane *p, size_t x0, size_t x1, size_t y0, size_t y1) {
    double sum = 0.0;
    for (size_t y = y0; y < y1; y++) {
        double part[4] = { 0.0, 0.0, 0.0, 0.0 };
        const float *row = p->px + y * p->nx;
        for (size_t x = x0; x < x1; x++) part[x & 3] += (double)row[x];
        sum += part[0] + part[1] + part[2] + part[3];
    }
    return sum;
}

static void fit_cubic(const plane *p, double *coef) {
    double a[TERMS][TERMS] = { { 0.0 } }, b[TERMS] = { 0.0 }, t[TERMS];
    size_t bx = p->nx < BLOCKS ? p->nx : BLOCKS, by = p->ny < BLOCKS ? p->ny : BLOCKS;
    for (size_t j = 0; j < by; j++)
        for (size_t i = 0; i < bx; i++) {
            size_t x0 = i * p->nx / bx, x1 = (i + 1) * p->nx / bx, y0 = j * p->ny / by,
                   y1 = (j + 1) * p->ny / by;
            double w = (double)((x1 - x0) * (y1 - y0)), sum = block_sum(p, x0, x1, y0, y1);
            cubic_terms((double)(x0 + x1) / (double)p->nx - 1.0, (double)(y0 + y1) / (double)p->ny - 1.0, t);
            for (int r = 0; r < TERMS; r++) {
                b[r] += t[r] * sum;
                for (int c = 0; c < TERMS; c++) a[r][c] += w * t[r] * t[c];
            }
        }
    solve_normal(a, b, coef);
}

status flatten(const plane *p, float *out, error *e) {
    double c[TERMS], total = 0.0;
    double *mean = mem_array(p->ny, sizeof *mean);
    if (!mean) return NO_MEMORY(e, "flattening");
    fit_cubic(p, c);
    for (size_t y = 0; y < p->ny; y++) {
        double v = (double)(2 * y + 1) / (double)p->ny - 1.0, part[4] = { 0.0, 0.0, 0.0, 0.0 };
        double c0 = c[0] + v * (c[2] + v * (c[5] + v * c[9])), c1 = c[1] + v * (c[4] + v * c[8]);
        double c2 = c[3] + v * c[7], c3 = c[6];
        const float *row = p->px + y * p->nx;
        float *to = out + y * p->nx;
        for (size_t x = 0; x < p->nx; x++) {
            double u = (double)(2 * x + 1) / (double)p->nx - 1.0;
            to[x] = (float)((double)row[x] - (c0 + u * (c1 + u * (c2 + u * c3))));
        }
        for (size_t x = 0; x < p->nx; x++) part[x & 3] += (double)to[x];
        mean[y] = part[0] + part[1] + part[2] + part[3];
    }
    for (size_t y = 0; y < p->ny; y++) total += mean[y];
    float shift = (float)(total / ((double)p->nx * (double)p->ny));
    for (size_t i = 0; i < p->nx * p->ny; i++) out[i] -= shift;
    free(mean);
    return ST_OK;
}

/* ---- noise ---- */

double noise_sd(const float *f, size_t nx, size_t ny) {
    if (nx < 3 || ny < 3) return MISSING;
    double sum = 0.0;
    for (size_t y = 1; y + 1 < ny; y++) {
        const float *a = f + (y - 1) * nx, *b = a + nx, *c = b + nx;
        double part[4] = { 0.0, 0.0, 0.0, 0.0 };
        for (size_t x = 1; x + 1 < nx; x++) {
            float corner = (a[x - 1] + a[x + 1]) + (c[x - 1] + c[x + 1]);
            float side = (a[x] + c[x]) + (b[x - 1] + b[x + 1]);
            part[x & 3] += (double)fabsf(corner - 2.0f * side + 4.0f * b[x]);
        }
        sum += part[0] + part[1] + part[2] + part[3];
    }
    return sqrt(PI / 2.0) / 6.0 * sum / ((double)(nx - 2) * (double)(ny - 2));
}

double noise_after_gauss(double s, double sigma_px) { return s / (2.0 * sqrt(PI) * sigma_px); }
double noise_after_log(double s, double sigma_px) { return s / (sigma_px * sqrt(2.0 * PI)); }

/* ---- kernels and passes ---- */

/* Symmetric kernel, k[0..r] = weights at 0, 1, ... r. `second` is the second derivative of `smooth`,
 * corrected so that a constant gives 0 and x^2 gives exactly 2 (sampling alone misses both below sigma 1). */
typedef struct {
    float *smooth, *second;
    size_t r;
} kernel;

static void kernel_free(kernel *k) {
    free(k->smooth);
    free(k->second);
    *k = (kernel){ 0 };
}

static int kernel_make(double sigma, kernel *k) {
    *k = (kernel){ .r = (size_t)ceil(cut * sigma) };
    if (k->r < 1) k->r = 1;
    k->smooth = mem_array(k->r + 1, sizeof *k->smooth);
    k->second = mem_array(k->r + 1, sizeof *k->second);
    double *g = mem_array(k->r + 1, sizeof *g), *h = mem_array(k->r + 1, sizeof *h);
    int ok = k->smooth && k->second && g && h;
    if (ok) {
        double sum = 0.0, sum2 = 0.0, moment = 0.0;
        for (size_t i = 0; i <= k->r; i++) {
            double x = (double)i / sigma, twice = i ? 2.0 : 1.0;
            g[i] = exp(-0.5 * x * x);
            h[i] = (x * x - 1.0) * g[i];
            sum += twice * g[i];
            sum2 += twice * h[i];
        }
        for (size_t i = 0; i <= k->r; i++) {
            h[i] -= sum2 / sum * g[i];
            moment += (i ? 2.0 : 1.0) * (double)(i * i) * h[i];
        }
        for (size_t i = 0; i <= k->r; i++) {
            k->smooth[i] = (float)(g[i] / sum);
            k->second[i] = (float)(2.0 / moment * h[i]);
        }
    } else {
        kernel_free(k);
    }
    free(g);
    free(h);
    return ok;
}

/* Wide registers where the machine has them. Every output is its own sum in a fixed order and nothing is contracted, so the bits are
 * the same on every machine. Sanitizers instrument the choice that runs before they are ready, so not with them. */
#if defined(__x86_64__) && defined(__GNUC__) && !defined(__clang__) && !defined(__SANITIZE_ADDRESS__) && !defined(__SANITIZE_THREAD__)
#define WIDE __attribute__((target_clones("default", "arch=x86-64-v3")))
#else
#define WIDE
#endif

/* out[n] (+)= k * row, row mirrored; ext holds n + 2 r floats. */
WIDE static void filter_row(const float *row, size_t n, const float *k, size_t r, float *ext, float *out) {
    for (size_t i = 0; i < r; i++) {
        ext[i] = row[mirror((long)i - (long)r, n)];
        ext[r + n + i] = row[mirror((long)(n + i), n)];
    }
    memcpy(ext + r, row, n * sizeof *ext);
    for (size_t x = 0; x < n; x++) out[x] = k[0] * ext[r + x];
    size_t t = 1;
    for (; t + 1 <= r; t += 2) {
        float k0 = k[t], k1 = k[t + 1];
        const float *a = ext + r - t, *b = ext + r + t, *c = a - 1, *d = b + 1;
        for (size_t x = 0; x < n; x++) out[x] += k0 * (a[x] + b[x]) + k1 * (c[x] + d[x]);
    }
    for (; t <= r; t++)
        for (size_t x = 0; x < n; x++) out[x] += k[t] * (ext[r + x - t] + ext[r + x + t]);
}

enum { TILE = 512 };

/* to[n] += k * rows of `in` about y, for columns x0 .. x0 + n. */
static inline void filter_column_tile(const float *in, size_t nx, size_t ny, size_t y, const float *k, size_t r,
                               size_t x0, size_t n, float *to) {
    const float *mid = in + y * nx + x0;
    for (size_t x = 0; x < n; x++) to[x] += k[0] * mid[x];
    for (size_t t = 1; t <= r; t++) {
        const float *a = in + mirror((long)y - (long)t, ny) * nx + x0;
        const float *b = in + mirror((long)(y + t), ny) * nx + x0;
        float w = k[t];
        for (size_t x = 0; x < n; x++) to[x] += w * (a[x] + b[x]);
    }
}

/* out = ka down the columns of a, plus kb down the columns of b (b may be NULL). out differs from both. */
WIDE static void filter_columns(const float *a, const float *ka, const float *b, const float *kb, size_t r,
                           size_t nx, size_t ny, float scale, float *out) {
    for (size_t x0 = 0; x0 < nx; x0 += TILE) {
        size_t n = nx - x0 < TILE ? nx - x0 : TILE;
        float acc[TILE];
        for (size_t y = 0; y < ny; y++) {
            memset(acc, 0, sizeof acc);
            filter_column_tile(a, nx, ny, y, ka, r, x0, n, acc);
            if (b) filter_column_tile(b, nx, ny, y, kb, r, x0, n, acc);
            float *to = out + y * nx + x0;
            for (size_t x = 0; x < n; x++) to[x] = scale * acc[x];
        }
    }
}

/* The whole filter at one resolution: Gaussian (curvature 0) or scale * Laplacian of Gaussian (curvature 1).
 * */
static status filter_here(const float *in, size_t nx, size_t ny, double sigma, int curvature, float scale,
                          float *out, error *e) {
    kernel k = { 0 };
    status st = ST_OK;
    float *ext = NULL, *a = NULL, *b = NULL;
    if (!kernel_make(sigma, &k)) {
        st = NO_MEMORY(e, "a filter");
        goto done;
    }
    ext = mem_array(nx + 2 * k.r, sizeof *ext);
    a = mem_array(nx * ny, sizeof *a);
    if (curvature) b = mem_array(nx * ny, sizeof *b);
    if (!ext || !a || (curvature && !b)) {
        st = NO_MEMORY(e, "a filtered plane");
        goto done;
    }
    for (size_t y = 0; y < ny; y++) {
        filter_row(in + y * nx, nx, k.smooth, k.r, ext, a + y * nx);
        if (curvature) filter_row(in + y * nx, nx, k.second, k.r, ext, b + y * nx);
    }
    if (curvature)
        filter_columns(a, k.second, b, k.smooth, k.r, nx, ny, scale, out);
    else
        filter_columns(a, k.smooth, NULL, NULL, k.r, nx, ny, scale, out);
done:
    kernel_free(&k);
    free(ext);
    free(a);
    free(b);
    return st;
}

/* ---- the coarse grid ---- */

/* Grid points lie at m j + (m - 1) / 2 - lead, so that block centres of the mirrored plane map onto each
 * other. */
typedef struct {
    size_t m;    /* px per grid step */
    size_t lead; /* px before the plane, a multiple of m */
    size_t n;    /* grid points along this axis */
    size_t taps; /* per grid point */
    float *down; /* [taps], centre at (taps - 1) / 2 */
    float *up;   /* [m][up_taps] */
    size_t up_taps;
    long up_first; /* grid offset of the first tap */
} coarse;

static void coarse_free(coarse *c) {
    free(c->down);
    free(c->up);
    *c = (coarse){ 0 };
}

static int coarse_make(size_t n, size_t m, double reach, coarse *c) {
    double dm = (double)m;
    *c = (coarse){ .m = m, .lead = m * (size_t)ceil(reach / dm) };
    c->n = (n + 2 * c->lead + m - 1) / m;
    c->taps = 2 * (size_t)ceil(cut * dm) + m;
    c->up_taps = 2 * (size_t)ceil(cut) + 1;
    c->up_first = -(long)(c->up_taps / 2);
    c->down = mem_array(c->taps, sizeof *c->down);
    c->up = mem_array(m * c->up_taps, sizeof *c->up);
    if (!c->down || !c->up) {
        coarse_free(c);
        return 0;
    }
    double sum = 0.0, mid = 0.5 * (double)(c->taps - 1);
    for (int pass = 0; pass < 2; pass++)
        for (size_t i = 0; i < c->taps; i++) {
            double x = ((double)i - mid) / dm, g = exp(-0.5 * x * x);
            if (!pass)
                sum += g;
            else
                c->down[i] = (float)(g / sum);
        }
    for (size_t p = 0; p < m; p++) {
        double at = ((double)p - 0.5 * (dm - 1.0)) / dm, s = 0.0;
        for (int pass = 0; pass < 2; pass++)
            for (size_t i = 0; i < c->up_taps; i++) {
                double x = (double)((long)i + c->up_first) - at, g = exp(-0.5 * x * x);
                if (!pass)
                    s += g;
                else
                    c->up[p * c->up_taps + i] = (float)(g / s);
            }
    }
    return 1;
}

/* First full-resolution row or column under grid point j: block start minus the tail. */
static long coarse_first(const coarse *c, size_t j) {
    return (long)(j * c->m) - (long)c->lead - (long)((c->taps - c->m) / 2);
}

WIDE static void down_columns(const float *in, size_t nx, size_t ny, const coarse *c, float *out) {
    for (size_t x0 = 0; x0 < nx; x0 += TILE) {
        size_t n = nx - x0 < TILE ? nx - x0 : TILE;
        for (size_t j = 0; j < c->n; j++) {
            float acc[TILE] = { 0.0f };
            long y = coarse_first(c, j);
            for (size_t t = 0; t < c->taps; t++) {
                const float *row = in + mirror(y + (long)t, ny) * nx + x0;
                float w = c->down[t];
                for (size_t x = 0; x < n; x++) acc[x] += w * row[x];
            }
            memcpy(out + j * nx + x0, acc, n * sizeof *acc);
        }
    }
}

static void down_row(const float *row, size_t nx, const coarse *c, float *out) {
    for (size_t j = 0; j < c->n; j++) {
        long x = coarse_first(c, j);
        float s = 0.0f;
        if (x >= 0 && x + (long)c->taps <= (long)nx) {
            for (size_t t = 0; t < c->taps; t++) s += c->down[t] * row[x + (long)t];
        } else {
            for (size_t t = 0; t < c->taps; t++) s += c->down[t] * row[mirror(x + (long)t, nx)];
        }
        out[j] = s;
    }
}

/* Grid points needed by a pixel lie inside the grid, because lead covers the reach. */
static void up_row(const float *row, size_t nx, const coarse *c, float *out) {
    for (size_t x = 0; x < nx; x++) {
        size_t j = (x + c->lead) / c->m;
        const float *w = c->up + ((x + c->lead) % c->m) * c->up_taps, *from = row + ((long)j + c->up_first);
        float s = 0.0f;
        for (size_t t = 0; t < c->up_taps; t++) s += w[t] * from[t];
        out[x] = s;
    }
}

WIDE static void up_columns(const float *in, size_t nx, size_t ny, const coarse *c, float *out) {
    for (size_t x0 = 0; x0 < nx; x0 += TILE) {
        size_t n = nx - x0 < TILE ? nx - x0 : TILE;
        for (size_t y = 0; y < ny; y++) {
            float acc[TILE] = { 0.0f };
            size_t j = (y + c->lead) / c->m;
            const float *w = c->up + ((y + c->lead) % c->m) * c->up_taps;
            for (size_t t = 0; t < c->up_taps; t++) {
                const float *row = in + (size_t)((long)(j + t) + c->up_first) * nx + x0;
                float k = w[t];
                for (size_t x = 0; x < n; x++) acc[x] += k * row[x];
            }
            memcpy(out + y * nx + x0, acc, n * sizeof *acc);
        }
    }
}

static status filter_coarse(const float *in, size_t nx, size_t ny, double sigma, int curvature, float scale,
                            float *out, error *e) {
    status st = ST_OK;
    size_t m = (size_t)(sigma / 2.0);
    /* Second derivatives are taken on the grid, per step squared. */
    double dm = (double)m, per_step = curvature ? dm * dm : 1.0,
           rest = sqrt(sigma * sigma - 2.0 * dm * dm) / dm;
    double reach = ceil(cut * rest) * dm + (ceil(cut) + 1.0) * dm;
    coarse cx = { 0 }, cy = { 0 };
    float *rows = NULL, *grid = NULL;
    int ok = coarse_make(nx, m, reach, &cx) && coarse_make(ny, m, reach, &cy);
    if (ok) {
        rows = mem_array(cy.n * nx, sizeof *rows);
        grid = mem_array(cy.n * cx.n, sizeof *grid);
        ok = rows && grid;
    }
    if (!ok) {
        st = NO_MEMORY(e, "a filtered plane");
        goto done;
    }
    down_columns(in, nx, ny, &cy, rows);
    for (size_t j = 0; j < cy.n; j++) down_row(rows + j * nx, nx, &cx, grid + j * cx.n);
    st = filter_here(grid, cx.n, cy.n, rest, curvature, (float)((double)scale / per_step), grid, e);
    if (st != ST_OK) goto done;
    for (size_t j = 0; j < cy.n; j++) up_row(grid + j * cx.n, nx, &cx, rows + j * nx);
    up_columns(rows, nx, ny, &cy, out);
done:
    coarse_free(&cx);
    coarse_free(&cy);
    free(rows);
    free(grid);
    return st;
}

enum { COARSE_FROM = 4 }; /* px of sigma */

status filter_gauss(const float *in, size_t nx, size_t ny, double sigma_px, float *out, error *e) {
    if (!(sigma_px > 0.0)) {
        if (in != out) memcpy(out, in, nx * ny * sizeof *out);
        return ST_OK;
    }
    if (sigma_px < COARSE_FROM) return filter_here(in, nx, ny, sigma_px, 0, 1.0f, out, e);
    return filter_coarse(in, nx, ny, sigma_px, 0, 1.0f, out, e);
}

status filter_curvature(const float *in, size_t nx, size_t ny, double sigma_px, int sign, float *out,
                        error *e) {
    float scale = (float)((sign < 0 ? 1.0 : -1.0) * sigma_px * sigma_px);
    if (sigma_px < COARSE_FROM) return filter_here(in, nx, ny, sigma_px, 1, scale, out, e);
    return filter_coarse(in, nx, ny, sigma_px, 1, scale, out, e);
}
