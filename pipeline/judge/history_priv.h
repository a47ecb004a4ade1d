/* Shared by the files of the ledger only. */
#ifndef SWARD_JUDGE_HISTORY_PRIV_H
#define SWARD_JUDGE_HISTORY_PRIV_H
#include <sqlite3.h>

#include "judge/history.h"

struct history {
    sqlite3 *db;
    char *path;
    int wait_ms;
    double waiting_since_ms;
    int version; /* of the file: a ledger opened for reading only may be older than this program's */
};

/* One sentence for whatever SQLite says. */
status history_say(history *h, const char *doing, error *e);
status history_run_sql(history *h, const char *sql, const char *doing, error *e);
int history_bind(sqlite3_stmt *s, int at, const char *text);
/* The text columns 0..n-1 of a row into one block; *into[i] point into it. */
status history_take_texts(sqlite3_stmt *s, const char **const *into, size_t n, char **block, error *e);
int history_blank(const char *s); /* NULL, or nothing but blanks */
/* since, lot, until, protocol as ?1 to ?4. */
status history_bind_filter(history *h, sqlite3_stmt *s, const history_filter *f, error *e);
/* A date or date with time that SQLite reads, not one of its own words such as "now". `what` opens the sentence. */
status history_check_time(history *h, const char *time, const char *what, error *e);

#endif
