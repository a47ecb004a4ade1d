/* How long the parts take, as JSON lines: best and mean of at least 5 runs and 1 s. Ratios between lines of one run
 * mean something on a noisy machine; the seconds alone do not. Never part of the tests. */
#include <complex.h>
#include <fftw3.h>
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

#include "app/materials.h"
#include "app/render.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "io/load.h"
#include "io/png_write.h"
#include "metrics/filter.h"
#include "metrics/measure.h"
#include "metrics/spectrum.h"
#include "metrics/watershed.h"
#include "report/overlay.h"

enum { NX = 2048, NY = 1536 };

typedef struct {
    plane plane;
    float *px, *f, *work;
    texture found; /* for the overlay, measured when it is first drawn */
    uint32_t *cells;
    uint8_t *png;
    size_t png_n;
    fftwf_plan forward;
    float *padded;
    fftwf_complex *spectrum;
    setup set;
    double *nm, *R;
} bench;

static volatile double sink;

static double now_s(void) {
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static void timed(const char *name, double (*work)(bench *), bench *b) {
    double best = 1e9, total = 0.0;
    int runs = 0;
    for (; runs < 5 || (total < 1.0 && runs < 200); runs++) {
        double t0 = now_s();
        sink = work(b);
        double t = now_s() - t0;
        total += t;
        if (t < best) best = t;
    }
    printf("{\"name\":\"%s\",\"best_s\":%.6g,\"mean_s\":%.6g,\"runs\":%d}\n", name, best, total / runs, runs);
    fflush(stdout);
}

static double bare_transform(bench *b) {
    fftwf_execute(b->forward);
    return (double)crealf(b->spectrum[1]);
}

static double run_load(bench *b) {
    micrograph m = { 0 };
    load_options o = load_defaults();
    error e = { 0 };
    if (load_memory(b->png, b->png_n, &o, &m, &e) != ST_OK) puts(e.text);
    double v = (double)m.px[m.nx];
    micrograph_free(&m);
    return v;
}

static double run_flatten(bench *b) {
    flatten(&b->plane, b->f, NULL);
    return (double)b->f[NX];
}

static double run_curvature(bench *b) {
    filter_curvature(b->f, NX, NY, 0.17 * 30.0, 1, b->work, NULL);
    return (double)b->work[NX];
}

static double run_acf(bench *b) {
    acf2d a = { 0 };
    acf2d_make(b->f, NX, NY, NY / 2, &a, NULL);
    double v = (double)a.values[5];
    acf2d_free(&a);
    return v;
}

static double run_detect(bench *b) {
    detection d = { 0 };
    detect(b->f, NX, NY, 30.0, 1, noise_sd(b->f, NX, NY), &d, NULL);
    double v = (double)d.n;
    detection_free(&d);
    return v;
}

static double run_detect_and_cells(bench *b) {
    detection d = { 0 };
    detect(b->f, NX, NY, 30.0, 1, noise_sd(b->f, NX, NY), &d, NULL);
    watershed(b->f, NX, NY, 1, &d, b->cells, NULL);
    double v = d.features[0].cell_area_px2;
    detection_free(&d);
    return v;
}

static double run_measure(bench *b) {
    texture t = { 0 };
    measure_options o = measure_defaults();
    measure_plane(&b->plane, &o, &t, NULL);
    double v = t.spacing_acf.value;
    texture_free(&t);
    return v;
}

static double run_spectrum(bench *b, double angle_deg) {
    link_options link = link_defaults();
    profile p = { 0 };
    link_profile(300.0, 300.0, NULL, 0, 0, &link, NULL, 0, &p, NULL);
    const optics_setup *o = &b->set.optics;
    stack s = { .ambient = o->ambient, .profile = &p, .substrate = o->substrate, .mixing = MIX_BRUGGEMAN_2D };
    reflect_options r = reflect_defaults();
    r.angle_deg = angle_deg;
    reflectance(&s, &r, b->nm, 901, b->R, NULL, NULL);
    profile_free(&p);
    return b->R[300];
}

static double run_spectrum_normal(bench *b) { return run_spectrum(b, 0.0); }
static double run_spectrum_oblique(bench *b) { return run_spectrum(b, 60.0); }

/* The overlay of the field with 2000 features, drawn and encoded. */
static double run_overlay(bench *b) {
    if (!b->found.features) {
        measure_options o = measure_defaults();
        measure_plane(&b->plane, &o, &b->found, NULL);
    }
    micrograph m = { .px = b->px, .nx = NX, .ny = NY, .px_nm = 10.0 };
    overlay_picture picture = { 0 };
    uint8_t *png = NULL;
    size_t n = 0;
    error e = { 0 };
    if (overlay_draw(&m, &b->found, &picture, &e) != ST_OK) puts(e.text);
    png_format f = { picture.nx, picture.ny, 1, 8, 10.0 };
    if (png_encode_palette(picture.index, picture.palette, &f, &png, &n, &e) != ST_OK) puts(e.text);
    free(png);
    overlay_free(&picture);
    return (double)n;
}

static double run_sweep(bench *b) { /* 0 to 85.5 degrees in 19 steps, s and p */
    link_options link = link_defaults();
    profile p = { 0 };
    double sum = 0.0;
    link_profile(300.0, 300.0, NULL, 0, 0, &link, NULL, 0, &p, NULL);
    const optics_setup *o = &b->set.optics;
    stack s = { .ambient = o->ambient, .profile = &p, .substrate = o->substrate, .mixing = MIX_BRUGGEMAN_2D };
    double angle[19], *R = mem_array(2 * 19 * 901, sizeof *R);
    for (int i = 0; i < 19; i++) angle[i] = 4.75 * i;
    if (R && reflectance_angles(&s, angle, 19, reflect_defaults().tolerance, b->nm, 901, R, R + 19 * 901, NULL) == ST_OK) sum = R[300];
    free(R);
    profile_free(&p);
    return sum;
}

static int prepare(bench *b, rendering *r) {
    render_options o = render_defaults();
    protocol p = { 0 };
    error e = { 0 };
    o.spacing_nm = 300.0;
    o.px_nm = 10.0;
    o.nx = NX;
    o.ny = NY;
    o.strip = 0;
    if (render_make(&o, r, &e) != ST_OK || protocol_defaults(&p, &e) != ST_OK || setup_make(&p, &b->set, &e) != ST_OK) {
        puts(e.text);
        return 0;
    }
    protocol_free(&p);
    float *px = mem_array((size_t)NX * NY, sizeof *px);
    b->f = mem_array((size_t)NX * NY, sizeof *b->f);
    b->work = mem_array((size_t)NX * NY, sizeof *b->work);
    b->cells = mem_array((size_t)NX * NY, sizeof *b->cells);
    b->nm = mem_array(901, sizeof *b->nm);
    b->R = mem_array(901, sizeof *b->R);
    size_t nx = 2880, ny = 2304; /* padded by half the shorter side */
    b->padded = fftwf_alloc_real(nx * ny);
    b->spectrum = fftwf_alloc_complex((nx / 2 + 1) * ny);
    if (!px || !b->f || !b->work || !b->cells || !b->nm || !b->R || !b->padded || !b->spectrum) return 0;
    b->forward = fftwf_plan_dft_r2c_2d((int)ny, (int)nx, b->padded, b->spectrum, FFTW_ESTIMATE);
    for (size_t i = 0; i < nx * ny; i++) b->padded[i] = (float)(i % 97) / 97.0f;
    for (size_t i = 0; i < (size_t)NX * NY; i++) px[i] = (float)((const uint8_t *)r->samples)[i] / 255.0f;
    for (size_t i = 0; i < 901; i++) b->nm[i] = 300.0 + (double)i;
    b->px = px;
    b->plane = (plane){ px, NX, NY, 8, 0.0, 0.0, NULL };
    png_format f = { NX, NY, 1, 8, 10.0 };
    return png_encode(r->samples, &f, &b->png, &b->png_n, &e) == ST_OK;
}

int main(void) {
    bench b = { 0 };
    rendering r = { 0 };
    if (!prepare(&b, &r)) return 1;
    timed("bare_transform_2880x2304", bare_transform, &b);
    timed("load_png_2048x1536", run_load, &b);
    timed("flatten", run_flatten, &b);
    timed("curvature_sigma_5", run_curvature, &b);
    timed("autocorrelation", run_acf, &b);
    timed("detect", run_detect, &b);
    timed("detect_and_cells", run_detect_and_cells, &b);
    timed("measure_plane", run_measure, &b);
    timed("overlay_png_2048x1536", run_overlay, &b);
    timed("spectrum_901_normal", run_spectrum_normal, &b);
    timed("spectrum_901_60deg", run_spectrum_oblique, &b);
    timed("spectrum_901_19_angles_s_and_p", run_sweep, &b);
    return 0; /* what the process holds ends with it */
}
