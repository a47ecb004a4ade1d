/* Whatever the bytes: no crash, bounded memory, levels in 0..1, and a sentence exactly when it fails. */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "io/load.h"

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n);

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n) {
    load_options o = load_defaults();
    o.max_pixels = (size_t)1 << 20;
    o.bar_nm = 1000.0; /* look for a scale bar too */
    micrograph m = { 0 };
    error e = { 0 };
    status st = load_memory(bytes, n, &o, &m, &e);
    if ((st == ST_OK) != (e.text[0] == '\0') || st == ST_BUG) abort();
    if (st != ST_OK && m.px) abort();
    for (size_t i = 0; st == ST_OK && i < m.nx * m.ny; i++)
        if (!(m.px[i] >= 0.0f && m.px[i] <= 1.0f)) abort(); /* NaN fails too */
    if (st == ST_OK && !memchr(m.note, 0, sizeof m.note)) abort();
    if (st == ST_OK && fabs((double)m.ny - (double)(m.file_ny - m.strip_rows) * m.y_stretch) > 0.6) abort();
    micrograph_free(&m);
    return 0;
}
