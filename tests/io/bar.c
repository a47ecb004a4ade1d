/* The scale bar on pictures of known truth: with and without end marks, interrupted by its words, under rules and
 * frames, beside letters, on the picture itself; and pictures without one. */
#include "io/bar_priv.h"

#include <stdint.h>
#include <stdlib.h>

#include "check.h"

enum { NX = 640, NY = 480, STRIP = 48 };

static float px[NY * NX];
static uint32_t seed = 7;

static float noise(void) {
    seed = seed * 1664525u + 1013904223u;
    return (float)(seed >> 8) / 16777216.0f;
}

static void fill(size_t x0, size_t y0, size_t x1, size_t y1, float v) {
    for (size_t y = y0; y < y1; y++)
        for (size_t x = x0; x < x1; x++) px[y * NX + x] = v;
}

/* Letters: upright strokes and short bars. */
static void write_word(size_t x, size_t y, int n, float ink) {
    for (int k = 0; k < n; k++, x += 9) {
        fill(x, y, x + 2, y + 12, ink);
        fill(x, y + 5u * ((unsigned)k % 3u), x + 6, y + 5u * ((unsigned)k % 3u) + 2, ink);
    }
}

static void specimen(size_t top, size_t bottom) {
    for (size_t i = 0; i < NY * NX; i++) px[i] = 0.1f + 0.8f * noise();
    (void)top, (void)bottom;
}

typedef enum { PLAIN, MARKS, INTERRUPTED, THICK, STYLES } style;

static void draw_bar(style s, size_t x, size_t y, size_t n, float ink) {
    size_t thick = s == THICK ? 6 : 2, gap = 30;
    fill(x, y, x + n, y + thick, ink);
    if (s != PLAIN && s != THICK)
        fill(x, y - 5, x + 2, y + 7, ink), fill(x + n - 2, y - 5, x + n, y + 7, ink);
    if (s == INTERRUPTED) {
        fill(x + n / 2 - gap, y - 5, x + n / 2 + gap, y + 7, ink > 0.5f ? 0.0f : 1.0f);
        write_word(x + n / 2 - 20, y - 5, 4, ink);
    }
}

/* n dots or ticks over `length` px, the outer ones taller where `tall`. */
static void draw_dots(size_t x, size_t y, size_t n, double length, size_t wide, int tall, float ink) {
    for (size_t k = 0; k < n; k++) {
        size_t at = x + (size_t)(length * (double)k / (double)(n - 1) + 0.5), more = tall && k % 5 == 0 ? 4 : 0;
        fill(at, y - more, at + wide, y + 4, ink);
    }
}

static void dotted(void) {
    for (int paper = 0; paper < 2; paper++)
        for (size_t length = 83; length < 300; length += 31)
            for (int tall = 0; tall < 2; tall++) {
                float back = (float)paper, ink = 1.0f - back;
                specimen(0, 0);
                fill(0, NY - STRIP, NX, NY, back);
                write_word(12, NY - 32, 20, ink);
                draw_dots(300, NY - 24, 11, (double)length, 2, tall, ink);
                write_word(300, NY - 44, 5, ink);
                CHECK(bar_find(px, NX, NY, 0, STRIP) == length);
            }
    for (size_t n = 8; n < 15; n += n == 10 ? 2 : 1) { /* not eleven: no bar */
        specimen(0, 0);
        fill(0, NY - STRIP, NX, NY, 0.0f);
        draw_dots(300, NY - 24, n, 15.0 * (double)(n - 1), 2, 0, 1.0f);
        CHECK(bar_find(px, NX, NY, 0, STRIP) == 0);
    }
    fill(0, NY - STRIP, NX, NY, 0.0f);
    for (size_t k = 0; k < 11; k++) /* eleven marks at unlike distances */
        fill(200 + 20 * k + 3 * (k % 3), NY - 24, 202 + 20 * k + 3 * (k % 3), NY - 20, 1.0f);
    CHECK(bar_find(px, NX, NY, 0, STRIP) == 0);
}

int main(void) {
    dotted();
    for (int paper = 0; paper < 2; paper++)
        for (int s = 0; s < STYLES; s++)
            for (int top = 0; top < 2; top++)
                for (size_t n = 101; n < 260; n += 53)
                    for (int rules = 0; rules < 3; rules++) {
                        float back = (float)paper, ink = 1.0f - back;
                        size_t y0 = top ? 0 : NY - STRIP;
                        specimen(0, 0);
                        fill(0, y0, NX, y0 + STRIP, back);
                        if (rules == 1) fill(0, y0, NX, y0 + 1, ink); /* a rule */
                        if (rules == 2) {                             /* a table */
                            fill(0, y0, NX, y0 + 1, ink), fill(0, y0 + STRIP - 1, NX, y0 + STRIP, ink);
                            for (size_t x = 0; x < NX; x += 320) fill(x, y0, x + 1, y0 + STRIP, ink);
                        }
                        write_word(12, y0 + 16, 20, ink);
                        draw_bar((style)s, 340, y0 + 22, n, ink);
                        size_t got = bar_find(px, NX, NY, top ? STRIP : 0, top ? 0 : STRIP);
                        CHECK(got == n);
                        if (got != n)
                            printf("  paper %d style %d rules %d: %zu of %zu\n", paper, s, rules, got, n);
                    }
    specimen(0, 0);
    fill(0, NY - STRIP, NX, NY, 0.0f);
    write_word(12, NY - 32, 40, 1.0f);
    CHECK(bar_find(px, NX, NY, 0, STRIP) == 0); /* letters only */
    fill(400, NY - 40, 440, NY - 8, 1.0f);
    CHECK(bar_find(px, NX, NY, 0, STRIP) == 0); /* and a block */
    specimen(0, 0);
    CHECK(bar_find(px, NX, NY, 0, 0) == 0);
    fill(420, 440, 570, 444, 1.0f);
    CHECK(bar_find(px, NX, NY, 0, 0) == 150); /* burnt into the picture */
    specimen(0, 0);
    fill(420, 440, 570, 444, 0.0f);
    CHECK(bar_find(px, NX, NY, 0, 0) == 150);
    return check_done();
}
