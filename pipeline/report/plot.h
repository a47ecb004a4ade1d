/* Charts as static SVG: round ticks, units on the axes, a legend, no script. Colours are CSS variables with fallbacks, so
 * the same text works inside the page (light, dark, print) and as a file of its own. */
#ifndef SWARD_REPORT_PLOT_H
#define SWARD_REPORT_PLOT_H
#include <stddef.h>

#include "base/text.h"

typedef enum {
    PLOT_LINE,
    PLOT_DASHED,
    PLOT_DOTTED,
    PLOT_POINTS,
    PLOT_STEPS /* a histogram: x are the middles of equal bins; the area below is filled */
} plot_style;
typedef enum {
    MARK_DISC,
    MARK_DIAMOND,
    MARK_TRIANGLE,
    MARK_SQUARE
} plot_mark; /* of a point: shape and colour */

typedef struct {
    const double *x, *y;   /* [n]; a value that is not finite breaks the line or leaves the point out */
    const double *lo, *hi; /* [n] a band behind a line, error bars on points; NULL: none */
    size_t n;
    plot_style style;
    int tone;               /* colour of a line, 0 .. PLOT_TONES - 1 */
    const char *label;      /* in the legend and the table; NULL: not listed */
    int unlisted;           /* 1: the legend leaves it out, the table does not */
    const plot_mark *marks; /* [n] for PLOT_POINTS; NULL: discs of the tone */
    const char *const *point_names; /* [n] what each point is, where the axis has no names; NULL: none */
} plot_series;
enum { PLOT_TONES = 5 }; /* blue, amber, grey, teal, violet */

typedef struct {
    double at; /* of x; not finite: not drawn */
    const char *label;
    int tone;
} plot_rule; /* a dashed line from bottom to top */

typedef struct {
    const char *title, *x_label, *y_label; /* with units; escaped here */
    const char *description;               /* for a reader who cannot see the chart; NULL: the title */
    int log_y;                             /* logarithmic axis; values that are not positive lie below it */
    int from_zero;                         /* the linear axis begins at 0 */
    double y_lo, y_hi; /* ends of the axis, NAN: from the values. Points and bands beyond lie on its edge */
    double target_lo, target_hi; /* shaded range with its limits drawn; NAN: open on that side */
    const char *target_label;    /* in the legend; NULL: not listed */
    const char *const *names; /* [n_names] an axis of names: series x are 0 .. n_names - 1; NULL: numbers */
    size_t n_names;
    const plot_series *series;
    size_t n_series;
    const plot_rule *rules;
    size_t n_rules;
    const char *const *mark_words; /* [4] of the table, as plot_mark; NULL: verdicts */
    const char *mark_title;        /* head of their column; NULL: verdict */
    int width, height; /* of the view box, px; 0: 720 x 320 */
    int no_legend;     /* the page says once for many charts what their lines are */
} plot;

/* Appends one <svg> element; failure is remembered in `out` (text_check). Without any finite value the chart says so. */
void plot_svg(const plot *p, textbuf *out);

/* The same values as a folded table, one line a point: series, x, y and the ends of its band or bar, verdict
 * and name of points. One tbody a series. Series before `first` and points without a value are left out; `first` keeps a reference that
 * many charts share from being told again. `id` of the table, NULL: none. */
void plot_table(const plot *p, size_t first, const char *id, textbuf *out);

/* Chart of the page: the static drawing in a box whose attribute data-plot describes it, followed by its table. The page's
 * script draws the same anew, to be asked point by point, from that description and the numbers of the table.
 *   in   first, shared: series before `first` stand in the table with the id `shared` (NULL when first is 0) */
void plot_chart(const plot *p, size_t first, const char *shared, textbuf *out);

/* Up to `max` round ticks (1, 2, 5 x 10^k) that cover lo..hi from inside; returns how many. For tests and for maps. */
size_t plot_ticks(double lo, double hi, size_t max, double *ticks);

#endif
