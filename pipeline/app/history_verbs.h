/* The verbs of `sward history` that compute. Each writes its answer into a text; cmd_history.c opens the ledger and prints. */
#ifndef SWARD_APP_HISTORY_VERBS_H
#define SWARD_APP_HISTORY_VERBS_H
#include "app/control.h"

typedef struct {
    control_question control; /* rows, notes, quantity, and what a chart wants to know */
    double target, value;     /* of `setting`: what to reach, a setting to forecast at; NAN: none */
    int json;
} history_question;

/* The series with limits, alarms in words, drift and capability of the newest phase.
 *   err  ST_BAD_INPUT no such quantity, bad options, an empty history; ST_IO a damaged row; ST_NO_MEMORY */
status history_chart(const history_question *q, textbuf *out, error *e);
/* b against a: two lots, or two values of the sheet column `recipe`, whichever they are.
 *   err  as above; ST_BAD_INPUT no such lot or recipe; ST_NO_RESULT too few samples */
status history_change(const history_question *q, const char *a, const char *b, textbuf *out, error *e);
/* The straight line of the quantity on a numeric column, and the setting that reaches the target if one is given.
 *   err  as above; ST_NO_RESULT too few samples, or all at one setting */
status history_setting(const history_question *q, const char *setting, textbuf *out, error *e);
/* Are the micrographs behind the results in `dir` still the ones that were measured? Compares SHA-256 with results.json.
 *   in   folder NULL: where run.json says they were
 *   out  *unlike files that are gone or differ
 *   err  ST_BAD_INPUT no results there; ST_IO; ST_NO_MEMORY */
status history_verify(const char *dir, const char *folder, textbuf *out, size_t *unlike, error *e);

/* The same for every micrograph the ledger knows, of the chosen rows; folder NULL: where each row's were.
 *   err  ST_BAD_INPUT a date that is none; ST_IO; ST_NO_MEMORY */
status history_verify_ledger(history *h, const history_filter *f, const char *folder, textbuf *out, size_t *unlike, error *e);

/* The rows as they are. err ST_IO a damaged row; ST_NO_MEMORY */
typedef enum { FORM_TEXT, FORM_CSV, FORM_JSON } history_form;
status history_print(const history_list *rows, history_form form, textbuf *out, error *e);

/* What the last run of each etch changed against the one before it.
 *   err  ST_IO a damaged row; ST_NO_MEMORY */
status history_differences(const history_question *q, textbuf *out, error *e);

/* Adds the rows of a CSV, columns as in samples.csv (sample and etched_at are needed), others kept as columns of a sheet; a row
 * that is known adds nothing. All or none.
 *   in   protocol: name for them, NULL: "imported"; now: ISO 8601, for rows without run_at
 *   err  ST_BAD_INPUT with file, line and column; ST_IO; ST_NO_MEMORY */
status history_import(history *h, const char *path, const char *protocol, const char *now, textbuf *out, error *e);

#endif
