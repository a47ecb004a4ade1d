/* What was remembered comes back bit for bit; a damaged entry is as good as none. */
#include "app/cache.h"

#include <stdlib.h>
#include <unistd.h>

#include "base/mem.h"
#include "check.h"
#include "io/file.h"
#include "io/memo.h"

static examined invent(void) {
    examined x = { .readable = 1, .relief = RELIEF_PORE, .reasons = FLAG(BLURRED), .flags = FLAG(LOW_ORDER), .n_cells = 3 };
    x.row = (image_row){ .px_nm = 3.17, .strip_px = -1, .bit_depth = 12, .n_features = 611, .spacing_acf_nm = (double)NAN, .sal_nm = 41.7 };
    x.row.file = mem_text("a/b \xff.tif");
    x.row.px_source = mem_text("");
    x.json = mem_text("\"detail\": \"x\"");
    x.cell_area_nm2 = mem_array(3, sizeof(double));
    for (int i = 0; i < 3; i++) x.cell_area_nm2[i] = 17.3 * i;
    x.figures[2].m = (measured){ 23.71, 0.13, 0.95, 611 };
    x.figures[2].u_between = (double)NAN;
    memcpy(x.hash, "fedc", 5);
    memcpy(x.outputs[OUTPUT_PROFILES], "abc", 4);
    return x;
}

static void same_examined(const examined *a, const examined *b) {
    CHECK(!strcmp(a->row.file, b->row.file) && !strcmp(a->row.px_source, "") && !strcmp(a->json, b->json));
    CHECK(!a->row.sample && !a->overlay && isnan(a->row.spacing_acf_nm) && a->row.strip_px == -1 && a->row.bit_depth == 12);
    CHECK_NEAR(a->row.sal_nm, 41.7, 0.0);
    CHECK(!memcmp(&a->figures[2].m, &b->figures[2].m, sizeof(measured)) && isnan(a->figures[2].u_between));
    CHECK(a->n_cells == 3 && !memcmp(a->cell_area_nm2, b->cell_area_nm2, 3 * sizeof(double)));
    CHECK(a->readable && a->relief == RELIEF_PORE && a->reasons == b->reasons && a->flags == b->flags);
    CHECK(!strcmp(a->hash, "fedc") && !strcmp(a->outputs[OUTPUT_PROFILES], "abc"));
}

static void damage(const char *folder, const char *path, const char *key) {
    char *bytes = NULL;
    size_t n = 0;
    error e = { 0 };
    examined back = { .readable = 0 };
    CHECK(file_read(path, 1 << 20, &bytes, &n, &e) == ST_OK);
    for (size_t at = 0; at < n; at += n / 23) {
        bytes[at] ^= 1;
        CHECK(file_write(path, bytes, n, &e) == ST_OK && !cache_get(folder, key, &back));
        bytes[at] ^= 1;
    }
    CHECK(file_write(path, bytes, n / 2, &e) == ST_OK && !cache_get(folder, key, &back));
    CHECK(file_write(path, "", 0, &e) == ST_OK && !cache_get(folder, key, &back));
    free(bytes);

    /* whole by its hash, but not what it says it is: every shorter body of a true one is refused and nothing leaks */
    examined x = invent();
    textbuf body = { 0 };
    pack p = { .out = &body };
    CHECK(cache_examined(&p, &x));
    for (size_t k = 0; k < body.n; k += 1 + body.n / 211) {
        textbuf part = { .s = body.s, .n = k };
        CHECK(memo_put(folder, key, "micrograph-1", &part, &e) == ST_OK && !cache_get(folder, key, &back));
    }
    text_free(&body);
    examined_free(&x);
}

static void predictions(const char *folder, const char *key) {
    error e = { 0 };
    prediction d = { .n = 2, .weighted = 0.0173, .weighted_hi = (double)NAN, .model = "facets", .slabs = 7 }, back = { .n = 0 };
    double **arrays[] = { &d.wavelength_nm, &d.R, &d.R_lo, &d.R_hi };
    for (int i = 0; i < 4; i++) {
        *arrays[i] = mem_array(2, sizeof(double));
        (*arrays[i])[1] = 0.25 + i;
    }
    CHECK(!cache_get_prediction(folder, key, &back));
    CHECK(cache_put_prediction(folder, key, &d, &e) == ST_OK && cache_get_prediction(folder, key, &back));
    CHECK(back.n == 2 && back.R_hi != d.R_hi && !strcmp(back.model, "facets") && back.slabs == 7 && isnan(back.weighted_hi));
    CHECK_NEAR(back.R_lo[1], 2.25, 0.0);
    CHECK_NEAR(back.weighted, 0.0173, 0.0);
    prediction_free(&back);
    d.model = "a model nobody knows yet"; /* not remembered rather than remembered wrongly */
    CHECK(cache_put_prediction(folder, "other", &d, &e) == ST_OK && !cache_get_prediction(folder, "other", &back));
    prediction_free(&d);
}

int main(void) {
    char folder[] = "/tmp/sward-cache-XXXXXX";
    error e = { 0 };
    examined x = invent(), back = { .readable = 0 };
    const char *key = "0123456789abcdef0123456789abcdef0123456789abcdef0123456789abcdef";
    CHECK(mkdtemp(folder) != NULL);
    CHECK(!cache_get(folder, key, &back));
    CHECK(cache_put(folder, key, &x, &e) == ST_OK && cache_get(folder, key, &back));
    same_examined(&back, &x);
    examined_free(&back);
    char *path = path_join(folder, "0123456789abcdef0123456789abcdef0123456789abcdef0123456789abcdef.micrograph-1");
    damage(folder, path, key);
    predictions(folder, key);
    unlink(path);
    free(path);
    path = path_join(folder, "0123456789abcdef0123456789abcdef0123456789abcdef0123456789abcdef.prediction-1");
    CHECK(!unlink(path));
    free(path);
    CHECK(!rmdir(folder));
    examined_free(&x);
    return check_done();
}
