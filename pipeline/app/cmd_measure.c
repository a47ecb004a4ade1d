/* sward measure FILE...: texture numbers only, on standard output; nothing is written. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/batch.h"
#include "app/command.h"
#include "app/options.h"
#include "app/length.h"
#include "app/names.h"
#include "app/scalefile.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"

enum { OPT_PX = 0x200, OPT_BAR, OPT_SCALE, OPT_KEEP_TILT, OPT_RELIEF, OPT_PROTOCOL, OPT_JOBS, OPT_JSON, OPT_CSV };
typedef enum { AS_LINES, AS_JSON, AS_CSV } form;

typedef struct {
    double px_nm, bar_nm;
    int keep_tilt;
    const char *scale;
    scale_standard standard;
    int jobs, relief_given;
    relief relief;
    const char *protocol;
    form form;
    char **files;
    size_t n;
} measure_use;

/* clang-format off */
static const struct argp_option options[] = {
    { "px",       OPT_PX,       "NM",   0, "pixel size, nm; outranks all other sources", 0 },
    { "bar",      OPT_BAR,      "LENGTH", 0, "what the burnt-in scale bar stands for, such as 5um; its length is found in the picture", 0 },
    { "scale",    OPT_SCALE,    "FILE", 0, "scale file of 'sward scale --save': replaces the instrument's pixel size where it applies", 0 },
    { "keep-tilt", OPT_KEEP_TILT, NULL, 0, "flag tilted views, do not stretch them (a holder that tilts back by itself)", 0 },
    { "relief",   OPT_RELIEF,   "hillock|pore|auto", 0, "what a feature is (default: as the protocol says, else found)", 0 },
    { "protocol", OPT_PROTOCOL, "FILE", 0, "measuring limits from a protocol (default: built in)", 0 },
    { "jobs",     OPT_JOBS,     "N",    0, "workers, 0 = one per core (default)", 0 },
    { "json",     OPT_JSON,     NULL,   0, "a JSON array of rows as in images.csv", 0 },
    { "csv",      OPT_CSV,      NULL,   0, "CSV as images.csv", 0 },
    { 0 }
};
/* clang-format on */

static error_t parse(int key, char *arg, struct argp_state *state) {
    measure_use *u = state->input;
    switch (key) {
    case OPT_PX: u->px_nm = option_px_nm(arg, state); break;
    case OPT_BAR:
        if (!length_parse(arg, &u->bar_nm))
            argp_error(state, "--bar: found '%s', expected a length with its unit, such as 5um or 500nm", arg);
        break;
    case OPT_SCALE: u->scale = arg; break;
    case OPT_KEEP_TILT: u->keep_tilt = 1; break;
    case OPT_RELIEF:
        u->relief_given = 1;
        if (!strcmp(arg, "hillock")) u->relief = RELIEF_HILLOCK;
        else if (!strcmp(arg, "pore")) u->relief = RELIEF_PORE;
        else if (!strcmp(arg, "auto")) u->relief = RELIEF_AUTO;
        else argp_error(state, "--relief: found '%s', expected hillock, pore or auto", arg);
        break;
    case OPT_PROTOCOL: u->protocol = arg; break;
    case OPT_JOBS: u->jobs = option_jobs(arg, state); break;
    case OPT_JSON: u->form = AS_JSON; break;
    case OPT_CSV: u->form = AS_CSV; break;
    case ARGP_KEY_ARGS:
        u->files = state->argv + state->next;
        u->n = (size_t)(state->argc - state->next);
        break;
    case ARGP_KEY_NO_ARGS: argp_error(state, "FILE is missing: name at least one micrograph"); break;
    default: return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

const struct argp measure_argp = {
    options, parse, "FILE...",
    "Measures the texture of micrographs and prints their numbers. Nothing is written or remembered."
    "\vExit status: 0 done; 1 failed; 2 wrong use; 3 done, but some files could not be used (their rows say why).",
    NULL, NULL, NULL
};

static void print_lines(const image_row *rows, size_t n) {
    char v[NUMBER_TEXT], u[NUMBER_TEXT];
    for (size_t i = 0; i < n; i++) {
        textbuf name = { 0 };
        text_add_plain(&name, rows[i].file);
        printf("%s: %s%s%s%s%s%s\n", name.s ? name.s : "", rows[i].status, rows[i].reason[0] ? ", " : "", rows[i].reason,
               rows[i].flags[0] ? " (" : "", rows[i].flags, rows[i].flags[0] ? ")" : "");
        text_free(&name);
        for (size_t c = 0; c < n_image_columns; c++) {
            const column *col = &image_columns[c];
            if (col->kind != COL_NUMBER) continue;
            size_t k = strlen(col->name);
            if (k > 2 && !strcmp(col->name + k - 2, "_u")) continue;
            const char *cell = column_cell(col, &rows[i], v);
            if (!cell[0]) continue;
            int twin = c + 1 < n_image_columns && !strncmp(image_columns[c + 1].name, col->name, k) &&
                       !strcmp(image_columns[c + 1].name + k, "_u");
            printf("  %-20s %10s", col->name, cell);
            if (twin) printf(" +- %s", column_cell(&image_columns[c + 1], &rows[i], u));
            putchar('\n');
        }
    }
}

static status print_rows(const measure_use *u, const examined *all, error *e) {
    image_row *rows = mem_array(u->n, sizeof *rows);
    textbuf out = { 0 };
    if (!rows) return NO_MEMORY(e, "the rows");
    for (size_t i = 0; i < u->n; i++) rows[i] = all[i].row;
    table_view view = { image_columns, n_image_columns, rows, u->n, sizeof *rows, NULL, 0, NULL };
    if (u->form == AS_LINES) print_lines(rows, u->n);
    else if (u->form == AS_JSON) table_to_json(&view, 0, &out);
    else table_to_csv(&view, &out);
    status st = text_check(&out, "the rows", e);
    if (st == ST_OK && out.n) {
        fputs(out.s, stdout);
        if (out.s[out.n - 1] != '\n') putchar('\n');
    }
    text_free(&out);
    free(rows);
    return st;
}

static status measure_files(const measure_use *u, const protocol *p, examined *all, error *e) {
    batch_item *items = mem_array(u->n, sizeof *items);
    if (!items) return NO_MEMORY(e, "the batch");
    for (size_t i = 0; i < u->n; i++) items[i] = (batch_item){ u->files[i], u->files[i], "", MISSING, MISSING };
    examine_options o = { p, u->px_nm, u->bar_nm, u->scale ? &u->standard : NULL, u->keep_tilt, NULL, 1 };
    status st = batch_examine(items, u->n, &o, u->jobs, 0, NULL, all, e);
    if (st == ST_OK) st = batch_mark_duplicates(all, u->n, e);
    for (size_t i = 0; st == ST_OK && i < u->n; i++) {
        name_parts parts = { 0 };
        const char *base = strrchr(u->files[i], '/');
        st = name_sample(base ? base + 1 : u->files[i], p->pattern, &parts, e);
        if (p->pattern && st == ST_OK && !parts.matched) all[i].flags |= FLAG(NAME_UNMATCHED);
        if (st == ST_OK && !(all[i].row.sample = mem_text(parts.sample))) st = NO_MEMORY(e, "the rows");
        if (st == ST_OK) st = examine_finish(&all[i], e);
        name_parts_free(&parts);
    }
    free(items);
    return st == ST_OK ? print_rows(u, all, e) : st;
}

int cmd_measure(int argc, char **argv) {
    measure_use u = { .px_nm = MISSING, .bar_nm = MISSING };
    protocol p = { 0 };
    error e = { 0 };
    int unusable = 0;
    if (argp_parse(&measure_argp, argc, argv, 0, NULL, &u) != 0) return EXIT_USAGE;
    status st = u.protocol ? protocol_read(u.protocol, &p, &e) : protocol_defaults(&p, &e);
    if (st == ST_OK && u.scale) st = scalefile_read(u.scale, &u.standard, &e);
    if (u.relief_given) p.measure.relief = u.relief;
    examined *all = mem_array(u.n, sizeof *all);
    if (st == ST_OK && !all) st = NO_MEMORY(&e, "the batch");
    if (st == ST_OK) st = measure_files(&u, &p, all, &e);
    for (size_t i = 0; all && i < u.n; i++) {
        if (!all[i].readable || all[i].reasons) unusable = 1;
        examined_free(&all[i]);
    }
    free(all);
    protocol_free(&p);
    if (st == ST_OK) return unusable ? EXIT_PARTIAL : EXIT_DONE;
    return command_failed("measure", &e);
}
