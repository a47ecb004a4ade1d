/* Link files: one table of numbers drives writing, reading, range checks and fingerprints. What a person wants to see
 * beside them (samples, covariance, how well it fits) is written too and not read back.
 * The age of a link is counted to the etch of a sample, never to the clock: the same run gives the same bytes. */
#include "app/linkfile.h"

#include <cjson/cJSON.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "app/samplesheet.h"
#include "base/mem.h"
#include "base/number.h"
#include "io/file.h"
#include "io/json.h"

enum { LINK_VERSION = 1, EXACT = 17 };
#define LINK_FORMAT "sward link"

/* clang-format off */
static const struct { const char *name; size_t offset; double lo, hi; int may_miss; } numbers[] = {
#define NUMBER(member, lo, hi, may_miss) { #member, offsetof(calibration, member), lo, hi, may_miss }
    NUMBER(spacing_lo_nm, 1, 1e5, 0),   NUMBER(spacing_hi_nm, 1, 1e5, 0), NUMBER(spacing_u_nm, 0, 1e5, 0),
    NUMBER(height_lo_nm, 0, 1e5, 0),    NUMBER(height_hi_nm, 0, 1e5, 0),
    NUMBER(aspect, 0, 100, 0),          NUMBER(aspect_u, 0, 100, 0),      NUMBER(aspect_scatter, 0, 100, 1),
    NUMBER(exponent, 0.05, 20, 0),      NUMBER(exponent_u, 0, 10, 0),     NUMBER(height_spread, 0, 1, 0),
    NUMBER(height_by_size, -5, 5, 0),   NUMBER(coverage, 0, 1, 0),        NUMBER(offset, -1, 1, 0),
    NUMBER(residual_rms, 0, 1, 0),      NUMBER(left_out, 0, 1, 1),        NUMBER(left_out_spectral, 0, 1, 1),
    NUMBER(band_lo_nm, 100, 20000, 0),  NUMBER(band_hi_nm, 100, 20000, 0),
#undef NUMBER
};
/* clang-format on */
enum { N_NUMBERS = sizeof numbers / sizeof numbers[0] };

static double *member_of(calibration *c, size_t k) {
    return (double *)(void *)((char *)c + numbers[k].offset);
}
static double value_of(const calibration *c, size_t k) {
    return *(const double *)(const void *)((const char *)c + numbers[k].offset);
}

/* ---- writing ---- */

static void pair(textbuf *t, const char *name, double v, int digits) {
    text_addf(t, "\"%s\": ", name);
    json_number(t, isfinite(v) ? v : MISSING, digits);
}

static void samples_json(const fit_sample *samples, const fit_result *r, textbuf *t) {
    text_add(t, "  \"samples\": [");
    for (size_t s = 0; s < r->n_samples; s++) {
        const fit_curve *c = &r->curves[s];
        text_add(t, s ? ",\n    {\"sample\": " : "\n    {\"sample\": ");
        json_string(t, samples[s].name);
        const struct {
            const char *name;
            double v;
        } parts[] = {
            { "spacing_nm", samples[s].spacing_nm.value },
            { "spacing_nm_u", samples[s].spacing_nm.u },
            { "height_nm", c->height_nm.value },
            { "height_nm_u", c->height_nm.u },
            { "aspect", c->aspect },
            { "residual_rms", c->residual_rms },
            { "weighted_reflectance", c->weighted },
            { "left_out_error", c->left_out },
        };
        for (size_t i = 0; i < sizeof parts / sizeof parts[0]; i++) {
            text_add(t, ", ");
            pair(t, parts[i].name, parts[i].v, 6);
        }
        text_add(t, "}");
    }
    text_add(t, "\n  ],\n");
}

static void covariance_json(const fit_sample *samples, const fit_result *r, textbuf *t) {
    text_add(t, "  \"covariance\": {\n    \"parameters\": [");
    for (size_t k = 0; k < r->n_numbers; k++) {
        textbuf name = { 0 };
        text_add(&name, fit_kind_name(r->numbers[k].kind));
        if (r->numbers[k].kind == FIT_HEIGHT) text_addf(&name, " of %s", samples[r->numbers[k].sample].name);
        text_add(t, k ? ", " : "");
        json_string(t, name.s);
        text_free(&name);
    }
    text_add(t, "],\n    \"matrix\": [");
    for (size_t a = 0; a < r->n_numbers; a++) {
        text_add(t, a ? ",\n      [" : "\n      [");
        for (size_t b = 0; b < r->n_numbers; b++) {
            text_add(t, b ? ", " : "");
            json_number(t, r->covariance[a * r->n_numbers + b], 8);
        }
        text_add(t, "]");
    }
    text_add(t, "\n    ]\n  },\n");
}

status linkfile_write(const char *path, const fit_sample *samples, const fit_result *r, const protocol *p,
                      const char *made_at, error *e) {
    const calibration *c = &r->link_made;
    textbuf t = { 0 };
    if (!c->n_samples)
        return fail(e, ST_NO_RESULT,
                    "nothing is saved: a link needs the spacing of every sample (--results, or --spacing) "
                    "and a height and shape that the spectra determine");
    text_add(&t, "{\n  \"format\": \"" LINK_FORMAT "\",\n");
    text_addf(&t, "  \"version\": %d,\n  \"made_with\": \"sward " SWARD_VERSION "\",\n  \"made_at\": ",
              LINK_VERSION);
    json_string(&t, made_at);
    text_addf(
        &t, ",\n  \"n_samples\": %zu,\n  \"relief\": \"%s\",\n  \"level\": \"%s\",\n  \"mixing\": \"%s\",\n",
        c->n_samples, c->pores ? "pore" : "hillock", c->level_at_tips ? "tips" : "floor",
        mixing_name(c->mixing));
    text_add(&t, "  \"substrate\": ");
    json_string(&t, p->substrate);
    text_add(&t, ",\n  \"ambient\": ");
    json_string(&t, p->ambient);
    text_add(&t, ",\n  \"coatings\": [");
    for (size_t i = 0; i < p->n_coatings; i++) {
        text_add(&t, i ? ", {\"material\": " : "{\"material\": ");
        json_string(&t, p->coatings[i].material);
        text_add(&t, ", ");
        pair(&t, "thickness_nm", p->coatings[i].thickness_nm, 6);
        text_add(&t, "}");
    }
    text_add(&t, "],\n");
    for (size_t k = 0; k < N_NUMBERS; k++) {
        text_add(&t, "  ");
        pair(&t, numbers[k].name, value_of(c, k), EXACT);
        text_add(&t, ",\n");
    }
    samples_json(samples, r, &t);
    covariance_json(samples, r, &t);
    text_add(&t, "  ");
    pair(&t, "noise", r->noise, 4);
    text_add(&t, ",\n  ");
    pair(&t, "reduced_chi_squared", r->reduced, 4);
    text_add(&t, "\n}\n");
    status st = text_check(&t, "a link file", e);
    if (st == ST_OK) st = file_write(path, t.s, t.n, e);
    text_free(&t);
    return st;
}

/* ---- reading ---- */

static status wrong(const char *path, const json *j, const cJSON *at, const char *name, const char *expected,
                    error *e) {
    size_t line = at ? json_line(j, at) : 0;
    if (!line) return fail(e, ST_BAD_INPUT, "%s: %s is missing, expected %s", path, name, expected);
    return fail(e, ST_BAD_INPUT, "%s line %zu, %s: expected %s", path, line, name, expected);
}

static status read_text(const char *path, const json *j, const char *name, char **out, error *e) {
    const cJSON *at = cJSON_GetObjectItemCaseSensitive(j->root, name);
    if (!cJSON_IsString(at) || !at->valuestring[0]) return wrong(path, j, at, name, "a text", e);
    *out = mem_text(at->valuestring);
    return *out ? ST_OK : NO_MEMORY(e, "a link file");
}

/* A text that is the first or the second word: 0 or 1. */
static status read_choice(const char *path, const json *j, const char *name, const char *no, const char *yes,
                          int *out, error *e) {
    const cJSON *at = cJSON_GetObjectItemCaseSensitive(j->root, name);
    const char *s = cJSON_IsString(at) ? at->valuestring : "";
    *out = strcmp(s, yes) == 0;
    return *out || strcmp(s, no) == 0 ? ST_OK : wrong(path, j, at, name, no, e);
}

static status read_head(const char *path, const json *j, linkfile *l, error *e) {
    const cJSON *format = cJSON_GetObjectItemCaseSensitive(j->root, "format");
    const cJSON *version = cJSON_GetObjectItemCaseSensitive(j->root, "version");
    const cJSON *samples = cJSON_GetObjectItemCaseSensitive(j->root, "n_samples");
    const cJSON *made = cJSON_GetObjectItemCaseSensitive(j->root, "made_at");
    const cJSON *mix = cJSON_GetObjectItemCaseSensitive(j->root, "mixing");
    if (!cJSON_IsString(format) || strcmp(format->valuestring, LINK_FORMAT) != 0)
        return fail(e, ST_BAD_INPUT, "%s is no link file; 'sward fit ... --save FILE' writes one", path);
    if (!cJSON_IsNumber(version) ||
        !(version->valuedouble >= 1.0 && version->valuedouble < LINK_VERSION + 1.0))
        return wrong(path, j, version, "version", "1; the file is from another version of sward, fit again",
                     e);
    if (!cJSON_IsNumber(samples) || !(samples->valuedouble >= 1.0 && samples->valuedouble <= 1e6))
        return wrong(path, j, samples, "n_samples", "a number of at least 1", e);
    l->link.n_samples = (size_t)samples->valuedouble;
    if (!cJSON_IsString(made) || !iso_time(made->valuestring, l->made_at))
        return wrong(path, j, made, "made_at", "a date such as 2026-03-14T09:30:00Z", e);
    if (!cJSON_IsString(mix) || !mixing_from_name(mix->valuestring, &l->link.mixing))
        return wrong(path, j, mix, "mixing", "a mixing rule", e);
    status st = read_choice(path, j, "relief", "hillock", "pore", &l->link.pores, e);
    if (st == ST_OK) st = read_choice(path, j, "level", "floor", "tips", &l->link.level_at_tips, e);
    if (st == ST_OK) st = read_text(path, j, "substrate", &l->substrate, e);
    return st == ST_OK ? read_text(path, j, "ambient", &l->ambient, e) : st;
}

static status read_numbers(const char *path, const json *j, calibration *c, error *e) {
    for (size_t k = 0; k < N_NUMBERS; k++) {
        const cJSON *at = cJSON_GetObjectItemCaseSensitive(j->root, numbers[k].name);
        double *v = member_of(c, k);
        *v = MISSING;
        if (at && cJSON_IsNull(at) && numbers[k].may_miss) continue;
        if (cJSON_IsNumber(at)) *v = at->valuedouble;
        if (!(*v >= numbers[k].lo && *v <= numbers[k].hi)) {
            textbuf t = { 0 };
            text_addf(&t, "a number from %g to %g", numbers[k].lo, numbers[k].hi);
            status st = wrong(path, j, at, numbers[k].name, t.s ? t.s : "a number", e);
            text_free(&t);
            return st;
        }
    }
    if (!(c->spacing_hi_nm >= c->spacing_lo_nm && c->aspect > 0.0))
        return fail(e, ST_BAD_INPUT, "%s: its spacings or its aspect are not in order; fit again", path);
    if (c->n_samples > 1 && !isfinite(c->aspect_scatter))
        return fail(e, ST_BAD_INPUT, "%s: aspect_scatter is missing for %zu samples; fit again", path,
                    c->n_samples);
    return ST_OK;
}

status linkfile_read(const char *path, linkfile *out, error *e) {
    linkfile l = { 0 };
    json j = { 0 };
    char *bytes = NULL;
    size_t n = 0;
    *out = (linkfile){ 0 };
    status st = input_read(path, &bytes, &n, e);
    if (st != ST_OK) return st;
    st = json_parse(bytes, n, path, &j, e);
    if (st == ST_OK) st = read_head(path, &j, &l, e);
    if (st == ST_OK) st = read_numbers(path, &j, &l.link, e);
    if (st == ST_OK) {
        *out = l;
        l = (linkfile){ 0 };
    }
    linkfile_free(&l);
    json_free(&j);
    free(bytes);
    return st;
}

void linkfile_free(linkfile *l) {
    free(l->substrate);
    free(l->ambient);
    *l = (linkfile){ 0 };
}

/* ---- use ---- */

status linkfile_fits(const linkfile *l, const protocol *p, error *e) {
    if (!l->link.n_samples) return ST_OK;
    if (strcmp(l->substrate, p->substrate) != 0)
        return fail(e, ST_BAD_INPUT,
                    "the calibrated link was fitted on '%.60s' and the protocol's substrate is '%.60s'; "
                    "fit again for this substrate",
                    l->substrate, p->substrate);
    if (l->link.mixing != p->mixing)
        return fail(e, ST_BAD_INPUT,
                    "the calibrated link was fitted with the mixing rule %s and the protocol says %s; fit "
                    "again with that rule",
                    mixing_name(l->link.mixing), mixing_name(p->mixing));
    return ST_OK;
}

void linkfile_text(const linkfile *l, textbuf *out) {
    char v[NUMBER_TEXT];
    if (!l->link.n_samples) return;
    text_addf(out, "link %zu %d %d %d %s\n", l->link.n_samples, l->link.pores, l->link.level_at_tips,
              (int)l->link.mixing, l->made_at);
    for (size_t k = 0; k < N_NUMBERS; k++)
        text_addf(out, "%s=%s\n", numbers[k].name, number_text(value_of(&l->link, k), EXACT, v));
}

/* Days of an ISO 8601 text since a fixed day (civil calendar; Hinnant H. 2014), the time of day as a fraction; NAN. */
static double days_of(const char *iso) {
    double year, month, day, hour = 0.0, minute = 0.0;
    char part[8] = "";
    if (strlen(iso) < 10) return MISSING;
    memcpy(part, iso, 4);
    int ok = number_parse(part, &year);
    memset(part, 0, sizeof part);
    memcpy(part, iso + 5, 2);
    ok = ok && number_parse(part, &month);
    memcpy(part, iso + 8, 2);
    ok = ok && number_parse(part, &day);
    if (ok && strlen(iso) >= 16) {
        memcpy(part, iso + 11, 2);
        ok = number_parse(part, &hour);
        memcpy(part, iso + 14, 2);
        ok = ok && number_parse(part, &minute);
    }
    if (!ok) return MISSING;
    if (month <= 2.0) year -= 1.0;
    double era = floor(year / 400.0), of_era = year - era * 400.0;
    double of_year = floor((153.0 * (month + (month > 2.0 ? -3.0 : 9.0)) + 2.0) / 5.0) + day - 1.0;
    double of_days = of_era * 365.0 + floor(of_era / 4.0) - floor(of_era / 100.0) + of_year;
    return era * 146097.0 + of_days + (hour + minute / 60.0) / 24.0;
}

double linkfile_age_days(const linkfile *l, const char *etched_at) {
    return days_of(etched_at ? etched_at : "") - days_of(l->made_at); /* NAN carries through */
}
