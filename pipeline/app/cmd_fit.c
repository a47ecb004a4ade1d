/* `sward fit`: the link calibrated on measured spectra. A spectrum belongs to the sample its file is named after; spacing
 * (and a measured height) come from the results of a run, or from the command line. A number given on the command line
 * is not fitted. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include "app/command.h"
#include "app/fit_print.h"
#include "app/linkfile.h"
#include "app/materials.h"
#include "app/optics_options.h"
#include "app/samplesheet.h"
#include "app/spectrum_file.h"
#include "base/mem.h"
#include "base/number.h"
#include "io/file.h"
#include "io/json.h"
#include "io/table.h"

enum {
    OPT_SAMPLE = 0x300,
    OPT_RESULTS,
    OPT_SPACING,
    OPT_SPACING_U,
    OPT_FREE,
    OPT_HEIGHT,
    OPT_FIT_BAND,
    OPT_NOISE,
    OPT_PROTOCOL,
    OPT_MADE_AT,
    OPT_SAVE,
    OPT_JSON,
    OPT_CSV
};
typedef enum { AS_TEXT, AS_JSON, AS_CSV } output;

/* clang-format off */
static const struct argp_option fit_options_table[] = {
    { "results",       OPT_RESULTS,   "DIR",     0, "output of `sward run` that holds these samples: their spacing, and their height where the sheet had one", 0 },
    { "sample",        OPT_SAMPLE,    "NAME=FILE", 0, "a spectrum whose file is not named after its sample; may be repeated", 0 },
    { "spacing",       OPT_SPACING,   "NM",      0, "spacing of every sample, instead of --results", 0 },
    { "spacing-u",     OPT_SPACING_U, "NM",      0, "its standard uncertainty (default: 0)", 0 },
    { "free",          OPT_FREE,      "LIST",    0, "what the light shall tell, out of height,exponent,spread,floor,offset (default: height,exponent,offset)", 0 },
    { "height",        OPT_HEIGHT,    "NM",      0, "height of every sample: then it is not fitted", 0 },
    SHAPE_OPTIONS,
    { "band",          OPT_FIT_BAND,    "LO:HI",   0, "wavelengths that are used, nm (default: 300:1000; beyond, light from the rear comes in)", 0 },
    { "noise",         OPT_NOISE,     "R",       0, "standard noise of one value as a share (default: from neighbouring values)", 0 },
    STACK_OPTIONS,
    { "protocol",      OPT_PROTOCOL,  "FILE",    0, "optics, and the values of what is not fitted", 0 },
    { "made-at",       OPT_MADE_AT,   "DATE",    0, "date that the link file carries (default: now)", 0 },
    { "save",          OPT_SAVE,      "FILE",    0, "write the link file; name it in a protocol as link.calibration", 0 },
    { "json",          OPT_JSON,      NULL,      0, "everything as JSON, with covariance and residuals", 0 },
    { "csv",           OPT_CSV,       NULL,      0, "measured and fitted spectra as CSV", 0 },
    { 0 } };

/* What is given is not free. */
static const struct { int option; fit_kind kind; } fixes[] = {
    { OPT_SHAPE, FIT_EXPONENT }, { OPT_SPREAD, FIT_SPREAD }, { OPT_COVERAGE, FIT_FLOOR } };
/* clang-format on */
enum { N_FIXES = sizeof fixes / sizeof fixes[0] };

typedef struct {
    const char *results, *protocol, *save, *made_at, *free, *band;
    const char *spacing, *spacing_u, *height, *noise;
    given_options given; /* keys of a protocol */
    output as;
    char **files; /* [n] as given: FILE or NAME=FILE */
    int *named;   /* [n] 1: NAME=FILE */
    size_t n;
} request;

static int add_file(request *q, char *arg, int named) {
    char **files = mem_grow(q->files, q->n + 1, sizeof *files);
    if (files) q->files = files;
    int *marks = files ? mem_grow(q->named, q->n + 1, sizeof *marks) : NULL;
    if (!marks) return 0;
    q->named = marks;
    q->files[q->n] = arg;
    q->named[q->n++] = named;
    return 1;
}

static error_t fit_option(int key, char *arg, struct argp_state *state) {
    request *q = state->input;
    switch (key) {
    case OPT_RESULTS:
        q->results = arg;
        break;
    case OPT_SPACING:
        q->spacing = arg;
        break;
    case OPT_SPACING_U:
        q->spacing_u = arg;
        break;
    case OPT_FREE:
        q->free = arg;
        break;
    case OPT_HEIGHT:
        q->height = arg;
        break;
    case OPT_FIT_BAND:
        q->band = arg;
        break;
    case OPT_NOISE:
        q->noise = arg;
        break;
    case OPT_PROTOCOL:
        q->protocol = arg;
        break;
    case OPT_MADE_AT:
        q->made_at = arg;
        break;
    case OPT_SAVE:
        q->save = arg;
        break;
    case OPT_JSON:
        q->as = AS_JSON;
        break;
    case OPT_CSV:
        q->as = AS_CSV;
        break;
    case OPT_SAMPLE:
        if (!strchr(arg, '=') || *arg == '=')
            argp_error(state, "--sample: found '%s', expected NAME=FILE", arg);
        else if (!add_file(q, arg, 1))
            return ENOMEM;
        break;
    case ARGP_KEY_ARG:
        return add_file(q, arg, 0) ? 0 : ENOMEM;
    case ARGP_KEY_END:
        if (!q->n) argp_error(state, "no spectrum; name at least one file");
        break;
    default:
        return given_keep(&q->given, key, arg, state);
    }
    return 0;
}

const struct argp fit_argp = {
    fit_options_table,
    fit_option,
    "SPECTRUM...",
    "Height and shape of textures from their measured reflectance; several samples calibrate the link from "
    "spacing to "
    "height. A spectrum is a text file with wavelength and reflectance (share or percent, nm or um, decimal "
    "point or comma, "
    "any order) named after its sample.\v"
    "Examples:\n  sward fit --results sward-out W1.csv W2.csv W3.csv --save line3-link.json\n"
    "  sward fit --spacing 350 spectrum.csv",
    NULL,
    NULL,
    NULL
};

/* ---- samples ---- */

typedef struct {
    char *name;
    spectrum spectrum;
    quantity sheet_height;
    fit_sample fit;
} input;

typedef struct {
    input *in; /* [n] */
    size_t n;
    csv samples, images; /* of the results; empty without */
} inputs;

static void inputs_free(inputs *v) {
    for (size_t i = 0; v->in && i < v->n; i++) {
        free(v->in[i].name);
        spectrum_free(&v->in[i].spectrum);
    }
    free(v->in);
    csv_free(&v->samples);
    csv_free(&v->images);
    *v = (inputs){ 0 };
}

/* "x/W1.csv" -> "W1". */
static char *stem_of(const char *path) {
    const char *slash = strrchr(path, '/'), *from = slash ? slash + 1 : path, *dot = strrchr(from, '.');
    return mem_text_n(from, dot && dot > from ? (size_t)(dot - from) : strlen(from));
}

static status read_results(const char *folder, inputs *v, error *e) {
    char *samples = path_join(folder, "samples.csv"), *images = path_join(folder, "images.csv");
    status st = samples && images ? ST_OK : NO_MEMORY(e, "a path");
    if (st == ST_OK && !file_exists(samples))
        st = fail(e, ST_BAD_INPUT,
                  "--results: '%s' holds no samples.csv; name the output folder of `sward run`", folder);
    if (st == ST_OK) st = csv_read(samples, &v->samples, e);
    if (st == ST_OK && csv_column(&v->samples, "spacing_nm") < 0)
        st = fail(e, ST_BAD_INPUT, "%s: there is no column spacing_nm", samples);
    if (st == ST_OK && file_exists(images)) st = csv_read(images, &v->images, e);
    free(samples);
    free(images);
    return st;
}

static double cell_value(const csv *c, size_t row, const char *column) {
    double v;
    return number_parse(csv_cell(c, row, csv_column(c, column)), &v) ? v : MISSING;
}

/* The row of a sample, or the sentence with the nearest one. */
static status find_sample(const csv *c, const char *name, size_t *row, error *e) {
    long column = csv_column(c, "sample");
    for (*row = 0; *row < c->n_rows; ++*row)
        if (strcmp(csv_cell(c, *row, column), name) == 0) return ST_OK;
    const char **names = mem_array(c->n_rows, sizeof *names);
    if (!names) return NO_MEMORY(e, "the samples");
    for (size_t i = 0; i < c->n_rows; i++) names[i] = csv_cell(c, i, column);
    const char *near = json_nearest(name, names, c->n_rows);
    status st = fail(e, ST_BAD_INPUT,
                     "the results hold no sample '%.80s'%s%.80s%s; a spectrum is named after its sample, or "
                     "given as --sample NAME=FILE",
                     name, near ? ", did you mean '" : "", near ? near : "", near ? "'?" : "");
    free(names);
    return st;
}

/* Spacing and height of the sheet; *pores counts what its micrographs show. */
static status sample_numbers(const inputs *v, input *in, int *pores, int *hillocks, error *e) {
    size_t row;
    status st = find_sample(&v->samples, in->name, &row, e);
    if (st != ST_OK) return st;
    in->fit.spacing_nm = (quantity){ cell_value(&v->samples, row, "spacing_nm"),
                                     cell_value(&v->samples, row, "spacing_nm_u"), 1 };
    if (!(in->fit.spacing_nm.value > 0.0))
        return fail(e, ST_BAD_INPUT,
                    "sample '%.80s' has no spacing in the results; see why its micrographs were excluded",
                    in->name);
    if (strcmp(csv_cell(&v->samples, row, csv_column(&v->samples, "height_source")), "sheet") == 0)
        in->sheet_height = (quantity){ cell_value(&v->samples, row, "height_nm"),
                                       cell_value(&v->samples, row, "height_nm_u"), 1 };
    for (size_t i = 0; i < v->images.n_rows; i++) {
        if (strcmp(csv_cell(&v->images, i, csv_column(&v->images, "sample")), in->name) != 0) continue;
        const char *shown = csv_cell(&v->images, i, csv_column(&v->images, "relief"));
        *pores += strcmp(shown, "pore") == 0;
        *hillocks += strcmp(shown, "hillock") == 0;
    }
    return ST_OK;
}

static status read_input(const request *q, size_t i, input *in, error *e) {
    const char *equals = q->named[i] ? strchr(q->files[i], '=') : NULL;
    const char *path = equals ? equals + 1 : q->files[i];
    in->name = equals ? mem_text_n(q->files[i], (size_t)(equals - q->files[i])) : stem_of(path);
    if (!in->name) return NO_MEMORY(e, "a sample");
    status st = spectrum_read(path, &in->spectrum, e);
    in->sheet_height = quantity_missing();
    in->fit = (fit_sample){ .name = in->name,
                            .wavelength_nm = in->spectrum.wavelength_nm,
                            .R = in->spectrum.R,
                            .n = in->spectrum.n,
                            .spacing_nm = quantity_missing(),
                            .height_nm = quantity_missing() };
    return st;
}

static status option_number(const char *option, const char *text, double lo, double hi, double *out,
                            error *e) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    if (number_parse(text, out) && *out >= lo && *out <= hi) return ST_OK;
    return fail(e, ST_BAD_INPUT, "%s: found '%.40s', expected a number from %s to %s", option, text,
                number_text(lo, 6, a), number_text(hi, 6, b));
}

static status read_inputs(const request *q, inputs *v, int *pores, error *e) {
    int n_pores = 0, n_hillocks = 0;
    double spacing = MISSING, spacing_u = 0.0, height = MISSING;
    status st = ST_OK;
    if (q->results && q->spacing)
        return fail(e, ST_BAD_INPUT, "--spacing: the results already hold the spacings; give one of the two");
    if (q->spacing) st = option_number("--spacing", q->spacing, 1.0, 1e5, &spacing, e);
    if (st == ST_OK && q->spacing_u) st = option_number("--spacing-u", q->spacing_u, 0.0, 1e5, &spacing_u, e);
    if (st == ST_OK && q->height) st = option_number("--height", q->height, 1.0, 1e5, &height, e);
    if (st == ST_OK && q->results) st = read_results(q->results, v, e);
    v->in = mem_array(q->n, sizeof *v->in);
    v->n = q->n;
    if (!v->in) return NO_MEMORY(e, "the spectra");
    for (size_t i = 0; st == ST_OK && i < q->n; i++) {
        input *in = &v->in[i];
        st = read_input(q, i, in, e);
        for (size_t k = 0; st == ST_OK && k < i; k++)
            if (strcmp(v->in[k].name, in->name) == 0)
                st = fail(e, ST_BAD_INPUT,
                          "two spectra of sample '%.80s'; average them first, or name them apart with "
                          "--sample",
                          in->name);
        if (st == ST_OK && q->results)
            st = sample_numbers(v, in, &n_pores, &n_hillocks, e);
        else if (st == ST_OK)
            in->fit.spacing_nm = (quantity){ spacing, spacing_u, 1 };
        in->fit.height_nm = q->height ? (quantity){ height, 0.0, 1 } : in->sheet_height;
    }
    if (st == ST_OK && n_pores && n_hillocks && !given_has(&q->given, OPT_PORES))
        return fail(e, ST_BAD_INPUT,
                    "some of these samples have pores and some hillocks; they need links of their own");
    if (n_pores) *pores = 1;
    if (n_hillocks) *pores = 0;
    if (given_has(&q->given, OPT_PORES)) *pores = 1;
    return st;
}

/* ---- options ---- */

static status band_option(const char *text, fit_options *o, error *e) {
    const char *colon = strchr(text, ':');
    char *lo = colon ? mem_text_n(text, (size_t)(colon - text)) : NULL;
    int ok = lo && number_parse(lo, &o->band_lo_nm) && number_parse(colon + 1, &o->band_hi_nm) &&
             o->band_lo_nm >= 100.0 && o->band_hi_nm > o->band_lo_nm && o->band_hi_nm <= 20000.0;
    free(lo);
    return ok ? ST_OK
              : fail(e, ST_BAD_INPUT, "--band: found '%.40s', expected LO:HI in nm, such as 300:1000", text);
}

/* What is given is not free; what --free names cannot be given. */
static status choose_free(const request *q, fit_options *o, error *e) {
    status st = ST_OK;
    if (q->free) {
        st = fit_kinds_parse(q->free, &o->free, e);
        if (st != ST_OK) return fail_within(e, st, "--free");
    }
    for (size_t i = 0; i <= N_FIXES; i++) {
        fit_kind kind = i < N_FIXES ? fixes[i].kind : FIT_HEIGHT;
        int given = i < N_FIXES ? given_has(&q->given, fixes[i].option) : q->height != NULL;
        if (!given || !(o->free >> kind & 1u)) continue;
        if (q->free)
            return fail(e, ST_BAD_INPUT, "%s gives what --free %.60s wants to fit; leave one of them out",
                        i < N_FIXES ? shared_option_name(fixes[i].option) : "--height", q->free);
        o->free &= ~(1u << kind);
    }
    if (!o->free) return fail(e, ST_BAD_INPUT, "everything is given, nothing is left to fit");
    return ST_OK;
}

/* What a link file does not carry has to stand in the protocol that fit and run share. */
static status check_saved(const request *q, error *e) {
    static const int not_carried[] = { OPT_FLAT_TOP, OPT_TIP_RADIUS, OPT_SPREAD_LAW };
    for (size_t i = 0; i < sizeof not_carried / sizeof not_carried[0]; i++)
        if (q->save && given_has(&q->given, not_carried[i]))
            return fail(e, ST_BAD_INPUT,
                        "%s: a link file does not carry it; write it into the protocol, for the fit (--protocol) and for the runs",
                        shared_option_name(not_carried[i]));
    return ST_OK;
}

static status options_of(const request *q, protocol *p, fit_options *o, error *e) {
    *o = fit_defaults();
    status st = check_saved(q, e);
    if (st == ST_OK) st = given_apply(&q->given, 1, p, e); /* the fit says the shape, or it is taken as known */
    if (st == ST_OK && q->band) st = band_option(q->band, o, e);
    if (st == ST_OK && q->noise) st = option_number("--noise", q->noise, 1e-6, 0.5, &o->noise, e);
    if (st == ST_OK) st = choose_free(q, o, e);
    if (st != ST_OK) return st;
    o->link = p->link;
    if (!isfinite(o->link.exponent_u)) o->link.exponent_u = 0.0; /* the link file carries it */
    o->pores = p->measure.relief == RELIEF_PORE;
    free(p->calibration); /* a fit does not start from another one */
    p->calibration = NULL;
    return ST_OK;
}

/* The tables must reach over the band of the fit and no farther. */
static void band_to_protocol(const fit_options *o, protocol *p) {
    p->band_lo_nm = o->band_lo_nm;
    p->band_hi_nm = o->band_hi_nm;
}

/* ---- all together ---- */

static status made_at(const request *q, char out[32], error *e) {
    if (q->made_at && !iso_time(q->made_at, out))
        return fail(e, ST_BAD_INPUT,
                    "--made-at: found '%.40s', expected a date such as 2026-03-14 or 2026-03-14T09:30",
                    q->made_at);
    if (q->made_at) return ST_OK;
    time_t t = time(NULL);
    struct tm parts;
    if (!gmtime_r(&t, &parts) || !strftime(out, 32, "%Y-%m-%dT%H:%M:%SZ", &parts))
        return fail(e, ST_BUG, "the clock gives no date; say one with --made-at");
    return ST_OK;
}

static status show(const request *q, const inputs *v, const fit_sample *samples, const fit_options *o,
                   const protocol *p, const fit_result *r, textbuf *out, error *e) {
    const char **notes = mem_array(v->n, sizeof *notes);
    quantity *heights = mem_array(v->n, sizeof *heights);
    status st = notes && heights ? ST_OK : NO_MEMORY(e, "the result");
    for (size_t i = 0; st == ST_OK && i < v->n; i++) {
        notes[i] = v->in[i].spectrum.note;
        heights[i] = v->in[i].sheet_height;
    }
    if (st == ST_OK) {
        fit_view view = { samples, notes, heights, o, p, r };
        if (q->as == AS_JSON)
            fit_json(&view, out);
        else if (q->as == AS_CSV)
            fit_csv(&view, out);
        else
            fit_text(&view, out);
    }
    free(notes);
    free(heights);
    return st;
}

/* *done: the result stands in `out`, whatever became of saving it. */
static status fit_run(const request *q, textbuf *out, int *done, error *e) {
    protocol p = { 0 };
    setup s = { 0 };
    inputs v = { 0 };
    fit_options o;
    fit_result r = { 0 };
    fit_sample *samples = NULL;
    char date[32] = "";
    status st = made_at(q, date, e);
    if (st == ST_OK) st = q->protocol ? protocol_read(q->protocol, &p, e) : protocol_defaults(&p, e);
    if (st == ST_OK) st = options_of(q, &p, &o, e);
    if (st == ST_OK) st = read_inputs(q, &v, &o.pores, e);
    if (st == ST_OK) {
        band_to_protocol(&o, &p);
        st = setup_make(&p, &s, e);
    }
    if (st == ST_OK) {
        samples = mem_array(v.n, sizeof *samples);
        if (!samples) st = NO_MEMORY(e, "the spectra");
    }
    for (size_t i = 0; st == ST_OK && i < v.n; i++) samples[i] = v.in[i].fit;
    if (st == ST_OK) st = fit_spectra(samples, v.n, &o, &s.optics, &r, e);
    if (st == ST_OK) st = show(q, &v, samples, &o, &p, &r, out, e);
    *done = st == ST_OK;
    if (st == ST_OK && q->save) {
        st = linkfile_write(q->save, samples, &r, &p, date, e);
        if (st == ST_OK && q->as == AS_TEXT)
            text_addf(out, "\nSaved to %s; name it in a protocol: \"link\": { \"calibration\": \"%s\" }\n",
                      q->save, q->save);
    }
    fit_free(&r);
    free(samples);
    inputs_free(&v);
    setup_free(&s);
    protocol_free(&p);
    return st;
}

int cmd_fit(int argc, char **argv) {
    request q = { .as = AS_TEXT };
    textbuf out = { 0 };
    error e = { ST_OK, "" };
    int done = 0, code = EXIT_DONE;
    argp_parse(&fit_argp, argc, argv, 0, NULL, &q);
    status st = fit_run(&q, &out, &done, &e);
    if (done) code = command_print("fit", &out);
    if (st != ST_OK) code = command_failed("fit", &e);
    text_free(&out);
    free(q.files);
    free(q.named);
    return code;
}
