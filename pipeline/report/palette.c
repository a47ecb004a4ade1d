/* A fixed palette instead of one fitted to the picture: the same for every overlay, and made in a few milliseconds. Greys
 * keep 7 bits, which nobody sees on a noisy micrograph; a colour goes to the nearest of the mixtures. */
#include "report/palette_priv.h"

#include <math.h>
#include <string.h>

enum { GREYS = 128, PLACES = 256 };

static void set(palette *p, size_t i, double r, double g, double b) {
    p->colour[i][0] = (uint8_t)lround(255.0 * r);
    p->colour[i][1] = (uint8_t)lround(255.0 * g);
    p->colour[i][2] = (uint8_t)lround(255.0 * b);
}

/* `room` mixtures of one ink: rows of cover (pure first), columns of grey. */
static void set_mixtures(palette *p, size_t first, size_t room, ink i) {
    static const double cover[] = { 0.85, 0.65, 0.45, 0.25 };
    size_t rows = sizeof cover / sizeof cover[0], columns = (room - 1) / rows, at = first;
    set(p, at++, i.r, i.g, i.b);
    for (size_t r = 0; r < rows; r++)
        for (size_t c = 0; c < columns; c++) {
            double grey = columns > 1 ? (double)c / (double)(columns - 1) : 0.5, a = cover[r];
            set(p, at++, a * i.r + (1.0 - a) * grey, a * i.g + (1.0 - a) * grey, a * i.b + (1.0 - a) * grey);
        }
    while (at < first + room) set(p, at++, i.r, i.g, i.b);
}

static uint8_t find_nearest(const palette *p, int r, int g, int b) {
    size_t best = 0;
    long least = -1;
    for (size_t k = 0; k < PLACES; k++) {
        long dr = r - p->colour[k][0], dg = g - p->colour[k][1], db = b - p->colour[k][2];
        long d = 3 * dr * dr + 4 * dg * dg + 2 * db * db; /* about as the eye weighs them */
        if (least >= 0 && d >= least) continue;
        least = d;
        best = k;
    }
    return (uint8_t)best;
}

void palette_make(const ink *inks, size_t n, palette *p) {
    for (size_t k = 0; k < GREYS; k++) {
        double v = (double)k / (GREYS - 1);
        set(p, k, v, v, v);
    }
    memset(p->nearest, 0, sizeof p->nearest);
    size_t room = n ? (PLACES - GREYS) / n : 0;
    for (size_t k = 0; k < n; k++) set_mixtures(p, GREYS + k * room, room, inks[k]);
    for (size_t k = GREYS + n * room; k < PLACES; k++) set(p, k, 1.0, 1.0, 1.0);
}

/* Found when first asked for: few of the mixtures occur. Place 0, black, is simply found again. */
static uint8_t nearest(palette *p, uint32_t key) {
    if (!p->nearest[key])
        p->nearest[key] = find_nearest(p, (int)(key >> 10) * 255 / 31, (int)(key >> 5 & 31) * 255 / 31, (int)(key & 31) * 255 / 31);
    return p->nearest[key];
}

void palette_index(palette *p, const uint32_t *pixels, size_t n, uint8_t *index) {
    for (size_t i = 0; i < n; i++) {
        uint32_t v = pixels[i], r = v >> 16 & 255, g = v >> 8 & 255, b = v & 255;
        index[i] = r == g && g == b ? (uint8_t)(r >> 1) : nearest(p, (r >> 3) << 10 | (g >> 3) << 5 | b >> 3);
    }
}
