/* One run while it is under way, for run.c and part.c. */
#ifndef SWARD_APP_RUN_PRIV_H
#define SWARD_APP_RUN_PRIV_H
#include "app/folder.h"
#include "app/ledger.h"
#include "app/run.h"
#include "app/scalefile.h"

/* Everything of one run; freed in one place. */
typedef struct {
    const run_options *o;
    const run_hooks *hooks;
    protocol protocol;
    scale_standard standard;
    int has_standard;
    setup *setup;
    stage stage;
    folder folder;
    examined *images;
    sample_group *groups;
    joined *samples;
    size_t n_groups;
    char basis[65];      /* stands for program, protocol and materials */
    double begun_s[4];   /* CLOCK_MONOTONIC: at the start, before measuring, before joining, after */
    char run_at[32];
} run;

/* Protocol, standard, optics. err as run_folder */
status run_prepare(run *r, error *e);
/* Once the folder is open: what only the sheet tells the protocol, and the basis. err ST_BAD_INPUT; ST_NO_MEMORY */
status run_meet_folder(run *r, error *e);
/* The lock of OUT unless the caller has it; an empty stage. err as stage_open */
status run_make_stage(run *r, error *e);
/* Micrographs [0, folder.n) for which part and parts say so, through cache or measurement.
 *   out  r->images; *stopped 1: not all were looked at
 *   err  as batch_examine */
status run_measure(run *r, int *stopped, error *e);
/* From examined micrographs to outputs in place. err as run_folder */
status run_complete(run *r, run_outcome *outcome, error *e);
void run_count_unusable(const run *r, run_outcome *outcome);
void run_free(run *r);

/* What run_folder does with --part: the records of this share, written into OUT. err as run_folder */
status part_write(run *r, run_outcome *outcome, error *e);

#endif
