/* The picture of a micrograph's card as layers that the reader can hide: grey ground, cell borders, what the frame cuts, centres,
 * ring of the spacing, info strip, scale bar. Two small pictures and a drawing lie over the ground; nothing is drawn twice. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/number.h"
#include "base/quantity.h"
#include "io/file.h"
#include "report/curves.h"
#include "report/html.h"
#include "report/layers.h"
#include "report/page.h"

/* Class names of the layers: the style sheet hides .no-NAME .l-NAME, the script makes a button for each. */
static void add_mask(const char *name, const uint8_t *png, size_t n, textbuf *out) {
    if (!n) return;
    text_addf(out, "<img class=\"l-%s\" alt=\"\" src=\"data:image/png;base64,", name);
    text_base64(out, png, n);
    text_add(out, "\">");
}

/* Discs as round ends of strokes without length: one path, drawn dark and a little wider, then light. */
static void add_centres(const xy_curve *c, double scale, double top, double r, size_t card, textbuf *out) {
    if (!c->n) return;
    text_addf(out, "<defs><path id=\"centres-%zu\" d=\"", card);
    for (size_t i = 0; i < c->n; i++) text_addf(out, "M%.1f %.1fh0", scale * (c->x[i] + 0.5), top + scale * (c->y[i] + 0.5));
    text_addf(out, "\"/></defs><g class=\"l-centres\"><use href=\"#centres-%zu\" stroke=\"#101419\" stroke-width=\"%.1f\"/><use href=\"#centres-%zu\" "
                   "stroke=\"#ffb400\" stroke-width=\"%.1f\"/></g>",
              card, 2.0 * r + 1.6, card, 2.0 * r);
}

static void add_frame_features(const xy_curve *c, double scale, double top, double r, textbuf *out) {
    if (!c->n) return;
    text_add(out, "<path class=\"l-frame\" fill=\"none\" stroke=\"#ff8ad8\" stroke-width=\"1.4\" d=\"");
    for (size_t i = 0; i < c->n; i++)
        text_addf(out, "M%.1f %.1fl%.1f %.1fl%.1f %.1fl%.1f %.1fz", scale * (c->x[i] + 0.5), top + scale * (c->y[i] + 0.5) - r, r, r, -r, r, -r, -r);
    text_add(out, "\"/>");
}

/* The feature nearest to the middle carries the ring. */
static void add_ring(const xy_curve *c, double scale, double top, double spacing_px, double nx, double ny, textbuf *out) {
    size_t best = 0;
    if (!c->n || !isfinite(spacing_px)) return;
    for (size_t i = 1; i < c->n; i++)
        if (hypot(c->x[i] - 0.5 * nx, c->y[i] - 0.5 * ny) < hypot(c->x[best] - 0.5 * nx, c->y[best] - 0.5 * ny)) best = i;
    for (int k = 0; k < 2; k++)
        text_addf(out, "<circle class=\"l-ring\" cx=\"%.1f\" cy=\"%.1f\" r=\"%.1f\" fill=\"none\" stroke=\"%s\" stroke-width=\"%s\"/>",
                  scale * (c->x[best] + 0.5), top + scale * (c->y[best] + 0.5), scale * spacing_px, k ? "#fff" : "#101419", k ? "1.6" : "3.4");
}

static double lettering(const page_layers *l) { return 11.0 * fmin(1.0, (double)l->nx / 400.0); }

static void add_strip(const page_layers *l, textbuf *out) {
    const size_t rows[2] = { l->strip_above, l->strip_below }, at[2] = { 0, l->ny - l->strip_below };
    for (size_t k = 0; k < 2; k++) {
        double middle = (double)at[k] + 0.5 * (double)rows[k], em = lettering(l), width = 12.2 * em;
        if (rows[k])
            text_addf(out, "<g class=\"l-strip\"><rect y=\"%zu\" width=\"%zu\" height=\"%zu\" fill=\"#3c434c\" fill-opacity=\".72\"/>"
                           "<rect x=\"%.1f\" y=\"%.1f\" width=\"%.1f\" height=\"%.1f\" fill=\"#101419\"/><text x=\"%.1f\" y=\"%.1f\" "
                           "text-anchor=\"middle\" fill=\"#fff\" font-size=\"%.1f\">info strip, not measured</text></g>",
                      at[k], l->nx, rows[k], (double)l->nx - width, middle - 0.7 * em, width, 1.4 * em, (double)l->nx - 0.5 * width,
                      middle + 0.36 * em, em);
    }
}

/* The largest of 1, 2, 5 x 10^k nm up to a quarter of the width. */
static void add_scale_bar(const page_layers *l, double nm_per_px, textbuf *out) {
    char text[NUMBER_TEXT];
    double most = 0.25 * nm_per_px * (double)l->nx, decade = pow(10.0, floor(log10(most))), lead = most / decade;
    double nm = decade * (lead >= 5.0 ? 5.0 : lead >= 2.0 ? 2.0 : 1.0), px = nm / nm_per_px;
    double em = lettering(l), y = (double)(l->ny - l->strip_below) - 0.7 * em;
    if (!isfinite(px)) return;
    text_addf(out, "<rect x=\"%.1f\" y=\"%.1f\" width=\"%.1f\" height=\"%.1f\" fill=\"#101419\" fill-opacity=\".72\"/><path d=\"M%.1f %.1fh%.1f\" "
                   "stroke=\"#fff\" stroke-width=\"%.1f\" stroke-linecap=\"butt\"/><text x=\"%.1f\" y=\"%.1f\" text-anchor=\"middle\" fill=\"#fff\" font-size=\"%.1f\">%s %s</text>",
              0.5 * em, y - 1.8 * em, px + em, 2.2 * em, em, y - 0.2 * em, px, 0.27 * em, em + 0.5 * px, y - 0.7 * em, em,
              number_text(nm >= 1000.0 ? nm / 1000.0 : nm, 3, text), nm >= 1000.0 ? "\xc2\xb5m" : "nm");
}

static void add_drawing(const image_row *m, const char *stem, const char *out_dir, size_t card, const page_layers *l, textbuf *out) {
    error e = { 0 }; /* without its table a picture has no centres: the ground and the borders still stand */
    xy_curve counted = { 0 }, others = { 0 };
    double scale = (double)l->nx / (double)(m->width_px > 0 ? m->width_px : 1), spacing_px = m->spacing_acf_nm / m->px_nm;
    double top = (double)l->strip_above, rows = (double)(l->ny - l->strip_above - l->strip_below) / scale;
    if (m->width_px > 0) {
        (void)centres_read(out_dir, stem, 1, &counted, &e);
        (void)centres_read(out_dir, stem, 0, &others, &e);
    }
    size_t n = counted.n + others.n;
    double area = n ? (double)m->width_px * rows / (double)n : MISSING;         /* of one feature, px2 */
    double r = isfinite(area) ? fmin(3.2, fmax(1.0, 0.14 * scale * sqrt(area))) : 2.0; /* the marker leaves the feature in sight */
    text_addf(out, "<svg viewBox=\"0 0 %zu %zu\" aria-hidden=\"true\" stroke-linecap=\"round\">", l->nx, l->ny);
    add_centres(&counted, scale, top, r, card, out);
    add_frame_features(&others, scale, top, 1.5 * r, out);
    add_ring(&counted, scale, top, spacing_px, (double)m->width_px, rows, out);
    add_strip(l, out);
    if (m->width_px > 0) add_scale_bar(l, m->px_nm / scale, out);
    text_add(out, "</svg>");
    xy_curve_free(&counted);
    xy_curve_free(&others);
}

int page_layers_add(const results *r, size_t i, const char *out_dir, size_t width, textbuf *out) {
    const char *stem = r->image_stems ? r->image_stems[i] : NULL;
    textbuf name = { 0 };
    page_layers l = { 0 };
    error e = { 0 };
    if (!stem || !r->overlay_paths || !r->overlay_paths[i]) return 0;
    text_addf(&name, "layers/%s.png", stem);
    char *path = name.failed ? NULL : path_join(out_dir, name.s);
    text_free(&name);
    int there = path && file_exists(path) && layers_read(path, width, &l, &e) == ST_OK;
    free(path);
    if (!there) return 0;
    text_add(out, "<a class=\"stack\" href=\"");
    html_href(out, r->overlay_paths[i]);
    text_addf(out, "\"><img width=\"%zu\" height=\"%zu\" alt=\"", l.nx, l.ny);
    html_text(out, r->images[i].file);
    text_add(out, " with what was found on it; opens at full size\" src=\"data:image/jpeg;base64,");
    text_base64(out, l.ground.jpeg, l.ground.n);
    text_add(out, "\">");
    add_mask("frame", l.cut, l.n_cut, out);
    add_mask("cells", l.cells, l.n_cells, out);
    add_drawing(&r->images[i], stem, out_dir, i + 1, &l, out);
    text_add(out, "</a>\n");
    page_layers_free(&l);
    return 1;
}
