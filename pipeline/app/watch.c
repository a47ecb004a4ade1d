/* Every update is a whole run: what has not changed is remembered, so it costs little, and nothing can differ from what `sward
 * run` would say. Between updates only names, sizes and times are looked at. Where the system tells of changes (inotify) a
 * look follows at once; without, or on a network drive, after `every_s`. */
#include "app/watch.h"

#include <poll.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>
#include <unistd.h>

#include "app/hook.h"
#include "app/notice.h"
#include "app/protocol.h"
#include "app/settle.h"
#include "app/told.h"
#include "io/json.h"

static void our_signals(sigset_t *s) {
    sigemptyset(s);
    sigaddset(s, SIGINT);
    sigaddset(s, SIGTERM);
}

status watch_block_signals(error *e) {
    sigset_t ours;
    our_signals(&ours);
    return sigprocmask(SIG_BLOCK, &ours, NULL) ? fail(e, ST_IO, "the signals that end a watch cannot be held back") : ST_OK;
}

/* Blocked signals stay pending: no handler, nothing to share with one. */
static int stop_asked(void) {
    sigset_t waiting;
    return !sigpending(&waiting) && (sigismember(&waiting, SIGINT) == 1 || sigismember(&waiting, SIGTERM) == 1);
}

static double clock_s(clockid_t which) {
    struct timespec t;
    clock_gettime(which, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

typedef struct {
    const watch_options *o;
    settle settle;
    stage stage;
    told told;
    notice notice;
    char done[65]; /* settle_digest of the last update */
    error said;    /* the last failure, not to be repeated at every look */
} watch;

static void utc_now(char out[32]) {
    time_t t = time(NULL);
    struct tm parts;
    out[0] = '\0';
    if (gmtime_r(&t, &parts)) strftime(out, 32, "%Y-%m-%dT%H:%M:%SZ", &parts);
}

static void say(const error *e) { fprintf(stderr, "sward watch: %s\n", e->text); }

static void print_verdict(const char *at, const run_verdict *v, const char *before) {
    textbuf t = { 0 };
    text_addf(&t, "%s  ", at);
    text_add_plain(&t, v->sample);
    text_addf(&t, "  %s", v->verdict);
    if (before) text_addf(&t, " (was %s)", before);
    if (v->reasons && *v->reasons) {
        text_add(&t, "  ");
        text_add_plain(&t, v->reasons);
    }
    if (t.s && !t.failed) printf("%s\n", t.s);
    fflush(stdout); /* main checks it */
    text_free(&t);
}

static status verdict_json(const watch *w, const run_verdict *v, const char *at, const char *before, textbuf *t, error *e) {
    const struct {
        const char *name, *value;
    } members[] = { { "sample", v->sample },       { "verdict", v->verdict }, { "previous_verdict", before },
                    { "reasons", v->reasons },     { "etched_at", v->etched_at }, { "at", at },
                    { "out", w->stage.out } };
    text_add(t, "{");
    for (size_t i = 0; i < sizeof members / sizeof members[0]; i++) {
        text_addf(t, "\"%s\": ", members[i].name);
        json_string(t, members[i].value);
        text_add(t, ", ");
    }
    text_addf(t, "\"row\": %s}\n", v->row_json ? v->row_json : "null");
    return text_check(t, "a verdict", e);
}

static status call_program(const watch *w, const run_verdict *v, const char *at, const char *before, error *e) {
    textbuf input = { 0 };
    error why = { 0 };
    const hook_variable variables[] = { { "SWARD_SAMPLE", v->sample },       { "SWARD_VERDICT", v->verdict },
                                        { "SWARD_PREVIOUS_VERDICT", before }, { "SWARD_REASONS", v->reasons },
                                        { "SWARD_ETCHED_AT", v->etched_at }, { "SWARD_OUT", w->stage.out } };
    status st = verdict_json(w, v, at, before, &input, e);
    if (st == ST_OK && hook_run(w->o->on_verdict, variables, sizeof variables / sizeof variables[0], input.s, input.n, w->o->verdict_s,
                                stop_asked, &why) != ST_OK)
        say(&why);
    text_free(&input);
    return st;
}

/* For run_hooks.verdict: everything is written by now. Remembered after the program has ended, so that a kill in between
 * makes it run twice rather than never. */
static status on_verdict(void *context, const run_verdict *v, error *e) {
    watch *w = context;
    const char *last = told_last(&w->told, v->sample);
    char at[32], before[32];
    if (stop_asked() || (last && !strcmp(last, v->verdict))) return ST_OK;
    snprintf(before, sizeof before, "%s", last ? last : "");
    utc_now(at);
    status st = w->o->on_verdict ? call_program(w, v, at, last ? before : NULL, e) : ST_OK;
    if (st == ST_OK) st = told_add(&w->told, at, v->sample, v->verdict, e);
    if (st == ST_OK && !w->o->run.quiet) print_verdict(at, v, last ? before : NULL);
    return st;
}

/* One run over what is complete. A failure is said; what time may heal is tried again. */
static int update(watch *w, const char *digest, int first) {
    run_options o = w->o->run;
    run_hooks hooks = { stop_asked, settle_admits, on_verdict, &w->settle, w, &w->stage };
    run_outcome outcome;
    error e = { 0 };
    o.quiet = !o.verbose;
    o.fresh = o.fresh && first;
    status st = run_folder(&o, &hooks, &outcome, &e);
    if (st != ST_OK && strcmp(e.text, w->said.text) != 0) say(&e);
    w->said = e;
    if (st == ST_OK && outcome.stopped) return 0;
    if (st == ST_OK || st == ST_BAD_INPUT) memcpy(w->done, digest, sizeof w->done);
    return st == ST_OK;
}

/* Until something happens, the time is over, or the watch is to end. A look right after a notice would see a file at its birth. */
static void wait_for_change(watch *w, double seconds) {
    enum { TICK_MS = 100, AFTER_NOTICE_MS = 200 };
    double until = clock_s(CLOCK_MONOTONIC) + seconds;
    while (!stop_asked() && clock_s(CLOCK_MONOTONIC) < until)
        if (notice_wait(&w->notice, TICK_MS)) {
            (void)poll(NULL, 0, AFTER_NOTICE_MS);
            return;
        }
}

static status loop(watch *w, error *e) {
    int first = 1, silent = 0;
    while (!stop_asked()) {
        error why = { 0 };
        char digest[65] = "";
        status st = settle_look(&w->settle, clock_s(CLOCK_MONOTONIC), clock_s(CLOCK_REALTIME), &why);
        if (st == ST_OK) st = settle_digest(&w->settle, digest, &why);
        if (st == ST_NO_MEMORY) return fail(e, st, "%s", why.text);
        if (st != ST_OK && !silent) say(&why); /* a drive that is away is said once */
        silent = st != ST_OK;
        size_t complete = w->settle.n - w->settle.n_waiting;
        int due = st == ST_OK && complete && !w->settle.hold && strcmp(digest, w->done) != 0;
        if (due && update(w, digest, first)) first = 0;
        int waiting = w->settle.n_waiting || w->settle.hold;
        if (st == ST_OK && !waiting && w->o->once && (!due || !strcmp(digest, w->done))) break;
        notice_folders(&w->notice, &w->settle);
        wait_for_change(w, waiting && w->o->every_s > SETTLE_QUIET_S ? SETTLE_QUIET_S : w->o->every_s);
    }
    return ST_OK;
}

/* What would be wrong with every update is wrong now. */
static status check_options(const watch_options *o, error *e) {
    protocol p = { 0 };
    const char *named = o->run.protocol;
    if (!folder_exists(o->run.folder))
        return fail(e, ST_BAD_INPUT, "'%s' is no folder; name the folder that the micrographs come to", o->run.folder);
    char *folder = realpath(o->run.folder, NULL), *out = realpath(run_out(&o->run), NULL);
    int same = folder && out && !strcmp(folder, out);
    free(folder);
    free(out);
    if (same) return fail(e, ST_BAD_INPUT, "the results would come into the watched folder itself; name another place with --out");
    if (o->on_verdict && (!file_exists(o->on_verdict) || access(o->on_verdict, X_OK)))
        return fail(e, ST_BAD_INPUT, "--on-verdict: '%s' is no program that can be run; name it with its path", o->on_verdict);
    char *beside = path_join(o->run.folder, "protocol.json");
    status st = ST_OK;
    if (named || (beside && file_exists(beside))) st = protocol_read(named ? named : beside, &p, e);
    free(beside);
    protocol_free(&p);
    return st;
}

status watch_folder(const watch_options *o, error *e) {
    watch w = { .o = o, .stage = STAGE_NONE, .notice = NOTICE_NONE };
    status st = check_options(o, e);
    if (st == ST_OK) st = stage_open(run_out(&o->run), &w.stage, e);
    if (st == ST_OK) st = told_open(w.stage.out, &w.told, e);
    if (st == ST_OK) st = settle_start(o->run.folder, o->patience_s, &w.settle, e);
    if (st == ST_OK) {
        notice_open(&w.notice);
        if (!o->run.quiet && isatty(STDERR_FILENO))
            fprintf(stderr, "Watching %s; results in %s. End with Ctrl-C.\n", o->run.folder, w.stage.out);
        st = loop(&w, e);
    }
    notice_close(&w.notice);
    settle_free(&w.settle);
    told_free(&w.told);
    stage_close(&w.stage);
    return st;
}
