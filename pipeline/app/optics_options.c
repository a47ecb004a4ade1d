/* Options that are keys of a protocol: kept as they come, set when the protocol is read. */
#include "app/optics_options.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/quantity.h"

/* clang-format off */
static const struct { int option; const char *name, *group, *key; } sets[] = {
    { OPT_SHAPE,         "--shape",           "link",   "shape" },
    { OPT_SHAPE_U,       "--shape-u",         "link",   "exponent_u" },
    { OPT_FLAT_TOP,      "--flat-top",        "link",   "flat_top" },
    { OPT_FLAT_TOP_U,    "--flat-top-u",      "link",   "flat_top_u" },
    { OPT_TIP_RADIUS,    "--tip-radius",      "link",   "tip_radius_nm" },
    { OPT_TIP_RADIUS_U,  "--tip-radius-u",    "link",   "tip_radius_nm_u" },
    { OPT_SPREAD,        "--height-spread",   "link",   "height_spread" },
    { OPT_SPREAD_U,      "--height-spread-u", "link",   "height_spread_u" },
    { OPT_SPREAD_LAW,    "--spread-law",      "link",   "spread_law" },
    { OPT_LEVEL,         "--level",           "link",   "level" },
    { OPT_COVERAGE,      "--coverage",        "link",   "coverage" },
    { OPT_COVERAGE_U,    "--coverage-u",      "link",   "coverage_u" },
    { OPT_HEIGHT_U,      "--height-u",        "link",   "height_nm_u" },
    { OPT_PROFILE,       "--profile",         "link",   "profile" },
    { OPT_COATING,       "--coating",         "optics", "coatings" },
    { OPT_SUBSTRATE,     "--substrate",       "optics", "substrate" },
    { OPT_AMBIENT,       "--ambient",         "optics", "ambient" },
    { OPT_MIXING,        "--mixing",          "optics", "mixing" },
    { OPT_ANGLE,         "--angle",           "optics", "angle_deg" },
    { OPT_POLARIZATION,  "--polarization",    "optics", "polarization" },
    { OPT_HEMISPHERICAL, "--hemispherical",   "optics", "hemispherical" },
    { OPT_BAND,          "--band",            "optics", "band_nm" },
    { OPT_SUN,           "--sun",             "optics", "sun" },
    { OPT_WEIGHT,        "--weight",          "optics", "weight" },
    { OPT_MODEL,         "--model",           "optics", "model" },
    { OPT_FACET_ANGLE,   "--facet-angle",     "optics", "facet_angle_deg" },
    { OPT_REAR,          "--rear",            "optics", "rear" },
};
/* clang-format on */
enum { N_SETS = sizeof sets / sizeof sets[0] };

error_t given_keep(given_options *g, int option, const char *text, struct argp_state *state) {
    if (option < OPT_SHAPE || option >= OPT_SHARED_END) return ARGP_ERR_UNKNOWN;
    if (g->n == GIVEN_MOST) {
        argp_error(state, "more than %d options", GIVEN_MOST);
        return 0;
    }
    g->item[g->n].option = option;
    g->item[g->n++].text = text ? text : "true";
    return 0;
}

int given_has(const given_options *g, int option) {
    for (size_t i = 0; i < g->n; i++)
        if (g->item[i].option == option) return 1;
    return 0;
}

const char *shared_option_name(int option) {
    for (size_t k = 0; k < N_SETS; k++)
        if (sets[k].option == option) return sets[k].name;
    return option == OPT_PORES ? "--pores" : "?";
}

static void drop_coatings(protocol *p) {
    for (size_t i = 0; i < p->n_coatings; i++) {
        free(p->coatings[i].material);
        p->coatings[i] = (protocol_coating){ 0 };
    }
    p->n_coatings = 0;
}

status given_apply(const given_options *g, int known, protocol *p, error *e) {
    if (given_has(g, OPT_COATING)) drop_coatings(p);
    if (given_has(g, OPT_SHAPE)) p->link.exponent_u = MISSING;
    if (given_has(g, OPT_TIP_RADIUS) && !given_has(g, OPT_FLAT_TOP)) p->link.flat_top = 0.0;
    if (given_has(g, OPT_FLAT_TOP) && !given_has(g, OPT_TIP_RADIUS)) p->link.tip_radius_nm = 0.0;
    if (known) p->link.shape_open = 0;
    for (size_t i = 0; i < g->n; i++)
        if (g->item[i].option == OPT_BAND && !strchr(g->item[i].text, ':'))
            return fail(e, ST_BAD_INPUT, "--band: found %.40s, expected LO:HI in nm, such as 300:1200", g->item[i].text);
    for (size_t i = 0; i < g->n; i++)
        for (size_t k = 0; k < N_SETS; k++) {
            if (sets[k].option != g->item[i].option) continue;
            status st = protocol_set(p, sets[k].group, sets[k].key, g->item[i].text, sets[k].name, e);
            if (st != ST_OK) return st;
        }
    if (isfinite(p->link.exponent_u)) p->link.shape_open = 0;
    if (p->link.flat_top > 0.0 && p->link.tip_radius_nm > 0.0)
        return fail(e, ST_BAD_INPUT, "--flat-top: a tip is flat or round; take it or --tip-radius out");
    if (given_has(g, OPT_PORES)) p->measure.relief = RELIEF_PORE;
    return ST_OK;
}
