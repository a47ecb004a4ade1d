/* What an electron microscope makes of a rendered surface: height and slope as secondary-electron signal, roughness,
 * a finite probe that may be drawn out in one direction, vibration, uneven brightness, charging streaks along the scan, shot noise. A picture model, not a physical one:
 * the signal is proportional to the height and, with `edge`, to the slope; there is no shadowing. Quantisation and
 * clipping happen when the signal is stored. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/render_priv.h"
#include "base/mem.h"
#include "base/quantity.h"

#define ROUGH_CORRELATION 0.06 /* Gaussian sd of the roughness filter / spacing: finer than any feature */
#define STREAK_ROWS 0.6        /* sd of the streaks' height in rows: neighbouring lines charge alike */

/* Gaussian filter in both directions, edges mirrored; sd 0 leaves the plane alone. */
static status blur(float *f, size_t nx, size_t ny, double sd, error *e) {
    if (!(sd > 0.0)) return ST_OK;
    size_t reach = (size_t)ceil(4.0 * sd), longest = nx > ny ? nx : ny;
    double *kernel = mem_array(reach + 1, sizeof *kernel);
    float *line = mem_array(longest, sizeof *line);
    if (!kernel || !line) {
        free(kernel);
        free(line);
        return NO_MEMORY(e, "the blur of the probe");
    }
    double sum = 0.0;
    for (size_t k = 0; k <= reach; k++) {
        kernel[k] = exp(-0.5 * (double)k * (double)k / (sd * sd));
        sum += k ? 2.0 * kernel[k] : kernel[k];
    }
    for (size_t k = 0; k <= reach; k++) kernel[k] /= sum;
    for (int pass = 0; pass < 2; pass++) {
        size_t n = pass ? ny : nx, lines = pass ? nx : ny, step = pass ? nx : 1, next = pass ? 1 : nx;
        long last = (long)n - 1, period = last > 0 ? 2 * last : 1;
        for (size_t l = 0; l < lines; l++) {
            float *p = f + l * next;
            for (size_t i = 0; i < n; i++) line[i] = p[i * step];
            for (long i = 0; i < (long)n; i++) {
                double s = kernel[0] * (double)line[i];
                for (long k = 1; k <= (long)reach; k++) {
                    long a = labs(i - k) % period, b = (i + k) % period;
                    if (a > last) a = period - a;
                    if (b > last) b = period - b;
                    s += kernel[k] * ((double)line[a] + (double)line[b]);
                }
                p[(size_t)i * step] = (float)s;
            }
        }
    }
    free(kernel);
    free(line);
    return ST_OK;
}

/* Between the four pixels around a place; the last row and column repeat. */
static double bilinear(const float *f, size_t nx, size_t ny, double x, double y) {
    x = fmin(fmax(x, 0.0), (double)nx - 1.0);
    y = fmin(fmax(y, 0.0), (double)ny - 1.0);
    size_t i = (size_t)x, j = (size_t)y, r = i + 1 < nx ? 1 : 0, b = j + 1 < ny ? nx : 0;
    double u = x - (double)i, v = y - (double)j;
    const float *p = f + j * nx + i;
    return (1.0 - v) * ((1.0 - u) * (double)p[0] + u * (double)p[r]) + v * ((1.0 - u) * (double)p[b] + u * (double)p[b + r]);
}

/* Gaussian filter along one direction: a probe that astigmatism has drawn out. */
static status smear(const render_options *o, size_t nx, size_t ny, float *f, error *e) {
    if (!(o->smear_px > 0.0)) return ST_OK;
    long reach = (long)ceil(4.0 * o->smear_px);
    double c = cos(o->smear_angle_deg * PI / 180.0), s = -sin(o->smear_angle_deg * PI / 180.0), norm = 0.0;
    double *kernel = mem_array(2 * (size_t)reach + 1, sizeof *kernel);
    float *from = mem_array(nx * ny, sizeof *from);
    status st = kernel && from ? ST_OK : NO_MEMORY(e, "the astigmatism");
    for (long k = -reach; st == ST_OK && k <= reach; k++)
        norm += kernel[k + reach] = exp(-0.5 * (double)(k * k) / (o->smear_px * o->smear_px));
    if (st == ST_OK) memcpy(from, f, nx * ny * sizeof *f);
    for (size_t j = 0; st == ST_OK && j < ny; j++)
        for (size_t i = 0; i < nx; i++) {
            double sum = 0.0;
            for (long k = -reach; k <= reach; k++)
                sum += kernel[k + reach] * bilinear(from, nx, ny, (double)i + (double)k * c, (double)j + (double)k * s);
            f[j * nx + i] = (float)(sum / norm);
        }
    free(kernel);
    free(from);
    return st;
}

/* Vibration: each scan line begins a little off its place. */
static status shake(const render_options *o, size_t nx, size_t ny, float *f, error *e) {
    if (!(o->jitter_px > 0.0)) return ST_OK;
    rng r = rng_make(o->seed, STREAM_JITTER);
    float *line = mem_array(nx, sizeof *line);
    if (!line) return NO_MEMORY(e, "the vibration");
    for (size_t j = 0; j < ny; j++) {
        double shift = o->jitter_px * rng_normal(&r);
        memcpy(line, f + j * nx, nx * sizeof *line);
        for (size_t i = 0; i < nx; i++) f[j * nx + i] = (float)bilinear(line, nx, 1, (double)i + shift, 0.0);
    }
    free(line);
    return ST_OK;
}

static status add_roughness(const render_options *o, const surface *s, double spacing, float *h, error *e) {
    if (!(o->rough > 0.0)) return ST_OK;
    size_t n = s->nx * s->ny;
    float *noise = mem_array(n, sizeof *noise);
    if (!noise) return NO_MEMORY(e, "the roughness");
    rng r = rng_make(o->seed, STREAM_ROUGH);
    double sd = ROUGH_CORRELATION * spacing;
    for (size_t k = 0; k < n; k++) noise[k] = (float)rng_normal(&r);
    status st = blur(noise, s->nx, s->ny, sd, e);
    double power = 0.0;
    for (size_t k = 0; k < n; k++) power += (double)noise[k] * (double)noise[k];
    double scale = power > 0.0 ? o->rough / sqrt(power / (double)n) : 0.0;
    for (size_t k = 0; k < n; k++) h[k] = (float)((double)h[k] + scale * (double)noise[k]);
    free(noise);
    return st;
}

/* Height and slope into signal. A straight cone of the mean height on half a spacing has the slope 1. */
static void secondary_electrons(const render_options *o, const surface *s, double spacing, const float *h, float *out) {
    double up = o->relief == RELIEF_PORE ? -1.0 : 1.0;
    for (size_t j = 0; j < s->ny; j++)
        for (size_t i = 0; i < s->nx; i++) {
            size_t l = i ? i - 1 : i, r = i + 1 < s->nx ? i + 1 : i, t = j ? j - 1 : j, b = j + 1 < s->ny ? j + 1 : j;
            double gx = ((double)h[j * s->nx + r] - (double)h[j * s->nx + l]) / (double)(r - l);
            double gy = ((double)h[b * s->nx + i] - (double)h[t * s->nx + i]) / (double)(b - t);
            double slope = fmin(2.0, hypot(gx, gy) * 0.5 * spacing);
            out[j * s->nx + i] = (float)((1.0 - o->edge) * up * (double)h[j * s->nx + i] + o->edge * slope);
        }
}

/* Quantile of the frame from a histogram of 4096 steps: enough to set brightness and contrast by. */
static void frame_range(const float *f, size_t n, double *lo, double *hi) {
    enum { STEPS = 4096 };
    size_t count[STEPS] = { 0 };
    double least = HUGE_VAL, most = -HUGE_VAL;
    for (size_t k = 0; k < n; k++) {
        least = fmin(least, (double)f[k]);
        most = fmax(most, (double)f[k]);
    }
    double width = most > least ? (most - least) / STEPS : 1.0;
    for (size_t k = 0; k < n; k++) {
        size_t at = (size_t)(((double)f[k] - least) / width);
        count[at < STEPS ? at : STEPS - 1]++;
    }
    size_t below = 0, i = 0;
    for (; i < STEPS && below + count[i] <= n / 1000; i++) below += count[i];
    *lo = least + (double)i * width;
    for (; i < STEPS && below + count[i] <= n - n / 1000; i++) below += count[i];
    *hi = least + (double)(i < STEPS ? i + 1 : STEPS) * width;
}

static void add_gradient(const render_options *o, float *f) {
    if (!(fabs(o->gradient) > 0.0)) return;
    rng r = rng_make(o->seed, STREAM_GRADIENT);
    double a = 2.0 * PI * rng_uniform(&r), c = cos(a), s = sin(a);
    double half = 0.5 * (fabs(c) * (double)o->nx + fabs(s) * (double)o->ny);
    for (size_t j = 0; j < o->ny; j++)
        for (size_t i = 0; i < o->nx; i++) {
            double along = (c * ((double)i - 0.5 * (double)o->nx) + s * ((double)j - 0.5 * (double)o->ny)) / half;
            f[j * o->nx + i] = (float)((double)f[j * o->nx + i] * (1.0 + 0.5 * o->gradient * along));
        }
}

/* Half of the streaks' power is an offset of whole scan lines, half are tails that start anywhere and die away. */
static status add_streaks(const render_options *o, float *f, error *e) {
    if (!(o->streaks > 0.0)) return ST_OK;
    rng r = rng_make(o->seed, STREAM_STREAKS);
    float *rows = mem_array(o->ny, sizeof *rows);
    if (!rows) return NO_MEMORY(e, "the streaks");
    for (size_t j = 0; j < o->ny; j++) rows[j] = (float)rng_normal(&r);
    status st = blur(rows, 1, o->ny, STREAK_ROWS, e);
    double power = 0.0, amplitude = o->streaks * o->contrast * sqrt(0.5);
    for (size_t j = 0; j < o->ny; j++) power += (double)rows[j] * (double)rows[j];
    double scale = power > 0.0 ? amplitude / sqrt(power / (double)o->ny) : 0.0;
    for (size_t j = 0; j < o->ny; j++) {
        double tail = 0.0, length = 0.2 * (double)o->nx, decay = exp(-1.0 / length), start = 1.0 / (2.0 * length);
        for (size_t i = 0; i < o->nx; i++) {
            if (rng_uniform(&r) < start) tail += amplitude * sqrt(2.0) * rng_normal(&r);
            f[j * o->nx + i] = (float)((double)f[j * o->nx + i] + scale * (double)rows[j] + tail);
            tail *= decay;
        }
    }
    free(rows);
    return st;
}

static void add_shot_noise(const render_options *o, float *f) {
    if (!(o->electrons > 0.0)) return;
    rng r = rng_make(o->seed, STREAM_NOISE);
    for (size_t k = 0; k < o->nx * o->ny; k++)
        f[k] = (float)(rng_poisson(&r, o->electrons * fmax(0.0, (double)f[k])) / o->electrons);
}

status look_make(const render_options *o, const surface *s, double spacing, float *signal, error *e) {
    size_t n = s->nx * s->ny;
    float *h = mem_array(n, sizeof *h), *f = mem_array(n, sizeof *f);
    status st = h && f ? ST_OK : NO_MEMORY(e, "the picture");
    if (st == ST_OK) {
        memcpy(h, s->height, n * sizeof *h);
        st = add_roughness(o, s, spacing, h, e);
    }
    if (st == ST_OK) {
        secondary_electrons(o, s, spacing, h, f);
        st = blur(f, s->nx, s->ny, o->blur_px, e);
        if (st == ST_OK) st = smear(o, s->nx, s->ny, f, e);
        if (st == ST_OK) st = shake(o, s->nx, s->ny, f, e);
    }
    if (st == ST_OK) {
        for (size_t j = 0; j < o->ny; j++)
            memcpy(signal + j * o->nx, f + (j + s->margin) * s->nx + s->margin, o->nx * sizeof *signal);
        double lo, hi;
        frame_range(signal, o->nx * o->ny, &lo, &hi);
        double gain = o->contrast / (hi - lo), middle = 0.5 * (lo + hi);
        for (size_t k = 0; k < o->nx * o->ny; k++)
            signal[k] = (float)(0.5 + gain * ((double)signal[k] - middle));
        add_gradient(o, signal);
        st = add_streaks(o, signal, e);
    }
    if (st == ST_OK) add_shot_noise(o, signal);
    free(h);
    free(f);
    return st;
}
