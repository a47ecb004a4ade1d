/* Differences sample by sample. Both runs measured with one instrument at one setting share its errors; what is left is
 * sampling. Where the protocols differ that is not so, and the notes say it. */
#include "app/compare.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/runfile.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"
#include "report/html.h"
#include "report/rows.h"

static const char *const compared[] = { "spacing_nm",   "density_per_um2", "size_d10_nm", "size_d50_nm", "size_d90_nm", "size_mean_nm",
                                        "size_gsd",     "bright_share",    "clark_evans", "weighted_reflectance" };
enum { N_COMPARED = sizeof compared / sizeof compared[0], DIGITS = 4, U_DIGITS = 3 };

void comparisons_free(comparisons *c) {
    free(c->rows);
    text_free(&c->notes);
    *c = (comparisons){ 0 };
}

/* What varies from run to run, from the budgets in results.json. */
static double run_to_run(const cJSON *run, const cJSON *row, const char *name_of) {
    if (!strcmp(name_of, "weighted_reflectance"))
        return json_member_number(cJSON_GetObjectItemCaseSensitive(row, "prediction"), "u_height");
    const char *spacing = json_member_text(cJSON_GetObjectItemCaseSensitive(run, "manifest"), "spacing");
    const char *name = strcmp(name_of, "spacing_nm") ? name_of : strcmp(spacing, "density") ? "spacing_acf_nm" : "spacing_hex_nm";
    const cJSON *budget = cJSON_GetObjectItemCaseSensitive(row, "budget");
    return json_member_number(cJSON_GetObjectItemCaseSensitive(budget, name), "sampling");
}

/* Whether a micrograph with these bytes was used for the sample. */
static int uses(const cJSON *run, const char *sample, const char *sha256) {
    const cJSON *m;
    cJSON_ArrayForEach(m, cJSON_GetObjectItemCaseSensitive(run, "images")) {
        if (!strcmp(json_member_text(m, "status"), "ok") && !strcmp(json_member_text(m, "sample"), sample) && !strcmp(json_member_text(m, "sha256"), sha256))
            return 1;
    }
    return 0;
}

/* Every micrograph that was used for the sample in one run was used in the other; 0 without any. */
static int within(const cJSON *run, const cJSON *other, const char *sample) {
    const cJSON *m;
    int any = 0;
    cJSON_ArrayForEach(m, cJSON_GetObjectItemCaseSensitive(run, "images")) {
        if (strcmp(json_member_text(m, "status"), "ok") != 0 || strcmp(json_member_text(m, "sample"), sample) != 0) continue;
        any = 1;
        if (!json_member_text(m, "sha256")[0] || !uses(other, sample, json_member_text(m, "sha256"))) return 0;
    }
    return any;
}

static comparison compare_one(const cJSON *before, const cJSON *after, const cJSON *a, const cJSON *b, const column *c, int same) {
    comparison d = { .sample = json_member_text(a, "sample"), .quantity = c->name, .unit = c->unit, .same = same };
    d.before = json_member_number(a, c->name);
    d.after = json_member_number(b, c->name);
    d.difference = d.after - d.before;
    if (same) {
        d.p = MISSING;
        d.real = fabs(d.difference) > 0.0;
        return d;
    }
    d.u = hypot(run_to_run(before, a, c->name), run_to_run(after, b, c->name));
    if (!(d.u > 0.0)) d.u = MISSING;
    d.p = erfc(fabs(d.difference) / d.u / sqrt(2.0));
    d.real = d.p < 0.05;
    return d;
}

static void note_missing(const cJSON *run, const cJSON *other, const char *which, textbuf *notes) {
    const cJSON *s;
    cJSON_ArrayForEach(s, cJSON_GetObjectItemCaseSensitive(run, "samples")) {
        if (!runfile_sample(other, json_member_text(s, "sample")))
            text_addf(notes, "%s is in the %s run only.\n", json_member_text(s, "sample"), which);
    }
}

static void note_manifest(const cJSON *before, const cJSON *after, textbuf *notes) {
    const cJSON *a = cJSON_GetObjectItemCaseSensitive(before, "manifest"), *b = cJSON_GetObjectItemCaseSensitive(after, "manifest");
    if (strcmp(json_member_text(a, "protocol_sha256"), json_member_text(b, "protocol_sha256")) != 0)
        text_add(notes, "The protocols differ: method parts need not cancel; measure both folders with one protocol.\n");
    if (strcmp(json_member_text(a, "version"), json_member_text(b, "version")) != 0)
        text_add(notes, "The program versions differ: run both folders with one version.\n");
}

status compare_runs(const cJSON *before, const cJSON *after, comparisons *out, error *e) {
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(before, "samples"), *a;
    comparisons c = { .rows = mem_array((size_t)cJSON_GetArraySize(list) * N_COMPARED, sizeof *c.rows) };
    size_t shared = 0, n_same = 0;
    if (!c.rows) return NO_MEMORY(e, "the comparison");
    cJSON_ArrayForEach(a, list) {
        const cJSON *b = runfile_sample(after, json_member_text(a, "sample"));
        if (!b) continue;
        shared++;
        int same = within(before, after, json_member_text(a, "sample")) && within(after, before, json_member_text(a, "sample"));
        n_same += (size_t)same;
        for (size_t k = 0; k < N_COMPARED; k++) {
            const column *col = column_find(sample_columns, n_sample_columns, compared[k]);
            if (!col) continue;
            comparison d = compare_one(before, after, a, b, col, same);
            if (isfinite(d.difference)) c.rows[c.n++] = d;
        }
    }
    note_missing(before, after, "first", &c.notes);
    note_missing(after, before, "second", &c.notes);
    if (n_same)
        text_addf(&c.notes, "%zu of %zu samples rest on the same micrographs in both runs: nothing was sampled anew, and what differs there is the work of "
                            "the protocol, the sheet or the program.\n", n_same, shared);
    if (n_same < shared) note_manifest(before, after, &c.notes);
    status st = shared ? text_check(&c.notes, "the notes", e)
                       : fail(e, ST_BAD_INPUT, "the two runs have no sample of the same name; samples are matched by name, which the "
                                               "sample sheet can give");
    if (st)
        comparisons_free(&c);
    else
        *out = c;
    return st;
}

/* Unlike the page the terminal line keeps the units of the tables; reflectance in percent needs no second reading. */
static const char *shown(const comparison *d, double v, int digits, char *text) {
    int percent = !strcmp(d->quantity, "weighted_reflectance");
    return percent ? number_percent(v, digits, text) : number_text(v, digits, text);
}

static const char *unit_of(const comparison *d) {
    return !strcmp(d->quantity, "weighted_reflectance") ? "%" : strcmp(d->unit, "1") ? d->unit : "";
}

void compare_text(const comparisons *c, textbuf *out) {
    char v[4][NUMBER_TEXT];
    size_t real = 0;
    const char *last = "";
    for (size_t i = 0; i < c->n; i++) {
        const comparison *d = &c->rows[i];
        if (strcmp(last, d->sample) != 0) text_addf(out, "%s%s\n", i ? "\n" : "", d->sample);
        last = d->sample;
        real += (size_t)d->real;
        text_addf(out, "  %-22s %10s -> %-10s %10s +- %-9s %-6s %s\n", d->quantity, shown(d, d->before, 15, v[0]),
                  shown(d, d->after, 15, v[1]), shown(d, d->difference, DIGITS, v[2]),
                  isfinite(d->u) ? shown(d, 2.0 * d->u, U_DIGITS, v[3]) : "?", unit_of(d),
                  d->same ? (d->real ? "real, same micrographs" : "unchanged") : d->real ? "real" : isfinite(d->u) ? "within sampling" : "uncertainty unknown");
    }
    text_addf(out, "\n%zu of %zu differences are real at 95 %% (+- is k = 2). About one in twenty would be called so without any change.\n",
              real, c->n);
    text_add(out, "Counted is what varies from run to run: sampling, for the reflectance the height. Method and pixel size cancel when "
                  "both runs were taken with the same instrument at the same setting.\n");
    if (c->notes.n) text_add(out, c->notes.s);
}

void compare_json(const comparisons *c, textbuf *out) {
    text_add(out, "{\n  \"differences\": [");
    for (size_t i = 0; i < c->n; i++) {
        const comparison *d = &c->rows[i];
        text_addf(out, "%s\n    {\"sample\": ", i ? "," : "");
        json_string(out, d->sample);
        text_addf(out, ", \"quantity\": \"%s\", \"unit\": \"%s\", \"before\": ", d->quantity, d->unit);
        json_number(out, d->before, 15);
        text_add(out, ", \"after\": ");
        json_number(out, d->after, 15);
        text_add(out, ", \"difference\": ");
        json_number(out, d->difference, DIGITS);
        text_add(out, ", \"difference_u\": ");
        json_number(out, d->u, U_DIGITS);
        text_add(out, ", \"p\": ");
        json_number(out, d->p, U_DIGITS);
        text_addf(out, ", \"same_micrographs\": %s, \"real\": %s}", d->same ? "true" : "false", d->real ? "true" : "false");
    }
    text_add(out, c->n ? "\n  ],\n  \"notes\": " : "],\n  \"notes\": ");
    json_string(out, c->notes.n ? c->notes.s : "");
    text_add(out, "\n}\n");
}
