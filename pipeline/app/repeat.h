/* How well a measurement repeats: repeated micrographs of the same places to repeatability, reproducibility, and what that means
 * against the width of a target. */
#ifndef SWARD_APP_REPEAT_H
#define SWARD_APP_REPEAT_H
#include "app/examine.h"
#include "metrics/anova.h"

/* One usable micrograph: labels of place, operator and session as small numbers, equal for equal text. */
typedef struct {
    int place, operator_id, session;
    const examined *image;
} repeat_reading;

enum { REPEAT_PLACE, REPEAT_OPERATOR, REPEAT_SESSION };

/* One quantity. Standard deviations in its unit; NAN: could not be told apart (that cause never varied, or nothing was repeated). */
typedef struct {
    const char *quantity; /* column of images.csv, and of samples.csv where it stands there */
    const char *unit;     /* "" for ratios */
    int digits;
    size_t n, places, groups; /* micrographs, places, and combinations of place, operator and session */
    double mean;
    double s_repeat, dof_repeat; /* same place, same conditions (ISO 5725-2 s_r) */
    double s_operator, s_session, s_place;
    double s_reproduce;          /* operators, sessions and repetition together (s_R), without places */
    double limit_repeat, limit_reproduce; /* two single readings differ by less in 95 % of cases: 1.96 sqrt(2) s */
    double u_common;             /* method and pixel size: what repetition cannot show; mean over the micrographs */
    double width;                /* of the target, max - min; NAN: no target with two limits */
    double share_repeat, share_full; /* 4 u / width, with u of s_R alone and with u_common; ISO 22514-7 asks for at most 0.30 */
    double index_repeat, index_full; /* 0.3 width / (3 u), at least 1.33 */
} repeat_result;

/* Analysis of one quantity (index into quantity_table).
 *   in  min, max of its target, NAN where open
 *   err ST_NO_RESULT fewer than two readings; ST_NO_MEMORY
 *   src ISO 5725-2 and -3 (nested), ISO 22514-7 (capability of measurement processes: Q_MP, C_MP), both from memory */
status repeat_analyse(const repeat_reading *r, size_t n, int q, double min, double max, repeat_result *out, error *e);

void repeat_text(const repeat_result *r, textbuf *out);
void repeat_json(const repeat_result *r, textbuf *out);

#endif
