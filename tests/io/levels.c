/* The detector behind a 16-bit file: low aligned, high aligned, bits repeated; and files that are truly 16 bits. */
#include "io/levels_priv.h"

#include <stdint.h>

#include "check.h"

enum { N = 4096 };

static int found(unsigned bits, int way, unsigned stride, unsigned *top, float px[N]) {
    for (unsigned i = 0; i < N; i++) {
        unsigned x = i * stride % (1u << bits), shift = 16 - bits;
        unsigned v = way == 0 ? x : way == 1 ? x << shift : (x << shift | x >> (bits - shift));
        px[i] = (float)((double)v / 65535.0);
    }
    return levels_find(px, N, top);
}

int main(void) {
    static float px[N];
    unsigned top;
    for (unsigned bits = 8; bits <= 14; bits += 2)
        for (int way = 0; way < 3; way++) {
            CHECK(found(bits, way, 7, &top, px) == (int)bits);
            unsigned want = way == 0 ? (1u << bits) - 1u : way == 1 ? 65536u - (1u << (16 - bits)) : 65535u;
            CHECK(top == want);
        }
    CHECK(found(12, 0, 1, &top, px) == 12);
    CHECK_NEAR((double)px[4095], 1.0, 0.0); /* saturated at the detector's top */
    CHECK_NEAR((double)px[1000], 1000.0 / 4095.0, 1e-7);
    CHECK(found(16, 0, 40503, &top, px) == 16 && top == 65535);
    for (unsigned i = 0; i < N; i++)
        px[i] = i % 2 ? 1.0f : 0.0f; /* black and white says nothing of the depth */
    CHECK(levels_find(px, N, &top) == 16);
    return check_done();
}
