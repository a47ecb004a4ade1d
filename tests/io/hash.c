/* SHA-256 on the examples that come with the standard, and across the block edges. */
#include <stdlib.h>

#include "check.h"
#include "io/file.h"

int main(void) {
    static const struct {
        const char *text, *digest;
    } examples[] = {
        /* FIPS 180-4 examples ("abc", two blocks) as published by NIST with the standard; the empty message:
           NIST CAVP */
        { "abc", "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad" },
        { "abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq",
          "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1" },
        { "", "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855" },
    };
    char hex[65];
    for (size_t i = 0; i < sizeof examples / sizeof examples[0]; i++) {
        sha256_hex(examples[i].text, strlen(examples[i].text), hex);
        CHECK(!strcmp(hex, examples[i].digest));
    }
    char *million = malloc(1000000); /* a million times "a": the long example of the standard */
    if (!million) return 1;
    memset(million, 'a', 1000000);
    sha256_hex(million, 1000000, hex);
    CHECK(!strcmp(hex, "cdc76e5c9914fb9281a1c7e284d73e67f1809a48a497200e046d39ccc7112cd0"));
    char other[65];
    for (size_t n = 50; n < 130; n++) { /* each length its own digest */
        sha256_hex(million, n, hex);
        sha256_hex(million, n + 1, other);
        CHECK(strlen(hex) == 64 && strcmp(hex, other) != 0);
    }
    char mark[17], changed[17];
    quick_mark(million, 1000, mark);
    for (size_t i = 0; i < 1000; i++) { /* one bit anywhere, one byte less */
        million[i] ^= 4;
        quick_mark(million, 1000, changed);
        CHECK(strlen(mark) == 16 && strcmp(mark, changed) != 0);
        million[i] ^= 4;
    }
    quick_mark(million, 999, changed);
    CHECK(strcmp(mark, changed) != 0);
    free(million);
    return check_done();
}
