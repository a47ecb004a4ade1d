/* What a watch has said of each sample, kept in OUT/verdicts.jsonl: one JSON object a line, only ever appended to and synced, so
 * that nothing is said twice after a restart. A line cut short by a kill is passed over. */
#ifndef SWARD_APP_TOLD_H
#define SWARD_APP_TOLD_H
#include <stddef.h>

#include "base/status.h"

typedef struct {
    char *sample, *verdict; /* owned */
} told_entry;

typedef struct {
    char *path;
    told_entry *entries; /* [n], one per sample: the newest */
    size_t n;
    int torn; /* the file does not end with a line end */
} told;       /* {0} = empty */

/* err ST_IO it is there and cannot be read; ST_NO_MEMORY */
status told_open(const char *out, told *t, error *e);
/* The verdict said last, NULL: none. */
const char *told_last(const told *t, const char *sample);
/* err ST_IO it cannot be written; ST_NO_MEMORY */
status told_add(told *t, const char *at, const char *sample, const char *verdict, error *e);
void told_free(told *t);

#endif
