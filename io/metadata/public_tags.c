/* What public tags say beside the pixels: resolution (TIFF 6.0, 1992, tags 282, 283, 296), description (270), date (306),
 * and the first directory of an Exif block, which is a TIFF without a picture and therefore none for libtiff (Exif 2.3,
 * CIPA DC-008). A description with a line `unit=` redefines the resolution: pixels per that unit, whatever tag 296 says.
 * Does not read the camera's own directory behind it: a focal plane is no specimen. */
#include "io/metadata/public_tags_priv.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "io/metadata/scaletext_priv.h"
#include "io/metadata/xml_scale_priv.h"

enum { MAX_ENTRIES = 512, UNIT_INCH = 2, UNIT_CENTIMETRE = 3 };

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

static void add_resolution(double x, double y, double x_nm, double y_nm, scale_rank rank, const char *name,
                           picture *p) {
    if (!(x > 0.0)) return; /* a denominator of 0 reads as 0 */
    scales_add(&p->scales, rank, name, x_nm / x, y_nm / (y > 0.0 ? y : x));
}

void public_scale(const char *text, double x, double y, unsigned unit, picture *p) {
    double nm = 0.0;
    if (text && (description_unit(text, "unit=", &nm) || description_unit(text, "xunit=", &nm))) {
        double y_nm = nm;
        (void)description_unit(text, "yunit=", &y_nm);
        add_resolution(x, y, nm, y_nm, SCALE_DESCRIPTION, "description", p);
        return;
    }
    double per = unit == UNIT_INCH ? 2.54e7 : unit == UNIT_CENTIMETRE ? 1e7 : 0.0;
    add_resolution(x, y, per, per, SCALE_RESOLUTION, "resolution", p);
    if (!text) return;
    const char *first = text + strspn(text, " \t\r\n");
    if (*first == '{')
        (void)scaletext_json(first, strlen(first), SCALE_DESCRIPTION, "description", "ImageDescription",
                             &p->scales);
    else if (*first != '<')
        (void)scaletext_lines(text, SCALE_DESCRIPTION, "description", "ImageDescription", &p->scales);
}

void public_date(const char *text, picture *p) {
    int y, mo, d, h, mi, s = 0;
    if (p->acquired_at[0]) return;
    int n = sscanf(text, "%4d%*1[:/-]%2d%*1[:/-]%2d %2d:%2d:%2d", &y, &mo, &d, &h, &mi, &s);
    if (n >= 5) picture_set_time(p, y, mo, d, h, mi, s);
}

/* ---- Exif ---- */

typedef struct {
    const uint8_t *b;
    size_t n;
    int little;
} block;

static unsigned u16(const block *k, size_t at) {
    return k->little ? k->b[at] | (unsigned)k->b[at + 1] << 8 : (unsigned)k->b[at] << 8 | k->b[at + 1];
}

static uint32_t u32(const block *k, size_t at) {
    uint32_t a = u16(k, at), b = u16(k, at + 2);
    return k->little ? a | b << 16 : a << 16 | b;
}

/* Where the value of the entry at `at` lies, when its `size` bytes are inside; 0: they are not. */
static size_t value_place(const block *k, size_t at, size_t size) {
    size_t place = size <= 4 ? at + 8 : u32(k, at + 8);
    return place <= k->n && size <= k->n - place ? place : 0;
}

/* One number of any unsigned type or a fraction; 0: none. */
static double number_at(const block *k, size_t at) {
    unsigned type = u16(k, at + 2);
    size_t place = value_place(k, at, type == 5 ? 8 : 4);
    if (!place || !u32(k, at + 4)) return 0.0;
    if (type == 3) return u16(k, place);
    if (type == 4) return u32(k, place);
    uint32_t below = type == 5 ? u32(k, place + 4) : 0;
    return below ? (double)u32(k, place) / below : 0.0;
}

/* A terminated copy of a text, owned by the caller; NULL: none. */
static char *text_at(const block *k, size_t at) {
    size_t n = u32(k, at + 4), place = u16(k, at + 2) == 2 && n ? value_place(k, at, n) : 0;
    return place ? mem_text_n((const char *)k->b + place, n) : NULL;
}

static void use_texts(const char *description, const char *date, const char *software, picture *p) {
    const char *first = description ? description + strspn(description, " \t\r\n") : "";
    if (*first == '<') ome_read(first, strlen(first), p->nx, NULL, p);
    if (date) public_date(date, p);
    if (software && !p->facts.software[0])
        picture_set_text(p->facts.software, sizeof p->facts.software, software);
}

int exif_read(const uint8_t *bytes, size_t n, picture *p) {
    block k = { bytes, n, 0 };
    if (n < 14 || (memcmp(bytes, "II*\0", 4) != 0 && memcmp(bytes, "MM\0*", 4) != 0)) return 1;
    k.little = bytes[0] == 'I';
    size_t at = u32(&k, 4);
    if (at > n - 2) return 1;
    double x = 0.0, y = 0.0, unit = UNIT_INCH, orientation = 1.0; /* inch: what a missing tag 296 means */
    char *texts[3] = { NULL };                                    /* description, software, date */
    unsigned entries = u16(&k, at);
    at += 2;
    for (unsigned i = 0; i < entries && i < MAX_ENTRIES && n - at >= 12; i++, at += 12) {
        unsigned tag = u16(&k, at);
        char **text = tag == 270 ? &texts[0] : tag == 305 ? &texts[1] : tag == 306 ? &texts[2] : NULL;
        if (text && !*text) *text = text_at(&k, at);
        double *number = tag == 282   ? &x
                         : tag == 283 ? &y
                         : tag == 296 ? &unit
                         : tag == 274 ? &orientation
                                      : NULL;
        if (number) *number = number_at(&k, at);
    }
    public_scale(texts[0], x, y, unit > 0.0 && unit < 4.0 ? (unsigned)unit : 1, p);
    use_texts(texts[0], texts[2], texts[1], p);
    for (int t = 0; t < 3; t++) free(texts[t]);
    return orientation >= 1.0 && orientation <= 8.0 ? (int)orientation : 1;
}
