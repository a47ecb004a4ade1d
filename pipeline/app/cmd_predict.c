/* `sward predict`: reflectance from numbers. The options are keys of a protocol, set and checked through its
 * table, so that a number on the command line and the same number in a file mean the same. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/angles.h"
#include "app/command.h"
#include "app/materials.h"
#include "app/optics_options.h"
#include "app/trial_print.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"
#include "report/rows.h"

enum {
    OPT_SPACING = 1,
    OPT_SPACING_U,
    OPT_HEIGHT,
    OPT_ANGLES,
    OPT_LIMIT,
    OPT_TRIALS,
    OPT_SEED,
    OPT_TOLERANCE,
    OPT_PROTOCOL,
    OPT_JSON,
    OPT_CSV,
    OPT_MATERIALS
};

/* clang-format off */
static const struct argp_option predict_options[] = {
    { "spacing",       OPT_SPACING,       "NM",       0, "mean distance of neighbouring features; decides where the model holds", 0 },
    { "spacing-u",     OPT_SPACING_U,     "NM",       0, "its standard uncertainty (default: 0)", 0 },
    { "height",        OPT_HEIGHT,        "NM",       0, "feature height; 0 is a planar surface", 0 },
    { "height-u",      OPT_HEIGHT_U,      "NM",       0, "its standard uncertainty (default: 0)", 0 },
    SHAPE_OPTIONS,
    { "profile",       OPT_PROFILE,       "FILE",     0, "measured profile instead of height and shape: CSV with depth_nm and solid_fraction", 0 },
    STACK_OPTIONS,
    WEIGHT_OPTIONS,
    { "angles",        OPT_ANGLES,        "FROM:TO:STEP", 0, "weighted reflectance against the angle, s, p and unpolarised, such as 0:80:5", 0 },
    { "limit",         OPT_LIMIT,         "R",        0, "with --angles: up to which angle the reflectance stays at or below this, such as 0.02", 0 },
    { "trials",        OPT_TRIALS,        NULL,       0, "carry the distributions of the inputs through by Monte Carlo (JCGM 101), with a ranked budget", 0 },
    { "seed",          OPT_SEED,          "N",        0, "of the trials: same seed, same result (default: 1)", 0 },
    { "tolerance",     OPT_TOLERANCE,     "R",        0, "of the trials: they go on until the ends of the interval are known to this (default: 0.0005)", 0 },
    { "protocol",      OPT_PROTOCOL,      "FILE",     0, "link and optics of a protocol; options outrank it", 0 },
    { "json",          OPT_JSON,          NULL,       0, "one JSON object with the spectrum", 0 },
    { "csv",           OPT_CSV,           NULL,       0, "the spectrum as CSV", 0 },
    { "materials",     OPT_MATERIALS,     NULL,       0, "list the known materials with their sources", 0 },
    { 0 } };
/* clang-format on */

typedef enum { AS_TEXT, AS_JSON, AS_CSV, AS_MATERIALS } output;

typedef struct {
    given_options given; /* keys of a protocol */
    const char *spacing, *spacing_u, *height, *protocol, *angles, *limit, *seed, *tolerance;
    int trials;
    output as;
} request;

static error_t predict_option(int key, char *arg, struct argp_state *state) {
    request *q = state->input;
    const struct {
        int key;
        const char **to;
    } texts[] = {
        { OPT_SPACING, &q->spacing },   { OPT_SPACING_U, &q->spacing_u }, { OPT_HEIGHT, &q->height },
        { OPT_PROTOCOL, &q->protocol }, { OPT_ANGLES, &q->angles },       { OPT_LIMIT, &q->limit },
        { OPT_SEED, &q->seed },         { OPT_TOLERANCE, &q->tolerance },
    };
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++)
        if (texts[i].key == key) {
            *texts[i].to = arg;
            return 0;
        }
    switch (key) {
    case OPT_TRIALS:
        q->trials = 1;
        return 0;
    case OPT_JSON:
        q->as = AS_JSON;
        return 0;
    case OPT_CSV:
        q->as = AS_CSV;
        return 0;
    case OPT_MATERIALS:
        q->as = AS_MATERIALS;
        return 0;
    case ARGP_KEY_ARG:
        argp_error(state, "'%s' is no option; numbers need their names, such as --spacing 350", arg);
        return 0;
    default:
        return given_keep(&q->given, key, arg, state);
    }
}

const struct argp predict_argp = {
    predict_options,
    predict_option,
    "",
    "Reflectance of a textured surface from its numbers, with the interval the true value is expected in.\v"
    "Example: sward predict --spacing 350 --height 300 --coating alumina:10 --json",
    NULL,
    NULL,
    NULL
};

static int given(const request *q, int option) { return given_has(&q->given, option); }

static status length_option(const char *option, const char *text, int zero_allowed, double *out, error *e) {
    if (!number_parse(text, out) || !(zero_allowed ? *out >= 0.0 : *out > 0.0) || *out > 1e5)
        return fail(e, ST_BAD_INPUT, "%s: found %s, expected a number %s 0 and at most 100000 (nm)", option,
                    text, zero_allowed ? "of at least" : "above");
    return ST_OK;
}

/* The calibrated link of the protocol, NULL: none; a measured profile needs none. */
static const calibration *link_of(const setup *s) {
    return s->calibrated.link.n_samples && !s->measured.n ? &s->calibrated.link : NULL;
}

/* Options outrank the calibrated shape. */
static void shape_given(const request *q, const link_options *said, link_options *l) {
    if (given(q, OPT_SHAPE)) {
        l->exponent = said->exponent;
        l->shape_open = said->shape_open;
    }
    if (given(q, OPT_SHAPE) || given(q, OPT_SHAPE_U)) l->exponent_u = said->exponent_u;
    if (given(q, OPT_SPREAD)) l->height_spread = said->height_spread;
    if (given(q, OPT_LEVEL)) l->level_at_tips = said->level_at_tips;
    if (given(q, OPT_COVERAGE)) l->coverage = said->coverage;
}

static status surface_of(const request *q, const protocol *p, const setup *s, surface_input *in,
                         height_source *source, error *e) {
    status st = ST_OK;
    *source = HEIGHT_SHEET;
    in->spacing_nm = quantity_missing();
    in->height_nm = quantity_missing();
    in->pores = p->measure.relief == RELIEF_PORE;
    in->link = p->link;
    if (q->spacing) st = length_option("--spacing", q->spacing, 0, &in->spacing_nm.value, e);
    if (q->spacing) in->spacing_nm.u = 0.0;
    if (st == ST_OK && q->spacing_u) st = length_option("--spacing-u", q->spacing_u, 1, &in->spacing_nm.u, e);
    if (st != ST_OK) return st;
    if (s->measured.n) {
        if (q->height)
            return fail(e, ST_BAD_INPUT,
                        "--height: a measured profile already holds the height; give one of the two");
        in->measured = &s->measured;
        return ST_OK;
    }
    if (q->height) {
        st = length_option("--height", q->height, 1, &in->height_nm.value, e);
        in->height_nm.u = given(q, OPT_HEIGHT_U) ? p->link.height_nm_u : 0.0;
    } else if (q->spacing && p->facet_angle_deg > 0.0) { /* the facets say how tall they are */
        in->height_nm.value = 0.5 * in->spacing_nm.value * tan(p->facet_angle_deg * PI / 180.0);
        in->height_nm.u = 0.0;
    } else if (!q->protocol)
        return fail(
            e, ST_BAD_INPUT,
            "--height is missing; a top view does not show it: give it in nm, or a measured profile with "
            "--profile");
    if (st != ST_OK) return st;
    if (!q->spacing && !(q->height && in->height_nm.value <= 0.0))
        return fail(e, ST_BAD_INPUT, "--spacing is missing; it decides where the model holds: give it in nm");
    st = calibrated_height(link_of(s), in->height_nm, &in->link, in->spacing_nm, &in->height_nm, source, e);
    shape_given(q, &p->link, &in->link);
    return st;
}

/* Digits of the column of samples.csv, so that every output of the program agrees. */
static int digits_of(const char *name) {
    for (size_t i = 0; i < n_sample_columns; i++)
        if (strcmp(sample_columns[i].name, name) == 0) return sample_columns[i].digits;
    return 5;
}

static void member(textbuf *out, const char *name, double v, int digits) {
    text_addf(out, "  \"%s\": ", name);
    json_number(out, v, digits);
    text_add(out, ",\n");
}

static void sample_member(textbuf *out, const char *name, double v) { member(out, name, v, digits_of(name)); }

enum { SPECTRUM_DIGITS = 6 };

/* What the features were taken for; null for a measured profile. */
static void shape_json(const surface_input *in, textbuf *out) {
    const link_options *l = &in->link;
    const struct {
        const char *name;
        double v;
    } parts[] = { { "exponent", l->exponent },           { "flat_top", l->flat_top },
                  { "height_cut", link_height_cut(l) },  { "tip_radius_nm", l->tip_radius_nm },
                  { "coverage", l->coverage },           { "height_spread", l->height_spread } };
    text_add(out, "  \"shape\": ");
    if (in->measured) {
        text_add(out, "null,\n");
        return;
    }
    text_addf(out, "{\"stated\": %s", l->shape_open ? "false" : "true");
    for (size_t i = 0; i < sizeof parts / sizeof parts[0]; i++) {
        text_addf(out, ", \"%s\": ", parts[i].name);
        json_number(out, parts[i].v, 5);
    }
    text_addf(out, ", \"spread_law\": \"%s\", \"level\": \"%s\"},\n", l->lognormal ? "lognormal" : "normal",
              l->level_at_tips ? "tips" : "floor");
}

/* more: further members, each with its comma; may be NULL. */
static void print_json(const surface_input *in, const prediction *r, const char *more, textbuf *out) {
    text_add(out, "{\n");
    sample_member(out, "spacing_nm", in->spacing_nm.value);
    sample_member(out, "height_nm", in->height_nm.value);
    sample_member(out, "height_nm_u", in->height_nm.u);
    sample_member(out, "aspect", r->aspect);
    sample_member(out, "area_ratio", r->area_ratio);
    sample_member(out, "weighted_reflectance", r->weighted);
    sample_member(out, "weighted_reflectance_lo", r->weighted_lo);
    sample_member(out, "weighted_reflectance_hi", r->weighted_hi);
    sample_member(out, "current_loss_mA_cm2", r->current_loss_mA_cm2);
    sample_member(out, "polished_reflectance", r->polished);
    sample_member(out, "coated_reflectance", r->coated);
    sample_member(out, "subwavelength_share", r->shares.none);
    member(out, "rear_escape", r->rear_escape, digits_of("weighted_reflectance"));
    shape_json(in, out);
    if (more) text_add(out, more);
    text_add(out, "  \"optics_model\": ");
    json_string(out, r->model);
    text_add(out, ",\n  \"orders\": {\"none\": ");
    json_number(out, r->shares.none, 4);
    text_add(out, ", \"in_substrate\": ");
    json_number(out, r->shares.in_substrate, 4);
    text_add(out, ", \"in_ambient\": ");
    json_number(out, r->shares.in_ambient, 4);
    const struct {
        const char *name;
        double v;
    } parts[] = { { "height", r->u_height },         { "shape", r->u_shape },   { "tip", r->u_tip },
                  { "coverage", r->u_coverage },     { "height_spread", r->u_spread },
                  { "spacing", r->u_spacing },       { "mixing", r->u_mixing },
                  { "model", r->u_model },           { "model_bias", r->model_bias } };
    text_add(out, "},\n  \"budget\": {");
    for (size_t i = 0; i < sizeof parts / sizeof parts[0]; i++) {
        text_addf(out, "%s\"%s\": ", i ? ", " : "", parts[i].name);
        json_number(out, isfinite(r->weighted_lo) ? parts[i].v : MISSING, 3); /* no interval, no budget */
    }
    text_add(out, "},\n  \"note\": ");
    json_string(out, r->note);
    text_add(out, ",\n  \"spectrum\": [");
    for (size_t i = 0; i < r->n; i++) {
        text_add(out, i ? ",\n    {\"wavelength_nm\": " : "\n    {\"wavelength_nm\": ");
        json_number(out, r->wavelength_nm[i], 7);
        text_add(out, ", \"reflectance\": ");
        json_number(out, r->R[i], SPECTRUM_DIGITS);
        text_add(out, ", \"reflectance_lo\": ");
        json_number(out, r->R_lo[i], SPECTRUM_DIGITS);
        text_add(out, ", \"reflectance_hi\": ");
        json_number(out, r->R_hi[i], SPECTRUM_DIGITS);
        text_add(out, "}");
    }
    text_add(out, "\n  ]\n}\n");
}

static void print_csv(const prediction *r, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT], d[NUMBER_TEXT];
    text_add(out, "wavelength_nm,reflectance,reflectance_lo,reflectance_hi\n");
    for (size_t i = 0; i < r->n; i++)
        text_addf(out, "%s,%s,%s,%s\n", number_text(r->wavelength_nm[i], 7, a),
                  number_text(r->R[i], SPECTRUM_DIGITS, b), number_text(r->R_lo[i], SPECTRUM_DIGITS, c),
                  number_text(r->R_hi[i], SPECTRUM_DIGITS, d));
}

static void print_surface(const surface_input *in, const prediction *r, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    if (in->measured)
        text_add(out, "Surface: measured profile");
    else if (!(in->height_nm.value > 0.0))
        text_add(out, "Surface: planar");
    else {
        text_addf(out, "Surface: %s of height %s", in->pores ? "pores" : "features",
                  number_text(in->height_nm.value, 5, a));
        if (in->height_nm.u > 0.0) text_addf(out, " +- %s", number_text(in->height_nm.u, 3, a));
        text_addf(out, " nm, aspect %s, area %s times the flat one", number_text(r->aspect, 4, a),
                  number_text(r->area_ratio, 4, b));
        if (in->link.flat_top > 0.0)
            text_addf(out, ", tops flat on %s %% of the foot (%s %% of the full height cut off)",
                      number_percent(in->link.flat_top, 4, a), number_percent(link_height_cut(&in->link), 4, b));
        if (in->link.tip_radius_nm > 0.0)
            text_addf(out, ", tips round with a radius of %s nm", number_text(in->link.tip_radius_nm, 4, a));
    }
    if (isfinite(in->spacing_nm.value))
        text_addf(out, ", spacing %s nm", number_text(in->spacing_nm.value, 5, a));
    text_add(out, "\n");
}

/* A share of the photons; what rounds to nothing prints as 0. */
static const char *share_text(double share, char *buffer) {
    return number_percent(share < 5e-4 ? 0.0 : share, 3, buffer);
}

static void print_text(const surface_input *in, const protocol *p, const prediction *r, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT];
    print_surface(in, r, out);
    text_addf(out, "Light: %s to %s nm of %s, by %s, ", number_text(p->band_lo_nm, 6, a),
              number_text(p->band_hi_nm, 6, b), p->sun ? p->sun : "the sun (AM1.5G)",
              p->weight == WEIGHT_ENERGY ? "energy" : "photons");
    if (p->hemispherical)
        text_add(out, "diffuse");
    else
        text_addf(out, "%s deg", number_text(p->angle_deg, 4, a));
    text_addf(out, ", %s, from %s\n\n",
              p->polarization == POL_MEAN ? "unpolarised" : polarization_name(p->polarization), p->ambient);
    if (r->refused)
        text_add(out, "Weighted reflectance     not given: the texture lies outside the model\n");
    else {
        int digits = digits_of("weighted_reflectance");
        text_addf(out, "Weighted reflectance     %s %%", number_percent(r->weighted, digits, a));
        if (r->weighted_lo < r->weighted_hi) /* planar layers have no interval */
            text_addf(out, "   (95 %% interval %s to %s %%)", number_percent(r->weighted_lo, digits, b),
                      number_percent(r->weighted_hi, digits, c));
        text_addf(out, "\nCurrent it costs         %s mA/cm2\n",
                  number_text(r->current_loss_mA_cm2, digits_of("current_loss_mA_cm2"), a));
    }
    text_addf(out, "Polished                 %s %%\n",
              number_percent(r->polished, digits_of("polished_reflectance"), a));
    text_addf(out, "Polished, 75 nm nitride  %s %%\n",
              number_percent(r->coated, digits_of("coated_reflectance"), a));
    if (isfinite(r->shares.none))
        text_addf(out,
                  "Photons                  %s %% see no diffraction, %s %% are diffracted into the "
                  "substrate only, %s %% also above it\n",
                  share_text(r->shares.none, a), share_text(r->shares.in_substrate, b),
                  share_text(r->shares.in_ambient, c));
    if (r->note[0]) text_addf(out, "\n%s\n", r->note);
}

/* The sweep over angles instead of one prediction. */
static status predict_angles(const request *q, const surface_input *in, const optics_setup *o, textbuf *out, error *e) {
    angle_sweep s = { 0 };
    double from, to, step, limit = MISSING;
    static const int clash[] = { OPT_ANGLE, OPT_POLARIZATION, OPT_HEMISPHERICAL };
    for (size_t i = 0; i < sizeof clash / sizeof clash[0]; i++)
        if (given(q, clash[i]))
            return fail(e, ST_BAD_INPUT, "%s: --angles already says which light; take one of the two out",
                        shared_option_name(clash[i]));
    status st = angles_parse("--angles", q->angles, &from, &to, &step, e);
    if (st == ST_OK && q->limit && !(number_parse(q->limit, &limit) && limit > 0.0 && limit <= 1.0))
        st = fail(e, ST_BAD_INPUT, "--limit: found %.40s, expected a reflectance above 0 and at most 1, such as 0.02", q->limit);
    if (st == ST_OK) st = angles_sweep(in, o, from, to, step, &s, e);
    if (st != ST_OK) return st;
    if (q->as == AS_JSON) angles_json(&s, limit, out);
    else if (q->as == AS_CSV) angles_csv(&s, out);
    else angles_text(&s, limit, out);
    angle_sweep_free(&s);
    return ST_OK;
}

/* --trials: printed behind the prediction, or as members of its object. */
static status predict_trials_text(const request *q, const surface_input *in, const optics_setup *o, textbuf *out, error *e) {
    trial_options t = trial_defaults();
    distribution d = { 0 };
    double seed = 1.0;
    if (q->seed && !(number_parse(q->seed, &seed) && seed >= 0.0 && seed < 9e15 && !(fabs(seed - floor(seed)) > 0.0)))
        return fail(e, ST_BAD_INPUT, "--seed: found %.40s, expected a whole number from 0", q->seed);
    if (q->tolerance && !(number_parse(q->tolerance, &t.tolerance) && t.tolerance >= 1e-6 && t.tolerance <= 0.1))
        return fail(e, ST_BAD_INPUT, "--tolerance: found %.40s, expected a reflectance from 1e-6 to 0.1, such as 0.0005",
                    q->tolerance);
    if ((q->seed || q->tolerance) && !q->trials)
        return fail(e, ST_BAD_INPUT, "%s: it needs --trials", q->seed ? "--seed" : "--tolerance");
    if (!q->trials) return ST_OK;
    if (q->angles || q->as == AS_CSV)
        return fail(e, ST_BAD_INPUT, "--trials: not together with %s", q->angles ? "--angles" : "--csv");
    t.seed = (uint64_t)seed;
    error own = { 0 };
    status st = predict_trials(in, o, &t, &d, &own);
    if (st == ST_OK && q->as == AS_JSON) trials_json(&d, &t, out);
    else if (st == ST_OK) trials_text(&d, &t, out);
    else fail(e, st == ST_NO_RESULT ? ST_BAD_INPUT : st, "--trials: %s", own.text);
    distribution_free(&d);
    return st == ST_OK ? ST_OK : e->code;
}

static status predict_all(const request *q, textbuf *out, error *e) {
    protocol p = { 0 };
    setup s = { 0 };
    prediction r = { 0 };
    surface_input in = { 0 };
    textbuf trials = { 0 };
    height_source source = HEIGHT_SHEET;
    status st = q->protocol ? protocol_read(q->protocol, &p, e) : protocol_defaults(&p, e);
    if (st == ST_OK) st = given_apply(&q->given, !q->protocol, &p, e);
    if (st == ST_OK) st = setup_make(&p, &s, e);
    if (st == ST_OK) st = surface_of(q, &p, &s, &in, &source, e);
    if (st == ST_OK && q->limit && !q->angles)
        st = fail(e, ST_BAD_INPUT, "--limit: it needs --angles, such as 0:80:5");
    if (st == ST_OK) st = predict_trials_text(q, &in, &s.optics, &trials, e);
    if (st == ST_OK) st = text_check(&trials, "the trials", e);
    if (st == ST_OK && q->angles) {
        st = predict_angles(q, &in, &s.optics, out, e);
        goto done;
    }
    if (st == ST_OK) st = predict(&in, &s.optics, &r, e);
    if (st != ST_OK) goto done;
    if (link_of(&s))
        calibration_apply(link_of(&s), source == HEIGHT_CALIBRATED, in.spacing_nm, in.pores, MISSING, &r);
    if (q->as == AS_JSON)
        print_json(&in, &r, trials.s, out);
    else if (q->as == AS_CSV)
        print_csv(&r, out);
    else
        print_text(&in, &p, &r, out);
    if (q->as == AS_TEXT && trials.s) text_add(out, trials.s);
done:
    text_free(&trials);
    prediction_free(&r);
    setup_free(&s);
    protocol_free(&p);
    return st;
}

int cmd_predict(int argc, char **argv) {
    request q = { .as = AS_TEXT };
    textbuf out = { 0 };
    error e = { ST_OK, "" };
    argp_parse(&predict_argp, argc, argv, 0, NULL, &q);
    status st = q.as == AS_MATERIALS ? materials_list(&out, &e) : predict_all(&q, &out, &e);
    if (st == ST_OK) return command_print("predict", &out);
    text_free(&out);
    return command_failed("predict", &e);
}
