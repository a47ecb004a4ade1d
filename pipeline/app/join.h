/* Micrographs -> samples: the only step that needs two micrographs at once. Pools texture figures, links, predicts,
 * judges. */
#ifndef SWARD_APP_JOIN_H
#define SWARD_APP_JOIN_H
#include "app/examine.h"
#include "app/materials.h"
#include "app/samplesheet.h"
#include "judge/target.h"

struct history_micrograph;

/* What belongs together, before it is joined. Borrowed except where said. */
typedef struct {
    char *name, *lot, *wafer, *position; /* owned */
    char etched_at[32];
    int time_from_file;
    quantity height_nm;        /* of the sheet; value NAN: none */
    const char *const *extra;  /* carried-along cells of the sheet, NULL: none */
    size_t *members;           /* indices into the examined micrographs, owned */
    size_t n_members;
} sample_group;

void sample_group_free(sample_group *g);

typedef struct {
    sample_row row;
    char *json;                /* further members of the sample's object in results.json */
    prediction prediction;
    verdict verdict;
    int failed;                /* 1: no prediction, the sentence is in `json` as "prediction_error" */
    char fingerprint[65];
    struct history_micrograph *files; /* [n_files], texts borrowed from the examined micrographs */
    size_t n_files;
} joined;

/* What all samples of a run share; borrowed. */
typedef struct {
    const protocol *protocol;
    const setup *setup;
    size_t n_extra;     /* carried-along columns behind the verdict columns */
    const char *basis;  /* stands for protocol, materials and version in fingerprints and keys */
    const char *cache;  /* folder of remembered predictions; NULL: none are kept */
    int fresh;          /* 1: what was remembered is not used */
} join_options;

/*   in   all[] examined micrographs; a duplicate (flag DUPLICATE) is counted but not used
 *   err  ST_BAD_INPUT from the link or the optics, with the sample's name; ST_IO a prediction cannot be remembered;
 *        ST_NO_MEMORY */
status join_sample(const sample_group *g, const examined *all, const join_options *o, joined *out, error *e);
void joined_free(joined *j);

#endif
