/* One line a sample: verdict, every targeted quantity with its uncertainty and a small picture of value, interval and target,
 * height, remarks. All pictures of a column share their axis. Values show
 * the digits their uncertainty leaves; all digits of samples.csv and results.json stand behind them in the page (report/html.h). */
#include <math.h>
#include <string.h>

#include "base/number.h"
#include "base/quantity.h"
#include "report/html.h"
#include "report/page.h"

const column *page_sample_column(const char *name, const char *suffix) {
    textbuf full = { 0 };
    text_addf(&full, "%s%s", name, suffix);
    const column *c = full.failed ? NULL : column_find(sample_columns, n_sample_columns, full.s);
    text_free(&full);
    return c;
}

static void add_unit(textbuf *out, const column *c) {
    if (page_percent(c->name)) {
        text_add(out, " <span class=\"unit\">%</span>");
    } else if (c->unit[0] && strcmp(c->unit, "1")) {
        text_add(out, " <span class=\"unit\">");
        html_text(out, c->unit);
        text_add(out, "</span>");
    }
}

void page_sample_value(textbuf *out, const sample_row *s, const char *name) {
    const column *c = page_sample_column(name, ""), *lo = page_sample_column(name, "_lo"),
                 *hi = page_sample_column(name, "_hi");
    char cell[NUMBER_TEXT];
    if (!c) {
        text_add(out, "\xe2\x80\x93");
        return;
    }
    int interval = lo && hi && *column_cell(lo, s, cell) && *column_cell(hi, s, cell);
    if (interval) { /* of no common place where it spans decades: two digits each */
        html_number(out, c, s, page_percent(name), 2);
        text_add(out, " <span class=\"u\">(");
        html_number(out, lo, s, page_percent(name), 2);
        text_add(out, " to ");
        html_number(out, hi, s, page_percent(name), 2);
        text_add(out, ")</span>");
    } else {
        html_value(out, c, page_sample_column(name, "_u"), s, page_percent(name));
    }
    if (*column_cell(c, s, cell)) add_unit(out, c);
}

static void add_limit(textbuf *out, const column *c, const char *name, double v) {
    char text[NUMBER_TEXT];
    int digits = c ? c->digits : 6;
    text_add(out, page_percent(name) ? number_percent(v, digits, text) : number_text(v, digits, text));
}

static double limit_of(const double *limits, size_t k) { return limits ? limits[k] : MISSING; }

void page_range(textbuf *out, const results *r, size_t k) {
    const char *name = r->target_quantity[k];
    const column *c = page_sample_column(name, "");
    double lo = limit_of(r->target_min, k), hi = limit_of(r->target_max, k);
    if (isfinite(lo) && isfinite(hi)) {
        add_limit(out, c, name, lo);
        text_add(out, " to ");
        add_limit(out, c, name, hi);
    } else if (isfinite(hi)) {
        text_add(out, "at most ");
        add_limit(out, c, name, hi);
    } else if (isfinite(lo)) {
        text_add(out, "at least ");
        add_limit(out, c, name, lo);
    }
    if (c) add_unit(out, c);
}

/* A column of the table: a quantity, its target if any, and the axis of its pictures. */
typedef struct {
    const char *name;
    size_t target; /* r->n_targets: none */
    double lo, hi;
} shown;
enum { MAX_SHOWN = 12, STRIP_WIDTH = 128, STRIP_HEIGHT = 20 };

double page_sample_number(const sample_row *s, const char *name, const char *suffix) {
    const column *c = page_sample_column(name, suffix);
    char buffer[NUMBER_TEXT];
    double v;
    return c && c->kind == COL_NUMBER && number_parse(column_cell(c, s, buffer), &v) ? v : MISSING;
}

/* The interval of about 95 %: its own columns, else twice the uncertainty. */
static void interval(const sample_row *s, const char *name, double *v, double *lo, double *hi) {
    double u = page_sample_number(s, name, "_u");
    *v = page_sample_number(s, name, "");
    *lo = page_sample_number(s, name, "_lo");
    *hi = page_sample_number(s, name, "_hi");
    if (!isfinite(*lo)) *lo = *v - 2.0 * u;
    if (!isfinite(*hi)) *hi = *v + 2.0 * u;
}

static void widen(shown *q, double v) {
    if (!isfinite(v)) return;
    q->lo = fmin(q->lo, v);
    q->hi = fmax(q->hi, v);
}

static shown make_column(const results *r, const char *name, size_t target) {
    shown q = { name, target, HUGE_VAL, -HUGE_VAL };
    for (size_t i = 0; i < r->n_samples; i++) {
        double v[3];
        interval(&r->samples[i], name, &v[0], &v[1], &v[2]);
        for (int k = 0; k < 3; k++) widen(&q, v[k]);
    }
    if (target < r->n_targets) {
        widen(&q, limit_of(r->target_min, target));
        widen(&q, limit_of(r->target_max, target));
    }
    if (page_percent(name)) q.lo = fmin(q.lo, 0.0);
    double margin = q.hi > q.lo ? 0.05 * (q.hi - q.lo) : 1.0;
    q.lo -= margin;
    q.hi += margin;
    return q;
}

static size_t choose_columns(const results *r, shown *q) {
    static const char *const always[] = { "spacing_nm", "weighted_reflectance" };
    size_t n = 0;
    for (size_t k = 0; k < r->n_targets && n < MAX_SHOWN - 2; k++) q[n++] = make_column(r, r->target_quantity[k], k);
    for (size_t a = 0; a < 2; a++) {
        int there = 0;
        for (size_t k = 0; k < n; k++) there |= !strcmp(q[k].name, always[a]);
        if (!there) q[n++] = make_column(r, always[a], r->n_targets);
    }
    return n;
}

static const char *verdict_of(const results *r, const sample_row *s, const shown *q) {
    textbuf name = { 0 };
    text_addf(&name, "verdict_%s", q->name);
    const char *word = name.failed || q->target >= r->n_targets ? "no_target" : page_extra(r, s, name.s);
    text_free(&name);
    return word && *word ? word : "not_measured";
}

static const char *colour_of(const char *verdict) {
    return !strcmp(verdict, "fails")       ? "var(--red)"
           : !strcmp(verdict, "undecided") ? "var(--amber)"
           : !strcmp(verdict, "conforms")  ? "var(--teal)"
                                           : "var(--blue)";
}

/* Hidden from screen readers: the numbers stand beside it. */
static void add_strip(const results *r, const sample_row *s, const shown *q, textbuf *out) {
    double v, lo, hi, scale = STRIP_WIDTH / (q->hi - q->lo);
    interval(s, q->name, &v, &lo, &hi);
    if (!isfinite(v)) return;
    text_addf(out, "<svg class=\"strip\" viewBox=\"0 0 %d %d\" aria-hidden=\"true\">", STRIP_WIDTH, STRIP_HEIGHT);
    if (q->target < r->n_targets) {
        double from = limit_of(r->target_min, q->target), to = limit_of(r->target_max, q->target);
        double left = isfinite(from) ? (from - q->lo) * scale : 0.0, right = isfinite(to) ? (to - q->lo) * scale : STRIP_WIDTH;
        text_addf(out, "<rect x=\"%.1f\" y=\"2\" width=\"%.1f\" height=\"16\" style=\"fill:var(--teal)\" fill-opacity=\".16\"/>", left,
                  fmax(0.0, right - left));
        for (int k = 0; k < 2; k++)
            if (isfinite(k ? to : from))
                text_addf(out, "<path d=\"M%.1f 2v16\" style=\"stroke:var(--teal)\" stroke-width=\"1\"/>", k ? right : left);
    }
    if (isfinite(lo) && isfinite(hi))
        text_addf(out, "<path d=\"M%.1f 10H%.1f\" style=\"stroke:%s\" stroke-width=\"2.4\"/>", (lo - q->lo) * scale,
                  (hi - q->lo) * scale, colour_of(verdict_of(r, s, q)));
    text_addf(out, "<circle cx=\"%.1f\" cy=\"10\" r=\"4\" style=\"fill:%s;stroke:var(--paper)\"/></svg>", (v - q->lo) * scale,
              colour_of(verdict_of(r, s, q)));
}

static void table_head(const results *r, const shown *q, size_t n, textbuf *out) {
    text_add(out, "<thead><tr><th scope=\"col\">Sample</th><th scope=\"col\">Verdict</th>");
    for (size_t k = 0; k < n; k++) {
        text_add(out, "<th scope=\"col\">");
        html_text(out, page_quantity(q[k].name));
        if (q[k].target < r->n_targets) {
            text_add(out, "<br><span class=\"unit\">target: ");
            page_range(out, r, q[k].target);
            text_add(out, "</span>");
        } else {
            text_add(out, "<br><span class=\"unit\">no target</span>");
        }
        text_add(out, "</th>");
    }
    text_add(out, "<th scope=\"col\">Height</th><th scope=\"col\">Remarks</th></tr></thead>\n");
}

/* "2026-03-17 09:05 UTC" for the ledger's form; anything else as it is. */
static void add_time(textbuf *out, const char *t) {
    if (t && strlen(t) == 20 && t[10] == 'T' && t[19] == 'Z')
        text_addf(out, "<time datetime=\"%s\">%.10s %.5s UTC</time>", t, t, t + 11);
    else
        html_text(out, t);
}

static void name_cell(const results *r, size_t i, textbuf *out) {
    const sample_row *s = &r->samples[i];
    const char *detail[][2] = { { "lot ", s->lot }, { "wafer ", s->wafer }, { "", s->position } };
    text_addf(out, "<tr id=\"sample-%zu\"><th scope=\"row\">", i + 1);
    html_text(out, s->sample);
    text_add(out, "<small>");
    int any = 0;
    for (size_t k = 0; k < 3; k++)
        if (detail[k][1] && *detail[k][1]) {
            text_add(out, any++ ? " \xc2\xb7 " : "");
            text_add(out, detail[k][0]);
            html_text(out, detail[k][1]);
        }
    text_add(out, "</small><small>");
    add_time(out, s->etched_at);
    text_addf(out, "%s%ld of %ld used</small></th>\n<td>", s->etched_at && *s->etched_at ? " \xc2\xb7 " : "", s->n_used,
              s->n_images);
    html_badge(out, s->verdict);
    text_add(out, "</td>");
}

/* The sentence of the verdict as far as it is no plain "conforms": which quantity, which limit. */
static void remarks_cell(const results *r, size_t i, const shown *q, size_t n, textbuf *out) {
    const sample_row *s = &r->samples[i];
    int any = 0;
    text_add(out, "<td class=\"remarks\">");
    for (size_t k = 0; k < n; k++) {
        const char *word = verdict_of(r, s, &q[k]);
        if (strcmp(word, "fails") && strcmp(word, "undecided")) continue;
        text_add(out, any++ ? "<br>" : "");
        page_reason(out, r, i, q[k].target, word);
    }
    if (s->flags && *s->flags) {
        text_add(out, any ? "<br>" : "");
        page_flags(out, s->flags);
    }
    text_add(out, "</td></tr>\n");
}

int page_find_miss(const results *r, const sample_row *s, size_t target, page_miss *out) {
    double min = limit_of(r->target_min, target), max = limit_of(r->target_max, target);
    page_miss m = { .target = target };
    interval(s, r->target_quantity[target], &m.value, &m.lo, &m.hi);
    m.limit = !isfinite(max) ? min : !isfinite(min) ? max : fabs(m.value - max) < fabs(m.value - min) ? max : min;
    *out = m;
    return isfinite(m.value) && isfinite(m.limit);
}

void page_reason(textbuf *out, const results *r, size_t sample, size_t target, const char *word) {
    const sample_row *s = &r->samples[sample];
    const char *name = r->target_quantity[target];
    const column *c = page_sample_column(name, "");
    page_miss m;
    html_text(out, page_quantity(name));
    text_add(out, " ");
    page_sample_value(out, s, name);
    if (!page_find_miss(r, s, target, &m)) return;
    text_add(out, strcmp(word, "fails") ? " is not clear of the limit " : m.value > m.limit ? " is above the limit " : " is below the limit ");
    add_limit(out, c, name, m.limit);
    if (c) add_unit(out, c);
}

void page_samples(const results *r, textbuf *out) {
    shown q[MAX_SHOWN];
    if (!r->n_samples) return;
    size_t n = choose_columns(r, q);
    text_add(out, "<section id=\"samples\"><h2>Samples</h2>\n<p class=\"lead\">Value \xc2\xb1 expanded uncertainty U (k = 2, about 95 %); "
                  "a range in brackets is a 95 % interval that need not be centred. In the pictures: dot and line are value and "
                  "interval, the shaded part is the target. A value conforms or fails only when its uncertainty is clear of the "
                  "limit (ISO 14253-1). What needs a look stands first. Values are rounded to what their uncertainty leaves; copies and samples.csv "
                  "hold all digits.</p>\n"
                  "<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"Samples with verdicts\"><table class=\"sort filter "
                  "samples\">");
    table_head(r, q, n, out);
    text_add(out, "<tbody>\n");
    for (size_t k = 0; k < PAGE_URGENCIES * r->n_samples; k++) {
        size_t i = k % r->n_samples;
        const sample_row *s = &r->samples[i];
        if ((size_t)page_urgency(s) != k / r->n_samples) continue;
        name_cell(r, i, out);
        for (size_t c = 0; c < n; c++) {
            text_add(out, "<td class=\"q\"><span class=\"value\">");
            page_sample_value(out, s, q[c].name);
            text_add(out, "</span>");
            add_strip(r, s, &q[c], out);
            text_add(out, "</td>");
        }
        text_add(out, "<td class=\"q\">");
        page_sample_value(out, s, "height_nm");
        if (s->height_source && *s->height_source) {
            text_add(out, "<small>from ");
            html_text(out, s->height_source);
            text_add(out, "</small>");
        }
        text_add(out, "</td>");
        remarks_cell(r, i, q, n, out);
    }
    text_add(out, "</tbody></table></div></section>\n");
}
