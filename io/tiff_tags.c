/* What the tags of a TIFF say beside its pixels: resolution (TIFF 6.0, 1992, tags 282, 283, 296), description
 * (270), date (306), and private instrument blocks, which their own file understands. A description with a
 * line `unit=` redefines the resolution: pixels per that unit, whatever tag 296 says. */
#include "io/tiff_tags_priv.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "io/metadata/scaletext_priv.h"
#include "io/metadata/xml_scale_priv.h"

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

static void read_resolution(TIFF *tif, double x_nm, double y_nm, scale_rank rank, const char *name,
                            picture *p) {
    float x = 0.0f, y = 0.0f;
    if (!TIFFGetField(tif, TIFFTAG_XRESOLUTION, &x) || !(x > 0.0f))
        return; /* a denominator of 0 reads as 0 */
    if (!TIFFGetField(tif, TIFFTAG_YRESOLUTION, &y) || !(y > 0.0f)) y = x;
    scales_add(&p->scales, rank, name, x_nm / (double)x, y_nm / (double)y);
}

static void read_texts(TIFF *tif, picture *p) {
    char *text = NULL;
    double nm = 0.0;
    uint16_t unit = RESUNIT_INCH;
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_RESOLUTIONUNIT, &unit);
    if (!TIFFGetField(tif, TIFFTAG_IMAGEDESCRIPTION, &text) || !text) text = NULL;
    if (text && (description_unit(text, "unit=", &nm) || description_unit(text, "xunit=", &nm))) {
        double y_nm = nm;
        (void)description_unit(text, "yunit=", &y_nm);
        read_resolution(tif, nm, y_nm, SCALE_DESCRIPTION, "description", p);
        return;
    }
    double per = unit == RESUNIT_INCH ? 2.54e7 : unit == RESUNIT_CENTIMETER ? 1e7 : 0.0;
    read_resolution(tif, per, per, SCALE_RESOLUTION, "resolution", p);
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

static void read_facts(TIFF *tif, picture *p) {
    char *text = NULL;
    if (!p->facts.software[0] && TIFFGetField(tif, TIFFTAG_SOFTWARE, &text) && text)
        picture_set_text(p->facts.software, sizeof p->facts.software, text);
}

/* OME-XML stands on the first directory, whatever page it speaks of. */
static void read_ome(TIFF *tif, size_t nx, picture *p) {
    char *text = NULL;
    if (!TIFFGetField(tif, TIFFTAG_IMAGEDESCRIPTION, &text) || !text) return;
    const char *first = text + (!strncmp(text, "\xef\xbb\xbf", 3) ? 3 : 0);
    first += strspn(first, " \t\r\n");
    if (*first == '<') ome_read(first, strlen(first), nx, p);
}

void tiff_tags_read(TIFF *tif, toff_t at, const uint8_t *file, size_t n_file, picture *p) {
    uint32_t nx = 0, ny = 0, first_nx = 0;
    if (!TIFFSetSubDirectory(tif, at)) return;
    (void)TIFFGetField(tif, TIFFTAG_IMAGEWIDTH, &nx);
    (void)TIFFGetField(tif, TIFFTAG_IMAGELENGTH, &ny);
    if (!nx || !ny) return;
    read_texts(tif, p);
    read_date(tif, p);
    read_facts(tif, p);
    if (!TIFFSetDirectory(tif, 0)) return;
    (void)TIFFGetField(tif, TIFFTAG_IMAGEWIDTH, &first_nx);
    read_ome(tif, nx, p);
    if (first_nx == nx) {
        tiff_private_read(tif, nx, ny, p); /* the instrument's own date replaces that of the export */
        read_date(tif, p);
        read_facts(tif, p);
    }
    tiff_private_table(tif, file, n_file, nx, p);
}
