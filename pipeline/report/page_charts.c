/* Charts of the page: spacing and weighted reflectance over the etches with their targets, and one predicted spectrum per
 * sample beside the two flat references. The time order is the ledger's when there is one, else etched_at of the samples.
 * A spectrum is thinned to about 5 nm for drawing; the full grid stands in spectra.csv. */
#include <cjson/cJSON.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "report/html.h"
#include "report/page.h"
#include "report/plot.h"

enum { MAX_ETCHES = 60, MAX_SPECTRA = 40, MAX_POINTS = 200 };

/* One point per etch. Names are borrowed from the samples or the parsed ledger. */
typedef struct {
    const char *name[MAX_ETCHES], *time[MAX_ETCHES];
    double x[MAX_ETCHES];
    double spacing[MAX_ETCHES], spacing_lo[MAX_ETCHES], spacing_hi[MAX_ETCHES];
    double R[MAX_ETCHES], R_lo[MAX_ETCHES], R_hi[MAX_ETCHES];
    plot_mark spacing_mark[MAX_ETCHES], R_mark[MAX_ETCHES];
    size_t n, left_out;
} etches;

static plot_mark mark_of(const char *verdict) {
    if (verdict && !strcmp(verdict, "conforms")) return MARK_DISC;
    if (verdict && !strcmp(verdict, "undecided")) return MARK_DIAMOND;
    if (verdict && !strcmp(verdict, "fails")) return MARK_TRIANGLE;
    return MARK_SQUARE;
}

static const char *text_or_empty(const char *s) { return s ? s : ""; }

/* The place for the next etch; a further measurement of the last one replaces it, the oldest gives way when full. */
static size_t next_place(etches *t, const char *name, const char *time) {
    if (t->n && *time && !strcmp(t->name[t->n - 1], name) && !strcmp(t->time[t->n - 1], time))
        return t->n - 1;
    if (t->n < MAX_ETCHES) {
        t->x[t->n] = (double)t->n;
        return t->n++;
    }
    for (size_t i = 1; i < MAX_ETCHES; i++) {
        t->name[i - 1] = t->name[i];
        t->time[i - 1] = t->time[i];
        t->spacing[i - 1] = t->spacing[i];
        t->spacing_lo[i - 1] = t->spacing_lo[i];
        t->spacing_hi[i - 1] = t->spacing_hi[i];
        t->R[i - 1] = t->R[i];
        t->R_lo[i - 1] = t->R_lo[i];
        t->R_hi[i - 1] = t->R_hi[i];
        t->spacing_mark[i - 1] = t->spacing_mark[i];
        t->R_mark[i - 1] = t->R_mark[i];
    }
    t->left_out++;
    return MAX_ETCHES - 1;
}

static void add_etch(etches *t, const char *name, const char *time, double spacing, double spacing_u,
                     double R, const char *verdict) {
    size_t i = next_place(t, text_or_empty(name), text_or_empty(time));
    t->name[i] = text_or_empty(name);
    t->time[i] = text_or_empty(time);
    t->spacing[i] = spacing;
    t->spacing_lo[i] = spacing - 2.0 * spacing_u;
    t->spacing_hi[i] = spacing + 2.0 * spacing_u;
    t->R[i] = 100.0 * R;
    t->R_lo[i] = t->R_hi[i] = MISSING;
    t->spacing_mark[i] = t->R_mark[i] = mark_of(verdict);
}

static double member_number(const cJSON *o, const char *key) {
    const cJSON *v = cJSON_GetObjectItemCaseSensitive(o, key);
    return cJSON_IsNumber(v) ? v->valuedouble : MISSING;
}

static const char *member_text(const cJSON *o, const char *key) {
    const cJSON *v = cJSON_GetObjectItemCaseSensitive(o, key);
    return cJSON_IsString(v) ? v->valuestring : "";
}

static void from_ledger(etches *t, const cJSON *list) {
    const cJSON *row;
    cJSON_ArrayForEach(row, list) {
        add_etch(t, member_text(row, "sample"), member_text(row, "etched_at"),
                 member_number(row, "spacing_nm"), member_number(row, "spacing_nm_u"),
                 member_number(row, "weighted_reflectance"), member_text(row, "verdict"));
    }
}

/* Samples without a time come last; equal times keep the order of the rows (the pointers are into one array). */
static int by_time(const void *a, const void *b) {
    const sample_row *p = *(const sample_row *const *)a, *q = *(const sample_row *const *)b;
    const char *s = text_or_empty(p->etched_at), *t = text_or_empty(q->etched_at);
    int order = !*s || !*t ? !*s - !*t : strcmp(s, t);
    return order ? order : (p > q) - (p < q);
}

static void from_samples(etches *t, const results *r, textbuf *out) {
    const sample_row **order = mem_array(r->n_samples, sizeof(sample_row *));
    if (!order) {
        out->failed = 1;
        return;
    }
    for (size_t i = 0; i < r->n_samples; i++) order[i] = &r->samples[i];
    qsort(order, r->n_samples, sizeof(sample_row *), by_time);
    for (size_t i = 0; i < r->n_samples; i++) {
        const sample_row *s = order[i];
        add_etch(t, s->sample, s->etched_at, s->spacing_nm, s->spacing_nm_u, s->weighted_reflectance,
                 s->verdict);
    }
    free(order);
}

/* The ledger keeps no interval of R and no verdict per quantity: taken from this run's samples where it is the same
 * etch. Other points carry the verdict of the whole sample. */
static void add_details(etches *t, const results *r) {
    for (size_t i = 0; i < t->n; i++)
        for (size_t k = 0; k < r->n_samples; k++) {
            const sample_row *s = &r->samples[k];
            if (strcmp(t->name[i], text_or_empty(s->sample)) ||
                strcmp(t->time[i], text_or_empty(s->etched_at)))
                continue;
            t->R_lo[i] = 100.0 * s->weighted_reflectance_lo;
            t->R_hi[i] = 100.0 * s->weighted_reflectance_hi;
            t->spacing_mark[i] = mark_of(page_extra(r, s, "verdict_spacing_nm"));
            t->R_mark[i] = mark_of(page_extra(r, s, "verdict_weighted_reflectance"));
        }
}

static void find_target(const results *r, const char *name, double factor, plot *p) {
    p->target_lo = p->target_hi = MISSING;
    for (size_t k = 0; k < r->n_targets; k++)
        if (!strcmp(r->target_quantity[k], name)) {
            p->target_lo = r->target_min ? factor * r->target_min[k] : MISSING;
            p->target_hi = r->target_max ? factor * r->target_max[k] : MISSING;
            p->target_label = "target range";
        }
}

static int any_finite(const double *v, size_t n) {
    for (size_t i = 0; i < n; i++)
        if (isfinite(v[i])) return 1;
    return 0;
}

static void draw_series(const results *r, const etches *t, const char *name, textbuf *out) {
    int R = !strcmp(name, "weighted_reflectance");
    plot_series s = { .x = t->x,
                      .y = R ? t->R : t->spacing,
                      .lo = R ? t->R_lo : t->spacing_lo,
                      .hi = R ? t->R_hi : t->spacing_hi,
                      .n = t->n,
                      .style = PLOT_POINTS,
                      .marks = R ? t->R_mark : t->spacing_mark };
    plot p = { .title = R ? "Weighted reflectance over the etches" : "Spacing over the etches",
               .x_label = "samples, in time order of the etch",
               .y_label = R ? "weighted reflectance (%)" : "spacing (nm)",
               .from_zero = R,
               .y_lo = MISSING,
               .y_hi = MISSING,
               .names = t->name,
               .n_names = t->n,
               .series = &s,
               .n_series = 1,
               .width = 1040,
               .height = 300 };
    if (!any_finite(s.y, t->n)) return;
    find_target(r, name, R ? 100.0 : 1.0, &p);
    text_add(out, "<figure><div class=\"scroll wide\" tabindex=\"0\">\n");
    plot_svg(&p, out);
    text_add(out, R ? "</div><figcaption>Bars: 95 % interval of the prediction, where this run made "
                      "it.</figcaption></figure>\n"
                    : "</div><figcaption>Bars: \xc2\xb1 U (k = 2).</figcaption></figure>\n");
}

void page_series(const results *r, textbuf *out) {
    cJSON *ledger = r->history_json ? cJSON_Parse(r->history_json) : NULL;
    etches *t = mem_array(1, sizeof *t);
    if (!t) {
        out->failed = 1;
        goto done;
    }
    if (cJSON_IsArray(ledger) && cJSON_GetArraySize(ledger) > 0)
        from_ledger(t, ledger);
    else
        from_samples(t, r, out);
    add_details(t, r);
    if (!any_finite(t->spacing, t->n) && !any_finite(t->R, t->n)) goto done;
    text_add(out, "<section id=\"series\"><h2>Etch series</h2>\n<ul class=\"key\">"
                  "<li><span class=\"good\">\xe2\x97\x8f</span> conforms</li>"
                  "<li><span class=\"open\">\xe2\x97\x86</span> undecided</li>"
                  "<li><span class=\"bad\">\xe2\x96\xb2</span> fails</li><li>\xe2\x96\xa1 no target</li>"
                  "<li>on this quantity; etches of earlier runs: of the whole sample</li></ul>\n");
    draw_series(r, t, "spacing_nm", out);
    draw_series(r, t, "weighted_reflectance", out);
    if (t->left_out)
        text_addf(out,
                  "<p class=\"small\">The last %zu etches are drawn; %zu older ones are in the ledger.</p>\n",
                  t->n, t->left_out);
    if (r->history_note && *r->history_note) {
        text_add(out, "<p class=\"small\">");
        html_text(out, r->history_note);
        text_add(out, "</p>\n");
    }
    text_add(out, "</section>\n");
done:
    free(t);
    cJSON_Delete(ledger);
}

/* A curve thinned to at most MAX_POINTS, in percent. */
typedef struct {
    double x[MAX_POINTS], y[MAX_POINTS], lo[MAX_POINTS], hi[MAX_POINTS];
    size_t n;
} thin_curve;

static size_t stride(size_t n) { return n > MAX_POINTS ? (n + MAX_POINTS - 2) / (MAX_POINTS - 1) : 1; }

static void thin_spectrum(const spectrum_row *s, size_t n, thin_curve *c) {
    size_t step = stride(n);
    c->n = 0;
    for (size_t i = 0; i < n && c->n < MAX_POINTS; i += step) {
        c->x[c->n] = s[i].wavelength_nm;
        c->y[c->n] = 100.0 * s[i].reflectance;
        c->lo[c->n] = 100.0 * s[i].reflectance_lo;
        c->hi[c->n++] = 100.0 * s[i].reflectance_hi;
    }
}

static void thin_reference(const results *r, const double *R, thin_curve *c) {
    size_t step = stride(r->n_reference);
    c->n = 0;
    for (size_t i = 0; R && r->reference_wavelength_nm && i < r->n_reference && c->n < MAX_POINTS;
         i += step) {
        c->x[c->n] = r->reference_wavelength_nm[i];
        c->y[c->n++] = 100.0 * R[i];
    }
}

typedef struct {
    thin_curve sample, polished, coated;
    double floor; /* of the axis, % : the same for all, so that the charts compare */
} spectrum_curves;

/* The decade below the lowest value, within 0.01 .. 1 %. */
static double axis_floor(const results *r) {
    double least = 0.01;
    for (size_t i = 0; i < r->n_spectra; i++) {
        const spectrum_row *s = &r->spectra[i];
        if (s->reflectance > 0.0) least = fmin(least, s->reflectance);
        if (s->reflectance_lo > 0.0) least = fmin(least, s->reflectance_lo);
    }
    return fmax(0.01, pow(10.0, floor(log10(100.0 * least))));
}

static void draw_spectrum(const results *r, size_t from, size_t n, spectrum_curves *k, textbuf *out) {
    const spectrum_row *s = &r->spectra[from];
    char angle[NUMBER_TEXT];
    textbuf title = { 0 };
    thin_spectrum(s, n, &k->sample);
    text_addf(&title, "%s", text_or_empty(s->sample));
    if (s->angle_deg > 0.0) text_addf(&title, ", %s deg", number_text(s->angle_deg, 4, angle));
    const char *light = text_or_empty(s->polarization);
    if (!strcmp(light, "diffuse"))
        text_add(&title, ", diffuse light");
    else if (*light && strcmp(light, "mean"))
        text_addf(&title, ", %s polarised", light);
    plot_series series[3] = {
        { .x = k->polished.x,
          .y = k->polished.y,
          .n = k->polished.n,
          .style = PLOT_DASHED,
          .tone = 2,
          .label = k->polished.n ? "polished" : NULL },
        { .x = k->coated.x,
          .y = k->coated.y,
          .n = k->coated.n,
          .style = PLOT_DOTTED,
          .tone = 1,
          .label = k->coated.n ? "75 nm nitride" : NULL },
        { .x = k->sample.x,
          .y = k->sample.y,
          .lo = k->sample.lo,
          .hi = k->sample.hi,
          .n = k->sample.n,
          .tone = 0,
          .label = "this texture, 95 % band" },
    };
    plot p = { .title = title.s ? title.s : "",
               .x_label = "wavelength (nm)",
               .y_label = "reflectance (%), log scale",
               .log_y = 1,
               .y_lo = k->floor,
               .y_hi = 100.0,
               .target_lo = MISSING,
               .target_hi = MISSING,
               .series = series,
               .n_series = 3,
               .width = 520,
               .height = 330 };
    text_add(out, "<figure>");
    plot_svg(&p, out);
    text_add(out, "</figure>\n");
    if (title.failed) out->failed = 1;
    text_free(&title);
}

static int same_curve(const spectrum_row *a, const spectrum_row *b) {
    return !strcmp(text_or_empty(a->sample), text_or_empty(b->sample)) &&
           !strcmp(text_or_empty(a->polarization), text_or_empty(b->polarization)) &&
           !(a->angle_deg < b->angle_deg) && !(a->angle_deg > b->angle_deg);
}

static void draw_spectra(const results *r, textbuf *out) {
    spectrum_curves *k = mem_array(1, sizeof *k);
    if (!k) {
        out->failed = 1;
        return;
    }
    thin_reference(r, r->polished_R, &k->polished);
    thin_reference(r, r->coated_R, &k->coated);
    k->floor = axis_floor(r);
    size_t drawn = 0, curves = 0;
    char floor_text[NUMBER_TEXT];
    text_add(out, "<div class=\"charts\">\n");
    for (size_t from = 0, to; from < r->n_spectra; from = to, curves++) {
        for (to = from + 1; to < r->n_spectra && same_curve(&r->spectra[from], &r->spectra[to]);) to++;
        if (drawn < MAX_SPECTRA && ++drawn) draw_spectrum(r, from, to - from, k, out);
    }
    text_add(out, "</div>\n");
    text_addf(out,
              "<p class=\"small\">All charts have the same axes. A curve that leaves the chart at the bottom "
              "lies below "
              "%s %%.</p>\n",
              number_text(k->floor, 3, floor_text));
    if (curves > drawn)
        text_addf(
            out,
            "<p class=\"small\">The first %zu of %zu spectra are drawn; spectra.csv holds them all.</p>\n",
            drawn, curves);
    free(k);
}

static const char *const optics_shown[] = { "weighted_reflectance",
                                            "current_loss_mA_cm2",
                                            "polished_reflectance",
                                            "coated_reflectance",
                                            "subwavelength_share",
                                            "height_nm",
                                            "height_source",
                                            "aspect",
                                            "area_ratio" };
enum { OPTICS_SHOWN = sizeof optics_shown / sizeof optics_shown[0] };

static const char *optics_heading(const char *name) {
    if (!strcmp(name, "height_source")) return "Height from";
    if (!strcmp(name, "aspect")) return "Aspect";
    if (!strcmp(name, "coated_reflectance")) return "With 75 nm nitride";
    return page_quantity(name);
}

static const column *sample_column(const char *name) {
    return column_find(sample_columns, n_sample_columns, name);
}

static void optics_cell(textbuf *out, const sample_row *s, const char *name) {
    const column *c = sample_column(name), *lo = sample_column("weighted_reflectance_lo");
    const column *hi = sample_column("weighted_reflectance_hi");
    if (!c || !lo || !hi) return;
    if (c->kind == COL_TEXT) {
        text_add(out, "<td>");
        html_cell(out, c, s);
        text_add(out, "</td>");
        return;
    }
    text_add(out, "<td class=\"n\">");
    html_value(out, c, strcmp(name, "height_nm") ? NULL : sample_column("height_nm_u"), s,
               page_percent(name));
    text_add(out, "</td>");
    if (strcmp(name, "weighted_reflectance")) return;
    text_add(out, "<td class=\"n\">");
    html_number(out, lo, s, 1);
    text_add(out, " to ");
    html_number(out, hi, s, 1);
    text_add(out, "</td>");
}

static void optics_table(const results *r, textbuf *out) {
    text_add(out, "<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"Predicted reflectance "
                  "of the samples\">"
                  "<table class=\"sort\"><thead><tr><th scope=\"col\">Sample</th>");
    for (size_t k = 0; k < OPTICS_SHOWN; k++) {
        const column *c = sample_column(optics_shown[k]);
        text_addf(out, "<th scope=\"col\"%s>%s", c && c->kind == COL_TEXT ? "" : " class=\"n\"",
                  optics_heading(optics_shown[k]));
        if (page_percent(optics_shown[k]))
            text_add(out, "<br><span class=\"unit\">%</span>");
        else if (c && c->unit[0] && strcmp(c->unit, "1"))
            text_addf(out, "<br><span class=\"unit\">%s</span>", c->unit);
        text_add(out, "</th>");
        if (!k)
            text_add(out,
                     "<th scope=\"col\" class=\"n\">95 % interval<br><span class=\"unit\">%</span></th>");
    }
    text_add(out, "</tr></thead><tbody>\n");
    for (size_t i = 0; i < r->n_samples; i++) {
        text_add(out, "<tr><th scope=\"row\">");
        html_text(out, r->samples[i].sample);
        text_add(out, "</th>");
        for (size_t k = 0; k < OPTICS_SHOWN; k++) optics_cell(out, &r->samples[i], optics_shown[k]);
        text_add(out, "</tr>\n");
    }
    text_add(out, "</tbody></table></div>\n");
}

void page_spectra(const results *r, textbuf *out) {
    if (!r->n_samples) return;
    text_add(
        out,
        "<section id=\"optics\"><h2>Predicted reflectance</h2>\n<p class=\"lead\">Of the front surface only, "
        "by the "
        "graded-index model; averaged over the photon flux of the sun (AM1.5G). Light that a measurement "
        "gets back "
        "from the rear beyond about 1000 nm is not in these figures. Where the height is assumed, so is the "
        "reflectance.</p>\n");
    optics_table(r, out);
    if (r->n_spectra) draw_spectra(r, out);
    text_add(out, "</section>\n");
}
