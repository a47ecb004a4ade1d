/* One place that calls the allocator, so that limits and fault injection hold everywhere. */
#include "base/mem.h"

#include <stdatomic.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"

static atomic_size_t fail_countdown;

void mem_fail_after(size_t n) { atomic_store(&fail_countdown, n); }

static int must_fail(void) {
    size_t left = atomic_load_explicit(&fail_countdown, memory_order_relaxed);
    if (!left) return 0;
    return atomic_fetch_sub(&fail_countdown, 1) == 1;
}

static int too_large(size_t n, size_t size) { return size && n > LIMIT_ALLOCATION_BYTES / size; }

void *mem_array(size_t n, size_t size) {
    if (too_large(n, size) || must_fail()) return NULL;
    return calloc(n ? n : 1, size ? size : 1);
}

void *mem_grow(void *old, size_t n, size_t size) {
    if (too_large(n, size) || must_fail()) return NULL;
    size_t bytes = n * size;
    return realloc(old, bytes ? bytes : 1);
}

char *mem_text_n(const char *text, size_t n) {
    char *copy = mem_array(n + 1, 1);
    if (copy) memcpy(copy, text, n);
    return copy;
}

char *mem_text(const char *text) { return mem_text_n(text, strlen(text)); }
