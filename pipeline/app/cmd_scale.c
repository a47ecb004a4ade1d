/* sward scale FILE --pitch LENGTH: the pixel size from a micrograph of a grating or grid, and a scale file that `run
 * --scale` applies to the micrographs of the same magnification. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include "app/command.h"
#include "app/options.h"
#include "app/length.h"
#include "app/scalefile.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/file.h"
#include "io/json.h"

enum { OPT_PITCH = 0x200, OPT_PITCH_U, OPT_LATTICE, OPT_SAVE, OPT_NAME, OPT_DATE, OPT_PX, OPT_JSON };

typedef struct {
    double pitch_nm, pitch_u_nm, px_nm;
    grating_kind kind;
    const char *file, *save, *name, *date;
    int json;
} scale_use;

/* clang-format off */
static const struct argp_option options[] = {
    { "pitch",   OPT_PITCH,   "LENGTH", 0, "pitch of the standard with its unit, such as 463nm; required", 0 },
    { "pitch-u", OPT_PITCH_U, "LENGTH", 0, "standard uncertainty of the pitch, from its certificate (default: none)", 0 },
    { "lattice", OPT_LATTICE, "lines|square|hexagonal|auto", 0, "what the standard shows (default: found)", 0 },
    { "save",    OPT_SAVE,    "FILE",   0, "write a scale file for 'sward run --scale FILE'", 0 },
    { "name",    OPT_NAME,    "TEXT",   0, "name of the standard, as every result will say it (default: its kind and pitch)", 0 },
    { "date",    OPT_DATE,    "DATE",   0, "when it was measured (default: as the file says, else today)", 0 },
    { "px",      OPT_PX,      "NM",     0, "nominal pixel size, nm, where the file does not say it", 0 },
    { "json",    OPT_JSON,    NULL,     0, "one JSON object", 0 },
    { 0 }
};
/* clang-format on */

static error_t parse(int key, char *arg, struct argp_state *state) {
    scale_use *u = state->input;
    switch (key) {
    case OPT_PITCH:
        if (!length_parse(arg, &u->pitch_nm))
            argp_error(state, "--pitch: found '%s', expected a length with its unit, such as 463nm", arg);
        break;
    case OPT_PITCH_U:
        if (!length_parse(arg, &u->pitch_u_nm))
            argp_error(state, "--pitch-u: found '%s', expected a length with its unit, such as 0.5nm", arg);
        break;
    case OPT_LATTICE:
        for (int k = GRATING_AUTO; k <= GRATING_HEXAGONAL; k++)
            if (!strcmp(arg, grating_word((grating_kind)k))) {
                u->kind = (grating_kind)k;
                return 0;
            }
        argp_error(state, "--lattice: found '%s', expected lines, square, hexagonal or auto", arg);
        break;
    case OPT_SAVE:
        u->save = arg;
        break;
    case OPT_NAME:
        u->name = arg;
        break;
    case OPT_DATE:
        u->date = arg;
        break;
    case OPT_PX:
        u->px_nm = option_px_nm(arg, state);
        break;
    case OPT_JSON:
        u->json = 1;
        break;
    case ARGP_KEY_ARG:
        if (u->file) argp_error(state, "one FILE only; found '%s' too", arg);
        u->file = arg;
        break;
    case ARGP_KEY_END:
        if (!u->file) argp_error(state, "FILE is missing: a micrograph of a grating or grid");
        if (!(u->pitch_nm > 0.0))
            argp_error(state, "--pitch is missing: the pitch of the standard, such as 463nm");
        break;
    default:
        return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

const struct argp scale_argp = {
    options,
    parse,
    "FILE",
    "Finds the pixel size, shape and skew of the pixels from a micrograph of a grating, a square or a "
    "hexagonal grid of known pitch; "
    "at least 8 periods must fit into it."
    "\vExit status: 0 done; 1 failed; 2 wrong use; 3 the picture shows no usable standard.",
    NULL,
    NULL,
    NULL
};

static void today(char out[32]) {
    time_t t = time(NULL);
    struct tm parts;
    out[0] = '\0';
    if (gmtime_r(&t, &parts)) strftime(out, 32, "%Y-%m-%d", &parts);
}

/* The width of a pixel scales x, its height y; the uncertainty is the larger, with the certificate's. */
static void make_record(const scale_use *u, const micrograph *m, const grating *g, scale_record *r) {
    char number[NUMBER_TEXT], name[160];
    scale_standard *s = &r->standard;
    *r = (scale_record){
        .pitch_nm = u->pitch_nm, .pitch_u_nm = u->pitch_u_nm, .skew_deg = g->skew_deg, .kind = g->kind
    };
    double stretch = m->y_stretch; /* the grating was measured on square pixels */
    s->px_x_nm = g->px_x * u->pitch_nm;
    s->px_y_nm = g->px_y * u->pitch_nm * stretch;
    s->u_rel = hypot(fmax(g->u_x / g->px_x, g->u_y / g->px_y), u->pitch_u_nm / u->pitch_nm);
    s->nominal_px_nm = m->px_nm;
    s->magnification = m->facts.magnification;
    s->width_px = m->file_nx;
    snprintf(name, sizeof name, "%s, pitch %s nm",
             g->kind == GRATING_LINES    ? "line grating"
             : g->kind == GRATING_SQUARE ? "square grid"
                                         : "hexagonal grid",
             number_text(u->pitch_nm, 6, number));
    snprintf(s->name, sizeof s->name, "%s", u->name ? u->name : name);
    if (u->date)
        snprintf(s->date, sizeof s->date, "%s", u->date);
    else if (m->acquired_at[0])
        memcpy(s->date, m->acquired_at, sizeof s->date);
    else
        today(s->date);
    const char *slash = strrchr(u->file, '/');
    snprintf(r->file, sizeof r->file, "%s", slash ? slash + 1 : u->file);
    memcpy(r->hash, m->hash, sizeof r->hash);
}

static void as_text(const scale_record *r, const grating *g, const micrograph *m, textbuf *t) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    const scale_standard *s = &r->standard;
    text_addf(t, "%s: %s lattice, %s nm, %zu peaks\n", r->file, grating_word(r->kind),
              number_text(r->pitch_nm, 6, a), g->n_peaks);
    text_addf(t, "  %-18s %s nm wide", "pixel", number_text(s->px_x_nm, 6, a));
    text_addf(t, ", %s nm high, +- %s %% (standard uncertainty)\n", number_text(s->px_y_nm, 6, a),
              number_percent(s->u_rel, 2, b));
    if (s->nominal_px_nm > 0.0)
        text_addf(t, "  %-18s %s nm (%s); the standard says %s times that\n", "nominal",
                  number_text(s->nominal_px_nm, 6, a), m->px_source,
                  number_text(s->px_x_nm / s->nominal_px_nm, 6, b));
    if (r->kind != GRATING_LINES)
        text_addf(t, "  %-18s %s degrees +- %s\n", "skew", number_text(g->skew_deg, 3, a),
                  number_text(g->skew_u_deg, 2, b));
    text_addf(t, "  %-18s %s degrees\n", "lattice angle", number_text(g->angle_deg, 5, a));
}

static status measure_scale(const scale_use *u, textbuf *t, error *e) {
    micrograph m = { 0 };
    grating g = { 0 };
    scale_record r;
    load_options o = load_defaults();
    textbuf file = { 0 };
    o.find_marks = 0; /* a grating is made of straight edges */
    if (u->px_nm > 0.0) o.px_nm_option = u->px_nm;
    status st = input_wanted(u->file, e);
    if (st == ST_OK) st = load_file(u->file, &o, &m, e);
    if (st == ST_OK) {
        plane p = { m.px, m.nx, m.ny, m.bit_depth, m.clipped_low, m.clipped_high, NULL };
        st = grating_measure(&p, u->kind, &g, e);
    }
    if (st != ST_OK) {
        if (e->code != ST_OK && strncmp(e->text, u->file, strlen(u->file)) != 0)
            (void)fail_within(e, st, u->file);
        goto done;
    }
    make_record(u, &m, &g, &r);
    if (u->save && !(r.standard.nominal_px_nm > 0.0) && !(r.standard.magnification > 0.0)) {
        st = fail(e, ST_BAD_INPUT,
                  "%s says neither pixel size nor magnification, so a scale file could not say what it is "
                  "for; add --px",
                  u->file);
        goto done;
    }
    scalefile_text(&r, &file);
    st = text_check(&file, "the scale file", e);
    if (st == ST_OK && u->save) st = file_write(u->save, file.s, file.n, e);
    if (st == ST_OK && u->json)
        text_add(t, file.s);
    else if (st == ST_OK)
        as_text(&r, &g, &m, t);
done:
    text_free(&file);
    micrograph_free(&m);
    return st;
}

int cmd_scale(int argc, char **argv) {
    scale_use u = { .px_nm = MISSING, .pitch_nm = MISSING };
    textbuf t = { 0 };
    error e = { 0 };
    if (argp_parse(&scale_argp, argc, argv, 0, NULL, &u) != 0) return EXIT_USAGE;
    status st = measure_scale(&u, &t, &e);
    if (st == ST_OK) return command_print("scale", &t);
    text_free(&t);
    int code = command_failed("scale", &e);
    return st == ST_NO_RESULT ? EXIT_PARTIAL : code;
}
