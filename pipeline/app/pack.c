#include "app/pack.h"

#include <inttypes.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"

void pack_bytes(pack *p, void *value, size_t size) {
    if (p->out) {
        text_add_n(p->out, value, size);
    } else if (p->failed || size > p->n - p->at) {
        p->failed = 1;
    } else {
        memcpy(value, p->bytes + p->at, size);
        p->at += size;
    }
}

void pack_count(pack *p, size_t *v) {
    uint64_t wide = *v;
    pack_bytes(p, &wide, sizeof wide);
    if (!p->failed) *v = (size_t)wide;
}

void pack_text(pack *p, char **s) {
    size_t n = p->out && *s ? strlen(*s) + 1 : 0;
    pack_count(p, &n);
    if (p->out) {
        if (n) text_add_n(p->out, *s, n);
        return;
    }
    *s = NULL;
    if (p->failed || !n) return;
    if (n > p->n - p->at || p->bytes[p->at + n - 1] || !(*s = mem_text_n(p->bytes + p->at, n - 1))) p->failed = 1;
    else p->at += n;
}

void pack_array(pack *p, void **elements, size_t *n, size_t size) {
    pack_count(p, n);
    if (p->out) {
        if (*n) text_add_n(p->out, *elements, *n * size);
        return;
    }
    *elements = NULL;
    if (p->failed || *n > (p->n - p->at) / size || !(*elements = mem_array(*n, size))) {
        p->failed = 1;
        *n = 0;
    } else {
        pack_bytes(p, *elements, *n * size);
    }
}
