/* Differences of two runs: the sampling parts add as variances, method and pixel size do not enter, and 1.96 u divides real from
 * not. Two-sided normal probability of 2 u: 0.0455 (tables of the normal distribution). */
#include "app/compare.h"

#include <stdlib.h>
#include <string.h>

#include "check.h"

static cJSON *run_of(const char *spacing, const char *protocol, const char *samples) {
    textbuf t = { 0 };
    text_addf(&t, "{\"manifest\": {\"spacing\": \"%s\", \"protocol_sha256\": \"%s\"}, \"images\": [], \"samples\": [%s]}", spacing, protocol,
              samples);
    cJSON *o = cJSON_Parse(t.s);
    CHECK(o != NULL);
    text_free(&t);
    return o;
}

static const comparison *find(const comparisons *c, const char *sample, const char *quantity) {
    for (size_t i = 0; i < c->n; i++)
        if (!strcmp(c->rows[i].sample, sample) && !strcmp(c->rows[i].quantity, quantity)) return &c->rows[i];
    return NULL;
}

static void check_differences(void) {
    static const char b1[] = "\"budget\": {\"spacing_acf_nm\": {\"sampling\": 3, \"method\": 12, \"pixel_size\": 3}}";
    textbuf first = { 0 }, second = { 0 };
    error e = { 0 };
    comparisons c = { 0 };
    text_addf(&first, "{\"sample\": \"a\", \"spacing_nm\": 300, %s, \"weighted_reflectance\": 0.02, \"prediction\": {\"u_height\": 0.003}},"
                      "{\"sample\": \"b\", \"spacing_nm\": 300, %s}, {\"sample\": \"gone\"}", b1, b1);
    text_add(&second, "{\"sample\": \"a\", \"spacing_nm\": 310, \"budget\": {\"spacing_acf_nm\": {\"sampling\": 4}}, "
                      "\"weighted_reflectance\": 0.03, \"prediction\": {\"u_height\": 0.004}},"
                      "{\"sample\": \"b\", \"spacing_nm\": 309.7, \"budget\": {\"spacing_acf_nm\": {\"sampling\": 4}}}, {\"sample\": \"new\"}");
    cJSON *x = run_of("autocorrelation", "1", first.s), *y = run_of("autocorrelation", "2", second.s);
    CHECK(compare_runs(x, y, &c, &e) == ST_OK && c.n == 3);
    const comparison *a = find(&c, "a", "spacing_nm"), *b = find(&c, "b", "spacing_nm"), *r = find(&c, "a", "weighted_reflectance");
    CHECK(a && b && r);
    if (a && b && r) {
        CHECK_NEAR(a->difference, 10.0, 1e-12);
        CHECK_NEAR(a->u, 5.0, 1e-12); /* 3 and 4 */
        CHECK_NEAR(a->p, 0.0455, 5e-5);
        CHECK(a->real);
        CHECK(!b->real); /* 1.94 u */
        CHECK_NEAR(r->u, 0.005, 1e-12);
    }
    CHECK(c.notes.s && strstr(c.notes.s, "gone is in the first run only") && strstr(c.notes.s, "new is in the second run only"));
    CHECK(c.notes.s && strstr(c.notes.s, "protocols differ"));
    textbuf t = { 0 };
    compare_text(&c, &t);
    CHECK(t.s && strstr(t.s, "within sampling") && strstr(t.s, "2 of 3 differences are real"));
    CHECK(t.s && strstr(t.s, "2 -> 3 ")); /* percent */
    text_free(&t);
    compare_json(&c, &t);
    cJSON *parsed = cJSON_Parse(t.s);
    CHECK(cJSON_GetArraySize(cJSON_GetObjectItemCaseSensitive(parsed, "differences")) == 3);
    cJSON_Delete(parsed);
    text_free(&t);
    comparisons_free(&c);
    cJSON_Delete(x);
    cJSON_Delete(y);
    text_free(&first);
    text_free(&second);
}

/* The same micrographs on both sides: any difference is real, however large the sampling part; another file ends that. */
static void check_same(void) {
    static const char run[] = "{\"manifest\": {}, \"images\": [{\"sample\": \"a\", \"status\": \"ok\", \"sha256\": \"%s\"}], \"samples\": [{\"sample\": \"a\", "
                              "\"spacing_nm\": %s, \"budget\": {\"spacing_acf_nm\": {\"sampling\": 9}}}]}";
    error e = { 0 };
    for (int other = 0; other < 2; other++) {
        textbuf t[2] = { { 0 }, { 0 } };
        comparisons c = { 0 };
        text_addf(&t[0], run, "ab", "300");
        text_addf(&t[1], run, other ? "cd" : "ab", "301");
        cJSON *x = cJSON_Parse(t[0].s), *y = cJSON_Parse(t[1].s);
        CHECK(compare_runs(x, y, &c, &e) == ST_OK && c.n == 1);
        CHECK(c.n == 1 && c.rows[0].same == !other && c.rows[0].real == !other);
        CHECK((c.notes.s && strstr(c.notes.s, "1 of 1 samples rest on the same micrographs")) == !other);
        comparisons_free(&c);
        cJSON_Delete(x);
        cJSON_Delete(y);
        text_free(&t[0]);
        text_free(&t[1]);
    }
}

/* Without a budget nothing is real; with the density's spacing its own budget counts; no shared sample is an error. */
static void check_unknown(void) {
    error e = { 0 };
    comparisons c = { 0 };
    cJSON *x = run_of("density", "1", "{\"sample\": \"a\", \"spacing_nm\": 300, \"budget\": {\"spacing_hex_nm\": {\"sampling\": 3}}, "
                                      "\"density_per_um2\": 10}");
    cJSON *y = run_of("density", "1", "{\"sample\": \"a\", \"spacing_nm\": 400, \"budget\": {\"spacing_hex_nm\": {\"sampling\": 4}}, "
                                      "\"density_per_um2\": 20}");
    cJSON *z = run_of("density", "1", "{\"sample\": \"z\"}");
    CHECK(compare_runs(x, y, &c, &e) == ST_OK);
    const comparison *s = find(&c, "a", "spacing_nm"), *d = find(&c, "a", "density_per_um2");
    CHECK(s && s->real && d && !d->real && !(d->u > 0.0) && !c.notes.n);
    if (s) CHECK_NEAR(s->u, 5.0, 1e-12);
    comparisons_free(&c);
    CHECK_FAILS(compare_runs(x, z, &c, &e), ST_BAD_INPUT, e, "no sample of the same name");
    cJSON_Delete(x);
    cJSON_Delete(y);
    cJSON_Delete(z);
}

int main(void) {
    check_differences();
    check_unknown();
    check_same();
    return check_done();
}
