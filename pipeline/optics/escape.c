/* Escape of light from the rear. With a = 4 pi k / wavelength, W the thickness, R the front, Rb the rear from inside:
 *   straight    E = (1 - R)^2 Rb T^2 / (1 - R Rb T^2),  T = exp(-a W);
 *   Lambertian  E = (1 - R) Rb T^2 t / (1 - Rb T^2 (1 - t)),  T = 2 E3(a W) the pass of diffuse light, and
 *               t = (1 - R_diffuse) n_ambient^2 / n^2 its share that the front lets out (detailed balance).
 * Both sum all passes; absorbed, lost behind the rear, reflected and escaped light make 1. A bare rear: Fresnel at
 * vertical incidence (straight), 1 - (1 - R_Fresnel)/n^2 (Lambertian: most light is totally reflected).
 * Not in it: partly scattering wafers, slanted straight light (its path is a few percent longer), edges. */
#include "optics/escape.h"

#include <math.h>

#include "base/number.h"
#include "base/quantity.h"

/* E3 by its continued fraction (A-S 5.1.22) above 1, from the series of E1 (A-S 5.1.11) below. */
double escape_diffuse_pass(double x) {
    const double euler = 0.57721566490153286;
    if (x <= 0.0) return 1.0;
    if (x > 700.0) return 0.0;
    if (x > 1.0) {
        double tail = 0.0;
        for (int i = 60; i >= 1; i--) tail = i * (3.0 - 1.0 + i) / (x + 3.0 + 2.0 * i - tail);
        return 2.0 * exp(-x) / (x + 3.0 - tail);
    }
    double e1 = -euler - log(x), term = 1.0;
    for (int i = 1; i < 30; i++) {
        term *= -x / i;
        e1 -= term / i;
    }
    return exp(-x) * (1.0 - x) + x * x * e1;
}

static status rear_check(const rear_side *rear, error *e) {
    char text[NUMBER_TEXT];
    if (isnan(rear->rear_reflectance) || (rear->rear_reflectance >= 0.0 && rear->rear_reflectance <= 1.0))
        return ST_OK;
    return fail(e, ST_BAD_INPUT, "the rear reflects %s, expected a share from 0 to 1",
                number_text(rear->rear_reflectance, 6, text));
}

static double one(const rear_side *rear, double ambient_n, double wavelength_nm, double n, double k, double R,
                  double diffuse) {
    double x = 4.0 * PI * k * rear->thickness_um * 1e3 / wavelength_nm;
    double fresnel = ((n - 1.0) * (n - 1.0) + k * k) / ((n + 1.0) * (n + 1.0) + k * k),
           back = rear->rear_reflectance;
    if (!rear->lambertian) {
        if (isnan(back)) back = fresnel;
        double round = back * exp(-2.0 * x);
        return (1.0 - R) * (1.0 - R) * round / (1.0 - R * round);
    }
    if (isnan(back)) back = 1.0 - (1.0 - fresnel) / (n * n);
    double pass = escape_diffuse_pass(x), out = fmin(1.0, (1.0 - diffuse) * ambient_n * ambient_n / (n * n));
    double round = back * pass * pass, kept = 1.0 - round * (1.0 - out);
    return kept > 0.0 ? (1.0 - R) * round * out / kept : 1.0 - R; /* nothing absorbs, nothing else lets out */
}

status escape_share(const material *wafer, const rear_side *rear, double ambient_n,
                    const double *wavelength_nm, size_t n, const double *front, const double *diffuse,
                    double *escape, error *e) {
    status st = rear_check(rear, e);
    for (size_t i = 0; i < n && st == ST_OK; i++) {
        double index, k;
        escape[i] = 0.0;
        st = material_at(wafer, wavelength_nm[i], &index, &k, e);
        if (st == ST_OK && rear->thickness_um > 0.0)
            escape[i] = one(rear, ambient_n, wavelength_nm[i], index, k, front[i], diffuse[i]);
    }
    return st;
}
