/* load -> measure -> link -> predict -> judge -> report, in this order, each stage in its own room. */
#include "app/run_priv.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>
#include <unistd.h>

#include "app/dryrun.h"
#include "app/publish.h"
#include "base/mem.h"

static double now_s(void) {
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

const char *run_out(const run_options *o) { return o->out ? o->out : "sward-out"; }

void run_free(run *r) {
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
    if (!r->hooks || !r->hooks->stage) stage_close(&r->stage);
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

static status make_basis(run *r, error *e) {
    textbuf t = { 0 };
    text_addf(&t, "%s|", SWARD_VERSION);
    protocol_full_text(&r->protocol, &t);
    setup_text(r->setup, &t);
    if (r->has_standard)
        text_addf(&t, "|%s|%s|%.17g|%.17g|%.17g", r->standard.name, r->standard.date, r->standard.px_x_nm,
                  r->standard.px_y_nm, r->standard.u_rel);
    status st = text_check(&t, "the protocol's fingerprint", e);
    if (st == ST_OK) sha256_hex(t.s, t.n, r->basis);
    text_free(&t);
    return st;
}

status run_meet_folder(run *r, error *e) {
    const sheet *s = &r->folder.sheet;
    status st = protocol_meet_sheet(&r->protocol, s->extra_names, s->n_extra, e);
    return st == ST_OK ? make_basis(r, e) : st;
}

status run_make_stage(run *r, error *e) {
    status st = ST_OK;
    if (r->hooks && r->hooks->stage) r->stage = *r->hooks->stage; /* the caller's: borrowed */
    else st = stage_open(run_out(r->o), &r->stage, e);
    return st == ST_OK ? stage_begin(&r->stage, e) : st;
}

status run_prepare(run *r, error *e) {
    time_t t = time(NULL);
    struct tm parts;
    r->begun_s[0] = now_s();
    if (gmtime_r(&t, &parts)) strftime(r->run_at, sizeof r->run_at, "%Y-%m-%dT%H:%M:%SZ", &parts);
    status st = read_protocol(r, e);
    if (st != ST_OK) return st;
    r->setup = mem_array(1, sizeof *r->setup);
    if (!r->setup) return NO_MEMORY(e, "the optics");
    st = setup_make(&r->protocol, r->setup, e);
    return st;
}

static status open_folder(run *r, error *e) {
    const run_options *o = r->o;
    const run_hooks *h = r->hooks;
    status st = folder_open(o->folder, o->sheet, h ? h->admit : NULL, h ? h->context : NULL, &r->folder, e);
    if (st == ST_OK && !r->folder.n)
        st = fail(e, ST_BAD_INPUT, "'%s' holds no micrograph: no file below it is named like a picture (.tif, .tiff, .png, .jpg)",
                  o->folder);
    return st == ST_OK ? run_meet_folder(r, e) : st;
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

static examine_options examining(const run *r) {
    return (examine_options){ &r->protocol, r->o->px_nm, r->o->bar_nm, r->has_standard ? &r->standard : NULL,
                              r->o->keep_tilt, r->o->dry_run ? NULL : &r->stage, r->o->fresh };
}

status run_measure(run *r, int *stopped, error *e) {
    const folder *f = &r->folder;
    int (*stop)(void) = r->hooks ? r->hooks->stop : NULL;
    size_t step = r->o->parts ? (size_t)r->o->parts : 1, first = r->o->parts ? (size_t)r->o->part - 1 : 0, n = 0;
    batch_item *items = mem_array(f->n, sizeof *items);
    examined *mine = mem_array(f->n, sizeof *mine);
    r->images = mem_array(f->n, sizeof *r->images);
    status st = items && mine && r->images ? ST_OK : NO_MEMORY(e, "the batch");
    for (size_t i = first; st == ST_OK && i < f->n; i += step)
        items[n++] = (batch_item){ f->paths[i], f->relative[i], f->stems[i], f->rows[i] ? f->rows[i]->px_nm : MISSING,
                                   f->rows[i] ? f->rows[i]->bar_nm : MISSING };
    examine_options x = examining(r);
    int progress = !r->o->quiet && (r->o->verbose || isatty(STDERR_FILENO));
    if (st == ST_OK) st = batch_examine(items, n, &x, r->o->jobs, progress, stop, mine, e);
    for (size_t k = 0; k < n; k++) r->images[first + k * step] = mine[k];
    *stopped = stop && stop();
    free(items);
    free(mine);
    return st;
}

static status join_all(run *r, error *e) {
    const folder *f = &r->folder;
    char *cache = path_join(r->stage.out, "cache");
    status st = cache ? batch_mark_duplicates(r->images, f->n, e) : NO_MEMORY(e, "a path");
    if (st == ST_OK) st = folder_samples(f, &r->protocol, r->images, &r->groups, &r->n_groups, e);
    for (size_t i = 0; st == ST_OK && i < f->n; i++) st = examine_finish(&r->images[i], e);
    if (st == ST_OK && !(r->samples = mem_array(r->n_groups, sizeof *r->samples))) st = NO_MEMORY(e, "the samples");
    join_options o = { &r->protocol, r->setup, f->sheet.n_extra, r->basis, cache, r->o->fresh };
    if (st == ST_OK) st = batch_join(r->groups, r->n_groups, r->images, &o, r->o->jobs, r->samples, e);
    free(cache);
    return st;
}

void run_count_unusable(const run *r, run_outcome *outcome) {
    *outcome = (run_outcome){ .samples = (int)r->n_groups };
    for (size_t i = 0; i < r->folder.n; i++) {
        if (!r->images[i].row.file) continue; /* of another part */
        outcome->micrographs++;
        if (!r->images[i].readable || r->images[i].reasons) outcome->unusable++;
    }
    for (size_t k = 0; k < r->n_groups; k++) {
        if (r->samples[k].failed) outcome->unusable++;
        if (r->samples[k].verdict == VERDICT_FAILS) outcome->missed++;
    }
}

static status tell_verdicts(const run *r, const ledger_result *ledger, error *e) {
    status st = ST_OK;
    for (size_t k = 0; st == ST_OK && r->hooks && r->hooks->verdict && k < r->n_groups; k++) {
        const sample_row *row = &r->samples[k].row;
        run_verdict v = { row->sample, row->verdict, row->verdict_reasons, row->etched_at, ledger->row_json[k] };
        st = r->hooks->verdict(r->hooks->verdict_context, &v, e);
    }
    return st;
}

status run_complete(run *r, run_outcome *outcome, error *e) {
    const run_options *o = r->o;
    ledger_result ledger = { 0 };
    r->begun_s[2] = now_s();
    status st = join_all(r, e);
    r->begun_s[3] = now_s();
    if (st == ST_OK) {
        const char *history = o->history ? o->history : r->protocol.history;
        st = ledger_keep(history, r->stage.out, r->run_at, &r->protocol, &r->folder.sheet, r->folder.root, r->samples, r->n_groups, &ledger, e);
    }
    if (st == ST_OK) {
        run_count_unusable(r, outcome);
        outcome->added = (int)ledger.added;
        publication p = { .protocol = &r->protocol, .setup = r->setup, .folder = &r->folder, .images = r->images,
                          .groups = r->groups, .samples = r->samples, .n_groups = r->n_groups, .ledger = &ledger,
                          .stage = &r->stage, .page = !o->no_report, .run_at = r->run_at, .basis = r->basis, .options = o,
                          .standard = r->has_standard ? &r->standard : NULL, .seconds = { 0 }, .started = r->begun_s[0] };
        for (size_t i = 0; i < 3; i++) p.seconds[i] = r->begun_s[i + 1] - r->begun_s[i];
        st = publish(&p, e);
    }
    if (st == ST_OK) st = tell_verdicts(r, &ledger, e);
    ledger_free(&ledger);
    return st;
}

status run_folder(const run_options *o, const run_hooks *hooks, run_outcome *outcome, error *e) {
    run r = { .o = o, .hooks = hooks, .stage = STAGE_NONE };
    *outcome = (run_outcome){ 0 };
    if (!folder_exists(o->folder))
        return fail(e, ST_BAD_INPUT, "'%s' is no folder; name the folder that holds the micrographs", o->folder);
    status st = run_prepare(&r, e);
    if (st == ST_OK) st = open_folder(&r, e);
    if (st == ST_OK && o->verbose) say_left(&r.folder);
    if (st == ST_OK && o->dry_run) {
        examine_options x = examining(&r);
        st = dry_run(&r.folder, &x, &outcome->unusable, e);
        run_free(&r);
        return st;
    }
    if (st == ST_OK) st = run_make_stage(&r, e);
    r.begun_s[1] = now_s();
    if (st == ST_OK) st = run_measure(&r, &outcome->stopped, e);
    if (st == ST_OK && !outcome->stopped) st = o->parts ? part_write(&r, outcome, e) : run_complete(&r, outcome, e);
    run_free(&r);
    return st;
}
