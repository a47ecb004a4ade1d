#include "base/flags.h"

#include <stdio.h>
#include <string.h>

static const char *const words[] = {
#define X(id, word, meaning) #word,
    FLAG_LIST(X)
#undef X
};
static const char *const meanings[] = {
#define X(id, word, meaning) meaning,
    FLAG_LIST(X)
#undef X
};
_Static_assert(FLAG_COUNT <= 64, "flags fit in 64 bits");

const char *flag_word(int bit) { return words[bit]; }
const char *flag_meaning(int bit) { return meanings[bit]; }

const char *flags_text(flags f, char *out, size_t size) {
    size_t n = 0;
    out[0] = '\0';
    for (int b = 0; b < FLAG_COUNT; b++)
        if (f >> b & 1) {
            int k = snprintf(out + n, size - n, "%s%s", n ? " " : "", words[b]);
            if (k < 0 || (size_t)k >= size - n) break;
            n += (size_t)k;
        }
    return out;
}
