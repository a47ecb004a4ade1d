/* The control chart of a quantity over the etches, from the run's "series" (what `sward history chart --json` prints): values with
 * their U, centre and limits of each phase, target as a band, alarms and excluded etches apart. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/figure_priv.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "io/json.h"

static const cJSON *find_series(const cJSON *member, const char *wanted) {
    const cJSON *s;
    if (cJSON_IsObject(member)) return strcmp(json_member_text(member, "quantity"), wanted) ? NULL : member;
    cJSON_ArrayForEach(s, member)
        if (!strcmp(json_member_text(s, "quantity"), wanted)) return s;
    return NULL;
}

/* What the run charts, for the sentence. */
static void list_series(const cJSON *member, char *out, size_t room) {
    const cJSON *s;
    size_t n = 0;
    out[0] = '\0';
    cJSON_ArrayForEach(s, member) {
        int k = snprintf(out + n, room - n, "%s%s", n ? ", " : "", json_member_text(s, "quantity"));
        if (k < 0 || (size_t)k >= room - n) return;
        n += (size_t)k;
    }
}

/* Columns of the points: index, value - U, value + U, and the values of each kind apart; then the lines, two ends for each point, so
 * that they step where a phase begins: place, centre, low, high. */
enum { INDEX, LO, HI, CALM, ALARM, OUT, COLUMNS, AT = 0, CENTRE, LOW, HIGH, LINES };

typedef struct {
    size_t n;
    double *v;          /* [COLUMNS][n] */
    double *line;       /* [LINES][2 n] */
    const char **names; /* [n], into dates */
    char (*dates)[64];
} points;

static double *column_of(const points *p, int k) { return p->v + (size_t)k * p->n; }
static double *line_of(const points *p, int k) { return p->line + (size_t)k * 2 * p->n; }

/* "2026-03-03T08:12:00Z" -> "2026-03-03": a day is enough on an axis, unless two etches share it. */
static void name_points(const points *p, const cJSON *list) {
    const cJSON *row;
    size_t i = 0;
    cJSON_ArrayForEach(row, list) {
        const char *at = json_member_text(row, "etched_at"), *etch = json_member_text(row, "etch");
        snprintf(p->dates[i], sizeof p->dates[i], "%s", *at ? at : etch);
        p->names[i] = p->dates[i];
        i++;
    }
    for (i = 0; i < p->n; i++) {
        char *t = strchr(p->dates[i], 'T');
        int same = (i && t && !strncmp(p->dates[i], p->dates[i - 1], 10)) ||
                   (i + 1 < p->n && t && !strncmp(p->dates[i], p->dates[i + 1], 10));
        if (!t || t - p->dates[i] != 10) continue;
        if (!same) *t = '\0';
        else if (strlen(t) > 6) {
            *t = ' ';
            t[6] = '\0'; /* to the minute */
        }
    }
}

static void fill_points(const points *p, const cJSON *series, double factor) {
    const cJSON *list = cJSON_GetObjectItemCaseSensitive(series, "points"), *row;
    size_t i = 0;
    cJSON_ArrayForEach(row, list) {
        double value = factor * json_member_number(row, "value"), u = 2.0 * factor * json_member_number(row, "u");
        int out = *json_member_text(row, "excluded") != '\0', alarm = cJSON_GetArraySize(cJSON_GetObjectItemCaseSensitive(row, "alarms")) > 0;
        double phase = json_member_number(row, "phase");
        const cJSON *phases = cJSON_GetObjectItemCaseSensitive(series, "phases");
        const cJSON *in = phase >= 1.0 && phase <= (double)p->n ? cJSON_GetArrayItem(phases, (int)phase - 1) : NULL;
        column_of(p, INDEX)[i] = (double)i;
        column_of(p, LO)[i] = value - u;
        column_of(p, HI)[i] = value + u;
        column_of(p, CALM)[i] = !out && !alarm ? value : MISSING;
        column_of(p, ALARM)[i] = !out && alarm ? value : MISSING;
        column_of(p, OUT)[i] = out ? value : MISSING;
        for (size_t end = 0; end < 2; end++) {
            line_of(p, AT)[2 * i + end] = (double)i - 0.5 + (double)end;
            line_of(p, CENTRE)[2 * i + end] = factor * json_member_number(in, "centre");
            line_of(p, LOW)[2 * i + end] = factor * json_member_number(row, "low");
            line_of(p, HIGH)[2 * i + end] = factor * json_member_number(row, "high");
        }
        i++;
    }
}

static status draw_points(const figure_request *q, const points *p, const cJSON *series, double factor, const char *label,
                          plot_mark *const marks[3], figure_file *out, error *e) {
    static const char *const plain = "etch, \xc2\xb1 U (k = 2)", *const words[3] = { "in control, \xc2\xb1 U (k = 2)", "alarm", "excluded" };
    double *x = column_of(p, INDEX);
    plot_series lines[6];
    size_t n = 0;
    for (int k = CENTRE; k <= HIGH; k++)
        if (figure_any(line_of(p, k), 2 * p->n))
            lines[n++] = (plot_series){ .x = line_of(p, AT), .y = line_of(p, k), .n = 2 * p->n, .tone = k == CENTRE ? 2 : 1,
                                        .style = k == CENTRE ? PLOT_LINE : PLOT_DOTTED,
                                        .label = k == CENTRE ? "centre" : k == HIGH ? "control limits" : NULL };
    int limits = n > 0;
    for (int k = CALM; k <= OUT; k++)
        if (figure_any(column_of(p, k), p->n))
            lines[n++] = (plot_series){ .x = x, .y = column_of(p, k), .lo = column_of(p, LO), .hi = column_of(p, HI), .n = p->n,
                                        .style = PLOT_POINTS, .marks = marks[k - CALM], .label = k == CALM && !limits ? plain : words[k - CALM] };
    plot f = figure_plot("Control chart", "etches, in the order of time", label);
    f.names = p->names;
    f.n_names = p->n;
    f.series = lines;
    f.n_series = n;
    f.target_lo = factor * json_member_number(series, "target_min");
    f.target_hi = factor * json_member_number(series, "target_max");
    f.target_label = "target";
    return figure_finish(q, &f, NULL, out, e);
}

status figure_history(const figure_request *q, const cJSON *run, figure_file *out, error *e) {
    cJSON *owned = NULL;
    const cJSON *member = NULL;
    status st = figure_member(q, run, "series", "sward history chart --json > chart.json", &owned, &member, e);
    const cJSON *series = st ? NULL : find_series(member, q->quantity);
    char known[256];
    if (!st && !series) {
        list_series(member, known, sizeof known);
        st = fail(e, ST_BAD_INPUT, "--quantity: the run has no chart of '%s'; it has: %s. Or make one with: sward history chart --json, and name "
                                   "the file with --data", q->quantity, *known ? known : "none");
    }
    points p = { .n = (size_t)cJSON_GetArraySize(cJSON_GetObjectItemCaseSensitive(series, "points")) };
    plot_mark *marks[3] = { NULL };
    textbuf label = { 0 };
    if (!st && !p.n) st = fail(e, ST_BAD_INPUT, "the chart of '%s' has no etch", q->quantity);
    if (!st) {
        p.v = mem_array(p.n, COLUMNS * sizeof *p.v);
        p.line = mem_array(p.n, 2 * LINES * sizeof *p.line);
        p.names = mem_array(p.n, sizeof *p.names);
        p.dates = mem_array(p.n, sizeof *p.dates);
        for (int k = 0; k < 3; k++) marks[k] = mem_array(p.n, sizeof **marks);
        double factor = figure_label(q->quantity, json_member_text(series, "unit"), &label);
        st = p.v && p.line && p.names && p.dates && marks[0] && marks[1] && marks[2] ? text_check(&label, "a label", e) : NO_MEMORY(e, "the chart");
        for (size_t i = 0; !st && i < p.n; i++) {
            marks[0][i] = MARK_DISC;
            marks[1][i] = MARK_TRIANGLE;
            marks[2][i] = MARK_SQUARE;
        }
        if (!st) {
            name_points(&p, cJSON_GetObjectItemCaseSensitive(series, "points"));
            fill_points(&p, series, factor);
            st = draw_points(q, &p, series, factor, label.s, marks, out, e);
        }
    }
    free(p.v);
    free(p.line);
    free(p.names);
    free(p.dates);
    for (int k = 0; k < 3; k++) free(marks[k]);
    text_free(&label);
    cJSON_Delete(owned);
    return st;
}
