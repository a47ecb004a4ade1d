/* Instrument blocks and public tags: written into real TIFF files and read back through the whole loader. */
#include <stdint.h>
#include <stdlib.h>
#include <tiffio.h>

#include "base/limits.h"
#include "check.h"
#include "io/load.h"
#include "io/picture_priv.h"
#include "io/metadata/instrument_priv.h"
#include "scratch.h"

enum { NX = 512, NY = 64 };

static const TIFFFieldInfo own_fields[] = {
    { 34118, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_ASCII, FIELD_CUSTOM, 1, 1, (char[]){ "Private34118" } },
    { 34682, TIFF_VARIABLE2, TIFF_VARIABLE2, TIFF_ASCII, FIELD_CUSTOM, 1, 1, (char[]){ "Private34682" } },
};

typedef struct {
    uint32_t tag;
    const char *text, *description, *date;
    float x_resolution, y_resolution;
    int unit; /* 0: tag left out */
} tags;

static micrograph load_with(const tags *t) {
    TIFF *tif = TIFFOpen(scratch("t.tif"), "w");
    TIFFMergeFieldInfo(tif, own_fields, 2);
    TIFFSetField(tif, TIFFTAG_IMAGEWIDTH, NX);
    TIFFSetField(tif, TIFFTAG_IMAGELENGTH, NY);
    TIFFSetField(tif, TIFFTAG_BITSPERSAMPLE, 8);
    TIFFSetField(tif, TIFFTAG_SAMPLESPERPIXEL, 1);
    TIFFSetField(tif, TIFFTAG_PHOTOMETRIC, PHOTOMETRIC_MINISBLACK);
    TIFFSetField(tif, TIFFTAG_PLANARCONFIG, PLANARCONFIG_CONTIG);
    if (t->text) TIFFSetField(tif, t->tag, (uint32_t)strlen(t->text), t->text);
    if (t->description) TIFFSetField(tif, TIFFTAG_IMAGEDESCRIPTION, t->description);
    if (t->date) TIFFSetField(tif, TIFFTAG_DATETIME, t->date);
    if (t->x_resolution > 0.0f) TIFFSetField(tif, TIFFTAG_XRESOLUTION, (double)t->x_resolution);
    if (t->y_resolution > 0.0f) TIFFSetField(tif, TIFFTAG_YRESOLUTION, (double)t->y_resolution);
    if (t->unit) TIFFSetField(tif, TIFFTAG_RESOLUTIONUNIT, t->unit);
    uint8_t row[NX];
    for (int y = 0; y < NY; y++) {
        for (int x = 0; x < NX; x++) row[x] = (uint8_t)(x * 31 + y * 17 + x * y);
        TIFFWriteScanline(tif, row, (uint32_t)y, 0);
    }
    TIFFClose(tif);
    micrograph m = { 0 };
    error e = { 0 };
    load_options o = load_defaults();
    CHECK(load_file(scratch("t.tif"), &o, &m, &e) == ST_OK);
    if (e.code) printf("  %s\n", e.text);
    return m;
}

static void resolutions(void) {
    /* D-14: TIFF 6.0, tags 282, 283, 296 */
    static const struct {
        tags t;
        double nm; /* NAN: none */
        const char *source;
    } r[] = {
        { { .x_resolution = 5080000.0f, .y_resolution = 5080000.0f, .unit = RESUNIT_INCH },
          5.0,
          "resolution" },
        { { .x_resolution = 5080000.0f, .y_resolution = 5080000.0f },
          5.0,
          "resolution" }, /* inch is the default */
        { { .x_resolution = 2000000.0f, .y_resolution = 2000000.0f, .unit = RESUNIT_CENTIMETER },
          5.0,
          "resolution" },
        { { .x_resolution = 72.0f, .y_resolution = 72.0f, .unit = RESUNIT_INCH }, (double)NAN, "none" },
        { { .x_resolution = 72.0f, .y_resolution = 72.0f, .unit = RESUNIT_NONE }, (double)NAN, "none" },
        { { .x_resolution = 5080000.0f, .y_resolution = 5080000.0f, .unit = RESUNIT_NONE },
          (double)NAN,
          "none" },
        { { .description = "x=1\nunit=nm\nmin=0\n",
            .x_resolution = 0.2f,
            .y_resolution = 0.2f,
            .unit = RESUNIT_NONE },
          5.0,
          "description" },
        { { .description = "x=1\nunit=\\u00B5m\n", .x_resolution = 200.0f, .unit = RESUNIT_INCH },
          5.0,
          "description" },
        { { .description = "x=1\nunit=\nmin=0", .x_resolution = 5080000.0f, .unit = RESUNIT_INCH },
          (double)NAN,
          "none" },
        { { .description = "x=1\nunit=pixel", .x_resolution = 5080000.0f, .unit = RESUNIT_INCH },
          (double)NAN,
          "none" },
        { { .description = "Pixel size: 2.5 nm" }, 2.5, "description" },
        { { .description = "{\"pixel_size\": {\"x\": 2.5e-9, \"y\": 2.5e-9}}" }, 2.5, "description" },
        { { .description = "no words of size" }, (double)NAN, "none" },
    };
    for (size_t i = 0; i < sizeof r / sizeof r[0]; i++) {
        micrograph m = load_with(&r[i].t);
        CHECK(!strcmp(m.px_source, r[i].source));
        if (isnan(r[i].nm))
            CHECK(isnan(m.px_nm));
        else
            CHECK_NEAR(m.px_nm, r[i].nm, 1e-6 * r[i].nm);
        micrograph_free(&m);
    }
    micrograph m = load_with(
        &(tags){ .x_resolution = 2000000.0f, .y_resolution = 1000000.0f, .unit = RESUNIT_CENTIMETER });
    CHECK(m.flags == FLAG(PX_UNEQUAL) && strstr(m.note, "not square"));
    micrograph_free(&m);
}

static const char block_34118[] =
    "0\r\n0\r\n0\r\n5.825e-009\r\n20000\r\n0\r\n1\r\nDP_TILT\r\nTilt = Off\r\nAP_PIXEL_SIZE\r\nPixel Size = "
    "5.825 nm\r\n"
    "AP_WIDTH\r\nWidth = 5.965 \xb5m\r\nAP_DATE\r\nDate :23 Dec 2015\r\nAP_TIME\r\nTime : 8:40:47\r\n";

static void pairs(void) {
    micrograph m = load_with(&(tags){ .tag = 34118, .text = block_34118, .date = "2020:01:01 00:00:00" });
    CHECK(!strcmp(m.px_source, "tag 34118") && m.flags == 0 && !m.note[0]);
    CHECK_NEAR(m.px_nm, 5965.0 / NX, 1e-9); /* not the 5.825 of the key that looks right */
    CHECK(!strcmp(m.acquired_at, "2015-12-23T08:40:47"));
    micrograph_free(&m);

    picture p = { 0 };
    tag_34118_read(
        "0\n0\n0\n2.5e-9\nAP_IMAGE_PIXEL_SIZE\nImage Pixel Size = 0.0 fm\nAP_FIB_PIXEL_SIZE\nFIB = 7 nm\n",
        2048, &p);
    CHECK(p.scales.n == 1);
    CHECK_NEAR(p.scales.list[0].x_nm, 1.25, 1e-12); /* zero is absent; 1024 display pixels over 2048 stored */
    p = (picture){ 0 };
    tag_34118_read(
        "AP_IMAGE_PIXEL_SIZE\nImage Pixel Size = 558.2 pm\nDP_IMAGE_STORE\nStore resolution = 2048 * 1536\n",
        1024, &p);
    CHECK_NEAR(p.scales.list[0].x_nm, 2.0 * 0.5582, 1e-12); /* resized since */
    CHECK(strstr(p.note, "stored 2048 pixels wide, now 1024"));
    p = (picture){ 0 };
    tag_34118_read("AP_IMAGE_PIXEL_SIZE\nImage Pixel Size = 5 nm\nAP_WIDTH\nWidth = 7 um\n", 1024, &p);
    CHECK(strstr(p.note, "keys disagree"));
    CHECK_NEAR(p.scales.list[0].x_nm, 5.0, 0.0);
    p = (picture){ 0 };
    tag_34118_read("AP_PIXEL_SIZE\nPixel Size = 24.65 nm", 2048, &p);
    CHECK_NEAR(p.scales.list[0].x_nm, 12.325, 1e-12);
    p = (picture){ 0 };
    tag_34118_read("AP_IMAGE_PIXEL_SIZE", 1024, &p);
    tag_34118_read("", 1024, &p);
    tag_34118_read("AP_DATE\nDate =99 Foo 1\n", 1024, &p);
    CHECK(p.scales.n == 0 && !p.acquired_at[0]);
}

static void sections(void) {
    static const char block[] =
        "[User]\r\nDate=06/30/2024\r\nTime=05:06:40 PM\r\n[Beam]\r\nBeam=EBeam\r\nScan=EScan\r\n[Scan]\r\n"
        "PixelWidth=2.5e-009\r\nPixelHeight=2.5e-009\r\n[Image]\r\nResolutionX=512\r\nResolutionY=50\r\n";
    micrograph m = load_with(&(tags){ .tag = 34682, .text = block });
    CHECK(!strcmp(m.px_source, "tag 34682") && m.flags == 0);
    CHECK_NEAR(m.px_nm, 2.5, 1e-9);
    CHECK(m.strip_rows == NY - 50 && m.ny == 50 && m.file_ny == NY &&
          !strcmp(m.acquired_at, "2024-06-30T17:06:40"));
    micrograph_free(&m);

    picture p = { 0 };
    tag_34682_read("[Beam]\nScan=EScan\n[EScan]\nPixelWidth=3e-9\nPixelHeight=3.1e-9\n[Private "
                   "X]\nTimeOfCreation=13.06.2016 08:00:01\n",
                   512, 400, &p);
    CHECK(p.scales.n == 1 && p.strip_stated == 0 && !strcmp(p.acquired_at, "2016-06-13T08:00:01"));
    CHECK_NEAR(p.scales.list[0].y_nm, 3.1, 1e-9);
    p = (picture){ 0 };
    tag_34682_read(
        "[Beam]\nBeam=EBeam\n[EBeam]\nHFW=1.28e-6\nVFW=1e-6\n[Image]\nResolutionX=1024\nResolutionY=800\n",
        512, 400, &p);
    CHECK_NEAR(p.scales.list[0].x_nm, 2.5, 1e-9); /* 1.25 at 1024 columns, now 512 */
    CHECK(p.strip_stated == 0 && strstr(p.note, "recorded 1024 pixels wide, now 512"));
    p = (picture){ 0 };
    tag_34682_read("[Scan]\nPixelWidth=\n[Image]\nResolutionX=512\nResolutionY=10\n", 512, 400, &p);
    CHECK(p.scales.n == 0 && p.strip_stated == 0); /* empty is absent; a strip of 390 rows is none */
}

int main(void) {
    TIFFSetWarningHandler(NULL); /* of the writer */
    scratch_make();
    resolutions();
    pairs();
    sections();
    scratch_remove(scratch_root);
    return check_done();
}
