/* Runs a fuzz target once over every file named: the committed corpus, in every test run, under any compiler.
 */
#include <stdio.h>
#include <stdlib.h>

#include "base/limits.h"
#include "io/file.h"

int LLVMFuzzerTestOneInput(const unsigned char *bytes, size_t n);

int main(int argc, char **argv) {
    for (int i = 1; i < argc; i++) {
        char *bytes = NULL;
        size_t n = 0;
        if (file_read(argv[i], LIMIT_FILE_BYTES, &bytes, &n, NULL) != ST_OK) return 1;
        LLVMFuzzerTestOneInput((const unsigned char *)bytes, n);
        free(bytes);
    }
    printf("%d passed, 0 failed\n", argc - 1);
    return argc < 2;
}
