/* The ledger: one SQLite file, one row per sample and run; the view `quantities` shows it as one row per sample, quantity and run.
 *
 * Safety: the classical rollback journal (a write-ahead log needs shared memory, which network drives do not give),
 * one BEGIN IMMEDIATE per batch of rows, up to two minutes of waiting, and UNIQUE(sample, fingerprint), so that several
 * writers may add the same run at the same time and it is there once. application_id and user_version mark the file
 * as ours; anything else is refused, never altered.
 * Missing numbers are NULL in the file and NAN outside. Times are compared as points in time (SQLite julianday), so
 * that time zones do not disturb the order; a row without etched_at stands at its run_at.
 * What this file does not do: charts and capability, which read a history_list. */
#include "judge/history_priv.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>
#include <unistd.h>

#include "base/mem.h"
#include "base/text.h"

enum { LEDGER_ID = 0x53575244 /* "SWRD" */, LEDGER_VERSION = 3, WAIT_MS = 120000 };

static const char schema[] =
    "CREATE TABLE runs("
    " id INTEGER PRIMARY KEY,"
    " sample TEXT NOT NULL, lot TEXT NOT NULL, wafer TEXT NOT NULL, etched_at TEXT NOT NULL, run_at TEXT NOT NULL,"
    " fingerprint TEXT NOT NULL, version TEXT NOT NULL, protocol TEXT NOT NULL,"
    " spacing_nm REAL, spacing_nm_u REAL, density_per_um2 REAL, size_d50_nm REAL, weighted_reflectance REAL,"
    " verdict TEXT NOT NULL, row_json TEXT NOT NULL,"
    " UNIQUE(sample, fingerprint));"
    "PRAGMA application_id = 1398231620;"; /* LEDGER_ID */

/* Version 2 added what people say: notes and exclusions, both only ever appended to. */
static const char second_version[] =
    "CREATE TABLE notes("
    " id INTEGER PRIMARY KEY, at TEXT NOT NULL, text TEXT NOT NULL, kind TEXT NOT NULL, initials TEXT NOT NULL);"
    "CREATE TABLE exclusions("
    " id INTEGER PRIMARY KEY, sample TEXT NOT NULL, etched_at TEXT NOT NULL, fingerprint TEXT NOT NULL,"
    " excluded INTEGER NOT NULL, reason TEXT NOT NULL, initials TEXT NOT NULL, at TEXT NOT NULL);"
    "PRAGMA user_version = 2;";

/* Version 3 added where a row comes from (position, protocol, micrographs), the point in time it stands at, so that 50 000 rows come
 * out in order without sorting, and a record of what was deleted. */
static const char third_version[] =
    "ALTER TABLE runs ADD COLUMN position TEXT NOT NULL DEFAULT '';"
    "ALTER TABLE runs ADD COLUMN protocol_sha256 TEXT NOT NULL DEFAULT '';"
    "ALTER TABLE runs ADD COLUMN folder TEXT NOT NULL DEFAULT '';"
    "ALTER TABLE runs ADD COLUMN day REAL;"
    "UPDATE runs SET day = coalesce(julianday(nullif(etched_at, '')), julianday(run_at));"
    "CREATE INDEX runs_in_time ON runs(day, sample, run_at, id);"
    "CREATE INDEX exclusions_of_etch ON exclusions(sample, etched_at, id);"
    "CREATE TABLE micrographs("
    " run INTEGER NOT NULL REFERENCES runs(id), file TEXT NOT NULL, sha256 TEXT NOT NULL, used INTEGER NOT NULL,"
    " px_nm REAL, px_source TEXT NOT NULL, PRIMARY KEY(run, file)) WITHOUT ROWID;"
    "CREATE TABLE prunings("
    " id INTEGER PRIMARY KEY, at TEXT NOT NULL, criteria TEXT NOT NULL, rows INTEGER NOT NULL, reason TEXT NOT NULL,"
    " initials TEXT NOT NULL);"
    "CREATE VIEW quantities AS SELECT r.id AS run, r.sample, r.lot, r.wafer, r.position, r.etched_at, r.run_at, r.protocol,"
    " r.protocol_sha256, r.version, j.key AS quantity, j.value AS value, json_extract(r.row_json, '$.\"' || j.key || '_u\"') AS u"
    " FROM runs r, json_each(r.row_json) j WHERE j.type <> 'null' AND substr(j.key, -2) <> '_u';"
    "PRAGMA user_version = 3;"; /* LEDGER_VERSION */

static const char insert_sql[] =
    "INSERT INTO runs(sample, lot, wafer, etched_at, run_at, fingerprint, version, protocol, spacing_nm, spacing_nm_u,"
    " density_per_um2, size_d50_nm, weighted_reflectance, verdict, row_json, position, protocol_sha256, folder, day)"
    " VALUES(?1,?2,?3,?4,?5,?6,?7,?8,?9,?10,?11,?12,?13,?14,?15,?16,?17,?18,"
    " coalesce(julianday(nullif(?4, '')), julianday(?5))) ON CONFLICT(sample, fingerprint) DO NOTHING";
static const char insert_micrograph_sql[] =
    "INSERT OR IGNORE INTO micrographs(run, file, sha256, used, px_nm, px_source) VALUES(?,?,?,?,?,?)";

#define WHEN "coalesce(julianday(nullif(etched_at, '')), julianday(run_at))"
#define SELECT_RUNS(day, excluded, newer, by_protocol)                                                              \
    "SELECT sample, lot, wafer, etched_at, run_at, fingerprint, version, protocol, verdict,"                        \
    " CASE WHEN ?5 THEN '' ELSE row_json END, " excluded                                                            \
    ", " newer ", spacing_nm, spacing_nm_u, density_per_um2, size_d50_nm, weighted_reflectance, " day               \
    " FROM runs WHERE (?1 IS NULL OR " day " >= julianday(?1)) AND (?2 IS NULL OR lot = ?2)"                        \
    " AND (?3 IS NULL OR " day " <= julianday(?3)) AND (?4 IS NULL OR protocol = ?4" by_protocol ")"                \
    " ORDER BY " day ", sample, run_at, id"
#define EXCLUDED                                                                                                    \
    "coalesce((SELECT CASE WHEN x.excluded THEN x.reason || ' (' || x.initials || ')' ELSE '' END FROM exclusions x" \
    " WHERE x.sample = runs.sample AND x.etched_at = runs.etched_at ORDER BY x.id DESC LIMIT 1), '')"
/* By the version of the file. */
static const char *const select_sql[LEDGER_VERSION + 1] = {
    NULL, SELECT_RUNS(WHEN, "''", "'', '', ''", ""), SELECT_RUNS(WHEN, EXCLUDED, "'', '', ''", ""),
    SELECT_RUNS("day", EXCLUDED, "position, protocol_sha256, folder", " OR substr(protocol_sha256, 1, length(?4)) = ?4")
};

status history_say(history *h, const char *doing, error *e) {
    int code = sqlite3_errcode(h->db) & 0xff;
    switch (code) {
    case SQLITE_BUSY:
    case SQLITE_LOCKED:
        return fail(e, ST_IO, "history %s: another program has kept it locked while we were %s; close that program "
                              "or try again",
                    h->path, doing);
    case SQLITE_NOTADB:
        return fail(e, ST_IO, "history %s: this file is not a ledger of this program; name another file", h->path);
    case SQLITE_READONLY:
    case SQLITE_PERM:
    case SQLITE_CANTOPEN:
        return fail(e, ST_IO, "history %s: cannot be written while %s; check that the folder exists and may be "
                              "written to",
                    h->path, doing);
    case SQLITE_FULL:
        return fail(e, ST_IO, "history %s: the disk is full; nothing of this run was added", h->path);
    case SQLITE_CORRUPT:
        return fail(e, ST_IO, "history %s: the file is damaged; restore it from a copy or name another file", h->path);
    case SQLITE_NOMEM:
        return NO_MEMORY(e, "the history");
    default:
        return fail(e, ST_IO, "history %s: failed while %s (%s)", h->path, doing, sqlite3_errmsg(h->db));
    }
}

status history_run_sql(history *h, const char *sql, const char *doing, error *e) {
    return sqlite3_exec(h->db, sql, NULL, NULL, NULL) == SQLITE_OK ? ST_OK : history_say(h, doing, e);
}

static status read_number(history *h, const char *sql, int *out, error *e) {
    sqlite3_stmt *st = NULL;
    status s = ST_OK;
    if (sqlite3_prepare_v2(h->db, sql, -1, &st, NULL) != SQLITE_OK || sqlite3_step(st) != SQLITE_ROW)
        s = history_say(h, "opening it", e);
    else *out = sqlite3_column_int(st, 0);
    sqlite3_finalize(st);
    return s;
}

typedef enum { LEDGER_OURS, LEDGER_OLDER, LEDGER_EMPTY } ledger;

/* Ours (of this or an older version), or empty and free to become ours; everything else is refused. Called inside a transaction: while another
 * program makes the ledger, the marks must not be read half before and half after. */
static status identify(history *h, ledger *out, error *e) {
    int id = 0, version = 0, tables = 0;
    status st = read_number(h, "PRAGMA application_id", &id, e);
    if (st == ST_OK) st = read_number(h, "PRAGMA user_version", &version, e);
    if (st == ST_OK) st = read_number(h, "SELECT count(*) FROM sqlite_master", &tables, e);
    if (st != ST_OK) return st;
    *out = LEDGER_EMPTY;
    if (id == 0 && version == 0 && tables == 0) return ST_OK;
    if (id != LEDGER_ID)
        return fail(e, ST_IO, "history %s: this is a database of another program, not a ledger; name another file",
                    h->path);
    if (version > LEDGER_VERSION)
        return fail(e, ST_IO, "history %s: written by a newer version of this program (ledger version %d, this one "
                              "knows %d); update the program",
                    h->path, version, (int)LEDGER_VERSION);
    h->version = version;
    *out = version < LEDGER_VERSION ? LEDGER_OLDER : LEDGER_OURS;
    return ST_OK;
}

/* Makes the ledger, or brings an older one up to date. Two programs may meet here: the second finds the work done when
 * it gets the lock. */
static status bring_up(history *h, error *e) {
    status st = history_run_sql(h, "BEGIN IMMEDIATE", "creating it", e);
    if (st != ST_OK) return st;
    ledger found = LEDGER_OURS;
    st = identify(h, &found, e);
    if (st == ST_OK && found == LEDGER_EMPTY) st = history_run_sql(h, schema, "creating it", e);
    int from = found == LEDGER_OURS ? LEDGER_VERSION : found == LEDGER_EMPTY ? 1 : h->version;
    if (st == ST_OK && from < 2) st = history_run_sql(h, second_version, "bringing it up to date", e);
    if (st == ST_OK && from < 3) st = history_run_sql(h, third_version, "bringing it up to date", e);
    if (st == ST_OK) st = history_run_sql(h, "COMMIT", "creating it", e);
    if (st != ST_OK) sqlite3_exec(h->db, "ROLLBACK", NULL, NULL, NULL);
    else h->version = LEDGER_VERSION;
    return st;
}

/* Short naps of uneven length: SQLite's own handler sleeps up to a tenth of a second at a time, and of eight busy writers one
 * can then miss every gap for half a minute. */
static int nap(void *handle, int times) {
    history *h = handle;
    struct timespec now, pause = { 0, 0 };
    clock_gettime(CLOCK_MONOTONIC, &now);
    double ms = 1e3 * (double)now.tv_sec + 1e-6 * (double)now.tv_nsec;
    if (times == 0) h->waiting_since_ms = ms;
    if (ms - h->waiting_since_ms > (double)h->wait_ms) return 0;
    pause.tv_nsec = 1000000L * (1 + (times < 4 ? times : 4)) + now.tv_nsec % 2000000L;
    nanosleep(&pause, NULL);
    return 1;
}

void history_set_wait(history *h, int wait_ms) {
    h->wait_ms = wait_ms;
    sqlite3_busy_handler(h->db, nap, h);
}

status history_open(const char *path, int read_only, history **out, error *e) {
    *out = NULL;
    if (!path[0]) return fail(e, ST_IO, "history: no file name was given");
    if (read_only && access(path, F_OK) != 0)
        return fail(e, ST_IO, "history %s: there is no such file; a run with --history makes one", path);
    textbuf name = { 0 };
    if (path[0] != '/') text_add(&name, "./"); /* SQLite gives a meaning of its own to ":memory:" and "file:" */
    text_add(&name, path);
    status st = text_check(&name, "the history", e);
    history *h = st == ST_OK ? mem_array(1, sizeof *h) : NULL;
    if (h) h->path = mem_text(path);
    if (st == ST_OK && (!h || !h->path)) st = NO_MEMORY(e, "the history");
    if (st == ST_OK) {
        int mode = read_only ? SQLITE_OPEN_READONLY : SQLITE_OPEN_READWRITE | SQLITE_OPEN_CREATE;
        /* one thread at a time uses a ledger: no mutex */
        if (sqlite3_open_v2(name.s, &h->db, mode | SQLITE_OPEN_NOMUTEX, NULL) != SQLITE_OK) st = history_say(h, "opening it", e);
    }
    if (st == ST_OK) {
        history_set_wait(h, WAIT_MS);
        ledger found = LEDGER_OURS;
        st = history_run_sql(h, "BEGIN", "opening it", e);
        if (st == ST_OK) st = identify(h, &found, e);
        sqlite3_exec(h->db, "ROLLBACK", NULL, NULL, NULL);
        if (st == ST_OK && found == LEDGER_EMPTY && read_only)
            st = fail(e, ST_IO, "history %s: the file is empty, not a ledger", path);
        if (st == ST_OK && found != LEDGER_OURS && !read_only) st = bring_up(h, e);
    }
    text_free(&name);
    if (st != ST_OK) {
        history_close(h);
        h = NULL;
    }
    *out = h;
    return st;
}


int history_bind(sqlite3_stmt *s, int at, const char *text) {
    return sqlite3_bind_text(s, at, text ? text : "", -1, SQLITE_STATIC);
}
static int bind_number(sqlite3_stmt *s, int at, double v) {
    return isfinite(v) ? sqlite3_bind_double(s, at, v) : sqlite3_bind_null(s, at);
}

typedef struct {
    sqlite3_stmt *row, *micrograph;
} insertion;

static int insert_row(sqlite3_stmt *s, const history_row *r) {
    const char *const head[] = { r->sample, r->lot, r->wafer, r->etched_at, r->run_at, r->fingerprint, r->version,
                                 r->protocol };
    const double numbers[] = { r->spacing_nm, r->spacing_nm_u, r->density_per_um2, r->size_d50_nm,
                               r->weighted_reflectance };
    const char *const tail[] = { r->verdict, r->row_json, r->position, r->protocol_sha256, r->folder };
    int at = 1, bad = 0;
    for (size_t i = 0; i < sizeof head / sizeof head[0]; i++) bad |= history_bind(s, at++, head[i]);
    for (size_t i = 0; i < sizeof numbers / sizeof numbers[0]; i++) bad |= bind_number(s, at++, numbers[i]);
    for (size_t i = 0; i < sizeof tail / sizeof tail[0]; i++) bad |= history_bind(s, at++, tail[i]);
    if (bad) return 0;
    int ok = sqlite3_step(s) == SQLITE_DONE;
    return sqlite3_reset(s) == SQLITE_OK && ok;
}

static int insert_micrographs(history *h, sqlite3_stmt *s, const history_row *r) {
    sqlite3_int64 run = sqlite3_last_insert_rowid(h->db);
    int ok = 1;
    for (size_t i = 0; ok && i < r->n_micrographs; i++) {
        const history_micrograph *m = &r->micrographs[i];
        int bad = sqlite3_bind_int64(s, 1, run) | history_bind(s, 2, m->file) | history_bind(s, 3, m->sha256) |
                  sqlite3_bind_int(s, 4, m->used) | bind_number(s, 5, m->px_nm) | history_bind(s, 6, m->px_source);
        ok = !bad && sqlite3_step(s) == SQLITE_DONE;
        ok = sqlite3_reset(s) == SQLITE_OK && ok;
    }
    return ok;
}

status history_add(history *h, const history_row *rows, size_t n, size_t *added, error *e) {
    static const char doing[] = "adding samples";
    size_t count = 0;
    *added = 0;
    status st = history_run_sql(h, "BEGIN IMMEDIATE", doing, e);
    if (st != ST_OK) return st;
    insertion s = { NULL, NULL };
    if (sqlite3_prepare_v2(h->db, insert_sql, -1, &s.row, NULL) != SQLITE_OK ||
        sqlite3_prepare_v2(h->db, insert_micrograph_sql, -1, &s.micrograph, NULL) != SQLITE_OK)
        st = history_say(h, doing, e);
    for (size_t i = 0; i < n && st == ST_OK; i++) {
        if (!insert_row(s.row, &rows[i])) st = history_say(h, doing, e);
        else if (sqlite3_changes(h->db) > 0) {
            count++;
            if (!insert_micrographs(h, s.micrograph, &rows[i])) st = history_say(h, doing, e);
        }
    }
    sqlite3_finalize(s.row);
    sqlite3_finalize(s.micrograph);
    if (st == ST_OK) st = history_run_sql(h, "COMMIT", doing, e);
    if (st != ST_OK) {
        sqlite3_exec(h->db, "ROLLBACK", NULL, NULL, NULL);
        return st;
    }
    *added = count;
    return ST_OK;
}

/* ---- reading ---- */

enum { TEXTS = 14, NUMBERS = 6 };

status history_take_texts(sqlite3_stmt *s, const char **const *into, size_t n, char **block, error *e) {
    size_t total = 0;
    for (size_t i = 0; i < n; i++) {
        const char *text = (const char *)sqlite3_column_text(s, (int)i);
        total += (text ? (size_t)sqlite3_column_bytes(s, (int)i) : 0) + 1;
    }
    *block = mem_array(total, 1);
    if (!*block) return NO_MEMORY(e, "the history");
    char *p = *block;
    for (size_t i = 0; i < n; i++) {
        const char *text = (const char *)sqlite3_column_text(s, (int)i);
        size_t length = text ? (size_t)sqlite3_column_bytes(s, (int)i) : 0;
        if (length) memcpy(p, text, length);
        *into[i] = p;
        p += length + 1;
    }
    return ST_OK;
}

static status take_row(sqlite3_stmt *s, history_row *r, char **block, error *e) {
    const char **const into[TEXTS] = { &r->sample,  &r->lot,      &r->wafer,   &r->etched_at, &r->run_at, &r->fingerprint,
                                       &r->version, &r->protocol, &r->verdict, &r->row_json,  &r->excluded,
                                       &r->position, &r->protocol_sha256, &r->folder };
    double *const numbers[NUMBERS] = { &r->spacing_nm, &r->spacing_nm_u, &r->density_per_um2, &r->size_d50_nm,
                                       &r->weighted_reflectance, &r->day };
    for (int i = 0; i < NUMBERS; i++)
        *numbers[i] = sqlite3_column_type(s, TEXTS + i) == SQLITE_NULL ? (double)NAN
                                                                       : sqlite3_column_double(s, TEXTS + i);
    return history_take_texts(s, into, TEXTS, block, e);
}

static status grow(history_list *l, size_t *room, error *e) {
    if (l->n < *room) return ST_OK;
    size_t more = *room ? *room * 2 : 64;
    history_row *rows = mem_grow(l->rows, more, sizeof *rows);
    if (rows) l->rows = rows;
    char **storage = mem_grow(l->storage, more, sizeof *storage);
    if (storage) l->storage = storage;
    if (!rows || !storage) return NO_MEMORY(e, "the history");
    *room = more;
    return ST_OK;
}

status history_check_time(history *h, const char *time, const char *what, error *e) {
    sqlite3_stmt *s = NULL;
    int good = strlen(time) >= 10 && strspn(time, "0123456789") == 4 && time[4] == '-';
    if (good && sqlite3_prepare_v2(h->db, "SELECT julianday(?1) IS NOT NULL", -1, &s, NULL) == SQLITE_OK)
        good = history_bind(s, 1, time) == SQLITE_OK && sqlite3_step(s) == SQLITE_ROW && sqlite3_column_int(s, 0);
    sqlite3_finalize(s);
    return good ? ST_OK
                : fail(e, ST_BAD_INPUT, "history %s '%s': expected a date such as 2026-03-01 or a time such as "
                                        "2026-03-01T08:00:00Z",
                       what, time);
}

status history_day(history *h, const char *time, const char *what, double *day, error *e) {
    sqlite3_stmt *s = NULL;
    status st = history_check_time(h, time, what, e);
    if (st != ST_OK) return st;
    if (sqlite3_prepare_v2(h->db, "SELECT julianday(?1)", -1, &s, NULL) != SQLITE_OK || history_bind(s, 1, time) != SQLITE_OK ||
        sqlite3_step(s) != SQLITE_ROW)
        st = history_say(h, "reading a time", e);
    else *day = sqlite3_column_double(s, 0);
    sqlite3_finalize(s);
    return st;
}

status history_bind_filter(history *h, sqlite3_stmt *s, const history_filter *f, error *e) {
    const char *const texts[] = { f->since, f->lot, f->until, f->protocol };
    status st = f->since ? history_check_time(h, f->since, "since", e) : ST_OK;
    if (st == ST_OK && f->until) st = history_check_time(h, f->until, "until", e);
    for (int i = 0; st == ST_OK && i < 4; i++)
        if (texts[i] && history_bind(s, i + 1, texts[i]) != SQLITE_OK) st = history_say(h, "reading it", e);
    return st;
}

status history_select(history *h, const history_filter *f, history_list *out, error *e) {
    history_list l = { 0 };
    size_t room = 0;
    sqlite3_stmt *s = NULL;
    status st = sqlite3_prepare_v2(h->db, select_sql[h->version], -1, &s, NULL) == SQLITE_OK ? ST_OK : history_say(h, "reading it", e);
    if (st == ST_OK) st = history_bind_filter(h, s, f, e);
    if (st == ST_OK && sqlite3_bind_int(s, 5, f->heads_only) != SQLITE_OK) st = history_say(h, "reading it", e);
    int code = SQLITE_DONE;
    while (st == ST_OK && (code = sqlite3_step(s)) == SQLITE_ROW) {
        st = grow(&l, &room, e);
        if (st == ST_OK) st = take_row(s, &l.rows[l.n], &l.storage[l.n_storage], e);
        if (st == ST_OK) {
            l.n++;
            l.n_storage++;
        }
    }
    if (st == ST_OK && code != SQLITE_DONE) st = history_say(h, "reading it", e);
    sqlite3_finalize(s);
    if (st != ST_OK) history_list_free(&l);
    else *out = l;
    return st;
}

status history_read(history *h, const char *since, const char *lot, history_list *out, error *e) {
    history_filter f = { .since = since, .lot = lot };
    return history_select(h, &f, out, e);
}

void history_list_free(history_list *l) {
    for (size_t i = 0; i < l->n_storage; i++) free(l->storage[i]);
    free(l->storage);
    free(l->rows);
    *l = (history_list){ 0 };
}

const char *history_engine(void) { return sqlite3_libversion(); }

void history_close(history *h) {
    if (!h) return;
    sqlite3_close(h->db);
    free(h->path);
    free(h);
}
