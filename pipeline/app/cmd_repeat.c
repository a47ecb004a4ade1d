/* sward repeat FOLDER: repeatability, reproducibility and capability of the measurement, from repeated micrographs of the same
 * places. Which place, operator and session a micrograph belongs to stands in columns of the sample sheet. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/batch.h"
#include "app/command.h"
#include "app/options.h"
#include "app/folder.h"
#include "app/repeat.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "io/json.h"

enum { OPT_PROTOCOL = 0x200, OPT_SHEET, OPT_PX, OPT_JOBS, OPT_QUANTITY, OPT_JSON };

typedef struct {
    const char *folder, *protocol, *sheet, *quantity;
    double px_nm;
    int jobs, json;
} repeat_use;

/* clang-format off */
static const struct argp_option options[] = {
    { "protocol", OPT_PROTOCOL, "FILE", 0, "protocol (default: FOLDER/protocol.json, else the built-in one); its targets with two limits are the widths to judge by", 0 },
    { "sheet",    OPT_SHEET,    "FILE", 0, "sample sheet (default: FOLDER/samples.csv); its columns place, operator and session say what was repeated", 0 },
    { "px",       OPT_PX,       "NM",   0, "pixel size, nm; outranks all other sources", 0 },
    { "jobs",     OPT_JOBS,     "N",    0, "workers, 0 = one per core (default)", 0 },
    { "quantity", OPT_QUANTITY, "NAME", 0, "only this quantity of images.csv", 0 },
    { "json",     OPT_JSON,     NULL,   0, "a JSON object", 0 },
    { 0 }
};
/* clang-format on */

static error_t parse(int key, char *arg, struct argp_state *state) {
    repeat_use *u = state->input;
    switch (key) {
    case OPT_PROTOCOL: u->protocol = arg; break;
    case OPT_SHEET: u->sheet = arg; break;
    case OPT_PX: u->px_nm = option_px_nm(arg, state); break;
    case OPT_JOBS: u->jobs = option_jobs(arg, state); break;
    case OPT_QUANTITY: u->quantity = arg; break;
    case OPT_JSON: u->json = 1; break;
    case ARGP_KEY_ARG:
        if (u->folder) argp_error(state, "'%s' is one folder too many: name one", arg);
        u->folder = arg;
        break;
    case ARGP_KEY_NO_ARGS: argp_error(state, "FOLDER is missing: name the folder that holds the micrographs"); break;
    default: return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

const struct argp repeat_argp = {
    options, parse, "FOLDER",
    "Measures repeated micrographs of the same places and says how well the measurement repeats: repeatability, what operators and "
    "sessions add (reproducibility, ISO 5725-2 nested), and how much of a target's width one micrograph's uncertainty takes "
    "(capability, ISO 22514-7). Without a column place, a place is a sample. Nothing is written or remembered."
    "\vExit status: 0 done; 1 failed; 2 wrong use; 3 done, but some micrographs could not be used.",
    NULL, NULL, NULL
};

/* Equal texts get equal numbers: the index of the first micrograph that has the text. */
static int label_of(const char *const *texts, size_t i) {
    size_t k = 0;
    while (k < i && strcmp(texts[k], texts[i])) k++;
    return (int)k;
}

static const char *cell(const folder *f, size_t i, const char *name) {
    for (size_t c = 0; f->rows[i] && c < f->sheet.n_extra; c++)
        if (!strcmp(f->sheet.extra_names[c], name)) return f->rows[i]->extra[c];
    return "";
}

/* Columns of text for place, operator and session over all micrographs. */
static status readings_make(const folder *f, const examined *all, repeat_reading *r, size_t *n, error *e) {
    const char **text = mem_array(f->n, 3 * sizeof *text);
    if (!text) return NO_MEMORY(e, "the repetitions");
    const char **place = text, **who = text + f->n, **when = text + 2 * f->n;
    for (size_t i = 0; i < f->n; i++) {
        place[i] = cell(f, i, "place");
        if (!place[i][0]) place[i] = all[i].row.sample;
        who[i] = cell(f, i, "operator");
        when[i] = cell(f, i, "session");
    }
    for (size_t i = 0; i < f->n; i++)
        if (all[i].readable && !all[i].reasons && !(all[i].flags & FLAG(DUPLICATE)))
            r[(*n)++] = (repeat_reading){ label_of(place, i), label_of(who, i), label_of(when, i), &all[i] };
    free(text);
    return ST_OK;
}

/* Limits of the target on a quantity; spacing_nm stands for the spacing the protocol chose. */
static void target_of(const protocol *p, int q, double *min, double *max) {
    int spacing = q == (p->spacing == SPACING_DENSITY ? QUANTITY_HEX : QUANTITY_ACF);
    *min = *max = MISSING;
    for (size_t i = 0; i < p->n_targets; i++) {
        const target *t = &p->targets[i];
        if (strcmp(t->quantity, quantity_table[q].name) && !(spacing && !strcmp(t->quantity, "spacing_nm"))) continue;
        *min = t->min;
        *max = t->max;
    }
}

/* Which quantities: the one asked for; else spacings, density, median size, and whatever has a target. */
static int wanted(const repeat_use *u, const protocol *p, int q) {
    static const char *const usual[] = { "spacing_acf_nm", "spacing_hex_nm", "density_per_um2", "size_d50_nm" };
    double min, max;
    const char *name = quantity_table[q].name;
    if (u->quantity) return !strcmp(u->quantity, name);
    for (size_t i = 0; i < sizeof usual / sizeof usual[0]; i++)
        if (!strcmp(usual[i], name)) return 1;
    target_of(p, q, &min, &max);
    return isfinite(min) || isfinite(max);
}

static status analyse(const repeat_use *u, const protocol *p, const repeat_reading *r, size_t n, textbuf *out, error *e) {
    const char *separator = "";
    size_t done = 0;
    if (u->json) text_addf(out, "{\"micrographs\": %zu, \"quantities\": [", n);
    for (int q = 0; q < QUANTITIES; q++) {
        repeat_result result;
        double min, max;
        error why = { 0 };
        if (!wanted(u, p, q)) continue;
        target_of(p, q, &min, &max);
        status st = repeat_analyse(r, n, q, min, max, &result, &why);
        if (st == ST_NO_RESULT) continue;
        if (st != ST_OK) return fail(e, st, "%s", why.text);
        text_addf(out, "%s", separator);
        separator = u->json ? ",\n " : "\n";
        (u->json ? repeat_json : repeat_text)(&result, out);
        done++;
    }
    if (u->json) text_add(out, "]}\n");
    if (!done)
        return fail(e, ST_BAD_INPUT, "only %zu of the micrographs can be used; expected at least 2 that are measured", n);
    return text_check(out, "the analysis", e);
}

static status measure_all(const repeat_use *u, const folder *f, const protocol *p, examined *all, error *e) {
    batch_item *items = mem_array(f->n, sizeof *items);
    sample_group *groups = NULL;
    size_t n_groups = 0;
    if (!items) return NO_MEMORY(e, "the batch");
    for (size_t i = 0; i < f->n; i++)
        items[i] = (batch_item){ f->paths[i], f->relative[i], f->stems[i], f->rows[i] ? f->rows[i]->px_nm : MISSING,
                                 f->rows[i] ? f->rows[i]->bar_nm : MISSING };
    examine_options o = { .protocol = p, .px_nm_option = u->px_nm, .bar_nm_option = MISSING, .fresh = 1 };
    status st = batch_examine(items, f->n, &o, u->jobs, 0, NULL, all, e);
    if (st == ST_OK) st = batch_mark_duplicates(all, f->n, e);
    if (st == ST_OK) st = folder_samples(f, p, all, &groups, &n_groups, e); /* names the samples */
    for (size_t k = 0; k < n_groups; k++) sample_group_free(&groups[k]);
    free(groups);
    free(items);
    return st;
}

static status repeat_folder(const repeat_use *u, textbuf *out, size_t *unusable, error *e) {
    protocol p = { 0 };
    folder f = { 0 };
    examined *all = NULL;
    repeat_reading *r = NULL;
    size_t n = 0;
    char *beside = path_join(u->folder, "protocol.json");
    status st = beside ? ST_OK : NO_MEMORY(e, "a path");
    if (st == ST_OK && !folder_exists(u->folder))
        st = fail(e, ST_BAD_INPUT, "'%s' is no folder; name the folder that holds the micrographs", u->folder);
    if (st == ST_OK)
        st = u->protocol           ? protocol_read(u->protocol, &p, e)
             : file_exists(beside) ? protocol_read(beside, &p, e)
                                   : protocol_defaults(&p, e);
    if (st == ST_OK) st = folder_open(u->folder, u->sheet, NULL, NULL, &f, e);
    if (st == ST_OK && !f.n) st = fail(e, ST_BAD_INPUT, "'%s' holds no micrograph", u->folder);
    if (st == ST_OK) {
        all = mem_array(f.n, sizeof *all);
        r = mem_array(f.n, sizeof *r);
        st = all && r ? measure_all(u, &f, &p, all, e) : NO_MEMORY(e, "the batch");
    }
    if (st == ST_OK) st = readings_make(&f, all, r, &n, e);
    if (st == ST_OK) st = analyse(u, &p, r, n, out, e);
    *unusable = f.n - n;
    for (size_t i = 0; all && i < f.n; i++) examined_free(&all[i]);
    free(all);
    free(r);
    free(beside);
    folder_close(&f);
    protocol_free(&p);
    return st;
}

int cmd_repeat(int argc, char **argv) {
    repeat_use u = { .px_nm = MISSING };
    textbuf out = { 0 };
    error e = { 0 };
    size_t unusable = 0;
    if (argp_parse(&repeat_argp, argc, argv, 0, NULL, &u) != 0) return EXIT_USAGE;
    if (u.quantity) {
        const char *names[QUANTITIES];
        int known = 0;
        for (int q = 0; q < QUANTITIES; q++) {
            names[q] = quantity_table[q].name;
            known |= !strcmp(names[q], u.quantity);
        }
        const char *near = known ? NULL : json_nearest(u.quantity, names, QUANTITIES);
        if (!known) {
            fail(&e, ST_BAD_INPUT, "--quantity: found '%.60s', expected a measured column of images.csv%s%s%s", u.quantity,
                 near ? "; did you mean '" : "", near ? near : "", near ? "'?" : "");
            return command_failed("repeat", &e);
        }
    }
    if (repeat_folder(&u, &out, &unusable, &e) != ST_OK) {
        text_free(&out);
        return command_failed("repeat", &e);
    }
    int code = command_print("repeat", &out);
    return code != EXIT_DONE ? code : unusable ? EXIT_PARTIAL : EXIT_DONE;
}
