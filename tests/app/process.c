/* The process in a few lines: silent below five etches, joined samples, newest phase only, targets. */
#include "app/process.h"

#include <stdio.h>
#include <string.h>

#include "app/series.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"

enum { ETCHES = 12, PER_ETCH = 2, ROWS = ETCHES * PER_ETCH };
static char samples[ROWS][8], times[ETCHES][32], bodies[ROWS][200];
static history_row rows[ROWS];

/* Two samples an etch; the etch means rise by 11 nm from 300 nm on, with a scatter of 1 nm. */
static history_list make(size_t n_etches) {
    for (size_t i = 0; i < n_etches; i++)
        for (size_t k = 0; k < PER_ETCH; k++) {
            size_t at = i * PER_ETCH + k;
            snprintf(times[i], sizeof times[i], "2026-03-%02dT08:00:00Z", (int)i + 1);
            snprintf(samples[at], sizeof samples[at], "S%02d%c", (int)i, k ? 'b' : 'a');
            snprintf(bodies[at], sizeof bodies[at], "{\"spacing_nm\": %.2f, \"etch_s\": \"%d\", \"density_per_um2\": null}",
                     300.0 + 11.0 * (double)i + (i % 3 == 0 ? 1.0 : -0.5) + (k ? 4.0 : -4.0), 60 + (int)i);
            rows[at] = (history_row){ .sample = samples[at], .lot = "", .wafer = "", .etched_at = times[i], .run_at = times[i],
                                      .fingerprint = "f", .row_json = bodies[at], .day = (double)i, .excluded = "" };
        }
    return (history_list){ rows, n_etches * PER_ETCH, NULL, 0 };
}

static int holds(textbuf *t, const char *words) {
    int there = t->s && strstr(t->s, words) != NULL;
    if (!there) printf("'%s' is not in:\n%s\n", words, t->s ? t->s : "(nothing)");
    return there;
}

/* The lines; the charts are looked at below. */
static status describe(const history_list *l, const history_notes *notes, const protocol *p, textbuf *t, error *e) {
    textbuf charts = { 0 };
    status st = process_describe(l, notes, p, t, &charts, e);
    text_free(&charts);
    return st;
}

int main(void) {
    error e = { 0 };
    history_notes none = { 0 };
    textbuf t = { 0 };
    static char spacing[] = "spacing_nm", density[] = "density_per_um2";
    target targets[] = { { .quantity = density, .min = 1.0, .max = 2.0, .error = ERROR_FULL }, { .quantity = spacing, .min = 250.0, .max = 380.0, .error = ERROR_FULL } };
    protocol p = { .targets = targets, .n_targets = 2 };
    history_list l = make(4);
    CHECK(describe(&l, &none, &p, &t, &e) == ST_OK && t.n == 0);
    l = make(7); /* now about 366; the limit comes in 2 */
    CHECK(describe(&l, &none, &p, &t, &e) == ST_OK);
    CHECK(holds(&t, "spacing drifts by +11 nm per etch (95 %: ") && holds(&t, "leaves its target in 2 etches (7 etches)"));
    CHECK(holds(&t, "nm per day") && holds(&t, "against its target: Ppk") && !strstr(t.s, "density"));
    text_free(&t);

    history_note cleaned = { .at = "2026-03-03", .text = "clean", .kind = "change", .initials = "", .day = 2.5 };
    history_notes notes = { &cleaned, 1, NULL };
    CHECK(describe(&l, &notes, &p, &t, &e) == ST_OK && t.n == 0); /* four etches since */
    l = make(12);
    CHECK(describe(&l, &notes, &p, &t, &e) == ST_OK && holds(&t, "(9 etches)"));
    CHECK(holds(&t, "it has left its target"));
    text_free(&t);
    p.n_targets = 0;
    CHECK(describe(&l, &none, &p, &t, &e) == ST_OK && holds(&t, "(12 etches)") && !strstr(t.s, "target"));
    text_free(&t);

    series s = { 0 };
    rows[5].excluded = "odd (KL)";
    CHECK(series_make(&l, &none, &(series_question){ .quantity = "spacing_nm", .setting = "etch_s" }, &s, &e) == ST_OK && s.n == 12 && s.n_excluded == 1);
    CHECK(s.etches[0].n == 2 && s.etches[2].n == 1 && !strcmp(s.unit, "nm") && !strcmp(s.etches[1].label, times[1]));
    CHECK_NEAR(s.etches[0].value, 301.0, 1e-9);
    CHECK_NEAR(s.etches[0].sd, 4.0 * sqrt(2.0), 1e-9);
    CHECK_NEAR(s.etches[3].setting, 63.0, 0.0);
    CHECK(isnan(s.etches[2].sd));
    series_free(&s);
    CHECK_FAILS(series_make(&l, &none, &(series_question){ .quantity = "spacing", .setting = NULL }, &s, &e), ST_BAD_INPUT, e, "did you mean 'spacing_nm'");
    CHECK_FAILS(series_make(&l, &none, &(series_question){ .quantity = "spacing_nm", .setting = "etch" }, &s, &e), ST_BAD_INPUT, e, "a number 'etch'");
    rows[3].row_json = "{";
    CHECK_FAILS(series_make(&l, &none, &(series_question){ .quantity = "spacing_nm", .setting = NULL }, &s, &e), ST_IO, e, "damaged row of the sample 'S01b'");
    CHECK_FAILS(describe(&l, &none, &p, &t, &e), ST_IO, e, "damaged row");
    rows[3].row_json = bodies[3];
    for (size_t k = 1; k <= 3; k++) {
        mem_fail_after(k);
        CHECK_FAILS(series_make(&l, &none, &(series_question){ .quantity = "spacing_nm", .setting = NULL }, &s, &e), ST_NO_MEMORY, e, "not enough memory");
        mem_fail_after(0);
    }
    text_free(&t);
    return check_done();
}
