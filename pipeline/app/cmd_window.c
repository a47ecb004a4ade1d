/* `sward window`: which height keeps the target at which spacing, and where today's samples lie in that map. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "app/materials.h"
#include "app/optics_options.h"
#include "app/window.h"
#include "base/number.h"
#include "base/quantity.h"

enum {
    OPT_SPACING = 1,
    OPT_HEIGHT,
    OPT_EXPONENT,
    OPT_THICKNESS,
    OPT_TARGET,
    OPT_RESULTS,
    OPT_PROTOCOL,
    OPT_JSON,
    OPT_CSV
};

/* clang-format off */
static const struct argp_option window_options[] = {
    { "spacing",       OPT_SPACING,   "RANGE",    0, "spacings of the map, nm, FROM:TO:STEP (default: 150:500:25), or one with --exponent or --thickness (default: the mean of the samples, else 350)", 0 },
    { "height",        OPT_HEIGHT,    "RANGE",    0, "heights of the map, nm (default: 100:600:25)", 0 },
    { "exponent",      OPT_EXPONENT,  "RANGE",    0, "map over the shape's exponent instead of the spacing, such as 1:2:0.25", 0 },
    { "thickness",     OPT_THICKNESS, "RANGE",    0, "map over the thickness of the outermost coating, nm, such as 0:100:10", 0 },
    { "target",        OPT_TARGET,    "R",        0, "weighted reflectance to keep (default: the protocol's target, else 0.02)", 0 },
    { "results",       OPT_RESULTS,   "DIR",      0, "output folder of a run: its samples are drawn in", 0 },
    { "protocol",      OPT_PROTOCOL,  "FILE",     0, "link, optics and target of a protocol; options outrank it", 0 },
    SHAPE_OPTIONS,
    STACK_OPTIONS,
    WEIGHT_OPTIONS,
    { "json",          OPT_JSON,      NULL,       0, "one JSON object: cells, contour, samples, answer", 0 },
    { "csv",           OPT_CSV,       NULL,       0, "the cells as CSV", 0 },
    { 0 } };

/* clang-format on */

typedef enum { AS_TEXT, AS_JSON, AS_CSV } output;

typedef struct {
    given_options given; /* keys of a protocol */
    const char *spacing, *height, *exponent, *thickness, *target, *results, *protocol;
    output as;
} request;

static error_t window_option(int key, char *arg, struct argp_state *state) {
    request *q = state->input;
    const char **texts[] = { NULL,          &q->spacing, &q->height,  &q->exponent,
                             &q->thickness, &q->target,  &q->results, &q->protocol };
    if (key == ARGP_KEY_ARG) {
        argp_error(state, "'%s' is no option; ranges need their names, such as --spacing 150:500:25", arg);
        return 0;
    }
    if (key < OPT_SPACING || key > OPT_CSV) return given_keep(&q->given, key, arg, state);
    if (key <= OPT_PROTOCOL)
        *texts[key] = arg;
    else
        q->as = key == OPT_JSON ? AS_JSON : AS_CSV;
    return 0;
}

const struct argp window_argp = {
    window_options,
    window_option,
    "",
    "The process window: weighted reflectance over height and spacing (or shape, or coating thickness), the "
    "contour of a "
    "target, and today's samples in it.\v"
    "Example: sward window --results sward-out --target 0.02\n"
    "The plain value of a bare texture does not depend on the spacing; how sure it is does.",
    NULL,
    NULL,
    NULL
};

static status target_of(const request *q, const protocol *p, double *limit, error *e) {
    *limit = 0.02;
    for (size_t i = 0; i < p->n_targets; i++)
        if (!strcmp(p->targets[i].quantity, "weighted_reflectance") && isfinite(p->targets[i].max))
            *limit = p->targets[i].max;
    if (q->target && !(number_parse(q->target, limit) && *limit > 0.0 && *limit <= 1.0))
        return fail(e, ST_BAD_INPUT,
                    "--target: found %.40s, expected a reflectance above 0 and at most 1, such as 0.02",
                    q->target);
    return ST_OK;
}

static status axes(const request *q, window *w, error *e) {
    axis one;
    if (q->exponent && q->thickness)
        return fail(
            e, ST_BAD_INPUT,
            "--thickness: a map has two axes, height and one more; take --exponent or --thickness out");
    w->across = q->exponent ? ACROSS_EXPONENT : q->thickness ? ACROSS_THICKNESS : ACROSS_SPACING;
    status st = axis_parse("--height", q->height ? q->height : "100:600:25", 1.0, 1e5, &w->height, e);
    if (st != ST_OK) return st;
    if (w->across == ACROSS_SPACING)
        return axis_parse("--spacing", q->spacing ? q->spacing : "150:500:25", 1.0, 1e5, &w->x, e);
    st = axis_parse("--spacing", q->spacing ? q->spacing : "350", 1.0, 1e5, &one, e);
    if (st == ST_OK && one.n != 1)
        return fail(e, ST_BAD_INPUT, "--spacing: found %.60s, expected one spacing (nm) beside %s",
                    q->spacing, q->exponent ? "--exponent" : "--thickness");
    if (st == ST_OK) w->spacing_nm = one.v[0];
    if (st == ST_OK && q->exponent) st = axis_parse("--exponent", q->exponent, 0.05, 20.0, &w->x, e);
    if (st == ST_OK && q->thickness) st = axis_parse("--thickness", q->thickness, 0.0, 1e4, &w->x, e);
    return st;
}

/* A map beside the spacing is drawn at the samples' own. */
static void spacing_of_samples(const request *q, window *w) {
    double sum = 0.0, n = 0.0;
    for (size_t i = 0; i < w->n_samples; i++)
        if (w->samples[i].spacing_nm > 0.0) {
            sum += w->samples[i].spacing_nm;
            n += 1.0;
        }
    if (w->across != ACROSS_SPACING && !q->spacing && n > 0.0) w->spacing_nm = sum / n;
}

static status make(const request *q, textbuf *out, error *e) {
    protocol p = { 0 };
    setup s = { 0 };
    window w = { 0 };
    status st = q->protocol ? protocol_read(q->protocol, &p, e) : protocol_defaults(&p, e);
    if (st == ST_OK) st = given_apply(&q->given, !q->protocol, &p, e);
    if (st == ST_OK && q->exponent) {
        p.link.exponent_u = MISSING; /* the axis says the shape */
        p.link.shape_open = 0;
    }
    if (st == ST_OK) st = target_of(q, &p, &w.target, e);
    if (st == ST_OK) st = axes(q, &w, e);
    if (st == ST_OK && q->results) st = window_samples(q->results, &w, e);
    if (st == ST_OK) spacing_of_samples(q, &w);
    if (st == ST_OK) st = setup_make(&p, &s, e);
    if (st == ST_OK && s.measured.n)
        st = fail(e, ST_BAD_INPUT, "a measured profile has its own height; a map over heights needs a shape");
    if (st == ST_OK) {
        surface_input base = { .pores = p.measure.relief == RELIEF_PORE, .link = p.link };
        st = window_fill(&w, &base, &s.optics, e);
    }
    if (st == ST_OK && q->as == AS_JSON)
        window_json(&w, out);
    else if (st == ST_OK && q->as == AS_CSV)
        window_csv(&w, out);
    else if (st == ST_OK)
        window_text(&w, out);
    window_free(&w);
    setup_free(&s);
    protocol_free(&p);
    return st;
}

int cmd_window(int argc, char **argv) {
    request q = { .as = AS_TEXT };
    textbuf out = { 0 };
    error e = { ST_OK, "" };
    argp_parse(&window_argp, argc, argv, 0, NULL, &q);
    status st = make(&q, &out, &e);
    if (st == ST_OK) return command_print("window", &out);
    text_free(&out);
    return command_failed("window", &e);
}
