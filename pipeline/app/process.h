/* What the history says of the process, in a few lines under the results of a run. */
#ifndef SWARD_APP_PROCESS_H
#define SWARD_APP_PROCESS_H
#include "app/protocol.h"
#include "judge/history.h"

#define PROCESS_LEAST_ETCHES 5
#define PROCESS_MOST_QUANTITIES 3

/* For each of the first targets (spacing_nm without any): drift in the newest phase, alarms of its last etch, Ppk. Nothing
 * for a quantity with fewer than 5 etches in that phase.
 *   out  lines, each with its line break
 *   err  ST_NO_MEMORY; ST_IO a damaged row */
status process_sentences(const history_list *l, const history_notes *notes, const protocol *p, textbuf *out, error *e);

#endif
