/* Whatever the bytes: a spectrum in ascending order within its range, or a sentence. */
#include <stdint.h>
#include <stdlib.h>

#include "app/spectrum_file.h"

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n);

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t n) {
    spectrum s = { 0 };
    error e = { 0 };
    status st = spectrum_parse((const char *)bytes, n, "input", &s, &e);
    if ((st == ST_OK) != (e.text[0] == '\0') || st == ST_BUG) abort();
    if (st != ST_OK && (s.n || s.R || s.wavelength_nm)) abort();
    if (st == ST_OK && s.n < 2) abort();
    for (size_t i = 0; st == ST_OK && i < s.n; i++) {
        if (!(s.R[i] >= -0.02 && s.R[i] <= 1.05)) abort(); /* NaN fails too */
        if (!(s.wavelength_nm[i] >= 100.0 && s.wavelength_nm[i] <= 20000.0)) abort();
        if (i && !(s.wavelength_nm[i] > s.wavelength_nm[i - 1])) abort();
    }
    spectrum_free(&s);
    return 0;
}
