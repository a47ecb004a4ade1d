/* What a TIFF says beside its pixels: the public tags, of which their own file knows the meaning, OME-XML, and private
 * instrument blocks. This file knows which directory is asked. */
#include "io/tiff_tags_priv.h"

#include <string.h>

#include "io/metadata/public_tags_priv.h"
#include "io/metadata/xml_scale_priv.h"

static void read_texts(TIFF *tif, picture *p) {
    char *text = NULL;
    uint16_t unit = RESUNIT_INCH;
    float x = 0.0f, y = 0.0f;
    (void)TIFFGetFieldDefaulted(tif, TIFFTAG_RESOLUTIONUNIT, &unit);
    if (!TIFFGetField(tif, TIFFTAG_IMAGEDESCRIPTION, &text)) text = NULL;
    if (!TIFFGetField(tif, TIFFTAG_XRESOLUTION, &x)) x = 0.0f;
    if (!TIFFGetField(tif, TIFFTAG_YRESOLUTION, &y)) y = 0.0f;
    public_scale(text, (double)x, (double)y, unit, p);
}

static void read_date(TIFF *tif, picture *p) {
    char *text = NULL;
    if (TIFFGetField(tif, TIFFTAG_DATETIME, &text) && text) public_date(text, p);
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
    if (*first == '<') ome_read(first, strlen(first), nx, NULL, p);
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
