/* Structs as bytes and back: one function of the caller does both, so that the two cannot drift apart. Bytes are those of this
 * machine. */
#ifndef SWARD_APP_PACK_H
#define SWARD_APP_PACK_H
#include "base/text.h"

/* Either appends to `out`, or takes from bytes[at..n) when `out` is NULL. */
typedef struct {
    textbuf *out;
    const char *bytes;
    size_t at, n;
    int failed; /* reading: the bytes do not hold what was asked */
} pack;

void pack_bytes(pack *p, void *value, size_t size);
void pack_count(pack *p, size_t *v);
/* A text the struct owns, NULL included; read texts are the caller's, also after a failure. */
void pack_text(pack *p, char **s);
/* *n elements without pointers that the struct owns; read arrays are the caller's, also after a failure. */
void pack_array(pack *p, void **elements, size_t *n, size_t size);

#endif
