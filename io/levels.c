/* How many levels a 16-bit file really has. Detectors of 8 to 14 bits are stored in 16-bit samples: low
 * aligned (0 to 4095), high aligned (multiples of 16), or stretched with the high bits repeated below. The top
 * of the detector, not of the file, is where it saturates: without this, clipping goes unseen. A rule of this
 * project: every pixel must fit, and at least 16 different levels must occur. */
#include "io/levels_priv.h"

#include <stdint.h>

enum { FEW = 16, LEVELS = 65536 };

typedef enum { LOW_ALIGNED, HIGH_ALIGNED, REPEATED, FITS_NOT } fit;

static fit fit_of(const uint8_t *used, unsigned bits) {
    unsigned shift = 16 - bits, low = 1, high = 1, repeated = 1;
    for (unsigned v = 0; v < LEVELS && (low || high || repeated); v++) {
        if (!(used[v / 8] >> v % 8 & 1)) continue;
        unsigned x = v >> shift;
        low &= v < 1u << bits;
        high &= x << shift == v;
        repeated &= (x << shift | x >> (bits - shift)) == v;
    }
    return low ? LOW_ALIGNED : high ? HIGH_ALIGNED : repeated ? REPEATED : FITS_NOT;
}

int levels_find(float *px, size_t n, unsigned *top) {
    uint8_t used[LEVELS / 8] = { 0 };
    size_t different = 0;
    *top = LEVELS - 1;
    for (size_t i = 0; i < n; i++) {
        unsigned v = (unsigned)(px[i] * 65535.0f + 0.5f);
        different += !(used[v / 8] >> v % 8 & 1);
        used[v / 8] = (uint8_t)(used[v / 8] | 1u << v % 8);
    }
    if (different < FEW) return 16;
    for (unsigned bits = 8; bits < 16; bits += 2) {
        fit f = fit_of(used, bits);
        if (f == FITS_NOT) continue;
        *top = f == REPEATED      ? LEVELS - 1
               : f == LOW_ALIGNED ? (1u << bits) - 1u
                                  : ((1u << bits) - 1u) << (16 - bits);
        if (f != REPEATED)
            for (size_t i = 0; i < n; i++) {
                unsigned v = (unsigned)(px[i] * 65535.0f + 0.5f);
                px[i] = v < *top ? (float)((double)v / (double)*top) : 1.0f;
            }
        return (int)bits;
    }
    return 16;
}
