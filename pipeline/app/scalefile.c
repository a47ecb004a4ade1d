#include "app/scalefile.h"

#include <cjson/cJSON.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "base/limits.h"
#include "base/quantity.h"
#include "io/json.h"

const char *grating_word(grating_kind kind) {
    static const char *const words[] = { "auto", "lines", "square", "hexagonal" };
    return words[kind];
}

static void member(textbuf *t, const char *name, double v, int digits) {
    text_addf(t, ",\n  \"%s\": ", name);
    json_number(t, v, digits);
}

static void word(textbuf *t, const char *name, const char *s) {
    text_addf(t, ",\n  \"%s\": ", name);
    json_string(t, s);
}

void scalefile_text(const scale_record *r, textbuf *out) {
    const scale_standard *s = &r->standard;
    text_add(out, "{\n  \"scale\": ");
    json_string(out, s->name);
    word(out, "date", s->date);
    member(out, "px_x_nm", s->px_x_nm, 8);
    member(out, "px_y_nm", s->px_y_nm, 8);
    member(out, "px_u_rel", s->u_rel, 3);
    member(out, "nominal_px_nm", s->nominal_px_nm, 8);
    member(out, "magnification", s->magnification > 0.0 ? s->magnification : MISSING, 8);
    member(out, "width_px", (double)s->width_px, 8);
    member(out, "pitch_nm", r->pitch_nm, 8);
    member(out, "pitch_u_nm", r->pitch_u_nm, 4);
    member(out, "skew_deg", r->skew_deg, 4);
    word(out, "lattice", grating_word(r->kind));
    word(out, "file", r->file);
    word(out, "sha256", r->hash);
    text_add(out, "\n}\n");
}

/* A number of the file, or NAN when it may be missing. */
static status number_of(const json *j, const char *key, int needed, double lo, double hi, double *out,
                        const char *path, error *e) {
    const cJSON *node = cJSON_GetObjectItemCaseSensitive(j->root, key);
    *out = MISSING;
    if (!node || cJSON_IsNull(node))
        return needed ? fail(e, ST_BAD_INPUT, "%s: '%s' is missing; write the file with 'sward scale --save'",
                             path, key)
                      : ST_OK;
    if (!cJSON_IsNumber(node) || !(node->valuedouble > lo) || !(node->valuedouble < hi))
        return fail(e, ST_BAD_INPUT, "%s line %zu: '%s' must be a number above %g and below %g", path,
                    json_line(j, node), key, lo, hi);
    *out = node->valuedouble;
    return ST_OK;
}

static status text_of(const json *j, const char *key, char *to, size_t size, const char *path, error *e) {
    const cJSON *node = cJSON_GetObjectItemCaseSensitive(j->root, key);
    if (!cJSON_IsString(node) || !node->valuestring[0] || strlen(node->valuestring) >= size)
        return fail(e, ST_BAD_INPUT, "%s: '%s' must be a text of at most %zu bytes", path, key, size - 1);
    snprintf(to, size, "%s", node->valuestring);
    return ST_OK;
}

status scalefile_read(const char *path, scale_standard *out, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    json j = { 0 };
    scale_standard s = { 0 };
    double width = 0.0;
    status st = input_read(path, &bytes, &n, e);
    if (st == ST_OK) st = json_parse(bytes, n, path, &j, e);
    if (st == ST_OK) st = text_of(&j, "scale", s.name, sizeof s.name, path, e);
    if (st == ST_OK) st = text_of(&j, "date", s.date, sizeof s.date, path, e);
    if (st == ST_OK) st = number_of(&j, "px_x_nm", 1, 0.0, 1e6, &s.px_x_nm, path, e);
    if (st == ST_OK) st = number_of(&j, "px_y_nm", 1, 0.0, 1e6, &s.px_y_nm, path, e);
    if (st == ST_OK) st = number_of(&j, "px_u_rel", 1, 0.0, 0.5, &s.u_rel, path, e);
    if (st == ST_OK) st = number_of(&j, "nominal_px_nm", 0, 0.0, 1e6, &s.nominal_px_nm, path, e);
    if (st == ST_OK) st = number_of(&j, "magnification", 0, 0.0, 1e8, &s.magnification, path, e);
    if (st == ST_OK) st = number_of(&j, "width_px", 1, 0.0, (double)LIMIT_SIDE + 1.0, &width, path, e);
    if (st == ST_OK && !(s.nominal_px_nm > 0.0) && !(s.magnification > 0.0))
        st = fail(e, ST_BAD_INPUT,
                  "%s: neither 'nominal_px_nm' nor 'magnification' says which micrographs it is for", path);
    if (st == ST_OK) {
        s.width_px = (size_t)width;
        if (!(s.magnification > 0.0)) s.magnification = 0.0;
        *out = s;
    }
    json_free(&j);
    free(bytes);
    return st;
}
