/* The micrographs behind the rows, and the one way in which rows leave the ledger: on demand, by criteria, with a reason, recorded.
 * What this file does not do: it compares no file with its digest; the app does. */
#include <math.h>
#include <string.h>

#include "base/text.h"
#include "judge/history_priv.h"

#define CHOSEN                                                                                                                   \
    "(?1 IS NULL OR r.day >= julianday(?1)) AND (?2 IS NULL OR r.lot = ?2) AND (?3 IS NULL OR r.day <= julianday(?3))"            \
    " AND (?4 IS NULL OR r.protocol = ?4 OR substr(r.protocol_sha256, 1, length(?4)) = ?4)"

static const char *column(sqlite3_stmt *s, int i) {
    const char *text = (const char *)sqlite3_column_text(s, i);
    return text ? text : "";
}

status history_micrographs(history *h, const history_filter *f, history_use *use, void *user, error *e) {
    static const char sql[] = "SELECT DISTINCT r.folder, m.file, m.sha256, m.px_source, m.px_nm FROM micrographs m"
                              " JOIN runs r ON r.id = m.run WHERE " CHOSEN " ORDER BY r.folder, m.file, m.sha256";
    static const char doing[] = "reading its micrographs";
    sqlite3_stmt *s = NULL;
    int code = SQLITE_DONE;
    if (h->version < 3) return ST_OK;
    status st = sqlite3_prepare_v2(h->db, sql, -1, &s, NULL) == SQLITE_OK ? ST_OK : history_say(h, doing, e);
    if (st == ST_OK) st = history_bind_filter(h, s, f, e);
    while (st == ST_OK && (code = sqlite3_step(s)) == SQLITE_ROW) {
        history_micrograph m = { .file = column(s, 1), .sha256 = column(s, 2), .px_source = column(s, 3), .used = 1 };
        m.px_nm = sqlite3_column_type(s, 4) == SQLITE_NULL ? (double)NAN : sqlite3_column_double(s, 4);
        st = use(column(s, 0), &m, user, e);
    }
    if (st == ST_OK && code != SQLITE_DONE) st = history_say(h, doing, e);
    sqlite3_finalize(s);
    return st;
}

/* ---- deleting ---- */

/* ?1 before, ?2 lot, ?3 protocol, ?4 only superseded rows. A superseded row has a newer run of the same etch. */
#define DOOMED                                                                                                                   \
    "SELECT r.id FROM runs r WHERE (?1 IS NULL OR r.day < julianday(?1)) AND (?2 IS NULL OR r.lot = ?2)"                          \
    " AND (?3 IS NULL OR r.protocol = ?3 OR substr(r.protocol_sha256, 1, length(?3)) = ?3)"                                      \
    " AND (NOT ?4 OR EXISTS(SELECT 1 FROM runs n WHERE n.day = r.day AND n.sample = r.sample AND n.etched_at = r.etched_at"       \
    " AND (n.run_at > r.run_at OR (n.run_at = r.run_at AND n.id > r.id))))"

static int bind_doomed(sqlite3_stmt *s, const history_prunable *w) {
    int bad = sqlite3_bind_int(s, 4, w->superseded);
    if (w->before) bad |= history_bind(s, 1, w->before);
    if (w->lot) bad |= history_bind(s, 2, w->lot);
    if (w->protocol) bad |= history_bind(s, 3, w->protocol);
    return bad == SQLITE_OK;
}

/* One statement over the doomed rows; *n: rows it changed, or the number it selected. */
static status over_doomed(history *h, const char *sql, const history_prunable *w, size_t *n, error *e) {
    static const char doing[] = "pruning it";
    sqlite3_stmt *s = NULL;
    status st = sqlite3_prepare_v2(h->db, sql, -1, &s, NULL) == SQLITE_OK && bind_doomed(s, w) ? ST_OK : history_say(h, doing, e);
    int code = st == ST_OK ? sqlite3_step(s) : SQLITE_DONE;
    if (st == ST_OK && code == SQLITE_ROW) *n = (size_t)sqlite3_column_int64(s, 0);
    else if (st == ST_OK && code == SQLITE_DONE) *n = (size_t)sqlite3_changes(h->db);
    else if (st == ST_OK) st = history_say(h, doing, e);
    sqlite3_finalize(s);
    return st;
}

static status record(history *h, const history_prunable *w, const char *reason, const char *initials, const char *at, size_t n, error *e) {
    sqlite3_stmt *s = NULL;
    textbuf criteria = { 0 };
    if (w->before) text_addf(&criteria, "etched before %s; ", w->before);
    if (w->lot) text_addf(&criteria, "lot %s; ", w->lot);
    if (w->protocol) text_addf(&criteria, "protocol %s; ", w->protocol);
    if (w->superseded) text_add(&criteria, "superseded; ");
    status st = text_check(&criteria, "a pruning", e);
    if (st == ST_OK &&
        (sqlite3_prepare_v2(h->db, "INSERT INTO prunings(at, criteria, rows, reason, initials) VALUES(?,?,?,?,?)", -1, &s, NULL) != SQLITE_OK ||
         history_bind(s, 1, at) != SQLITE_OK || history_bind(s, 2, criteria.s) != SQLITE_OK ||
         sqlite3_bind_int64(s, 3, (sqlite3_int64)n) != SQLITE_OK || history_bind(s, 4, reason) != SQLITE_OK ||
         history_bind(s, 5, initials) != SQLITE_OK || sqlite3_step(s) != SQLITE_DONE))
        st = history_say(h, "recording a pruning", e);
    sqlite3_finalize(s);
    text_free(&criteria);
    return st;
}

status history_prune(history *h, const history_prunable *w, const char *reason, const char *initials, const char *at, int sure,
                     size_t *n, error *e) {
    size_t gone = 0;
    *n = 0;
    if (!w->before && !w->lot && !w->protocol && !w->superseded)
        return fail(e, ST_BAD_INPUT, "history prune: say what may go, with --before, --lot, --protocol or --superseded");
    status st = w->before ? history_check_time(h, w->before, "before", e) : ST_OK;
    if (st == ST_OK && sure && history_blank(reason)) st = fail(e, ST_BAD_INPUT, "history prune: deleting rows needs a reason");
    if (st == ST_OK && sure && history_blank(initials))
        st = fail(e, ST_BAD_INPUT, "history prune: deleting rows needs the initials of who decided");
    if (st == ST_OK) st = history_run_sql(h, "BEGIN IMMEDIATE", "pruning it", e);
    if (st != ST_OK) return st;
    st = over_doomed(h, "SELECT count(*) FROM (" DOOMED ")", w, n, e);
    if (st == ST_OK && sure) st = over_doomed(h, "DELETE FROM micrographs WHERE run IN (" DOOMED ")", w, &gone, e);
    if (st == ST_OK && sure) st = over_doomed(h, "DELETE FROM runs WHERE id IN (" DOOMED ")", w, &gone, e);
    if (st == ST_OK && sure) st = record(h, w, reason, initials, at, gone, e);
    if (st == ST_OK) st = history_run_sql(h, sure ? "COMMIT" : "ROLLBACK", "pruning it", e);
    if (st != ST_OK) {
        *n = 0;
        sqlite3_exec(h->db, "ROLLBACK", NULL, NULL, NULL);
    }
    return st;
}
