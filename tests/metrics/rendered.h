/* A render of known truth, measured as the program measures a file of 8 bits. */
#ifndef SWARD_TESTS_RENDERED_H
#define SWARD_TESTS_RENDERED_H
#include <stdlib.h>

#include "app/render.h"
#include "check.h"
#include "metrics/measure.h"
#include "planes.h"

/* The rendering has no strip and clips nothing worth a count. The caller frees the texture. */
static inline texture rendered_texture(const render_options *o) {
    rendering r = { 0 };
    error e = { 0 };
    texture t = { 0 };
    measure_options m = measure_defaults();
    CHECK(render_make(o, &r, &e) == ST_OK);
    size_t n = o->nx * o->ny;
    float *f = plane_new(o->nx, o->ny);
    const uint8_t *s = r.samples;
    for (size_t i = 0; s && i < n; i++) f[i] = (float)s[i] / 255.0f;
    plane p = { f, o->nx, o->ny, 8, 0.0, 0.0, NULL };
    CHECK(measure_plane(&p, &m, &t, &e) == ST_OK);
    rendering_free(&r);
    free(f);
    return t;
}
#endif
