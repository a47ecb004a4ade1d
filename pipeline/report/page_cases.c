/* One block for every sample that misses a target: by how much, why that is believed, where else it shows, and what to look at
 * first, from the figures of the run alone. What this file does not do: it proposes no change of the etch; a person decides. */
#include <cjson/cJSON.h>
#include <math.h>
#include <string.h>

#include "base/number.h"
#include "base/quantity.h"
#include "report/html.h"
#include "report/page.h"

enum { MOST_CASES = 6, MOST_PICTURES = 6 };

static int same_text(const char *a, const char *b) { return !strcmp(a ? a : "", b ? b : ""); }

static const char *word_of(const results *r, const sample_row *s, size_t k) {
    textbuf name = { 0 };
    text_addf(&name, "verdict_%s", r->target_quantity[k]);
    const char *word = name.failed ? NULL : page_extra(r, s, name.s);
    text_free(&name);
    return word ? word : "";
}

/* A value of a quantity with the digits its uncertainty U leaves, and its unit; three digits where there is none. */
static void add_amount(textbuf *out, const char *name, double v, double U) {
    char text[NUMBER_TEXT];
    const column *c = page_sample_column(name, "");
    int percent = page_percent(name);
    double scale = percent ? 100.0 : 1.0;
    if (U > 0.0) text_add(out, number_places(v * scale, number_places_of(U * scale, 2), text));
    else text_add(out, number_text(v * scale, 3, text));
    if (percent) text_add(out, " %");
    else if (c && c->unit[0] && strcmp(c->unit, "1")) text_addf(out, " %s", c->unit);
}

static void add_term(textbuf *out, const char *term) { text_addf(out, "<dt>%s</dt><dd>", term); }

/* "48 nm (11 %) above the upper limit 420 nm." */
static void add_distance(const results *r, const page_miss *m, textbuf *out) {
    char text[NUMBER_TEXT];
    double by = fabs(m->value - m->limit);
    add_term(out, "By how much");
    add_amount(out, r->target_quantity[m->target], by, 0.5 * (m->hi - m->lo));
    if (fabs(m->limit) > 0.0) text_addf(out, " (%s %% of the limit)", number_text(100.0 * by / fabs(m->limit), 2, text));
    text_add(out, m->value > m->limit ? " above the upper limit of " : " below the lower limit of ");
    add_amount(out, r->target_quantity[m->target], m->limit, MISSING);
    text_add(out, ".</dd>\n");
}

/* The spacing that a count of the features implies, sqrt(2 / (sqrt(3) density)), as a second opinion on the spacing. */
static void add_second_opinion(const results *r, const page_miss *m, const sample_row *s, textbuf *out) {
    double counted = s->density_per_um2 > 0.0 ? 1000.0 * sqrt(2.0 / (sqrt(3.0) * s->density_per_um2)) : MISSING;
    if (strcmp(r->target_quantity[m->target], "spacing_nm") || !isfinite(counted)) return;
    int agrees = (counted > m->limit) == (m->value > m->limit);
    text_add(out, agrees ? " Counting the features instead gives " : " But counting the features gives ");
    add_amount(out, "spacing_nm", counted, 0.5 * (m->hi - m->lo));
    text_add(out, agrees ? ": outside as well." : ", which is inside: look at its micrographs before anything else.");
}

/* JCGM 106: how probable it is, with that value and uncertainty, that the quantity lies in its target. */
static void add_probability(const results *r, const page_miss *m, size_t sample, textbuf *out) {
    char text[NUMBER_TEXT];
    cJSON *o = page_members(r->sample_json ? r->sample_json[sample] : NULL);
    const cJSON *p = cJSON_GetObjectItemCaseSensitive(page_judgement(o, r->target_quantity[m->target]), "conformance_probability");
    if (cJSON_IsNumber(p) && p->valuedouble < 1e-4) text_add(out, " The probability that it conforms all the same is below 0.01 %.");
    else if (cJSON_IsNumber(p)) text_addf(out, " The probability that it conforms all the same is %s %%.", number_percent(p->valuedouble, 2, text));
    cJSON_Delete(o);
}

static void add_belief(const results *r, const page_miss *m, size_t sample, textbuf *out) {
    const sample_row *s = &r->samples[sample];
    const char *name = r->target_quantity[m->target];
    double U = 0.5 * (m->hi - m->lo);
    add_term(out, "Why it is believed");
    text_add(out, "All of what the value can be with 95 % confidence, ");
    add_amount(out, name, m->lo, U);
    text_add(out, " to ");
    add_amount(out, name, m->hi, U);
    text_add(out, ", lies outside the target.");
    add_probability(r, m, sample, out);
    text_addf(out, " %ld of %ld micrographs %s used.", s->n_used, s->n_images, s->n_images == 1 ? "was" : "were");
    add_second_opinion(r, m, s, out);
    text_add(out, "</dd>\n");
}

/* The other samples of its wafer: is the miss local? */
static void add_neighbours(const results *r, const page_miss *m, const sample_row *s, textbuf *out) {
    const column *c = page_sample_column(r->target_quantity[m->target], "");
    size_t n = 0, fine = 0;
    double sum = 0.0;
    if (!c || !s->wafer || !*s->wafer) return;
    for (size_t i = 0; i < r->n_samples; i++) {
        const sample_row *q = &r->samples[i];
        double v = page_sample_number(q, r->target_quantity[m->target], "");
        if (q == s || !same_text(q->lot, s->lot) || !same_text(q->wafer, s->wafer) || !isfinite(v)) continue;
        n++;
        sum += v;
        fine += !strcmp(word_of(r, q, m->target), "conforms");
    }
    if (!n) return;
    add_term(out, "Where else");
    text_addf(out, "%zu of the %zu other samples of wafer ", fine, n);
    html_text(out, s->wafer);
    text_add(out, n == 1 ? " conforms (" : " conform (mean ");
    add_amount(out, r->target_quantity[m->target], sum / (double)n, 0.5 * (m->hi - m->lo));
    text_add(out, fine == n ? "): the miss is local, at this place of the wafer.</dd>\n"
              : fine     ? "): part of the wafer is off.</dd>\n"
                         : "): the whole wafer is off.</dd>\n");
}

static void add_steps(const results *r, const sample_row *s, textbuf *out) {
    size_t n = 0;
    add_term(out, "What to do");
    text_add(out, "Look at its micrographs (");
    for (size_t i = 0; i < r->n_images; i++) {
        const image_row *m = &r->images[i];
        if (!same_text(m->sample, s->sample) || !same_text(m->status, "ok") || ++n > MOST_PICTURES) continue;
        text_addf(out, "%s<a href=\"#micrograph-%zu\">%zu</a>", n > 1 ? ", " : "", i + 1, n);
    }
    text_add(out, n ? "): is there one marker on every feature?" : "none was used).");
    text_add(out, " Then see whether it stands alone or ends a trend (<a href=\"#series\">etch series</a>");
    if (r->sample_x_mm) text_add(out, ", <a href=\"#maps\">wafer map</a>");
    text_add(out, "). Confirm it on a second spot before the <a href=\"#caution\">etch is changed</a>.</dd>\n");
}

static void add_case(const results *r, size_t i, textbuf *out) {
    const sample_row *s = &r->samples[i];
    for (size_t k = 0; k < r->n_targets; k++) {
        page_miss m;
        if (strcmp(word_of(r, s, k), "fails") || !page_find_miss(r, s, k, &m)) continue;
        text_addf(out, "<article class=\"case\"><h2><span class=\"cross\" aria-hidden=\"true\">\xe2\x9c\x95</span> <a href=\"#sample-%zu\">", i + 1);
        html_text(out, s->sample);
        text_add(out, "</a> fails: ");
        html_text(out, page_quantity(r->target_quantity[k]));
        text_add(out, " ");
        page_sample_value(out, s, r->target_quantity[k]);
        text_add(out, ", target ");
        page_range(out, r, k);
        text_add(out, "</h2>\n<dl>\n");
        add_distance(r, &m, out);
        add_belief(r, &m, i, out);
        add_neighbours(r, &m, s, out);
        add_steps(r, s, out);
        text_add(out, "</dl></article>\n");
    }
}

void page_cases(const results *r, textbuf *out) {
    size_t n = 0;
    for (size_t i = 0; i < r->n_samples; i++) {
        if (!same_text(r->samples[i].verdict, "fails")) continue;
        if (++n <= MOST_CASES) {
            add_case(r, i, out);
            continue;
        }
        text_addf(out, "%s<a href=\"#sample-%zu\">", n == MOST_CASES + 1 ? "<p><strong>Also failing:</strong> " : ", ", i + 1);
        html_text(out, r->samples[i].sample);
        text_add(out, "</a>");
    }
    if (n > MOST_CASES) text_add(out, "</p>\n");
}
