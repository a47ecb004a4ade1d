/* The whole pipeline on one folder. */
#ifndef SWARD_APP_RUN_H
#define SWARD_APP_RUN_H
#include "app/stage.h"

typedef struct {
    const char *folder, *protocol, *sheet, *out, *history, *scale; /* NULL: the default */
    double px_nm;        /* --px, NAN: none */
    double bar_nm;       /* --bar, NAN: none */
    int jobs;            /* 0 = one per core */
    int keep_tilt;       /* flag tilted views, do not stretch them */
    int dry_run;         /* say what would be measured, write nothing */
    int part, parts;     /* measure only this share of the files and write a part; parts 0: everything */
    int json;            /* results.json on stdout instead of the summary */
    int gate, no_report, fresh, quiet, verbose;
} run_options;

/* What the exit code needs to know, and what a summary counts. */
typedef struct {
    int unusable;        /* rows unreadable or excluded, samples without a prediction that should have one */
    int missed;          /* a verdict is `fails` */
    int micrographs, samples, added; /* of this run; rows that came to the history */
    int stopped;         /* 1: asked to stop; nothing was written */
} run_outcome;

/* What was said of one sample; borrowed for the time of the call. */
typedef struct {
    const char *sample, *verdict, *reasons, *etched_at, *row_json; /* row_json: the samples.csv row as one JSON object */
} run_verdict;

/* What a program that runs again and again wants of a run. All may be NULL. */
typedef struct {
    int (*stop)(void);                                          /* asked before each micrograph */
    int (*admit)(void *context, const char *relative);          /* 0: the file is left out of this run */
    status (*verdict)(void *verdict_context, const run_verdict *v, error *e); /* each sample, after everything is written */
    void *context, *verdict_context;
    const stage *stage;                                         /* of the output folder, opened by the caller */
} run_hooks;

/* `hooks` NULL: none.
 *   err  ST_BAD_INPUT wrong folder, protocol or sheet; ST_IO outputs, lock or history; ST_NO_MEMORY */
status run_folder(const run_options *o, const run_hooks *hooks, run_outcome *outcome, error *e);

const char *run_out(const run_options *o); /* where the outputs go */

#endif
