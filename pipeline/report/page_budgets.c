/* Where the uncertainty of every sample comes from: sampling, method and pixel size of each quantity (JCGM 100), the parts of
 * the predicted reflectance, and the sentence of the verdict, folded away per sample. The parts stand in results.json. */
#include <cjson/cJSON.h>
#include <stdlib.h>
#include <string.h>

#include "base/number.h"
#include "report/html.h"
#include "report/page.h"

static const cJSON *member(const cJSON *o, const char *name) { return cJSON_GetObjectItemCaseSensitive(o, name); }

cJSON *page_members(const char *json) {
    if (!json || !*json) return NULL;
    textbuf t = { 0 };
    text_addf(&t, "{%s}", json);
    cJSON *o = t.failed ? NULL : cJSON_Parse(t.s);
    text_free(&t);
    return o;
}

const cJSON *page_judgement(const cJSON *sample, const char *name) {
    const cJSON *one;
    cJSON_ArrayForEach(one, member(sample, "judgements")) {
        const cJSON *of = member(one, "quantity");
        if (cJSON_IsString(of) && !strcmp(of->valuestring, name)) return one;
    }
    return NULL;
}

static void number_cell(textbuf *out, const cJSON *v, int percent) {
    char number[NUMBER_TEXT];
    text_add(out, "<td class=\"n\">");
    if (cJSON_IsNumber(v))
        text_add(out, percent ? number_percent(v->valuedouble, 15, number) : number_text(v->valuedouble, 15, number));
    else
        text_add(out, "\xe2\x80\x93");
    text_add(out, "</td>");
}

static void texture_budget(const sample_row *s, const cJSON *budget, textbuf *out) {
    static const char *const part[] = { "sampling", "method", "pixel_size", "combined", "n" };
    const cJSON *q;
    text_add(out, "<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"Uncertainty budget of ");
    html_text(out, s->sample);
    text_add(out, "\"><table class=\"csv\"><thead><tr><th scope=\"col\">Quantity</th><th scope=\"col\" class=\"n\">value</th>"
                  "<th scope=\"col\" class=\"n\">u sampling</th><th scope=\"col\" class=\"n\">u method</th><th scope=\"col\" "
                  "class=\"n\">u pixel size</th><th scope=\"col\" class=\"n\">u combined</th><th scope=\"col\" "
                  "class=\"n\">n</th></tr></thead><tbody>\n");
    cJSON_ArrayForEach(q, budget) {
        const column *c = column_find(sample_columns, n_sample_columns, q->string);
        text_add(out, "<tr><th scope=\"row\"><code>");
        html_text(out, q->string);
        text_add(out, "</code></th><td class=\"n\">");
        if (c)
            html_cell(out, c, s);
        else
            text_add(out, "\xe2\x80\x93");
        text_add(out, "</td>");
        for (size_t k = 0; k < sizeof part / sizeof part[0]; k++) number_cell(out, member(q, part[k]), 0);
        text_add(out, "</tr>\n");
    }
    text_add(out, "</tbody></table></div>\n");
}

static void prediction_budget(const sample_row *s, const cJSON *prediction, textbuf *out) {
    static const char *const part[][2] = {
        { "u_height", "height" },           { "u_shape", "shape" },
        { "u_tip", "flat or round tips" },  { "u_coverage", "coverage of the floor" },
        { "u_spread", "spread of heights" }, { "u_spacing", "spacing" },
        { "u_mixing", "mixing rule" },
        { "u_model", "model (graded index against rigorous)" }, { "model_bias", "known bias of the model (signed)" },
    };
    const cJSON *note = member(prediction, "note");
    int any = 0;
    for (size_t k = 0; k < sizeof part / sizeof part[0]; k++) any |= cJSON_IsNumber(member(prediction, part[k][0]));
    if (any) {
        text_add(out, "<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"Uncertainty of the reflectance of ");
        html_text(out, s->sample);
        text_add(out, "\"><table class=\"csv\"><thead><tr><th scope=\"col\">Weighted reflectance: part</th><th scope=\"col\" "
                      "class=\"n\">u (%)</th></tr></thead><tbody>\n");
        for (size_t k = 0; k < sizeof part / sizeof part[0]; k++) {
            if (!cJSON_IsNumber(member(prediction, part[k][0]))) continue;
            text_addf(out, "<tr><th scope=\"row\">%s</th>", part[k][1]);
            number_cell(out, member(prediction, part[k][0]), 1);
            text_add(out, "</tr>\n");
        }
        text_add(out, "</tbody></table></div>\n");
    }
    if (cJSON_IsString(note) && *note->valuestring) {
        text_add(out, "<p>");
        html_text(out, note->valuestring);
        text_add(out, "</p>\n");
    }
}

void page_budgets(const results *r, textbuf *out) {
    if (!r->n_samples) return;
    text_add(out, "<section id=\"budgets\"><h2>Uncertainty budgets</h2>\n<p class=\"lead\">Standard uncertainties (k = 1), in the "
                  "unit of the quantity. Sampling falls with more micrographs; method and pixel size do not.</p>\n");
    size_t n = 0, *picked = page_pick(r, &n, out);
    for (size_t k = 0; k < n; k++) {
        size_t i = picked[k];
        const sample_row *s = &r->samples[i];
        cJSON *o = page_members(r->sample_json ? r->sample_json[i] : NULL);
        const cJSON *budget = member(o, "budget");
        text_addf(out, "<details class=\"data\" id=\"budget-%zu\"><summary>", i + 1);
        html_text(out, s->sample);
        text_add(out, "</summary>\n");
        if (s->verdict_reasons && *s->verdict_reasons) {
            text_add(out, "<p>Verdict as in samples.csv: ");
            html_text(out, s->verdict_reasons);
            text_add(out, "</p>\n");
        }
        if (cJSON_IsObject(budget) && budget->child)
            texture_budget(s, budget, out);
        else
            text_add(out, "<p>No budget: no micrograph of this sample was used.</p>\n");
        prediction_budget(s, member(o, "prediction"), out);
        text_add(out, "</details>\n");
        cJSON_Delete(o);
    }
    page_pick_note(r, n, "the budgets", "are in results.json", out);
    free(picked);
    text_add(out, "</section>\n");
}
