/* Numbers print as the C library prints them with %.*g (C11 7.21.6.1), quickly or not. */
#include "base/number.h"

#include <stdint.h>
#include <stdio.h>

#include "check.h"

static uint64_t next(uint64_t *s) { /* splitmix64 */
    uint64_t z = *s += 0x9e3779b97f4a7c15u;
    z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
    z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
    return z ^ (z >> 31);
}

static int same(double v, int digits) {
    char wanted[NUMBER_TEXT], got[NUMBER_TEXT];
    snprintf(wanted, sizeof wanted, "%.*g", digits, fabs(v) < 1e-300 ? 0.0 : v);
    if (!strcmp(number_text(v, digits, got), wanted)) return 1;
    printf("digits %d: got %s, wanted %s\n", digits, got, wanted);
    return 0;
}

int main(void) {
    uint64_t seed = 4711;
    int wrong = 0;
    static const double odd[] = { 0.0, -0.0, 1.0, -1.0, 0.5, 1.5, 2.5, 0.125, 9.9995, 9.99951, 99999.5, 999999.5, 1e-4, 9.9999999e-5, 0.001, 0.01,
                                  0.1, 1e5, 1e6, 123456789.0, 1234567890.0, 1e9, 1e15, 300.0, 1200.0, 0.30000000000000004, 1e-310, 4.35, 1.005 };
    for (size_t i = 0; i < sizeof odd / sizeof odd[0]; i++)
        for (int digits = 1; digits <= 17; digits++) wrong += !same(odd[i], digits) + !same(-odd[i], digits);
    CHECK(wrong == 0);
    for (int i = 0; i < 200000 && wrong < 10; i++) {
        double u = (double)(next(&seed) >> 11) * 0x1p-53;
        double v = (u - 0.5) * pow(10.0, (double)(next(&seed) % 16) - 5.0);
        if (i % 3 == 0) v = round(v * 1e4) / 1e4; /* few digits, and their ties */
        wrong += !same(v, 1 + (int)(next(&seed) % 12));
    }
    CHECK(wrong == 0);
    return check_done();
}
