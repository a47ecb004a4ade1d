/* The control of one quantity: its etches on a chart, phase by phase, with what happened in them, as numbers and in words. What
 * `sward history chart` prints and what results.json and the page carry as "series". */
#ifndef SWARD_APP_CONTROL_H
#define SWARD_APP_CONTROL_H
#include "app/series.h"
#include "base/text.h"
#include "judge/chart.h"
#include "judge/finding.h"

typedef struct {
    const history_list *rows;
    const history_notes *notes;
    const char *quantity;          /* of samples.csv or the sheet */
    const char *phase_by;          /* as in series_question */
    chart_options options;
    double baseline_from, baseline_to; /* days as in history_row, a stated baseline period; NAN: open */
    int first_etches;              /* 1: the first options.baseline etches of a phase set its limits. 0: all etches of its first steady
                                      stretch, outliers left out, up to CONTROL_STEADY; where that has fewer than options.baseline, as 1 */
    double min, max;               /* target, NAN open */
    int subgroups;                 /* the samples of an etch are a subgroup */
} control_question;

#define CONTROL_STEADY 100

/* Everything at its default: spacing_nm, no target. */
control_question control_defaults(const history_list *rows, const history_notes *notes);

typedef struct {
    findings found;       /* indices are those of the etches */
    int steady;           /* its limits rest on its first steady stretch */
    trend_slope per_etch; /* of the last stretch without a break; n 0: fewer than 5 */
    trend_slope per_day;  /* the same over time; n 0: unknown */
    trend_step since;     /* the first etches against the last ones of the phase of this recipe before the change; n_a 0: none */
    capability able;      /* of the phase; n 0: no target, too few, no scatter */
    int live;             /* no change of the process came after it */
} control_phase;

typedef struct {
    series s;
    chart c;
    sentence_subject subject;
    control_phase *phases; /* [c.n_phases] */
    double false_alarms;   /* etches to a false alarm with the limits as they were set in the newest phase; NAN unknown, no limits */
    const history_notes *notes;
    const char *phase_by;
    int subgroups;
} control;

/* in   the lists outlive *out
 * out  the caller's (control_free), untouched on failure
 * err  ST_BAD_INPUT no such quantity, bad options, an empty history; ST_IO a damaged row; ST_NO_MEMORY */
status control_make(const control_question *q, control *out, error *e);
void control_free(control *c);

/* Lines, each with its line break: what stands out, steps, drifts and changes in the newest `etches`, in the order of the phases. */
void control_findings(const control *c, size_t etches, textbuf *out);
/* The same for limits, alarms and how often they are false; for drift and capability of the live phases. */
void control_limits(const control *c, textbuf *out);
void control_alarms(const control *c, textbuf *out);
void control_today(const control *c, textbuf *out);

/* One object; points are the newest `most` etches (0: all). Numbers of points count from 1 over all etches. An unknown number is
 * null, an open target too.
 *   quantity, unit, digits, target_min, target_max, phase_by (column whose values are recipes), subgroups
 *   rules [word], tests [{test, meaning, false_alarm_length}], false_alarm_length (etches to a false alarm on this
 *     chart, its limits being estimates), false_alarm_length_known (of the pattern tests alone with known limits)
 *   phases [{number, first, etches, baseline, baseline_of (first, stated or steady), why, recipe, live, centre, sigma, low, high, spread_mean, lag1}]: first is
 *     the number of a point; low and high the limits of single values; baseline 0: limits as given
 *   points [{number, etch, etched_at, samples, phase, value, u, sd, z, low, high, spread, spread_low, spread_high, average,
 *     average_low, average_high, alarms [word], excluded}]: excluded null or the reason; average is the EWMA
 *   points_left_out: how many older etches are not printed
 *   notes [{at, kind, text, initials, before}]: before is the number of the first point at or after it
 *   findings [{kind: outlier, step, bend, drift or change, phase, from, to, size, low, high, p, sentence}]: from and to are
 *     numbers of points; size of a drift is per etch
 *   drift {etches, per_etch, low, high, p, per_day}, capability {form, Ppk, Pp, Cpk, Cp as [value, low, high], normality_p,
 *     expected_outside}: of the newest phase
 *   sentences [text]: limits, findings, alarms, drift and capability in words */
void control_json(const control *c, size_t most, textbuf *out);

#endif
