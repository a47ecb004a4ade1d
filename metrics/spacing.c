/* First scale, spectral peak, hexagonal spacing, and the standard error of an autocorrelation.
 * First scale: the first minimum of the plain radial autocorrelation lies at 0.61 of the spacing for a
 * narrow spectral ring (C = J0(k r): minimum at 3.8317/k, maximum at 7.0156/k; Abramowitz and Stegun 1964,
 * table 9.5); on disordered textures the guess is 9 % short to 28 % long, enough to start the detection and
 * no more. The first MAXIMUM of the plain curve is not used: the falling self term of broad features pushes
 * it out by tens of percent.
 * Standard error after Bartlett (1946), Suppl. J. R. Stat. Soc. 8:27: products of
 * a texture are correlated over the area A2 = 1 + 2 pi integral C^2 r dr; a ring of radius r averages pi r /
 * sqrt(A2) independent directions.
 * spacing_psd: 1/k at the peak of the radial spectrum of the curvature map.
 * It is the distance of ROWS, 0.866 of the hexagonal spacing on a lattice, 0.92 to 1 on disordered textures:
 * never to be compared with a spacing 1:1. */
#include "metrics/spacing.h"

#include <math.h>

#include "base/quantity.h"
#include "metrics/logcurve.h"

static const double smoothing = 0.05; /* sd, share of the lag */
static const double minimum_to_spacing = 0.61;

double acf_standard_error(const curve *acf, double r_px, size_t nx, size_t ny) {
    double integral = 0.0, last_r = 0.0, last = 0.0;
    for (size_t i = 1; i < acf->n && acf->points[i].x <= r_px; i++) {
        double r = acf->points[i].x, now = acf->points[i].y * acf->points[i].y * r;
        integral += 0.5 * (r - last_r) * (now + last);
        last_r = r;
        last = now;
    }
    double area2 = 1.0 + 2.0 * PI * integral, directions = PI * r_px / sqrt(area2);
    return sqrt(area2 / ((double)nx * (double)ny) / fmax(1.0, directions));
}

void spacing_first_scale(const curve *acf, size_t nx, size_t ny, first_scale *out) {
    const double start_share = 0.3; /* a dip before the self term has fallen this far is noise */
    const double least_px = 2.5, least_at_3px = 0.02;
    log_curve s;
    *out = (first_scale){ MISSING, MISSING, 0.0 };
    log_curve_make(acf, 0.0, HUGE_VAL, smoothing, &s);
    if (s.n < 3 || !(curve_at(acf, 3.0) >= least_at_3px)) return;
    for (size_t i = 1; i + 1 < s.n; i++) {
        if (!(s.y[i] < s.y[i - 1] && s.y[i] <= s.y[i + 1] && s.y[i] < start_share * s.y[0])) continue;
        double c, r = curve_vertex(acf, NULL, s.x[i], 0.20, -1, &c);
        if (!(r >= least_px)) return;
        out->first_minimum_px = r;
        out->scale_px = r / minimum_to_spacing;
        out->z = -c / acf_standard_error(acf, r, nx, ny);
        return;
    }
}

status spacing_psd_peak(const curve *k_psd, double d_px, size_t n_features, measured *out, error *e) {
    double middle = 1.1 / d_px;
    log_curve s;
    if (!(d_px > 0.0)) return fail(e, ST_NO_RESULT, "no scale to search the power spectrum at");
    log_curve_make(k_psd, 0.6 * middle, 1.7 * middle, smoothing, &s);
    size_t best = 0;
    for (size_t i = 1; i < s.n; i++)
        if (s.y[i] > s.y[best]) best = i;
    if (s.n < 3 || best == 0 || best == s.n - 1)
        return fail(e, ST_NO_RESULT, "the power spectrum has no peak between periods of %.3g and %.3g px",
                    1.0 / (1.7 * middle), 1.0 / (0.6 * middle));
    /* ln P, because the peak stands on a steep slope; weighted with P, so that the feet of a narrow line do
     * not decide. */
    curve_point window[LOG_POINTS];
    double weight[LOG_POINTS] = { 0.0 };
    curve ln = { .points = window, .n = 1 };
    window[0] = (curve_point){ 0.0, 0.0 };
    for (size_t i = 1; i < k_psd->n && ln.n < LOG_POINTS; i++) {
        double k = k_psd->points[i].x, p = fmax(k_psd->points[i].y, 1e-12 * s.y[best]);
        if (k < 0.5 * middle || k > 2.1 * middle) continue;
        weight[ln.n] = p / s.y[best];
        window[ln.n++] = (curve_point){ k, log(p) };
    }
    double k = curve_vertex(&ln, weight, s.x[best], 0.20, +1, NULL);
    *out = (measured){ 1.0 / k, MISSING, 0.0, n_features };
    /* 2.7 % at 960 features, 8.5 % at 87 (repetitions on textures of known truth). */
    if (n_features) out->u_sampling = 0.84 / sqrt((double)n_features) / k;
    return ST_OK;
}

double spacing_hex(double density) { return sqrt(2.0 / (sqrt(3.0) * density)); }
