#include "app/wafers.h"

#include <stddef.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "io/json.h"
#include "judge/wafer.h"

typedef struct {
    const sample_row *rows;
    const double *x_mm, *y_mm;
    size_t n;
    double *v, *x, *y; /* of one wafer, [n] */
} places;

static const struct {
    const char *name, *unit;
    size_t offset;
    int digits;
} watched[] = { { "spacing_nm", "nm", offsetof(sample_row, spacing_nm), 5 },
                { "density_per_um2", "1/um2", offsetof(sample_row, density_per_um2), 5 },
                { "weighted_reflectance", "", offsetof(sample_row, weighted_reflectance), 5 } };

static int same_wafer(const sample_row *a, const sample_row *b) {
    return a->wafer[0] && !strcmp(a->wafer, b->wafer) && !strcmp(a->lot, b->lot);
}

static int is_first(const places *p, size_t i) {
    for (size_t k = 0; k < i; k++)
        if (same_wafer(&p->rows[i], &p->rows[k])) return 0;
    return p->rows[i].wafer[0] != '\0';
}

static size_t take(const places *p, size_t first, size_t offset) {
    size_t n = 0;
    for (size_t i = first; i < p->n; i++) {
        if (!same_wafer(&p->rows[first], &p->rows[i])) continue;
        memcpy(&p->v[n], (const char *)&p->rows[i] + offset, sizeof(double));
        p->x[n] = p->x_mm[i];
        p->y[n++] = p->y_mm[i];
    }
    return n;
}

static void member(textbuf *t, const char *name, double v) {
    text_addf(t, ", \"%s\": ", name);
    json_number(t, v, 5);
}

static void add_json(const sample_row *r, const char *quantity_name, const wafer_evenness *w, textbuf *t) {
    text_add(t, t->n > 1 ? ",\n    {\"lot\": " : "\n    {\"lot\": ");
    json_string(t, r->lot);
    text_add(t, ", \"wafer\": ");
    json_string(t, r->wafer);
    text_addf(t, ", \"quantity\": \"%s\", \"n\": %zu", quantity_name, w->n);
    member(t, "mean", w->mean);
    member(t, "sd", w->sd);
    member(t, "sd_rel", w->sd_rel);
    member(t, "range", w->range);
    member(t, "edge_minus_centre", w->edge_minus_centre);
    member(t, "edge_minus_centre_rel", w->edge_minus_centre_rel);
    text_add(t, "}");
}

static void one_wafer(const places *p, size_t first, textbuf *objects, textbuf *lines) {
    const sample_row *r = &p->rows[first];
    for (size_t q = 0; q < sizeof watched / sizeof watched[0]; q++) {
        wafer_evenness w;
        size_t n = take(p, first, watched[q].offset);
        if (!wafer_even(p->v, p->x, p->y, n, &w)) continue;
        add_json(r, watched[q].name, &w, objects);
        if (q != 0) continue;
        textbuf name = { 0 };
        sentence_subject s = { watched[q].name, watched[q].unit, watched[q].digits, MISSING, MISSING };
        text_addf(&name, "%s%s%s", r->lot, r->lot[0] ? " " : "", r->wafer);
        if (name.failed) lines->failed = 1;
        else wafer_sentence(&s, name.s, &w, lines);
        text_add(lines, ".\n");
        text_free(&name);
    }
}

status wafers_describe(const sample_row *rows, const double *x_mm, const double *y_mm, size_t n, textbuf *objects, textbuf *lines,
                       error *e) {
    places p = { rows, x_mm, y_mm, n, mem_array(n, sizeof(double)), mem_array(n, sizeof(double)), mem_array(n, sizeof(double)) };
    status st = p.v && p.x && p.y ? ST_OK : NO_MEMORY(e, "the wafers");
    text_add(objects, "[");
    for (size_t i = 0; st == ST_OK && i < n; i++)
        if (is_first(&p, i)) one_wafer(&p, i, objects, lines);
    text_add(objects, objects->n > 1 ? "\n  ]" : "]");
    free(p.v);
    free(p.x);
    free(p.y);
    if (st == ST_OK) st = text_check(objects, "the wafers", e);
    return st == ST_OK ? text_check(lines, "the wafers", e) : st;
}
