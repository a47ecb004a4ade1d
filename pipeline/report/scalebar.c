#include "report/scalebar_priv.h"

#include <math.h>
#include <stdio.h>

#include "base/number.h"

double scalebar_length(double most) {
    double decade = pow(10.0, floor(log10(most))), lead = most / decade * (1.0 + 1e-12);
    return decade * (lead >= 5.0 ? 5.0 : lead >= 2.0 ? 2.0 : 1.0);
}

void scalebar_label(double length_nm, char *out, size_t room) {
    static const struct {
        double from, factor;
        const char *unit;
    } units[] = { { 0.999e6, 1e-6, "mm" }, { 0.999e3, 1e-3, "\xc2\xb5m" }, { 0.0, 1.0, "nm" } };
    size_t k = 0;
    char number[NUMBER_TEXT];
    while (length_nm < units[k].from) k++;
    snprintf(out, room, "%s %s", number_text(length_nm * units[k].factor, 4, number), units[k].unit);
}

void scalebar_draw(pen *p, double x, double y, double length, double em) {
    double w = 0.16 * em, tick = 0.42 * em, end = fmin(w, 0.5 * length);
    cairo_rectangle(p->cr, x, y - 0.5 * w, length, w);
    cairo_rectangle(p->cr, x, y - tick, end, 2.0 * tick);
    cairo_rectangle(p->cr, x + length - end, y - tick, end, 2.0 * tick);
    cairo_fill(p->cr);
}
