/* Whatever the text of an instrument says: no crash, every statement a positive number with a terminated name, notes
 * terminated. The first byte chooses the reader. */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "io/metadata/instrument_priv.h"
#include "io/metadata/keytext_priv.h"
#include "io/metadata/scaletext_priv.h"

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n);

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n) {
    picture p = { .nx = 1024, .ny = 768 };
    if (!n) return 0;
    char *text = malloc(n);
    if (!text) return 0;
    size_t length = n - 1;
    memcpy(text, bytes + 1, length);
    text[length] = '\0';
    keytext_narrow(text, &length);
    switch (bytes[0] % 6) {
    case 0:
        tag_34118_read(text, 1024, &p);
        break;
    case 1:
        tag_34682_read(text, 1024, 768, &p);
        break;
    case 2:
        main_block_read(text, SCALE_SIDECAR, "sidecar", 1024, 768, &p);
        break;
    case 3:
        sem_image_file_read(text, "a.tif", 1024, 768, &p);
        break;
    case 4:
        dollar_block_read(text, 1024, &p);
        break;
    default:
        (void)scaletext_lines(text, SCALE_SIDECAR, "sidecar", "a.txt", &p.scales);
        (void)scaletext_json(text, length, SCALE_SIDECAR, "sidecar", "a.txt", &p.scales);
    }
    if (p.scales.n > MAX_SCALES || p.strip_stated > 768) abort();
    for (size_t i = 0; i < p.scales.n; i++) {
        const scale *s = &p.scales.list[i];
        if (!(s->x_nm > 0.0) || !(s->y_nm > 0.0) || !isfinite(s->x_nm) || !memchr(s->name, 0, sizeof s->name))
            abort();
    }
    if (!memchr(p.note, 0, sizeof p.note) || !memchr(p.scales.note, 0, sizeof p.scales.note)) abort();
    if (!memchr(p.facts.detector, 0, sizeof p.facts.detector) ||
        !memchr(p.acquired_at, 0, sizeof p.acquired_at))
        abort();
    free(text);
    return 0;
}
