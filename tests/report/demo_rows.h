/* Invented rows for the tests of this room: two samples, three micrographs (used, excluded, unreadable), one spectrum. */
#ifndef SWARD_TESTS_DEMO_ROWS_H
#define SWARD_TESTS_DEMO_ROWS_H
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "report/results.h"

enum { DEMO_IMAGES = 3, DEMO_SAMPLES = 2, DEMO_WAVELENGTHS = 4 };

typedef struct {
    image_row images[DEMO_IMAGES];
    sample_row samples[DEMO_SAMPLES];
    spectrum_row spectra[DEMO_WAVELENGTHS];
    char *extra[DEMO_SAMPLES][2];
    const char *extra_names[2], *target_quantity[1], *image_json[DEMO_IMAGES];
    double target_min[1], target_max[1];
    results r;
} demo;

/* All numbers missing: doubles NAN, counts -1. */
static inline void demo_image_empty(image_row *m) {
    *m = (image_row){ 0 };
    for (size_t i = 0; i < n_image_columns; i++) {
        char *at = (char *)m + image_columns[i].offset;
        double missing = MISSING;
        long none = -1;
        if (image_columns[i].kind == COL_NUMBER) memcpy(at, &missing, sizeof missing);
        if (image_columns[i].kind == COL_COUNT) memcpy(at, &none, sizeof none);
    }
}
static inline void demo_sample_empty(sample_row *s) {
    *s = (sample_row){ 0 };
    for (size_t i = 0; i < n_sample_columns; i++) {
        char *at = (char *)s + sample_columns[i].offset;
        double missing = MISSING;
        long none = -1;
        if (sample_columns[i].kind == COL_NUMBER) memcpy(at, &missing, sizeof missing);
        if (sample_columns[i].kind == COL_COUNT) memcpy(at, &none, sizeof none);
    }
}

static inline void demo_make(demo *d) {
    static char used[] = "ok", excluded[] = "excluded", unreadable[] = "unreadable",
                few[] = "few_pixels blurred";
    static char hostile[] = "=a/<img src=x onerror=\"alert(1)\">&'\xff.tif", second[] = "b.png",
                third[] = "c.tif";
    static char broken[] = "the file ends after 12 bytes", s1[] = "etch 1", s2[] = "@etch <2>",
                tag[] = "tag 34118";
    static char conforms[] = "conforms", undecided[] = "undecided", mean[] = "mean", sheet[] = "sheet";
    static char t1[] = "2026-03-14T09:30:00Z", t2[] = "2026-03-13T09:30:00Z", why[] = "inside <280..420> nm";
    memset(d, 0, sizeof *d);
    for (size_t i = 0; i < DEMO_IMAGES; i++) demo_image_empty(&d->images[i]);
    for (size_t i = 0; i < DEMO_SAMPLES; i++) demo_sample_empty(&d->samples[i]);
    image_row *m = d->images;
    m[0].file = hostile;
    m[0].sample = s1;
    m[0].status = used;
    m[0].px_nm = 4.1015625;
    m[0].px_source = tag;
    m[0].n_features = 831;
    m[0].spacing_acf_nm = 351.23456;
    m[0].spacing_acf_nm_u = 8.12345;
    m[0].density_per_um2 = 9.8765432;
    m[1].file = second;
    m[1].sample = s1;
    m[1].status = excluded;
    m[1].reason = few;
    m[2].file = third;
    m[2].sample = s2;
    m[2].status = unreadable;
    m[2].reason = broken;
    sample_row *s = d->samples;
    s[0].sample = s1;
    s[0].etched_at = t1;
    s[0].n_images = 2;
    s[0].n_used = 1;
    s[0].spacing_nm = 351.23456;
    s[0].spacing_nm_u = 8.12345;
    s[0].height_source = sheet;
    s[0].weighted_reflectance = 0.0123456;
    s[0].weighted_reflectance_lo = 0.0101;
    s[0].weighted_reflectance_hi = 0.0172;
    s[0].verdict = conforms;
    s[0].verdict_reasons = why;
    s[1].sample = s2;
    s[1].etched_at = t2;
    s[1].n_images = 1;
    s[1].n_used = 0;
    s[1].verdict = undecided;
    for (size_t i = 0; i < DEMO_SAMPLES; i++) {
        d->extra[i][0] = i ? undecided : conforms;
        d->extra[i][1] = i ? NULL : hostile;
        s[i].extra = d->extra[i];
        s[i].n_extra = 2;
    }
    for (size_t i = 0; i < DEMO_WAVELENGTHS; i++)
        d->spectra[i] = (spectrum_row){ s1,
                                        300.0 + 100.0 * (double)i,
                                        0.0,
                                        mean,
                                        0.0123456 + 0.001 * (double)i,
                                        i == 2 ? MISSING : 0.01,
                                        i == 2 ? MISSING : 0.02 };
    d->extra_names[0] = "verdict_spacing_nm";
    d->extra_names[1] = "operator";
    d->target_quantity[0] = "spacing_nm";
    d->target_min[0] = 280.0;
    d->target_max[0] = 420.0;
    d->image_json[0] = "\"pixels\": {\"spacing_px\": 85.6}";
    d->r = (results){ .images = d->images,
                      .n_images = DEMO_IMAGES,
                      .image_json = d->image_json,
                      .samples = d->samples,
                      .n_samples = DEMO_SAMPLES,
                      .sample_extra = d->extra_names,
                      .n_sample_extra = 2,
                      .spectra = d->spectra,
                      .n_spectra = DEMO_WAVELENGTHS,
                      .manifest_json =
                          "{\"program\": \"sward\", \"inputs\": [{\"file\": \"<b>\", \"sha256\": \"ab\"}]}",
                      .summary = "1 of 2 samples conforms.\nRe-take <c.tif>.",
                      .title = "line 3 & <grass>",
                      .target_quantity = d->target_quantity,
                      .target_min = d->target_min,
                      .target_max = d->target_max,
                      .n_targets = 1 };
}

/* The k-th comma-separated cell (no quoted commas before it) of line `row` (0 the header), into out. */
static inline void demo_csv_cell(const char *text, size_t row, size_t k, char *out, size_t size) {
    out[0] = '\0';
    for (; row && text; row--) {
        text = strchr(text, '\n');
        if (text) text++;
    }
    for (; k && text; k--) {
        text = strchr(text, ',');
        if (text) text++;
    }
    if (!text) return;
    size_t n = strcspn(text, ",\n");
    if (n >= size) n = size - 1;
    memcpy(out, text, n);
    out[n] = '\0';
}

static inline size_t demo_column(const column *c, size_t n, const char *name) {
    for (size_t i = 0; i < n; i++)
        if (!strcmp(c[i].name, name)) return i;
    return n;
}

#endif
