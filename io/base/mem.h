/* Checked memory: products cannot overflow, one allocation has a ceiling, tests can make the n-th one fail. */
#ifndef SWARD_BASE_MEM_H
#define SWARD_BASE_MEM_H
#include <stddef.h>

#include "base/status.h"

/* n * size zeroed bytes, at least one; NULL when the product overflows, exceeds LIMIT_ALLOCATION_BYTES,
 * or memory is short. Free with free(). Thread-safe. */
void *mem_array(size_t n, size_t size) __attribute__((malloc, alloc_size(1, 2)));

/* Like realloc for n elements; the old block stays valid on failure. New bytes are not zeroed. */
void *mem_grow(void *old, size_t n, size_t size);

/* A copy of the text, or NULL. mem_text_n takes n bytes and adds the final 0. */
char *mem_text(const char *text);
char *mem_text_n(const char *text, size_t n);

/* Makes the n-th allocation from now on (counted over all threads) fail, 0 = never. For tests. */
void mem_fail_after(size_t n);

#define NO_MEMORY(e, what) fail((e), ST_NO_MEMORY, "not enough memory for %s", (what))

#endif
