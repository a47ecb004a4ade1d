/* The dice of simulated run lengths and of shuffles: splitmix64 (Steele G.L. et al. (2014) OOPSLA), the same on every machine. */
#ifndef SWARD_JUDGE_DICE_PRIV_H
#define SWARD_JUDGE_DICE_PRIV_H
#include <stdint.h>

static inline uint64_t dice_next(uint64_t *state) {
    uint64_t x = *state += 0x9e3779b97f4a7c15u;
    x = (x ^ (x >> 30)) * 0xbf58476d1ce4e5b9u;
    x = (x ^ (x >> 27)) * 0x94d049bb133111ebu;
    return x ^ (x >> 31);
}

#endif
