/* Joins the steps of a rendering: centres, surface, truth, look, strip, stored levels. Each step is a file of its own
 * (render_pattern, render_surface, render_look, render_strip). */
#include "app/render.h"

#include <math.h>
#include <stdlib.h>

#include "app/render_priv.h"
#include "base/limits.h"
#include "base/mem.h"
#include "base/quantity.h"

/* Each half-pixel step of the surface takes 8 bytes, so that pictures are kept well below what can be read. */
#define MOST_PIXELS (LIMIT_PIXELS / 8)

render_options render_defaults(void) {
    return (render_options){ .spacing_nm = 300.0, .px_nm = 8.0, .nx = 1024, .ny = 768, .pattern = PATTERN_LLOYD,
                             .disorder = MISSING, .exponent = 1.0, .fill = 1.15, .height_spread = 0.10,
                             .height_by_size = 0.5, .second_spacing = 2.0, .relief = RELIEF_HILLOCK, .blur_px = 0.7, .contrast = 0.7,
                             .stretch = 1.0, .bit_depth = 8, .strip = 1, .show_scale = 1, .seed = 1 };
}

typedef struct {
    const char *name;
    double value, lo, hi;
} range;

static status options_check(const render_options *o, error *e) {
    double most_disorder = o->pattern == PATTERN_LLOYD ? 100.0 : o->pattern == PATTERN_HEX ? 1.0 :
                           o->pattern == PATTERN_RSA ? 0.74 : o->pattern == PATTERN_MATERN ? 0.51 : 100.0;
    double least_disorder = o->pattern == PATTERN_RSA || o->pattern == PATTERN_MATERN ? 0.05 : 0.0;
    const range ranges[] = {
        { "spacing_nm", o->spacing_nm, 1e-3, 1e9 },
        { "px_nm", o->px_nm, 1e-3, 1e9 },
        { "disorder", isnan(o->disorder) ? least_disorder : o->disorder, least_disorder, most_disorder },
        { "shape exponent", o->exponent, 0.2, 8.0 },
        { "fill", o->fill, 0.1, 4.0 },
        { "height_spread", o->height_spread, 0.0, 1.0 },
        { "height_by_size", o->height_by_size, -3.0, 3.0 },
        { "second_share", o->second_share, 0.0, 0.9 },
        { "second_spacing", o->second_spacing, 0.25, 4.0 },
        { "edge", o->edge, 0.0, 1.0 },
        { "rough", o->rough, 0.0, 10.0 },
        { "noise (electrons per pixel)", o->electrons, 0.0, 1e9 },
        { "blur", o->blur_px, 0.0, 200.0 },
        { "jitter", o->jitter_px, 0.0, 200.0 },
        { "smear", o->smear_px, 0.0, 200.0 },
        { "smear angle", o->smear_angle_deg, -360.0, 360.0 },
        { "contrast", o->contrast, 0.001, 10.0 },
        { "gradient", o->gradient, -2.0, 2.0 },
        { "streaks", o->streaks, 0.0, 10.0 },
        { "stretch", o->stretch, 1.0, 4.0 },
        { "stretch angle", o->stretch_angle_deg, -360.0, 360.0 },
    };
    for (size_t k = 0; k < sizeof ranges / sizeof ranges[0]; k++) {
        const range *r = ranges + k;
        if (!(r->value >= r->lo && r->value <= r->hi))
            return fail(e, ST_BAD_INPUT, "%s is %.6g, expected %.6g to %.6g", r->name, r->value, r->lo, r->hi);
    }
    if (o->nx < LIMIT_MIN_SIDE || o->ny < LIMIT_MIN_SIDE || o->nx > LIMIT_SIDE || o->ny > LIMIT_SIDE ||
        o->nx * o->ny > MOST_PIXELS)
        return fail(e, ST_BAD_INPUT, "a size of %zu x %zu px cannot be rendered; sides from %zu px, at most %zu "
                    "million px in all", o->nx, o->ny, LIMIT_MIN_SIDE, MOST_PIXELS / 1000000);
    if (o->bit_depth != 8 && o->bit_depth != 16)
        return fail(e, ST_BAD_INPUT, "bits is %d, expected 8 or 16", o->bit_depth);
    return ST_OK;
}

/* Grey levels to stored levels; beyond 0..1 they clip, as an analogue-to-digital converter does. */
static void store(const float *grey, size_t n, int bit_depth, void *samples) {
    uint8_t *p8 = samples;
    uint16_t *p16 = samples;
    for (size_t k = 0; k < n; k++) {
        double v = fmin(1.0, fmax(0.0, (double)grey[k]));
        if (bit_depth == 16) p16[k] = (uint16_t)(v * 65535.0 + 0.5);
        else p8[k] = (uint8_t)(v * 255.0 + 0.5);
    }
}

status render_make(const render_options *o, rendering *out, error *e) {
    status st = options_check(o, e);
    if (st != ST_OK) return st;
    rendering r = { .nx = o->nx, .ny = o->ny, .strip_rows = strip_height(o), .bit_depth = o->bit_depth };
    centres c = { 0 };
    surface s = { 0 };
    size_t n = r.nx * r.ny, in_strip = r.strip_rows * r.nx;
    float *grey = mem_array(n + in_strip, sizeof *grey);
    r.samples = mem_array(n + in_strip, o->bit_depth == 16 ? sizeof(uint16_t) : sizeof(uint8_t));
    if (!grey || !r.samples) st = NO_MEMORY(e, "the picture");
    if (st == ST_OK) st = centres_make(o, &c, e);
    /* The probe reaches beyond the frame: so does the surface. */
    if (st == ST_OK) st = surface_make(o, &c, 2 + (size_t)ceil(4.0 * (o->blur_px + o->smear_px + o->jitter_px)), &s, e);
    if (st == ST_OK) st = surface_truth(o, &c, &s, &r, e);
    if (st == ST_OK) st = look_make(o, &s, c.spacing, grey, e);
    if (st == ST_OK) {
        if (in_strip) strip_draw(o, r.strip_rows, grey + n);
        store(grey, n + in_strip, o->bit_depth, r.samples);
        *out = r;
        r = (rendering){ 0 };
    }
    free(grey);
    surface_free(&s);
    centres_free(&c);
    rendering_free(&r);
    return st;
}

void rendering_free(rendering *r) {
    free(r->samples);
    free(r->x);
    free(r->y);
    free(r->basin_ecd_px);
    free(r->basin_weight);
    *r = (rendering){ 0 };
}
