/* A number with its standard uncertainty. Missing is NAN, never 0. */
#ifndef SWARD_BASE_QUANTITY_H
#define SWARD_BASE_QUANTITY_H
#include <math.h>
#include <stddef.h>

#define PI 3.14159265358979323846
#define MISSING ((double)NAN)

typedef struct {
    double value; /* NAN: not measured */
    double u;     /* standard uncertainty, same unit; NAN: unknown */
    size_t n;     /* observations behind it */
} quantity;

static inline quantity quantity_missing(void) { return (quantity){ MISSING, MISSING, 0 }; }

#endif
