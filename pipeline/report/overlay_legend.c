/* The legend of an overlay: signs with their meaning, set one after the other and broken into rows like words, and below
 * them the reasons of an excluded micrograph. It stands below the picture, so that nothing is written over what was seen. */
#include <math.h>
#include <stdio.h>

#include "base/flags.h"
#include "base/number.h"
#include "base/quantity.h"
#include "report/html.h"
#include "report/overlay_priv.h"
#include "report/rows.h"
#include "report/scalebar_priv.h"

typedef enum { SIGN_BAR, SIGN_RING, SIGN_COUNTED, SIGN_FRAME, SIGN_CELL, SIGN_CUT, SIGN_STRIP } sign;
enum { MOST_ENTRIES = 7 };

typedef struct {
    sign sign;
    double length; /* of the sign, px */
    char label[112];
} entry;

static int has_scale(const micrograph *m) { return isfinite(m->px_nm) && m->px_nm > 0.0; }

double overlay_bar_length(const micrograph *m) { return scalebar_length(0.22 * (double)m->nx * (has_scale(m) ? m->px_nm : 1.0)); }

/* A length as the table prints it, in its unit. */
static const char *spacing_text(const micrograph *m, double px, char out[NUMBER_TEXT]) {
    const column *c = column_find(image_columns, n_image_columns, "spacing_acf_nm");
    return number_text(has_scale(m) ? px * m->px_nm : px, c ? c->digits : 5, out);
}

static void count_apart(const texture *t, size_t *frame, size_t *cut) {
    *frame = *cut = 0;
    for (size_t i = 0; i < t->n_found; i++) {
        *frame += !t->features[i].in_guard;
        *cut += !(t->features[i].weight > 0.0);
    }
}

static size_t list_entries(const overlay_scene *s, entry out[MOST_ENTRIES]) {
    const micrograph *m = s->m;
    char number[NUMBER_TEXT];
    double bar = overlay_bar_length(m), em = s->em;
    size_t n = 0, frame, cut;
    count_apart(s->t, &frame, &cut);
    out[n] = (entry){ .sign = SIGN_BAR, .length = bar / (has_scale(m) ? m->px_nm : 1.0) };
    if (has_scale(m)) scalebar_label(bar, out[n].label, sizeof out[n].label);
    else snprintf(out[n].label, sizeof out[n].label, "%s px (no pixel size)", number_text(bar, 4, number));
    n++;
    if (isfinite(s->ring)) {
        out[n] = (entry){ .sign = SIGN_RING, .length = 1.1 * em };
        snprintf(out[n].label, sizeof out[n].label, "ring: spacing %s %s", spacing_text(m, s->ring, number), has_scale(m) ? "nm" : "px");
        n++;
    }
    out[n] = (entry){ .sign = SIGN_COUNTED, .length = 0.7 * em };
    snprintf(out[n].label, sizeof out[n].label, "%zu features counted", s->t->n_features);
    n++;
    if (frame) {
        out[n] = (entry){ .sign = SIGN_FRAME, .length = 0.9 * em };
        snprintf(out[n].label, sizeof out[n].label, "%zu in the guard frame%s, not counted", frame, m->masked ? " or at a mark" : "");
        n++;
    }
    if (s->t->cells && s->t->n_found) {
        out[n++] = (entry){ .sign = SIGN_CELL, .length = 1.4 * em, .label = "cell border" };
        if (cut) {
            out[n] = (entry){ .sign = SIGN_CUT, .length = 1.2 * em };
            snprintf(out[n].label, sizeof out[n].label, "%zu cut by the picture's edge%s, no size", cut, m->masked ? " or a mark" : "");
            n++;
        }
    }
    if (m->strip || m->masked) {
        out[n] = (entry){ .sign = SIGN_STRIP, .length = 1.2 * em };
        snprintf(out[n].label, sizeof out[n].label, "%s%s%s, not measured", m->strip ? "info strip" : "",
                 m->strip && m->masked ? " and " : "", m->masked ? "marks in the picture" : "");
        n++;
    }
    return n;
}

static void draw_swatch(pen *p, double x, double y, double width, double em, double grey) {
    cairo_rectangle(p->cr, x, y - 0.4 * em, width, 0.8 * em);
    pen_ink(p, (ink){ grey, grey, grey, 1.0 });
    cairo_fill_preserve(p->cr);
    cairo_set_line_width(p->cr, 0.06 * em);
    pen_ink(p, (ink){ 1.0, 1.0, 1.0, 0.6 });
    cairo_stroke(p->cr);
}

static void draw_sign(const overlay_scene *s, pen *p, const entry *q, double x, double y) {
    double em = s->em, middle = x + 0.5 * q->length;
    switch (q->sign) {
    case SIGN_BAR:
        pen_ink(p, PAPER_INK);
        scalebar_draw(p, x, y, q->length, em);
        break;
    case SIGN_RING:
        cairo_arc(p->cr, middle, y, 0.48 * em, 0.0, 2.0 * PI);
        pen_two_tone(p, 0.12 * em, PAPER_INK);
        break;
    case SIGN_COUNTED:
        overlay_disc(p, middle, y, 0.3 * em);
        pen_ink(p, COUNTED_INK);
        cairo_fill(p->cr);
        break;
    case SIGN_FRAME:
        overlay_diamond(p, middle, y, 0.4 * em);
        pen_two_tone(p, 0.12 * em, FRAME_INK);
        break;
    case SIGN_CELL:
        cairo_move_to(p->cr, x, y + 0.2 * em);
        cairo_line_to(p->cr, middle, y - 0.2 * em);
        cairo_line_to(p->cr, x + q->length, y + 0.2 * em);
        pen_two_tone(p, 0.12 * em, CELL_INK);
        break;
    case SIGN_CUT:
        draw_swatch(p, x, y, q->length, em, 0.46);
        break;
    case SIGN_STRIP:
    default:
        draw_swatch(p, x, y, q->length, em, 0.3);
        break;
    }
}

/* The entries from `top` on; returns the height they take. */
static double flow(const overlay_scene *s, pen *p, double top, int draw) {
    entry list[MOST_ENTRIES];
    size_t n = list_entries(s, list);
    double em = s->em, left = 0.7 * em, right = (double)s->m->nx - 0.5 * em, row = 1.6 * em, x = left, y = top + 0.4 * em + 0.5 * row;
    for (size_t k = 0; k < n; k++) {
        double room = fmax(right - left - list[k].length - 0.45 * em, em), label = pen_width_within(p, room, list[k].label);
        double width = list[k].length + 0.45 * em + label;
        if (x > left && x + width > right) {
            x = left;
            y += row;
        }
        if (draw) {
            draw_sign(s, p, &list[k], x, y);
            pen_ink(p, PAPER_INK);
            pen_text_within(p, x + list[k].length + 0.45 * em, y + 0.36 * em, 0.0, room, list[k].label);
        }
        x += width + 1.5 * em;
    }
    return y + 0.5 * row + 0.4 * em - top;
}

/* "excluded: few pixels, blurred" */
static void reasons_text(flags reasons, textbuf *out) {
    text_add(out, "excluded: ");
    for (int bit = 0, first = 1; bit < FLAG_COUNT; bit++) {
        if (!(reasons >> bit & 1)) continue;
        if (!first) text_add(out, ", ");
        text_add(out, flag_word(bit));
        first = 0;
    }
    for (size_t i = 0; i < out->n; i++)
        if (out->s[i] == '_') out->s[i] = ' ';
}

/* The next line: as many words as fit, one at least. Returns its bytes. */
static size_t line_length(pen *p, char *text, double width) {
    size_t best = 0;
    for (size_t k = 1; text[k - 1]; k++) {
        if (text[k] != ' ' && text[k]) continue;
        char kept = text[k];
        text[k] = '\0';
        double w = pen_width(p, text);
        text[k] = kept;
        if (best && w > width) break;
        best = k;
    }
    return best;
}

static double draw_reasons(const overlay_scene *s, pen *p, double top, int draw) {
    flags reasons = s->t->reasons | (has_scale(s->m) ? 0 : FLAG(NO_PIXEL_SIZE));
    if (!reasons) return 0.0;
    textbuf t = { 0 };
    reasons_text(reasons, &t);
    if (t.failed) p->failed = 1;
    double em = s->em, pad = 0.7 * em, row = 1.5 * em, y = top, height = 0.0;
    for (int pass = 0; pass <= draw && t.s && !t.failed; pass++) { /* the height first, then ground and letters */
        if (pass) {
            cairo_rectangle(p->cr, 0.0, top, (double)s->m->nx, height);
            pen_ink(p, REASON_INK);
            cairo_fill(p->cr);
            pen_ink(p, PAPER_INK);
        }
        y = top + 0.35 * em;
        for (char *line = t.s; *line;) {
            size_t n = line_length(p, line, (double)s->m->nx - 2.0 * pad);
            char kept = line[n];
            line[n] = '\0';
            if (pass) pen_text_within(p, pad, y + 1.1 * em, 0.0, (double)s->m->nx - 2.0 * pad, line);
            y += row;
            line[n] = kept;
            line += n;
            while (*line == ' ') line++;
        }
        height = y + 0.35 * em - top;
    }
    text_free(&t);
    return height;
}

double overlay_legend(const overlay_scene *s, pen *p, double y, int draw) {
    pen_em(p, s->em);
    double height = ceil(flow(s, p, y, draw));
    return height + ceil(draw_reasons(s, p, y + height, draw));
}
