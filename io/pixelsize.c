/* Which of several statements about the pixel size counts. The most specific wins; every other one that
 * differs by more than 2 % is named. Resolution fields of TIFF and PNG count only below 1 um per pixel:
 * screens, printers and scanners are all far above (25 400 dpi), no useful picture of a nanotexture is. The
 * gate and the 2 % are rules of this project. Nothing is ever computed from a magnification. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/number.h"
#include "io/pixelsize_priv.h"

static const double gate_nm = 1000.0, agree = 0.02, square = 0.001, smallest_nm = 0.01, largest_nm = 1e5;

static int passes(const scale *k) {
    return k->rank != SCALE_RESOLUTION || (k->x_nm < gate_nm && k->y_nm < gate_nm);
}

/* Two statements of 2, 4 or 2.54 to 1 have a usual cause worth naming. */
static const char *likely_cause(double ratio) {
    if (ratio < 1.0) ratio = 1.0 / ratio;
    if (fabs(ratio - 2.54) < 0.0254) return " (inch taken for centimetre?)";
    if (fabs(ratio - 2.0) < 0.01 || fabs(ratio - 4.0) < 0.02) return " (was the image resized?)";
    return "";
}

void pixelsize_choose(const scales *s, double px_u_rel, micrograph *m) {
    const scale *best = NULL;
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    for (size_t i = 0; i < s->n; i++)
        if (passes(&s->list[i]) && (!best || s->list[i].rank < best->rank)) best = &s->list[i];
    if (s->note[0]) note_add(m->note, "%s", s->note);
    if (!best) {
        m->px_nm = m->px_u_rel = (double)NAN;
        snprintf(m->px_source, sizeof m->px_source, "none");
        m->flags |= FLAG(NO_PIXEL_SIZE);
        for (size_t i = 0; i < s->n; i++)
            note_add(m->note, "The %s field says %s um per pixel: a screen or print resolution, not used.",
                     s->list[i].name, number_text(s->list[i].x_nm / 1e3, 4, a));
        return;
    }
    m->px_nm = best->x_nm;
    m->px_u_rel = isfinite(best->u_rel) && best->u_rel > px_u_rel ? best->u_rel : px_u_rel;
    memcpy(m->px_source, best->name, sizeof m->px_source);
    if (fabs(best->y_nm / best->x_nm - 1.0) > square) {
        m->flags |= FLAG(PX_UNEQUAL);
        note_add(m->note,
                 "Pixels are not square: %s nm wide and %s nm high (%s); the width was used for both.",
                 number_text(best->x_nm, 6, a), number_text(best->y_nm, 6, b), best->name);
    }
    if (best->x_nm < smallest_nm || best->x_nm > largest_nm) {
        m->flags |= FLAG(PX_ODD);
        note_add(m->note, "A pixel of %s nm (%s) is hard to believe; is the unit right?",
                 number_text(best->x_nm, 6, a), best->name);
    }
    for (size_t i = 0; i < s->n; i++) {
        const scale *k = &s->list[i];
        double ratio = k->x_nm / best->x_nm;
        if (k == best || !passes(k) || fabs(ratio - 1.0) <= agree) continue;
        m->flags |= FLAG(PX_DISAGREE);
        note_add(m->note, "Pixel size %s nm (%s) was used, but %s says %s nm%s.",
                 number_text(best->x_nm, 6, a), best->name, k->name, number_text(k->x_nm, 6, b),
                 likely_cause(ratio));
    }
}
