/* What the history says of the process: a few lines under the results of a run, and the charts behind them. */
#ifndef SWARD_APP_PROCESS_H
#define SWARD_APP_PROCESS_H
#include "app/control.h"
#include "app/protocol.h"

#define PROCESS_LEAST_ETCHES 5
#define PROCESS_MOST_QUANTITIES 3 /* with lines */
#define PROCESS_MOST_POINTS 500   /* of a chart */
#define PROCESS_TELL 300          /* etches back to which findings are told */

/* out  lines: for each of the first targets (spacing_nm without any) what stands out, steps, drifts, today's drift, alarms of the
 *      last etch, Ppk, each line with its line break; nothing for a quantity without 5 etches in a phase
 *      charts: an array of objects as control_json writes them, one per target, then spacing_nm and weighted_reflectance where
 *      they are no targets; quantities without a number in the history are left out
 *   err  ST_BAD_INPUT the protocol's rules; ST_IO a damaged row; ST_NO_MEMORY */
status process_describe(const history_list *l, const history_notes *notes, const protocol *p, textbuf *lines, textbuf *charts, error *e);

#endif
