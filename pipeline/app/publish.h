/* Hands a finished run to the report room and says on the terminal what came out. */
#ifndef SWARD_APP_PUBLISH_H
#define SWARD_APP_PUBLISH_H
#include "app/folder.h"
#include "app/join.h"
#include "app/ledger.h"
#include "app/run.h"

typedef struct {
    const protocol *protocol;
    const setup *setup;
    const folder *folder;
    const examined *images;       /* [folder->n] */
    const sample_group *groups;   /* [n_groups] */
    const joined *samples;        /* [n_groups] */
    size_t n_groups;
    const ledger_result *ledger;
    const stage *stage;
    const run_options *options;
    const scale_standard *standard; /* NULL: none */
    const char *run_at;
    const char *basis;              /* stands for program, protocol and materials: run_priv.h */
    int page;
    double seconds[3], started;   /* preparing, measuring, predicting; CLOCK_MONOTONIC at the start */
} publication;

/* Writes every table, results.json, datapackage.json, the page and run.json, moves all outputs into place and prints the summary,
 * or results.json, unless quiet.
 * err ST_IO, ST_NO_MEMORY */
status publish(const publication *p, error *e);

#endif
