/* Rows of a plane resampled to another spacing, columns untouched: for pixels that are not square and for
 * tilted views. Cubic convolution (Keys 1981, a = -1/2: exact for parabolas); where rows become fewer the
 * kernel is widened by the same factor, so that nothing finer than the new rows folds back. Rows beyond the
 * edge repeat the edge. Overshoot is cut at 0 and 1. */
#include <math.h>
#include <stdlib.h>

#include "base/limits.h"
#include "base/mem.h"
#include "io/resample_priv.h"

static double keys(double x) {
    x = fabs(x);
    if (x < 1.0) return (1.5 * x - 2.5) * x * x + 1.0;
    if (x < 2.0) return ((-0.5 * x + 2.5) * x - 4.0) * x + 2.0;
    return 0.0;
}

status resample_rows(float **px, size_t nx, size_t *ny, double factor, size_t max_pixels, error *e) {
    double wanted = floor((double)*ny * factor + 0.5), wide = factor < 1.0 ? 1.0 / factor : 1.0;
    if (!(wanted >= 1.0) || wanted > (double)LIMIT_SIDE || wanted * (double)nx > (double)max_pixels)
        return fail(e, ST_NO_MEMORY, "the picture is too large once its rows are stretched %.2f times",
                    factor);
    size_t rows = (size_t)wanted, taps = (size_t)ceil(4.0 * wide) + 1;
    float *to = mem_array(rows * nx, sizeof *to);
    double *sum = mem_array(nx, sizeof *sum);
    if (!to || !sum) {
        free(to);
        free(sum);
        return NO_MEMORY(e, "the stretched picture");
    }
    for (size_t y = 0; y < rows; y++) {
        /* Centres of rows: both fields span the same height. */
        double at = ((double)y + 0.5) / factor - 0.5, total = 0.0;
        long first = (long)floor(at - 2.0 * wide) + 1;
        for (size_t x = 0; x < nx; x++) sum[x] = 0.0;
        for (size_t k = 0; k < taps; k++) {
            long row = first + (long)k;
            double w = keys(((double)row - at) / wide);
            if (w > 0.0 || w < 0.0) {
                const float *from = *px + nx * (size_t)(row < 0 ? 0 : row >= (long)*ny ? (long)*ny - 1 : row);
                total += w;
                for (size_t x = 0; x < nx; x++) sum[x] += w * (double)from[x];
            }
        }
        for (size_t x = 0; x < nx; x++) {
            double v = sum[x] / total;
            to[y * nx + x] = (float)(v < 0.0 ? 0.0 : v > 1.0 ? 1.0 : v);
        }
    }
    free(sum);
    free(*px);
    *px = to;
    *ny = rows;
    return ST_OK;
}

status resample_mask(unsigned char **mask, size_t nx, size_t before, size_t rows, error *e) {
    double factor = (double)rows / (double)before, reach = factor < 1.0 ? 1.5 / factor : 1.5;
    unsigned char *to = mem_array(rows * nx, 1);
    if (!to) return NO_MEMORY(e, "the stretched mask");
    for (size_t y = 0; y < rows; y++) {
        double at = ((double)y + 0.5) / factor - 0.5;
        double from = fmax(ceil(at - reach), 0.0), end = fmin(floor(at + reach), (double)before - 1.0);
        for (size_t k = (size_t)from; k <= (size_t)end; k++)
            for (size_t x = 0; x < nx; x++) to[y * nx + x] |= (*mask)[k * nx + x];
    }
    free(*mask);
    *mask = to;
    return ST_OK;
}
