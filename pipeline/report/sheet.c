/* Sizes, surfaces and files of figures. SVG gets a title and a description in words behind its first line, because cairo draws
 * letters as outlines there; PDF gets its title, no date. Tones differ in hue and in lightness. */
#include "report/sheet.h"

#include <cairo-pdf.h>
#include <cairo-svg.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/limits.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/png_write.h"
#include "report/html.h"
#include "report/sheet_priv.h"

static const double pt_per_mm = 72.0 / 25.4;

sheet_options sheet_defaults(void) { return (sheet_options){ .format = SHEET_SVG, .width_mm = 85.0, .dpi = 300.0, .text_pt = 7.0 }; }

/* The tones of samples, the first four, get lighter one after the other, so that they differ in grey too. */
sheet_colours sheet_light(void) {
    return (sheet_colours){ .paper = INK_RGB(0xffffff), .ink = INK_RGB(0x14181d), .soft = INK_RGB(0x4a525c), .faint = INK_RGB(0xdfe3e8),
                            .target = INK_RGB(0x0b7a5f),
                            .tone = { INK_RGB(0x1f3f8f), INK_RGB(0xc2500c), INK_RGB(0x2f9e86), INK_RGB(0xd9a400), INK_RGB(0x9430e8) },
                            .mark = { INK_RGB(0x1f3f8f), INK_RGB(0xd9a400), INK_RGB(0xb3261e), INK_RGB(0xffffff) } };
}

sheet_colours sheet_dark(void) {
    return (sheet_colours){ .paper = INK_RGB(0x14181d), .ink = INK_RGB(0xf1f4f7), .soft = INK_RGB(0xb4bdc8), .faint = INK_RGB(0x343b44),
                            .target = INK_RGB(0x4fd1ae),
                            .tone = { INK_RGB(0x7fa8ff), INK_RGB(0xff9a5c), INK_RGB(0x5fe0c4), INK_RGB(0xffe08a), INK_RGB(0xb060ff) },
                            .mark = { INK_RGB(0x7fa8ff), INK_RGB(0xffe08a), INK_RGB(0xff8a80), INK_RGB(0x14181d) } };
}

static status check_options(const sheet_options *o, double height_mm, error *e) {
    if (!(o->width_mm >= 20.0 && o->width_mm <= 1000.0))
        return fail(e, ST_BAD_INPUT, "a figure is 20 to 1000 mm wide, not %g", o->width_mm);
    if (!(height_mm >= 20.0 && height_mm <= 1500.0)) return fail(e, ST_BAD_INPUT, "a figure is 20 to 1500 mm high, not %g", height_mm);
    if (!(o->dpi >= 30.0 && o->dpi <= 1200.0)) return fail(e, ST_BAD_INPUT, "a picture has 30 to 1200 dots per inch, not %g", o->dpi);
    if (!(o->text_pt >= 4.0 && o->text_pt <= 40.0)) return fail(e, ST_BAD_INPUT, "the lettering is 4 to 40 pt high, not %g", o->text_pt);
    return ST_OK;
}

static cairo_status_t take(void *closure, const unsigned char *bytes, unsigned n) {
    textbuf *t = closure;
    text_add_n(t, (const char *)bytes, n);
    return t->failed ? CAIRO_STATUS_WRITE_ERROR : CAIRO_STATUS_SUCCESS;
}

static status make_surface(sheet *s, error *e) {
    double scale = s->o->dpi / 72.0, nx = ceil(s->width * scale - 1e-6), ny = ceil(s->height * scale - 1e-6);
    switch (s->o->format) {
    case SHEET_PDF:
        s->surface = cairo_pdf_surface_create_for_stream(take, &s->sink, s->width, s->height);
        break;
    case SHEET_PNG:
        if (nx * ny > (double)LIMIT_PIXELS || nx > 32000.0 || ny > 32000.0)
            return fail(e, ST_BAD_INPUT, "a picture of %.0f x %.0f px is too large: choose fewer dots per inch", nx, ny);
        s->surface = cairo_image_surface_create(CAIRO_FORMAT_RGB24, (int)nx, (int)ny);
        break;
    case SHEET_SVG:
    default:
        s->surface = cairo_svg_surface_create_for_stream(take, &s->sink, s->width, s->height);
        break;
    }
    return ST_OK;
}

status sheet_open(const sheet_options *o, double height_mm, sheet *s, error *e) {
    if (o->height_mm > 0.0) height_mm = o->height_mm;
    *s = (sheet){ .o = o, .width = o->width_mm * pt_per_mm, .height = height_mm * pt_per_mm, .em = o->text_pt };
    status st = check_options(o, height_mm, e);
    if (!st) st = make_surface(s, e);
    if (!st) st = pen_open(s->surface, &s->pen, e);
    if (st) return st;
    s->line = 0.15 * s->em;
    s->colours = o->dark ? sheet_dark() : sheet_light();
    if (o->format == SHEET_PNG) cairo_scale(s->pen.cr, o->dpi / 72.0, o->dpi / 72.0);
    cairo_set_line_join(s->pen.cr, CAIRO_LINE_JOIN_ROUND);
    pen_ink(&s->pen, s->colours.paper);
    cairo_paint(s->pen.cr);
    pen_em(&s->pen, s->em);
    return pen_check(&s->pen, e);
}

void sheet_close(sheet *s) {
    pen_close(&s->pen);
    if (s->surface) cairo_surface_destroy(s->surface);
    text_free(&s->sink);
    *s = (sheet){ 0 };
}

static void set_pdf(sheet *s, const char *title, const char *description) {
    const cairo_pdf_metadata_t which[] = { CAIRO_PDF_METADATA_TITLE, CAIRO_PDF_METADATA_SUBJECT, CAIRO_PDF_METADATA_CREATOR };
    const char *texts[] = { title, description, s->o->creator };
    for (size_t k = 0; k < 3; k++) {
        textbuf safe = { 0 };
        text_safe(&safe, texts[k]);
        if (safe.failed) s->pen.failed = 1;
        else if (safe.s) cairo_pdf_surface_set_metadata(s->surface, which[k], safe.s);
        text_free(&safe);
    }
    cairo_pdf_surface_set_metadata(s->surface, CAIRO_PDF_METADATA_CREATE_DATE, ""); /* none: the same bytes every time */
}

/* Copies the text, without the numbers that cairo gives the one surface and the one picture of the file: they count all surfaces of
 * the process. No text of ours can look like these names, because its quotes are escaped. */
static void add_without_numbers(const char *svg, textbuf *out) {
    static const char *const names[] = { "\"surface", "\"image", "\"#image" };
    for (const char *from = svg; *from;) {
        const char *quote = strchr(from, '"');
        if (!quote) {
            text_add(out, from);
            return;
        }
        size_t keep = 1;
        const char *next = quote + 1;
        for (size_t k = 0; k < sizeof names / sizeof names[0]; k++) {
            size_t n = strlen(names[k]), digits = strncmp(quote, names[k], n) ? 0 : strspn(quote + n, "0123456789");
            if (!digits || quote[n + digits] != '"') continue;
            keep = n;
            next = quote + n + digits;
        }
        text_add_n(out, from, (size_t)(quote - from) + keep);
        from = next;
    }
}

/* The text of the SVG with title and description as the first children of its root. */
static status dress_svg(const sheet *s, const char *title, const char *description, char **bytes, size_t *n, error *e) {
    const char *root = s->sink.s ? strstr(s->sink.s, "<svg ") : NULL, *end = root ? strchr(root, '>') : NULL;
    textbuf out = { 0 };
    if (!end) return fail(e, ST_BUG, "the SVG has no root");
    text_add_n(&out, s->sink.s, (size_t)(end - s->sink.s));
    text_add(&out, " role=\"img\">\n<title>");
    html_text(&out, title);
    text_add(&out, "</title>\n<desc>");
    html_text(&out, description);
    text_add(&out, "</desc>");
    add_without_numbers(end + 1, &out);
    status st = text_check(&out, "a figure", e);
    if (st) {
        text_free(&out);
        return st;
    }
    *bytes = out.s;
    *n = out.n;
    return ST_OK;
}

static status encode_png(const sheet *s, char **bytes, size_t *n, error *e) {
    const unsigned char *data = cairo_image_surface_get_data(s->surface);
    size_t nx = (size_t)cairo_image_surface_get_width(s->surface), ny = (size_t)cairo_image_surface_get_height(s->surface);
    size_t stride = (size_t)cairo_image_surface_get_stride(s->surface);
    uint8_t *rgb = mem_array(nx * ny, 3), *png = NULL;
    if (!rgb) return NO_MEMORY(e, "a figure");
    for (size_t y = 0; y < ny; y++)
        for (size_t x = 0; x < nx; x++) {
            uint32_t v;
            memcpy(&v, data + y * stride + 4 * x, sizeof v);
            uint8_t *p = rgb + 3 * (y * nx + x);
            p[0] = (uint8_t)(v >> 16);
            p[1] = (uint8_t)(v >> 8);
            p[2] = (uint8_t)v;
        }
    png_format f = { nx, ny, 3, 8, 25.4e6 / s->o->dpi }; /* a dot is so many nm: pHYs */
    status st = png_encode(rgb, &f, &png, n, e);
    free(rgb);
    *bytes = (char *)png;
    return st;
}

status sheet_finish(sheet *s, const char *title, const char *description, char **bytes, size_t *n, error *e) {
    if (s->o->format == SHEET_PDF) set_pdf(s, title, description);
    status st = pen_check(&s->pen, e);
    if (st) return st;
    cairo_surface_flush(s->surface);
    if (s->o->format == SHEET_PNG) return encode_png(s, bytes, n, e);
    pen_close(&s->pen);
    cairo_surface_finish(s->surface);
    if (cairo_surface_status(s->surface)) return NO_MEMORY(e, "a figure");
    if (s->o->format == SHEET_SVG) return dress_svg(s, title, description, bytes, n, e);
    st = text_check(&s->sink, "a figure", e);
    if (st) return st;
    *bytes = s->sink.s;
    *n = s->sink.n;
    s->sink = (textbuf){ 0 };
    return ST_OK;
}

ink sheet_ramp(double share) {
    static const double stop[][3] = { { 0.06, 0.13, 0.36 }, { 0.16, 0.36, 0.54 }, { 0.24, 0.57, 0.55 }, { 0.55, 0.75, 0.43 }, { 0.98, 0.91, 0.50 } };
    enum { LAST = sizeof stop / sizeof stop[0] - 1 };
    double at = fmin(fmax(share, 0.0), 1.0) * LAST, part;
    size_t k = (size_t)at < LAST ? (size_t)at : LAST - 1;
    part = at - (double)k;
    ink i = { 0.0, 0.0, 0.0, 1.0 };
    i.r = stop[k][0] + part * (stop[k + 1][0] - stop[k][0]);
    i.g = stop[k][1] + part * (stop[k + 1][1] - stop[k][1]);
    i.b = stop[k][2] + part * (stop[k + 1][2] - stop[k][2]);
    return i;
}

void sheet_draw_ramp(sheet *s, double x, double top, double width, double bottom) {
    enum { STOPS = 16 };
    cairo_pattern_t *g = cairo_pattern_create_linear(0.0, bottom, 0.0, top);
    for (int k = 0; k <= STOPS; k++) {
        ink i = sheet_ramp((double)k / STOPS);
        cairo_pattern_add_color_stop_rgb(g, (double)k / STOPS, i.r, i.g, i.b);
    }
    cairo_rectangle(s->pen.cr, x, top, width, bottom - top);
    cairo_set_source(s->pen.cr, g);
    cairo_fill_preserve(s->pen.cr);
    cairo_pattern_destroy(g);
    pen_ink(&s->pen, s->colours.soft);
    cairo_set_line_width(s->pen.cr, 0.06 * s->em);
    cairo_stroke(s->pen.cr);
}

void sheet_dash(sheet *s, int pattern) {
    static const double parts[][4] = { { 0 }, { 5.0, 2.2, 0.0, 0.0 }, { 1.2, 1.8, 0.0, 0.0 }, { 5.0, 1.8, 1.2, 1.8 } };
    static const int count[] = { 0, 2, 2, 4 };
    double scaled[4];
    for (int k = 0; k < 4; k++) scaled[k] = parts[pattern][k] * s->line;
    cairo_set_dash(s->pen.cr, scaled, count[pattern], 0.0);
}

void sheet_mark(sheet *s, plot_mark mark, double x, double y, double r) {
    cairo_t *cr = s->pen.cr;
    cairo_new_path(cr);
    switch (mark) {
    case MARK_DIAMOND:
        cairo_move_to(cr, x, y - 1.3 * r);
        cairo_line_to(cr, x + 1.3 * r, y);
        cairo_line_to(cr, x, y + 1.3 * r);
        cairo_line_to(cr, x - 1.3 * r, y);
        break;
    case MARK_TRIANGLE:
        cairo_move_to(cr, x, y - 1.4 * r);
        cairo_line_to(cr, x + 1.3 * r, y + 0.85 * r);
        cairo_line_to(cr, x - 1.3 * r, y + 0.85 * r);
        break;
    case MARK_SQUARE:
        cairo_rectangle(cr, x - 0.9 * r, y - 0.9 * r, 1.8 * r, 1.8 * r);
        break;
    case MARK_DISC:
    default:
        cairo_arc(cr, x, y, r, 0.0, 2.0 * PI);
        break;
    }
    cairo_close_path(cr);
    pen_ink(&s->pen, s->colours.mark[mark]);
    cairo_fill_preserve(cr);
    sheet_dash(s, 0);
    cairo_set_line_width(cr, mark == MARK_SQUARE ? 0.8 * s->line : 0.5 * s->line);
    pen_ink(&s->pen, mark == MARK_SQUARE ? s->colours.ink : s->colours.paper);
    cairo_stroke(cr);
}

enum { AXIS_NUMBER = NUMBER_TEXT + 3 }; /* with a minus of three bytes */

static const char *axis_number(double v, char out[AXIS_NUMBER]) {
    char number[NUMBER_TEXT];
    number_text(v, 6, number);
    snprintf(out, AXIS_NUMBER, "%s%s", number[0] == '-' ? "\xe2\x88\x92" : "", number[0] == '-' ? number + 1 : number);
    return out;
}

void sheet_number(sheet *s, double x, double y, double align, double v) {
    char text[AXIS_NUMBER];
    pen_text(&s->pen, x, y, align, axis_number(v, text));
}

double sheet_number_width(sheet *s, double v) {
    char text[AXIS_NUMBER];
    return pen_width(&s->pen, axis_number(v, text));
}

double sheet_title(sheet *s, const char *title) {
    if (!s->o->titled || !title) return 0.0;
    pen_em(&s->pen, 1.15 * s->em);
    pen_ink(&s->pen, s->colours.ink);
    pen_text_within(&s->pen, 0.4 * s->em, 1.4 * s->em, 0.0, s->width - 0.8 * s->em, title);
    pen_em(&s->pen, s->em);
    return 1.8 * s->em;
}
