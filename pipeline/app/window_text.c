/* The process window as JSON, as CSV, and as a map a person can read. */
#include <math.h>
#include <string.h>

#include "app/window.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"

enum { DIGITS = 5 };
static const char caution[] = "Wet etchants (hydrofluoric acid above all), plasma gases and silane can kill: "
                              "local codes, safety data sheets and "
                              "licensed practice rule. The map says what a surface would reflect, not how to "
                              "make it; a person decides what is "
                              "changed at a tool or bath.";
static const char passivation[] = "Every area is that of the surface over the flat one: passivation has to "
                                  "cover it, and recombination grows with it.";

/* How the cell stands to the target, as a verdict would say it. */
static const char *standing(const window *w, const window_cell *c) {
    if (!isfinite(c->R)) return "not_measured";
    if (c->R_hi <= w->target) return "conforms";
    return c->R_lo > w->target ? "fails" : "undecided";
}

static char mark(const window *w, const window_cell *c) {
    if (!isfinite(c->R)) return '?';
    if (c->R_hi <= w->target) return '#';
    if (c->R <= w->target) return '+';
    return c->R_lo > w->target ? '.' : '-';
}

static void member(textbuf *out, int first, const char *name, double v) {
    text_addf(out, "%s\"%s\": ", first ? "" : ", ", name);
    json_number(out, v, DIGITS);
}

/* Where a sample stands on the axis: its spacing, or the exponent or film of today's surface, as the protocol has it. */
static double across_of(const window *w, const window_sample *s) {
    return w->across == ACROSS_SPACING ? s->spacing_nm : w->here;
}

/* From which height on the target is kept at x: the columns beside it, straight lines between. */
static window_edge edge_at(const window *w, double x) {
    window_edge none = { MISSING, MISSING, MISSING, MISSING };
    size_t i = 0;
    if (!(x >= w->x.v[0] && x <= w->x.v[w->x.n - 1])) return none;
    if (w->x.n == 1) return w->edges[0];
    while (i + 2 < w->x.n && w->x.v[i + 1] <= x) i++;
    const window_edge *a = &w->edges[i], *b = a + 1;
    double t = (x - w->x.v[i]) / (w->x.v[i + 1] - w->x.v[i]);
    return (window_edge){ (1.0 - t) * a->height_nm + t * b->height_nm,
                          (1.0 - t) * a->area_ratio + t * b->area_ratio,
                          (1.0 - t) * a->sure_height_nm + t * b->sure_height_nm,
                          (1.0 - t) * a->sure_area_ratio + t * b->sure_area_ratio };
}

/* ---- JSON and CSV ---- */

static void cells_json(const window *w, textbuf *out) {
    text_add(out, "  \"cells\": [");
    for (size_t row = 0; row < w->height.n; row++)
        for (size_t i = 0; i < w->x.n; i++) {
            const window_cell *c = &w->cells[row * w->x.n + i];
            text_add(out, row || i ? ",\n    {" : "\n    {");
            member(out, 1, across_name(w->across), w->x.v[i]);
            member(out, 0, "height_nm", w->height.v[row]);
            member(out, 0, "weighted_reflectance", c->R);
            member(out, 0, "weighted_reflectance_lo", c->R_lo);
            member(out, 0, "weighted_reflectance_hi", c->R_hi);
            member(out, 0, "area_ratio", c->area_ratio);
            text_addf(out, ", \"verdict\": \"%s\"}", standing(w, c));
        }
    text_add(out, "\n  ]");
}

static void edge_json(const window_edge *g, textbuf *out) {
    member(out, 0, "least_height_nm", g->height_nm);
    member(out, 0, "area_ratio", g->area_ratio);
    member(out, 0, "sure_height_nm", g->sure_height_nm);
    member(out, 0, "sure_area_ratio", g->sure_area_ratio);
}

static void samples_json(const window *w, textbuf *out) {
    text_add(out, "  \"samples\": [");
    for (size_t i = 0; i < w->n_samples; i++) {
        const window_sample *s = &w->samples[i];
        window_edge g = edge_at(w, across_of(w, s));
        text_add(out, i ? ",\n    {\"sample\": " : "\n    {\"sample\": ");
        json_string(out, s->name);
        member(out, 0, "spacing_nm", s->spacing_nm);
        member(out, 0, "height_nm", s->height_nm);
        member(out, 0, "weighted_reflectance", s->R);
        edge_json(&g, out);
        text_add(out, ", \"verdict\": ");
        json_string(out, s->verdict);
        text_add(out, "}");
    }
    text_add(out, "\n  ]");
}

static void answers(const window *w, textbuf *out);

void window_json(const window *w, textbuf *out) {
    textbuf answer = { 0 };
    answers(w, &answer);
    text_add(out, "{\n  ");
    member(out, 1, "target", w->target);
    text_addf(out, ",\n  \"across\": \"%s\"", across_name(w->across));
    if (w->across != ACROSS_SPACING) member(out, 0, "spacing_nm", w->spacing_nm);
    text_add(out, ",\n  \"answer\": ");
    json_string(out, answer.s ? answer.s : "");
    text_add(out, ",\n  \"note\": ");
    json_string(out, w->note);
    text_add(out, ",\n  \"passivation\": ");
    json_string(out, passivation);
    text_add(out, ",\n  \"caution\": ");
    json_string(out, caution);
    text_add(out, ",\n  \"contour\": [");
    for (size_t i = 0; i < w->x.n; i++) {
        text_add(out, i ? ",\n    {" : "\n    {");
        member(out, 1, across_name(w->across), w->x.v[i]);
        edge_json(&w->edges[i], out);
        text_add(out, "}");
    }
    text_add(out, "\n  ],\n");
    samples_json(w, out);
    text_add(out, ",\n");
    cells_json(w, out);
    text_add(out, "\n}\n");
    if (answer.failed) out->failed = 1;
    text_free(&answer);
}

void window_csv(const window *w, textbuf *out) {
    char t[NUMBER_TEXT];
    text_addf(out,
              "%s,height_nm,weighted_reflectance,weighted_reflectance_lo,weighted_reflectance_hi,area_ratio,"
              "verdict\n",
              across_name(w->across));
    for (size_t row = 0; row < w->height.n; row++)
        for (size_t i = 0; i < w->x.n; i++) {
            const window_cell *c = &w->cells[row * w->x.n + i];
            const double v[] = { w->x.v[i], w->height.v[row], c->R, c->R_lo, c->R_hi, c->area_ratio };
            for (size_t k = 0; k < 6; k++) text_addf(out, "%s,", number_text(v[k], DIGITS, t));
            text_addf(out, "%s\n", standing(w, c));
        }
}

/* ---- for a person ---- */

static size_t nearest(const axis *a, double v) {
    size_t best = 0;
    for (size_t i = 1; i < a->n; i++)
        if (fabs(a->v[i] - v) < fabs(a->v[best] - v)) best = i;
    return best;
}

static int inside(const axis *a, double v) { /* half a step beyond the ends still belongs to them */
    double half = a->n > 1 ? 0.5 * (a->v[1] - a->v[0]) : 0.0;
    return v >= a->v[0] - half && v <= a->v[a->n - 1] + half;
}

/* The letter of sample i, 0 when it has none in the map. */
static char letter(const window *w, size_t i) {
    const window_sample *s = &w->samples[i];
    if (i >= 52 || !inside(&w->x, across_of(w, s)) || !inside(&w->height, s->height_nm)) return 0;
    return (char)(i < 26 ? 'A' + (int)i : 'a' + (int)i - 26);
}

static void map(const window *w, textbuf *out) {
    char t[NUMBER_TEXT];
    static const char *const head[] = { "spacing nm", "exponent", "film nm" };
    text_addf(out, "%10s ", "height nm");
    text_addf(out, " across: %s %s to ", head[w->across], number_text(w->x.v[0], 4, t));
    text_addf(out, "%s, one column each\n", number_text(w->x.v[w->x.n - 1], 4, t));
    for (size_t row = w->height.n; row-- > 0;) {
        text_addf(out, "%10s ", number_text(w->height.v[row], 5, t));
        for (size_t i = 0; i < w->x.n; i++) {
            char shown[3] = { ' ', mark(w, &w->cells[row * w->x.n + i]), '\0' };
            for (size_t k = w->n_samples; k-- > 0;)
                if (letter(w, k) && nearest(&w->x, across_of(w, &w->samples[k])) == i &&
                    nearest(&w->height, w->samples[k].height_nm) == row)
                    shown[1] = letter(w, k);
            text_add(out, shown);
        }
        text_add(out, "\n");
    }
    text_add(out, "\n# conforms (the upper end too)   + below the target, not yet sure   - above, not yet "
                  "sure   . fails   "
                  "? no model\n\n");
}

static void heights(double least, double area, double sure, double sure_area, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    if (isfinite(least))
        text_addf(out, "at least %s nm (area %s)", number_text(least, 3, a), number_text(area, 3, b));
    else
        text_add(out, "no height of the map");
    if (isfinite(sure))
        text_addf(out, "; with 95 %% confidence %s nm (area %s)", number_text(sure, 3, a),
                  number_text(sure_area, 3, b));
    else
        text_add(out, "; with 95 % confidence no height of the map");
}

static void contour(const window *w, textbuf *out) {
    static const char *const head[] = { "spacing", "exponent", "film" };
    char t[NUMBER_TEXT];
    text_addf(out, "For at most %s %%:\n", number_percent(w->target, 4, t));
    for (size_t i = 0; i < w->x.n; i++) {
        const window_edge *g = &w->edges[i];
        text_addf(out, "  %s %s: ", head[w->across], number_text(w->x.v[i], 4, t));
        heights(g->height_nm, g->area_ratio, g->sure_height_nm, g->sure_area_ratio, out);
        text_add(out, "\n");
    }
}

/* The plain answer at one place: the samples' mean spacing, else the middle of the axis; today's exponent or film. */
static void answers(const window *w, textbuf *out) {
    double sum = 0.0, n = 0.0, at;
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    for (size_t i = 0; i < w->n_samples; i++)
        if (w->across == ACROSS_SPACING && isfinite(w->samples[i].spacing_nm)) {
            sum += w->samples[i].spacing_nm;
            n += 1.0;
        }
    size_t middle = w->x.n / 2;
    at = n > 0.0 ? sum / n : w->across == ACROSS_SPACING ? w->x.v[middle] : w->spacing_nm;
    double x = w->across == ACROSS_SPACING ? at : inside(&w->x, w->here) ? w->here : w->x.v[middle];
    window_edge g = edge_at(w, fmin(fmax(x, w->x.v[0]), w->x.v[w->x.n - 1]));
    text_addf(out, "At a spacing of %s nm", number_text(at, 4, a));
    if (w->across != ACROSS_SPACING)
        text_addf(out, w->across == ACROSS_EXPONENT ? " and an exponent of %s" : " and a film of %s nm",
                  number_text(x, 4, a));
    text_addf(out, ", for a weighted reflectance of at most %s %%: ", number_percent(w->target, 4, b));
    if (w->across == ACROSS_SPACING && n > 0.0 && !inside(&w->x, at))
        text_add(out, "outside the map");
    else
        heights(g.height_nm, g.area_ratio, g.sure_height_nm, g.sure_area_ratio, out);
    text_add(out, ".");
}

static void samples_text(const window *w, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT];
    text_add(out, "\nToday's samples (reflectance and verdict as their own run gave them; the map follows "
                  "--protocol):\n");
    for (size_t i = 0; i < w->n_samples; i++) {
        const window_sample *s = &w->samples[i];
        window_edge g = edge_at(w, across_of(w, s));
        char shown[2] = { letter(w, i) ? letter(w, i) : ' ', '\0' };
        text_addf(out, "  %s %s: spacing %s nm, height %s nm", shown, s->name,
                  isfinite(s->spacing_nm) ? number_text(s->spacing_nm, 4, a) : "?",
                  isfinite(s->height_nm) ? number_text(s->height_nm, 4, b) : "?");
        if (isfinite(s->R)) text_addf(out, ", %s %%", number_percent(s->R, 3, c));
        if (s->verdict[0]) text_addf(out, ", %s", s->verdict);
        if (isfinite(g.height_nm) || isfinite(g.sure_height_nm)) {
            text_add(out, "; needs ");
            heights(g.height_nm, g.area_ratio, g.sure_height_nm, g.sure_area_ratio, out);
        }
        text_add(out, "\n");
    }
}

void window_text(const window *w, textbuf *out) {
    map(w, out);
    contour(w, out);
    if (w->n_samples) samples_text(w, out);
    text_add(out, "\n");
    answers(w, out);
    text_addf(out, "\n%s\n", passivation);
    if (w->note[0]) text_addf(out, "In the middle of the map: %s\n", w->note);
    text_addf(out, "%s\n", caution);
}
