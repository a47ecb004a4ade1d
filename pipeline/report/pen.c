/* DejaVu Sans (embedded at build time) through FreeType into cairo. Hinting is off and antialiasing grey, so that glyphs
 * do not depend on the size of the pixels or on the settings of the machine. Each pen has a FreeType library of its
 * own: FreeType is thread-safe as long as no library is shared (its documentation, FT_Library). cairo keeps the last
 * scaled fonts in a cache of fixed size; the face lives until cairo has let go of it. Letters are placed one after the other by their
 * advances: no kerning, no shaping of joined scripts. */
#include "report/pen_priv.h"

#include <cairo-ft.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "report/html.h"

extern const unsigned char typeface[];
extern const size_t typeface_bytes;

typedef struct {
    FT_Library library;
    FT_Face face;
} loaded;

static void unload(void *data) {
    loaded *l = data;
    if (l->face) FT_Done_Face(l->face);
    if (l->library) FT_Done_FreeType(l->library);
    free(l);
}

static status open_face(cairo_font_face_t **out, error *e) {
    static const cairo_user_data_key_t key; /* only its address counts */
    loaded *l = mem_array(1, sizeof *l);
    if (!l) return NO_MEMORY(e, "the typeface");
    if (FT_Init_FreeType(&l->library) || FT_New_Memory_Face(l->library, typeface, (FT_Long)typeface_bytes, 0, &l->face)) {
        unload(l);
        return NO_MEMORY(e, "the typeface");
    }
    cairo_font_face_t *face = cairo_ft_font_face_create_for_ft_face(l->face, FT_LOAD_NO_HINTING | FT_LOAD_NO_BITMAP);
    if (cairo_font_face_set_user_data(face, &key, l, unload)) {
        cairo_font_face_destroy(face);
        unload(l);
        return NO_MEMORY(e, "the typeface");
    }
    *out = face;
    return ST_OK;
}

status pen_open(cairo_surface_t *surface, pen *p, error *e) {
    *p = (pen){ 0 };
    status st = open_face(&p->face, e);
    if (st) return st;
    p->cr = cairo_create(surface);
    cairo_set_font_face(p->cr, p->face);
    cairo_font_options_t *o = cairo_font_options_create();
    cairo_font_options_set_antialias(o, CAIRO_ANTIALIAS_GRAY);
    cairo_font_options_set_hint_style(o, CAIRO_HINT_STYLE_NONE);
    cairo_font_options_set_hint_metrics(o, CAIRO_HINT_METRICS_OFF);
    cairo_set_font_options(p->cr, o);
    cairo_font_options_destroy(o);
    pen_em(p, 10.0);
    return pen_check(p, e);
}

void pen_close(pen *p) {
    if (p->cr) cairo_destroy(p->cr);
    if (p->face) cairo_font_face_destroy(p->face);
    *p = (pen){ 0 };
}

status pen_check(const pen *p, error *e) {
    cairo_status_t s = cairo_status(p->cr);
    if (!s && !p->failed) return ST_OK;
    return !s || s == CAIRO_STATUS_NO_MEMORY ? NO_MEMORY(e, "a drawing") : fail(e, ST_BUG, "the drawing failed: %s", cairo_status_to_string(s));
}

void pen_ink(pen *p, ink i) { cairo_set_source_rgba(p->cr, i.r, i.g, i.b, i.a); }

void pen_em(pen *p, double em) {
    p->em = em;
    cairo_set_font_size(p->cr, em);
}

void pen_two_tone(pen *p, double width, ink i) {
    cairo_set_line_width(p->cr, 2.2 * width);
    pen_ink(p, (ink){ 0.0, 0.0, 0.0, 0.6 });
    cairo_stroke_preserve(p->cr);
    cairo_set_line_width(p->cr, width);
    pen_ink(p, i);
    cairo_stroke(p->cr);
}

static double width_of(const pen *p, const char *text) {
    cairo_text_extents_t x;
    cairo_text_extents(p->cr, text, &x);
    return x.x_advance;
}

/* The longest beginning that fits with the ellipsis, by bisection over its letters. */
static void shorten(const pen *p, double width, textbuf *safe) {
    static const char ellipsis[] = "\xe2\x80\xa6";
    size_t lo = 0, hi = 256;
    while (lo + 1 < hi) {
        size_t middle = (lo + hi) / 2;
        textbuf t = { 0 };
        text_add_n(&t, safe->s, html_fit(safe->s, middle));
        text_add(&t, ellipsis);
        if (!t.failed && width_of(p, t.s) <= width) lo = middle;
        else hi = middle;
        text_free(&t);
    }
    size_t keep = html_fit(safe->s, lo);
    while (keep && safe->s[keep - 1] == ' ') keep--;
    safe->n = keep;
    text_add(safe, ellipsis);
}

/* The text as it is drawn; {0} without memory, which pen_check reports. */
static textbuf prepare(pen *p, double width, const char *text) {
    textbuf t = { 0 };
    text_safe(&t, text);
    if (t.s && !t.failed && width_of(p, t.s) > width) shorten(p, width, &t);
    if (t.failed) {
        p->failed = 1;
        text_free(&t);
    }
    return t;
}

double pen_width_within(pen *p, double width, const char *text) {
    textbuf t = prepare(p, width, text);
    double w = t.s ? width_of(p, t.s) : 0.0;
    text_free(&t);
    return w < width ? w : width;
}

double pen_width(pen *p, const char *text) { return pen_width_within(p, 1e9, text); }

void pen_text_within(pen *p, double x, double y, double align, double width, const char *text) {
    textbuf t = prepare(p, width, text);
    if (t.s) {
        double w = align > 0.0 ? width_of(p, t.s) : 0.0;
        cairo_move_to(p->cr, x - align * w, y);
        cairo_show_text(p->cr, t.s);
        cairo_new_path(p->cr);
    }
    text_free(&t);
}

void pen_text(pen *p, double x, double y, double align, const char *text) { pen_text_within(p, x, y, align, 1e9, text); }
