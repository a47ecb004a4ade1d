/* Normal deviates for made-up series, the same on every machine. */
#ifndef SWARD_TESTS_NOISE_H
#define SWARD_TESTS_NOISE_H
#include <math.h>
#include <stdint.h>

#include "base/quantity.h"

/* splitmix64, and Box and Muller */
static inline double noise_normal(uint64_t *state) {
    double u[2];
    for (int i = 0; i < 2; i++) {
        uint64_t x = *state += 0x9e3779b97f4a7c15u;
        x = (x ^ (x >> 30)) * 0xbf58476d1ce4e5b9u;
        x = (x ^ (x >> 27)) * 0x94d049bb133111ebu;
        u[i] = ((double)((x ^ (x >> 31)) >> 11) + 0.5) / 9007199254740992.0;
    }
    return sqrt(-2.0 * log(u[0])) * cos(2.0 * PI * u[1]);
}

/* The sum of 12 uniform numbers, of xorshift64 (Marsaglia 2003). */
static inline double noise_of_twelve(uint64_t *state) {
    double s = -6.0;
    for (int i = 0; i < 12; i++) {
        *state ^= *state << 13;
        *state ^= *state >> 7;
        *state ^= *state << 17;
        s += (double)(*state >> 11) / 9007199254740992.0;
    }
    return s;
}
#endif
