/* The part of the page that is read first: how many samples conform, which do not, and for every sample each target with
 * value, expanded uncertainty, range and sentence. Then all texture numbers of the samples in one table. */
#include <math.h>
#include <string.h>

#include "base/number.h"
#include "report/html.h"
#include "report/page.h"

int page_percent(const char *name) {
    return strstr(name, "reflectance") || !strcmp(name, "subwavelength_share");
}

const char *page_quantity(const char *name) {
    static const char *const known[][2] = {
        { "spacing_nm", "Spacing" },
        { "density_per_um2", "Density" },
        { "size_d10_nm", "Cell size D10" },
        { "size_d50_nm", "Cell size D50" },
        { "size_d90_nm", "Cell size D90" },
        { "size_mean_nm", "Mean cell size" },
        { "size_gsd", "Geometric sd of sizes" },
        { "bright_share", "Bright share" },
        { "clark_evans", "Clark-Evans index" },
        { "height_nm", "Height" },
        { "aspect", "Aspect (height / spacing)" },
        { "area_ratio", "Surface area ratio" },
        { "weighted_reflectance", "Weighted reflectance" },
        { "current_loss_mA_cm2", "Current loss" },
        { "subwavelength_share", "Sub-wavelength share" },
        { "polished_reflectance", "Polished" },
        { "coated_reflectance", "Polished + 75 nm nitride" },
    };
    for (size_t i = 0; i < sizeof known / sizeof known[0]; i++)
        if (!strcmp(known[i][0], name)) return known[i][1];
    return name;
}

const char *page_extra(const results *r, const sample_row *s, const char *name) {
    for (size_t k = 0; k < r->n_sample_extra && k < s->n_extra; k++)
        if (!strcmp(r->sample_extra[k], name)) return s->extra[k];
    return NULL;
}

/* The column whose name is `name` + `suffix`, or NULL. */
static const column *sample_column(const char *name, const char *suffix) {
    textbuf full = { 0 };
    text_addf(&full, "%s%s", name, suffix);
    const column *c = full.failed ? NULL : column_find(sample_columns, n_sample_columns, full.s);
    text_free(&full);
    return c;
}

static void add_unit(textbuf *out, const column *c) {
    if (page_percent(c->name))
        text_add(out, " <span class=\"unit\">%</span>");
    else if (c->unit[0] && strcmp(c->unit, "1")) {
        text_add(out, " <span class=\"unit\">");
        html_text(out, c->unit);
        text_add(out, "</span>");
    }
}

/* Value with U (k = 2), or with its 95 % interval where the table has one. */
static void add_sample_value(textbuf *out, const sample_row *s, const char *name) {
    const column *c = sample_column(name, ""), *lo = sample_column(name, "_lo"),
                 *hi = sample_column(name, "_hi");
    if (!c) {
        text_add(out, "\xe2\x80\x93");
        return;
    }
    html_value(out, c, sample_column(name, "_u"), s, page_percent(name));
    char cell[NUMBER_TEXT];
    if (lo && hi && *column_cell(lo, s, cell) && *column_cell(hi, s, cell)) {
        text_add(out, " <span class=\"u\">(");
        html_number(out, lo, s, page_percent(name));
        text_add(out, " to ");
        html_number(out, hi, s, page_percent(name));
        text_add(out, ")</span>");
    }
    if (*column_cell(c, s, cell)) add_unit(out, c);
}

static void add_limit(textbuf *out, const column *c, const char *name, double v) {
    char text[NUMBER_TEXT];
    int digits = c ? c->digits : 6;
    text_add(out, page_percent(name) ? number_percent(v, digits, text) : number_text(v, digits, text));
}

static void add_range(textbuf *out, const results *r, size_t k) {
    const char *name = r->target_quantity[k];
    const column *c = sample_column(name, "");
    double lo = r->target_min ? r->target_min[k] : (double)NAN,
           hi = r->target_max ? r->target_max[k] : (double)NAN;
    if (isfinite(lo) && isfinite(hi)) {
        add_limit(out, c, name, lo);
        text_add(out, " to ");
        add_limit(out, c, name, hi);
    } else if (isfinite(hi)) {
        text_add(out, "at most ");
        add_limit(out, c, name, hi);
    } else if (isfinite(lo)) {
        text_add(out, "at least ");
        add_limit(out, c, name, lo);
    }
    if (c) add_unit(out, c);
}

static int is_word(const char *s, const char *word) { return s && !strcmp(s, word); }

static size_t count_verdicts(const results *r, const char *word) {
    size_t n = 0;
    for (size_t i = 0; i < r->n_samples; i++) n += (size_t)is_word(r->samples[i].verdict, word);
    return n;
}

static size_t count_status(const results *r, const char *word) {
    size_t n = 0;
    for (size_t i = 0; i < r->n_images; i++) n += (size_t)is_word(r->images[i].status, word);
    return n;
}

static void add_tile(textbuf *out, const char *class_name, size_t n, size_t of, const char *what) {
    text_addf(out, "<div class=\"tile %s\"><b>%zu", class_name, n);
    if (of) text_addf(out, " <small>of %zu</small>", of);
    text_addf(out, "</b><span>%s</span></div>\n", what);
}

/* "Fails: A, B." with a link to each. */
static void add_named(const results *r, const char *word, const char *lead, textbuf *out) {
    size_t n = 0;
    for (size_t i = 0; i < r->n_samples; i++) {
        if (!is_word(r->samples[i].verdict, word)) continue;
        text_add(out, n++ ? ", " : lead);
        text_addf(out, "<a href=\"#sample-%zu\">", i + 1);
        html_text(out, r->samples[i].sample);
        text_add(out, "</a>");
    }
    if (n) text_add(out, ".</p>\n");
}

static void add_headline(const results *r, textbuf *out) {
    size_t conforms = count_verdicts(r, "conforms"), fails = count_verdicts(r, "fails");
    size_t undecided = count_verdicts(r, "undecided"), used = count_status(r, "ok");
    text_add(out, "<div class=\"headline\">\n");
    if (r->n_targets) {
        add_tile(out, "good", conforms, r->n_samples,
                 r->n_samples == 1 ? "sample conforms" : "samples conform");
        add_tile(out, fails ? "bad" : "none", fails, 0, "outside its target");
        add_tile(out, undecided ? "open" : "none", undecided, 0,
                 "undecided: the uncertainty straddles a limit");
    } else {
        add_tile(out, "none", r->n_samples, 0,
                 r->n_samples == 1 ? "sample, no targets set" : "samples, no targets set");
    }
    add_tile(out, used < r->n_images ? "open" : "good", used, r->n_images, "micrographs used");
    text_add(out, "</div>\n");
    add_named(r, "fails", "<p><strong>Fails:</strong> ", out);
    add_named(r, "undecided", "<p><strong>Undecided:</strong> ", out);
    if (!r->n_samples) text_add(out, "<p><strong>No sample could be formed from these files.</strong></p>\n");
}

/* Each picture that did not enter its sample, with the reason and a link to its card. */
static void add_not_used(const results *r, textbuf *out) {
    enum { MOST = 12 };
    size_t n = 0;
    for (size_t i = 0; i < r->n_images; i++) {
        const image_row *m = &r->images[i];
        if (is_word(m->status, "ok") || ++n > MOST) continue;
        text_add(out, n == 1 ? "<p><strong>Not used:</strong> " : "; ");
        text_addf(out, "<a href=\"#micrograph-%zu\">", i + 1);
        html_text(out, m->file);
        text_add(out, "</a> (");
        if (m->reason && *m->reason)
            page_flags(out, m->reason);
        else
            html_text(out, m->status);
        text_add(out, ")");
    }
    if (n > MOST) text_addf(out, "; and %zu more", n - MOST);
    if (n) text_add(out, ".</p>\n");
}

static void add_sample_head(const results *r, size_t i, textbuf *out) {
    const sample_row *s = &r->samples[i];
    const char *detail[][2] = {
        { "lot ", s->lot }, { "wafer ", s->wafer }, { "position ", s->position }, { "etched ", s->etched_at }
    };
    text_addf(out, "<tbody class=\"sample\" id=\"sample-%zu\"><tr><th scope=\"rowgroup\" colspan=\"3\">",
              i + 1);
    html_text(out, s->sample);
    text_add(out, "<small>");
    for (size_t k = 0; k < 4; k++)
        if (detail[k][1] && *detail[k][1]) {
            text_add(out, detail[k][0]);
            html_text(out, detail[k][1]);
            text_add(out, " \xc2\xb7 ");
        }
    text_addf(out, "%ld of %ld micrographs used</small></th><th>", s->n_used, s->n_images);
    html_badge(out, s->verdict);
    text_add(out, "</th></tr>\n");
}

static void add_target_row(const results *r, const sample_row *s, size_t k, textbuf *out) {
    textbuf extra = { 0 };
    const char *name = r->target_quantity[k];
    text_addf(&extra, "verdict_%s", name);
    text_add(out, "<tr><td>");
    html_text(out, page_quantity(name));
    text_add(out, "</td><td>");
    add_sample_value(out, s, name);
    text_add(out, "</td><td>");
    add_range(out, r, k);
    text_add(out, "</td><td>");
    const char *word = extra.failed ? NULL : page_extra(r, s, extra.s);
    html_badge(out, word && *word ? word : "not_measured");
    text_add(out, "</td></tr>\n");
    text_free(&extra);
}

static void add_plain_row(const sample_row *s, const char *name, textbuf *out) {
    text_addf(out, "<tr><td>%s</td><td>", page_quantity(name));
    add_sample_value(out, s, name);
    text_add(out, "</td><td>none</td><td></td></tr>\n");
}

static int has_target(const results *r, const char *name) {
    for (size_t k = 0; k < r->n_targets; k++)
        if (!strcmp(r->target_quantity[k], name)) return 1;
    return 0;
}

void page_verdicts(const results *r, textbuf *out) {
    text_add(out, "<section id=\"verdicts\" aria-label=\"Verdicts\">\n");
    add_headline(r, out);
    add_not_used(r, out);
    if (r->summary && *r->summary) {
        text_add(out, "<details><summary>Summary as the program printed it</summary><pre>");
        html_text(out, r->summary);
        text_add(out, "</pre></details>\n");
    }
    if (r->n_samples) {
        text_add(
            out,
            "<h2>Verdict per sample</h2>\n<p class=\"lead\">Value \xc2\xb1 expanded uncertainty U (k = 2, "
            "about "
            "95 %); a range in brackets is a 95 % interval that need not be centred. A value conforms or "
            "fails "
            "only when its uncertainty is clear of the limit (ISO 14253-1).</p>\n"
            "<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"Verdict per sample\"><table>"
            "<thead><tr><th scope=\"col\">Quantity</th><th scope=\"col\">Value \xc2\xb1 U</th>"
            "<th scope=\"col\">Target</th><th scope=\"col\">Verdict</th></tr></thead>\n");
        for (size_t i = 0; i < r->n_samples; i++) {
            const sample_row *s = &r->samples[i];
            add_sample_head(r, i, out);
            for (size_t k = 0; k < r->n_targets; k++) add_target_row(r, s, k, out);
            if (!has_target(r, "spacing_nm")) add_plain_row(s, "spacing_nm", out);
            if (!has_target(r, "weighted_reflectance")) add_plain_row(s, "weighted_reflectance", out);
            text_add(out, "<tr class=\"why\"><td colspan=\"4\">");
            html_text(out, s->verdict_reasons);
            if (s->flags && *s->flags) {
                text_add(out, s->verdict_reasons && *s->verdict_reasons ? "<br>" : "");
                text_add(out, "Remarks: ");
                page_flags(out, s->flags);
            }
            text_add(out, "</td></tr></tbody>\n");
        }
        text_add(out, "</table></div>\n");
    }
    text_add(out, "</section>\n");
}

void page_texture(const results *r, textbuf *out) {
    static const char *const shown[] = { "spacing_nm",  "density_per_um2", "size_d10_nm", "size_d50_nm",
                                         "size_d90_nm", "size_gsd",        "clark_evans", "bright_share" };
    enum { SHOWN = sizeof shown / sizeof shown[0] };
    if (!r->n_samples) return;
    text_add(
        out,
        "<section id=\"texture\"><h2>Texture</h2>\n<p class=\"lead\">Mean of the micrographs used \xc2\xb1 U "
        "(k = "
        "2). Sizes are equivalent circular diameters of the cells.</p>\n<div class=\"scroll\" tabindex=\"0\" "
        "role=\"region\" aria-label=\"Texture of the samples\"><table class=\"sort\"><thead><tr><th "
        "scope=\"col\">Sample</th>");
    for (size_t k = 0; k < SHOWN; k++) {
        const column *c = sample_column(shown[k], "");
        text_addf(out, "<th scope=\"col\" class=\"n\">%s", page_quantity(shown[k]));
        if (c && strcmp(c->unit, "1")) text_addf(out, "<br><span class=\"unit\">%s</span>", c->unit);
        text_add(out, "</th>");
    }
    text_add(out, "</tr></thead><tbody>\n");
    for (size_t i = 0; i < r->n_samples; i++) {
        text_add(out, "<tr><th scope=\"row\">");
        html_text(out, r->samples[i].sample);
        text_add(out, "</th>");
        for (size_t k = 0; k < SHOWN; k++) {
            const column *c = sample_column(shown[k], "");
            text_add(out, "<td class=\"n\">");
            if (c) html_value(out, c, sample_column(shown[k], "_u"), &r->samples[i], 0);
            text_add(out, "</td>");
        }
        text_add(out, "</tr>\n");
    }
    text_add(out, "</tbody></table></div></section>\n");
}
