/* The design is nested: sessions of an operator, operators at a place. An operator's shift that is the same at every place is
 * thereby counted once per place, as ISO 5725-2 does when it pools its levels. Places are no part of the measurement's error:
 * they are what is measured. A single reading is judged; means of k micrographs are better by up to sqrt(k) in s_r. Not in
 * here: outlier tests; a wild reading shows in its own row of images.csv. */
#include "app/repeat.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"

/* Largest share of a target's width that twice the expanded uncertainty may take, ISO 22514-7 (from memory). */
static const double capable_share = 0.30;

static double root(double variance) { return isfinite(variance) ? sqrt(variance) : MISSING; }
static double known(double variance) { return isfinite(variance) ? variance : 0.0; }

static size_t distinct(const repeat_reading *r, size_t n, int whole) {
    size_t found = 0;
    for (size_t i = 0; i < n; i++) {
        size_t k = 0;
        while (k < i && !(r[k].place == r[i].place &&
                          (!whole || (r[k].operator_id == r[i].operator_id && r[k].session == r[i].session))))
            k++;
        found += k == i;
    }
    return found;
}

static void fill(const anova *a, repeat_result *out) {
    const anova_line *residual = &a->line[a->factors];
    out->mean = a->mean;
    out->n = a->n;
    out->s_place = root(a->line[REPEAT_PLACE].variance);
    out->s_operator = root(a->line[REPEAT_OPERATOR].variance);
    out->s_session = root(a->line[REPEAT_SESSION].variance);
    out->s_repeat = root(residual->variance);
    out->dof_repeat = residual->dof;
    double between = known(a->line[REPEAT_OPERATOR].variance) + known(a->line[REPEAT_SESSION].variance);
    int varied = isfinite(out->s_operator) || isfinite(out->s_session);
    out->s_reproduce = varied && isfinite(out->s_repeat) ? sqrt(between + residual->variance) : MISSING;
    double two = 1.959963984540054 * sqrt(2.0);
    out->limit_repeat = two * out->s_repeat;
    out->limit_reproduce = two * out->s_reproduce;
}

static void capability(double min, double max, repeat_result *out) {
    double u = isfinite(out->s_reproduce) ? out->s_reproduce : out->s_repeat, full = hypot(u, out->u_common);
    out->width = max - min;
    out->share_repeat = 4.0 * u / out->width;
    out->share_full = 4.0 * full / out->width;
    out->index_repeat = 0.3 * out->width / (3.0 * u);
    out->index_full = 0.3 * out->width / (3.0 * full);
}

status repeat_analyse(const repeat_reading *r, size_t n, int q, double min, double max, repeat_result *out, error *e) {
    repeat_reading *used = mem_array(n, sizeof *used);
    double *v = mem_array(n, sizeof *v);
    int *label = mem_array(n, 3 * sizeof *label);
    status st = used && v && label ? ST_OK : NO_MEMORY(e, "the repetitions");
    size_t m = 0;
    double common = 0.0;
    anova a;
    for (size_t i = 0; st == ST_OK && i < n; i++) {
        const figure *f = &r[i].image->figures[q];
        if (!isfinite(f->m.value)) continue;
        v[m] = f->m.value;
        label[3 * m + REPEAT_PLACE] = r[i].place;
        label[3 * m + REPEAT_OPERATOR] = r[i].operator_id;
        label[3 * m + REPEAT_SESSION] = r[i].session;
        common += f->m.u_method * f->m.u_method + f->u_px * f->u_px;
        used[m++] = r[i];
    }
    if (st == ST_OK && m < 2)
        st = fail(e, ST_NO_RESULT, "%s was measured on %zu micrographs; expected at least 2", quantity_table[q].name, m);
    if (st == ST_OK) st = anova_nested(v, label, m, 3, &a, e);
    if (st == ST_OK) {
        *out = (repeat_result){ .quantity = quantity_table[q].name, .unit = "", .digits = 5,
                                .places = distinct(used, m, 0), .groups = distinct(used, m, 1),
                                .u_common = sqrt(common / (double)m) };
        for (size_t c = 0; c < n_image_columns; c++)
            if (!strcmp(image_columns[c].name, out->quantity) && strcmp(image_columns[c].unit, "1")) out->unit = image_columns[c].unit;
        fill(&a, out);
        capability(min, max, out);
    }
    free(label);
    free(v);
    free(used);
    return st;
}

static void line(textbuf *t, const char *name, double s, const repeat_result *r, const char *if_missing) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    if (isfinite(s))
        text_addf(t, "  %-18s %s%s%s (%s %%)\n", name, number_text(s, 3, a), r->unit[0] ? " " : "", r->unit,
                  number_percent(s / fabs(r->mean), 2, b));
    else if (if_missing[0])
        text_addf(t, "  %-18s unknown: %s\n", name, if_missing);
}

static void capability_line(textbuf *t, const char *name, double share, double index) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    text_addf(t, "  %-18s takes %s %% of the target's width, index %s: %s\n", name, number_percent(share, 3, a), number_text(index, 3, b),
              share <= capable_share ? "capable (30 % or less)" : "not capable (above 30 %)");
}

void repeat_text(const repeat_result *r, textbuf *t) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    const char *gap = r->unit[0] ? " " : "";
    text_addf(t, "%s: mean %s%s%s of %zu micrographs, %zu place%s\n", r->quantity, number_text(r->mean, r->digits, a), gap, r->unit, r->n,
              r->places, r->places == 1 ? "" : "s");
    line(t, "repeatability", r->s_repeat, r, "no place was taken twice under the same conditions");
    if (isfinite(r->s_repeat))
        text_addf(t, "  %-18s two readings differ by less than %s%s%s in 95 %% of cases (%s degrees of freedom)\n", "", number_text(r->limit_repeat, 3, a),
                  gap, r->unit, number_text(r->dof_repeat, 4, b));
    line(t, "between operators", r->s_operator, r, "");
    line(t, "between sessions", r->s_session, r, "");
    line(t, "reproducibility", r->s_reproduce, r, "no second operator or session at any place");
    line(t, "between places", r->s_place, r, "");
    line(t, "not seen here", r->u_common, r, "");
    if (isfinite(r->share_repeat)) {
        capability_line(t, "run to run", r->share_repeat, r->index_repeat);
        capability_line(t, "all errors", r->share_full, r->index_full);
    }
}

void repeat_json(const repeat_result *r, textbuf *t) {
    const struct {
        const char *name;
        double v;
    } members[] = { { "mean", r->mean },
                    { "s_repeatability", r->s_repeat },
                    { "dof_repeatability", r->dof_repeat },
                    { "s_operator", r->s_operator },
                    { "s_session", r->s_session },
                    { "s_reproducibility", r->s_reproduce },
                    { "s_place", r->s_place },
                    { "limit_repeatability", r->limit_repeat },
                    { "limit_reproducibility", r->limit_reproduce },
                    { "u_common", r->u_common },
                    { "target_width", r->width },
                    { "target_share", r->share_repeat },
                    { "target_share_full", r->share_full },
                    { "capability", r->index_repeat },
                    { "capability_full", r->index_full } };
    text_add(t, "{\"quantity\": ");
    json_string(t, r->quantity);
    text_add(t, ", \"unit\": ");
    json_string(t, r->unit);
    text_addf(t, ", \"n\": %zu, \"places\": %zu, \"groups\": %zu", r->n, r->places, r->groups);
    for (size_t i = 0; i < sizeof members / sizeof members[0]; i++) {
        text_addf(t, ", \"%s\": ", members[i].name);
        json_number(t, isfinite(members[i].v) ? members[i].v : MISSING, i ? 4 : r->digits);
    }
    text_addf(t, ", \"capable\": %s}", !isfinite(r->share_repeat) ? "null" : r->share_repeat <= capable_share ? "true" : "false");
}
