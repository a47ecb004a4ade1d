#include "metrics/linear.h"

#include <math.h>

static void exchange(double *a, double *b, size_t n) {
    for (size_t k = 0; k < n; k++) {
        double t = a[k];
        a[k] = b[k];
        b[k] = t;
    }
}

int linear_solve(double *m, size_t n, double least_pivot, double *x) {
    size_t width = n + 1;
    for (size_t i = 0; i < n; i++) {
        size_t pivot = i;
        for (size_t r = i + 1; r < n; r++)
            if (fabs(m[r * width + i]) > fabs(m[pivot * width + i])) pivot = r;
        if (!(fabs(m[pivot * width + i]) > least_pivot)) return 0;
        exchange(m + i * width, m + pivot * width, width);
        for (size_t r = 0; r < n; r++) {
            if (r == i) continue;
            double q = m[r * width + i] / m[i * width + i];
            for (size_t k = i; k < width; k++) m[r * width + k] -= q * m[i * width + k];
        }
    }
    for (size_t i = 0; i < n; i++) x[i] = m[i * width + n] / m[i * width + i];
    return 1;
}
