/* Colours that must be told apart, as people with the common colour deficiencies see them, and in grey.
 * Simulation: G. M. Machado, M. M. Oliveira, L. A. F. Fernandes, IEEE Trans. Vis. Comput. Graph. 15, 1291-1298 (2009), matrices of full
 * severity (from memory), on linear sRGB. Distance: CIE 1976 L*a*b*, D65. */
#include "base/quantity.h"
#include "check.h"
#include "report/overlay_priv.h"
#include "report/sheet_priv.h"

#define SOURCE "a just noticeable difference is about 2.3 (Mahy, Van Eycken, Oosterlinck, Color Res. Appl. 19, 105-121, 1994); five of them"
static const double least = 5.0 * 2.3;

static const double sight[4][3][3] = {
    { { 1, 0, 0 }, { 0, 1, 0 }, { 0, 0, 1 } }, /* trichromat */
    { { 0.152286, 1.052583, -0.204868 }, { 0.114503, 0.786281, 0.099216 }, { -0.003882, -0.048116, 1.051998 } }, /* protan */
    { { 0.367322, 0.860646, -0.227968 }, { 0.280085, 0.672501, 0.047413 }, { -0.011820, 0.042940, 0.968881 } },  /* deutan */
    { { 1.255528, -0.076749, -0.178779 }, { -0.078411, 0.930809, 0.147602 }, { 0.004733, 0.691367, 0.303900 } }, /* tritan */
};

static double to_linear(double v) { return v <= 0.04045 ? v / 12.92 : pow((v + 0.055) / 1.055, 2.4); }
static double lab_root(double t) { return t > 216.0 / 24389.0 ? cbrt(t) : (24389.0 / 27.0 * t + 16.0) / 116.0; }

/* sRGB to L*a*b* (IEC 61966-2-1, CIE 15). */
static void to_lab(ink i, int who, double lab[3]) {
    double linear[3] = { to_linear(i.r), to_linear(i.g), to_linear(i.b) }, seen[3];
    for (int k = 0; k < 3; k++) {
        seen[k] = sight[who][k][0] * linear[0] + sight[who][k][1] * linear[1] + sight[who][k][2] * linear[2];
        seen[k] = fmin(fmax(seen[k], 0.0), 1.0);
    }
    double x = lab_root((0.4124 * seen[0] + 0.3576 * seen[1] + 0.1805 * seen[2]) / 0.9505);
    double y = lab_root(0.2126 * seen[0] + 0.7152 * seen[1] + 0.0722 * seen[2]);
    double z = lab_root((0.0193 * seen[0] + 0.1192 * seen[1] + 0.9505 * seen[2]) / 1.0890);
    lab[0] = 116.0 * y - 16.0;
    lab[1] = 500.0 * (x - y);
    lab[2] = 200.0 * (y - z);
}

static double distance(ink a, ink b, int who) {
    double p[3], q[3];
    to_lab(a, who, p);
    to_lab(b, who, q);
    return sqrt((p[0] - q[0]) * (p[0] - q[0]) + (p[1] - q[1]) * (p[1] - q[1]) + (p[2] - q[2]) * (p[2] - q[2]));
}

static void check_apart(const ink *colours, size_t n) {
    for (int who = 0; who < 4; who++)
        for (size_t i = 0; i < n; i++)
            for (size_t k = i + 1; k < n; k++) {
                double d = distance(colours[i], colours[k], who);
                CHECK_SOURCE(fmax(d, least), d, 1e-9, SOURCE);
            }
}

static double lightness(ink i) {
    double lab[3];
    to_lab(i, 0, lab);
    return lab[0];
}

int main(void) {
    double lab[3]; /* the conversion itself: white and sRGB red, Lindbloom's tables (from memory) */
    to_lab(INK_RGB(0xffffff), 0, lab);
    CHECK_NEAR(lab[0], 100.0, 0.05);
    to_lab(INK_RGB(0xff0000), 0, lab);
    CHECK_SOURCE(lab[0], 53.24, 0.05, "B. Lindbloom, colour calculator: sRGB red is L* 53.24, a* 80.09, b* 67.20 (from memory)");
    CHECK_SOURCE(lab[1], 80.09, 0.1, "B. Lindbloom (from memory)");

    const ink overlay[] = { COUNTED_INK, FRAME_INK, CELL_INK };
    check_apart(overlay, 3);
    const sheet_colours both[2] = { sheet_light(), sheet_dark() };
    for (int k = 0; k < 2; k++) {
        check_apart(both[k].tone, PLOT_TONES);
        check_apart(both[k].mark, 3);
        for (int t = 0; t < PLOT_TONES; t++) /* seen on their ground */
            CHECK(fabs(lightness(both[k].tone[t]) - lightness(both[k].paper)) > 20.0);
    }
    for (int t = 1; t < 4; t++) /* in grey, the tones of the samples: each lighter than the one before */
        CHECK(lightness(both[0].tone[t]) > lightness(both[0].tone[t - 1]) + 5.0);
    for (int k = 1; k <= 20; k++) CHECK(lightness(sheet_ramp(k / 20.0)) > lightness(sheet_ramp((k - 1) / 20.0)) + 1.0);
    return check_done();
}
