/* The solar spectrum as photon flux, and weighted means over it. Between the nodes of the table the
 * irradiance is linear (ASTM G173-03 states it so finely, 0.5 nm below 400 nm and 1 nm above, that the rule
 * matters below 1e-5). A photon carries h c / wavelength, so the flux is irradiance x wavelength / (h c).
 * Integrals are trapezoids on the nodes of the sun inside the band plus the band's two ends; the spectrum y
 * is read off linearly there. A spectrum of sunlight with far nodes is filled up to 1 nm when it is made. */
#include "optics/sun.h"

#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/number.h"

static const double CHARGE_C = 1.602176634e-19; /* SI 2019, exact */
static const double PLANCK_J_S = 6.62607015e-34;
static const double LIGHT_M_S = 299792458.0;

void sun_free(sun *s) {
    free(s->source);
    free(s->wavelength_nm);
    free(s->irradiance);
    *s = (sun){ 0 };
}

/* Steps of at most 1 nm between two nodes (a little slack keeps tables on 1 nm as they are; 100 um hold the rest). */
static size_t pieces(double gap_nm) {
    return (size_t)fmin(1e5, fmax(1.0, ceil(gap_nm - 1e-6)));
}

status sun_make(sun *s, const char *source, size_t n, const double *wavelength_nm, const double *irradiance,
                error *e) {
    if (n < 2) return fail(e, ST_BAD_INPUT, "a solar spectrum needs at least two wavelengths, found %zu", n);
    for (size_t i = 0; i < n; i++) {
        if (!isfinite(wavelength_nm[i]) || wavelength_nm[i] <= 0.0 ||
            (i && wavelength_nm[i] <= wavelength_nm[i - 1]))
            return fail(e, ST_BAD_INPUT,
                        "solar spectrum, wavelength %zu: wavelengths have to ascend above 0 nm", i + 1);
        if (!isfinite(irradiance[i]) || irradiance[i] < 0.0)
            return fail(e, ST_BAD_INPUT,
                        "solar spectrum, wavelength %zu: the irradiance has to be 0 or above", i + 1);
    }
    sun a = { .source = mem_text(source ? source : "") };
    size_t filled = 1;
    for (size_t i = 1; i < n; i++) filled += pieces(wavelength_nm[i] - wavelength_nm[i - 1]);
    a.wavelength_nm = mem_array(filled, sizeof(double));
    a.irradiance = mem_array(filled, sizeof(double));
    if (!a.source || !a.wavelength_nm || !a.irradiance) {
        sun_free(&a);
        return NO_MEMORY(e, "the solar spectrum");
    }
    for (size_t i = 0; i + 1 < n; i++) {
        size_t steps = pieces(wavelength_nm[i + 1] - wavelength_nm[i]);
        for (size_t k = 0; k < steps; k++) {
            double t = (double)k / (double)steps;
            a.wavelength_nm[a.n] = (1.0 - t) * wavelength_nm[i] + t * wavelength_nm[i + 1];
            a.irradiance[a.n++] = (1.0 - t) * irradiance[i] + t * irradiance[i + 1];
        }
    }
    a.wavelength_nm[a.n] = wavelength_nm[n - 1];
    a.irradiance[a.n++] = irradiance[n - 1];
    *s = a;
    return ST_OK;
}

static status check_band(const double *w, size_t n, double lo_nm, double hi_nm, const char *what, error *e) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], lo[NUMBER_TEXT], hi[NUMBER_TEXT];
    number_text(lo_nm, 7, lo);
    number_text(hi_nm, 7, hi);
    if (!(lo_nm < hi_nm))
        return fail(e, ST_BAD_INPUT, "the band %s:%s nm is empty; give the shorter wavelength first", lo, hi);
    if (n < 2 || !(lo_nm >= w[0] && hi_nm <= w[n - 1]))
        return fail(e, ST_BAD_INPUT,
                    "the band %s:%s nm reaches beyond %s (%s to %s nm); choose a band inside", lo, hi, what,
                    number_text(n ? w[0] : 0.0, 7, a), number_text(n ? w[n - 1] : 0.0, 7, b));
    return ST_OK;
}

/* Linear reading of a table at ascending places: *at moves forward only. */
static double read_on(const double *x, const double *y, size_t n, double place, size_t *at) {
    while (*at + 2 < n && x[*at + 1] <= place) ++*at;
    double t = (place - x[*at]) / (x[*at + 1] - x[*at]);
    return (1.0 - t) * y[*at] + t * y[*at + 1];
}

/* Integrals over the band of the photon flux (times h c), or of the irradiance, and of it times y. */
static void integrate(const sun *s, sun_weight weight, const double *w, const double *y, size_t n, double lo, double hi,
                      double *flux, double *flux_y) {
    size_t sun_at = 0, y_at = 0, next = 0;
    double x0 = 0.0, f0 = 0.0, g0 = 0.0;
    *flux = *flux_y = 0.0;
    while (next < s->n && s->wavelength_nm[next] <= lo) next++;
    for (int first = 1, last = 0; !last; first = 0) {
        double x = first ? lo : (next < s->n && s->wavelength_nm[next] < hi) ? s->wavelength_nm[next++] : hi;
        last = !first && x >= hi;
        double f = read_on(s->wavelength_nm, s->irradiance, s->n, x, &sun_at) * (weight == WEIGHT_ENERGY ? 1.0 : x);
        double g = f * read_on(w, y, n, x, &y_at);
        if (!first) {
            *flux += 0.5 * (f + f0) * (x - x0);
            *flux_y += 0.5 * (g + g0) * (x - x0);
        }
        x0 = x, f0 = f, g0 = g;
    }
}

static status mean_over(const sun *s, sun_weight weight, const double *wavelength_nm, const double *y, size_t n,
                        double lo_nm, double hi_nm, double *mean, error *e) {
    status st = check_band(s->wavelength_nm, s->n, lo_nm, hi_nm, "the solar spectrum", e);
    if (!st) st = check_band(wavelength_nm, n, lo_nm, hi_nm, "the spectrum to be weighted", e);
    if (st) return st;
    for (size_t i = 1; i < n; i++)
        if (!(wavelength_nm[i] > wavelength_nm[i - 1]))
            return fail(e, ST_BAD_INPUT,
                        "the wavelengths of the spectrum to be weighted do not ascend at number %zu", i + 1);
    double flux, flux_y;
    integrate(s, weight, wavelength_nm, y, n, lo_nm, hi_nm, &flux, &flux_y);
    if (!(flux > 0.0)) return fail(e, ST_BAD_INPUT, "the solar spectrum holds no light in the band");
    *mean = flux_y / flux;
    return ST_OK;
}

status sun_weighted(const sun *s, const double *wavelength_nm, const double *y, size_t n, double lo_nm, double hi_nm,
                    double *mean, error *e) {
    return mean_over(s, s->weight, wavelength_nm, y, n, lo_nm, hi_nm, mean, e);
}

status sun_photon_mean(const sun *s, const double *wavelength_nm, const double *y, size_t n, double lo_nm, double hi_nm,
                       double *mean, error *e) {
    return mean_over(s, WEIGHT_PHOTONS, wavelength_nm, y, n, lo_nm, hi_nm, mean, e);
}

status sun_current(const sun *s, double lo_nm, double hi_nm, double *mA_cm2, error *e) {
    status st = check_band(s->wavelength_nm, s->n, lo_nm, hi_nm, "the solar spectrum", e);
    if (st) return st;
    const double ends[] = { lo_nm, hi_nm }, all[] = { 1.0, 1.0 };
    double flux, unused;
    integrate(s, WEIGHT_PHOTONS, ends, all, 2, lo_nm, hi_nm, &flux, &unused);
    /* W m-2 nm-1 x nm x nm: one nm to m from the wavelength; A m-2 to mA cm-2 is 0.1 */
    *mA_cm2 = flux * 1e-9 * CHARGE_C / (PLANCK_J_S * LIGHT_M_S) * 0.1;
    return ST_OK;
}
