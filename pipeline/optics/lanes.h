/* Many wavelengths side by side: complex numbers as two arrays, so that the compiler turns the plain loops of
 * this room into vector code (C99 complex would call the slow checked product). Internal to the room. */
#ifndef SWARD_OPTICS_LANES_H
#define SWARD_OPTICS_LANES_H
#include <complex.h>
#include <math.h>
#include <stddef.h>

enum { LANES = 64 }; /* wavelengths of one block: everything of a block stays in the first cache */

typedef struct {
    double re[LANES], im[LANES];
} lanes;

static inline double complex complex_of(double re, double im) {
    union {
        double part[2];
        double complex whole;
    } c = { .part = { re, im } }; /* C11 6.2.5: two parts in a row */
    return c.whole;
}
static inline double complex lane_get(const lanes *v, size_t i) { return complex_of(v->re[i], v->im[i]); }
static inline void lane_set(lanes *v, size_t i, double complex x) {
    v->re[i] = creal(x);
    v->im[i] = cimag(x);
}

/* The hot loops exist twice, for every x86-64 and for one with 256-bit vectors; without contraction and
 * without reductions both give the same bits. Sanitizers cannot run the load-time choice between them. */
#if defined(__x86_64__) && defined(__GLIBC__) && defined(__GNUC__) && !defined(__clang__) &&                 \
    !defined(__SANITIZE_ADDRESS__) && !defined(__SANITIZE_THREAD__)
#define HOT __attribute__((target_clones("default", "arch=x86-64-v3")))
#else
#define HOT
#endif

#endif
