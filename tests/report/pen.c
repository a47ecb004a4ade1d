/* Lettering: widths add up, a text that is too long ends in an ellipsis within its room, broken bytes and missing characters show as
 * something, and two pens at once draw the same. */
#include "report/pen_priv.h"

#include <pthread.h>
#include <stdlib.h>

#include "check.h"

static cairo_surface_t *surface(void) { return cairo_image_surface_create(CAIRO_FORMAT_RGB24, 400, 60); }

static unsigned long sum_of(cairo_surface_t *s) {
    unsigned long sum = 0;
    cairo_surface_flush(s);
    const unsigned char *p = cairo_image_surface_get_data(s);
    size_t n = (size_t)cairo_image_surface_get_stride(s) * 60;
    for (size_t i = 0; i < n; i++) sum = sum * 31 + p[i];
    return sum;
}

static unsigned long drawn(const char *text, double width) {
    cairo_surface_t *s = surface();
    pen p;
    error e = { 0 };
    CHECK(pen_open(s, &p, &e) == ST_OK);
    pen_em(&p, 20.0);
    pen_ink(&p, INK_RGB(0xffffff));
    pen_text_within(&p, 10.0, 40.0, 0.0, width, text);
    CHECK(pen_check(&p, &e) == ST_OK);
    unsigned long sum = sum_of(s);
    pen_close(&p);
    cairo_surface_destroy(s);
    return sum;
}

static const char *const longer = "a name that is much too long for where it has to stand";

/* The sum of the last of 20 drawings, 0 if one differed from the one before. */
static void *draw_often(void *out) {
    unsigned long *sum = out;
    for (int i = 0; i < 20; i++) {
        cairo_surface_t *s = surface();
        pen p;
        if (pen_open(s, &p, NULL) == ST_OK) {
            pen_em(&p, 20.0);
            pen_ink(&p, INK_RGB(0xffffff));
            pen_text_within(&p, 10.0, 40.0, 0.0, 200.0, longer);
            unsigned long now = sum_of(s);
            *sum = !i || now == *sum ? now : 0;
        }
        pen_close(&p);
        cairo_surface_destroy(s);
    }
    return NULL;
}

int main(void) {
    cairo_surface_t *s = surface();
    pen p;
    error e = { 0 };
    CHECK(pen_open(s, &p, &e) == ST_OK);
    pen_em(&p, 2048.0); /* a unit of the typeface */
    CHECK_NEAR(pen_width(&p, "0"), 1303.0, 0.5); /* advances of DejaVu Sans 2.37 in its hmtx table, read from the font file */
    CHECK_NEAR(pen_width(&p, "nm"), 1298.0 + 1995.0, 1.0);
    CHECK_NEAR(pen_width(&p, ""), 0.0, 0.0);
    pen_em(&p, 10.0);
    double full = pen_width(&p, longer);
    for (double room = 20.0; room < full; room += 17.0) {
        double w = pen_width_within(&p, room, longer);
        CHECK(w <= room && w > room - 16.0); /* as much as fits */
    }
    CHECK_NEAR(pen_width_within(&p, full + 1.0, longer), full, 1e-9);
    pen_close(&p);
    cairo_surface_destroy(s);

    CHECK(drawn("abc", 300.0) == drawn("abc", 300.0) && drawn("abc", 300.0) != drawn("abd", 300.0));
    CHECK(drawn("a\xff" "b", 300.0) == drawn("a\xef\xbf\xbd" "b", 300.0));  /* no UTF-8: U+FFFD */
    CHECK(drawn("a\x01" "b", 300.0) == drawn("a\xef\xbf\xbd" "b", 300.0));
    CHECK(drawn("\xe6\xbc\xa2", 300.0) != drawn("", 300.0));                /* not in the typeface: a box */
    CHECK(drawn("a\tb", 300.0) == drawn("a b", 300.0));
    unsigned long one = drawn(longer, 200.0);
    pthread_t threads[4];
    unsigned long sums[4] = { 0 };
    for (size_t i = 0; i < 4; i++) CHECK(pthread_create(&threads[i], NULL, draw_often, &sums[i]) == 0);
    for (size_t i = 0; i < 4; i++) {
        CHECK(pthread_join(threads[i], NULL) == 0);
        CHECK(sums[i] == one);
    }
    return check_done();
}
