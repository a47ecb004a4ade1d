/* Whatever the bytes: every cell is a string inside the table's own text, and a failure has a sentence. */
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "io/table.h"

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n);

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n) {
    csv c = { 0 };
    error e = { 0 };
    status st = csv_parse((const char *)bytes, n, "input", &c, &e);
    if ((st == ST_OK) != (e.text[0] == '\0') || st == ST_BUG) abort();
    for (size_t i = 0; st == ST_OK && i < c.n_rows * c.n_columns; i++)
        if (c.cells[i] < c.text || strlen(c.cells[i]) > n) abort();
    for (size_t i = 0; st == ST_OK && i < c.n_rows; i++)
        if (c.lines[i] < 2 || (i && c.lines[i] <= c.lines[i - 1])) abort();
    csv_free(&c);
    return 0;
}
