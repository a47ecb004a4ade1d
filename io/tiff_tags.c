/* What the tags of a TIFF say beside its pixels: resolution (TIFF 6.0, 1992, tags 282, 283, 296), description
 * (270), date (306), and private instrument blocks, which their own file understands. A description with a
 * line `unit=` redefines the resolution: pixels per that unit, whatever tag 296 says. */
#include "io/tiff_tags_priv.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "io/scaletext_priv.h"

enum { MAX_BLOCK = 4 << 20 };

/* The unit of a description line `unit=...`; 0 no such line, 1 there is one (*nm 0: it names no length). */
static int description_unit(const char *text, const char *key, double *nm) {
    size_t n = strlen(key);
    for (const char *line = text; *line;) {
        size_t length = strcspn(line, "\r\n");
        if (!strncmp(line, key, n)) {
            char unit[32];
            snprintf(unit, sizeof unit, "%.*s", (int)(length - n), line + n);
            *nm = scaletext_unit(unit);
            return 1;
        }
        line += length;
        line += strspn(line, "\r\n");
    }
    return 0;
}

static void read_resolution(TIFF *tif, double unit_nm, scale_rank rank, const char *name, picture *p) {
    float x = 0.0f, y = 0.0f;
    if (!TIFFGetField(tif, TIFFTAG_XRESOLUTION, &x) || !(x > 0.0f))
        return; /* a denominator of 0 reads as 0 */
    if (!TIFFGetField(tif, TIFFTAG_YRESOLUTION, &y) || !(y > 0.0f)) y = x;
    scales_add(&p->scales, rank, name, unit_nm / (double)x, unit_nm / (double)y);
}

static void read_texts(TIFF *tif, picture *p) {
    char *text = NULL;
    double nm = 0.0;
    uint16_t unit = RESUNIT_INCH;
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_RESOLUTIONUNIT, &unit);
    if (!TIFFGetField(tif, TIFFTAG_IMAGEDESCRIPTION, &text) || !text) text = NULL;
    if (text && description_unit(text, "unit=", &nm)) {
        read_resolution(tif, nm, SCALE_DESCRIPTION, "description", p);
        return;
    }
    read_resolution(tif,
                    unit == RESUNIT_INCH         ? 2.54e7
                    : unit == RESUNIT_CENTIMETER ? 1e7
                                                 : 0.0,
                    SCALE_RESOLUTION, "resolution", p);
    if (!text) return;
    const char *first = text + strspn(text, " \t\r\n");
    if (*first == '{')
        (void)scaletext_json(first, strlen(first), SCALE_DESCRIPTION, "description", "ImageDescription",
                             &p->scales);
    else if (*first != '<')
        (void)scaletext_lines(text, SCALE_DESCRIPTION, "description", "ImageDescription", &p->scales);
}

static void read_date(TIFF *tif, picture *p) {
    char *text = NULL;
    int y, mo, d, h, mi, s = 0;
    if (p->acquired_at[0] || !TIFFGetField(tif, TIFFTAG_DATETIME, &text) || !text) return;
    int n = sscanf(text, "%4d%*1[:/-]%2d%*1[:/-]%2d %2d:%2d:%2d", &y, &mo, &d, &h, &mi, &s);
    if (n >= 5) picture_set_time(p, y, mo, d, h, mi, s);
}

/* A copy of a private text tag of this directory, or NULL. */
static char *private_text(TIFF *tif, uint32_t tag) {
    const TIFFField *field = TIFFFindField(tif, tag, TIFF_ANY);
    uint32_t n = 0;
    void *bytes = NULL;
    if (!field || !TIFFFieldPassCount(field)) return NULL;
    TIFFDataType type = TIFFFieldDataType(field);
    if (type != TIFF_ASCII && type != TIFF_BYTE && type != TIFF_UNDEFINED) return NULL;
    if (!TIFFGetField(tif, tag, &n, &bytes) || !bytes || n > MAX_BLOCK) return NULL;
    return mem_text_n(bytes, n);
}

static void read_blocks(TIFF *tif, size_t nx, size_t ny, picture *p) {
    char *a = private_text(tif, 34118), *b = private_text(tif, 34682);
    if (a) tag_34118_read(a, nx, p);
    if (b) tag_34682_read(b, nx, ny, p);
    free(a);
    free(b);
}

void tiff_tags_read(TIFF *tif, toff_t at, picture *p) {
    uint32_t nx = 0, ny = 0, first_nx = 0;
    if (!TIFFSetSubDirectory(tif, at)) return;
    (void)TIFFGetField(tif, TIFFTAG_IMAGEWIDTH, &nx);
    (void)TIFFGetField(tif, TIFFTAG_IMAGELENGTH, &ny);
    read_texts(tif, p);
    read_date(tif, p);
    if (!TIFFSetDirectory(tif, 0)) return;
    (void)TIFFGetField(tif, TIFFTAG_IMAGEWIDTH, &first_nx);
    if (first_nx != nx) return;
    p->acquired_at[0] = '\0'; /* an instrument's own date outranks that of the export */
    read_blocks(tif, nx, ny, p);
    read_date(tif, p);
}
