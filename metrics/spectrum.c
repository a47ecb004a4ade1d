/* Autocorrelation and power spectral density by FFT.
 * Autocorrelation: Wiener (1930), Khinchin (1934). The mean-removed plane is zero-padded to at least nx +
 * max_lag by ny + max_lag, so that no wrapped product enters; sums are divided by the overlap count. Row
 * transforms skip the padding, columns are taken in strips that stay in the cache: forward, squared modulus,
 * and back as a real transform, because the squared modulus is real; only the rows of lag 0 .. max_lag are
 * transformed back.
 * PSD: periodic Hann window w, |FFT(w f)|^2 / sum w^2 (px2), so that the sum over all bins
 * / (nx ny) is the weighted mean square exactly (Parseval).
 * FFTW plans are made with ESTIMATE on aligned memory for one thread: the same bits every time. Making plans
 * from several threads needs fftwf_make_planner_thread_safe() once in the program. */
#include "metrics/spectrum.h"

#include <fftw3.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/quantity.h"

enum { STRIP = 16 }; /* columns transformed together */

static void *aligned(size_t n, size_t size) {
    return n > LIMIT_ALLOCATION_BYTES / size ? NULL : fftwf_malloc(n * size);
}

/* Smallest 2^a 3^b 5^c 7^d >= n, even. */
static size_t good_size(size_t n) {
    for (size_t m = n + (n & 1);; m += 2) {
        size_t rest = m;
        for (size_t p = 2; p < 8; p += p == 2 ? 1 : 2)
            while (rest % p == 0) rest /= p;
        if (rest == 1) return m;
    }
}

/* ---- autocorrelation ---- */

typedef struct {
    size_t nx, ny, lag;      /* of the field; lags kept */
    size_t px, py, kx;       /* padded size, columns of the half spectrum */
    float *line;             /* [px] */
    fftwf_complex *half;     /* [kx] */
    fftwf_complex *spectrum; /* [max(ny, lag + 1)][kx] */
    fftwf_complex *strip;    /* [py][STRIP] */
    float *power;            /* [py][STRIP] */
    fftwf_complex *back;     /* [py / 2 + 1][STRIP] */
    fftwf_plan rows, columns, columns_back, rows_back;
} transform;

static void transform_free(transform *t) {
    if (t->rows) fftwf_destroy_plan(t->rows);
    if (t->columns) fftwf_destroy_plan(t->columns);
    if (t->columns_back) fftwf_destroy_plan(t->columns_back);
    if (t->rows_back) fftwf_destroy_plan(t->rows_back);
    fftwf_free(t->line);
    fftwf_free(t->half);
    fftwf_free(t->spectrum);
    fftwf_free(t->strip);
    fftwf_free(t->power);
    fftwf_free(t->back);
    *t = (transform){ 0 };
}

static status transform_make(size_t nx, size_t ny, size_t lag, transform *t, error *e) {
    *t = (transform){ .nx = nx, .ny = ny, .lag = lag, .px = good_size(nx + lag), .py = good_size(ny + lag) };
    t->kx = t->px / 2 + 1;
    size_t kept = ny > lag + 1 ? ny : lag + 1;
    t->line = aligned(t->px, sizeof *t->line);
    t->half = aligned(t->kx, sizeof *t->half);
    t->spectrum = aligned(kept * t->kx, sizeof *t->spectrum);
    t->strip = aligned(t->py * STRIP, sizeof *t->strip);
    t->power = aligned(t->py * STRIP, sizeof *t->power);
    t->back = aligned((t->py / 2 + 1) * STRIP, sizeof *t->back);
    if (!t->line || !t->half || !t->spectrum || !t->strip || !t->power || !t->back) {
        transform_free(t);
        return NO_MEMORY(e, "the autocorrelation");
    }
    int n = (int)t->py;
    t->rows = fftwf_plan_dft_r2c_1d((int)t->px, t->line, t->half, FFTW_ESTIMATE);
    t->rows_back = fftwf_plan_dft_c2r_1d((int)t->px, t->half, t->line, FFTW_ESTIMATE);
    t->columns = fftwf_plan_many_dft(1, &n, STRIP, t->strip, NULL, STRIP, 1, t->strip, NULL, STRIP, 1,
                                     FFTW_FORWARD, FFTW_ESTIMATE);
    t->columns_back = fftwf_plan_many_dft_r2c(1, &n, STRIP, t->power, NULL, STRIP, 1, t->back, NULL, STRIP, 1,
                                              FFTW_ESTIMATE);
    if (t->rows && t->rows_back && t->columns && t->columns_back) return ST_OK;
    transform_free(t);
    return fail(e, ST_BUG, "no transform plan for %zu x %zu", t->px, t->py);
}

static void transform_rows(transform *t, const float *f, float mean) {
    for (size_t y = 0; y < t->ny; y++) {
        for (size_t x = 0; x < t->nx; x++) t->line[x] = f[y * t->nx + x] - mean;
        memset(t->line + t->nx, 0, (t->px - t->nx) * sizeof *t->line);
        fftwf_execute(t->rows);
        memcpy(t->spectrum + y * t->kx, t->half, t->kx * sizeof *t->half);
    }
}

/* Spectrum -> transform of the sums of products, rows 0 .. lag, in place. */
static void transform_columns(transform *t) {
    for (size_t x0 = 0; x0 < t->kx; x0 += STRIP) {
        size_t n = t->kx - x0 < STRIP ? t->kx - x0 : STRIP;
        memset(t->strip, 0, t->py * STRIP * sizeof *t->strip);
        for (size_t y = 0; y < t->ny; y++)
            memcpy(t->strip + y * STRIP, t->spectrum + y * t->kx + x0, n * sizeof *t->strip);
        fftwf_execute(t->columns);
        for (size_t i = 0; i < t->py * STRIP; i++)
            t->power[i] = t->strip[i][0] * t->strip[i][0] + t->strip[i][1] * t->strip[i][1];
        fftwf_execute(t->columns_back);
        /* A forward transform stands in for the inverse one: the conjugate. */
        for (size_t y = 0; y <= t->lag; y++)
            for (size_t x = 0; x < n; x++) {
                t->spectrum[y * t->kx + x0 + x][0] = t->back[y * STRIP + x][0];
                t->spectrum[y * t->kx + x0 + x][1] = -t->back[y * STRIP + x][1];
            }
    }
}

static void transform_rows_back(transform *t, acf2d *a) {
    size_t width = 2 * t->lag + 1;
    double zero = 1.0;
    for (size_t dy = 0; dy <= t->lag; dy++) {
        memcpy(t->half, t->spectrum + dy * t->kx, t->kx * sizeof *t->half);
        fftwf_execute(t->rows_back);
        double overlap_y = (double)(t->ny - dy), scale = (double)t->px * (double)t->py;
        if (!dy) {
            zero = (double)t->line[0] / (double)(t->nx * t->ny);
            a->variance = zero / scale;
            if (!(zero > 0.0)) zero = 1.0;
        }
        float *to = a->values + dy * width + t->lag;
        for (size_t dx = 0; dx <= t->lag; dx++) {
            double per = 1.0 / (overlap_y * (double)(t->nx - dx) * zero);
            to[dx] = (float)((double)t->line[dx] * per);
            if (dx) to[-(long)dx] = (float)((double)t->line[t->px - dx] * per);
        }
    }
    /* Row 0 is even up to rounding: make it exactly so. */
    for (size_t dx = 1; dx <= t->lag; dx++) a->values[t->lag - dx] = a->values[t->lag + dx];
}

static double plane_mean(const float *f, size_t n) {
    double part[4] = { 0.0, 0.0, 0.0, 0.0 };
    for (size_t i = 0; i < n; i++) part[i & 3] += (double)f[i];
    return (part[0] + part[1] + part[2] + part[3]) / (double)n;
}

status acf2d_make(const float *f, size_t nx, size_t ny, size_t max_lag, acf2d *out, error *e) {
    size_t most = (nx < ny ? nx : ny) / 2;
    if (max_lag > most) max_lag = most;
    transform t = { 0 };
    acf2d a = { .max_lag = max_lag, .nx = nx, .ny = ny };
    a.values = mem_array((max_lag + 1) * (2 * max_lag + 1), sizeof *a.values);
    if (!a.values) return NO_MEMORY(e, "the autocorrelation");
    status st = transform_make(nx, ny, max_lag, &t, e);
    if (st == ST_OK) {
        transform_rows(&t, f, (float)plane_mean(f, nx * ny));
        transform_columns(&t);
        transform_rows_back(&t, &a);
        *out = a;
        a = (acf2d){ 0 };
    }
    transform_free(&t);
    acf2d_free(&a);
    return st;
}

void acf2d_free(acf2d *a) {
    free(a->values);
    *a = (acf2d){ 0 };
}

static double acf_value(const acf2d *a, long dx, long dy) {
    if (dy < 0) {
        dx = -dx;
        dy = -dy;
    }
    return (double)a->values[(size_t)dy * (2 * a->max_lag + 1) + (size_t)(dx + (long)a->max_lag)];
}

/* Keys (1981), IEEE Trans. Acoust. Speech Signal Process. 29:1153, a = -1/2: exact for parabolas. */
static void cubic_weights(double t, double *w) {
    w[0] = t * (-0.5 + t * (1.0 - 0.5 * t));
    w[1] = 1.0 + t * t * (-2.5 + 1.5 * t);
    w[2] = t * (0.5 + t * (2.0 - 1.5 * t));
    w[3] = t * t * (-0.5 + 0.5 * t);
}

double acf2d_at(const acf2d *a, double dx, double dy) {
    double reach = (double)a->max_lag - 2.0;
    if (!(fabs(dx) <= reach && fabs(dy) <= reach)) return MISSING;
    long x0 = (long)floor(dx), y0 = (long)floor(dy);
    double wx[4], wy[4], sum = 0.0;
    cubic_weights(dx - (double)x0, wx);
    cubic_weights(dy - (double)y0, wy);
    for (int j = 0; j < 4; j++) {
        double s = 0.0;
        for (int i = 0; i < 4; i++) s += wx[i] * acf_value(a, x0 + i - 1, y0 + j - 1);
        sum += wy[j] * s;
    }
    return sum;
}

/* ---- radial means ---- */

typedef struct {
    double weight, radius, value;
} radial_bin;

/* Bins -> curve; empty bins are left out. */
static status radial_curve(const radial_bin *bins, size_t n, const char *name, const char *x_unit,
                           const char *y_unit, curve *out, error *e) {
    curve c = { .name = name, .x_unit = x_unit, .y_unit = y_unit };
    size_t filled = 0;
    for (size_t i = 0; i < n; i++) filled += bins[i].weight > 0.0;
    c.points = mem_array(filled, sizeof *c.points);
    if (!c.points) return NO_MEMORY(e, "a radial mean");
    for (size_t i = 0; i < n; i++)
        if (bins[i].weight > 0.0)
            c.points[c.n++] =
                (curve_point){ bins[i].radius / bins[i].weight, bins[i].value / bins[i].weight };
    *out = c;
    return ST_OK;
}

status acf_radial(const acf2d *a, curve *out, error *e) {
    radial_bin *bins = mem_array(a->max_lag + 1, sizeof *bins);
    if (!bins) return NO_MEMORY(e, "a radial mean");
    long lag = (long)a->max_lag;
    for (long dy = 0; dy <= lag; dy++)
        for (long dx = dy ? -lag : 0; dx <= lag; dx++) {
            double r = sqrt((double)(dx * dx + dy * dy));
            size_t i = (size_t)(r + 0.5);
            if (i > a->max_lag) continue;
            double w = (double)((long)a->nx - labs(dx)) * (double)((long)a->ny - dy);
            bins[i].weight += w;
            bins[i].radius += w * r;
            bins[i].value += w * acf_value(a, dx, dy);
        }
    status st = radial_curve(bins, a->max_lag + 1, "acf", "px", "1", out, e);
    free(bins);
    return st;
}

/* ---- power spectral density ---- */

static void hann(double *w, size_t n) {
    for (size_t i = 0; i < n; i++) w[i] = 0.5 - 0.5 * cos(2.0 * PI * (double)i / (double)n);
}

status psd2d(const float *f, size_t nx, size_t ny, float *out, error *e) {
    size_t kx = nx / 2 + 1;
    status st = ST_OK;
    fftwf_plan plan = NULL;
    float mean = (float)plane_mean(f, nx * ny);
    double sum_x = 0.0, sum_y = 0.0;
    double *w = mem_array(nx + ny, sizeof *w);
    fftwf_complex *z = aligned(ny * kx, sizeof *z);
    if (!w || !z) {
        st = NO_MEMORY(e, "the power spectrum");
        goto done;
    }
    plan = fftwf_plan_dft_r2c_2d((int)ny, (int)nx, (float *)z, z, FFTW_ESTIMATE);
    if (!plan) {
        st = fail(e, ST_BUG, "no transform plan for %zu x %zu", nx, ny);
        goto done;
    }
    hann(w, nx);
    hann(w + nx, ny);
    for (size_t x = 0; x < nx; x++) sum_x += w[x] * w[x];
    for (size_t y = 0; y < ny; y++) sum_y += w[nx + y] * w[nx + y];
    for (size_t y = 0; y < ny; y++) {
        float *row = (float *)(z + y * kx);
        for (size_t x = 0; x < nx; x++) row[x] = (float)(w[x] * w[nx + y]) * (f[y * nx + x] - mean);
    }
    fftwf_execute(plan);
    float scale = (float)(1.0 / (sum_x * sum_y));
    for (size_t i = 0; i < ny * kx; i++) out[i] = scale * (z[i][0] * z[i][0] + z[i][1] * z[i][1]);
done:
    if (plan) fftwf_destroy_plan(plan);
    fftwf_free(z);
    free(w);
    return st;
}

status psd2d_radial(const float *psd, size_t nx, size_t ny, curve *out, error *e) {
    size_t kx = nx / 2 + 1, longer = nx > ny ? nx : ny, n = longer / 2 + 1;
    radial_bin *bins = mem_array(n, sizeof *bins);
    if (!bins) return NO_MEMORY(e, "the power spectrum");
    for (size_t j = 0; j < ny; j++) {
        double fy = (j <= ny / 2 ? (double)j : (double)j - (double)ny) / (double)ny;
        for (size_t i = 0; i < kx; i++) {
            double fx = (double)i / (double)nx, k = sqrt(fx * fx + fy * fy);
            size_t b = (size_t)(k * (double)longer + 0.5);
            if (b >= n) continue;
            double w = i && 2 * i != nx ? 2.0 : 1.0; /* the other half plane mirrors this one */
            double power = w * (double)psd[j * kx + i];
            bins[b].weight += w;
            bins[b].radius += power * k;
            bins[b].value += power;
        }
    }
    /* The abscissa is where the ring's power lies: a single line keeps its frequency. */
    for (size_t b = 0; b < n; b++)
        bins[b].radius = bins[b].value > 0.0 ? bins[b].radius / bins[b].value * bins[b].weight
                                             : (double)b / (double)longer * bins[b].weight;
    status st = radial_curve(bins, n, "psd", "1/px", "px2", out, e);
    free(bins);
    return st;
}

status psd_radial(const float *f, size_t nx, size_t ny, curve *out, error *e) {
    float *p = mem_array(ny * (nx / 2 + 1), sizeof *p);
    if (!p) return NO_MEMORY(e, "the power spectrum");
    status st = psd2d(f, nx, ny, p, e);
    if (st == ST_OK) st = psd2d_radial(p, nx, ny, out, e);
    free(p);
    return st;
}
