/* The data behind a chart as an HTML table: what a reader without the picture needs, what the page's script draws from and
 * copies as CSV. Numbers carry five digits, as a chart cannot show more; the files of the run hold the rest. End tags that
 * HTML lets go are left out: a page holds thousands of these cells. */
#include <math.h>
#include <string.h>

#include "base/number.h"
#include "io/json.h"
#include "report/html.h"
#include "report/plot.h"

enum { DIGITS = 5 };

/* What the rows of a table hold beside x and y. */
typedef struct {
    int labels, ends, verdicts, names;
} shape;

static shape shape_of(const plot *p, size_t first) {
    shape has = { 0, 0, 0, 0 };
    for (size_t s = first; s < p->n_series; s++) {
        has.labels |= p->series[s].label != NULL;
        has.ends |= p->series[s].lo && p->series[s].hi;
        has.verdicts |= p->series[s].marks != NULL;
        has.names |= p->series[s].point_names != NULL;
    }
    return has;
}

static void head_cell(textbuf *out, const char *text, int number) {
    text_add(out, number ? "<th scope=\"col\" class=\"n\">" : "<th scope=\"col\">");
    html_text(out, text);
    text_add(out, "</th>");
}

static void number_cell(textbuf *out, double v) {
    char number[NUMBER_TEXT];
    text_addf(out, "<td>%s", number_text(v, DIGITS, number));
}

static const char *const verdict_word[] = { "conforms", "undecided", "fails", "no target" }; /* as plot_mark */
static const char *const *words_of(const plot *p) { return p->mark_words ? p->mark_words : verdict_word; }

static void add_point(const plot *p, const plot_series *s, size_t i, const shape *has, textbuf *out) {
    size_t k = p->names ? (size_t)lround(s->x[i]) : 0;
    if (p->names)
        text_addf(out, "<tr data-x=\"%zu\">", k);
    else
        text_add(out, "<tr>");
    if (has->labels) {
        text_add(out, "<td class=\"t\">");
        html_text(out, s->label);
    }
    if (p->names) {
        text_add(out, "<th scope=\"row\">");
        html_text(out, k < p->n_names ? p->names[k] : "");
        text_add(out, "</th>");
    } else {
        number_cell(out, s->x[i]);
    }
    number_cell(out, s->y[i]);
    if (has->ends) {
        number_cell(out, s->lo ? s->lo[i] : (double)NAN);
        number_cell(out, s->hi ? s->hi[i] : (double)NAN);
    }
    if (has->verdicts) text_addf(out, "<td class=\"t\">%s", s->marks ? words_of(p)[s->marks[i]] : "");
    if (has->names) {
        text_add(out, "<td class=\"t\">");
        if (s->point_names) html_text(out, s->point_names[i]);
    }
    text_add(out, "\n");
}

void plot_table(const plot *p, size_t first, const char *id, textbuf *out) {
    shape has = shape_of(p, first);
    text_add(out, "<details class=\"data\"><summary>Data: ");
    html_text(out, p->title);
    text_add(out, "</summary>\n<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"Data: ");
    html_text(out, p->title);
    text_add(out, ", ");
    html_text(out, p->y_label);
    text_add(out, "\"><table class=\"csv numbers\"");
    if (id) text_addf(out, " id=\"%s\"", id);
    text_add(out, "><thead><tr>");
    if (has.labels) head_cell(out, "series", 0);
    head_cell(out, p->x_label, !p->names);
    head_cell(out, p->y_label, 1);
    if (has.ends) {
        head_cell(out, "from", 1);
        head_cell(out, "to", 1);
    }
    if (has.verdicts) head_cell(out, p->mark_title ? p->mark_title : "verdict", 0);
    if (has.names) head_cell(out, "sample", 0);
    text_add(out, "</tr></thead>");
    for (size_t s = first; s < p->n_series; s++) {
        text_add(out, "<tbody>\n");
        for (size_t i = 0; i < p->series[s].n; i++)
            if (isfinite(p->series[s].y[i])) add_point(p, &p->series[s], i, &has, out);
        text_add(out, "</tbody>");
    }
    text_add(out, "</table></div></details>\n");
}

/* ---- what the script is told ---- */

static void text_member(textbuf *j, const char *name, const char *value) {
    if (!value) return;
    text_addf(j, ",\"%s\":", name);
    json_string(j, value);
}

static void number_member(textbuf *j, const char *name, double v) {
    if (!isfinite(v)) return;
    text_addf(j, ",\"%s\":", name);
    json_number(j, v, DIGITS);
}

static void columns_member(const plot *p, size_t first, textbuf *j) {
    shape has = shape_of(p, first);
    text_addf(j, ",\"columns\":[%s%s%s%s%s]", has.labels ? "\"series\"," : "", "\"x\",\"y\"", has.ends ? ",\"lo\",\"hi\"" : "",
              has.verdicts ? ",\"verdict\"" : "", has.names ? ",\"name\"" : "");
}

static void series_member(const plot *p, textbuf *j) {
    static const char *const style[] = { "line", "dashed", "dotted", "points", "steps" }; /* as plot_style */
    text_add(j, ",\"series\":[");
    for (size_t s = 0; s < p->n_series; s++) {
        text_addf(j, "%s{\"style\":\"%s\",\"tone\":%d", s ? "," : "", style[p->series[s].style], p->series[s].tone);
        text_member(j, "label", p->series[s].label);
        text_add(j, p->series[s].unlisted ? ",\"unlisted\":true}" : "}");
    }
    text_add(j, "]");
}

static void words_member(const plot *p, textbuf *j) {
    text_add(j, ",\"words\":[");
    for (size_t k = 0; k < 4; k++) {
        if (k) text_add(j, ",");
        json_string(j, words_of(p)[k]);
    }
    text_add(j, "]");
}

static void rules_member(const plot *p, textbuf *j) {
    if (!p->n_rules) return;
    text_add(j, ",\"rules\":[");
    for (size_t k = 0, n = 0; k < p->n_rules; k++) {
        if (!isfinite(p->rules[k].at)) continue;
        text_addf(j, "%s{\"tone\":%d", n++ ? "," : "", p->rules[k].tone);
        number_member(j, "at", p->rules[k].at);
        text_member(j, "label", p->rules[k].label);
        text_add(j, "}");
    }
    text_add(j, "]");
}

static void names_member(const plot *p, textbuf *j) {
    if (!p->names) return;
    text_add(j, ",\"names\":[");
    for (size_t i = 0; i < p->n_names; i++) {
        if (i) text_add(j, ",");
        json_string(j, p->names[i] ? p->names[i] : "");
    }
    text_add(j, "]");
}

void plot_chart(const plot *p, size_t first, const char *shared, textbuf *out) {
    textbuf j = { 0 };
    text_addf(&j, "{\"first\":%zu", first);
    text_member(&j, "shared", first ? shared : NULL);
    text_member(&j, "title", p->title);
    text_member(&j, "x", p->x_label);
    text_member(&j, "y", p->y_label);
    text_addf(&j, ",\"log\":%s,\"zero\":%s,\"legend\":%s", p->log_y ? "true" : "false", p->from_zero ? "true" : "false",
              p->no_legend ? "false" : "true");
    number_member(&j, "lo", p->y_lo);
    number_member(&j, "hi", p->y_hi);
    number_member(&j, "targetLo", p->target_lo);
    number_member(&j, "targetHi", p->target_hi);
    text_member(&j, "target", p->target_label);
    columns_member(p, first, &j);
    if (shape_of(p, first).verdicts) words_member(p, &j);
    series_member(p, &j);
    rules_member(p, &j);
    names_member(p, &j);
    text_add(&j, "}");
    if (j.failed) out->failed = 1;
    text_add(out, "<div class=\"chart\" data-plot=\"");
    html_text(out, j.s);
    text_add(out, "\">\n");
    plot_svg(p, out);
    text_add(out, "</div>\n");
    plot_table(p, first, NULL, out);
    text_free(&j);
}
