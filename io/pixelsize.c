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
static const double day_to_day =
    0.001; /* of a magnification since its standard was measured; a rule of ours */
static const double most_unequal = 4.0; /* beyond: two different axes, not a picture of a surface */

static int is_screens(const scale *k) {
    return k->rank == SCALE_RESOLUTION && !(k->x_nm < gate_nm && k->y_nm < gate_nm);
}

static int passes(const scale *k) {
    double ratio = k->y_nm / k->x_nm;
    return !is_screens(k) && ratio <= most_unequal && ratio >= 1.0 / most_unequal;
}

static int by_rank(const scale *a, const scale *b) { return a->rank < b->rank; }

/* The statements that count, the most specific first; equals as they were met. */
static void list_statements(const scales *s, micrograph *m) {
    const scale *sorted[MAX_SCALES];
    size_t n = 0;
    for (size_t i = 0; i < s->n; i++) {
        if (!passes(&s->list[i])) continue;
        size_t k = n++;
        for (; k && by_rank(&s->list[i], sorted[k - 1]); k--) sorted[k] = sorted[k - 1];
        sorted[k] = &s->list[i];
    }
    for (size_t k = 0; k < n; k++) {
        m->statements[k] = (px_statement){ .x_nm = sorted[k]->x_nm, .y_nm = sorted[k]->y_nm };
        memcpy(m->statements[k].source, sorted[k]->name, sizeof m->statements[k].source);
    }
    m->n_statements = n;
}

static void say_unused(const scales *s, micrograph *m) {
    char a[NUMBER_TEXT];
    for (size_t i = 0; i < s->n; i++) {
        const scale *k = &s->list[i];
        if (is_screens(k))
            note_add(m->note, "The %s field says %s um per pixel: a screen or print resolution, not used.",
                     k->name, number_text(k->x_nm / 1e3, 4, a));
        else if (!passes(k))
            note_add(m->note,
                     "The pixels of %s are %s times as high as wide: no picture of a surface, not used.",
                     k->name, number_text(k->y_nm / k->x_nm, 3, a));
    }
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
    m->y_stretch = 1.0;
    list_statements(s, m);
    if (!best) {
        m->px_nm = m->px_u_rel = (double)NAN;
        snprintf(m->px_source, sizeof m->px_source, "none");
        m->flags |= FLAG(NO_PIXEL_SIZE);
        say_unused(s, m);
        return;
    }
    m->px_nm = best->x_nm;
    double least = best->rank == SCALE_STANDARD ? day_to_day : px_u_rel;
    m->px_u_rel = isfinite(best->u_rel) && best->u_rel > least ? best->u_rel : least;
    memcpy(m->px_source, best->name, sizeof m->px_source);
    if (fabs(best->y_nm / best->x_nm - 1.0) > square) {
        m->flags |= FLAG(PX_UNEQUAL);
        m->y_stretch = best->y_nm / best->x_nm;
        note_add(
            m->note,
            "Pixels are not square: %s nm wide and %s nm high (%s); the rows were resampled to the width.",
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
