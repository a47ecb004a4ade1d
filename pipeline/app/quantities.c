#include "app/quantities.h"

#include <math.h>
#include <stddef.h>

#include "base/quantity.h"
#include "io/json.h"

/* clang-format off */
#define MAP(name, px, member, sample, power) \
    { #name, px, offsetof(texture, member), offsetof(image_row, name), sample, power }
#define IN(name) offsetof(sample_row, name)

const quantity_map quantity_table[QUANTITIES] = {
    [QUANTITY_ACF]     = MAP(spacing_acf_nm,  "spacing_acf_px",  spacing_acf,  NOT_IN_SAMPLE,        1),
    [QUANTITY_PSD]     = MAP(spacing_psd_nm,  "spacing_psd_px",  spacing_psd,  NOT_IN_SAMPLE,        1),
    [QUANTITY_NN]      = MAP(nn_mean_nm,      "nn_mean_px",      nn_mean,      NOT_IN_SAMPLE,        1),
    [QUANTITY_HEX]     = MAP(spacing_hex_nm,  "spacing_hex_px",  spacing_hex,  NOT_IN_SAMPLE,        1),
    [QUANTITY_DENSITY] = MAP(density_per_um2, "density_per_px2", density,      IN(density_per_um2), -2),
    MAP(bright_share,      NULL,           bright_share,      IN(bright_share), 0),
    MAP(size_d10_nm,       "size_d10_px",  size_d10,          IN(size_d10_nm),  1),
    MAP(size_d50_nm,       "size_d50_px",  size_d50,          IN(size_d50_nm),  1),
    MAP(size_d90_nm,       "size_d90_px",  size_d90,          IN(size_d90_nm),  1),
    MAP(size_mean_nm,      "size_mean_px", size_mean,         IN(size_mean_nm), 1),
    MAP(size_gsd,          NULL,           size_gsd,          IN(size_gsd),     0),
    MAP(top_d50_nm,        "top_d50_px",   top_d50,           NOT_IN_SAMPLE,    1),
    MAP(clark_evans,       NULL,           clark_evans,       IN(clark_evans),  0),
    MAP(sal_nm,            "sal_px",       sal,               NOT_IN_SAMPLE,    1),
    MAP(str,               NULL,           str,               NOT_IN_SAMPLE,    0),
    MAP(stretch,           NULL,           stretch,           NOT_IN_SAMPLE,    0),
    MAP(stretch_angle_deg, NULL,           stretch_angle_deg, NOT_IN_SAMPLE,    0),
    MAP(sharpness_px,      NULL,           sharpness,         NOT_IN_SAMPLE,    0),
    MAP(noise_rel,         NULL,           noise_rel,         NOT_IN_SAMPLE,    0),
};
/* clang-format on */

const measured *texture_figure(const texture *t, int q) {
    return (const measured *)(const void *)((const char *)t + quantity_table[q].in_texture);
}

figure figure_in_nm(const measured *m, int power, double px_nm, double px_u_rel) {
    double scale = power == 1 ? px_nm : power == -2 ? 1e6 / (px_nm * px_nm) : 1.0;
    figure f = { { m->value * scale, m->u_sampling * scale, m->u_method * scale, m->n }, 0.0 };
    if (power) f.u_px = fabs(power * f.m.value) * px_u_rel;
    return f;
}

double figure_u(const figure *f) {
    if (!isfinite(f->m.value)) return MISSING;
    return sqrt(f->m.u_sampling * f->m.u_sampling + f->m.u_method * f->m.u_method + f->u_px * f->u_px);
}

static void member(textbuf *out, const char *name, double v, int digits) {
    text_addf(out, "\"%s\": ", name);
    json_number(out, v, digits);
}

void figures_json(const figure *f, textbuf *out) {
    const char *separator = "";
    text_add(out, "\"budget\": {");
    for (int q = 0; q < QUANTITIES; q++) {
        if (!isfinite(f[q].m.value)) continue;
        text_addf(out, "%s\"%s\": {", separator, quantity_table[q].name);
        member(out, "sampling", f[q].m.u_sampling, 3);
        text_add(out, ", ");
        member(out, "method", f[q].m.u_method, 3);
        text_add(out, ", ");
        member(out, "pixel_size", f[q].u_px, 3);
        text_add(out, ", ");
        member(out, "combined", figure_u(&f[q]), 3);
        text_addf(out, ", \"n\": %zu}", f[q].m.n);
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
        figure f = { *m, 0.0 };
        text_addf(out, "%s", separator);
        member(out, map->px_name, m->value, 6);
        text_addf(out, ", \"%s_u\": ", map->px_name);
        json_number(out, figure_u(&f), 3);
        separator = ", ";
    }
    text_add(out, "}");
}
