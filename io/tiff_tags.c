/* The pixel size in the tags of a TIFF: resolution (TIFF 6.0, 1992, tags 282, 283, 296) and description (270). */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "io/scaletext_priv.h"
#include "io/tiff_tags_priv.h"

/* libtiff has already refused a denominator of 0 (the value is then 0). */
static void read_resolution(TIFF *tif, picture *p) {
    float x = 0.0f, y = 0.0f;
    uint16_t unit = RESUNIT_INCH;
    if (!TIFFGetField(tif, TIFFTAG_XRESOLUTION, &x) || !(x > 0.0f)) return;
    if (!TIFFGetField(tif, TIFFTAG_YRESOLUTION, &y) || !(y > 0.0f)) y = x;
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_RESOLUTIONUNIT, &unit);
    double nm = unit == RESUNIT_INCH ? 2.54e7 : unit == RESUNIT_CENTIMETER ? 1e7 : 0.0;
    scales_add(&p->scales, SCALE_RESOLUTION, "resolution", nm / (double)x, nm / (double)y);
}

static void read_description(TIFF *tif, picture *p) {
    char *text = NULL;
    if (!TIFFGetField(tif, TIFFTAG_IMAGEDESCRIPTION, &text) || !text) return;
    const char *first = text + strspn(text, " \t\r\n");
    if (*first == '{')
        (void)scaletext_json(first, strlen(first), SCALE_DESCRIPTION, "description", "ImageDescription", &p->scales);
    else if (*first != '<')
        (void)scaletext_lines(text, SCALE_DESCRIPTION, "description", "ImageDescription", &p->scales);
}

void tiff_tags_read(TIFF *tif, picture *p) {
    (void)TIFFSetDirectory(tif, 0);
    read_resolution(tif, p);
    read_description(tif, p);
}
