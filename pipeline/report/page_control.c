/* Control charts: the mean of every etch of the history with control limits, phases, notes and target, and what the pattern tests
 * and the search for steps found, in words. All of it is read from the member "series" of results.json; nothing is judged here. */
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

enum { MOST_POINTS = 200, MOST_PHASES = 12, MOST_RULES = 24, MOST_SENTENCES = 24, LINES_A_PHASE = 3, TIME_LETTERS = 16, LABEL_LETTERS = 28 };

static const cJSON *list_in(const cJSON *o, const char *name) { return cJSON_GetObjectItemCaseSensitive(o, name); }

/* One chart, laid out: places count from 0 over the points that are there. */
typedef struct {
    double x[MOST_POINTS], value[MOST_POINTS], lo[MOST_POINTS], hi[MOST_POINTS], average[MOST_POINTS];
    plot_mark mark[MOST_POINTS];
    char name[MOST_POINTS][TIME_LETTERS + 1];
    const char *names[MOST_POINTS];
    size_t n;
    double first; /* number of the first point */
    double limit[MOST_PHASES][LINES_A_PHASE][MOST_POINTS], limit_x[MOST_PHASES][MOST_POINTS];
    plot_series lines[MOST_PHASES * LINES_A_PHASE + 2];
    size_t n_lines;
    int listed[LINES_A_PHASE];
    plot_rule rules[MOST_RULES];
    char rule_text[MOST_RULES][4 * LABEL_LETTERS + 1];
    size_t n_rules;
    double scale;
} picture;

/* "2026-03-03T08:12:00Z" as "2026-03-03 08:12". */
static void short_time(const char *t, char *out) {
    size_t n = html_fit(t, TIME_LETTERS);
    if (n > TIME_LETTERS) n = TIME_LETTERS;
    memcpy(out, t, n);
    out[n] = '\0';
    if (n > 10 && out[10] == 'T') out[10] = ' ';
}

static void add_point(picture *p, const cJSON *o) {
    size_t i = p->n++;
    double sd = json_member_number(o, "sd");
    p->x[i] = (double)i;
    p->value[i] = p->scale * json_member_number(o, "value");
    p->lo[i] = p->value[i] - p->scale * sd;
    p->hi[i] = p->value[i] + p->scale * sd;
    p->average[i] = p->scale * json_member_number(o, "average");
    p->mark[i] = cJSON_IsString(list_in(o, "excluded"))       ? MARK_SQUARE
                 : cJSON_GetArraySize(list_in(o, "alarms")) ? MARK_TRIANGLE
                                                            : MARK_DISC;
    short_time(*json_member_text(o, "etched_at") ? json_member_text(o, "etched_at") : json_member_text(o, "etch"), p->name[i]);
    p->names[i] = p->name[i];
}

static void add_rule(picture *p, double number, int tone, const char *text) {
    double at = number - p->first - 0.5;
    if (p->n_rules == MOST_RULES || !(at >= 0.0)) return;
    char *label = p->rule_text[p->n_rules];
    size_t n = html_fit(text, LABEL_LETTERS);
    if (n > 4 * (size_t)LABEL_LETTERS) n = 0;
    memcpy(label, text, n);
    label[n] = '\0';
    p->rules[p->n_rules++] = (plot_rule){ at, label, tone };
}

/* Centre and limits of one phase over its points. */
static void add_phase(picture *p, size_t k, const cJSON *phase, const cJSON *points) {
    static const char *const name[LINES_A_PHASE] = { "lower control limit", "centre", "upper control limit" };
    double number = json_member_number(phase, "number");
    const double level[LINES_A_PHASE] = { json_member_number(phase, "low"), json_member_number(phase, "centre"), json_member_number(phase, "high") };
    const cJSON *o;
    size_t n = 0, i = 0;
    cJSON_ArrayForEach(o, points) {
        if (i == p->n) break;
        if (fabs(json_member_number(o, "phase") - number) < 0.5) p->limit_x[k][n++] = p->x[i];
        i++;
    }
    for (size_t l = 0; l < LINES_A_PHASE; l++) {
        if (!isfinite(level[l]) || !n) continue;
        for (i = 0; i < n; i++) p->limit[k][l][i] = p->scale * level[l];
        p->lines[p->n_lines] = (plot_series){ .x = p->limit_x[k], .y = p->limit[k][l], .n = n, .style = l == 1 ? PLOT_DOTTED : PLOT_DASHED,
                                              .tone = 4, .label = name[l], .unlisted = p->listed[l] };
        p->listed[l] = 1;
        p->n_lines++;
    }
    if (k && *json_member_text(phase, "why")) add_rule(p, json_member_number(phase, "first"), 2, json_member_text(phase, "why"));
}

static void lay_out(const cJSON *series, picture *p) {
    const cJSON *points = list_in(series, "points"), *phases = list_in(series, "phases"), *o;
    size_t skip = (size_t)cJSON_GetArraySize(phases) > MOST_PHASES ? (size_t)cJSON_GetArraySize(phases) - MOST_PHASES : 0, k = 0;
    cJSON_ArrayForEach(o, points) {
        if (p->n == MOST_POINTS) break;
        if (!p->n) p->first = json_member_number(o, "number");
        add_point(p, o);
    }
    cJSON_ArrayForEach(o, phases) {
        if (k >= skip) add_phase(p, k - skip, o, points);
        k++;
    }
    cJSON_ArrayForEach(o, list_in(series, "notes")) add_rule(p, json_member_number(o, "before"), 1, json_member_text(o, "text"));
}

static void add_sentences(const cJSON *series, textbuf *out) {
    const cJSON *s;
    size_t n = 0;
    text_add(out, "<ul class=\"todo\">\n");
    cJSON_ArrayForEach(s, list_in(series, "sentences")) {
        if (!cJSON_IsString(s) || n++ == MOST_SENTENCES) break;
        text_add(out, "<li>");
        html_text(out, s->valuestring);
        text_add(out, "</li>\n");
    }
    text_add(out, "</ul>\n");
}

static void add_notes(const cJSON *series, textbuf *out) {
    const cJSON *o, *notes = list_in(series, "notes");
    if (!cJSON_GetArraySize(notes)) return;
    text_add(out, "<details class=\"data\"><summary>Notes of the people at the tool</summary><div class=\"scroll\" tabindex=\"0\" role=\"region\" "
                  "aria-label=\"Notes\"><table><thead><tr><th scope=\"col\">When</th><th scope=\"col\">Kind</th><th scope=\"col\">Note</th>"
                  "<th scope=\"col\">By</th></tr></thead><tbody>\n");
    cJSON_ArrayForEach(o, notes) {
        static const char *const cell[] = { "at", "kind", "text", "initials" };
        text_add(out, "<tr>");
        for (size_t k = 0; k < 4; k++) {
            text_add(out, "<td>");
            html_text(out, json_member_text(o, cell[k]));
            text_add(out, "</td>");
        }
        text_add(out, "</tr>\n");
    }
    text_add(out, "</tbody></table></div></details>\n");
}

static void draw_control(const cJSON *series, picture *p, textbuf *out) {
    static const char *const words[] = { "in control", "", "alarm", "excluded" };
    const char *name = json_member_text(series, "quantity"), *unit = page_percent(name) ? "%" : json_member_text(series, "unit");
    textbuf title = { 0 }, label = { 0 };
    *p = (picture){ .scale = page_percent(name) ? 100.0 : 1.0 };
    lay_out(series, p);
    int any = 0;
    for (size_t i = 0; i < p->n; i++) any |= isfinite(p->value[i]);
    if (!any) return;
    text_addf(&title, "Control chart: %s of each etch", page_quantity(name));
    text_addf(&label, "%s%s%s%s", page_quantity(name), *unit ? " (" : "", unit, *unit ? ")" : "");
    p->lines[p->n_lines++] = (plot_series){ .x = p->x, .y = p->average, .n = p->n, .style = PLOT_LINE, .tone = 2, .label = "weighted average (EWMA)" };
    p->lines[p->n_lines++] = (plot_series){ .x = p->x, .y = p->value, .lo = p->lo, .hi = p->hi, .n = p->n, .style = PLOT_POINTS, .marks = p->mark,
                                            .label = "mean of an etch" };
    plot c = { .title = title.s ? title.s : "", .x_label = "time of the etch", .y_label = label.s ? label.s : "", .from_zero = page_percent(name),
               .y_lo = MISSING, .y_hi = MISSING, .target_lo = p->scale * json_member_number(series, "target_min"),
               .target_hi = p->scale * json_member_number(series, "target_max"), .target_label = "target range", .names = p->names, .n_names = p->n,
               .mark_words = words, .mark_title = "state", .series = p->lines, .n_series = p->n_lines, .rules = p->rules, .n_rules = p->n_rules,
               .width = 1040, .height = 320 };
    text_add(out, "<figure class=\"wide\">");
    plot_chart(&c, 0, NULL, out);
    text_add(out, "<figcaption>One point an etch: the mean of its samples, bars one standard deviation among them. Triangle: a pattern test fired; "
                  "square: excluded by a person. Upright dashes: a change or a note.</figcaption></figure>\n");
    add_sentences(series, out);
    add_notes(series, out);
    if (title.failed || label.failed) out->failed = 1;
    text_free(&title);
    text_free(&label);
}

void page_control(const results *r, textbuf *out) {
    cJSON *all = r->series_json ? cJSON_Parse(r->series_json) : NULL;
    const cJSON *series;
    picture *p = mem_array(1, sizeof *p);
    text_add(out, "<h3>Control charts</h3>\n<p class=\"small\">The control limits say what this process usually does, the target what is wanted: a point "
                  "can lie outside the one and inside the other. An alarm says that something changed, not that a wafer is bad. The weighted "
                  "average (EWMA) counts recent etches more and shows small shifts. Ppk compares the scatter with the target: above about 1.3 "
                  "there is room, below 1 some etches miss.</p>\n");
    if (!p) out->failed = 1;
    else if (!cJSON_GetArraySize(all)) text_add(out, "<p>No control chart: the history holds no etch with a number to chart.</p>\n");
    else cJSON_ArrayForEach(series, all) draw_control(series, p, out);
    free(p);
    cJSON_Delete(all);
}
