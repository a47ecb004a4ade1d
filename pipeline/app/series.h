/* One quantity over the etches of the history: what charts, drift and comparisons take in. */
#ifndef SWARD_APP_SERIES_H
#define SWARD_APP_SERIES_H
#include "judge/history.h"
#include "judge/sentence.h"

/* The etches of one recipe between two changes of the process. A recipe that comes back without a change in between goes on
 * with its phase. */
typedef struct {
    char *recipe; /* value of the phase column, "" unknown; owned */
    char *why;    /* why it starts: a note's text, "recipe NAME", or both; NULL: it is the first; owned */
    size_t epoch; /* changes of the process before it */
    size_t first; /* its first etch */
    size_t last;  /* its last etch */
} series_phase;

typedef struct {
    const history_row *row; /* newest run of its first sample; borrowed from the list */
    double value, sd;       /* mean and sd of its samples; NAN: not measured or excluded, fewer than two */
    double u;               /* standard uncertainty of one of its samples (root mean square); NAN unknown */
    size_t n;               /* samples behind it */
    const char *label;      /* the sample, or the time of etching where several share it */
    double setting;         /* mean of the setting column, NAN without */
    size_t phase;           /* index */
    size_t n_setting;       /* private */
} etch;

typedef struct {
    etch *etches; /* in time order */
    size_t n;
    series_phase *phases; /* numbered in the order of their first etches */
    size_t n_phases;
    size_t n_excluded, n_missing;
    size_t n_joined; /* samples that count behind an etch that has another one before them */
    char *unit; /* of the quantity, "" unknown */
    int digits;
} series;

typedef struct {
    const char *quantity, *setting; /* any number of samples.csv, columns of the sheet included; setting NULL: none */
    const char *phase_by;           /* column whose values are recipes, in any case; NULL: SERIES_RECIPE */
    const char *only;               /* lot, or value of the phase column: other rows are passed over; NULL: all */
} series_question;
#define SERIES_RECIPE "recipe"

/* The newest run of each sample, samples of one etch joined to its mean: the positions of a wafer are no independent etches.
 * One etch are rows of the same etched_at and recipe; where the time is that of the files, rows of the same lot and wafer. A
 * phase starts at the first etch after a note of kind "change" and with another recipe.
 *   in   the list outlives the series
 *   err  ST_BAD_INPUT no etch has such a number (with the nearest name); ST_IO a damaged row; ST_NO_MEMORY */
status series_make(const history_list *l, const history_notes *notes, const series_question *q, series *out, error *e);
void series_free(series *s);

/* The values of a phase (NAN: left out) with the index of their etch.
 *   out  value, at: [s->n] room each; returns how many */
size_t series_of_phase(const series *s, size_t phase, double *value, size_t *at);

sentence_subject series_subject(const series *s, const char *quantity, double min, double max);

#endif
