/* The options that `predict`, `window` and `fit` share: each one sets a key of a protocol, through the protocol's own table,
 * so that a number on the command line and the same number in a file mean the same, in every command. */
#ifndef SWARD_APP_OPTICS_OPTIONS_H
#define SWARD_APP_OPTICS_OPTIONS_H
#include <argp.h>
#include <stddef.h>

#include "app/protocol.h"

enum {
    OPT_SHAPE = 0x500,
    OPT_SHAPE_U,
    OPT_FLAT_TOP,
    OPT_FLAT_TOP_U,
    OPT_TIP_RADIUS,
    OPT_TIP_RADIUS_U,
    OPT_SPREAD,
    OPT_SPREAD_U,
    OPT_SPREAD_LAW,
    OPT_LEVEL,
    OPT_COVERAGE,
    OPT_COVERAGE_U,
    OPT_PORES,
    OPT_COATING,
    OPT_SUBSTRATE,
    OPT_AMBIENT,
    OPT_MIXING,
    OPT_ANGLE,
    OPT_POLARIZATION,
    OPT_HEMISPHERICAL,
    OPT_BAND,
    OPT_SUN,
    OPT_WEIGHT,
    OPT_MODEL,
    OPT_FACET_ANGLE,
    OPT_REAR,
    OPT_PROFILE,
    OPT_HEIGHT_U,
    OPT_SHARED_END
};

/* clang-format off */
/* Rows of an argp table. What is not given is as the protocol says. */
#define SHAPE_OPTIONS \
    { "shape",         OPT_SHAPE,         "SHAPE",    0, "cone (default), paraboloid, or the exponent q of (1 - z/h)^(2/q); unknown: anything from cone to paraboloid", 0 }, \
    { "shape-u",       OPT_SHAPE_U,       "U",        0, "standard uncertainty of the exponent (default: 0)", 0 }, \
    { "flat-top",      OPT_FLAT_TOP,      "SHARE",    0, "share of a feature's foot that is flat at its top (default: 0)", 0 }, \
    { "flat-top-u",    OPT_FLAT_TOP_U,    "U",        0, "its standard uncertainty (default: 0)", 0 }, \
    { "tip-radius",    OPT_TIP_RADIUS,    "NM",       0, "radius of round tips (default: 0, as sharp as the shape)", 0 }, \
    { "tip-radius-u",  OPT_TIP_RADIUS_U,  "NM",       0, "its standard uncertainty (default: 0)", 0 }, \
    { "height-spread", OPT_SPREAD,        "REL",      0, "relative standard deviation of the heights (default: 0)", 0 }, \
    { "height-spread-u", OPT_SPREAD_U,    "U",        0, "its standard uncertainty (default: 0)", 0 }, \
    { "spread-law",    OPT_SPREAD_LAW,    "LAW",      0, "law of that spread: normal (default) or lognormal", 0 }, \
    { "level",         OPT_LEVEL,         "WHERE",    0, "where features of unequal height are level: floor (default) or tips", 0 }, \
    { "coverage",      OPT_COVERAGE,      "F",        0, "solid share at the floor (default: 1)", 0 }, \
    { "coverage-u",    OPT_COVERAGE_U,    "U",        0, "its standard uncertainty (default: 0)", 0 }, \
    { "pores",         OPT_PORES,         NULL,       0, "features are pores: the complement of the shape", 0 }

#define STACK_OPTIONS \
    { "coating",       OPT_COATING,       "MATERIAL:NM", 0, "conformal coating, outermost first; may be repeated", 0 }, \
    { "substrate",     OPT_SUBSTRATE,     "MATERIAL", 0, "what the features are made of (default: silicon)", 0 }, \
    { "ambient",       OPT_AMBIENT,       "MEDIUM",   0, "air (default), laminate (air, glass, encapsulant), a material or an index", 0 }, \
    { "mixing",        OPT_MIXING,        "RULE",     0, "bruggeman-2d (default), maxwell-garnett-2d, bruggeman-3d, maxwell-garnett-3d, looyenga, volume", 0 }, \
    { "angle",         OPT_ANGLE,         "DEG",      0, "angle of incidence in air (default: 0)", 0 }, \
    { "polarization",  OPT_POLARIZATION,  "P",        0, "mean (default, unpolarised), s or p", 0 }, \
    { "hemispherical", OPT_HEMISPHERICAL, NULL,       0, "diffuse light from the whole half space", 0 }

#define WEIGHT_OPTIONS \
    { "model",         OPT_MODEL,         "MODEL",    0, "graded (index), facets (geometric optics), or auto (default): whichever is valid", 0 }, \
    { "facet-angle",   OPT_FACET_ANGLE,   "DEG",      0, "inclination of the facets, 54.74 for alkaline pyramids (default: from height and spacing)", 0 }, \
    { "band",          OPT_BAND,          "LO:HI",    0, "wavelengths for the weighting, nm (default: 300:1200)", 0 }, \
    { "sun",           OPT_SUN,           "FILE",     0, "own spectrum for the weighting: CSV with wavelength_nm and irradiance_W_m2_nm (default: AM1.5G)", 0 }, \
    { "weight",        OPT_WEIGHT,        "WHAT",     0, "photons (default) or energy", 0 }, \
    { "rear",          OPT_REAR,          "UM",       0, "wafer thickness in um: adds the light returning from a bare rear, scattered inside; other rears: optics.rear of a protocol", 0 }
/* clang-format on */

/* What stood on the command line, in its order; checked when the protocol is read. */
enum { GIVEN_MOST = 64 };
typedef struct {
    struct {
        int option;
        const char *text;
    } item[GIVEN_MOST];
    size_t n;
} given_options;

/* Keeps an option of the tables above: 0, or ARGP_ERR_UNKNOWN. */
error_t given_keep(given_options *g, int option, const char *text, struct argp_state *state);
int given_has(const given_options *g, int option);
const char *shared_option_name(int option); /* "--shape" */

/* Sets the keys. The command line's coatings replace those of the protocol; a shape or its uncertainty replaces both.
 *   in   known  1: a shape that neither says is taken as known, not as open (no protocol was named)
 *   err  as protocol_set */
status given_apply(const given_options *g, int known, protocol *p, error *e);

#endif
