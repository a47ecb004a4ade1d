/* The part of the page that is read first: the verdict of the run in one sentence, why, and what to do next. Then, further
 * down, all texture numbers of the samples in one table. */
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

/* "8 of 9 samples conform; 1 fails." */
static void add_headline(const results *r, textbuf *out) {
    size_t conforms = count_verdicts(r, "conforms"), fails = count_verdicts(r, "fails");
    size_t undecided = count_verdicts(r, "undecided"), unmeasured = count_verdicts(r, "not_measured");
    size_t used = count_status(r, "ok");
    const char *class_name = !r->n_samples || !r->n_targets ? "none" : fails ? "bad" : undecided || unmeasured ? "open" : "good";
    text_addf(out, "<div class=\"headline %s\"><p class=\"verdict\">", class_name);
    if (!r->n_samples) {
        text_add(out, "No sample could be formed from these files.");
    } else if (!r->n_targets) {
        text_addf(out, "%zu %s measured; no targets are set, so nothing is judged.", r->n_samples,
                  r->n_samples == 1 ? "sample" : "samples");
    } else if (conforms == r->n_samples) {
        text_addf(out, "All %zu samples conform.", r->n_samples);
    } else {
        if (fails) text_addf(out, "%zu of %zu samples %s; %zu %s", fails, r->n_samples, fails == 1 ? "fails" : "fail", conforms, conforms == 1 ? "conforms" : "conform");
        else text_addf(out, "%zu of %zu samples conform", conforms, r->n_samples);
        if (undecided) text_addf(out, "; %zu undecided", undecided);
        if (unmeasured) text_addf(out, "; %zu not measured", unmeasured);
        text_add(out, ".");
    }
    text_addf(out, "</p><p>%zu of %zu micrographs used. sward advises; a person decides.</p></div>\n", used, r->n_images);
}

/* What fails has its own block and what is undecided its line of advice; here the rest. */
static void add_unmeasured(const results *r, textbuf *out) {
    enum { MOST = 20 };
    size_t n = 0;
    for (size_t i = 0; i < r->n_samples; i++) {
        if (!is_word(r->samples[i].verdict, "not_measured") || ++n > MOST) continue;
        text_addf(out, "%s<a href=\"#sample-%zu\">", n == 1 ? "<p><strong>Not measured:</strong> " : ", ", i + 1);
        html_text(out, r->samples[i].sample);
        text_add(out, "</a>");
    }
    if (n > MOST) text_addf(out, " and %zu more", n - MOST);
    if (n) text_add(out, ". None of their micrographs was used, or they have no value of what a target asks for.</p>\n");
}

void page_verdicts(const results *r, textbuf *out) {
    text_add(out, "<section id=\"verdicts\" aria-label=\"Verdict\">\n");
    add_headline(r, out);
    page_cases(r, out);
    add_unmeasured(r, out);
    page_advice(r, out);
    if (r->summary && *r->summary) {
        text_add(out, "<details><summary>Summary as the program printed it</summary><pre tabindex=\"0\">");
        html_text(out, r->summary);
        text_add(out, "</pre></details>\n");
    }
    text_add(out, "</section>\n");
}

void page_texture(const results *r, const char *out_dir, textbuf *out) {
    static const char *const shown[] = { "spacing_nm",  "density_per_um2", "size_d10_nm", "size_d50_nm",
                                         "size_d90_nm", "size_gsd",        "clark_evans", "bright_share" };
    enum { SHOWN = sizeof shown / sizeof shown[0] };
    if (!r->n_samples) return;
    text_add(out, "<section id=\"texture\"><h2>Texture</h2>\n");
    page_profiles(r, out_dir, out);
    text_add(
        out,
        "<h3>All texture numbers</h3>\n<p class=\"lead\">Mean of the micrographs used \xc2\xb1 U "
        "(k = "
        "2). Sizes are equivalent circular diameters of the cells.</p>\n<div class=\"scroll\" tabindex=\"0\" "
        "role=\"region\" aria-label=\"Texture of the samples\"><table class=\"sort csv\"><thead><tr><th "
        "scope=\"col\">Sample</th>");
    for (size_t k = 0; k < SHOWN; k++) {
        const column *c = page_sample_column(shown[k], "");
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
            const column *c = page_sample_column(shown[k], "");
            text_add(out, "<td class=\"n\">");
            if (c) html_value(out, c, page_sample_column(shown[k], "_u"), &r->samples[i], 0);
            text_add(out, "</td>");
        }
        text_add(out, "</tr>\n");
    }
    text_add(out, "</tbody></table></div></section>\n");
}
