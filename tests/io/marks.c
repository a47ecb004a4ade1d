/* Marks drawn over a texture: each kind is found to its edges, and no texture loses a pixel, clipped ones least of all. */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>

#include "check.h"
#include "io/marks_priv.h"

enum { NX = 480, NY = 360 };
static float px[NX * NY];
static unsigned char drawn[NX * NY];

static uint32_t state;
static double uniform(void) {
    state = state * 1664525u + 1013904223u;
    return (double)(state >> 8) / 16777216.0;
}

/* Bumps on a shaken lattice, noise, 8 bits. amplitude beyond 1 clips at the top, a low floor at the bottom. */
static void texture(uint32_t seed, double spacing, double floor_level, double amplitude, double noise) {
    state = seed;
    for (size_t i = 0; i < NX * NY; i++) px[i] = 0.0f, drawn[i] = 0;
    double rows = spacing * 0.866, s = 0.28 * spacing;
    for (double cy = 0; cy < NY + spacing; cy += rows)
        for (double cx = 0; cx < NX + spacing; cx += spacing) {
            double x0 = cx + spacing * 0.3 * (uniform() - 0.5), y0 = cy + spacing * 0.3 * (uniform() - 0.5);
            double h = amplitude * (0.8 + 0.4 * uniform());
            for (int y = (int)fmax(y0 - 3 * s, 0); y < NY && y < y0 + 3 * s; y++)
                for (int x = (int)fmax(x0 - 3 * s, 0); x < NX && x < x0 + 3 * s; x++) {
                    double d2 = (x - x0) * (x - x0) + (y - y0) * (y - y0);
                    px[y * NX + x] += (float)(h * exp(-0.5 * d2 / (s * s)));
                }
        }
    for (size_t i = 0; i < NX * NY; i++) {
        double v = floor_level + (double)px[i] + noise * (uniform() + uniform() + uniform() - 1.5);
        px[i] = (float)(floor(255.0 * fmin(fmax(v, 0.0), 1.0) + 0.5) / 255.0);
    }
}

static void put(int x, int y, float ink) {
    if (x < 0 || y < 0 || x >= NX || y >= NY) return;
    px[y * NX + x] = ink;
    drawn[y * NX + x] = 1;
}

static void block(int x0, int y0, int w, int h, float ink) {
    for (int y = y0; y < y0 + h; y++)
        for (int x = x0; x < x0 + w; x++) put(x, y, ink);
}

/* Letters of five by seven dots, each `size` pixels wide, of a face made up for this test. */
static void writing(int x0, int y0, int size, const char *text, float ink) {
    static const struct { char c; const char *dots; } face[] = {
        { 'n', ".........." "#.##.##..##...##...##...#" }, { 'm', "..........##.#.#.#.##.#.##.#.##.#.#" },
        { '5', "#####" "#...." "####." "....#" "....#" "#...#" ".###." }, { '0', ".###." "#...#" "#..##" "#.#.#" "##..#" "#...#" ".###." },
        { 'k', "#...." "#...." "#..#." "#.#.." "##..." "#.#.." "#..#." }, { 'V', "#...#" "#...#" "#...#" "#...#" "#...#" ".#.#." "..#.." } };
    for (; *text; text++, x0 += 6 * size)
        for (size_t k = 0; k < sizeof face / sizeof face[0]; k++)
            for (int i = 0; face[k].c == *text && i < 35; i++)
                if (face[k].dots[i] == '#') block(x0 + i % 5 * size, y0 + i / 5 * size, size, size, ink);
}

static void line(double x0, double y0, double x1, double y1, double width, float ink) {
    double dx = x1 - x0, dy = y1 - y0, n = hypot(dx, dy);
    for (int y = 0; y < NY; y++)
        for (int x = 0; x < NX; x++) {
            double along = ((x - x0) * dx + (y - y0) * dy) / n, across = ((x - x0) * dy - (y - y0) * dx) / n;
            if (along >= 0 && along <= n && fabs(across) <= 0.5 * width) put(x, y, ink);
        }
}

static const char *what;

/* Share of what was drawn that is masked, and masked pixels farther than 8 px from it. */
static void look(double least, size_t most_beside) {
    unsigned char *mask = NULL;
    size_t n = 0, all = 0, found = 0, beside = 0;
    error e = { 0 };
    CHECK(marks_find(px, NX, NY, 0, &mask, &n, &e) == ST_OK);
    size_t counted = 0;
    for (int y = 0; y < NY; y++)
        for (int x = 0; x < NX; x++) {
            size_t i = (size_t)(y * NX + x);
            int near_one = 0;
            all += drawn[i];
            if (!mask || !mask[i]) continue;
            counted++;
            found += drawn[i];
            for (int b = y - 8; b <= y + 8 && !near_one; b++)
                for (int a = x - 8; a <= x + 8 && !near_one; a++)
                    near_one = a >= 0 && b >= 0 && a < NX && b < NY && drawn[b * NX + a];
            beside += !near_one;
        }
    CHECK(counted == n);
    int ok = (double)found >= least * (double)all && beside <= most_beside;
    CHECK(ok);
    if (!ok) printf("  %u %s: %zu of %zu drawn pixels masked, %zu beside them\n", state, what, found, all, beside);
    free(mask);
}

static void kinds(float ink) {
    float paper = ink > 0.5f ? 0.0f : 1.0f;
    for (uint32_t seed = 1; seed <= 3; seed += 2) {
#define ON_TEXTURE(name) what = name; texture(seed, 10.0 + 6.0 * seed, 0.15, 0.5, 0.03 * (seed - 1))
        ON_TEXTURE("a bar with its length");
        block(300, 320, 120, 5, ink);
        writing(310, 290, 3, "500nm", ink);
        look(0.99, 0);
        ON_TEXTURE("a box with writing");
        block(280, 280, 180, 60, paper);
        block(300, 325, 120, 5, ink);
        writing(310, 290, 3, "500nm", ink);
        look(0.99, 0);
        ON_TEXTURE("small letters alone");
        writing(10, 340, 1, "50kV500nm", ink);
        look(0.95, 0);
        ON_TEXTURE("one large letter");
        writing(15, 12, 6, "k", ink);
        look(0.99, 0);
        ON_TEXTURE("a cross hair");
        block(0, 180, NX, 1, ink);
        block(240, 0, 1, NY, ink);
        look(0.99, 0);
        ON_TEXTURE("a slanted arrow");
        line(100, 80, 190, 140, 3.0, ink);
        line(190, 140, 176, 139, 3.0, ink);
        line(190, 140, 183, 128, 3.0, ink);
        look(0.99, 0);
#undef ON_TEXTURE
    }
}

static void textures(void) {
    static const double spacings[] = { 9.0, 14.0, 40.0 }, amplitudes[] = { 0.5, 1.1, 1.8 }, noises[] = { 0.0, 0.05 };
    uint32_t seed = 100;
    what = "a texture without marks";
    for (size_t s = 0; s < 3; s++)
        for (size_t a = 0; a < 3; a++)
            for (size_t n = 0; n < 2; n++) {
                texture(seed++, spacings[s], 0.1, amplitudes[a], noises[n]);
                what = "a texture without marks (bright)";
                look(0.0, 0);
                what = "a texture without marks (both)";
                texture(seed++, spacings[s], -0.2, amplitudes[a], noises[n]); /* dark ground clipped too */
                look(0.0, 0);
            }
    /* Dark pores in a bright ground that saturates. */
    for (size_t s = 0; s < 3; s++) {
        texture(seed++, spacings[s], 0.0, 1.1, 0.02);
        for (size_t i = 0; i < NX * NY; i++) px[i] = 1.0f - px[i];
        look(0.0, 0);
    }
}

/* On a texture that clips at the ink's own level the straight-edged ones are still found. */
static void clipped(void) {
    what = "a bar on a clipped texture";
    texture(7, 20.0, 0.1, 1.1, 0.03);
    block(300, 320, 120, 6, 1.0f);
    look(0.99, 0);
    what = "a dark box on a clipped texture";
    texture(8, 20.0, 0.1, 1.1, 0.03);
    block(280, 280, 180, 60, 0.0f);
    look(0.99, 0);
}

int main(void) {
    kinds(1.0f);
    kinds(0.0f);
    what = "grey ink";
    texture(3, 18.0, 0.15, 0.5, 0.03);
    block(100, 200, 90, 4, 0.8f);
    look(0.99, 0);
    textures();
    clipped();
    /* A grating is made of straight edges, dozens of them. */
    what = "a grating";
    texture(9, 20.0, 0.1, 0.1, 0.0);
    for (int x = 0; x < NX; x++)
        for (int y = 0; y < NY; y++) px[y * NX + x] = x % 16 < 8 ? 1.0f : 0.0f;
    look(0.0, 0);
    unsigned char *mask = NULL;
    size_t n = 0;
    error e = { 0 };
    CHECK(marks_find(px, 31, 31, 0, &mask, &n, &e) == ST_OK && !mask && !n); /* too small to tell */
    return check_done();
}
