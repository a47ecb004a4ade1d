/* Roots of the Legendre polynomial by Newton from the usual cosine, weights from its slope there. */
#include "optics/quadrature.h"

#include <math.h>

#include "base/quantity.h"

void quadrature_gauss(size_t n, double *x, double *w) {
    for (size_t i = 0; i < n; i++) {
        double t = cos(PI * ((double)i + 0.75) / ((double)n + 0.5)), slope = 1.0;
        for (int turn = 0; turn < 8; turn++) {
            double p0 = 1.0, p1 = t;
            for (size_t k = 2; k <= n; k++) {
                double p2 = ((2.0 * (double)k - 1.0) * t * p1 - ((double)k - 1.0) * p0) / (double)k;
                p0 = p1, p1 = p2;
            }
            slope = (double)n * (t * p1 - p0) / (t * t - 1.0);
            t -= p1 / slope;
        }
        x[i] = 0.5 * (1.0 - t);
        w[i] = 1.0 / ((1.0 - t * t) * slope * slope);
    }
}
