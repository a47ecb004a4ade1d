/* Numbers, units and lines that state a pixel size, in every spelling and every trap. */
#include "io/metadata/scaletext_priv.h"

#include "check.h"

static void numbers(void) {
    double v = 0.0;
    static const struct {
        const char *text;
        double want;
    } good[] = { { "3.4e-009", 3.4e-9 },
                 { "83.566e-3", 0.083566 },
                 { "2,5012e-6", 2.5012e-6 },
                 { "   105 ", 105.0 },
                 { "-1", -1.0 } };
    for (size_t i = 0; i < sizeof good / sizeof good[0]; i++) {
        CHECK(scaletext_number(good[i].text, &v));
        CHECK_NEAR(v, good[i].want, 1e-12 * fabs(good[i].want));
    }
    static const char *const bad[] = { "",    "1,234.5", "1.234,5",      "1,2,3", "nan",
                                       "inf", "0x10",    "480065006C00", "5 nm" };
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) CHECK(!scaletext_number(bad[i], &v));
}

static void lengths(void) {
    static const struct {
        const char *text;
        double nm;
    } t[] = { { "12.33 nm", 12.33 },
              { "12,33 nm", 12.33 },
              { "558.2 pm", 0.5582 },
              { "1.25 \xb5m", 1250.0 },
              { "1.25 \xc2\xb5m", 1250 },
              { "1.25\xce\xbcm", 1250 },
              { "1.25 \xc3\x82\xc2\xb5m", 1250 },
              { "1.25 \xe6m", 1250 },
              { "1.25 \x83\xcam", 1250 },
              { "1.25 \xa6\xccm", 1250 },
              { "1.25 \\u00B5m", 1250 },
              { "1.25 &#181;m", 1250 },
              { "1.25 &micro;m", 1250 },
              { "2e-9 m", 2.0 },
              { "5 A", 0.5 },
              { "5 \xe2\x84\xab", 0.5 },
              { "1 Micron", 1000.0 },
              { "1 inch", 2.54e7 },
              { "1 cm", 1e7 },
              { "3 mm", 3e6 } };
    for (size_t i = 0; i < sizeof t / sizeof t[0]; i++) {
        double nm = 0.0;
        CHECK(scaletext_length(t[i].text, &nm));
        CHECK_NEAR(nm, t[i].nm, 1e-9 * t[i].nm);
    }
    static const char *const bad[] = { "5",  "5 px", "5 Mm",  "5 NM", "5 ?m", "5 \xef\xbf\xbdm",
                                       "nm", "",     "5 nm x" };
    double nm;
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) CHECK(!scaletext_length(bad[i], &nm));
}

/* The size that lines state, NAN: none. */
static scales read_lines(const char *text) {
    scales s = { 0 };
    (void)scaletext_lines(text, SCALE_SIDECAR, "sidecar", "a.txt", &s);
    return s;
}

static void lines(void) {
    static const struct {
        const char *text;
        double nm;
    } t[] = { { "pixel size = 2.5 nm", 2.5 },
              { "# px_nm = 9\r\n; px_nm = 8\r\nPixel_Size: 2.5 nm\r\n", 2.5 },
              { "px_nm = 5.58", 5.58 },
              { "PX-NM=5,58", 5.58 },
              { "Date: 1.2.2024\nnm/px: 3\n", 3.0 },
              { "scale = 0.4 px/nm", 2.5 },
              { "scale = 400 pixels/um", 2.5 },
              { "Scale: 0.0025 um/px", 2.5 },
              { "image pixel size = 2500 pm", 2.5 },
              { "pixel size = 0 nm\npixel size = 2.5 nm", 2.5 },
              { "pixel size = 2.5 nm\npixel size = 9 nm", 2.5 },
              { "pixel size = 2.5 nm/px", 2.5 },
              { "px_nm = 0.0025 um", 2.5 } };
    for (size_t i = 0; i < sizeof t / sizeof t[0]; i++) {
        scales s = read_lines(t[i].text);
        CHECK(s.n == 1);
        CHECK_NEAR(s.list[0].x_nm, t[i].nm, 1e-9);
    }
    scales s = read_lines("pixel width = 2 nm\npixel height = 3 nm");
    CHECK(s.n == 1);
    CHECK_NEAR(s.list[0].x_nm, 2.0, 0.0);
    CHECK_NEAR(s.list[0].y_nm, 3.0, 0.0);
    s = read_lines("pixel size = 5.58");
    CHECK(s.n == 0 && strstr(s.note, "a.txt: 'pixel size = 5.58' has no unit"));
    static const char *const none[] = { "",
                                        "scale = 5 nm",
                                        "scale = 5",
                                        "magnification = 20000",
                                        "pixel size = 5 px",
                                        "pixel size 5 nm",
                                        "the pixel size = 5 nm",
                                        "pixel size = nan nm",
                                        "pixel size = -1 nm",
                                        "= 5 nm",
                                        ":::" };
    for (size_t i = 0; i < sizeof none / sizeof none[0]; i++) CHECK(read_lines(none[i]).n == 0);
}

static void json_forms(void) {
    static const struct {
        const char *text;
        double x, y;
    } t[] = { { "{\"px_nm\": 5.58}", 5.58, 5.58 },
              { "{\"a\": {\"pixel_size\": {\"x\": 2.5e-9, \"y\": 2.6e-9}}}", 2.5, 2.6 },
              { "{\"PixelSizeUm\": 0.0025}", 2.5, 2.5 },
              { "{\"hfw\": 2.56e-6, \"resolution\": [1024, 768]}", 2.5, 2.5 } };
    for (size_t i = 0; i < sizeof t / sizeof t[0]; i++) {
        scales s = { 0 };
        CHECK(scaletext_json(t[i].text, strlen(t[i].text), SCALE_SIDECAR, "sidecar", "a.json", &s) &&
              s.n == 1);
        CHECK_NEAR(s.list[0].x_nm, t[i].x, 1e-9);
        CHECK_NEAR(s.list[0].y_nm, t[i].y, 1e-9);
    }
    static const char *const none[] = { "{}",
                                        "{\"px_nm\": -1}",
                                        "{\"pixel_size\": 5}",
                                        "{\"hfw\": 1, \"resolution\": []}",
                                        "{\"a\": {\"b\": {\"px_nm\": 1}}}",
                                        "{\"px_nm\": }" };
    for (size_t i = 0; i < sizeof none / sizeof none[0]; i++) {
        scales s = { 0 };
        CHECK(!scaletext_json(none[i], strlen(none[i]), SCALE_SIDECAR, "sidecar", "a.json", &s) && s.n == 0);
        CHECK((s.note[0] != '\0') == (i == 5)); /* not JSON: said */
    }
}

static void keywords(void) {
    scales s = { 0 };
    scaletext_keyword("PixelSize", "0.005 \xc2\xb5m", &s);
    CHECK(s.n == 1);
    CHECK_NEAR(s.list[0].x_nm, 5.0, 1e-9);
    scaletext_keyword("Description", "made by hand\npixel size: 4 nm", &s);
    CHECK(s.n == 2 && s.list[1].rank == SCALE_DESCRIPTION && !strcmp(s.list[1].name, "description"));
    scaletext_keyword("Comment", "{\"px_nm\": 3}", &s);
    scaletext_keyword("Software", "pixel size: 4 nm", &s);
    scaletext_keyword("Title", "x", &s);
    CHECK(s.n == 3);
}

int main(void) {
    numbers();
    lengths();
    lines();
    json_forms();
    keywords();
    return check_done();
}
