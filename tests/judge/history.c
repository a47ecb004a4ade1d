/* The ledger: idempotent, ordered, filtered, odd text, missing numbers, two writers at once, foreign files. */
#include "judge/history.h"

#include <sqlite3.h>
#include <stdlib.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "base/text.h"
#include "check.h"

static char folder[300]; /* absolute, beside the test */

static const char *in_folder(const char *name) {
    static char path[400];
    snprintf(path, sizeof path, "%s/%s", folder, name);
    return path;
}

static history_row row(const char *sample, const char *etched_at, const char *fingerprint) {
    return (history_row){ .sample = sample, .lot = "L1", .wafer = "", .etched_at = etched_at,
                          .run_at = "2026-05-01T12:00:00Z", .fingerprint = fingerprint, .version = "0.1.0",
                          .protocol = "line 3", .spacing_nm = 351.25, .spacing_nm_u = 8.125, .density_per_um2 = 9.4,
                          .size_d50_nm = MISSING, .weighted_reflectance = 0.0183, .verdict = "conforms",
                          .row_json = "{}" };
}

static void round_trip(void) {
    error e = { 0 };
    history *h = NULL;
    CHECK(history_open(in_folder("a.sqlite"), 0, &h, &e) == ST_OK);
    history_row rows[4] = { row("b", "2026-03-02T10:00:00Z", "f1"), row("a", "2026-03-02T10:00:00Z", "f1"),
                            row("O'Brien \"x\"; DROP TABLE runs --", "2026-03-02T11:30:00+02:00", "f1"),
                            row("\xce\xbc-probe \xe2\x88\x85", "", "f1") };
    rows[1].lot = "L2";
    rows[2].spacing_nm = (double)INFINITY; /* not a number of the ledger: missing */
    rows[3].row_json = "{\"sample\":\"\xce\xbc\",\"note\":\"line\\nbreak\"}";
    rows[3].wafer = NULL;
    size_t added = 9;
    CHECK(history_add(h, rows, 4, &added, &e) == ST_OK && added == 4);
    CHECK(history_add(h, rows, 4, &added, &e) == ST_OK && added == 0); /* the same run again */
    rows[0].fingerprint = "f2";
    rows[0].run_at = "2026-05-02T12:00:00Z";
    CHECK(history_add(h, rows, 4, &added, &e) == ST_OK && added == 1);
    CHECK(history_add(h, NULL, 0, &added, &e) == ST_OK && added == 0);
    history_close(h);

    CHECK(history_open(in_folder("a.sqlite"), 1, &h, &e) == ST_OK);
    history_list l = { 0 };
    CHECK(history_read(h, NULL, NULL, &l, &e) == ST_OK && l.n == 5);
    if (l.n == 5) {
        CHECK(!strcmp(l.rows[0].sample, "O'Brien \"x\"; DROP TABLE runs --")); /* 09:30 UTC */
        CHECK(isnan(l.rows[0].spacing_nm));
        CHECK(!strcmp(l.rows[1].sample, "a") && !strcmp(l.rows[2].sample, "b") && !strcmp(l.rows[3].sample, "b"));
        CHECK(!strcmp(l.rows[2].fingerprint, "f1") && !strcmp(l.rows[3].fingerprint, "f2"));
        CHECK(!strcmp(l.rows[4].sample, "\xce\xbc-probe \xe2\x88\x85") && !strcmp(l.rows[4].wafer, ""));
        CHECK(!strcmp(l.rows[4].row_json, "{\"sample\":\"\xce\xbc\",\"note\":\"line\\nbreak\"}"));
        CHECK_NEAR(l.rows[1].spacing_nm, 351.25, 0.0);
        CHECK_NEAR(l.rows[1].spacing_nm_u, 8.125, 0.0);
        CHECK_NEAR(l.rows[1].weighted_reflectance, 0.0183, 0.0);
        CHECK(isnan(l.rows[1].size_d50_nm) && !strcmp(l.rows[1].verdict, "conforms"));
        CHECK(!strcmp(l.rows[1].version, "0.1.0") && !strcmp(l.rows[1].protocol, "line 3"));
        CHECK(!strcmp(l.rows[1].etched_at, "2026-03-02T10:00:00Z"));
        CHECK(!strcmp(l.rows[1].run_at, "2026-05-01T12:00:00Z"));
    }
    history_list_free(&l);
    CHECK(history_read(h, NULL, "L2", &l, &e) == ST_OK && l.n == 1 && !strcmp(l.rows[0].sample, "a"));
    history_list_free(&l);
    CHECK(history_read(h, "2026-03-02T09:45:00Z", NULL, &l, &e) == ST_OK && l.n == 4);
    history_list_free(&l);
    CHECK(history_read(h, "2026-03-02", "L1", &l, &e) == ST_OK && l.n == 4);
    history_list_free(&l);
    CHECK(history_read(h, "2027-01-01", NULL, &l, &e) == ST_OK && l.n == 0);
    history_list_free(&l);
    history_list_free(&l); /* {0} is fine */
    CHECK_FAILS(history_read(h, "yesterday", NULL, &l, &e), ST_BAD_INPUT, e, "expected a date");
    CHECK_FAILS(history_read(h, "2026-13-45", NULL, &l, &e), ST_BAD_INPUT, e, "expected a date");
    CHECK_FAILS(history_add(h, rows, 1, &added, &e), ST_IO, e, "may be written");
    history_close(h);
    history_close(NULL);
}

static void refuse(const char *name, const char *bytes, const char *words) {
    error e = { 0 };
    history *h = NULL;
    FILE *f = fopen(in_folder(name), "wb");
    if (f) {
        fputs(bytes, f);
        fclose(f);
    }
    CHECK(history_open(in_folder(name), 0, &h, &e) == ST_IO && strstr(e.text, words));
    CHECK(h == NULL);
    struct stat s;
    CHECK(stat(in_folder(name), &s) == 0 && s.st_size == (off_t)strlen(bytes)); /* left alone */
}

static void foreign_sql(const char *name, const char *sql, const char *words) {
    error e = { 0 };
    history *h = NULL;
    sqlite3 *db = NULL;
    CHECK(sqlite3_open(in_folder(name), &db) == SQLITE_OK && sqlite3_exec(db, sql, NULL, NULL, NULL) == SQLITE_OK);
    sqlite3_close(db);
    CHECK(history_open(in_folder(name), 0, &h, &e) == ST_IO && strstr(e.text, words));
}

static void foreign(void) {
    error e = { 0 };
    history *h = NULL;
    refuse("notes.txt", "spacing was about 350 nm on Tuesday, ask the night shift about the other wafer, said the note "
                        "on the door of the lab", "not a ledger of this program");
    foreign_sql("other.sqlite", "CREATE TABLE t(x)", "database of another program");
    foreign_sql("app.sqlite", "PRAGMA application_id = 7; CREATE TABLE t(x)", "database of another program");
    foreign_sql("newer.sqlite", "PRAGMA application_id = 1398231620; PRAGMA user_version = 99; CREATE TABLE t(x)",
                "newer version");
    CHECK_FAILS(history_open(in_folder("absent.sqlite"), 1, &h, &e), ST_IO, e, "no such file");
    CHECK(access(in_folder("absent.sqlite"), F_OK) != 0); /* looking does not create */
    CHECK_FAILS(history_open(in_folder("none/a.sqlite"), 0, &h, &e), ST_IO, e, "check that the folder exists");
    CHECK_FAILS(history_open("", 0, &h, &e), ST_IO, e, "no file name");
    CHECK_FAILS(history_open(folder, 0, &h, &e), ST_IO, e, "check that the folder exists"); /* a folder */
    FILE *f = fopen(in_folder("empty.sqlite"), "wb");
    if (f) fclose(f);
    CHECK_FAILS(history_open(in_folder("empty.sqlite"), 1, &h, &e), ST_IO, e, "empty");
    CHECK(history_open(in_folder("empty.sqlite"), 0, &h, &e) == ST_OK); /* an empty file may become a ledger */
    history_close(h);
}

/* A name that SQLite would take for a database in memory is a file here. */
static void odd_name(void) {
    error e = { 0 };
    history *h = NULL;
    char home[400];
    CHECK(getcwd(home, sizeof home) && chdir(folder) == 0);
    CHECK(history_open(":memory:", 0, &h, &e) == ST_OK && access(in_folder(":memory:"), F_OK) == 0);
    history_close(h);
    CHECK(chdir(home) == 0);
}

static int write_many(const char *path, int who, int batches) {
    error e = { 0 };
    history *h = NULL;
    size_t added = 0;
    if (history_open(path, 0, &h, &e) != ST_OK) return 1;
    for (int i = 0; i < batches; i++) {
        char own[20], common[20];
        snprintf(own, sizeof own, "own-%d-%d", who, i);
        snprintf(common, sizeof common, "common-%d", i);
        history_row rows[2] = { row(own, "2026-03-02", "f"), row(common, "2026-03-03", "f") };
        if (history_add(h, rows, 2, &added, &e) != ST_OK) {
            printf("writer %d: %s\n", who, e.text);
            history_close(h);
            return 1;
        }
    }
    history_close(h);
    return 0;
}

/* The first cell of an answer. */
static const char *asked(const char *path, const char *sql) {
    static char answer[200];
    sqlite3 *db = NULL;
    sqlite3_stmt *s = NULL;
    answer[0] = '\0';
    if (sqlite3_open_v2(path, &db, SQLITE_OPEN_READONLY, NULL) == SQLITE_OK && sqlite3_prepare_v2(db, sql, -1, &s, NULL) == SQLITE_OK &&
        sqlite3_step(s) == SQLITE_ROW && sqlite3_column_text(s, 0))
        snprintf(answer, sizeof answer, "%s", (const char *)sqlite3_column_text(s, 0));
    else printf("%s: %s\n", sql, sqlite3_errmsg(db));
    sqlite3_finalize(s);
    sqlite3_close(db);
    return answer;
}

/* All find no ledger and make it; each batch holds a row of their own and one they have in common. 8 writers of 200 rows: tests/bench/ledger.c. */
enum { WRITERS = 4 };
static void many_writers(int batches) {
    char path[400];
    snprintf(path, sizeof path, "%s", in_folder("shared.sqlite"));
    fflush(stdout);
    pid_t child[WRITERS];
    for (int w = 0; w < WRITERS; w++) {
        child[w] = fork();
        if (child[w] == 0) {
            int bad = write_many(path, w, batches);
            fflush(stdout);
            _exit(bad);
        }
    }
    for (int w = 0; w < WRITERS; w++) {
        int how = -1;
        CHECK(waitpid(child[w], &how, 0) == child[w] && WIFEXITED(how) && WEXITSTATUS(how) == 0);
    }
    error e = { 0 };
    history *h = NULL;
    history_list l = { 0 };
    CHECK(history_open(path, 1, &h, &e) == ST_OK && history_read(h, NULL, NULL, &l, &e) == ST_OK);
    CHECK(l.n == (WRITERS + 1) * (size_t)batches);
    CHECK(!strcmp(asked(path, "PRAGMA integrity_check"), "ok"));
    history_list_free(&l);
    history_close(h);
    unlink(path);
}

static void locked(void) {
    error e = { 0 };
    history *h = NULL;
    size_t added = 0;
    history_row r = row("late", "2026-03-09", "f");
    sqlite3 *db = NULL;
    CHECK(history_open(in_folder("a.sqlite"), 0, &h, &e) == ST_OK);
    CHECK(sqlite3_open(in_folder("a.sqlite"), &db) == SQLITE_OK);
    CHECK(sqlite3_exec(db, "BEGIN IMMEDIATE", NULL, NULL, NULL) == SQLITE_OK);
    history_set_wait(h, 20);
    CHECK_FAILS(history_add(h, &r, 1, &added, &e), ST_IO, e, "kept it locked");
    sqlite3_close(db);
    CHECK(history_add(h, &r, 1, &added, &e) == ST_OK && added == 1); /* nothing is stuck afterwards */
    history_close(h);
}

/* Root may write anywhere, so the child becomes nobody first. */
static void read_only_folder(void) {
    char path[450], locked_up[400];
    snprintf(locked_up, sizeof locked_up, "%s", in_folder("sealed"));
    snprintf(path, sizeof path, "%s/h.sqlite", locked_up);
    CHECK(mkdir(locked_up, 0700) == 0 && chmod(locked_up, 0555) == 0 && chmod(folder, 0755) == 0);
    fflush(stdout);
    pid_t child = fork();
    if (child == 0) {
        error e = { 0 };
        history *h = NULL;
        if (geteuid() == 0 && setuid(65534) != 0) _exit(3);
        _exit(history_open(path, 0, &h, &e) == ST_IO && strstr(e.text, "may be written") ? 0 : 1);
    }
    int how = -1;
    CHECK(waitpid(child, &how, 0) == child && WIFEXITED(how) && WEXITSTATUS(how) == 0);
    chmod(locked_up, 0755);
}

static void no_memory(void) {
    char path[400];
    snprintf(path, sizeof path, "%s", in_folder("a.sqlite"));
    for (size_t n = 1; n < 12; n++) {
        error e = { 0 };
        history *h = NULL;
        history_list l = { 0 };
        mem_fail_after(n);
        status st = history_open(path, 1, &h, &e);
        if (st == ST_OK) st = history_read(h, NULL, NULL, &l, &e);
        mem_fail_after(0);
        CHECK(st == ST_OK ? l.n == 6 : st == ST_NO_MEMORY && e.text[0] && l.n == 0);
        history_list_free(&l);
        history_close(h);
    }
}

/* A ledger of the first version, as it was written: read as it is, brought up to date for writing, nothing lost. */
static void older(void) {
    static const char first[] =
        "CREATE TABLE runs(id INTEGER PRIMARY KEY, sample TEXT NOT NULL, lot TEXT NOT NULL, wafer TEXT NOT NULL,"
        " etched_at TEXT NOT NULL, run_at TEXT NOT NULL, fingerprint TEXT NOT NULL, version TEXT NOT NULL, protocol TEXT NOT"
        " NULL, spacing_nm REAL, spacing_nm_u REAL, density_per_um2 REAL, size_d50_nm REAL, weighted_reflectance REAL,"
        " verdict TEXT NOT NULL, row_json TEXT NOT NULL, UNIQUE(sample, fingerprint));"
        "INSERT INTO runs VALUES(1, 'old', 'L0', '', '2026-01-05T08:00:00Z', '2026-01-05T12:00:00Z', 'f0', '0.1.0', 'p',"
        " 340.5, 7, 9, 300, 0.02, 'conforms', '{}');"
        "PRAGMA application_id = 1398231620; PRAGMA user_version = 1;";
    error e = { 0 };
    sqlite3 *db = NULL;
    history *h = NULL, *second = NULL;
    history_list l = { 0 };
    history_notes n = { 0 };
    size_t added = 0;
    CHECK(sqlite3_open(in_folder("older.sqlite"), &db) == SQLITE_OK && sqlite3_exec(db, first, NULL, NULL, NULL) == SQLITE_OK);
    sqlite3_close(db);
    CHECK(history_open(in_folder("older.sqlite"), 1, &h, &e) == ST_OK); /* looking changes nothing */
    CHECK(history_read(h, NULL, NULL, &l, &e) == ST_OK && l.n == 1 && !strcmp(l.rows[0].excluded, ""));
    CHECK(history_notes_read(h, &n, &e) == ST_OK && n.n == 0);
    history_list_free(&l);
    history_close(h);
    CHECK(history_open(in_folder("older.sqlite"), 0, &h, &e) == ST_OK);
    CHECK(history_open(in_folder("older.sqlite"), 0, &second, &e) == ST_OK); /* the second finds it done */
    history_row more = row("new", "2026-03-02T10:00:00Z", "f1");
    history_note note = { .at = "2026-02-01", .text = "chamber clean", .kind = "change", .initials = "AB" };
    CHECK(history_add(h, &more, 1, &added, &e) == ST_OK && added == 1);
    CHECK(history_note_add(second, &note, &e) == ST_OK);
    CHECK(history_read(h, NULL, NULL, &l, &e) == ST_OK && l.n == 2 && !strcmp(l.rows[0].sample, "old"));
    if (l.n == 2) {
        CHECK_NEAR(l.rows[0].spacing_nm, 340.5, 0.0);
        CHECK_NEAR(l.rows[1].day - l.rows[0].day, 56.0 + 2.0 / 24.0, 1e-6);
    }
    CHECK(history_notes_read(h, &n, &e) == ST_OK && n.n == 1 && !strcmp(n.notes[0].text, "chamber clean"));
    history_notes_free(&n);
    history_list_free(&l);
    history_close(h);
    history_close(second);
}

/* A ledger of the second version, with a note and an exclusion in it. */
static void second(void) {
    static const char sql[] =
        "CREATE TABLE runs(id INTEGER PRIMARY KEY, sample TEXT NOT NULL, lot TEXT NOT NULL, wafer TEXT NOT NULL,"
        " etched_at TEXT NOT NULL, run_at TEXT NOT NULL, fingerprint TEXT NOT NULL, version TEXT NOT NULL, protocol TEXT NOT"
        " NULL, spacing_nm REAL, spacing_nm_u REAL, density_per_um2 REAL, size_d50_nm REAL, weighted_reflectance REAL,"
        " verdict TEXT NOT NULL, row_json TEXT NOT NULL, UNIQUE(sample, fingerprint));"
        "CREATE TABLE notes(id INTEGER PRIMARY KEY, at TEXT NOT NULL, text TEXT NOT NULL, kind TEXT NOT NULL, initials TEXT NOT NULL);"
        "CREATE TABLE exclusions(id INTEGER PRIMARY KEY, sample TEXT NOT NULL, etched_at TEXT NOT NULL, fingerprint TEXT NOT NULL,"
        " excluded INTEGER NOT NULL, reason TEXT NOT NULL, initials TEXT NOT NULL, at TEXT NOT NULL);"
        "INSERT INTO runs VALUES(1, 'b', 'L0', '', '', '2026-01-06T12:00:00Z', 'f0', '0.1.0', 'p', 340.5, 7, 9, 300, 0.02,"
        " 'conforms', '{\"spacing_nm\": 340.5, \"spacing_nm_u\": 7, \"gas\": \"CF4\"}');"
        "INSERT INTO runs VALUES(2, 'a', 'L0', '', '2026-01-05T08:00:00Z', '2026-01-05T12:00:00Z', 'f0', '0.1.0', 'p',"
        " 341.5, 7, 9, 300, NULL, 'fails', '{}');"
        "INSERT INTO exclusions VALUES(1, 'a', '2026-01-05T08:00:00Z', 'f0', 1, 'odd', 'KL', '2026-01-07');"
        "PRAGMA application_id = 1398231620; PRAGMA user_version = 2;";
    error e = { 0 };
    sqlite3 *db = NULL;
    history *h = NULL;
    history_list l = { 0 };
    char path[400];
    snprintf(path, sizeof path, "%s", in_folder("second.sqlite"));
    CHECK(sqlite3_open(path, &db) == SQLITE_OK && sqlite3_exec(db, sql, NULL, NULL, NULL) == SQLITE_OK);
    sqlite3_close(db);
    for (int write = 0; write < 2; write++) { /* read as it is; brought up to date; the same rows */
        CHECK(history_open(path, !write, &h, &e) == ST_OK && history_read(h, NULL, NULL, &l, &e) == ST_OK && l.n == 2);
        if (l.n == 2) {
            CHECK(!strcmp(l.rows[0].sample, "a") && !strcmp(l.rows[0].excluded, "odd (KL)") && !strcmp(l.rows[1].excluded, ""));
            CHECK(!strcmp(l.rows[1].position, "") && !strcmp(l.rows[1].protocol_sha256, "") && !strcmp(l.rows[1].folder, ""));
            CHECK_NEAR(l.rows[1].day - l.rows[0].day, 1.0 + 4.0 / 24.0, 1e-6);
        }
        history_list_free(&l);
        CHECK(history_select(h, &(history_filter){ .protocol = "p", .until = "2026-01-05T09:00:00Z" }, &l, &e) == ST_OK && l.n == 1);
        history_list_free(&l);
        history_close(h);
        CHECK(!strcmp(asked(path, "PRAGMA user_version"), write ? "3" : "2"));
    }
    CHECK(!strcmp(asked(path, "SELECT group_concat(quantity || '=' || value || '/' || coalesce(u, '-')) FROM quantities"),
                  "spacing_nm=340.5/7,gas=CF4/-"));
    CHECK(!strcmp(asked(path, "PRAGMA integrity_check"), "ok"));
}

static status note_file(const char *at, const history_micrograph *m, void *user, error *e) {
    textbuf *t = user;
    (void)e;
    text_addf(t, "%s/%s %.4s %s %g;", at, m->file, m->sha256, m->px_source, m->px_nm);
    return ST_OK;
}

/* Where a row comes from, which rows are chosen, and the only way out. */
static void origins(void) {
    static const history_micrograph files[] = { { "a_1.tif", "abcd0123", "tiff", 8.25, 1 }, { "a_2.tif", "beef4567", "sheet", 8.5, 0 } };
    error e = { 0 };
    history *h = NULL;
    history_list l = { 0 };
    textbuf t = { 0 };
    size_t added = 0, n = 0;
    char path[400];
    snprintf(path, sizeof path, "%s", in_folder("origins.sqlite"));
    history_row rows[3] = { row("a", "2026-03-02T10:00:00Z", "f1"), row("a", "2026-03-02T10:00:00Z", "f2"), row("b", "2026-03-04", "f1") };
    for (size_t i = 0; i < 3; i++) {
        rows[i].position = "edge";
        rows[i].protocol_sha256 = i == 1 ? "99aa" : "77bb";
        rows[i].protocol = i == 1 ? "new" : "old";
        rows[i].folder = "/data";
        rows[i].run_at = i == 1 ? "2026-05-02T12:00:00Z" : "2026-05-01T12:00:00Z";
        rows[i].micrographs = files;
        rows[i].n_micrographs = 2;
    }
    CHECK(history_open(path, 0, &h, &e) == ST_OK && history_add(h, rows, 3, &added, &e) == ST_OK && added == 3);
    CHECK(history_add(h, rows, 3, &added, &e) == ST_OK && added == 0);
    CHECK(!strcmp(asked(path, "SELECT count(*) FROM micrographs"), "6")); /* none twice */
    CHECK(history_select(h, &(history_filter){ .protocol = "77" }, &l, &e) == ST_OK && l.n == 2); /* the beginning of a digest */
    if (l.n == 2) CHECK(!strcmp(l.rows[0].position, "edge") && !strcmp(l.rows[0].folder, "/data") && !strcmp(l.rows[0].protocol_sha256, "77bb"));
    history_list_free(&l);
    CHECK(history_select(h, &(history_filter){ .protocol = "new", .heads_only = 1 }, &l, &e) == ST_OK && l.n == 1 && !l.rows[0].row_json[0]);
    history_list_free(&l);
    CHECK(history_select(h, &(history_filter){ .until = "2026-03-03" }, &l, &e) == ST_OK && l.n == 2);
    history_list_free(&l);
    CHECK_FAILS(history_select(h, &(history_filter){ .until = "soon" }, &l, &e), ST_BAD_INPUT, e, "history until 'soon'");
    CHECK(history_micrographs(h, &(history_filter){ 0 }, note_file, &t, &e) == ST_OK && t.s &&
          !strcmp(t.s, "/data/a_1.tif abcd tiff 8.25;/data/a_2.tif beef sheet 8.5;"));
    text_free(&t);

    CHECK_FAILS(history_prune(h, &(history_prunable){ 0 }, "why", "KL", "2026-06-01", 1, &n, &e), ST_BAD_INPUT, e, "say what may go");
    CHECK_FAILS(history_prune(h, &(history_prunable){ .superseded = 1 }, "", "KL", "2026-06-01", 1, &n, &e), ST_BAD_INPUT, e, "a reason");
    CHECK_FAILS(history_prune(h, &(history_prunable){ .superseded = 1 }, "why", NULL, "2026-06-01", 1, &n, &e), ST_BAD_INPUT, e, "initials");
    CHECK_FAILS(history_prune(h, &(history_prunable){ .before = "then" }, "why", "KL", "2026-06-01", 1, &n, &e), ST_BAD_INPUT, e, "before 'then'");
    e = (error){ 0 };
    CHECK(history_prune(h, &(history_prunable){ .superseded = 1 }, NULL, NULL, "2026-06-01", 0, &n, &e) == ST_OK && n == 1);
    CHECK(!strcmp(asked(path, "SELECT count(*) FROM runs"), "3")); /* only said */
    CHECK(history_prune(h, &(history_prunable){ .superseded = 1 }, "disk", "KL", "2026-06-01", 1, &n, &e) == ST_OK && n == 1);
    CHECK(!strcmp(asked(path, "SELECT group_concat(fingerprint) FROM (SELECT fingerprint FROM runs ORDER BY sample)"), "f2,f1"));
    CHECK(!strcmp(asked(path, "SELECT count(*) FROM micrographs"), "4"));
    CHECK(!strcmp(asked(path, "SELECT criteria || rows || reason || initials FROM prunings"), "superseded; 1diskKL"));
    CHECK(history_prune(h, &(history_prunable){ .before = "2026-03-03", .lot = "L2" }, "x", "KL", "2026-06-01", 1, &n, &e) == ST_OK && n == 0);
    CHECK(history_prune(h, &(history_prunable){ .before = "2026-03-03", .lot = "L1", .protocol = "new" }, "x", "KL", "2026-06-01", 1, &n, &e) == ST_OK && n == 1);
    history_close(h);
    CHECK(history_open(path, 1, &h, &e) == ST_OK);
    CHECK_FAILS(history_prune(h, &(history_prunable){ .lot = "L1" }, "x", "KL", "2026-06-01", 1, &n, &e), ST_IO, e, "written");
    history_close(h);
    CHECK(!strcmp(asked(path, "SELECT count(*) FROM runs"), "1"));
}

static void people(void) {
    error e = { 0 };
    history *h = NULL;
    history_list l = { 0 };
    history_notes n = { 0 };
    size_t added = 0;
    CHECK(history_open(in_folder("people.sqlite"), 0, &h, &e) == ST_OK);
    history_row rows[4] = { row("a", "2026-03-02T10:00:00Z", "f1"), row("b", "2026-03-03T10:00:00Z", "f1"),
                            row("b", "2026-03-04T10:00:00Z", "f2"), row("a", "2026-03-02T10:00:00Z", "f9") };
    CHECK(history_add(h, rows, 3, &added, &e) == ST_OK && added == 3);
    CHECK(history_exclude(h, "a", NULL, 1, "lamp failed", "KL", "2026-03-05T00:00:00Z", &e) == ST_OK);
    CHECK(history_exclude(h, "b", "2026-03-04T11:00:00+01:00", 1, "wrong gas", "KL", "2026-03-05T00:00:00Z", &e) == ST_OK);
    CHECK(history_add(h, &rows[3], 1, &added, &e) == ST_OK && added == 1); /* measured again: still out */
    CHECK(history_read(h, NULL, NULL, &l, &e) == ST_OK && l.n == 4);
    if (l.n == 4) {
        CHECK(!strcmp(l.rows[0].excluded, "lamp failed (KL)") && !strcmp(l.rows[1].excluded, "lamp failed (KL)"));
        CHECK(!strcmp(l.rows[2].excluded, "") && !strcmp(l.rows[3].excluded, "wrong gas (KL)"));
    }
    history_list_free(&l);
    CHECK(history_exclude(h, "a", NULL, 0, "the lamp was fine", "MN", "2026-03-06T00:00:00Z", &e) == ST_OK);
    CHECK(history_read(h, NULL, NULL, &l, &e) == ST_OK && l.n == 4 && !strcmp(l.rows[0].excluded, ""));
    history_list_free(&l);
    CHECK_FAILS(history_exclude(h, "a", NULL, 1, " ", "KL", "", &e), ST_BAD_INPUT, e, "needs a reason");
    CHECK_FAILS(history_exclude(h, "a", NULL, 1, "x", "", "", &e), ST_BAD_INPUT, e, "initials");
    CHECK_FAILS(history_exclude(h, "c", NULL, 1, "x", "K", "", &e), ST_BAD_INPUT, e, "no sample 'c'");
    CHECK_FAILS(history_exclude(h, "a", "2026-03-09", 1, "x", "K", "", &e), ST_BAD_INPUT, e, "etched at 2026-03-09");
    CHECK_FAILS(history_exclude(h, "b", NULL, 1, "x", "K", "", &e), ST_BAD_INPUT, e, "at 2 times");
    history_note note = { .at = "2026-03-09T08:00:00Z", .text = "new bath", .kind = "change", .initials = "" };
    CHECK(history_note_add(h, &note, &e) == ST_OK);
    note = (history_note){ .at = "2026-03-01T08:00:00+02:00", .text = "cold \"day\"; --", .kind = "remark", .initials = "KL" };
    CHECK(history_note_add(h, &note, &e) == ST_OK);
    CHECK(history_notes_read(h, &n, &e) == ST_OK && n.n == 2);
    if (n.n == 2)
        CHECK(!strcmp(n.notes[0].text, "cold \"day\"; --") && !strcmp(n.notes[1].kind, "change") && n.notes[0].day < n.notes[1].day);
    history_notes_free(&n);
    history_notes_free(&n);
    note.text = "";
    CHECK_FAILS(history_note_add(h, &note, &e), ST_BAD_INPUT, e, "needs a text");
    note.text = "x";
    note.kind = "party";
    CHECK_FAILS(history_note_add(h, &note, &e), ST_BAD_INPUT, e, "not 'party'");
    note.kind = "change";
    note.at = "yesterday";
    CHECK_FAILS(history_note_add(h, &note, &e), ST_BAD_INPUT, e, "expected a date");
    for (size_t k = 1; k <= 3; k++) {
        mem_fail_after(k);
        CHECK_FAILS(history_notes_read(h, &n, &e), ST_NO_MEMORY, e, "not enough memory");
        mem_fail_after(0);
    }
    mem_fail_after(1);
    CHECK_FAILS(history_exclude(h, "a", NULL, 1, "x", "K", "", &e), ST_NO_MEMORY, e, "not enough memory");
    mem_fail_after(0);
    history_close(h);
    CHECK(history_open(in_folder("people.sqlite"), 1, &h, &e) == ST_OK);
    note.at = "2026-03-09";
    CHECK_FAILS(history_note_add(h, &note, &e), ST_IO, e, "may be written");
    CHECK_FAILS(history_exclude(h, "a", NULL, 1, "x", "K", "", &e), ST_IO, e, "may be written");
    history_close(h);
}

int main(void) {
    char home[250];
    if (!getcwd(home, sizeof home)) return 1;
    snprintf(folder, sizeof folder, "%s/history-XXXXXX", home);
    if (!mkdtemp(folder)) return 1;
    round_trip();
    foreign();
    odd_name();
    for (int turn = 0; turn < 12; turn++) many_writers(1);
    many_writers(12);
    locked();
    read_only_folder();
    no_memory();
    older();
    second();
    origins();
    people();
    static const char *const made[] = { "a.sqlite", "notes.txt", "other.sqlite", "app.sqlite", "newer.sqlite", "older.sqlite", "people.sqlite", "second.sqlite", "origins.sqlite",
                                        "empty.sqlite", ":memory:" };
    for (size_t i = 0; i < sizeof made / sizeof made[0]; i++) unlink(in_folder(made[i]));
    rmdir(in_folder("sealed"));
    CHECK(rmdir(folder) == 0); /* no journal or other left-over */
    return check_done();
}
