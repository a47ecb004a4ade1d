/* Every micrograph of the run as a card: its picture in layers (page_layers.c), what became of it and why; a relative link
 * leads to the overlay at full size. Where there are too many for layers, the overlay itself is read back, box-averaged and
 * embedded flat. The width shrinks with the number of pictures and a budget ends the embedding, so the page stays a file one
 * can mail; what is left out is named with its path. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/flags.h"
#include "base/number.h"
#include "io/file.h"
#include "report/html.h"
#include "report/page.h"
#include "report/thumbnail.h"

enum { THUMB_WIDTH = 524, THUMB_LEAST = 150, DETAIL_NX = 200, DETAIL_NY = 150 };
enum { MAX_CARDS = 500, MOST_DETAILS = 24, MOST_LAYERED = 160 };
/* Bytes of the page: of all of it, of what follows the pictures (scripts, tables of columns; the budgets of a sample), of one
 * picture. A picture has about 400 marks, and a JPEG with its masks a third of a byte a pixel, 4/3 of that as text. */
enum { WHOLE_PAGE = 4800000, AFTER = 330000, AFTER_SAMPLE = 5600, MARKS = 8000 };
static const double bytes_per_px = 0.42;

/* What the pictures may take, how wide each may be, and whether there is room for layers. */
typedef struct {
    size_t budget, width;
    int layered;
} plan;

void page_flag_name(textbuf *out, int bit) {
    for (const char *c = flag_word(bit); *c; c++) text_add_n(out, *c == '_' ? " " : c, 1);
}

void page_flags(textbuf *out, const char *words) {
    size_t n = 0;
    for (const char *p = words; p && *p; p += n) {
        while (*p == ' ') p++;
        n = strcspn(p, " ");
        if (!n) break;
        int bit = 0;
        while (bit < FLAG_COUNT && (strlen(flag_word(bit)) != n || strncmp(flag_word(bit), p, n))) bit++;
        if (p != words) text_add(out, bit < FLAG_COUNT ? ", " : " ");
        textbuf word = { 0 };
        text_add_n(&word, p, n);
        if (bit < FLAG_COUNT) {
            text_add(out, "<span class=\"flag\" title=\"");
            html_text(out, flag_meaning(bit));
            text_add(out, "\">");
        }
        if (bit < FLAG_COUNT) page_flag_name(out, bit);
        else html_text(out, word.s);
        if (bit < FLAG_COUNT) text_add(out, "</span>");
        if (word.failed) out->failed = 1;
        text_free(&word);
    }
}

/* Words of the list with their meaning in full, a sentence as it is. */
static void add_reason(textbuf *out, const char *reason) {
    int known = 0;
    for (int bit = 0; bit < FLAG_COUNT; bit++) {
        size_t n = strlen(flag_word(bit));
        for (const char *p = reason; (p = strstr(p, flag_word(bit))); p += n) {
            if ((p > reason && p[-1] != ' ') || (p[n] && p[n] != ' ')) continue;
            text_addf(out, "%s<strong>", known++ ? "; " : "");
            page_flag_name(out, bit);
            text_add(out, "</strong>: ");
            html_text(out, flag_meaning(bit));
            break;
        }
    }
    if (!known) html_text(out, reason);
}

static void add_fact(textbuf *out, const image_row *m, const char *name, const char *twin,
                     const char *label) {
    const column *c = column_find(image_columns, n_image_columns, name);
    const column *u = twin ? column_find(image_columns, n_image_columns, twin) : NULL;
    char cell[NUMBER_TEXT];
    if (!c || !*column_cell(c, m, cell)) return;
    text_addf(out, "<dt>%s</dt><dd>", label);
    html_value(out, c, u, m, 0);
    if (c->unit[0] && strcmp(c->unit, "1")) text_addf(out, " <span class=\"unit\">%s</span>", c->unit);
    if (!strcmp(name, "px_nm")) {
        text_add(out, " <span class=\"unit\">from ");
        html_text(out, m->px_source);
        text_add(out, "</span>");
    }
    text_add(out, "</dd>\n");
}

static void add_image(textbuf *out, const small_picture *p, const char *lead, const char *file,
                      const char *tail) {
    text_addf(out, "<img width=\"%zu\" height=\"%zu\" alt=\"%s", p->nx, p->ny, lead);
    html_text(out, file);
    text_addf(out, "%s\" src=\"data:image/jpeg;base64,", tail);
    text_base64(out, p->jpeg, p->n);
    text_add(out, "\">\n");
}

/* Reads the overlay of image i; otherwise says in its place why there is none. */
static void read_picture(const results *r, size_t i, const char *out_dir, const plan *p, size_t spent,
                         small_picture *whole, small_picture *detail, textbuf *out) {
    const char *relative = r->overlay_paths ? r->overlay_paths[i] : NULL;
    error e = { 0 };
    char *path = relative ? path_join(out_dir, relative) : NULL;
    if (relative && !path) {
        out->failed = 1;
    } else if (!relative) {
        text_add(out, "<div class=\"blank\">no overlay</div>\n");
    } else if (spent > p->budget) {
        text_add(out, "<div class=\"blank\">Left out to keep the page small: ");
        html_text(out, relative);
        text_add(out, "</div>\n");
    } else {
        int layered = p->layered && page_layers_add(r, i, out_dir, p->width, out);
        size_t cut = r->n_images > MOST_DETAILS ? 0 : DETAIL_NX;
        if ((!layered || cut) && thumbnail_recall(r->picture_cache, r->overlay_marks ? r->overlay_marks[i] : NULL, path, layered ? 0 : p->width, cut, DETAIL_NY,
                                                       whole, detail, &e)) {
            text_add(out, "<div class=\"blank\">The overlay could not be read: ");
            html_text(out, e.text);
            text_add(out, "</div>\n");
        }
    }
    free(path);
}

static void add_facts(const image_row *m, int few, textbuf *out) {
    text_add(out, "<dl>\n");
    if (m->sample && *m->sample) {
        text_add(out, "<dt>Sample</dt><dd>");
        html_text(out, m->sample);
        text_add(out, "</dd>\n");
    }
    if (!few) add_fact(out, m, "px_nm", NULL, "Pixel");
    add_fact(out, m, "spacing_acf_nm", "spacing_acf_nm_u", "Spacing, ring");
    add_fact(out, m, "spacing_hex_nm", "spacing_hex_nm_u", "Spacing, count");
    add_fact(out, m, "n_features", NULL, "Features");
    if (!few) add_fact(out, m, "sharpness_px", NULL, "Blur, sd");
    if (m->flags && *m->flags) {
        text_add(out, "<dt>Remarks</dt><dd>");
        page_flags(out, m->flags);
        text_add(out, "</dd>\n");
    }
    text_add(out, "</dl>\n");
}

static void add_card(const results *r, size_t i, const char *out_dir, const plan *p, size_t *spent, textbuf *out) {
    const image_row *m = &r->images[i];
    const char *word = m->status ? m->status : "";
    small_picture whole = { 0 }, detail = { 0 };
    int excluded = !strcmp(word, "excluded"), unreadable = !strcmp(word, "unreadable");
    text_addf(out, "<article id=\"micrograph-%zu\" class=\"card %s\"><h3>", i + 1,
              excluded     ? "excluded"
              : unreadable ? "unreadable"
                           : "used");
    html_text(out, m->file);
    text_add(out, "</h3>\n");
    size_t before = out->n;
    read_picture(r, i, out_dir, p, *spent, &whole, &detail, out);
    if (whole.n) {
        text_add(out, "<a href=\"");
        html_href(out, r->overlay_paths[i]);
        text_add(out, "\">");
        add_image(out, &whole, "Overlay of ", m->file, ": detected features and their cells; opens at full size");
        text_add(out, "</a>");
    }
    *spent += out->n - before + detail.n;
    text_add(out, "<p class=\"reason\">");
    html_badge(out, word);
    if (m->reason && *m->reason) {
        text_add(out, " ");
        add_reason(out, m->reason);
    }
    text_add(out, "</p>\n<div class=\"facts\">");
    add_facts(m, p->width < 300, out);
    if (detail.n) { /* none where there are too many for one page: the link leads to every pixel */
        text_add(out, "<figure>");
        add_image(out, &detail, "Middle of ", m->file, " at full resolution");
        text_add(out, "<figcaption>the middle, pixel by pixel</figcaption></figure>");
    }
    text_add(out, "</div></article>\n");
    small_picture_free(&whole);
    small_picture_free(&detail);
}

static plan plan_pictures(const results *r, size_t so_far) {
    size_t n = 0, samples = r->n_samples < 60 ? r->n_samples : 60, spent = so_far + AFTER + AFTER_SAMPLE * samples;
    for (size_t i = 0; r->overlay_paths && i < r->n_images; i++) n += r->overlay_paths[i] != NULL;
    if (n > MAX_CARDS) n = MAX_CARDS;
    plan p = { spent + 1000000 < WHOLE_PAGE ? WHOLE_PAGE - spent : 1000000, THUMB_WIDTH, r->n_images <= MOST_LAYERED };
    double each = (double)p.budget / (double)(n ? n : 1) - (p.layered ? MARKS : 0.0);
    double width = sqrt(fmax(each, 0.0) / bytes_per_px / 0.75); /* of a picture four by three */
    if (width < THUMB_WIDTH) p.width = width > THUMB_LEAST ? (size_t)width : THUMB_LEAST;
    return p;
}

static int is_used(const image_row *m) { return m->status && !strcmp(m->status, "ok"); }

/* All that were not used are shown, whatever their number; of the others as many as a page can bear. */
void page_pictures(const results *r, const char *out_dir, textbuf *out) {
    size_t spent = 0;
    plan p = plan_pictures(r, out->n);
    text_add(out,
             "<section id=\"micrographs\"><h2>Micrographs</h2>\n<p class=\"lead\">Look at these before you "
             "trust the "
             "numbers: one marker per feature, none missing, none on nothing; borders in the valleys.</p>\n"
             "<ul class=\"key layers-key\"><li><span class=\"sign disc\"></span>counted feature</li><li><span class=\"sign diamond\"></span>feature in "
             "the guard frame at the edge, not counted</li><li><span class=\"sign border\"></span>cells, veiled where the picture's edge cuts them: "
             "those do not count for the sizes</li><li><span class=\"sign ring\"></span>the measured spacing around one feature</li><li>a picture opens its "
             "overlay at full size</li></ul>\n");
    if (!r->n_images) text_add(out, "<p>No micrograph was found.</p>\n");
    text_addf(out, "<div class=\"cards%s\">\n", p.width < 300 ? " many" : "");
    size_t room = MAX_CARDS, left_out = 0;
    for (size_t i = 0; i < r->n_images; i++)
        if (room && !is_used(&r->images[i])) room--;
    for (size_t i = 0; i < r->n_images; i++) {
        int used = is_used(&r->images[i]);
        if (used && !room) {
            left_out++;
            continue;
        }
        if (used) room--;
        add_card(r, i, out_dir, &p, &spent, out);
    }
    text_add(out, "</div>\n");
    if (left_out)
        text_addf(
            out,
            "<p class=\"small\">%zu more micrographs were used and are not shown here; images.csv lists them "
            "all.</p>\n",
            left_out);
    text_add(out, "</section>\n");
}
