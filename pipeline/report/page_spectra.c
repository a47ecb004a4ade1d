/* The predicted spectra as small multiples on shared axes, beside polished and coated silicon, and the optics of every sample as
 * one table. A spectrum is thinned to a few nm for drawing; the full grid stands in spectra.csv. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "report/html.h"
#include "report/page.h"
#include "report/plot.h"

enum { MAX_POINTS = 101 };

static const char *text_or_empty(const char *s) { return s ? s : ""; }

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
               .y_label = "reflectance (%)",
               .log_y = 1,
               .y_lo = k->floor,
               .y_hi = 100.0,
               .target_lo = MISSING,
               .target_hi = MISSING,
               .series = series,
               .n_series = 3,
               .width = 340,
               .height = 240,
               .no_legend = 1 };
    text_add(out, "<figure>");
    plot_chart(&p, 2, "references", out);
    text_add(out, "</figure>\n");
    if (title.failed) out->failed = 1;
    text_free(&title);
}

/* Once for all charts: the table of the two references. */
static void draw_references(const spectrum_curves *k, textbuf *out) {
    plot_series series[2] = { { .x = k->polished.x, .y = k->polished.y, .n = k->polished.n, .label = "polished" },
                              { .x = k->coated.x, .y = k->coated.y, .n = k->coated.n, .label = "75 nm nitride" } };
    plot p = { .title = "polished and coated silicon", .x_label = "wavelength (nm)", .y_label = "reflectance (%)",
               .series = series, .n_series = 2 };
    plot_table(&p, 0, "references", out);
}

static int same_curve(const spectrum_row *a, const spectrum_row *b) {
    return !strcmp(text_or_empty(a->sample), text_or_empty(b->sample)) &&
           !strcmp(text_or_empty(a->polarization), text_or_empty(b->polarization)) &&
           !(a->angle_deg < b->angle_deg) && !(a->angle_deg > b->angle_deg);
}

static int is_picked(const results *r, const size_t *picked, size_t n, const char *sample) {
    for (size_t k = 0; k < n; k++)
        if (!strcmp(text_or_empty(r->samples[picked[k]].sample), text_or_empty(sample))) return 1;
    return 0;
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
    size_t n = 0, *picked = page_pick(r, &n, out);
    char floor_text[NUMBER_TEXT];
    text_add(out, "<h3>Predicted spectra</h3>\n<ul class=\"key\"><li><span class=\"line texture\"></span> this texture, with its 95 % "
                  "band</li><li><span class=\"line polished\"></span> polished silicon</li><li><span class=\"line "
                  "coated\"></span> polished under 75 nm of silicon nitride</li></ul>\n"
                  "<div class=\"charts small-multiples\">\n");
    for (size_t from = 0, to; from < r->n_spectra; from = to) {
        for (to = from + 1; to < r->n_spectra && same_curve(&r->spectra[from], &r->spectra[to]);) to++;
        if (is_picked(r, picked, n, r->spectra[from].sample)) draw_spectrum(r, from, to - from, k, out);
    }
    text_add(out, "</div>\n");
    text_addf(out,
              "<p class=\"small\">All charts have the same axes, the reflectance on a logarithmic scale. A curve that leaves the chart at the bottom "
              "lies below "
              "%s %%.</p>\n",
              number_text(k->floor, 3, floor_text));
    draw_references(k, out);
    page_pick_note(r, n, "the spectra", "are in spectra.csv", out);
    free(picked);
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
    int weighted = !strcmp(name, "weighted_reflectance");
    text_add(out, "<td class=\"n\">");
    if (weighted || !strcmp(name, "current_loss_mA_cm2"))
        html_number(out, c, s, page_percent(name), 2);
    else
        html_value(out, c, strcmp(name, "height_nm") ? NULL : sample_column("height_nm_u"), s, page_percent(name));
    text_add(out, "</td>");
    if (!weighted) return;
    text_add(out, "<td class=\"n\">");
    html_number(out, lo, s, 1, 2);
    text_add(out, " to ");
    html_number(out, hi, s, 1, 2);
    text_add(out, "</td>");
}

static void optics_table(const results *r, textbuf *out) {
    text_add(out, "<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"Predicted reflectance "
                  "of the samples\">"
                  "<table class=\"sort csv\"><thead><tr><th scope=\"col\">Sample</th>");
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
    page_angles(r, out);
    text_add(out, "</section>\n");
}
