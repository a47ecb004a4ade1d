/* Labels of points in a map: greedy, each where it hides least of what is there already. */
#include <math.h>

#include "report/sheet_priv.h"

static double overlap(const sheet_box *a, const sheet_box *b) {
    double w = fmin(a->x1, b->x1) - fmax(a->x0, b->x0), h = fmin(a->y1, b->y1) - fmax(a->y0, b->y0);
    return w > 0.0 && h > 0.0 ? w * h : 0.0;
}

double sheet_place_label(double x, double y, double width, double em, const sheet_box *taken, size_t n, sheet_box *out) {
    const double gap = 0.72 * em, half = 0.5 * width;
    const sheet_box tries[4] = { { x - half, y + gap, x + half, y + gap + em },
                                 { x - half, y - gap - em, x + half, y - gap },
                                 { x + gap, y - 0.5 * em, x + gap + width, y + 0.5 * em },
                                 { x - gap - width, y - 0.5 * em, x - gap, y + 0.5 * em } };
    double least = HUGE_VAL;
    for (size_t k = 0; k < 4; k++) {
        double hidden = 0.0;
        for (size_t i = 0; i < n; i++) hidden += overlap(&tries[k], &taken[i]);
        if (!(hidden < least)) continue;
        least = hidden;
        *out = tries[k];
    }
    return least;
}
