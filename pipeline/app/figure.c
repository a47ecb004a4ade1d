/* Which figure, of which samples, from where: the parts that all kinds share. */
#include "app/figure.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "app/figure_priv.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "io/json.h"
#include "report/rows.h"

static const struct {
    const char *name, *alias;
    figure_drawer *draw;
    size_t most;   /* samples */
    int by_sample; /* 0: takes all samples unless some are named */
} kinds[] = { { "spectra", NULL, figure_spectra, FIGURE_MOST, 1 },
              { "distribution", "sizes", figure_sizes, FIGURE_MOST, 1 },
              { "autocorrelation", "acf", figure_acf, FIGURE_MOST, 1 },
              { "psd", NULL, figure_psd, FIGURE_MOST, 1 },
              { "angles", NULL, figure_angles, FIGURE_MOST, 0 },
              { "window", NULL, figure_window, FIGURE_MOST, 0 },
              { "history", NULL, figure_history, FIGURE_MOST, 0 },
              { "wafer", "wafers", figure_wafers, FIGURE_MOST, 0 },
              { "micrograph", NULL, figure_micrograph, 1, 1 } };
enum { N_KINDS = sizeof kinds / sizeof kinds[0] };

const char *figure_kind(const char *name) {
    for (size_t i = 0; i < N_KINDS; i++)
        if (!strcmp(kinds[i].name, name) || (kinds[i].alias && !strcmp(kinds[i].alias, name))) return kinds[i].name;
    return NULL;
}

const char *figure_kinds(void) {
    return "spectra, distribution, autocorrelation, psd, angles, window, history, wafer or micrograph";
}

plot figure_plot(const char *title, const char *x_label, const char *y_label) {
    return (plot){ .title = title, .x_label = x_label, .y_label = y_label, .y_lo = MISSING, .y_hi = MISSING,
                   .target_lo = MISSING, .target_hi = MISSING };
}

/* What a reader who cannot see it is told: title, axes, and what is drawn. */
static void describe(const plot *p, textbuf *t) {
    text_addf(t, "%s. Across: %s. Up: %s.", p->title, p->x_label, p->y_label);
    for (size_t k = 0, any = 0; k < p->n_series; k++) {
        if (!p->series[k].label) continue;
        text_addf(t, "%s%s", any ? ", " : " Shown: ", p->series[k].label);
        any = 1;
    }
    for (size_t k = 0; k < p->n_rules; k++)
        if (p->rules[k].label) text_addf(t, "; %s", p->rules[k].label);
}

status figure_finish(const figure_request *q, const plot *p, const sheet_cells *cells, figure_file *out, error *e) {
    plot described = *p;
    textbuf words = { 0 };
    describe(p, &words);
    described.description = words.s;
    status st = text_check(&words, "a figure", e);
    if (!st) st = sheet_plot(&described, cells, &q->sheet, &out->bytes, &out->n, e);
    text_free(&words);
    return st;
}

char *figure_stem(const cJSON *image) {
    const char *overlay = json_member_text(image, "overlay"), *slash = strchr(overlay, '/');
    char *stem = slash ? mem_text(slash + 1) : NULL, *dot = stem ? strrchr(stem, '.') : NULL;
    if (dot) *dot = '\0';
    return stem;
}

figure_images figure_choose(const figure_request *q, const cJSON *run, size_t most) {
    figure_images c = { .n = 0 };
    const cJSON *m;
    for (size_t k = 0; k < q->n_samples; k++) {
        size_t of_this = 0;
        cJSON_ArrayForEach(m, cJSON_GetObjectItemCaseSensitive(run, "images")) {
            if (c.n == most || of_this == most / q->n_samples) break;
            if (strcmp(json_member_text(m, "sample"), q->samples[k]) || strcmp(json_member_text(m, "status"), "ok")) continue;
            c.image[c.n++] = m;
            of_this++;
        }
    }
    return c;
}

status figure_member(const figure_request *q, const cJSON *run, const char *name, const char *how, cJSON **owned, const cJSON **member,
                     error *e) {
    *owned = NULL;
    *member = cJSON_GetObjectItemCaseSensitive(run, name);
    if (q->data) {
        char *text = NULL;
        size_t n = 0;
        status st = input_read(q->data, &text, &n, e);
        if (!st && !(*owned = cJSON_ParseWithLength(text, n))) st = fail(e, ST_BAD_INPUT, "%s is no JSON; make it with: %s", q->data, how);
        free(text);
        *member = *owned;
        return st;
    }
    const char *missing = json_member_text(*member, "missing");
    if (*missing) return fail(e, ST_BAD_INPUT, "the run has no %s: %s", name, missing);
    if (!*member || cJSON_IsNull(*member))
        return fail(e, ST_BAD_INPUT, "the run in '%s' holds no %s; make one with: %s, and name the file with --data", q->dir, name, how);
    return ST_OK;
}

int figure_any(const double *v, size_t n) {
    for (size_t i = 0; i < n; i++)
        if (isfinite(v[i])) return 1;
    return 0;
}

int figure_wants(const figure_request *q, const char *sample) {
    for (size_t k = 0; k < q->n_samples; k++)
        if (!strcmp(q->samples[k], sample)) return 1;
    return !q->n_samples;
}

double figure_label(const char *name, const char *unit, textbuf *label) {
    static const char *const tails[] = { "_nm", "_per_um2", "_mA_cm2", "_deg", "_px" };
    size_t n = strlen(name);
    int share = strstr(name, "reflectance") != NULL;
    for (size_t k = 0; k < sizeof tails / sizeof tails[0]; k++) {
        size_t m = strlen(tails[k]);
        if (n <= m || strcmp(name + n - m, tails[k]) != 0) continue;
        n -= m;
        break;
    }
    for (size_t i = 0; i < n; i++) text_add_n(label, name[i] == '_' ? " " : name + i, 1);
    if (share) text_add(label, " (%)");
    else if (unit && *unit && strcmp(unit, "1") != 0) text_addf(label, " (%s)", strcmp(unit, "1/um2") ? unit : "1/\xc2\xb5m\xc2\xb2");
    return share ? 100.0 : 1.0;
}

/* Without a choice all samples, where one chart can carry them. */
static status settle_samples(figure_request *q, const cJSON *run, size_t most, int by_sample, error *e) {
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(run, "samples"), *s;
    size_t n = (size_t)cJSON_GetArraySize(list);
    for (size_t k = 0; k < q->n_samples; k++)
        if (!runfile_sample(run, q->samples[k]))
            return fail(e, ST_BAD_INPUT, "--sample: the run in '%s' has no sample '%s'", q->dir, q->samples[k]);
    if (q->n_samples > most) return fail(e, ST_BAD_INPUT, "a figure of the kind %s shows at most %zu samples", q->kind, most);
    if (q->n_samples || !by_sample) return ST_OK;
    if (n > most)
        return fail(e, ST_BAD_INPUT, "the run has %zu samples and this figure shows at most %zu: name them with --sample, such as '%s'", n,
                    most, json_member_text(cJSON_GetArrayItem(list, 0), "sample"));
    cJSON_ArrayForEach(s, list) q->samples[q->n_samples++] = json_member_text(s, "sample");
    return q->n_samples ? ST_OK : fail(e, ST_BAD_INPUT, "the run in '%s' has no sample", q->dir);
}

status figure_draw(const figure_request *given, const cJSON *run, char **bytes, size_t *n, error *e) {
    figure_request q = *given;
    figure_file out = { 0 };
    size_t k = 0;
    while (k < N_KINDS && strcmp(kinds[k].name, q.kind)) k++;
    if (k == N_KINDS) return fail(e, ST_BUG, "no figure is called '%s'", q.kind);
    status st = settle_samples(&q, run, kinds[k].most, kinds[k].by_sample, e);
    if (!st) st = kinds[k].draw(&q, run, &out, e);
    if (st) {
        free(out.bytes);
        return st;
    }
    *bytes = out.bytes;
    *n = out.n;
    return ST_OK;
}
