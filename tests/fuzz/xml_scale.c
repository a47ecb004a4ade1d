/* Whatever claims to be XML: no crash, no entity, statements that are numbers. The first byte chooses the reader. */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "io/metadata/xml_scale_priv.h"

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n);

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n) {
    picture p = { .nx = 1024, .ny = 768 };
    if (!n) return 0;
    char *text = malloc(n);
    if (!text) return 0;
    memcpy(text, bytes + 1, n - 1);
    text[n - 1] = '\0';
    if (bytes[0] % 3 == 0) ome_read(text, n - 1, 1024, bytes[0] % 2 ? "a.tif" : NULL, &p);
    if (bytes[0] % 3 == 1) tag_34683_read(text, n - 1, 1024, &p);
    if (bytes[0] % 3 == 2) tag_34680_read(text, n - 1, 1024, &p);
    for (size_t i = 0; i < p.scales.n; i++)
        if (!(p.scales.list[i].x_nm > 0.0) || !isfinite(p.scales.list[i].y_nm)) abort();
    if (!memchr(p.note, 0, sizeof p.note) || !memchr(p.acquired_at, 0, sizeof p.acquired_at)) abort();
    free(text);
    return 0;
}
