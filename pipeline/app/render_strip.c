/* The info strip of a rendered micrograph: a label, the setting of an instrument that does not exist, pixel size and a
 * scale bar, in a 5 x 7 font. Four styles by seed (light on dark, dark on light, grey, with and without a rule), as
 * strips differ from house to house. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "app/render_priv.h"
#include "base/number.h"

typedef struct {
    float *grey;
    size_t nx, rows, scale;
    float ink;
} sheet;

/* 6.5 % of the picture's height: between 4 and 9 %, never lower than one line of text with its margins. */
size_t strip_height(const render_options *o) {
    if (!o->strip) return 0;
    size_t rows = (size_t)(0.065 / (1.0 - 0.065) * (double)o->ny + 0.5);
    return rows < FONT_HEIGHT + 4 ? FONT_HEIGHT + 4 : rows;
}

static void block(const sheet *s, size_t x, size_t y, size_t w, size_t h) {
    for (size_t j = y; j < y + h && j < s->rows; j++)
        for (size_t i = x; i < x + w && i < s->nx; i++) s->grey[j * s->nx + i] = s->ink;
}

static size_t text_width(const sheet *s, const char *text) { return strlen(text) * (FONT_WIDTH + 1) * s->scale; }

static void write_text(const sheet *s, size_t x, size_t y, const char *text) {
    for (; *text; text++, x += (FONT_WIDTH + 1) * s->scale) {
        const unsigned char *rows = font_rows(*text);
        for (size_t j = 0; j < FONT_HEIGHT; j++)
            for (size_t i = 0; i < FONT_WIDTH; i++)
                if (rows[j] >> (FONT_WIDTH - 1 - i) & 1)
                    block(s, x + i * s->scale, y + j * s->scale, s->scale, s->scale);
    }
}

/* The longest 1, 2 or 5 times a power of ten that is at most a fifth of the width. */
static double bar_nm(const render_options *o) {
    double most = 0.2 * (double)o->nx * o->px_nm, unit = pow(10.0, floor(log10(most)));
    return most >= 5.0 * unit ? 5.0 * unit : most >= 2.0 * unit ? 2.0 * unit : unit;
}

/* Scale bar and its length at the right edge; returns where it begins. */
static size_t draw_bar(const render_options *o, const sheet *s, size_t y) {
    double nm = bar_nm(o);
    char number[NUMBER_TEXT], text[64];
    snprintf(text, sizeof text, "%s %s", number_text(nm < 1000.0 ? nm : nm / 1000.0, 3, number),
             nm < 1000.0 ? "nm" : "um");
    size_t length = (size_t)(nm / o->px_nm + 0.5), gap = 3 * s->scale, tall = FONT_HEIGHT * s->scale;
    size_t used = text_width(s, text) + gap + length + gap;
    if (used >= s->nx) return s->nx;
    size_t x = s->nx - used;
    write_text(s, x, y, text);
    x += text_width(s, text) + gap;
    block(s, x, y + tall / 2, length, s->scale);
    block(s, x, y + tall / 4, s->scale, tall / 2 + 1);
    block(s, x + length - s->scale, y + tall / 4, s->scale, tall / 2 + 1);
    return s->nx - used;
}

void strip_draw(const render_options *o, size_t rows, float *grey) {
    static const struct { float paper, ink; int rule; } styles[] = {
        { 0.0f, 1.0f, 0 }, { 1.0f, 0.0f, 0 }, { 0.12f, 0.92f, 1 }, { 0.0f, 0.85f, 1 } };
    size_t style = (size_t)(o->seed % (sizeof styles / sizeof styles[0]));
    for (size_t k = 0; k < rows * o->nx; k++) grey[k] = styles[style].paper;
    size_t scale = 2 * rows / (5 * FONT_HEIGHT); /* letters of two fifths of the strip */
    sheet s = { grey, o->nx, rows, scale ? scale : 1, styles[style].ink };
    size_t y = (rows - FONT_HEIGHT * s.scale) / 2, x = 4 * s.scale, end = s.nx;
    if (styles[style].rule) block(&s, 0, 0, s.nx, s.scale);
    char number[NUMBER_TEXT], parts[3][80];
    snprintf(parts[0], sizeof parts[0], "%.70s", o->label ? o->label : "rendered");
    snprintf(parts[1], sizeof parts[1], "%d kV  SE  top view", (int)(2 + o->seed / 4 % 4));
    parts[2][0] = 0;
    if (o->show_scale) {
        snprintf(parts[2], sizeof parts[2], "px %s nm", number_text(o->px_nm, 4, number));
        end = draw_bar(o, &s, y);
    }
    /* Parts that the bar leaves no room for are dropped, as a narrow window would. */
    for (size_t k = 0; k < 3; k++) {
        if (x + text_width(&s, parts[k]) > end) continue;
        write_text(&s, x, y, parts[k]);
        x += text_width(&s, parts[k]) + 3 * (FONT_WIDTH + 1) * s.scale;
    }
}
