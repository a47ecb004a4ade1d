/* sward inspect FILE...: what the files themselves say, without measuring: pixel size and every source of it, info
 * strip, facts of the instrument, levels, flags. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "app/options.h"
#include "app/length.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"
#include "io/load.h"

enum { OPT_JSON = 0x200, OPT_PX, OPT_BAR };

typedef struct {
    load_options load;
    int json;
    char **files;
    size_t n;
} inspect_use;

/* clang-format off */
static const struct argp_option options[] = {
    { "json", OPT_JSON, NULL,     0, "a JSON array, one object a file", 0 },
    { "px",   OPT_PX,   "NM",     0, "pixel size, nm; outranks all other sources", 0 },
    { "bar",  OPT_BAR,  "LENGTH", 0, "what the burnt-in scale bar stands for, such as 5um; its length is found in the picture", 0 },
    { 0 }
};
/* clang-format on */

static error_t parse(int key, char *arg, struct argp_state *state) {
    inspect_use *u = state->input;
    switch (key) {
    case OPT_JSON:
        u->json = 1;
        break;
    case OPT_PX:
        u->load.px_nm_option = option_px_nm(arg, state);
        break;
    case OPT_BAR:
        if (!length_parse(arg, &u->load.bar_nm))
            argp_error(state, "--bar: found '%s', expected a length with its unit, such as 5um or 500nm",
                       arg);
        break;
    case ARGP_KEY_ARGS:
        u->files = state->argv + state->next;
        u->n = (size_t)(state->argc - state->next);
        break;
    case ARGP_KEY_NO_ARGS:
        argp_error(state, "FILE is missing: name at least one micrograph");
        break;
    default:
        return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

const struct argp inspect_argp = {
    options,
    parse,
    "FILE...",
    "Says what is known of micrographs before anything is measured: the pixel size and every source that "
    "states one, the "
    "rows of the info strip, what the instrument recorded, levels and clipping."
    "\vExit status: 0 done; 1 failed; 2 wrong use; 3 done, but some files could not be read (their entries "
    "say why).",
    NULL,
    NULL,
    NULL
};

static void member_number(textbuf *t, const char *name, double v, int digits) {
    text_addf(t, ", \"%s\": ", name);
    json_number(t, v, digits);
}

static void member_text(textbuf *t, const char *name, const char *text) {
    text_addf(t, ", \"%s\": ", name);
    json_string(t, text);
}

static void as_json(const char *file, const micrograph *m, const char *why, textbuf *t) {
    char words[1024];
    text_add(t, "  {\"file\": ");
    json_string(t, file);
    if (why) {
        member_text(t, "error", why);
        text_add(t, "}");
        return;
    }
    member_number(t, "px_nm", m->px_nm, 7);
    member_text(t, "px_source", m->px_source);
    member_number(t, "px_u_rel", m->px_u_rel, 3);
    text_addf(
        t,
        ", \"width_px\": %zu, \"height_px\": %zu, \"strip_px\": %zu, \"strip_top_px\": %zu, \"pages\": %zu",
        m->file_nx, m->file_ny, m->strip_rows, m->strip_top, m->pages);
    text_addf(t, ", \"bit_depth\": %d", m->bit_depth);
    text_addf(t, ", \"masked_px\": %zu", m->n_masked);
    member_number(t, "clipped_low", m->clipped_low, 4);
    member_number(t, "clipped_high", m->clipped_high, 4);
    member_text(t, "compression", m->compression[0] ? m->compression : NULL);
    text_addf(t, ", \"lossy\": %s", m->flags & FLAG(LOSSY) ? "true" : "false");
    member_text(t, "flags", flags_text(m->flags, words, sizeof words));
    member_text(t, "note", m->note);
    member_text(t, "sha256", m->hash);
    text_add(t, ", ");
    micrograph_facts_json(m, t);
    text_add(t, "}");
}

static void line(textbuf *t, const char *name, const char *text) {
    if (text[0]) text_addf(t, "  %-18s %s\n", name, text);
}

static void line_number(textbuf *t, const char *name, double v, int known, int digits, const char *unit) {
    char a[NUMBER_TEXT];
    if (known) text_addf(t, "  %-18s %s%s\n", name, number_text(v, digits, a), unit);
}

static void as_text(const char *file, const micrograph *m, const char *why, textbuf *t) {
    char words[1024], a[NUMBER_TEXT], b[NUMBER_TEXT];
    const facts *f = &m->facts;
    if (why) {
        text_addf(t, "%s: %s\n", file, why);
        return;
    }
    text_addf(t, "%s: %zu x %zu pixels, %d bits%s%s", file, m->file_nx, m->file_ny, m->bit_depth,
              m->compression[0] ? ", " : "", m->compression);
    if (m->pages > 1) text_addf(t, ", %zu pages", m->pages);
    text_add(t, "\n");
    if (m->px_nm > 0.0)
        text_addf(t, "  %-18s %s nm (%s), +- %s %%\n", "pixel size", number_text(m->px_nm, 6, a),
                  m->px_source, number_percent(m->px_u_rel, 2, b));
    else
        line(t, "pixel size", "none");
    for (size_t i = 0; i < m->n_statements; i++)
        text_addf(t, "  %-18s %s nm by %s\n", i ? "" : "stated", number_text(m->statements[i].x_nm, 6, a),
                  m->statements[i].source);
    text_addf(t, "  %-18s %zu rows", "info strip", m->strip_rows);
    if (m->strip_top) text_addf(t, ", %zu of them at the top", m->strip_top);
    text_add(t, "\n");
    if (m->n_masked) text_addf(t, "  %-18s %zu pixels masked\n", "marks", m->n_masked);
    text_addf(t, "  %-18s %s %% at black, %s %% at white\n", "clipped", number_percent(m->clipped_low, 3, a),
              number_percent(m->clipped_high, 3, b));
    line(t, "acquired", m->acquired_at);
    line_number(t, "magnification", f->magnification, f->magnification > 0.0, 6, "");
    line_number(t, "voltage", f->voltage_V / 1e3, f->voltage_V > 0.0, 5, " kV");
    line_number(t, "working distance", f->working_distance_mm, f->working_distance_mm > 0.0, 5, " mm");
    line_number(t, "tilt", f->tilt_deg, f->tilt_known, 4,
                f->tilt_in_pixels ? " degrees, corrected by the instrument" : " degrees");
    line(t, "detector", f->detector);
    line(t, "software", f->software);
    line(t, "flags", flags_text(m->flags, words, sizeof words));
    line(t, "note", m->note);
    line(t, "sha256", m->hash);
}

int cmd_inspect(int argc, char **argv) {
    inspect_use u = { .load = load_defaults() };
    textbuf t = { 0 };
    int unread = 0;
    if (argp_parse(&inspect_argp, argc, argv, 0, NULL, &u) != 0) return EXIT_USAGE;
    if (u.json) text_add(&t, "[\n");
    for (size_t i = 0; i < u.n; i++) {
        micrograph m = { 0 };
        error e = { 0 };
        int bad = load_file(u.files[i], &u.load, &m, &e) != ST_OK;
        unread |= bad;
        (u.json ? as_json : as_text)(u.files[i], &m, bad ? e.text : NULL, &t);
        if (u.json) text_add(&t, i + 1 < u.n ? ",\n" : "\n");
        micrograph_free(&m);
    }
    if (u.json) text_add(&t, "]\n");
    int code = command_print("inspect", &t);
    return code != EXIT_DONE ? code : unread ? EXIT_PARTIAL : EXIT_DONE;
}
