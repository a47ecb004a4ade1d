/* Materials and sun for the tests of optics: reads the CSV files of pipeline/optics/materials without help
 * from the io room, so that a test of optics rests on optics alone. Exits the test when a file is missing. */
#ifndef SWARD_TESTS_OPTICS_DATA_H
#define SWARD_TESTS_OPTICS_DATA_H
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "optics/reflectance.h"

enum { DATA_ROWS = 2000 };
typedef struct {
    size_t n;
    double a[DATA_ROWS], b[DATA_ROWS], c[DATA_ROWS];
} data_table;

static inline void data_read(const char *name, data_table *t) {
    char path[1024], line[512];
    snprintf(path, sizeof path, "%s/%s.csv", SWARD_MATERIALS, name);
    FILE *f = fopen(path, "r");
    if (!f) {
        printf("cannot read %s\n", path);
        exit(1);
    }
    for (t->n = 0; t->n < DATA_ROWS && fgets(line, (int)sizeof line, f);) {
        double *row[] = { &t->a[t->n], &t->b[t->n], &t->c[t->n] };
        char *at = line, *end = NULL;
        size_t got = 0;
        for (*row[2] = 0.0; got < 3; got++, at = end + 1) {
            *row[got] = strtod(at, &end);
            if (end == at) break;
            if (*end != ',') {
                got++;
                break;
            }
        }
        if (got >= 2) t->n++;
    }
    fclose(f);
}

/* A tabled material, a constant one ("=" n k), the sun. Freed by the test. */
static inline material data_material(const char *name) {
    static data_table t;
    material m = { 0 };
    error e = { 0 };
    data_read(name, &t);
    if (material_make(&m, name, "", t.n, t.a, t.b, t.c, &e)) printf("%s\n", e.text);
    return m;
}
static inline material data_constant(double n, double k) {
    material m = { 0 };
    error e = { 0 };
    if (material_constant(&m, n, k, &e)) printf("%s\n", e.text);
    return m;
}
static inline sun data_sun(void) {
    static data_table t;
    sun s = { 0 };
    error e = { 0 };
    data_read("am15g", &t);
    if (sun_make(&s, "ASTM G173-03", t.n, t.a, t.b, &e)) printf("%s\n", e.text);
    return s;
}

/* R at one wavelength; NAN when it fails. */
static inline double data_R(const stack *s, double wavelength_nm, double angle_deg, polarization p) {
    reflect_options o = reflect_defaults();
    error e = { 0 };
    double R = (double)NAN;
    o.angle_deg = angle_deg;
    o.polarization = p;
    if (reflectance(s, &o, &wavelength_nm, 1, &R, NULL, &e)) {
        printf("%s\n", e.text);
        return (double)NAN;
    }
    return R;
}

/* Weighted R on an even grid. */
static inline double data_weighted(const stack *s, const reflect_options *o, const sun *light, double lo,
                                   double hi, double step) {
    static double w[2000], R[2000];
    error e = { 0 };
    double mean = (double)NAN;
    size_t n = (size_t)lround((hi - lo) / step) + 1;
    for (size_t i = 0; i < n; i++) w[i] = lo + step * (double)i;
    if (reflectance(s, o, w, n, R, NULL, &e) || sun_weighted(light, w, R, n, lo, hi, &mean, &e))
        printf("%s\n", e.text);
    return mean;
}

/* A texture of height h sampled from f(t), t = depth/height, 0 at the tips. */
static inline profile data_profile(double height_nm, size_t nodes, double (*f)(double t, const void *context),
                                   const void *context) {
    profile p = { .n = nodes,
                  .depth_nm = malloc(nodes * sizeof(double)),
                  .solid = malloc(nodes * sizeof(double)) };
    for (size_t i = 0; i < nodes && p.depth_nm && p.solid; i++) {
        double t = (double)i / (double)(nodes - 1);
        p.depth_nm[i] = height_nm * t;
        p.solid[i] = f(t, context);
    }
    return p;
}
/* Solid share of features with s(zeta) = (1 - zeta)^power, zeta = 1 - t: 2 cone, 1 paraboloid. */
static inline double data_power(double t, const void *power) {
    const double *q = power;
    return pow(t, *q);
}
#endif
