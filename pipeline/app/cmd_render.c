/* `sward render`: micrographs of known truth into a folder, with truth.json beside them. Every file is written whole
 * or not at all, truth.json last. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "app/render.h"
#include "app/render_recipe.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/file.h"
#include "io/json.h"
#include "io/png_write.h"
#include "metrics/sizes.h"

typedef struct {
    const char *out, *recipe_path, *name;
    recipe_image image; /* what the options of the command line say */
    int picture_options, tiff, centres;
    size_t count;
} arguments;

enum { OPT_PICTURE = 0x100, OPT_NAME = 0x200, OPT_COUNT, OPT_FORMAT, OPT_RECIPE, OPT_CENTRES, OPT_NO_STRIP,
       OPT_NO_SCALE };

/* Rows with a key of OPT_PICTURE + k set the recipe key picture_keys[k]. */
static const char *const picture_keys[] = {
    "spacing_nm", "px_nm", "size", "pattern", "disorder", "relief", "shape", "fill", "height_spread", "height_by_size",
    "noise", "blur", "edge", "rough", "contrast", "gradient", "streaks", "stretch", "bits", "label", "seed",
    "second_share", "second_spacing", "jitter", "smear" };

/* clang-format off */
static const struct argp_option options[] = {
    { NULL, 0, NULL, 0, "What is made:", 1 },
    { "out",     'o',            "DIR",  0, "folder for the micrographs and truth.json (needed)", 1 },
    { "count",   OPT_COUNT,      "N",    0, "so many micrographs, the seed counting up (1)", 1 },
    { "name",    OPT_NAME,       "STEM", 0, "file names are STEM_001.png ... (render)", 1 },
    { "format",  OPT_FORMAT,     "png|tiff", 0, "file format (png)", 1 },
    { "recipe",  OPT_RECIPE,     "FILE", 0, "a JSON file that lists the images: {\"defaults\": {...}, \"images\": "
                                            "[{\"file\": \"a.png\", \"spacing_nm\": 320}, ...]}; keys are the long options "
                                            "with _ for -, spacing_nm and px_nm with their unit, strip and scale true or "
                                            "false", 1 },
    { "centres", OPT_CENTRES,    NULL,   0, "list the true centres in truth.json", 1 },
    { NULL, 0, NULL, 0, "The surface:", 2 },
    { "spacing",        OPT_PICTURE + 0, "NM",     0, "hexagonal spacing of the density (300)", 2 },
    { "px",             OPT_PICTURE + 1, "NM",     0, "pixel size (8)", 2 },
    { "size",           OPT_PICTURE + 2, "WxH",    0, "pixels, without the info strip (1024x768)", 2 },
    { "pattern",        OPT_PICTURE + 3, "NAME",   0, "hex, lloyd, rsa, matern or random (lloyd)", 2 },
    { "disorder",       OPT_PICTURE + 4, "X",      0, "hex: jitter sd / spacing (0.16); lloyd: steps (4); rsa, matern: "
                                                      "hard-core distance / spacing (0.70, 0.48)", 2 },
    { "relief",         OPT_PICTURE + 5, "KIND",   0, "hillock or pore (hillock)", 2 },
    { "shape",          OPT_PICTURE + 6, "SHAPE",  0, "cone, paraboloid, bell or an exponent (cone)", 2 },
    { "fill",           OPT_PICTURE + 7, "X",      0, "base radius / half spacing: 1.15 touches, 0.45 leaves a bare "
                                                      "floor (1.15)", 2 },
    { "height-spread",  OPT_PICTURE + 8, "X",      0, "relative standard deviation of the heights (0.1)", 2 },
    { "height-by-size", OPT_PICTURE + 9, "G",      0, "height grows with own cell size to the power G (0.5)", 2 },
    { "second-share",   OPT_PICTURE + 21, "X",     0, "share of the field under a second population, in patches (0)", 2 },
    { "second-spacing", OPT_PICTURE + 22, "X",     0, "its spacing / that of the first (2)", 2 },
    { "stretch",        OPT_PICTURE + 17, "X:DEG", 0, "stretched by X along DEG, counter-clockwise from the x axis, as a tilted view (1:0)", 2 },
    { "seed",           OPT_PICTURE + 20, "N",     0, "same seed, same bytes (1)", 2 },
    { NULL, 0, NULL, 0, "The look:", 3 },
    { "noise",    OPT_PICTURE + 10, "ELECTRONS", 0, "per pixel at full signal; 0 = noiseless (0)", 3 },
    { "blur",     OPT_PICTURE + 11, "PX", 0, "standard deviation of the probe (0.7)", 3 },
    { "edge",     OPT_PICTURE + 12, "X",  0, "share of slope in the signal (0)", 3 },
    { "rough",    OPT_PICTURE + 13, "X",  0, "fine roughness / height (0)", 3 },
    { "contrast", OPT_PICTURE + 14, "X",  0, "share of the grey range; above 1 clips (0.7)", 3 },
    { "gradient", OPT_PICTURE + 15, "X",  0, "relative change of brightness across the field (0)", 3 },
    { "streaks",  OPT_PICTURE + 16, "X",  0, "charging streaks along x / contrast (0)", 3 },
    { "jitter",   OPT_PICTURE + 23, "PX", 0, "standard deviation by which vibration shifts each scan line along x (0)", 3 },
    { "smear",    OPT_PICTURE + 24, "PX:DEG", 0, "astigmatism: further blur of that standard deviation along DEG only (0:0)", 3 },
    { "bits",     OPT_PICTURE + 18, "8|16", 0, "bit depth (8)", 3 },
    { "no-strip", OPT_NO_STRIP, NULL, 0, "no info strip at the bottom", 3 },
    { "no-scale", OPT_NO_SCALE, NULL, 0, "no pixel size in the file and no scale bar in the strip", 3 },
    { "label",    OPT_PICTURE + 19, "TEXT", 0, "text at the left of the strip", 3 },
    { 0 } };
/* clang-format on */

static void set_count(struct argp_state *state, arguments *a, const char *text) {
    double v;
    if (!number_parse(text, &v) || v < 1.0 || v > 100000.0 || fabs(v - floor(v)) > 0.0)
        argp_error(state, "--count: found '%s', expected a whole number from 1 to 100000", text);
    else a->count = (size_t)v;
}

static error_t parse(int opt, char *arg, struct argp_state *state) {
    arguments *a = state->input;
    error e = { 0 };
    if (opt >= OPT_PICTURE && opt < OPT_NAME) {
        a->picture_options = 1;
        if (recipe_set(&a->image, picture_keys[opt - OPT_PICTURE], arg, &e) != ST_OK) argp_error(state, "--%s", e.text);
        return 0;
    }
    switch (opt) {
    case 'o': a->out = arg; return 0;
    case OPT_NAME: a->name = arg; return 0;
    case OPT_COUNT: set_count(state, a, arg); return 0;
    case OPT_RECIPE: a->recipe_path = arg; return 0;
    case OPT_CENTRES: a->centres = 1; return 0;
    case OPT_FORMAT:
        a->tiff = !strcmp(arg, "tiff");
        if (!a->tiff && strcmp(arg, "png")) argp_error(state, "--format: found '%s', expected png or tiff", arg);
        return 0;
    case OPT_NO_STRIP:
        a->picture_options = 1;
        a->image.options.strip = 0;
        return 0;
    case OPT_NO_SCALE:
        a->picture_options = 1;
        a->image.options.show_scale = 0;
        return 0;
    case ARGP_KEY_ARG: argp_error(state, "'%s' is one too many; all that render takes are options", arg); return 0;
    case ARGP_KEY_END:
        if (!a->out) argp_error(state, "--out DIR is missing: where the micrographs go");
        else if (a->recipe_path && (a->picture_options || a->count || a->name))
            argp_error(state, "--recipe says all about its images; only --out and --centres go with it");
        return 0;
    default: return ARGP_ERR_UNKNOWN;
    }
}

const struct argp render_argp = { options, parse, "",
    "Micrographs of known truth, for a demo, for tests, and to find out which magnification is enough."
    "\vtruth.json says of each image what is true: density, spacing, sizes of the ideal basins, strip rows, relief, and "
    "every option, in the form a recipe takes. The surface is a model, not a simulation of an etch or of an instrument.",
    NULL, NULL, NULL };

/* The images that --count, --name and --format ask for. */
static status recipe_from_options(const arguments *a, recipe *out, error *e) {
    size_t count = a->count ? a->count : 1;
    recipe r = { .images = mem_array(count, sizeof *r.images) };
    status st = r.images ? ST_OK : NO_MEMORY(e, "the list of images");
    for (size_t k = 0; k < count && st == ST_OK; k++) {
        recipe_image *image = r.images + r.n++;
        textbuf name = { 0 };
        text_addf(&name, "%s_%03zu.%s", a->name ? a->name : "render", k + 1, a->tiff ? "tif" : "png");
        st = text_check(&name, "the list of images", e);
        image->file = name.s;
        image->options = a->image.options;
        image->options.seed += k;
        if (a->image.label) image->label = mem_text(a->image.label);
        if (st == ST_OK && a->image.label && !image->label) st = NO_MEMORY(e, "the list of images");
        if (st == ST_OK) st = recipe_check_file(image->file, e);
    }
    if (st == ST_OK) *out = r;
    else recipe_free(&r);
    return st;
}

static status write_image(const char *folder, const recipe_image *image, const rendering *r, error *e) {
    png_format f = { .nx = r->nx, .ny = r->ny + r->strip_rows, .channels = 1, .bit_depth = r->bit_depth,
                     .px_nm = image->options.show_scale ? image->options.px_nm : 0.0 };
    char *path = path_join(folder, image->file);
    if (!path) return NO_MEMORY(e, "a file name");
    status st = ST_OK;
    char *slash = strrchr(path, '/');
    if (slash && slash != path) {
        *slash = 0;
        st = folder_make(path, e);
        *slash = '/';
    }
    if (st == ST_OK)
        st = recipe_file_is_tiff(image->file) ? tiff_write(path, r->samples, &f, e) : png_write(path, r->samples, &f, e);
    free(path);
    return st;
}

static void add_number(textbuf *t, const char *name, double v) {
    text_addf(t, ",\n      \"%s\": ", name);
    json_number(t, v, 7);
}

static status add_truth(const recipe_image *image, const rendering *r, int centres, textbuf *t, error *e) {
    static const double p[3] = { 0.1, 0.5, 0.9 };
    double *ecd = mem_array(r->n, sizeof *ecd), *w = mem_array(r->n, sizeof *w), d[3] = { MISSING, MISSING, MISSING };
    double px = image->options.px_nm;
    size_t m = 0;
    if (!ecd || !w) {
        free(ecd);
        free(w);
        return NO_MEMORY(e, "the truth");
    }
    for (size_t k = 0; k < r->n; k++) {
        if (isnan(r->basin_ecd_px[k])) continue;
        ecd[m] = r->basin_ecd_px[k] * px;
        w[m++] = r->basin_weight[k];
    }
    status st = m ? quantiles(ecd, w, m, p, 3, d, e) : ST_OK;
    text_add(t, "\n    {\n      \"file\": ");
    json_string(t, image->file);
    add_number(t, "px_nm", px);
    text_addf(t, ",\n      \"width_px\": %zu,\n      \"height_px\": %zu,\n      \"strip_px\": %zu", r->nx,
              r->ny, r->strip_rows);
    text_addf(t, ",\n      \"relief\": \"%s\"", image->options.relief == RELIEF_PORE ? "pore" : "hillock");
    text_addf(t, ",\n      \"n_features\": %zu,\n      \"n_hidden\": %zu", r->n, r->n_hidden);
    add_number(t, "density_per_um2", r->density_per_px2 / (px * px) * 1e6);
    add_number(t, "spacing_nm", r->spacing_px * px);
    if (image->options.second_share > 0.0) {
        text_addf(t, ",\n      \"n_second\": %zu", r->n_second);
        add_number(t, "first_spacing_nm", r->first_px * px);
        add_number(t, "second_spacing_nm", r->second_px * px);
    }
    add_number(t, "size_d10_nm", d[0]);
    add_number(t, "size_d50_nm", d[1]);
    add_number(t, "size_d90_nm", d[2]);
    add_number(t, "size_mean_nm", m ? weighted_mean(ecd, w, m) : MISSING);
    if (centres) {
        text_add(t, ",\n      \"centres_px\": [");
        for (size_t k = 0; k < r->n; k++) {
            text_add(t, k ? ", [" : "[");
            json_number(t, r->x[k], 7);
            text_add(t, ", ");
            json_number(t, r->y[k], 7);
            text_add(t, "]");
        }
        text_add(t, "]");
    }
    text_add(t, ",\n      \"options\": ");
    recipe_options_to_json(image, 6, t);
    text_add(t, "\n    }");
    free(ecd);
    free(w);
    return st;
}

static status render_all(const arguments *a, const recipe *list, error *e) {
    textbuf truth = { 0 };
    text_add(&truth, "{\n  \"about\": \"What is true of rendered micrographs. Lengths in nm or in px as named; "
                     "spacing_nm is the hexagonal spacing of the true density; size_ are equivalent circular diameters "
                     "of the ideal basins, border-corrected; height_px: rows without the strip; centres: pixel centres at whole numbers, y down.\",\n"
                     "  \"images\": [");
    status st = folder_make(a->out, e);
    for (size_t k = 0; k < list->n && st == ST_OK; k++) {
        const recipe_image *image = list->images + k;
        render_options o = image->options;
        o.label = image->label;
        rendering r = { 0 };
        st = render_make(&o, &r, e);
        if (st == ST_OK) st = write_image(a->out, image, &r, e);
        if (k) text_add(&truth, ",");
        if (st == ST_OK) st = add_truth(image, &r, a->centres, &truth, e);
        rendering_free(&r);
        if (st != ST_OK) fail_within(e, st, image->file);
    }
    text_add(&truth, "\n  ]\n}\n");
    if (st == ST_OK) st = text_check(&truth, "truth.json", e);
    if (st == ST_OK) {
        char *path = path_join(a->out, "truth.json");
        st = path ? file_write(path, truth.s, truth.n, e) : NO_MEMORY(e, "a file name");
        free(path);
    }
    text_free(&truth);
    return st;
}

int cmd_render(int argc, char **argv) {
    arguments a = { .image = { .options = render_defaults() } };
    recipe list = { 0 };
    error e = { 0 };
    if (argp_parse(&render_argp, argc, argv, 0, NULL, &a)) return EXIT_USAGE;
    status st = a.recipe_path ? recipe_read(a.recipe_path, &list, &e) : recipe_from_options(&a, &list, &e);
    if (st == ST_OK) st = render_all(&a, &list, &e);
    if (st == ST_OK) printf("%zu micrograph%s and truth.json in %s\n", list.n, list.n == 1 ? "" : "s", a.out);
    else fprintf(stderr, "sward render: %s\n", e.text);
    recipe_free(&list);
    free(a.image.label);
    return st == ST_OK ? EXIT_DONE : st == ST_BAD_INPUT ? EXIT_USAGE : EXIT_FAILED;
}
