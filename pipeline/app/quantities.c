/* The table of quantities, their budgets and their JSON. */
#include "app/quantities.h"

#include <math.h>
#include <stddef.h>

#include "base/quantity.h"
#include "io/json.h"
#include "metrics/uncertainty.h"

/* clang-format off */
#define MAP(name, px, member, sample, power, by_count) \
    { #name, px, offsetof(texture, member), offsetof(image_row, name), sample, power, by_count }
#define IN(name) offsetof(sample_row, name)

const quantity_map quantity_table[QUANTITIES] = {
    [QUANTITY_ACF]     = MAP(spacing_acf_nm,  "spacing_acf_px",  spacing_acf,  NOT_IN_SAMPLE,        1, 0.0),
    [QUANTITY_PSD]     = MAP(spacing_psd_nm,  "spacing_psd_px",  spacing_psd,  NOT_IN_SAMPLE,        1, 0.0),
    [QUANTITY_NN]      = MAP(nn_mean_nm,      "nn_mean_px",      nn_mean,      NOT_IN_SAMPLE,        1, 0.5),
    [QUANTITY_HEX]     = MAP(spacing_hex_nm,  "spacing_hex_px",  spacing_hex,  NOT_IN_SAMPLE,        1, 0.5),
    [QUANTITY_DENSITY] = MAP(density_per_um2, "density_per_px2", density,      IN(density_per_um2), -2, 1.0),
    MAP(bright_share,      NULL,           bright_share,      IN(bright_share), 0, 0.0),
    MAP(size_d10_nm,       "size_d10_px",  size_d10,          IN(size_d10_nm),  1, 1.0),
    MAP(size_d50_nm,       "size_d50_px",  size_d50,          IN(size_d50_nm),  1, 0.5),
    MAP(size_d90_nm,       "size_d90_px",  size_d90,          IN(size_d90_nm),  1, 1.0),
    MAP(size_mean_nm,      "size_mean_px", size_mean,         IN(size_mean_nm), 1, 0.5),
    MAP(size_gsd,          NULL,           size_gsd,          IN(size_gsd),     0, 0.0),
    MAP(top_d50_nm,        "top_d50_px",   top_d50,           NOT_IN_SAMPLE,    1, 0.0),
    MAP(clark_evans,       NULL,           clark_evans,       IN(clark_evans),  0, 0.5),
    MAP(sal_nm,            "sal_px",       sal,               NOT_IN_SAMPLE,    1, 0.0),
    MAP(str,               NULL,           str,               NOT_IN_SAMPLE,    0, 0.0),
    [QUANTITY_STRETCH] = MAP(stretch, NULL,           stretch,           NOT_IN_SAMPLE,    0, 0.0),
    [QUANTITY_ANGLE] = MAP(stretch_angle_deg, NULL,           stretch_angle_deg, NOT_IN_SAMPLE,    0, 0.0),
    MAP(sharpness_px,      NULL,           sharpness,         NOT_IN_SAMPLE,    0, 0.0),
    MAP(noise_rel,         NULL,           noise_rel,         NOT_IN_SAMPLE,    0, 0.0),
};
/* clang-format on */

const measured *texture_figure(const texture *t, int q) {
    return (const measured *)(const void *)((const char *)t + quantity_table[q].in_texture);
}

figure figure_in_nm(const measured *m, int power, double px_nm, double px_u_rel) {
    double scale = power == 1 ? px_nm : power == -2 ? 1e6 / (px_nm * px_nm) : 1.0;
    figure f = { .m = { m->value * scale, m->u_sampling * scale, m->u_method * scale, m->n },
                 .u_within = m->u_sampling * scale,
                 .u_between = MISSING,
                 .dof_sampling = field_dof((double)m->n),
                 .micrographs = 1 };
    if (power) f.u_px = fabs(power * f.m.value) * px_u_rel;
    return f;
}

void figure_detection(figure *f, int q, double count_u_rel) {
    f->u_detection = fmin(quantity_table[q].by_count * count_u_rel * fabs(f->m.value), f->m.u_method);
}

budget_total figure_total(const figure *f) {
    const double method_known = 0.2, pixel_known = 0.1;
    double definition = sqrt(fmax(0.0, f->m.u_method * f->m.u_method - f->u_detection * f->u_detection));
    budget_part part[FIGURE_PARTS] = { { f->m.u_sampling, f->dof_sampling },
                                       { f->u_detection, dof_of_reliability(method_known) },
                                       { definition, dof_of_reliability(method_known) },
                                       { f->u_px, dof_of_reliability(pixel_known) } };
    return budget_combine(part, FIGURE_PARTS, 0.95);
}

double figure_u(const figure *f) {
    if (!isfinite(f->m.value)) return MISSING;
    return sqrt(f->m.u_sampling * f->m.u_sampling + f->m.u_method * f->m.u_method + f->u_px * f->u_px);
}

static void member(textbuf *out, const char *name, double v, int digits) {
    text_addf(out, "\"%s\": ", name);
    json_number(out, v, digits);
}

static void budget_json(const figure *f, textbuf *out) {
    budget_total total = figure_total(f);
    double reach = total.k * total.u, d = f->u_detection;
    const struct {
        const char *name;
        double v;
        int digits;
    } members[] = { { "sampling", f->m.u_sampling, 3 },
                    { "within", f->u_within, 3 },
                    { "between", f->u_between, 3 },
                    { "method", f->m.u_method, 3 },
                    { "detection", d, 3 },
                    { "definition", sqrt(fmax(0.0, f->m.u_method * f->m.u_method - d * d)), 3 },
                    { "pixel_size", f->u_px, 3 },
                    { "combined", figure_u(f), 3 },
                    { "dof", total.dof, 3 },
                    { "k", total.k, 3 },
                    { "lo", f->m.value - reach, 5 },
                    { "hi", f->m.value + reach, 5 } };
    text_add(out, "{");
    for (size_t i = 0; i < sizeof members / sizeof members[0]; i++) {
        member(out, members[i].name, isfinite(members[i].v) ? members[i].v : MISSING, members[i].digits);
        text_add(out, ", ");
    }
    text_addf(out, "\"n\": %zu}", f->m.n);
}

void figures_json(const figure *f, textbuf *out) {
    const char *separator = "";
    text_add(out, "\"budget\": {");
    for (int q = 0; q < QUANTITIES; q++) {
        if (!isfinite(f[q].m.value)) continue;
        text_addf(out, "%s\"%s\": ", separator, quantity_table[q].name);
        budget_json(&f[q], out);
        separator = ", ";
    }
    text_add(out, "}");
}

void texture_px_json(const texture *t, textbuf *out) {
    const char *separator = "";
    text_add(out, "\"pixels\": {");
    for (int q = 0; q < QUANTITIES; q++) {
        const quantity_map *map = &quantity_table[q];
        const measured *m = texture_figure(t, q);
        if (!map->px_name || !isfinite(m->value)) continue;
        figure f = { .m = *m };
        text_addf(out, "%s", separator);
        member(out, map->px_name, m->value, 6);
        text_addf(out, ", \"%s_u\": ", map->px_name);
        json_number(out, figure_u(&f), 3);
        separator = ", ";
    }
    text_add(out, "}");
}
