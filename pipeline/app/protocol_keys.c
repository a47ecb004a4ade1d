/* Every key of a protocol in one table: where it goes, unit, range, meaning. Reading, checking, printing,
 * explaining and fingerprints walk this table, so a new key is one line here and one member in protocol.h.
 * Defaults are not repeated: they are what protocol_defaults() holds. */
#include "app/protocol_keys.h"

#include <math.h>
#include <string.h>

/* The words of an index, NULL behind the last. */
static const char *pick(const char *const *words, int n, int i) { return i >= 0 && i < n ? words[i] : NULL; }

static const char *relief_word(int i) {
    static const char *const words[] = { "auto", "hillock", "pore" };
    return pick(words, 3, i);
}
static const char *spacing_word(int i) {
    static const char *const words[] = { "autocorrelation", "density" };
    return pick(words, 2, i);
}
static const char *level_word(int i) {
    static const char *const words[] = { "floor", "tips" };
    return pick(words, 2, i);
}
static const char *law_word(int i) {
    static const char *const words[] = { "normal", "lognormal" };
    return pick(words, 2, i);
}
static const char *mixing_word(int i) { return i >= 0 && i < MIXINGS ? mixing_name((mixing)i) : NULL; }
static const char *model_word(int i) {
    static const char *const words[] = { "graded", "facets", "auto" }; /* optics_choice */
    return pick(words, 3, i);
}
static const char *weight_word(int i) {
    static const char *const words[] = { "photons", "energy" }; /* sun_weight */
    return pick(words, 2, i);
}
static const char *polarization_word(int i) {
    return i >= POL_MEAN && i <= POL_P ? polarization_name((polarization)i) : NULL;
}

/* Enums and switches are read and written as int. */
_Static_assert(sizeof(relief) == sizeof(int) && sizeof(spacing_choice) == sizeof(int) &&
                   sizeof(mixing) == sizeof(int) && sizeof(optics_choice) == sizeof(int) && sizeof(sun_weight) == sizeof(int) && sizeof(polarization) == sizeof(int),
               "enum members must have the size of int");

#define AT(member) offsetof(protocol, member)
#define OPEN HUGE_VAL
#define TEXT(group, key, member, help)                                                                       \
    { group, key, KEY_TEXT, AT(member), "", 0, 0, 0, NULL, 0, help, NULL }
#define PATH(group, key, member, help)                                                                       \
    { group, key, KEY_PATH, AT(member), "", 0, 0, 0, NULL, 0, help, NULL }
#define MATERIAL(group, key, member, help)                                                                   \
    { group, key, KEY_MATERIAL, AT(member), "", 0, 0, 0, NULL, 0, help, NULL }
#define WORD(group, key, member, word, m, help)                                                              \
    { group, key, KEY_WORD, AT(member), "", 0, 0, 0, word, m, help, NULL }
#define SWITCH(group, key, member, help)                                                                     \
    { group, key, KEY_SWITCH, AT(member), "", 0, 1, 0, NULL, 0, help, NULL }
/* number from lo to hi; number above lo; limit of fitness */
#define NUMBER(group, key, member, unit, lo, hi, help)                                                       \
    { group, key, KEY_NUMBER, AT(member), unit, lo, hi, 0, NULL, 0, help, NULL }
#define ABOVE(group, key, member, unit, lo, hi, help)                                                        \
    { group, key, KEY_NUMBER, AT(member), unit, lo, hi, 1, NULL, 0, help, NULL }
#define LIMIT(key, lo, hi, help, why)                                                                        \
    { "fitness", #key, KEY_NUMBER, AT(measure.key), "", lo, hi, 0, NULL, 1, help, why }

/* clang-format off */
const protocol_key protocol_keys[] = {
    TEXT("", "protocol", name, "name of this protocol; it stands in results, report and history"),
    WORD("", "relief", measure.relief, relief_word, 1, "what a feature is: a bright hillock, a dark pore, or auto: found in each picture"),
    WORD("", "spacing", spacing, spacing_word, 0, "which spacing is the sample's spacing_nm: first ring of the autocorrelation, or hexagonal spacing of the density"),
    { "", "px_u_rel", KEY_NUMBER, AT(px_u_rel), "", 0.0, 0.5, 0, NULL, 1, "relative standard uncertainty of every pixel size; null: what its source says, else 0.01", NULL },
    { "", "measure_between_px_nm", KEY_BAND, AT(window_lo_nm), "nm", 1e-6, 1e9, 0, NULL, 1, "pixel sizes that are measured; a micrograph outside, such as an overview, is kept out of its sample and listed; null: all", NULL },
    { "", "page", KEY_NUMBER, AT(page), "", 1, 65535, 0, NULL, 1, "which page of a file with several is measured, from 1; null: the largest that is no thumbnail", NULL },
    { "", "keep_tilt", KEY_SWITCH, AT(keep_tilt), "", 0, 1, 0, NULL, 1, "true: tilted views are flagged, not stretched (a holder that tilts back by itself)", NULL },
    TEXT("", "name_pattern", pattern, "sample from file names without a sheet row, such as {lot}_W{wafer}_{position}_{magnification}_{image}, or re: and a regular expression with groups (?<wafer>...); null: sub-folder, else name without its number"),
    PATH("", "scale", scale, "scale file that sward scale saved: replaces the instrument's pixel size where it applies, relative to this file"),
    PATH("", "history", history, "ledger of all samples, relative to this file; null: history.sqlite in the output folder"),
    { "", "targets", KEY_TARGETS, AT(targets), "", 0, 0, 0, NULL, 0, "a quantity of samples.csv or a numeric column of the sheet with min, max or both; \"rule\": \"guard\" (guard band of 1.645 u, ISO 14253-1, the default), \"simple\" (the value alone), or \"probability\" (JCGM 106) with \"at_least\": 0.95; \"error\": \"repeat\" when only what varies from run to run counts", NULL },

    TEXT("samples", "pattern", pattern, "the same as name_pattern"),
    { "samples", "positions", KEY_PLACES, AT(places), "", 0, 0, 0, NULL, 0, "where the position names of the sheet lie, in mm from the middle of the wafer, such as { \"C\": [0, 0], \"E\": [0, 70] }; x_mm and y_mm of the sheet outrank it", NULL },

    ABOVE("limits", "max_megapixels", max_megapixels, "million pixels", 0, 4294, "a larger picture is refused before memory is taken"),
    ABOVE("limits", "max_file_mb", max_file_mb, "MB", 0, 4000, "a larger file is refused before it is read"),
    ABOVE("limits", "max_memory_mb", max_memory_mb, "MB", 0, 1e6, "what one micrograph may take while it is measured, at 32 bytes a pixel; null: as the pixels allow"),

    LIMIT(min_px_per_spacing, 2, OPEN, "pixels per spacing below which a micrograph is excluded (few_pixels)",
          "on renders the density is 1 % off at 8 px per spacing and 5 % at 6"),
    LIMIT(warn_px_per_spacing, 2, OPEN, "the same, flagged only (low_resolution)", "no loss can be seen from 12 px on"),
    LIMIT(min_features, 1, OPEN, "features in the field below which a micrograph is excluded (few_features)",
          "50 features know their density to 5 % at best"),
    LIMIT(warn_features, 1, OPEN, "the same, flagged only (small_count)", "200 features know it to 2 %"),
    LIMIT(max_blur, 0, OPEN, "blur (sd, along its worst direction) in spacings above which a micrograph is excluded (blurred)",
          "close features merge and the count drops: on weakly ordered renders by 14 % at 0.12 already, on ordered ones from 0.25 on"),
    LIMIT(warn_blur, 0, OPEN, "the same, flagged only (unsharp)", "at 0.12 the density of ordered renders is 2 % off, D90 2 %"),
    LIMIT(max_clipped, 0, 1, "share of pixels at the darkest or brightest level of the file above which a micrograph is excluded (clipped)",
          "up to a third the density stays within 0.2 %; beyond a half there is more plateau than texture"),
    LIMIT(warn_clipped, 0, 1, "the same, flagged only", "a well set picture has less than 1 % at both ends"),
    LIMIT(max_noise, 0, OPEN, "noise (sd) against the texture's contrast (sd), brought to 24 px per spacing, above which a micrograph is excluded (noisy)",
          "the detector averages over its width, so d / 24 times as much is borne; at 2.2 the density is 7 % off, from 2.7 on features are invented by the score"),
    LIMIT(warn_noise, 0, OPEN, "the same, flagged only", "half of the limit: a picture to take again where that is easy"),
    LIMIT(max_streaks, 0, OPEN, "variance of charging streaks along the scan against the texture's above which a micrograph is excluded (streaks)",
          "at 0.3 the density is 6 % off, at 0.5 the streaks decide stretch and spacing"),
    LIMIT(warn_streaks, 0, OPEN, "the same, flagged only", "renders without streaks stay below 0.01"),
    LIMIT(max_stretch, 1, OPEN, "longer over shorter spacing above which a micrograph is excluded: drift along a scan axis, else tilted",
          "1.6 is a tilt of 51 degrees: one direction of the texture is mostly hidden"),
    LIMIT(warn_stretch, 1, OPEN, "the same, flagged only (stretched)", "1.06 is a tilt of 20 degrees, which shortens the spacing by 3 %; also 3 of its own uncertainties are asked for"),
    LIMIT(max_jitter, 0, OPEN, "rms shift between neighbouring scan lines in spacings above which a micrograph is excluded (drift)",
          "features are torn: weakly ordered renders lose 10 to 20 % of them; the figure levels off at 0.17 whatever the shift"),
    LIMIT(warn_jitter, 0, OPEN, "the same, flagged only", "from there on fine detail is smeared as much as by mild blur; also 0.3 px are asked for"),
    LIMIT(warn_astigmatism, 0, OPEN, "sd, in spacings, of a blur in one direction only above which a micrograph is flagged (astigmatic)",
          "sharp renders stay below 0.045, stretched ones below 0.057; also 4.5 standard deviations are asked for"),
    LIMIT(scan_axis_deg, 0, 45, "a stretch nearer than this to a scan axis counts as drift, deg", "the direction of a stretch that matters is known to about 5 degrees"),
    LIMIT(min_order, 0, 2.149, "Clark-Evans index below which a micrograph without a ring is excluded (no_ring); above it no_ring is only flagged",
          "random placement has 1, and the least distance that detection needs lifts it somewhat"),
    LIMIT(warn_order, 0, 2.149, "Clark-Evans index below which a texture is flagged low_order", "below 1.5 spacing_acf is 7 to 12 % too long on renders; above it within 4 %"),
    LIMIT(warn_contradiction, 0, OPEN, "relative difference of spacing_acf and spacing_hex above which they are flagged (spacing_contradiction)",
          "their known ratio is 0.95 to 1.10 on ordered textures; sparse features on bare floor give 0.76"),
    LIMIT(warn_size_gsd, 1, OPEN, "geometric standard deviation of the cell diameters above which they are flagged (wide_sizes)",
          "random placement gives 1.32 (Poisson-Voronoi cells), anything ordered less"),
    LIMIT(warn_second, 1.4, OPEN, "ratio of a second spacing to the first, either way, from which it is flagged (two_spacings)",
          "nearer than a factor 1.4 two rings cannot be told apart"),
    LIMIT(bright_level, 0, 1, "grey level above which the field counts for bright_share, from the 1 % to the 99 % quantile", "half way; no level is the solid share of the optics"),
    LIMIT(min_ring_z, 0, OPEN, "how many standard deviations the trough before the first ring must stand out, else no_ring", "blurred and white noise reach 5.7, textures 8 to 71"),

    ABOVE("link", "height_nm", link.height_nm, "nm", 0, 1e5, "feature height where the sheet has none; a result then calls it assumed"),
    NUMBER("link", "height_nm_u", link.height_nm_u, "nm", 0, 1e5, "its standard uncertainty"),
    ABOVE("link", "aspect", link.aspect, "", 0, 100, "height / spacing where no height is given; null: 1.0 +- 0.3, assumed"),
    NUMBER("link", "aspect_u", link.aspect_u, "", 0, 100, "its standard uncertainty"),
    { "link", "shape", KEY_SHAPE, AT(link.exponent), "", 0.05, 20, 0, NULL, 0, "feature shape: cone, paraboloid, or the exponent q of (1 - z/h)^(2/q), then taken as known; unknown: the value is the cone's, the interval holds everything from cone to paraboloid", NULL },
    NUMBER("link", "exponent_u", link.exponent_u, "", 0, 10, "standard uncertainty of the exponent (of the cone, where no shape is stated); null: none"),
    NUMBER("link", "flat_top", link.flat_top, "", 0, 0.95, "share of a feature's foot that is flat at its top; the height is that of what stands there"),
    NUMBER("link", "flat_top_u", link.flat_top_u, "", 0, 1, "its standard uncertainty"),
    NUMBER("link", "tip_radius_nm", link.tip_radius_nm, "nm", 0, 1e4, "radius of a round tip; 0: as sharp as the shape"),
    NUMBER("link", "tip_radius_nm_u", link.tip_radius_nm_u, "nm", 0, 1e4, "its standard uncertainty"),
    NUMBER("link", "height_spread", link.height_spread, "", 0, 1, "relative standard deviation of the heights of one sample"),
    NUMBER("link", "height_spread_u", link.height_spread_u, "", 0, 1, "its standard uncertainty"),
    WORD("link", "spread_law", link.lognormal, law_word, 0, "law of that spread"),
    NUMBER("link", "height_by_size", link.height_by_size, "", -5, 5, "power g by which heights follow cell diameters: h (d / d_mean)^g"),
    WORD("link", "level", link.level_at_tips, level_word, 0, "where features of unequal height are level: at the floor or at the tips"),
    NUMBER("link", "coverage", link.coverage, "", 0, 1, "solid share at the floor; below 1 there is flat ground between features"),
    NUMBER("link", "coverage_u", link.coverage_u, "", 0, 1, "its standard uncertainty"),
    PATH("link", "calibration", calibration, "link file that sward fit saved: height from the spacing, and the shape; outranks the heights and the shape written here, relative to this file"),
    PATH("link", "profile", profile, "measured profile instead of height and shape: CSV with depth_nm and solid_fraction, relative to this file"),

    MATERIAL("optics", "ambient", ambient, "above the texture: air, laminate (air, glass, encapsulant), a material or an index"),
    ABOVE("optics", "glass_mm", glass_mm, "mm", 0, 100, "glass of the laminate"),
    ABOVE("optics", "encapsulant_mm", encapsulant_mm, "mm", 0, 100, "encapsulant of the laminate"),
    { "optics", "coatings", KEY_COATINGS, AT(coatings), "", 0, 0, 0, NULL, 0, "conformal coatings, outermost first: { \"material\": \"alumina\", \"thickness_nm\": 10 }", NULL },
    MATERIAL("optics", "substrate", substrate, "what the features are made of: a material, a CSV (wavelength_nm, n, k), or an index"),
    WORD("optics", "mixing", mixing, mixing_word, 0, "mixing rule of solid and ambient within one slab"),
    WORD("optics", "model", model, model_word, 0, "graded index for fine textures, geometric optics of facets for large steep ones, or auto: the one that is valid, else none"),
    ABOVE("optics", "facet_angle_deg", facet_angle_deg, "deg", 0, 89, "inclination of the facets, 54.74 for alkaline pyramids; null: from height and spacing"),
    NUMBER("optics", "angle_deg", angle_deg, "deg", 0, 89, "angle of incidence in air"),
    WORD("optics", "polarization", polarization, polarization_word, 0, "mean is unpolarised light"),
    SWITCH("optics", "hemispherical", hemispherical, "true: diffuse light from the whole half space; the angle is then unused"),
    { "optics", "band_nm", KEY_BAND, AT(band_lo_nm), "nm", 100, 20000, 0, NULL, 0, "wavelengths over which reflectance is weighted", NULL },
    PATH("optics", "sun", sun, "your own sun or lamp: CSV with wavelength_nm and irradiance_W_m2_nm, relative to this file; null: AM1.5G (ASTM G173-03)"),
    WORD("optics", "weight", weight, weight_word, 0, "weighted reflectance counts photons (what a current sees) or energy"),
    { "optics", "rear", KEY_REAR, AT(rear), "", 0, 0, 0, NULL, 0, "light returning from the rear, for comparing with a spectrometer beyond 1000 nm: { \"thickness_um\": 170, \"rear_reflectance\": 0.9, \"lambertian\": true }; null: front surface only; without rear_reflectance the rear is bare", NULL },
    NUMBER("optics", "step_nm", step_nm, "nm", 0.1, 50, "grid of the spectrum"),

    { "plan", "half_width", KEY_GOALS, AT(goals), "", 0, 0, 0, NULL, 0, "half of the 95 % interval you want, by quantity, such as { \"spacing_nm\": 5 }; results.json then says for every sample how many more micrographs that takes", NULL },

    TEXT("charts", "phase", chart_phase, "column of the sheet whose values are recipes: a change starts a new phase of every chart"),
    { "charts", "rules", KEY_RULES, AT(chart_rules), "", 0, 0, 0, NULL, 0, "pattern tests: zone, iso, nelson, limits, none or words of beyond, 2of3, 4of5, run7, run8, run9, trend6, trend7, alternate14, calm15, apart8, spread, ewma, joined by commas", NULL },
    NUMBER("charts", "baseline", chart_baseline, "", 0, 1e6, "the first etches of a phase that set its limits; 0: all of them; null: its first steady stretch, 20 to 100 etches"),
};
/* clang-format on */
const size_t n_protocol_keys = sizeof protocol_keys / sizeof protocol_keys[0];

const char *const protocol_groups[PROTOCOL_GROUPS] = { "samples", "limits", "fitness", "link", "optics", "plan", "charts" };
const char *const protocol_group_help[PROTOCOL_GROUPS] = {
    "which sample a file belongs to",
    "what one file may ask for",
    "can a micrograph carry the numbers?",
    "from the top view to the surface that optics needs",
    "what the light meets",
    "how many micrographs are enough?",
    "is the process moving? (these keys change no result of a sample)",
};

const protocol_key *protocol_key_find(const char *group, const char *name) {
    for (size_t i = 0; i < n_protocol_keys; i++) {
        const protocol_key *k = &protocol_keys[i];
        if (strcmp(k->group, group) == 0 && strcmp(k->name, name) == 0) return k;
    }
    return NULL;
}

double key_number(const protocol *p, const protocol_key *k) {
    double v;
    memcpy(&v, (const char *)p + k->offset, sizeof v);
    return v;
}

double key_high(const protocol *p, const protocol_key *k) {
    double v;
    memcpy(&v, (const char *)p + k->offset + sizeof v, sizeof v);
    return v;
}

int key_index(const protocol *p, const protocol_key *k) {
    int v;
    memcpy(&v, (const char *)p + k->offset, sizeof v);
    return v;
}

const char *key_text(const protocol *p, const protocol_key *k) {
    const char *v;
    memcpy(&v, (const char *)p + k->offset, sizeof v);
    return v;
}

static void number_expected(const protocol_key *k, const char *noun, textbuf *out) {
    if (k->above_lo && isfinite(k->hi))
        text_addf(out, "%s above %g and at most %g", noun, k->lo, k->hi);
    else if (k->above_lo)
        text_addf(out, "%s above %g", noun, k->lo);
    else if (isfinite(k->hi))
        text_addf(out, "%s from %g to %g", noun, k->lo, k->hi);
    else
        text_addf(out, "%s of at least %g", noun, k->lo);
    if (k->unit[0]) text_addf(out, " (%s)", k->unit);
}

void key_expected(const protocol_key *k, textbuf *out) {
    switch (k->kind) {
    case KEY_TEXT:
        text_add(out, "a text in quotes");
        break;
    case KEY_PATH:
        text_add(out, "a path in quotes");
        break;
    case KEY_MATERIAL:
        text_add(out, "a material name, a CSV path or a refractive index");
        break;
    case KEY_NUMBER:
        number_expected(k, "a number", out);
        break;
    case KEY_SWITCH:
        text_add(out, "true or false");
        break;
    case KEY_WORD:
        text_add(out, "one of");
        for (int i = 0; k->word(i); i++) text_addf(out, "%s \"%s\"", i ? "," : "", k->word(i));
        break;
    case KEY_SHAPE:
        number_expected(k, "\"cone\", \"paraboloid\", \"unknown\" or a number", out);
        break;
    case KEY_BAND:
        number_expected(k, "[low, high], low below high, each", out);
        break;
    case KEY_COATINGS:
        text_addf(out, "a list of at most %d { \"material\": ..., \"thickness_nm\": ... }", LIMIT_COATINGS);
        break;
    case KEY_REAR:
        text_add(out, "an object of thickness_um (1 to 10000), rear_reflectance (0 to 1) and lambertian (true, false), or a "
                      "thickness in um");
        break;
    case KEY_TARGETS:
        text_add(out, "an object of { \"min\": ..., \"max\": ... } by quantity");
        break;
    case KEY_GOALS:
        text_add(out, "an object of half-widths above 0 by quantity");
        break;
    case KEY_PLACES:
        text_add(out, "an object of [x, y] in mm by position");
        break;
    case KEY_RULES:
        text_add(out, "names of pattern tests in quotes, joined by commas");
        break;
    }
}

int material_is_path(const char *name) {
    size_t n = strlen(name);
    return strchr(name, '/') != NULL || (n > 4 && strcmp(name + n - 4, ".csv") == 0);
}
