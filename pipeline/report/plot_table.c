/* The data behind a chart as an HTML table: what a reader without the picture needs, and what the page's script copies as
 * CSV. Numbers carry five digits, as a chart cannot show more; the files of the run hold the rest. */
#include <math.h>

#include "base/number.h"
#include "report/html.h"
#include "report/plot.h"

enum { DIGITS = 5 };

static void head_cell(textbuf *out, const char *text, int number) {
    text_add(out, number ? "<th scope=\"col\" class=\"n\">" : "<th scope=\"col\">");
    html_text(out, text);
    text_add(out, "</th>");
}

static void number_cell(textbuf *out, double v) {
    char number[NUMBER_TEXT];
    text_addf(out, "<td>%s</td>", number_text(v, DIGITS, number));
}

static int has_ends(const plot *p, size_t first) {
    for (size_t s = first; s < p->n_series; s++)
        if (p->series[s].lo && p->series[s].hi) return 1;
    return 0;
}

static int has_labels(const plot *p, size_t first) {
    for (size_t s = first; s < p->n_series; s++)
        if (p->series[s].label) return 1;
    return 0;
}

static void add_point(const plot *p, const plot_series *s, size_t i, int labels, int ends, textbuf *out) {
    text_add(out, "<tr>");
    if (labels) {
        text_add(out, "<td class=\"t\">");
        html_text(out, s->label);
        text_add(out, "</td>");
    }
    if (p->names) {
        size_t k = (size_t)lround(s->x[i]);
        text_add(out, "<th scope=\"row\">");
        html_text(out, k < p->n_names ? p->names[k] : "");
        text_add(out, "</th>");
    } else {
        number_cell(out, s->x[i]);
    }
    number_cell(out, s->y[i]);
    if (ends) {
        number_cell(out, s->lo ? s->lo[i] : (double)NAN);
        number_cell(out, s->hi ? s->hi[i] : (double)NAN);
    }
    text_add(out, "</tr>");
}

void plot_table(const plot *p, size_t first, textbuf *out) {
    int labels = has_labels(p, first), ends = has_ends(p, first);
    text_add(out, "<details class=\"data\"><summary>Data: ");
    html_text(out, p->title);
    text_add(out, "</summary>\n<div class=\"scroll\" tabindex=\"0\" "
                  "role=\"region\" aria-label=\"Data: ");
    html_text(out, p->title);
    text_add(out, ", ");
    html_text(out, p->y_label);
    text_add(out, "\"><table class=\"csv numbers\"><thead><tr>");
    if (labels) head_cell(out, "series", 0);
    head_cell(out, p->x_label, !p->names);
    head_cell(out, p->y_label, 1);
    if (ends) {
        head_cell(out, "from", 1);
        head_cell(out, "to", 1);
    }
    text_add(out, "</tr></thead><tbody>\n");
    for (size_t s = first; s < p->n_series; s++)
        for (size_t i = 0; i < p->series[s].n; i++)
            if (isfinite(p->series[s].y[i])) add_point(p, &p->series[s], i, labels, ends, out);
    text_add(out, "</tbody></table></div></details>\n");
}
