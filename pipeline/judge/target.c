#include "judge/target.h"

const char *verdict_word(verdict v) {
    static const char *const words[] = { "no_target", "not_measured", "conforms", "undecided", "fails" };
    return words[v];
}
