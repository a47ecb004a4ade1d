/* What charts, drift, capability and comparisons mean, in sentences for the person at the bench. Pure. */
#ifndef SWARD_JUDGE_SENTENCE_H
#define SWARD_JUDGE_SENTENCE_H
#include "base/text.h"
#include "judge/capability.h"
#include "judge/chart.h"
#include "judge/finding.h"
#include "judge/trend.h"

/* What is spoken about. Every function adds one sentence or more, without a line break at the end; a failed append stays
 * in the text (text_check). */
typedef struct {
    const char *quantity, *unit; /* column name ("spacing_nm" is spoken as "spacing"); "" without unit */
    int digits;                  /* as the column prints */
    double min, max;             /* target range, NAN open */
} sentence_subject;

/* "spacing", as spoken. */
void sentence_name(const sentence_subject *s, textbuf *t);
/* Whether a slope is called a drift: Kendall's p below 0.003 (as rare as a value beyond 3 sigma) and 0 outside its interval. */
int sentence_drifts(const trend_slope *d);
/* "spacing drifts by +11.2 nm per etch (95 %: 8.1 to 14.3); at this rate it leaves its target in 5 etches"; per_day may be
 * NULL. Where only the 95 % interval leaves out 0 it "may drift"; else no clear drift, with the interval. */
void sentence_drift(const sentence_subject *s, const trend_slope *per_etch, const trend_slope *per_day, textbuf *t);
/* Centre, limits and what they rest on; a phase without limits says what is missing. steady: its stated
 * points are those of its first steady stretch. */
void sentence_phase(const sentence_subject *s, const chart_phase *p, const chart_options *o, int steady, textbuf *t);
/* "W7 lies beyond 3 sigma (high side: 402 nm, 4.1 sigma from the centre)"; every rule that fired. */
void sentence_alarm(const sentence_subject *s, const char *sample, const chart_point *p, textbuf *t);
/* How often the rules cry wolf on a steady process: with known limits, and (`drawn`, NAN: not said) with all that is on this chart and
 * limits from `baseline` etches. */
void sentence_false_alarms(const chart_options *o, double drawn, size_t baseline, textbuf *t);
/* "spacing of W7 stands out: 402 nm between neighbours at 350 nm", and what to do first. */
void sentence_outlier(const sentence_subject *s, const char *etch, const finding_outlier *o, textbuf *t);
/* "spacing steps by -21 nm (95 %: ...) between W7 and W8", "the drift of spacing changes at W8". */
void sentence_break(const sentence_subject *s, const char *before, const char *etch, const finding_break *b, textbuf *t);
/* A drift inside the series: "spacing drifted by ... per etch from W7 to W30, +12 nm in all". */
void sentence_stretch(const sentence_subject *s, const char *first, const char *last, const trend_slope *d, textbuf *t);
/* "after 'chamber clean' spacing lies 12 nm lower (95 %: ...)": the first etches behind a change against the last before it. */
void sentence_since(const sentence_subject *s, const char *change, const trend_step *d, textbuf *t);
void sentence_capability(const sentence_subject *s, const capability *c, textbuf *t);
void sentence_step(const sentence_subject *s, const char *a, const char *b, const trend_step *d, textbuf *t);
/* The straight line on a setting: how much it moves the quantity. */
void sentence_line(const sentence_subject *s, const char *setting, const trend_line *l, textbuf *t);
/* "the etch_time_s that brings spacing to 350 nm: 212 (198 to 226)", from the data, with the cautions. */
void sentence_setting(const sentence_subject *s, const char *setting, double wanted, const trend_setting *r, textbuf *t);

#endif
