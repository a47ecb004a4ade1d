/* The ledger at its limits, as JSON lines: 8 writers of 200 rows each, every row a transaction of its own, then whether anything is
 * double, lost or damaged; a ledger of 50 000 rows, read, listed and charted. Exits 1 when rows are missing. Never part of the tests
 * (tests/judge/history.c has fewer writers, tests/app/cmd_history.c fewer rows).
 *   sward_bench_ledger [WRITERS ROWS [MANY]] */
#include <sqlite3.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <time.h>
#include <unistd.h>

#include "app/control.h"
#include "app/history_verbs.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "judge/history.h"

static double now_s(void) {
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static char path[300];

static history_row row(const char *sample, const char *time, const char *json, double v) {
    return (history_row){ .sample = sample, .lot = "L1", .etched_at = time, .run_at = "2026-05-01T12:00:00Z", .fingerprint = "f",
                          .version = "bench", .protocol = "line 3", .spacing_nm = v, .spacing_nm_u = 6.0, .density_per_um2 = MISSING,
                          .size_d50_nm = MISSING, .weighted_reflectance = 0.02, .verdict = "conforms", .row_json = json };
}

/* One process; opens the ledger anew for every row, as runs do. */
static int write_rows(int writer, int n) {
    for (int i = 0; i < n; i++) {
        char sample[32];
        error e = { ST_OK, "" };
        history *h = NULL;
        size_t added = 0;
        snprintf(sample, sizeof sample, "W%d-%03d", writer, i);
        history_row r = row(sample, "2026-03-02T10:00:00Z", "{\"spacing_nm\": 350}", 350.0);
        status st = history_open(path, 0, &h, &e);
        if (st == ST_OK) st = history_add(h, &r, 1, &added, &e);
        if (st == ST_OK) st = history_add(h, &r, 1, &added, &e); /* the same again adds nothing */
        history_close(h);
        if (st != ST_OK || added != 0) {
            fprintf(stderr, "%s\n", e.text);
            return 1;
        }
    }
    return 0;
}

static int ask(const char *sql, char *out, size_t size) {
    sqlite3 *db = NULL;
    sqlite3_stmt *s = NULL;
    int ok = sqlite3_open_v2(path, &db, SQLITE_OPEN_READONLY, NULL) == SQLITE_OK && sqlite3_prepare_v2(db, sql, -1, &s, NULL) == SQLITE_OK &&
             sqlite3_step(s) == SQLITE_ROW;
    snprintf(out, size, "%s", ok ? (const char *)sqlite3_column_text(s, 0) : "?");
    sqlite3_finalize(s);
    sqlite3_close(db);
    return ok;
}

static int writers(int n, int rows) {
    double t0 = now_s();
    int failed = 0;
    char count[32], apart[32], whole[64];
    unlink(path);
    for (int w = 0; w < n; w++)
        if (fork() == 0) _exit(write_rows(w, rows));
    for (int w = 0, how = 0; w < n; w++) failed += wait(&how) < 0 || !WIFEXITED(how) || WEXITSTATUS(how) != 0;
    ask("SELECT count(*) FROM runs", count, sizeof count);
    ask("SELECT count(DISTINCT sample) FROM runs", apart, sizeof apart);
    ask("PRAGMA integrity_check", whole, sizeof whole);
    printf("{\"name\":\"writers\",\"writers\":%d,\"rows_each\":%d,\"rows\":%s,\"different\":%s,\"integrity\":\"%s\",\"failed\":%d,\"s\":%.3g}\n", n,
           rows, count, apart, whole, failed, now_s() - t0);
    return failed || atol(count) != (long)n * rows || atol(apart) != (long)n * rows || strcmp(whole, "ok") != 0;
}

static status fill(int n, error *e) {
    history *h = NULL;
    size_t added = 0;
    char(*text)[500] = mem_array((size_t)n, sizeof *text);
    history_row *rows = mem_array((size_t)n, sizeof *rows);
    char(*names)[2][32] = mem_array((size_t)n, sizeof *names);
    status st = text && rows && names ? ST_OK : ST_NO_MEMORY;
    for (int i = 0; st == ST_OK && i < n; i++) {
        double v = 350.0 + (double)((i * 7919) % 1000) / 100.0;
        int hour = i / 5;
        snprintf(names[i][0], 32, "S%06d", i);
        snprintf(names[i][1], 32, "%04d-%02d-%02dT%02d:00:00Z", 2020 + hour / 8064, hour / 672 % 12 + 1, hour / 24 % 28 + 1, hour % 24);
        snprintf(text[i], sizeof text[i],
                 "{\"sample\": \"%s\", \"lot\": \"L1\", \"etched_at\": \"%s\", \"n_images\": 3, \"n_used\": 3, \"spacing_nm\": %.2f, "
                 "\"spacing_nm_u\": 6.1, \"density_per_um2\": 9.4, \"density_per_um2_u\": 0.3, \"size_d50_nm\": 340.2, \"verdict\": "
                 "\"conforms\", \"verdict_reasons\": \"spacing_nm lies inside\", \"recipe\": \"%c\", \"etch_s\": \"%d\", \"power_W\": \"500\"}",
                 names[i][0], names[i][1], v, "AB"[i / 10000 % 2], 100 + i % 40);
        rows[i] = row(names[i][0], names[i][1], text[i], v);
    }
    unlink(path);
    if (st == ST_OK) st = history_open(path, 0, &h, e);
    if (st == ST_OK) st = history_add(h, rows, (size_t)n, &added, e);
    history_close(h);
    free(text);
    free(rows);
    free(names);
    return st;
}

static int many(int n) {
    error e = { ST_OK, "" };
    history *h = NULL;
    history_list l = { 0 };
    history_notes notes = { 0 };
    textbuf list = { 0 };
    control c = { 0 };
    double t[4] = { 0 };
    status st = fill(n, &e);
    t[0] = now_s();
    if (st == ST_OK) st = history_open(path, 1, &h, &e);
    if (st == ST_OK) st = history_select(h, &(history_filter){ .heads_only = 1 }, &l, &e);
    if (st == ST_OK) st = history_print(&l, FORM_TEXT, &list, &e);
    history_list_free(&l);
    t[1] = now_s();
    if (st == ST_OK) st = history_read(h, NULL, NULL, &l, &e);
    t[2] = now_s();
    control_question q = control_defaults(&l, &notes);
    if (st == ST_OK) st = control_make(&q, &c, &e);
    t[3] = now_s();
    printf("{\"name\":\"many\",\"rows\":%zu,\"list_s\":%.3g,\"chart_s\":%.3g,\"of_it_reading_s\":%.3g}\n", l.n, t[1] - t[0], t[3] - t[1], t[2] - t[1]);
    if (st != ST_OK) fprintf(stderr, "%s\n", e.text);
    control_free(&c);
    text_free(&list);
    history_list_free(&l);
    history_close(h);
    return st != ST_OK;
}

int main(int argc, char **argv) {
    const char *tmp = getenv("TMPDIR");
    snprintf(path, sizeof path, "%s/sward-bench-%ld.sqlite", tmp ? tmp : "/tmp", (long)getpid());
    int bad = writers(argc > 2 ? (int)strtol(argv[1], NULL, 10) : 8, argc > 2 ? (int)strtol(argv[2], NULL, 10) : 200);
    bad |= many(argc > 3 ? (int)strtol(argv[3], NULL, 10) : 50000);
    unlink(path);
    return bad;
}
