/* Targets and verdicts under uncertainty: ISO 14253-1 (default rule), JCGM 106. */
#ifndef SWARD_JUDGE_TARGET_H
#define SWARD_JUDGE_TARGET_H
#include <stddef.h>

#include "base/status.h"
#include "base/text.h"

/* In order of badness for the worst-of rule: fails > undecided > conforms; the other two do not count. */
typedef enum { VERDICT_NO_TARGET, VERDICT_NOT_MEASURED, VERDICT_CONFORMS, VERDICT_UNDECIDED, VERDICT_FAILS } verdict;
const char *verdict_word(verdict v); /* no_target not_measured conforms undecided fails */

typedef enum { ERROR_FULL, ERROR_REPEAT } error_kind; /* "error": "repeat" counts only what varies from run to run */

/* GUARD: a guard band of 1.645 u inside each limit (95 % on that side). SIMPLE: the value alone, as if u were 0.
 * PROBABILITY: the value conforms when the probability of lying inside both limits is at least `at_least`, fails when that of
 * lying outside is. Between the two of GUARD and PROBABILITY: undecided. */
typedef enum { DECIDE_GUARD, DECIDE_SIMPLE, DECIDE_PROBABILITY } decision;
const char *decision_word(decision d); /* guard simple probability */

typedef struct {
    char *quantity;   /* column name: spacing_nm, weighted_reflectance, one of the sheet ...; owned */
    double min, max;  /* NAN: open */
    error_kind error;
    decision rule;
    double at_least;  /* of PROBABILITY */
    int of_sheet;     /* a column of the sample sheet */
    size_t sheet_at, sheet_u_at; /* its column and that of its standard uncertainty, counted from 1; 0: none */
} target;
/* "guard band of 1.645 u inside each limit (ISO 14253-1)", "conformance probability of at least 0.9 (JCGM 106)". */
void target_rule_text(const target *t, textbuf *out);
target target_defaults(void); /* open, ERROR_FULL, DECIDE_GUARD, 0.95 */

/* What was measured. Either u (and u_repeat) or lo..hi (95 %, may be asymmetric) is given. */
typedef struct {
    double value;          /* NAN: not measured */
    double u, u_repeat;    /* standard; NAN unknown */
    double lo, hi;         /* NAN: use value -+ 1.645 u per limit */
    const char *unit;
    int digits;            /* as the column prints */
} reading;

typedef struct {
    verdict verdict;
    double conformance_probability; /* normal, JCGM 106 ; of an interval only where the rule asks; NAN unknown */
    char sentence[400];             /* "spacing_nm 351.2 +- 16 nm (k = 2) lies inside 280..420 nm" */
} judgement;

/* By the target's rule; the sentence names a rule that is not GUARD. No u: undecided, with the reason, except by SIMPLE. */
void judge(const target *t, const reading *r, judgement *out);

/* The largest standard uncertainty with which a value there would be decided; 0 on a limit, infinite for SIMPLE. */
double target_settling_u(const target *t, double value);

/* The worst of n. */
verdict verdict_worst(const verdict *v, size_t n);

#endif
