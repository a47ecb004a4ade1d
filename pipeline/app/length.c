#include "app/length.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"

int length_parse(const char *text, double *nm) {
    static const struct {
        const char *unit;
        double nm;
    } units[] = { { "pm", 1e-3 }, { "nm", 1.0 },        { "um", 1e3 },
                  { "mm", 1e6 },  { "\xc2\xb5m", 1e3 }, { "\xce\xbcm", 1e3 } };
    size_t n = strlen(text);
    for (size_t i = 0; i < sizeof units / sizeof units[0]; i++) {
        size_t k = strlen(units[i].unit);
        if (n <= k || strcmp(text + n - k, units[i].unit) != 0) continue;
        char *number = mem_text_n(text, n - k);
        double v = 0.0;
        int ok = number && number_parse(number, &v) && v > 0.0;
        free(number);
        if (ok) *nm = v * units[i].nm;
        return ok;
    }
    return 0;
}
