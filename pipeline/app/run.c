/* load -> measure -> link -> predict -> judge -> report, in this order, each stage in its own room. */
#include "app/run.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>
#include <unistd.h>

#include "app/batch.h"
#include "app/dryrun.h"
#include "app/folder.h"
#include "app/ledger.h"
#include "app/publish.h"
#include "app/scalefile.h"
#include "base/mem.h"
#include "io/file.h"

/* Everything of one run; freed in one place. */
typedef struct {
    const run_options *o;
    protocol protocol;
    scale_standard standard;
    int has_standard;
    setup *setup;
    folder folder;
    examined *images;
    sample_group *groups;
    joined *samples;
    size_t n_groups;
    textbuf basis;
    const char *out;
} run;

static double now_s(void) {
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static void run_free(run *r) {
    if (r->images)
        for (size_t i = 0; i < r->folder.n; i++) examined_free(&r->images[i]);
    for (size_t i = 0; i < r->n_groups; i++) {
        if (r->groups) sample_group_free(&r->groups[i]);
        if (r->samples) joined_free(&r->samples[i]);
    }
    free(r->images);
    free(r->groups);
    free(r->samples);
    if (r->setup) setup_free(r->setup);
    free(r->setup);
    folder_close(&r->folder);
    protocol_free(&r->protocol);
    text_free(&r->basis);
}

static status read_protocol(run *r, error *e) {
    const run_options *o = r->o;
    char *beside = path_join(o->folder, "protocol.json");
    if (!beside) return NO_MEMORY(e, "a path");
    status st = o->protocol            ? protocol_read(o->protocol, &r->protocol, e)
                : file_exists(beside) ? protocol_read(beside, &r->protocol, e)
                                      : protocol_defaults(&r->protocol, e);
    free(beside);
    const char *scale = o->scale ? o->scale : r->protocol.scale;
    if (st == ST_OK && scale) {
        st = scalefile_read(scale, &r->standard, e);
        r->has_standard = st == ST_OK;
    }
    return st;
}

static status prepare(run *r, error *e) {
    const run_options *o = r->o;
    r->out = o->out ? o->out : "sward-out";
    if (!folder_exists(o->folder))
        return fail(e, ST_BAD_INPUT, "'%s' is no folder; name the folder that holds the micrographs", o->folder);
    status st = read_protocol(r, e);
    if (st != ST_OK) return st;
    r->setup = mem_array(1, sizeof *r->setup);
    if (!r->setup) return NO_MEMORY(e, "the optics");
    st = setup_make(&r->protocol, r->setup, e);
    if (st == ST_OK) st = folder_open(o->folder, o->sheet, &r->folder, e);
    if (st == ST_OK) st = protocol_meet_sheet(&r->protocol, r->folder.sheet.extra_names, r->folder.sheet.n_extra, e);
    if (st == ST_OK && !r->folder.n)
        st = fail(e, ST_BAD_INPUT, "'%s' holds no micrograph: no file below it is named like a picture (.tif, .tiff, .png, .jpg)",
                  o->folder);
    if (st == ST_OK && !o->dry_run) st = folder_make(r->out, e);
    text_addf(&r->basis, "%s|", SWARD_VERSION);
    protocol_full_text(&r->protocol, &r->basis);
    setup_text(r->setup, &r->basis);
    if (r->has_standard)
        text_addf(&r->basis, "|%s|%s|%.17g|%.17g|%.17g", r->standard.name, r->standard.date, r->standard.px_x_nm,
                  r->standard.px_y_nm, r->standard.u_rel);
    return st == ST_OK ? text_check(&r->basis, "the protocol's fingerprint", e) : st;
}

/* A line for every file and folder that is left alone, and why. */
static void say_left(const folder *f) {
    textbuf t = { 0 };
    for (size_t i = 0; i < f->left.n_left; i++) {
        text_add(&t, "left alone: ");
        text_add_plain(&t, f->left.left[i].path);
        text_addf(&t, " (%s)\n", f->left.left[i].why);
    }
    if (t.s) fputs(t.s, stderr);
    text_free(&t);
}

static status measure_all(run *r, error *e) {
    const folder *f = &r->folder;
    batch_item *items = mem_array(f->n, sizeof *items);
    r->images = mem_array(f->n, sizeof *r->images);
    if (!items || !r->images) {
        free(items);
        return NO_MEMORY(e, "the batch");
    }
    for (size_t i = 0; i < f->n; i++)
        items[i] = (batch_item){ f->paths[i], f->relative[i], f->stems[i], f->rows[i] ? f->rows[i]->px_nm : MISSING,
                                 f->rows[i] ? f->rows[i]->bar_nm : MISSING };
    examine_options x = { &r->protocol, r->o->px_nm, r->o->bar_nm, r->has_standard ? &r->standard : NULL, r->o->keep_tilt, r->out, r->o->fresh };
    int progress = !r->o->quiet && (r->o->verbose || isatty(STDERR_FILENO));
    status st = batch_examine(items, f->n, &x, r->o->jobs, progress, r->images, e);
    free(items);
    if (st == ST_OK) st = batch_mark_duplicates(r->images, f->n, e);
    if (st == ST_OK) st = folder_samples(f, &r->protocol, r->images, &r->groups, &r->n_groups, e);
    for (size_t i = 0; st == ST_OK && i < f->n; i++) st = examine_finish(&r->images[i], e);
    return st;
}

static status join_all(run *r, error *e) {
    r->samples = mem_array(r->n_groups, sizeof *r->samples);
    if (!r->samples) return NO_MEMORY(e, "the samples");
    return batch_join(r->groups, r->n_groups, r->images, &r->protocol, r->setup, r->folder.sheet.n_extra, r->basis.s,
                      r->o->jobs, r->samples, e);
}

static void utc_now(char out[32]) {
    time_t t = time(NULL);
    struct tm parts;
    out[0] = '\0';
    if (gmtime_r(&t, &parts)) strftime(out, 32, "%Y-%m-%dT%H:%M:%SZ", &parts);
}

static void count_outcome(const run *r, run_outcome *outcome) {
    *outcome = (run_outcome){ 0, 0 };
    for (size_t i = 0; i < r->folder.n; i++)
        if (!r->images[i].readable || r->images[i].reasons) outcome->unusable++;
    for (size_t k = 0; k < r->n_groups; k++) {
        if (r->samples[k].failed) outcome->unusable++;
        if (r->samples[k].verdict == VERDICT_FAILS) outcome->missed++;
    }
}

status run_folder(const run_options *o, run_outcome *outcome, error *e) {
    run r = { .o = o };
    char run_at[32];
    ledger_result ledger = { 0 };
    double t0 = now_s();
    utc_now(run_at);
    status st = prepare(&r, e);
    if (st == ST_OK && o->verbose) say_left(&r.folder);
    if (st == ST_OK && o->dry_run) {
        examine_options x = { &r.protocol, o->px_nm, o->bar_nm, r.has_standard ? &r.standard : NULL, o->keep_tilt, NULL, 1 };
        *outcome = (run_outcome){ 0, 0 };
        st = dry_run(&r.folder, &x, &outcome->unusable, e);
        run_free(&r);
        return st;
    }
    double t1 = now_s();
    if (st == ST_OK) st = measure_all(&r, e);
    double t2 = now_s();
    if (st == ST_OK) st = join_all(&r, e);
    double t3 = now_s();
    if (st == ST_OK) {
        const char *history = o->history ? o->history : r.protocol.history;
        st = ledger_keep(history, r.out, run_at, &r.protocol, &r.folder.sheet, r.folder.root, r.samples, r.n_groups, &ledger, e);
    }
    if (st == ST_OK) {
        count_outcome(&r, outcome);
        publication p = { .protocol = &r.protocol, .setup = r.setup, .folder = &r.folder, .images = r.images,
                          .groups = r.groups, .samples = r.samples, .n_groups = r.n_groups, .ledger = &ledger,
                          .out = r.out, .page = !o->no_report, .quiet = o->quiet, .run_at = run_at,
                          .jobs = o->jobs, .seconds = { t1 - t0, t2 - t1, t3 - t2 }, .started = t0 };
        st = publish(&p, e);
    }
    ledger_free(&ledger);
    run_free(&r);
    return st;
}
