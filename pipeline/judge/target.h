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

typedef struct {
    char *quantity;   /* column name: spacing_nm, weighted_reflectance ...; owned */
    double min, max;  /* NAN: open */
    error_kind error;
} target;

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
    double conformance_probability; /* normal, JCGM 106; NAN unknown */
    char sentence[400];             /* "spacing_nm 351.2 +- 16 nm (k = 2) lies inside 280..420 nm" */
} judgement;

/* Conformance probability at least 95 % per limit: conforms; the same for the outside: fails; else undecided. No u:
 * undecided, with the reason. */
void judge(const target *t, const reading *r, judgement *out);

/* The worst of n. */
verdict verdict_worst(const verdict *v, size_t n);

#endif
