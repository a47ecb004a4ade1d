/* Instrument texts beside a picture: sections, [SemImageFile], dollar keys; which file is looked at, what it may
 * not do. */
#include "io/metadata/sidecar_priv.h"

#include "check.h"
#include "io/metadata/instrument_priv.h"
#include "scratch.h"

static picture read_beside(const char *image, const char *name, const char *text) {
    picture p = { .nx = 1280, .ny = 960 };
    scratch_put(name, text, strlen(text));
    sidecar_read(scratch(image), &p);
    unlink(scratch(name));
    return p;
}

static void expect(const picture *p, double nm) {
    CHECK(p->scales.n == 1 && p->scales.list[0].rank == SCALE_SIDECAR &&
          !strcmp(p->scales.list[0].name, "sidecar"));
    CHECK_NEAR(p->scales.list[0].x_nm, nm, 1e-9 * nm);
}

static void sections(void) {
    static const char t[] =
        "[MAIN]\nDate=2024-02-07\nPixelSizeX=0.00000005\nPixelSizeY=0.00000005\nImageStripSize=96\n\n[SEM]\n"
        "AcceleratorVoltage=5000.0\nDetector=SE\nStageTilt=3.0\nWD=0.005\n";
    static const char *const names[] = { "a-png.hdr", "a.hdr", "A.HDR", "a.txt" };
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++) {
        picture p = read_beside("a.png", names[i], t);
        expect(&p, 50.0);
        CHECK(p.strip_stated == 96 && !strcmp(p.acquired_at, "2024-02-07T00:00:00") &&
              !strcmp(p.facts.detector, "SE"));
        CHECK_NEAR(p.facts.voltage_V, 5000.0, 0.0);
        CHECK_NEAR(p.facts.tilt_deg, 3.0, 0.0);
    }
    CHECK(read_beside("a.png", "a.hdr", "ncols 10\npixel size = 3 nm\n").scales.n ==
          0); /* of a map: none of ours */
    CHECK(read_beside("a.png", "b.hdr", t).scales.n == 0);
    CHECK(read_beside("a.png", "a-tif.hdr", t).scales.n == 0);
}

static void image_file(void) {
    static const char t[] = "[SemImageFile]\r\nImageName=A01.TIF\r\nDataSize=1280x900\r\nPixelSize=4."
                            "960938\r\nAcceleratingVoltage=5000 Volt\r\n"
                            "Magnification=20000\r\nWorkingDistance=8400 "
                            "um\r\nSignalName=SE(U)\r\nDate=06/30/2024\r\nTime=17:06:40\r\n";
    picture p = read_beside("a01.tif", "a01.txt", t);
    expect(&p, 4.960938);
    CHECK(p.strip_stated == 60 && !p.note[0] && !strcmp(p.acquired_at, "2024-06-30T17:06:40"));
    CHECK_NEAR(p.facts.working_distance_mm, 8.4, 1e-9);
    CHECK_NEAR(p.facts.voltage_V, 5000.0, 0.0);
    p = read_beside("b.tif", "b.txt", t);
    expect(&p, 4.960938);
    CHECK(strstr(p.note, "names another picture, A01.TIF"));
    p = read_beside("a01.tif", "a01.txt",
                    "[SemImageFile]\nDataSize=2560x1920\nPixelSize=2.48\nMagnification=20000\n");
    expect(&p, 4.96);
    CHECK(strstr(p.note, "recorded 2560 pixels wide, now 1280"));
    p = read_beside("a01.tif", "a01.txt",
                    "[SemImageFile]\nDataSize=1280x960\nPixelSize=9.9\nMagnification=20000\n");
    expect(&p, 9.9);
    CHECK(strstr(p.note, "does not fit its magnification"));
    p = read_beside("a01.tif", "a01.txt",
                    "[SemImageFile]\nDataSize=1280x960\nPixelSize=4960\nMagnification=20000\n");
    CHECK(p.scales.n == 0 && strstr(p.note, "at all and was not used"));
}

static void dollars(void) {
    static const char t[] = "$CM_FORMAT X-SEM\n$CM_MAG 20000\n$CM_ACCEL_VOLT 5.00\n$CM_FULL_SIZE 1280 "
                            "960\n$$SM_WD 8.40\n$$SM_MICRON_BAR 107\n"
                            "$$SM_MICRON_MARKER 500nm\n$CM_DATE 2024/06/30\n$CM_TIME 17:06:40\n$CM_STAGE_POS "
                            "5.483 0.831 8.5 -0.0 12.0 0.000\n";
    picture p = read_beside("a.tif", "a.txt", t);
    expect(&p, 500.0 / 107.0);
    CHECK_NEAR(p.scales.list[0].u_rel, 0.2887 / 107.0, 1e-6);
    CHECK_NEAR(p.facts.tilt_deg, 12.0, 0.0);
    CHECK_NEAR(p.facts.voltage_V, 5000.0, 0.0);
    CHECK(!strcmp(p.acquired_at, "2024-06-30T17:06:40"));
    p = read_beside(
        "a.tif", "a.txt",
        "$CM_MAG 20000\n$$SM_MICRON_MARKER 500nm\n"); /* no length in pixels, and never from the magnification */
    CHECK(p.scales.n == 0 && p.facts.magnification >= 20000.0);
    p = read_beside("a.tif", "a.txt", "$CM_FORMAT x\r\n$CM_PIXEL_SIZE 0.005\r\n$CM_FULL_SIZE 640 480\r\n");
    expect(&p, 2.5);
    p = read_beside("a.tif", "a.txt",
                    "$CM_MAG 95\n$CM_FIELD_OF_VIEW 1.28mm 0.960mm\n$CM_FULL_SIZE 1280 960\n");
    expect(&p, 1000.0);
    p = read_beside(
        "a.tif", "a.txt",
        "$CM_MAG 95\n$CM_FIELD_OF_VIEW 1.28 0.960mm\n$CM_FULL_SIZE 1280 960\n"); /* the first takes the last unit */
    expect(&p, 1000.0);
}

static void times(void) {
    static const struct {
        const char *date, *clock, *want;
        int day_first;
    } t[] = { { "11 Apr 2023", "8:40:47", "2023-04-11T08:40:47", 1 },
              { "2016-05-16", NULL, "2016-05-16T00:00:00", 1 },
              { "2020/08/31", "17:06:40", "2020-08-31T17:06:40", 0 },
              { "08/31/2020", "05:06:40 PM", "2020-08-31T17:06:40", 0 },
              { "08/31/2020", "12:06:40 AM", "2020-08-31T00:06:40", 0 },
              { "31.08.2020", "08:00:01", "2020-08-31T08:00:01", 1 },
              { "31 Foo 2020", NULL, "", 1 },
              { "99.99.9999", NULL, "", 1 },
              { "", NULL, "", 1 } };
    for (size_t i = 0; i < sizeof t / sizeof t[0]; i++) {
        picture p = { 0 };
        instrument_time(t[i].date, t[i].clock, t[i].day_first, &p);
        CHECK(!strcmp(p.acquired_at, t[i].want));
        if (strcmp(p.acquired_at, t[i].want) != 0) printf("  %s: %s\n", t[i].date, p.acquired_at);
    }
}

int main(void) {
    scratch_make();
    sections();
    image_file();
    dollars();
    times();
    scratch_remove(scratch_root);
    return check_done();
}
