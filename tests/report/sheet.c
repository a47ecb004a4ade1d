/* Figures on a sheet: sizes in mm, the same bytes twice, no date, text for those who cannot see, hostile names inert, a scale bar and
 * a ring of the right length, lighter cells for higher values, sentences for sizes that cannot be. */
#include "report/sheet.h"

#include <png.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"

typedef struct {
    char *bytes;
    size_t n;
} file;

typedef struct {
    uint8_t *rgb;
    size_t nx, ny;
} decoded;

static decoded decode(const file *f) {
    decoded d = { 0 };
    png_image image = { .version = PNG_IMAGE_VERSION };
    CHECK(png_image_begin_read_from_memory(&image, f->bytes, f->n));
    image.format = PNG_FORMAT_RGB;
    d.nx = image.width;
    d.ny = image.height;
    d.rgb = mem_array(d.nx * d.ny, 3);
    CHECK(d.rgb && png_image_finish_read(&image, NULL, d.rgb, 0, NULL));
    return d;
}

static int holds(const file *f, const char *words) {
    size_t m = strlen(words);
    for (size_t i = 0; i + m <= f->n; i++)
        if (!memcmp(f->bytes + i, words, m)) return 1;
    return 0;
}

static const double x[5] = { 300, 400, 500, 600, 700 }, y[5] = { 1.0, 2.0, MISSING, 3.0, 4.0 };
static const double lo[5] = { 0.5, 1.5, MISSING, 2.5, 3.5 }, hi[5] = { 1.5, 2.5, MISSING, 3.5, 4.5 };

static plot make_plot(const plot_series *s, size_t n) {
    return (plot){ .title = "T & U", .x_label = "wavelength (nm)", .y_label = "R (%)", .y_lo = MISSING, .y_hi = MISSING,
                   .target_lo = 1.0, .target_hi = MISSING, .target_label = "target", .series = s, .n_series = n };
}

static void check_formats(void) {
    const plot_series lines[2] = { { .x = x, .y = y, .lo = lo, .hi = hi, .n = 5, .label = "<b>" },
                                   { .x = x, .y = hi, .n = 5, .tone = 1, .style = PLOT_DASHED, .label = "second" } };
    plot p = make_plot(lines, 2);
    p.description = "for </desc><script>alert(1)</script>";
    static const char *const head[3] = { "<?xml version=\"1.0\"", "%PDF-", "\x89PNG" };
    for (int format = SHEET_SVG; format <= SHEET_PNG; format++) {
        file a = { 0 }, b = { 0 };
        error e = { 0 };
        sheet_options o = sheet_defaults();
        o.format = (sheet_format)format;
        o.creator = "sward";
        CHECK(sheet_plot(&p, NULL, &o, &a.bytes, &a.n, &e) == ST_OK && sheet_plot(&p, NULL, &o, &b.bytes, &b.n, &e) == ST_OK);
        CHECK(a.n > 1000 && a.n == b.n && !memcmp(a.bytes, b.bytes, a.n) && !memcmp(a.bytes, head[format], 4));
        if (format == SHEET_SVG) {
            CHECK(holds(&a, "width=\"240.94") && holds(&a, "<title>T &amp; U</title>") && holds(&a, "&lt;/desc&gt;&lt;script&gt;"));
            CHECK(!holds(&a, "<script") && !holds(&a, "nan") && !holds(&a, "inf"));
        }
        if (format == SHEET_PDF) CHECK(!holds(&a, "CreationDate") && holds(&a, "FontFile2")); /* no time; a TrueType font inside */
        if (format == SHEET_PNG) {
            decoded d = decode(&a);
            CHECK_NEAR((double)d.nx, 85.0 / 25.4 * 300.0, 1.0);
            CHECK(holds(&a, "pHYs"));
            free(d.rgb);
        }
        free(a.bytes);
        free(b.bytes);
    }
}

/* Whatever the plot holds, there is a file: nothing, one point, names that are no text, hundreds of names, every style. */
static void check_contents(void) {
    static const char *const names[] = { "one", "\xff\xfe broken \x01", NULL, "\xe6\xbc\xa2\xe5\xad\x97", "" };
    static double at[300], v[300];
    static const char *many[300];
    char longer[4000];
    memset(longer, 'W', sizeof longer - 1);
    longer[sizeof longer - 1] = '\0';
    for (size_t i = 0; i < 300; i++) {
        at[i] = (double)i;
        v[i] = 5.0 + (double)(i % 7);
        many[i] = i % 2 ? longer : "2026-03-03";
    }
    const double one = 5.0;
    const plot_series cases[] = { { .x = x, .y = y, .n = 0 },
                                  { .x = &one, .y = &one, .n = 1, .style = PLOT_POINTS, .label = longer },
                                  { .x = at, .y = v, .lo = at, .hi = v, .n = 5, .style = PLOT_POINTS },
                                  { .x = at, .y = v, .n = 300, .style = PLOT_POINTS },
                                  { .x = at, .y = v, .n = 40, .style = PLOT_STEPS } };
    const plot_rule rules[2] = { { 3.0, longer, 1 }, { MISSING, NULL, 0 } };
    for (size_t k = 0; k < sizeof cases / sizeof cases[0]; k++)
        for (int wide = 0; wide < 2; wide++) {
            plot p = make_plot(&cases[k], 1);
            file f = { 0 };
            error e = { 0 };
            sheet_options o = sheet_defaults();
            o.width_mm = wide ? 400.0 : 20.0;
            o.titled = wide;
            o.dark = wide;
            p.title = longer;
            p.log_y = k == 4;
            p.rules = rules;
            p.n_rules = 2;
            if (k == 2) p.names = names;
            if (k == 3) p.names = many;
            p.n_names = k == 2 ? 5 : k == 3 ? 300 : 0;
            CHECK(sheet_plot(&p, NULL, &o, &f.bytes, &f.n, &e) == ST_OK && holds(&f, "</svg>") && !holds(&f, "nan") && !holds(&f, "inf"));
            free(f.bytes);
        }
}

/* A name stands beside a point where there is room, and not where a curve would be hidden on all sides. */
static void check_point_names(void) {
    static const double px[3] = { 0.0, 5.0, 10.0 }, py[3] = { 0.0, 5.0, 10.0 };
    static const char *const names[3] = { "", "the one", "" };
    double cx[17], cy[17];
    size_t n[4];
    for (size_t i = 0; i < 17; i++) { /* a scribble around the point in the middle */
        cx[i] = i % 2 ? 2.0 : 8.0;
        cy[i] = 3.0 + 0.25 * (double)i;
    }
    for (int k = 0; k < 4; k++) {
        plot_series s[2] = { { .x = px, .y = py, .n = 3, .style = PLOT_POINTS, .point_names = k % 2 ? names : NULL },
                             { .x = cx, .y = cy, .n = k < 2 ? 0 : 17 } };
        plot p = make_plot(s, 2);
        sheet_options o = sheet_defaults();
        file f = { 0 };
        error e = { 0 };
        CHECK(sheet_plot(&p, NULL, &o, &f.bytes, &f.n, &e) == ST_OK);
        n[k] = f.n;
        free(f.bytes);
    }
    CHECK(n[1] > n[0] + 500 && n[3] == n[2]);
}

static double brightness(const decoded *d, double sx, double sy) {
    const uint8_t *p = d->rgb + 3 * ((size_t)(sy * (double)d->ny) * d->nx + (size_t)(sx * (double)d->nx));
    return 0.3 * p[0] + 0.59 * p[1] + 0.11 * p[2];
}

static void check_cells(void) {
    static const double cx[2] = { 200, 300 }, cy[3] = { 100, 200, 300 }, v[6] = { 30.0, 30.0, 3.0, MISSING, 0.3, 0.3 };
    sheet_cells cells = { cx, cy, v, 2, 3, "R (%)" };
    const double px[1] = { 200.0 }, py[1] = { 300.0 };
    plot_series s = { .x = px, .y = py, .n = 1, .style = PLOT_POINTS };
    plot p = make_plot(&s, 1);
    p.target_lo = MISSING;
    sheet_options o = sheet_defaults();
    o.format = SHEET_PNG;
    file f = { 0 };
    error e = { 0 };
    CHECK(sheet_plot(&p, &cells, &o, &f.bytes, &f.n, &e) == ST_OK);
    decoded d = decode(&f);
    double low = brightness(&d, 0.3, 0.7), middle = brightness(&d, 0.3, 0.45), high = brightness(&d, 0.3, 0.1);
    CHECK(low > middle + 30.0 && middle > high + 30.0); /* 30 % below, 0.3 % above */
    free(d.rgb);
    free(f.bytes);
    static const double none[6] = { MISSING, MISSING, -1.0, 0.0, MISSING, MISSING };
    cells.v = none;
    CHECK(sheet_plot(&p, &cells, &o, &f.bytes, &f.n, &e) == ST_OK);
    free(f.bytes);
}

static size_t longest_white(const decoded *d) {
    size_t most = 0;
    for (size_t v = 0; v < d->ny; v++)
        for (size_t u = 0, run = 0; u < d->nx; u++) {
            run = d->rgb[3 * (v * d->nx + u)] > 240 ? run + 1 : 0;
            if (run > most) most = run;
        }
    return most;
}

/* One dot of the file for each pixel of the micrograph, so that lengths can be counted. */
static void check_picture(void) {
    enum { NX = 600, NY = 400 };
    float *grey = mem_array((size_t)NX * NY, sizeof *grey);
    for (size_t i = 0; i < (size_t)NX * NY; i++) grey[i] = 0.25f;
    micrograph m = { .px = grey, .nx = NX, .ny = NY };
    const double fx[2] = { 300.0, 20.0 }, fy[2] = { 150.0, 30.0 };
    const int counted[2] = { 1, 0 };
    sheet_options o = sheet_defaults();
    o.format = SHEET_PNG;
    o.width_mm = NX / 300.0 * 25.4;
    static const struct {
        double px_nm, bar_nm;
    } t[] = { { 5.0, 500.0 }, { 1.3, 200.0 }, { 37.0, 5000.0 } };
    for (size_t k = 0; k < sizeof t / sizeof t[0]; k++) {
        sheet_picture p = { .m = &m, .px_nm = t[k].px_nm, .ring_px = MISSING, .title = "a", .description = "b" };
        file f = { 0 };
        error e = { 0 };
        CHECK(sheet_draw_picture(&p, &o, &f.bytes, &f.n, &e) == ST_OK);
        decoded d = decode(&f);
        CHECK(d.nx == NX && d.ny == NY);
        CHECK_NEAR((double)longest_white(&d), t[k].bar_nm / t[k].px_nm, 2.01); /* both ends may cover a dot in part */
        free(d.rgb);
        free(f.bytes);
    }
    sheet_picture p = { .m = &m, .px_nm = MISSING, .x = fx, .y = fy, .counted = counted, .n = 2, .ring_x = 300.0, .ring_y = 150.0,
                        .ring_px = 60.0, .ring_label = "ring", .title = "a", .description = "b" };
    file f = { 0 };
    error e = { 0 };
    CHECK(sheet_draw_picture(&p, &o, &f.bytes, &f.n, &e) == ST_OK);
    decoded d = decode(&f);
    double sum = 0.0, n = 0.0;
    for (size_t u = 330; u < 400; u++)
        if (d.rgb[3 * (150 * d.nx + u)] > 200) {
            sum += (double)u;
            n += 1.0;
        }
    CHECK_NEAR(sum / n, 360.0, 0.6);
    const uint8_t *centre = d.rgb + 3 * (150 * d.nx + 300);
    CHECK(centre[0] > 200 && centre[2] < 80 && d.ny > NY); /* the disc, and a key below */
    free(d.rgb);
    free(f.bytes);
    m.nx = 40000;
    CHECK_FAILS(sheet_draw_picture(&p, &o, &f.bytes, &f.n, &e), ST_BAD_INPUT, e, "too large");
    free(grey);
}

static void check_wafers(void) {
    static const double wx[4] = { 0.0, 40.0, 41.0, -40.0 }, wy[4] = { 0.0, 0.0, 1.0, 20.0 }, v[4] = { 300.0, 310.0, 320.0, 330.0 };
    static const char *const labels[4] = { "300", "310", "320", "330" };
    sheet_wafer w[3] = { { "L1 <W>", wx, wy, v, labels, 4 }, { "L1 W2", wx, wy, v, labels, 1 }, { "\xff", wx, wy, v, labels, 2 } };
    sheet_wafers all = { w, 3, "spacing (nm)", "Wafer map", "d" };
    for (int k = 0; k < 2; k++) {
        file f = { 0 };
        error e = { 0 };
        sheet_options o = sheet_defaults();
        o.width_mm = k ? 40.0 : 170.0;
        CHECK(sheet_draw_wafers(&all, &o, &f.bytes, &f.n, &e) == ST_OK && holds(&f, "<title>Wafer map</title>") && !holds(&f, "nan"));
        free(f.bytes);
        all.n = 1;
        w[0].n = 1; /* one position in the middle: no radius, no range */
    }
}

static void check_errors(void) {
    const plot_series s = { .x = x, .y = y, .n = 5, .label = "a" };
    plot p = make_plot(&s, 1);
    file f = { 0 };
    error e = { 0 };
    sheet_options o = sheet_defaults();
    o.width_mm = 10.0;
    CHECK_FAILS(sheet_plot(&p, NULL, &o, &f.bytes, &f.n, &e), ST_BAD_INPUT, e, "20 to 1000 mm wide, not 10");
    o = sheet_defaults();
    o.height_mm = 5.0;
    CHECK_FAILS(sheet_plot(&p, NULL, &o, &f.bytes, &f.n, &e), ST_BAD_INPUT, e, "mm high, not 5");
    o = sheet_defaults();
    o.dpi = 5000.0;
    CHECK_FAILS(sheet_plot(&p, NULL, &o, &f.bytes, &f.n, &e), ST_BAD_INPUT, e, "dots per inch, not 5000");
    o = sheet_defaults();
    o.text_pt = 1.0;
    CHECK_FAILS(sheet_plot(&p, NULL, &o, &f.bytes, &f.n, &e), ST_BAD_INPUT, e, "4 to 40 pt");
    o = sheet_defaults();
    o.format = SHEET_PNG;
    o.width_mm = 1000.0;
    o.dpi = 1200.0;
    CHECK_FAILS(sheet_plot(&p, NULL, &o, &f.bytes, &f.n, &e), ST_BAD_INPUT, e, "too large");
    o = sheet_defaults();
    size_t failures = 0;
    for (size_t n = 1; n < 60; n++) { /* whichever allocation fails: a sentence, or the whole figure */
        e = (error){ 0 };
        f = (file){ 0 };
        mem_fail_after(n);
        status st = sheet_plot(&p, NULL, &o, &f.bytes, &f.n, &e);
        mem_fail_after(0);
        failures += st != ST_OK;
        CHECK(st ? st == ST_NO_MEMORY && e.text[0] && !f.bytes : holds(&f, "</svg>"));
        free(f.bytes);
    }
    CHECK(failures > 10);
}

int main(void) {
    check_formats();
    check_contents();
    check_point_names();
    check_cells();
    check_picture();
    check_wafers();
    check_errors();
    return check_done();
}
