/* Spacing and weighted reflectance of the samples in time order with their targets, then the control charts of the etches. The time order is the ledger's when there is one, else
 * etched_at of the samples; etches of the same time stand in the order of this run's rows. */
#include <cjson/cJSON.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"
#include "report/html.h"
#include "report/page.h"
#include "report/plot.h"

enum { MAX_ETCHES = 60 };

/* One point per etch. Names are borrowed from the samples or the parsed ledger. */
typedef struct {
    const char *name[MAX_ETCHES], *time[MAX_ETCHES];
    double x[MAX_ETCHES];
    double spacing[MAX_ETCHES], spacing_lo[MAX_ETCHES], spacing_hi[MAX_ETCHES];
    double R[MAX_ETCHES], R_lo[MAX_ETCHES], R_hi[MAX_ETCHES];
    plot_mark spacing_mark[MAX_ETCHES], R_mark[MAX_ETCHES];
    size_t n, left_out;
} etches;

plot_mark page_mark(const char *verdict) {
    if (verdict && !strcmp(verdict, "conforms")) return MARK_DISC;
    if (verdict && !strcmp(verdict, "undecided")) return MARK_DIAMOND;
    if (verdict && !strcmp(verdict, "fails")) return MARK_TRIANGLE;
    return MARK_SQUARE;
}

static const char *text_or_empty(const char *s) { return s ? s : ""; }

/* The place for the next etch; a further measurement of the last one replaces it, the oldest gives way when full. */
static size_t next_place(etches *t, const char *name, const char *time) {
    if (t->n && *time && !strcmp(t->name[t->n - 1], name) && !strcmp(t->time[t->n - 1], time))
        return t->n - 1;
    if (t->n < MAX_ETCHES) {
        t->x[t->n] = (double)t->n;
        return t->n++;
    }
    for (size_t i = 1; i < MAX_ETCHES; i++) {
        t->name[i - 1] = t->name[i];
        t->time[i - 1] = t->time[i];
        t->spacing[i - 1] = t->spacing[i];
        t->spacing_lo[i - 1] = t->spacing_lo[i];
        t->spacing_hi[i - 1] = t->spacing_hi[i];
        t->R[i - 1] = t->R[i];
        t->R_lo[i - 1] = t->R_lo[i];
        t->R_hi[i - 1] = t->R_hi[i];
        t->spacing_mark[i - 1] = t->spacing_mark[i];
        t->R_mark[i - 1] = t->R_mark[i];
    }
    t->left_out++;
    return MAX_ETCHES - 1;
}

static void add_etch(etches *t, const char *name, const char *time, double spacing, double spacing_u,
                     double R, const char *verdict) {
    size_t i = next_place(t, text_or_empty(name), text_or_empty(time));
    t->name[i] = text_or_empty(name);
    t->time[i] = text_or_empty(time);
    t->spacing[i] = spacing;
    t->spacing_lo[i] = spacing - 2.0 * spacing_u;
    t->spacing_hi[i] = spacing + 2.0 * spacing_u;
    t->R[i] = 100.0 * R;
    t->R_lo[i] = t->R_hi[i] = MISSING;
    t->spacing_mark[i] = t->R_mark[i] = page_mark(verdict);
}

/* Place among this run's samples, or their number. */
static size_t run_place(const results *r, const cJSON *row) {
    size_t i = 0;
    while (i < r->n_samples && strcmp(text_or_empty(r->samples[i].sample), json_member_text(row, "sample"))) i++;
    return i;
}

/* The ledger sorts etches of the same time by name; here they stand as in the tables of this run. Insertion keeps the rest. */
static void from_ledger(etches *t, const results *r, const cJSON *list, textbuf *out) {
    size_t n = (size_t)cJSON_GetArraySize(list), k = 0;
    const cJSON **order = mem_array(n, sizeof *order), *row;
    if (!order) {
        out->failed = 1;
        return;
    }
    cJSON_ArrayForEach(row, list) {
        size_t at = k++;
        for (; at && !strcmp(json_member_text(order[at - 1], "etched_at"), json_member_text(row, "etched_at")) &&
               *json_member_text(row, "etched_at") && run_place(r, row) < run_place(r, order[at - 1]);
             at--)
            order[at] = order[at - 1];
        order[at] = row;
    }
    for (size_t i = 0; i < n; i++)
        add_etch(t, json_member_text(order[i], "sample"), json_member_text(order[i], "etched_at"), json_member_number(order[i], "spacing_nm"),
                 json_member_number(order[i], "spacing_nm_u"), json_member_number(order[i], "weighted_reflectance"),
                 json_member_text(order[i], "verdict"));
    free(order);
}

/* Samples without a time come last; equal times keep the order of the rows (the pointers are into one array). */
static int by_time(const void *a, const void *b) {
    const sample_row *p = *(const sample_row *const *)a, *q = *(const sample_row *const *)b;
    const char *s = text_or_empty(p->etched_at), *t = text_or_empty(q->etched_at);
    int order = !*s || !*t ? !*s - !*t : strcmp(s, t);
    return order ? order : (p > q) - (p < q);
}

static void from_samples(etches *t, const results *r, textbuf *out) {
    const sample_row **order = mem_array(r->n_samples, sizeof(sample_row *));
    if (!order) {
        out->failed = 1;
        return;
    }
    for (size_t i = 0; i < r->n_samples; i++) order[i] = &r->samples[i];
    qsort(order, r->n_samples, sizeof(sample_row *), by_time);
    for (size_t i = 0; i < r->n_samples; i++) {
        const sample_row *s = order[i];
        add_etch(t, s->sample, s->etched_at, s->spacing_nm, s->spacing_nm_u, s->weighted_reflectance,
                 s->verdict);
    }
    free(order);
}

/* The ledger keeps no interval of R and no verdict per quantity: taken from this run's samples where it is the same
 * etch. Other points carry the verdict of the whole sample. */
static void add_details(etches *t, const results *r) {
    for (size_t i = 0; i < t->n; i++)
        for (size_t k = 0; k < r->n_samples; k++) {
            const sample_row *s = &r->samples[k];
            if (strcmp(t->name[i], text_or_empty(s->sample)) ||
                strcmp(t->time[i], text_or_empty(s->etched_at)))
                continue;
            t->R_lo[i] = 100.0 * s->weighted_reflectance_lo;
            t->R_hi[i] = 100.0 * s->weighted_reflectance_hi;
            t->spacing_mark[i] = page_mark(page_extra(r, s, "verdict_spacing_nm"));
            t->R_mark[i] = page_mark(page_extra(r, s, "verdict_weighted_reflectance"));
        }
}

static void find_target(const results *r, const char *name, double factor, plot *p) {
    p->target_lo = p->target_hi = MISSING;
    for (size_t k = 0; k < r->n_targets; k++)
        if (!strcmp(r->target_quantity[k], name)) {
            p->target_lo = r->target_min ? factor * r->target_min[k] : MISSING;
            p->target_hi = r->target_max ? factor * r->target_max[k] : MISSING;
            p->target_label = "target range";
        }
}

static int any_finite(const double *v, size_t n) {
    for (size_t i = 0; i < n; i++)
        if (isfinite(v[i])) return 1;
    return 0;
}

static void draw_series(const results *r, const etches *t, const char *name, textbuf *out) {
    int R = !strcmp(name, "weighted_reflectance");
    plot_series s = { .x = t->x,
                      .y = R ? t->R : t->spacing,
                      .lo = R ? t->R_lo : t->spacing_lo,
                      .hi = R ? t->R_hi : t->spacing_hi,
                      .n = t->n,
                      .style = PLOT_POINTS,
                      .marks = R ? t->R_mark : t->spacing_mark };
    plot p = { .title = R ? "Weighted reflectance over the etches" : "Spacing over the etches",
               .x_label = "samples, in time order of the etch",
               .y_label = R ? "weighted reflectance (%)" : "spacing (nm)",
               .from_zero = R,
               .y_lo = MISSING,
               .y_hi = MISSING,
               .names = t->name,
               .n_names = t->n,
               .series = &s,
               .n_series = 1,
               .width = 1040,
               .height = 300 };
    if (!any_finite(s.y, t->n)) return;
    find_target(r, name, R ? 100.0 : 1.0, &p);
    text_add(out, "<figure class=\"wide\">");
    plot_chart(&p, 0, NULL, out);
    text_add(out, R ? "<figcaption>Bars: 95 % interval of the prediction, where this run made "
                      "it.</figcaption></figure>\n"
                    : "<figcaption>Bars: \xc2\xb1 U (k = 2).</figcaption></figure>\n");
}

void page_series(const results *r, textbuf *out) {
    cJSON *ledger = r->history_json ? cJSON_Parse(r->history_json) : NULL;
    etches *t = mem_array(1, sizeof *t);
    if (!t) {
        out->failed = 1;
        goto done;
    }
    if (cJSON_IsArray(ledger) && cJSON_GetArraySize(ledger) > 0)
        from_ledger(t, r, ledger, out);
    else
        from_samples(t, r, out);
    add_details(t, r);
    if (!any_finite(t->spacing, t->n) && !any_finite(t->R, t->n)) goto done;
    text_add(out, "<section id=\"series\"><h2>Etch series</h2>\n<ul class=\"key\">"
                  "<li><span class=\"good\">\xe2\x97\x8f</span> conforms</li>"
                  "<li><span class=\"open\">\xe2\x97\x86</span> undecided</li>"
                  "<li><span class=\"bad\">\xe2\x96\xb2</span> fails</li><li>\xe2\x96\xa1 no target</li>"
                  "<li>on this quantity; etches of earlier runs: of the whole sample</li></ul>\n");
    draw_series(r, t, "spacing_nm", out);
    draw_series(r, t, "weighted_reflectance", out);
    if (t->left_out)
        text_addf(out,
                  "<p class=\"small\">The last %zu etches are drawn; %zu older ones are in the ledger.</p>\n",
                  t->n, t->left_out);
    page_control(r, out);
    if (r->history_note && *r->history_note) {
        text_add(out, "<p class=\"small\">");
        html_text(out, r->history_note);
        text_add(out, "</p>\n");
    }
    text_add(out, "</section>\n");
done:
    free(t);
    cJSON_Delete(ledger);
}
