/* A protocol as text: canonical lines for fingerprints, commented JSON for `protocol print`, sentences for
 * `protocol explain`. All three walk the table of keys. */
#include <math.h>
#include <string.h>

#include "app/protocol_keys.h"
#include "base/number.h"
#include "io/json.h"

/* One canonical line, key = value; numbers with 17 digits say every bit. */
static void canonical_key(const protocol *p, const protocol_key *k, textbuf *out) {
    char number[NUMBER_TEXT];
    text_addf(out, "%s.%s=", k->group, k->name);
    switch (k->kind) {
    case KEY_TEXT:
    case KEY_PATH:
        text_add(out, key_text(p, k) ? key_text(p, k) : "-");
        break;
    case KEY_MATERIAL:
        text_add(out, material_is_path(key_text(p, k)) ? "file" : key_text(p, k));
        break;
    case KEY_SHAPE:
        if (p->link.shape_open) text_add(out, "unknown ");
        text_add(out, number_text(key_number(p, k), 17, number));
        break;
    case KEY_NUMBER:
        text_add(out, number_text(key_number(p, k), 17, number));
        break;
    case KEY_SWITCH:
    case KEY_WORD:
        text_addf(out, "%d", key_index(p, k));
        break;
    case KEY_BAND:
        text_addf(out, "%s,", number_text(key_number(p, k), 17, number));
        text_add(out, number_text(key_high(p, k), 17, number));
        break;
    case KEY_COATINGS:
        for (size_t i = 0; i < p->n_coatings; i++)
            text_addf(out, "%s:%s;",
                      material_is_path(p->coatings[i].material) ? "file" : p->coatings[i].material,
                      number_text(p->coatings[i].thickness_nm, 17, number));
        break;
    case KEY_REAR:
        text_addf(out, "%s;", number_text(p->rear.thickness_um, 17, number));
        text_addf(out, "%s;%d", number_text(p->rear.rear_reflectance, 17, number), p->rear.lambertian);
        break;
    case KEY_TARGETS:
        for (size_t i = 0; i < p->n_targets; i++) {
            text_addf(out, "%s:%s..", p->targets[i].quantity, number_text(p->targets[i].min, 17, number));
            text_addf(out, "%s:%d", number_text(p->targets[i].max, 17, number), (int)p->targets[i].error);
            if (p->targets[i].rule != DECIDE_GUARD)
                text_addf(out, ":%d:%s", (int)p->targets[i].rule, number_text(p->targets[i].at_least, 17, number));
            text_add(out, ";");
        }
        break;
    case KEY_PLACES:
        for (size_t i = 0; i < p->n_places; i++) {
            text_addf(out, "%s:%s,", p->places[i].position, number_text(p->places[i].x_mm, 17, number));
            text_addf(out, "%s;", number_text(p->places[i].y_mm, 17, number));
        }
        break;
    case KEY_GOALS: /* these ask, and change no result */
    case KEY_RULES:
        break;
    }
    text_add(out, "\n");
}

void protocol_measuring_text(const protocol *p, textbuf *out) {
    for (size_t i = 0; i < n_protocol_keys; i++)
        if (protocol_keys[i].measuring) canonical_key(p, &protocol_keys[i], out);
}

void protocol_full_text(const protocol *p, textbuf *out) {
    for (size_t i = 0; i < n_protocol_keys; i++) {
        const protocol_key *k = &protocol_keys[i];
        int name_only = k->kind == KEY_PATH || k->kind == KEY_GOALS || k->offset == offsetof(protocol, name);
        if (!name_only && strcmp(k->group, "charts") != 0) canonical_key(p, k, out);
    }
}

/* The value as JSON, as a protocol would state it. Only used for the built-in one: no coatings, no targets, no
 * rear. */
static void json_value(const protocol *p, const protocol_key *k, textbuf *out) {
    char number[NUMBER_TEXT];
    switch (k->kind) {
    case KEY_TEXT:
    case KEY_PATH:
    case KEY_MATERIAL:
    case KEY_RULES:
        json_string(out, key_text(p, k));
        break;
    case KEY_NUMBER:
        json_number(out, key_number(p, k), 15);
        break;
    case KEY_SHAPE:
        text_add(out, "\"unknown\"");
        break;
    case KEY_SWITCH:
        text_add(out, key_index(p, k) ? "true" : "false");
        break;
    case KEY_WORD:
        json_string(out, k->word(key_index(p, k)));
        break;
    case KEY_BAND:
        if (isnan(key_number(p, k))) {
            text_add(out, "null");
            break;
        }
        text_addf(out, "[%s, ", number_text(key_number(p, k), 15, number));
        text_addf(out, "%s]", number_text(key_high(p, k), 15, number));
        break;
    case KEY_COATINGS:
        text_add(out, "[]");
        break;
    case KEY_REAR:
        text_add(out, "null");
        break;
    case KEY_TARGETS:
    case KEY_GOALS:
    case KEY_PLACES:
        text_add(out, "{}");
        break;
    }
}

/* A comment of lines no wider than a terminal; words stay whole. */
static void comment(const char *text, const char *indent, textbuf *out) {
    enum { WIDTH = 100 };
    while (*text) {
        size_t n = strlen(text), room = WIDTH - strlen(indent);
        if (n > room) {
            n = room;
            while (n > 1 && text[n] != ' ') n--;
        }
        text_addf(out, "%s// ", indent);
        text_add_n(out, text, n);
        text_add(out, "\n");
        text += n + (text[n] == ' ');
    }
}

static void print_group(const protocol *p, const char *group, const char *indent, textbuf *out) {
    int first = 1;
    for (size_t i = 0; i < n_protocol_keys; i++) {
        const protocol_key *k = &protocol_keys[i];
        textbuf about = { 0 };
        if (strcmp(k->group, group) != 0) continue;
        text_addf(&about, "%s; ", k->help);
        key_expected(k, &about);
        if (k->why) text_addf(&about, ". Why: %s", k->why);
        if (!first) text_add(out, ",\n");
        if (text_check(&about, "the protocol", NULL) == ST_OK)
            comment(about.s, indent, out);
        else
            out->failed = 1;
        text_free(&about);
        text_addf(out, "%s\"%s\": ", indent, k->name);
        json_value(p, k, out);
        first = 0;
    }
}

void protocol_print(textbuf *out) {
    protocol p = { 0 };
    if (protocol_defaults(&p, NULL) != ST_OK) {
        out->failed = 1;
        return;
    }
    text_add(out, "// The built-in protocol. Every key may be left out; null stands for the default. "
                  "Comments like this one are\n"
                  "// allowed in a protocol.\n{\n");
    print_group(&p, "", "  ", out);
    for (size_t g = 0; g < PROTOCOL_GROUPS; g++) {
        text_addf(out, ",\n\n  // %s\n  \"%s\": {\n", protocol_group_help[g], protocol_groups[g]);
        print_group(&p, protocol_groups[g], "    ", out);
        text_add(out, "\n  }");
    }
    text_add(out, "\n}\n");
    protocol_free(&p);
}

/* number_text into a text, with a unit. */
static void say(textbuf *out, double v, const char *unit) {
    char number[NUMBER_TEXT];
    text_addf(out, "%s%s%s", number_text(v, 6, number), unit[0] ? " " : "", unit);
}

/* "350 +- 30 nm"; the uncertainty is left out when it is not said. */
static void say_with_u(textbuf *out, double v, double u, const char *unit) {
    char number[NUMBER_TEXT];
    text_add(out, number_text(v, 6, number));
    if (isfinite(u)) text_addf(out, " +- %s", number_text(u, 6, number));
    text_addf(out, "%s%s", unit[0] ? " " : "", unit);
}

static void explain_measuring(const protocol *p, const protocol *usual, textbuf *out) {
    static const char *const features[] = {
        "Whether features are bright hillocks or dark pores is found in each micrograph.\n",
        "Features are bright hillocks.\n", "Features are dark pores.\n"
    };
    text_add(out, features[p->measure.relief]);
    text_add(
        out,
        p->spacing == SPACING_DENSITY
            ? "The spacing of a sample is the hexagonal spacing of its feature density.\n"
            : "The spacing of a sample is the first ring of the autocorrelation of its curvature map.\n");
    if (isfinite(p->px_u_rel)) {
        text_add(out, "Every pixel size carries a standard uncertainty of ");
        say(out, 100.0 * p->px_u_rel, "%.\n");
    } else
        text_add(out, "The uncertainty of a pixel size is what its source says, else 1 %.\n");
    if (p->pattern) text_addf(out, "A file without a row in the sample sheet is read as %s.\n", p->pattern);
    if (isfinite(p->window_lo_nm)) {
        text_add(out, "Only micrographs with pixels from ");
        say(out, p->window_lo_nm, "to ");
        say(out, p->window_hi_nm, "nm are measured; the others are listed.\n");
    }
    if (isfinite(p->page)) {
        text_add(out, "Of a file with several pages page ");
        say(out, p->page, "is measured.\n");
    }
    if (p->keep_tilt) text_add(out, "Tilted views are flagged, not stretched.\n");
    text_add(out, "A micrograph is left out of its sample below ");
    say(out, p->measure.min_px_per_spacing, "pixels per spacing or ");
    say(out, p->measure.min_features, "features, and with a blur above ");
    say(out, p->measure.max_blur, "spacings. All its limits and what they rest on:\n");
    for (size_t i = 0; i < n_protocol_keys; i++) {
        const protocol_key *k = &protocol_keys[i];
        if (strcmp(k->group, "fitness") != 0) continue;
        text_addf(out, "  %s ", k->name);
        say(out, key_number(p, k), "");
        text_addf(out, ": %s", k->help);
        if (fabs(key_number(p, k) - key_number(usual, k)) > 0.0) {
            text_add(out, ". The built-in ");
            say(out, key_number(usual, k), "because ");
        } else {
            text_add(out, ", because ");
        }
        text_addf(out, "%s.\n", k->why);
    }
}

static void explain_shape(const link_options *o, textbuf *out) {
    char number[NUMBER_TEXT];
    if (o->shape_open)
        text_add(out, "The shape of the features is not stated: the value is that of cones, the interval holds everything "
                      "from cones to paraboloids");
    else if (fabs(o->exponent - 1.0) < 1e-12)
        text_add(out, "Features are cones");
    else if (fabs(o->exponent - 2.0) < 1e-12)
        text_add(out, "Features are paraboloids");
    else
        text_addf(out, "Features have the solid share (1 - z/h)^(2/q) with q = %s",
                  number_text(o->exponent, 6, number));
    if (o->exponent_u > 0.0) text_addf(out, " (exponent +- %s)", number_text(o->exponent_u, 6, number));
    if (o->flat_top > 0.0) {
        text_add(out, ", flat at the top on ");
        say(out, 100.0 * o->flat_top, "% of their foot (");
        say(out, 100.0 * link_height_cut(o), "% of the full height cut off)");
    }
    if (o->tip_radius_nm > 0.0) {
        text_add(out, ", their tips round with a radius of ");
        say_with_u(out, o->tip_radius_nm, o->tip_radius_nm_u > 0.0 ? o->tip_radius_nm_u : MISSING, "nm");
    }
    if (o->height_spread > 0.0) {
        text_add(out, ", their heights spread by ");
        say(out, 100.0 * o->height_spread, "%");
        if (o->lognormal) text_add(out, " (log-normal)");
        text_add(out, o->level_at_tips ? ", level at the tips" : ", on one floor");
    }
    if (o->height_by_size > 0.0 || o->height_by_size < 0.0)
        text_addf(out, ", and heights follow cell diameters with power %s",
                  number_text(o->height_by_size, 6, number));
    if (o->coverage < 1.0) {
        text_add(out, ", and at the floor ");
        say(out, 100.0 * o->coverage, "% of the ground is covered");
    }
    text_add(out, ".\n");
}

static void explain_link(const protocol *p, textbuf *out) {
    const link_options *o = &p->link;
    if (p->profile) {
        text_addf(out,
                  "The solid fraction against depth is the measured profile in %s; heights are not used.\n",
                  p->profile);
        return;
    }
    if (p->calibration) {
        text_addf(out,
                  "The height of a sample is the one of its sample sheet; without one it follows from its spacing by the "
                  "calibrated link in %s, which also gives the shape.\n",
                  p->calibration);
        return;
    }
    text_add(out, "The height of a sample is the one of its sample sheet; without one it is assumed: ");
    if (isfinite(o->height_nm)) {
        say_with_u(out, o->height_nm, o->height_nm_u, "nm");
    } else if (isfinite(o->aspect)) {
        say_with_u(out, o->aspect, o->aspect_u, "");
        text_add(out, " times the spacing");
    } else
        text_add(out, "1.0 +- 0.3 times the spacing");
    text_add(out, ".\n");
    explain_shape(o, out);
}

static void explain_optics(const protocol *p, textbuf *out) {
    if (strcmp(p->ambient, "laminate") == 0) {
        text_add(out, "Light comes through ");
        say(out, p->glass_mm, "mm of glass and ");
        say(out, p->encapsulant_mm, "mm of encapsulant.\n");
    } else
        text_addf(out, "Light comes from %s.\n", p->ambient);
    for (size_t i = 0; i < p->n_coatings; i++) {
        text_add(out, i ? "Below it lies " : "The surface is coated with ");
        say(out, p->coatings[i].thickness_nm, "nm of ");
        text_addf(out, "%s.\n", p->coatings[i].material);
    }
    text_addf(out, "The texture is made of %s; its slabs are mixed by the rule %s.\n", p->substrate,
              mixing_name(p->mixing));
    static const char *const models[] = { "Textures too coarse for the graded index get no reflectance.\n",
                                          "Reflectance comes from geometric optics of steep facets.\n",
                                          "Textures too coarse for the graded index count as facets where steep enough.\n" };
    text_add(out, models[p->model]);
    if (p->hemispherical)
        text_add(out, "The light is diffuse, from the whole half space");
    else {
        text_add(out, "The light comes at ");
        say(out, p->angle_deg, "deg");
    }
    text_addf(out, ", %s.\n",
              p->polarization == POL_MEAN ? "unpolarised"
              : p->polarization == POL_S  ? "polarised s"
                                          : "polarised p");
    if (p->rear.thickness_um > 0.0) {
        text_add(out, "Light returning from the rear of a wafer of ");
        say(out, p->rear.thickness_um, "um");
        text_addf(out, " is added, %s.\n", p->rear.lambertian ? "scattered inside (Lambertian)" : "in a straight double pass");
    }
    text_addf(out, "Reflectance is weighted with the %s of %s from ",
              p->weight == WEIGHT_ENERGY ? "energy" : "photons", p->sun ? p->sun : "the sun (AM1.5G)");
    say(out, p->band_lo_nm, "to ");
    say(out, p->band_hi_nm, "nm, on a grid of ");
    say(out, p->step_nm, "nm.\n");
}

static void explain_targets(const protocol *p, textbuf *out) {
    if (!p->n_targets) text_add(out, "There are no targets: samples get no verdict.\n");
    for (size_t i = 0; i < p->n_targets; i++) {
        const target *t = &p->targets[i];
        char number[NUMBER_TEXT];
        text_addf(out, "A sample conforms when its %s is ", t->quantity);
        if (isfinite(t->min) && isfinite(t->max)) {
            say(out, t->min, "to ");
            say(out, t->max, "");
        } else if (isfinite(t->min)) {
            text_add(out, "at least ");
            say(out, t->min, "");
        } else {
            text_add(out, "at most ");
            say(out, t->max, "");
        }
        if (t->rule == DECIDE_SIMPLE) text_add(out, ", whatever its uncertainty (simple acceptance).\n");
        else {
            text_addf(out, "with %s %% ", number_percent(t->rule == DECIDE_PROBABILITY ? t->at_least : 0.95, 6, number));
            text_add(out, t->rule == DECIDE_PROBABILITY ? "conformance probability, " : "probability at each limit (guard band), ");
            text_add(out, t->error == ERROR_REPEAT ? "counting only what varies from run to run.\n" : "all uncertainty counted.\n");
        }
    }
}

static void explain_goals(const protocol *p, textbuf *out) {
    for (size_t i = 0; i < p->n_goals; i++) {
        text_addf(out, "results.json says how many more micrographs bring the 95 %% interval of %s to -+ ", p->goals[i].quantity);
        say(out, p->goals[i].half_width, "");
        text_add(out, ".\n");
    }
}

void protocol_explain(const protocol *p, textbuf *out) {
    text_addf(out, "Protocol \"%s\"%s%s.\n", p->name, p->path[0] ? ", from " : "", p->path);
    protocol usual = { 0 };
    if (protocol_defaults(&usual, NULL) != ST_OK) {
        out->failed = 1;
        return;
    }
    explain_measuring(p, &usual, out);
    protocol_free(&usual);
    explain_link(p, out);
    explain_optics(p, out);
    explain_targets(p, out);
    explain_goals(p, out);
    if (p->history)
        text_addf(out, "Samples are kept in the ledger %s.\n", p->history);
    else
        text_add(out, "Samples are kept in history.sqlite of the output folder.\n");
}
