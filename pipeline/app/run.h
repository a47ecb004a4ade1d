/* The whole pipeline on one folder. */
#ifndef SWARD_APP_RUN_H
#define SWARD_APP_RUN_H
#include "base/status.h"

typedef struct {
    const char *folder, *protocol, *sheet, *out, *history, *scale; /* NULL: the default */
    double px_nm;        /* --px, NAN: none */
    double bar_nm;       /* --bar, NAN: none */
    int jobs;            /* 0 = one per core */
    int keep_tilt;       /* flag tilted views, do not stretch them */
    int dry_run;         /* say what would be measured, write nothing */
    int gate, no_report, fresh, quiet, verbose;
} run_options;

/* What the exit code needs to know. */
typedef struct {
    int unusable;        /* rows unreadable or excluded, samples without a prediction that should have one */
    int missed;          /* a verdict is `fails` */
} run_outcome;

/*   err  ST_BAD_INPUT wrong folder, protocol or sheet; ST_IO outputs or history; ST_NO_MEMORY */
status run_folder(const run_options *o, run_outcome *outcome, error *e);

#endif
