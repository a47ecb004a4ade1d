/* One step through text that claims to be UTF-8; shared by the CSV and JSON writers. Not for other rooms. */
#ifndef SWARD_IO_UTF8_PRIV_H
#define SWARD_IO_UTF8_PRIV_H
#include <stddef.h>

#define UTF8_REPLACEMENT "\xef\xbf\xbd" /* U+FFFD */

/* Length of the well-formed sequence at s (1..4), or 0: an invalid byte. s is NUL-terminated, *s is not 0.
 * Overlong forms, surrogates and values above U+10FFFF are invalid (RFC 3629). */
static inline size_t utf8_step(const char *s) {
    const unsigned char *p = (const unsigned char *)s;
    if (p[0] < 0x80) return 1;
    if (p[0] < 0xc2 || p[0] > 0xf4) return 0;
    size_t n = p[0] < 0xe0 ? 2 : p[0] < 0xf0 ? 3 : 4;
    for (size_t i = 1; i < n; i++)
        if ((p[i] & 0xc0) != 0x80) return 0;
    if (p[0] == 0xe0 && p[1] < 0xa0) return 0;
    if (p[0] == 0xed && p[1] > 0x9f) return 0;
    if (p[0] == 0xf0 && p[1] < 0x90) return 0;
    if (p[0] == 0xf4 && p[1] > 0x8f) return 0;
    return n;
}

#endif
