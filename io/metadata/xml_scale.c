/* Pixel sizes in XML: the OME data model (Open Microscopy Environment, schema 2016-06 and before), the
 * <Metadata> block of tag 34683 (SI units), and the key and value items of tag 34680 (base64). */
#include "io/metadata/xml_scale_priv.h"

#include <math.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/metadata/instrument_priv.h"
#include "io/metadata/scaletext_priv.h"
#include "io/metadata/xml_priv.h"

static double positive(const char *text) {
    double v;
    return text && scaletext_number(text, &v) && v > 0.0 ? v : MISSING;
}

/* recorded columns against stored ones: the factor to apply, with a note when it is not 1. */
static double resized(picture *p, const char *name, double columns, size_t nx) {
    char a[NUMBER_TEXT];
    if (!(columns >= 1.0) || fabs(columns / (double)nx - 1.0) < 1e-6) return 1.0;
    note_add(p->note, "%s: recorded %s pixels wide, now %zu; the pixel size was scaled.", name,
             number_text(columns, 6, a), nx);
    return columns / (double)nx;
}

/* ISO 8601 as both schemas write it: 2024-06-30T17:06:40, whatever follows. */
static void take_time(const char *text, picture *p) {
    const char *t = strchr(text, 'T');
    instrument_time(text, t ? t + 1 : NULL, 1, p);
}

/* ---- OME ---- */

typedef struct {
    double x_nm, y_nm, columns, u_rel;
    int seen;
} ome_pixels;

typedef struct {
    ome_pixels first, current, chosen; /* chosen: its data cover the first page */
    char date[40], detector[48];
    int binary_only, is_ome, named;
    const char *image; /* last: the caller's, see the header */
} ome_state;

/* The size in nm; units default to micrometres. "pixel" and "reference frame" are no lengths. */
static double ome_length(const char *const *attributes, const char *size, const char *unit) {
    const char *text = xml_attribute(attributes, unit);
    return positive(xml_attribute(attributes, size)) * (text ? scaletext_unit(text) : 1e3);
}

static double digits(const char *text) { return text ? scaletext_u_rel(text) : MISSING; }

static void ome_begin(void *state, const xml_path *path, const char *const *attributes) {
    ome_state *s = state;
    const char *ifd;
    if (path->depth == 1) s->is_ome = xml_is(path, NULL, "OME");
    if (xml_is(path, "Image", "Pixels")) {
        s->current = (ome_pixels){ ome_length(attributes, "PhysicalSizeX", "PhysicalSizeXUnit"),
                                   ome_length(attributes, "PhysicalSizeY", "PhysicalSizeYUnit"),
                                   positive(xml_attribute(attributes, "SizeX")),
                                   digits(xml_attribute(attributes, "PhysicalSizeX")), 1 };
        if (!s->first.seen) s->first = s->current;
    } else if (xml_is(path, "Pixels", "TiffData")) {
        ifd = xml_attribute(attributes, "IFD");
        if (!s->chosen.seen && (!ifd || !strcmp(ifd, "0"))) s->chosen = s->current;
    } else if (s->image && xml_is(path, "TiffData", "UUID")) {
        const char *file = xml_attribute(attributes, "FileName"); /* the image that is in our file */
        if (file && !s->named && !strcmp(instrument_bare_name(file), s->image)) s->chosen = s->current, s->named = 1;
    } else if (xml_is(path, NULL, "BinaryOnly"))
        s->binary_only = 1;
    else if (xml_is(path, "Instrument", "Detector") && !s->detector[0] && xml_attribute(attributes, "Model"))
        picture_set_text(s->detector, sizeof s->detector, xml_attribute(attributes, "Model"));
}

static void ome_end(void *state, const xml_path *path, const char *text) {
    ome_state *s = state;
    if (xml_is(path, "Image", "AcquisitionDate") && !s->date[0])
        snprintf(s->date, sizeof s->date, "%.39s", text);
}

void ome_read(const char *text, size_t n, size_t nx, const char *image, picture *p) {
    static const xml_visitor visitor = { ome_begin, ome_end };
    ome_state s;
    s.image = image;
    int ok = xml_walk(text, n, &visitor, &s, offsetof(ome_state, image));
    if (!s.is_ome) return;
    if (!ok) {
        note_add(p->note, "The OME-XML is damaged and was not used.");
        return;
    }
    const ome_pixels *best = s.chosen.seen ? &s.chosen : &s.first;
    if (best->x_nm > 0.0 || best->y_nm > 0.0) {
        double x = best->x_nm > 0.0 ? best->x_nm : best->y_nm, y = best->y_nm > 0.0 ? best->y_nm : x;
        double k = resized(p, "ome-xml", best->columns, nx);
        scales_add_u(&p->scales, SCALE_OME, "ome-xml", x * k, y * k, best->u_rel);
    } else if (s.binary_only)
        p->companion_wanted = 1;
    if (s.date[0]) take_time(s.date, p);
    if (s.detector[0]) memcpy(p->facts.detector, s.detector, sizeof s.detector);
}

/* ---- tag 34683 ---- */

typedef struct {
    double size_x, size_y, field_x, field_y, columns, rows, voltage, distance, tilt, turn;
    double size_u, field_u; /* relative, by the digits of x; 0: not met */
    int corrected, tilt_seen;
    char date[40], detector[48];
} metadata_state;

static void metadata_end(void *state, const xml_path *path, const char *text) {
    metadata_state *s = state;
    const struct {
        const char *parent, *name;
        double *to;
    } numbers[] = {
        { "PixelSize", "X", &s->size_x },
        { "PixelSize", "Y", &s->size_y },
        { "ScanFieldOfView", "X", &s->field_x },
        { "ScanFieldOfView", "Y", &s->field_y },
        { "ScanSize", "Width", &s->columns },
        { "ScanSize", "Height", &s->rows },
        { NULL, "AccelerationVoltage", &s->voltage },
        { "Optics", "WorkingDistance", &s->distance },
        { NULL, "ScanRotation", &s->turn },
    };
    double v;
    for (size_t i = 0; i < sizeof numbers / sizeof numbers[0]; i++)
        if (xml_is(path, numbers[i].parent, numbers[i].name) && scaletext_number(text, &v))
            *numbers[i].to = v;
    if (xml_is(path, "PixelSize", "X")) s->size_u = scaletext_u_rel(text);
    if (xml_is(path, "ScanFieldOfView", "X")) s->field_u = scaletext_u_rel(text);
    if (xml_is(path, "Tilt", "Alpha") && scaletext_number(text, &v)) s->tilt = v, s->tilt_seen = 1;
    if (xml_is(path, NULL, "SampleTiltCorrectionOn"))
        s->corrected = !strcasecmp(text, "true") || !strcmp(text, "1");
    if (xml_is(path, NULL, "AcquisitionDatetime")) snprintf(s->date, sizeof s->date, "%.39s", text);
    if (xml_is(path, NULL, "DetectorName") && !s->detector[0])
        picture_set_text(s->detector, sizeof s->detector, text);
}

void tag_34683_read(const char *text, size_t n, size_t nx, picture *p) {
    static const xml_visitor visitor = { NULL, metadata_end };
    static const char name[] = "tag 34683";
    metadata_state s;
    facts *f = &p->facts;
    if (!text[strspn(text, " \t\r\n")]) return; /* a blank block is an absent block */
    if (!xml_walk(text, n, &visitor, &s, sizeof s)) return;
    double x = s.size_x > 0.0 ? s.size_x : s.field_x / s.columns,
           y = s.size_x > 0.0 ? s.size_y : s.field_y / s.rows;
    if (x > 0.0 && isfinite(x)) {
        double k = resized(p, name, s.columns, nx);
        scales_add_u(&p->scales, SCALE_TAG, name, x * 1e9 * k, y > 0.0 && isfinite(y) ? y * 1e9 * k : MISSING,
                     s.size_x > 0.0 ? s.size_u : s.field_u);
    }
    if (s.voltage > 0.0) f->voltage_V = s.voltage;
    if (s.distance > 0.0) f->working_distance_mm = s.distance * 1e3;
    if (s.detector[0]) memcpy(f->detector, s.detector, sizeof s.detector);
    if (s.tilt_seen) {
        f->tilt_known = 1;
        f->tilt_deg = s.tilt * 180.0 / PI;
        f->tilt_in_pixels = s.corrected;
        f->turned = fabs(s.turn) > 0.01;
    }
    if (s.date[0]) take_time(s.date, p);
}

/* ---- tag 34680 ---- */

/* Items nest as <item><key><string>NAME</string></key><value>...</value></item>: inside the item called
 * PixelSize those called Width and Height hold a unit element and a number. */
typedef struct {
    size_t inside; /* depth of the item called PixelSize; 0: outside */
    int axis;      /* 1 width, 2 height */
    double x, y, u_rel;
    int meters;
} items_state;

static void items_end(void *state, const xml_path *path, const char *text) {
    items_state *s = state;
    double v;
    size_t n = strlen(text);
    if (xml_is(path, "key", "string") || xml_is(path, NULL, "Name")) {
        size_t item = path->depth >= 2 ? path->depth - 2 : 0;
        if (!strcmp(text, "PixelSize") && !s->inside)
            s->inside = item;
        else if (s->inside)
            s->axis = !strcmp(text, "Width") ? 1 : !strcmp(text, "Height") ? 2 : s->axis;
    } else if (s->inside && n >= 5 && !strcmp(text + n - 5, "Meter"))
        s->meters = n == 5 || (n > 5 && !(text[n - 6] >= 'a' && text[n - 6] <= 'z')); /* not NanoMeter */
    else if (s->inside && xml_is(path, NULL, "anyType") && scaletext_number(text, &v) && v > 0.0) {
        if (s->axis == 1 && !(s->x > 0.0)) s->x = v, s->u_rel = scaletext_u_rel(text);
        if (s->axis == 2 && !(s->y > 0.0)) s->y = v;
    }
    if (s->inside && xml_is(path, NULL, "item") && path->depth <= s->inside) s->inside = 0;
}

/* RFC 4648; blanks and line ends are skipped, anything else ends it. */
static size_t from_base64(const char *text, size_t n, char *to) {
    static const char letters[] = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";
    unsigned bits = 0, have = 0;
    size_t k = 0;
    for (size_t i = 0; i < n; i++) {
        if (strchr(" \t\r\n", text[i]) && text[i]) continue;
        const char *at = text[i] ? strchr(letters, text[i]) : NULL;
        if (!at) break;
        bits = (bits << 6 | (unsigned)(at - letters)) & 0xffffffu;
        have += 6;
        if (have >= 8) {
            have -= 8;
            to[k++] = (char)(unsigned char)(bits >> have & 0xffu);
        }
    }
    to[k] = '\0';
    return k;
}

void tag_34680_read(const char *text, size_t n, size_t nx, picture *p) {
    static const xml_visitor visitor = { NULL, items_end };
    items_state s;
    (void)nx;
    size_t from = strspn(text, " \t\r\n");
    if (strncmp(text + from, "77u/", 4) != 0 && strncmp(text + from, "PD94", 4) != 0) return;
    char *xml = mem_array(n + 1, 1);
    if (!xml) return;
    size_t length = from_base64(text + from, n - from, xml);
    if (xml_walk(xml, length, &visitor, &s, sizeof s) && s.meters && s.x > 0.0)
        scales_add_u(&p->scales, SCALE_TAG, "tag 34680", s.x * 1e9, s.y > 0.0 ? s.y * 1e9 : MISSING, s.u_rel);
    free(xml);
}
