/* One quantity over the etches of the history: what charts, drift and comparisons take in. */
#ifndef SWARD_APP_SERIES_H
#define SWARD_APP_SERIES_H
#include "judge/history.h"
#include "judge/sentence.h"

typedef struct {
    const history_row *row; /* newest run of its first sample; borrowed from the list */
    double value, sd;       /* mean and sd of its samples; NAN: not measured or excluded, fewer than two */
    size_t n;               /* samples behind it */
    const char *label;      /* the sample, or the time of etching where several share it */
    double setting;         /* of the setting column, NAN without */
    const char *phase;      /* why a phase starts here: a note's text or "recipe NAME"; NULL: none starts; owned by the series */
} etch;

typedef struct {
    etch *etches; /* in time order */
    size_t n;
    size_t n_excluded, n_missing;
    char *unit; /* of the quantity, "" unknown */
    int digits;
    char **phases; /* private */
} series;

/* The newest run of each sample, samples of the same etched_at joined to one etch unless `apart`, with the quantity and,
 * unless NULL, a setting: any number of samples.csv, carried-along columns of the sheet included. A phase starts at the first etch after a note of kind "change" and where
 * the column "recipe" changes.
 *   in   the list outlives the series
 *   err  ST_BAD_INPUT no etch has such a number (with the nearest name); ST_IO a damaged row; ST_NO_MEMORY */
status series_make(const history_list *l, const history_notes *notes, const char *quantity, const char *setting, int apart,
                   series *out, error *e);
void series_free(series *s);

/* The finite values from etch `first` on, with their number in the series of those values and their time in days.
 *   out  value, index, day: [s->n] room each (NULL: not wanted); returns how many */
size_t series_values(const series *s, size_t first, double *value, double *index, double *day);
size_t series_last_phase(const series *s); /* first etch of the newest phase */

sentence_subject series_subject(const series *s, const char *quantity, double min, double max);

#endif
