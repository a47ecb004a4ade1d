/* What more micrographs of a sample would bring: for the half-widths a protocol asks for, and for undecided verdicts. */
#ifndef SWARD_APP_PLANNING_H
#define SWARD_APP_PLANNING_H
#include "app/protocol.h"
#include "app/quantities.h"

/* The figure behind a quantity of the tables: spacing_nm or a name of quantity_table; NULL: none. */
const figure *planned_figure(const char *name, const figure *f, const figure *spacing);

/* 1 when planned_figure knows the quantity. */
int planned_quantity(const char *name);

/* "plan": [{"quantity", "half_width", "now", "more_micrographs", "smallest", "now_repeat", "more_micrographs_repeat"} ..],
 * one per goal of the protocol; half-widths of 95 % intervals; more_micrographs null: no number serves, or none up to PLAN_MOST;
 * smallest: what no number gets below; _repeat: counting only what varies from run to run. */
void plan_json(const protocol *p, const figure *f, const figure *spacing, textbuf *out);

/* Of an undecided verdict on a figure of the micrographs: a sentence without final stop on what would settle it, such as "3 more
 * micrographs would settle it", appended to `advice`, and the number; PLAN_NEVER and no sentence when the quantity is none of the
 * micrographs' or its uncertainty is unknown. The value is taken to stay where it is. */
long plan_verdict(const target *t, const figure *f, const figure *spacing, textbuf *advice);

#endif
