/* Maxima and their dynamics: by hand, plateaus, against flooding, and memory. */
#include "metrics/maxima.h"

#include "base/mem.h"
#include "check.h"
#include "planes.h"

static void check_ridge(void) {
    /* A path of heights: 1 5 3 7 2 4 2, one row: maxima 5 (saddle 3), 7, 4 (saddle 2). */
    static const float map[] = { 1, 5, 3, 7, 2, 4, 2 };
    maximum *m = NULL;
    size_t n = 0;
    error e = { 0 };
    CHECK(maxima_find(map, 7, 1, 1, &m, &n, &e) == ST_OK);
    CHECK(n == 3 && m[0].pixel == 1 && m[1].pixel == 3 && m[2].pixel == 5);
    CHECK_NEAR((double)m[0].dynamic, 2.0, 0.0);
    CHECK(isinf(m[1].dynamic));
    CHECK_NEAR((double)m[2].dynamic, 2.0, 0.0);
    free(m);
}

static void check_plateau(void) {
    enum { W = 9, H = 7 };
    float map[W * H] = { 0 };
    for (int y = 2; y < 5; y++)
        for (int x = 2; x < 7; x++) map[y * W + x] = 1.0f;
    map[3 * W + 4] = 0.5f; /* a ring of equal height */
    maximum *m = NULL;
    size_t n = 0, standing = 0;
    error e = { 0 };
    CHECK(maxima_find(map, W, H, 1, &m, &n, &e) == ST_OK);
    for (size_t i = 0; i < n; i++) standing += m[i].dynamic > 0.0f;
    CHECK(standing == 1);
    CHECK(maximum_rules(map, W, H, 2 * W + 2, 9) && !maximum_rules(map, W, H, 2 * W + 3, 1));
    free(m);
    float flat[W * H] = { 0 };
    CHECK(maxima_find(flat, W, H, 1, &m, &n, &e) == ST_OK);
    standing = 0;
    for (size_t i = 0; i < n; i++) standing += m[i].dynamic > 0.0f;
    CHECK(standing == 1);
    free(m);
}

/* Highest value of the lowest points of all paths to something higher, by lowering a level step by step. */
static double saddle_by_flooding(const float *map, size_t nx, size_t ny, size_t from, char *seen,
                                 size_t *stack) {
    for (int level = (int)map[from]; level >= 0; level--) {
        size_t n = 0;
        memset(seen, 0, nx * ny);
        stack[n++] = from;
        seen[from] = 1;
        while (n) {
            size_t i = stack[--n], x = i % nx, y = i / nx;
            if (map[i] > map[from] || (i != from && !(map[i] < map[from]) && i < from)) return level;
            for (size_t yy = y ? y - 1 : 0; yy <= y + 1 && yy < ny; yy++)
                for (size_t xx = x ? x - 1 : 0; xx <= x + 1 && xx < nx; xx++)
                    if (!seen[yy * nx + xx] && map[yy * nx + xx] >= (float)level) {
                        seen[yy * nx + xx] = 1;
                        stack[n++] = yy * nx + xx;
                    }
        }
    }
    return -1.0;
}

static void check_against_flooding(void) {
    enum { W = 37, H = 29 };
    static float map[W * H];
    static char seen[W * H];
    static size_t stack[W * H];
    dice d = { 11 };
    for (int i = 0; i < W * H; i++) map[i] = (float)floor(12.0 * dice_uniform(&d));
    maximum *m = NULL;
    size_t n = 0, wrong = 0;
    error e = { 0 };
    CHECK(maxima_find(map, W, H, 1, &m, &n, &e) == ST_OK && n > 20);
    for (size_t i = 0; i < n; i++) {
        double saddle = saddle_by_flooding(map, W, H, m[i].pixel, seen, stack);
        double want = saddle < 0.0 ? HUGE_VAL : (double)m[i].height - saddle;
        wrong += (double)m[i].dynamic > want || (double)m[i].dynamic < want;
    }
    CHECK(wrong == 0);
    uint32_t top = 5 * W + 5;
    CHECK(maximum_uphill(map, W, H, 100.0, &top));
    CHECK(maximum_rules(map, W, H, top, 1));
    free(m);
}

static void check_memory(void) {
    static const float map[] = { 1, 5, 3, 7, 2, 4, 2 };
    maximum *m = NULL;
    size_t n = 0;
    error e = { 0 };
    for (size_t k = 1; k <= 4; k++) {
        mem_fail_after(k);
        CHECK_FAILS(maxima_find(map, 7, 1, 1, &m, &n, &e), ST_NO_MEMORY, e, "memory");
        mem_fail_after(0);
    }
    static const float slope[] = { 0, 1, 2, 3, 4, 5, 6, 7 };
    uint32_t foot = 0;
    CHECK(!maximum_uphill(slope, 8, 1, 3.0, &foot) && foot == 0);
    CHECK(maximum_uphill(slope, 8, 1, 8.0, &foot) && foot == 7);
}

int main(void) {
    check_ridge();
    check_plateau();
    check_against_flooding();
    check_memory();
    return check_done();
}
