/* Private tags written into real TIFF files: the twin in UTF-16, chunks, calibrations, the offset table, JSON,
 * OME in the description, and blocks that lie. */
#include <stdint.h>
#include <stdlib.h>
#include <tiffio.h>

#include "base/quantity.h"
#include "check.h"
#include "io/load.h"
#include "scratch.h"

enum { NX = 512, NY = 100 };

static const TIFFFieldInfo own_fields[] = {
    { 34118, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_ASCII, FIELD_CUSTOM, 1, 1, (char[]){ "P34118" } },
    { 34119, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_BYTE, FIELD_CUSTOM, 1, 1, (char[]){ "P34119" } },
    { 34680, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_ASCII, FIELD_CUSTOM, 1, 1, (char[]){ "P34680" } },
    { 34682, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_ASCII, FIELD_CUSTOM, 1, 1, (char[]){ "P34682" } },
    { 34683, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_ASCII, FIELD_CUSTOM, 1, 1, (char[]){ "P34683" } },
    { 50431, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_BYTE, FIELD_CUSTOM, 1, 1, (char[]){ "P50431" } },
    { 51123, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_ASCII, FIELD_CUSTOM, 1, 1, (char[]){ "P51123" } },
    { 65003, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_ASCII, FIELD_CUSTOM, 1, 1, (char[]){ "P65003" } },
    { 65004, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_ASCII, FIELD_CUSTOM, 1, 1, (char[]){ "P65004" } },
    { 65009, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_DOUBLE, FIELD_CUSTOM, 1, 1, (char[]){ "P65009" } },
    { 65010, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_DOUBLE, FIELD_CUSTOM, 1, 1, (char[]){ "P65010" } },
    { 65012, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_ASCII, FIELD_CUSTOM, 1, 1, (char[]){ "P65012" } },
    { 33560, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_BYTE, FIELD_CUSTOM, 1, 1, (char[]){ "P33560" } },
};

typedef struct {
    uint32_t tag, n;
    const void *bytes;
} field;

static micrograph load_with(const field *f, size_t n, const char *description, uint32_t ny) {
    TIFF *tif = TIFFOpen(scratch("t.tif"), "w");
    TIFFMergeFieldInfo(tif, own_fields, sizeof own_fields / sizeof own_fields[0]);
    TIFFSetField(tif, TIFFTAG_IMAGEWIDTH, NX);
    TIFFSetField(tif, TIFFTAG_IMAGELENGTH, ny);
    TIFFSetField(tif, TIFFTAG_BITSPERSAMPLE, 8);
    TIFFSetField(tif, TIFFTAG_SAMPLESPERPIXEL, 1);
    TIFFSetField(tif, TIFFTAG_PHOTOMETRIC, PHOTOMETRIC_MINISBLACK);
    TIFFSetField(tif, TIFFTAG_PLANARCONFIG, PLANARCONFIG_CONTIG);
    for (size_t i = 0; i < n; i++) TIFFSetField(tif, f[i].tag, f[i].n, f[i].bytes);
    if (description) TIFFSetField(tif, TIFFTAG_IMAGEDESCRIPTION, description);
    uint8_t row[NX];
    for (uint32_t y = 0; y < ny; y++) {
        for (uint32_t x = 0; x < NX; x++) row[x] = (uint8_t)(x * 31 + y * 17 + x * y);
        TIFFWriteScanline(tif, row, y, 0);
    }
    TIFFClose(tif);
    micrograph m = { 0 };
    error e = { 0 };
    load_options o = load_defaults();
    CHECK(load_file(scratch("t.tif"), &o, &m, &e) == ST_OK);
    if (e.code) printf("  %s\n", e.text);
    return m;
}

static field text(uint32_t tag, const char *s) { return (field){ tag, (uint32_t)strlen(s) + 1, s }; }

#define EXPECT(m, nm, from)                                                                                  \
    do {                                                                                                     \
        CHECK_NEAR((m).px_nm, (nm), 1e-9 * (nm));                                                            \
        CHECK(!strcmp((m).px_source, (from)));                                                               \
    } while (0)

static void pairs(void) {
    static const char block[] =
        "0\r\n0\r\nAP_IMAGE_PIXEL_SIZE\r\nImage Pixel Size = 12.33 nm\r\nAP_MAG\r\nMag =    4.53 K X\r\n"
        "AP_ACTUALKV\r\nEHT =  5.00 kV\r\nAP_WD\r\nWD =  5.2 mm\r\nAP_STAGE_AT_T\r\nStage at T =  20.0 "
        "\xb0\r\n"
        "DP_TILT_CORRECTION\r\nTilt Corrn. = Off\r\nAP_TILT_ANGLE\r\nTilt Angle = 45.0 \xb0\r\n"
        "DP_DETECTOR_CHANNEL\r\nSignal A = InLens\r\nAP_DATE\r\nDate :23 Dec 2015\r\nAP_TIME\r\nTime "
        ":8:40:47\r\n";
    field f[] = { text(34118, block) };
    micrograph m = load_with(f, 1, NULL, NY);
    EXPECT(m, 12.33, "tag 34118");
    CHECK(m.facts.tilt_known && !m.facts.tilt_in_pixels && !strcmp(m.facts.detector, "InLens"));
    CHECK_NEAR(m.facts.magnification, 4530.0, 1e-9);
    CHECK_NEAR(m.facts.voltage_V, 5000.0, 1e-9);
    CHECK_NEAR(m.facts.working_distance_mm, 5.2, 1e-9);
    CHECK_NEAR(m.facts.tilt_deg, 20.0, 0.0); /* the stage's, not the angle set for a correction that is off */
    CHECK(m.flags == FLAG(TILT_CORRECTED) && strstr(m.note, "tilted by 20.0 degrees"));
    CHECK_NEAR(m.y_stretch, 1.0 / cos(20.0 * PI / 180.0), 1e-12);
    CHECK(m.ny == 106 && m.file_ny == NY); /* 100 / cos 20 = 106.4 */
    micrograph_free(&m);
    load_options keep = load_defaults();
    error e = { 0 };
    keep.correct_tilt = 0;
    CHECK(load_file(scratch("t.tif"), &keep, &m, &e) == ST_OK && m.flags == FLAG(TILT_KNOWN) && m.ny == NY);
    micrograph_free(&m);
    char copy[sizeof block];
    memcpy(copy, block, sizeof block);
    memcpy(strstr(copy, "= Off"), "= On ", 5);
    f[0].bytes = copy;
    m = load_with(f, 1, NULL, NY);
    CHECK(m.flags == 0 && m.ny == NY && m.facts.tilt_in_pixels); /* the instrument has done it */
    micrograph_free(&m);
    memcpy(copy, block, sizeof block);
    memcpy(strstr(copy, "20.0"), "70.0", 4);
    m = load_with(f, 1, NULL, NY);
    CHECK(m.flags == FLAG(TILT_KNOWN) && m.ny == NY); /* too steep to be a top view */
    micrograph_free(&m);
    uint8_t wide[2 * sizeof block];
    for (size_t i = 0; i < sizeof block; i++) wide[2 * i] = (uint8_t)block[i], wide[2 * i + 1] = 0;
    field w[] = { { 34119, (uint32_t)sizeof wide, wide } };
    m = load_with(w, 1, NULL, NY);
    EXPECT(m, 12.33, "tag 34118");
    micrograph_free(&m);
    field blank[] = { text(34118, "  \r\n"), { 34119, (uint32_t)sizeof wide, wide } };
    m = load_with(blank, 2, NULL, NY); /* a blank block is an absent block */
    EXPECT(m, 12.33, "tag 34118");
    micrograph_free(&m);
}

static void chunks(void) {
    uint8_t b[512] = { 2, 0, 0, 0, 1, 0 }; /* an empty thumbnail first */
    static const char main_text[] =
        "ImageStripSize=20\r\nPixelSizeX=4.8828e-9\r\nPixelSizeY=4.8828e-9\r\nDate=2016-05-16\r\n"
        "Time=10:20:30\r\nMagnification=10000\r\n";
    static const char beam[] = "HV=5.0000e3\r\nStageTilt=0.0\r\nWD=4.9800e-3\r\nDetector=SE\r\n";
    size_t at = 6, n_main = sizeof main_text, n_beam = sizeof beam;
    b[at] = (uint8_t)(n_main + 2), b[at + 4] = 2;
    memcpy(b + at + 6, main_text, n_main);
    size_t second = at + 6 + n_main;
    b[second] = (uint8_t)(n_beam + 2), b[second + 4] = 3;
    memcpy(b + second + 6, beam, n_beam);
    field f[] = { { 50431, (uint32_t)(second + 6 + n_beam), b } };
    micrograph m = load_with(f, 1, NULL, NY);
    EXPECT(m, 4.8828, "tag 50431");
    CHECK(m.strip_rows == 20 && m.ny == 80 && !strcmp(m.acquired_at, "2016-05-16T10:20:30"));
    CHECK_NEAR(m.facts.voltage_V, 5000.0, 1e-9);
    CHECK_NEAR(m.facts.working_distance_mm, 4.98, 1e-9);
    CHECK_NEAR(m.facts.magnification, 10000.0, 1e-9);
    CHECK(!strcmp(m.facts.detector, "SE") && m.flags == 0);
    micrograph_free(&m);
    b[second + 1] = 0x7f; /* the second chunk claims more than there is */
    m = load_with(f, 1, NULL, NY);
    EXPECT(m, 4.8828, "tag 50431");
    CHECK(strstr(m.note, "impossible length") && m.facts.voltage_V <= 0.0);
    micrograph_free(&m);
    b[6] = 1, b[7] = 0; /* a length of 1 holds not even its type */
    m = load_with(f, 1, NULL, NY);
    CHECK(isnan(m.px_nm) && strstr(m.note, "impossible length"));
    micrograph_free(&m);
}

static void calibration(void) {
    double five = 0.005, ten = 0.010, fifty = 0.05;
    field f[] = { text(65003, "\xb5m"), text(65004, "\xb5m"), { 65009, 1, &five }, { 65010, 1, &five } };
    micrograph m = load_with(f, 4, NULL, NY);
    EXPECT(m, 5.0, "tag 65009");
    CHECK(m.flags == 0);
    micrograph_free(&m);
    f[3].bytes = &ten;
    m = load_with(f, 4, NULL, NY);
    EXPECT(m, 5.0, "tag 65009");
    CHECK(m.flags == FLAG(PX_UNEQUAL) && m.ny == 2 * NY && strstr(m.note, "resampled"));
    micrograph_free(&m);
    f[3].bytes = &fifty; /* two axes of different kinds, as in a stack */
    m = load_with(f, 4, NULL, NY);
    CHECK(isnan(m.px_nm) && m.ny == NY && strstr(m.note, "10 times as high as wide"));
    micrograph_free(&m);
    field s[] = { text(65003, "1/nm"), text(65004, "1/nm"), { 65009, 1, &five }, { 65010, 1, &five } };
    m = load_with(s, 4, NULL, NY);
    CHECK(isnan(m.px_nm));
    micrograph_free(&m);
}

/* The table and its one entry in one block; the entry's place is that of the block in the file. */
static void offset_table(void) {
    uint8_t b[60 + 8 + 44] = "SIS0";
    double x = 2.5, magnification = 20000.0;
    b[10] = 30, b[12] = 14, b[14] = 6, b[16] = 5, b[18] = 124, b[58] = 1, b[60] = 1;
    b[68 + 10] = 0xf7, b[68 + 11] = 0xff; /* 10^-9 */
    memcpy(b + 68 + 12, &x, 8);
    memcpy(b + 68 + 20, &x, 8);
    memcpy(b + 68 + 36, &magnification, 8);
    field f[] = { { 33560, (uint32_t)sizeof b, b } };
    micrograph m = load_with(f, 1, NULL, NY);
    CHECK(isnan(m.px_nm)); /* the entry points to the file's first bytes: nothing there */
    micrograph_free(&m);
    FILE *file = fopen(scratch("t.tif"), "rb");
    static uint8_t all[1 << 17];
    size_t n = file ? fread(all, 1, sizeof all, file) : 0;
    if (file) fclose(file);
    for (size_t i = 0; i + sizeof b <= n; i++)
        if (!memcmp(all + i, "SIS0", 4)) {
            uint32_t at = (uint32_t)(i + 68);
            memcpy(all + i + 64, &at, 4);
        }
    load_options o = load_defaults();
    error e = { 0 };
    CHECK(load_memory(all, n, &o, &m, &e) == ST_OK);
    EXPECT(m, 2.5, "tag 33560");
    CHECK_NEAR(m.facts.magnification, 20000.0, 0.0);
    CHECK(!strcmp(m.acquired_at, "2024-06-06T14:30:00"));
    micrograph_free(&m);
}

static void texts(void) {
    field json[] = { text(51123, "{\"PixelSizeUm\": 0.0125, \"Other\": {\"x\": 1}}") };
    micrograph m = load_with(json, 1, NULL, NY);
    EXPECT(m, 12.5, "tag 51123");
    micrograph_free(&m);
    m = load_with(NULL, 0,
                  "<?xml version=\"1.0\"?><OME><Image><Pixels SizeX=\"512\" PhysicalSizeX=\"5.0\" "
                  "PhysicalSizeXUnit=\"nm\" "
                  "PhysicalSizeY=\"5.0\" PhysicalSizeYUnit=\"nm\"/></Image></OME>",
                  NY);
    EXPECT(m, 5.0, "ome-xml");
    micrograph_free(&m);
    m = load_with(NULL, 0, "x=1\nunit=nm\nyunit=um\n", NY); /* no resolution tags: no scale */
    CHECK(isnan(m.px_nm));
    micrograph_free(&m);
    /* 34683 and 34682 side by side, one of them blank. */
    field two[] = { text(34682, " "),
                    text(34683,
                         "<Metadata><BinaryResult><PixelSize><X unit=\"m\">3e-9</X><Y unit=\"m\">3e-9</Y>"
                         "</PixelSize></BinaryResult></Metadata>") };
    m = load_with(two, 2, NULL, NY);
    EXPECT(m, 3.0, "tag 34683");
    micrograph_free(&m);
}

int main(void) {
    TIFFSetWarningHandler(NULL); /* of the writer */
    scratch_make();
    pairs();
    chunks();
    calibration();
    offset_table();
    texts();
    scratch_remove(scratch_root);
    return check_done();
}
