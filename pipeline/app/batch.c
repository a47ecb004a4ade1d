#include "app/batch.h"

#include <math.h>
#include <omp.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"

static int workers(int jobs, size_t n) {
    int w = jobs > 0 ? jobs : omp_get_num_procs();
    return n && (size_t)w > n ? (int)n : w;
}

/* The first failure in index order, whoever met it first. */
static status first_error(const error *errors, size_t n, error *e) {
    for (size_t i = 0; i < n; i++)
        if (errors[i].code != ST_OK) return fail(e, errors[i].code, "%s", errors[i].text);
    return ST_OK;
}

/* "[#...................] 12 of 200 micrographs, 3.1 per s, about 61 s left", over the line before; the
 * ending is there when something is left. */
static void say_progress(size_t done, size_t n, double seconds) {
    static const char full[] = "####################", rest[] = "....................";
    int cells = n ? (int)((sizeof full - 1) * done / n) : 0;
    double rate = seconds > 0.0 ? (double)done / seconds : 0.0;
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    fprintf(stderr, "\r[%.*s%s] %zu of %zu micrographs", cells, full, rest + cells, done, n);
    if (rate > 0.0 && done < n)
        fprintf(stderr, ", %s per s, about %s s left   ", number_text(rate, 2, a), number_text(ceil((double)(n - done) / rate), 6, b));
    if (done == n) fprintf(stderr, " in %s s%30s\n", number_text(seconds, 3, a), "");
}

status batch_examine(const batch_item *items, size_t n, const examine_options *o, int jobs, int progress, int (*stop)(void),
                     examined *out, error *e) {
    error *errors = mem_array(n, sizeof *errors);
    if (!errors) return NO_MEMORY(e, "the batch");
    size_t done = 0;
    double start = omp_get_wtime();
    long count = (long)n;
#pragma omp parallel for schedule(dynamic, 1) num_threads(workers(jobs, n))
    for (long k = 0; k < count; k++) {
        size_t i = (size_t)k;
        const batch_item *item = &items[i];
        if (stop && stop()) continue;
        examine(item->path, item->relative, item->stem, item->sheet_px_nm, item->sheet_bar_nm, o, &out[i], &errors[i]);
        if (progress) {
#pragma omp critical(progress)
            {
                done++;
                say_progress(done, n, omp_get_wtime() - start);
            }
        }
    }
    status st = first_error(errors, n, e);
    free(errors);
    return st;
}

status batch_join(const sample_group *groups, size_t n, const examined *all, const join_options *o, int jobs, joined *out,
                  error *e) {
    error *errors = mem_array(n, sizeof *errors);
    if (!errors) return NO_MEMORY(e, "the batch");
    long count = (long)n;
#pragma omp parallel for schedule(dynamic, 1) num_threads(workers(jobs, n))
    for (long k = 0; k < count; k++) {
        size_t i = (size_t)k;
        join_sample(&groups[i], all, o, &out[i], &errors[i]);
    }
    status st = first_error(errors, n, e);
    free(errors);
    return st;
}

typedef struct {
    const char *hash;
    size_t index;
} hashed;

static int by_hash_then_index(const void *a, const void *b) {
    const hashed *x = a, *y = b;
    int order = strcmp(x->hash, y->hash);
    return order ? order : (x->index > y->index) - (x->index < y->index);
}

status batch_mark_duplicates(examined *all, size_t n, error *e) {
    hashed *list = mem_array(n, sizeof *list);
    if (!list) return NO_MEMORY(e, "the batch");
    size_t m = 0;
    for (size_t i = 0; i < n; i++)
        if (all[i].readable) list[m++] = (hashed){ all[i].hash, i };
    qsort(list, m, sizeof *list, by_hash_then_index);
    for (size_t i = 1; i < m; i++)
        if (!strcmp(list[i].hash, list[i - 1].hash)) all[list[i].index].flags |= FLAG(DUPLICATE);
    free(list);
    return ST_OK;
}
