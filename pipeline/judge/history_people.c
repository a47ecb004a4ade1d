/* What people add to the ledger: notes on the process, and exclusions with reason and initials. Both tables are only ever
 * appended to, so that every decision stays visible with its time. An exclusion names an etch (sample and time of
 * etching), not a run: measuring it again under another protocol does not bring it back.
 * What this file does not do: it deletes nothing and changes no row of a run. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "judge/history_priv.h"

int history_blank(const char *s) { return !s || s[strspn(s, " \t")] == '\0'; }

static status add_row(history *h, const char *sql, const char *const *texts, int n, const char *doing, error *e) {
    sqlite3_stmt *s = NULL;
    status st = sqlite3_prepare_v2(h->db, sql, -1, &s, NULL) == SQLITE_OK ? ST_OK : history_say(h, doing, e);
    for (int i = 0; st == ST_OK && i < n; i++)
        if (history_bind(s, i + 1, texts[i]) != SQLITE_OK) st = history_say(h, doing, e);
    if (st == ST_OK && sqlite3_step(s) != SQLITE_DONE) st = history_say(h, doing, e);
    sqlite3_finalize(s);
    return st;
}

status history_note_add(history *h, const history_note *note, error *e) {
    if (history_blank(note->text)) return fail(e, ST_BAD_INPUT, "history note: a note needs a text");
    if (!note->kind || (strcmp(note->kind, "change") != 0 && strcmp(note->kind, "remark") != 0))
        return fail(e, ST_BAD_INPUT, "history note: a note is a change or a remark, not '%s'", note->kind ? note->kind : "");
    status st = history_check_time(h, note->at ? note->at : "", "note at", e);
    const char *const texts[] = { note->at, note->text, note->kind, note->initials };
    return st == ST_OK ? add_row(h, "INSERT INTO notes(at, text, kind, initials) VALUES(?,?,?,?)", texts, 4, "adding a note", e)
                       : st;
}

status history_notes_read(history *h, history_notes *out, error *e) {
    static const char sql[] = "SELECT at, text, kind, initials, julianday(at) FROM notes ORDER BY julianday(at), id";
    history_notes l = { 0 };
    sqlite3_stmt *s = NULL;
    size_t room = 0;
    int code = SQLITE_DONE;
    if (h->version < 2) {
        *out = l;
        return ST_OK;
    }
    status st = sqlite3_prepare_v2(h->db, sql, -1, &s, NULL) == SQLITE_OK ? ST_OK : history_say(h, "reading its notes", e);
    while (st == ST_OK && (code = sqlite3_step(s)) == SQLITE_ROW) {
        if (l.n == room) {
            room = room ? 2 * room : 16;
            history_note *notes = mem_grow(l.notes, room, sizeof *notes);
            if (notes) l.notes = notes;
            char **storage = mem_grow(l.storage, room, sizeof *storage);
            if (storage) l.storage = storage;
            if (!notes || !storage) st = NO_MEMORY(e, "the notes of the history");
        }
        if (st != ST_OK) break;
        history_note *n = &l.notes[l.n];
        const char **const into[] = { &n->at, &n->text, &n->kind, &n->initials };
        n->day = sqlite3_column_double(s, 4);
        st = history_take_texts(s, into, 4, &l.storage[l.n], e);
        if (st == ST_OK) l.n++;
    }
    if (st == ST_OK && code != SQLITE_DONE) st = history_say(h, "reading its notes", e);
    sqlite3_finalize(s);
    if (st == ST_OK) *out = l;
    else history_notes_free(&l);
    return st;
}

void history_notes_free(history_notes *l) {
    for (size_t i = 0; i < l->n; i++) free(l->storage[i]);
    free(l->storage);
    free(l->notes);
    *l = (history_notes){ 0 };
}

/* The etch that is meant: its time as the ledger writes it, and its newest run. */
static status find_etch(history *h, const char *sample, const char *etched_at, char **found, char **fingerprint, error *e) {
    static const char sql[] =
        "SELECT etched_at, fingerprint, (SELECT count(DISTINCT etched_at) FROM runs WHERE sample = ?1"
        " AND (?2 IS NULL OR etched_at = ?2 OR julianday(etched_at) = julianday(?2)))"
        " FROM runs WHERE sample = ?1 AND (?2 IS NULL OR etched_at = ?2 OR julianday(etched_at) = julianday(?2))"
        " ORDER BY julianday(run_at) DESC, id DESC LIMIT 1";
    sqlite3_stmt *s = NULL;
    status st = ST_OK;
    if (sqlite3_prepare_v2(h->db, sql, -1, &s, NULL) != SQLITE_OK || history_bind(s, 1, sample) != SQLITE_OK ||
        (etched_at && history_bind(s, 2, etched_at) != SQLITE_OK))
        st = history_say(h, "looking for a sample", e);
    int code = st == ST_OK ? sqlite3_step(s) : SQLITE_DONE;
    if (st == ST_OK && code == SQLITE_DONE)
        st = fail(e, ST_BAD_INPUT, "history %s: there is no sample '%s'%s%s; 'sward history' lists them", h->path, sample,
                  etched_at ? " etched at " : "", etched_at ? etched_at : "");
    else if (st == ST_OK && code != SQLITE_ROW) st = history_say(h, "looking for a sample", e);
    else if (st == ST_OK && sqlite3_column_int(s, 2) > 1)
        st = fail(e, ST_BAD_INPUT, "history %s: the sample '%s' was etched at %d times; name one with --at", h->path, sample,
                  sqlite3_column_int(s, 2));
    if (st == ST_OK) {
        *found = mem_text((const char *)sqlite3_column_text(s, 0));
        *fingerprint = mem_text((const char *)sqlite3_column_text(s, 1));
        if (!*found || !*fingerprint) st = NO_MEMORY(e, "an exclusion");
    }
    sqlite3_finalize(s);
    return st;
}

status history_exclude(history *h, const char *sample, const char *etched_at, int excluded, const char *reason,
                       const char *initials, const char *at, error *e) {
    static const char sql[] = "INSERT INTO exclusions(sample, etched_at, fingerprint, excluded, reason, initials, at)"
                              " VALUES(?,?,?,?,?,?,?)";
    char *found = NULL, *fingerprint = NULL;
    if (history_blank(reason)) return fail(e, ST_BAD_INPUT, "history: an exclusion needs a reason");
    if (history_blank(initials)) return fail(e, ST_BAD_INPUT, "history: an exclusion needs the initials of who decided");
    status st = find_etch(h, sample, etched_at, &found, &fingerprint, e);
    const char *const texts[] = { sample, found, fingerprint, excluded ? "1" : "0", reason, initials, at };
    if (st == ST_OK) st = add_row(h, sql, texts, 7, "adding an exclusion", e);
    free(found);
    free(fingerprint);
    return st;
}
