/* The columns are the contract: names and order as promised, every measured quantity with its twin behind it. */
#include "check.h"
#include "report/results.h"

static const char *const image_names[] = {
    "file",
    "sample",
    "status",
    "reason",
    "flags",
    "px_nm",
    "px_source",
    "px_u_rel",
    "width_px",
    "height_px",
    "strip_px",
    "bit_depth",
    "relief",
    "n_features",
    "spacing_acf_nm",
    "spacing_acf_nm_u",
    "spacing_psd_nm",
    "spacing_psd_nm_u",
    "nn_mean_nm",
    "nn_mean_nm_u",
    "spacing_hex_nm",
    "spacing_hex_nm_u",
    "density_per_um2",
    "density_per_um2_u",
    "bright_share",
    "bright_share_u",
    "size_d10_nm",
    "size_d10_nm_u",
    "size_d50_nm",
    "size_d50_nm_u",
    "size_d90_nm",
    "size_d90_nm_u",
    "size_mean_nm",
    "size_mean_nm_u",
    "size_gsd",
    "size_gsd_u",
    "top_d50_nm",
    "top_d50_nm_u",
    "clark_evans",
    "clark_evans_u",
    "sal_nm",
    "sal_nm_u",
    "str",
    "str_u",
    "stretch",
    "stretch_u",
    "stretch_angle_deg",
    "stretch_angle_deg_u",
    "sharpness_px",
    "sharpness_px_u",
    "noise_rel",
    "noise_rel_u",
    "clipped_share",
};
static const char *const sample_names[] = {
    "sample",
    "lot",
    "wafer",
    "position",
    "etched_at",
    "n_images",
    "n_used",
    "spacing_nm",
    "spacing_nm_u",
    "density_per_um2",
    "density_per_um2_u",
    "size_d10_nm",
    "size_d10_nm_u",
    "size_d50_nm",
    "size_d50_nm_u",
    "size_d90_nm",
    "size_d90_nm_u",
    "size_mean_nm",
    "size_mean_nm_u",
    "size_gsd",
    "size_gsd_u",
    "bright_share",
    "bright_share_u",
    "clark_evans",
    "clark_evans_u",
    "height_nm",
    "height_nm_u",
    "height_source",
    "aspect",
    "area_ratio",
    "weighted_reflectance",
    "weighted_reflectance_lo",
    "weighted_reflectance_hi",
    "current_loss_mA_cm2",
    "polished_reflectance",
    "coated_reflectance",
    "subwavelength_share",
    "optics_model",
    "verdict",
    "verdict_reasons",
    "flags",
};
static const char *const spectrum_names[] = { "sample",        "wavelength_nm", "angle_deg",
                                              "polarization",  "reflectance",   "reflectance_lo",
                                              "reflectance_hi" };

static void check_names(const column *c, size_t n, const char *const *names, size_t n_names) {
    CHECK(n == n_names);
    for (size_t i = 0; i < n && i < n_names; i++) {
        if (strcmp(c[i].name, names[i])) printf("column %zu is '%s', wanted '%s'\n", i, c[i].name, names[i]);
        CHECK(!strcmp(c[i].name, names[i]));
    }
}

static int ends_with(const char *s, const char *tail) {
    size_t n = strlen(s), k = strlen(tail);
    return n >= k && !strcmp(s + n - k, tail);
}

/* A name with a unit says so, and the unit says the same. */
static void check_units(const column *c, size_t n) {
    for (size_t i = 0; i < n; i++) {
        CHECK(c[i].help && c[i].help[0]);
        CHECK(!strchr(c[i].help, '\n'));
        if (c[i].kind == COL_NUMBER) CHECK(c[i].digits >= 3 && c[i].digits <= 7);
        if (ends_with(c[i].name, "_nm") || ends_with(c[i].name, "_nm_u")) CHECK(!strcmp(c[i].unit, "nm"));
        if (ends_with(c[i].name, "_px")) CHECK(!strcmp(c[i].unit, "px"));
        if (ends_with(c[i].name, "_deg")) CHECK(!strcmp(c[i].unit, "deg"));
        if (strstr(c[i].name, "_per_um2")) CHECK(!strcmp(c[i].unit, "1/um2"));
        if (strstr(c[i].name, "reflectance")) CHECK(!strcmp(c[i].unit, "1"));
    }
}

int main(void) {
    check_names(image_columns, n_image_columns, image_names, sizeof image_names / sizeof *image_names);
    check_names(sample_columns, n_sample_columns, sample_names, sizeof sample_names / sizeof *sample_names);
    check_names(spectrum_columns, n_spectrum_columns, spectrum_names,
                sizeof spectrum_names / sizeof *spectrum_names);
    check_units(image_columns, n_image_columns);
    check_units(sample_columns, n_sample_columns);
    check_units(spectrum_columns, n_spectrum_columns);
    check_units(feature_columns, n_feature_columns);

    textbuf t = { 0 };
    columns_markdown(spectrum_columns, n_spectrum_columns, &t);
    CHECK(!t.failed && strstr(t.s, "| `wavelength_nm` | nm | 6 | wavelength in vacuum |\n"));
    text_free(&t);
    const column bar = { "a", COL_TEXT, 0, "", 0, "x | y" };
    columns_markdown(&bar, 1, &t);
    CHECK(!t.failed && strstr(t.s, "x \\| y"));
    text_free(&t);

    image_row_free(&(image_row){ 0 });
    sample_row_free(&(sample_row){ 0 });
    return check_done();
}
