/* Instrument blocks in private TIFF tags, told by tag number: 34118 (pairs of lines: item, then `Label =
 * value unit`) and 34682 (INI sections, SI units). The layouts are no published standard; what is read here
 * was seen in files.
 *
 * 34118: the key that looks right, and the numbers before the first pair, refer to a display 1024 pixels
 * wide, not to the stored picture; only `AP_IMAGE_PIXEL_SIZE` and the field width do. `AP_TILT_ANGLE` is the
 * angle set for the correction, not the stage's. 34682: metres per pixel and radians; the strip is appended
 * below the rows that `ResolutionY` counts. Magnification is never used for a scale. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "base/number.h"
#include "base/quantity.h"
#include "io/metadata/instrument_priv.h"
#include "io/metadata/keytext_priv.h"
#include "io/metadata/scaletext_priv.h"

enum { LINE = KEYTEXT_LINE };

void instrument_time(const char *date, const char *clock, int day_first, picture *p) {
    static const char *const months[] = { "Jan", "Feb", "Mar", "Apr", "May", "Jun",
                                          "Jul", "Aug", "Sep", "Oct", "Nov", "Dec" };
    char name[4] = "", half = ' ';
    int y, m = 0, d, h = 0, mi = 0, s = 0;
    if (sscanf(date, "%2d %3s %4d", &d, name, &y) == 3 && y > 31) {
        for (int k = 0; k < 12; k++)
            if (!strcasecmp(name, months[k])) m = k + 1;
    } else if (sscanf(date, "%4d%*1[-/.]%2d%*1[-/.]%2d", &y, &m, &d) != 3 || y <= 31) {
        int *first = day_first ? &d : &m, *second = day_first ? &m : &d;
        if (sscanf(date, "%2d%*1[./]%2d%*1[./]%4d", first, second, &y) != 3) return;
    }
    if (clock && sscanf(clock, "%2d:%2d:%2d %c", &h, &mi, &s, &half) == 4 && strchr("PpAa", half))
        h = half == 'P' || half == 'p' ? h % 12 + 12 : h % 12;
    picture_set_time(p, y, m, d, h, mi, s);
}

/* ---- pairs of lines ---- */

/* The text behind the first '=' or ':' of the line that follows line `item`; 0: there is none. */
static int item_value(const char *text, const char *item, char value[LINE]) {
    char line[LINE];
    for (const char *p = text; (p = keytext_line(p, line)) != NULL;) {
        if (strcmp(line, item) != 0) continue;
        if (!keytext_line(p, line)) return 0;
        const char *sep = line + strcspn(line, "=:");
        if (!*sep) return 0;
        sep++;
        snprintf(value, LINE, "%s", sep + strspn(sep, " \t"));
        return value[0] != '\0';
    }
    return 0;
}

static double item_length(const char *text, const char *item) {
    char value[LINE];
    double nm;
    return item_value(text, item, value) && scaletext_length(value, &nm) && nm > 0.0 ? nm : MISSING;
}

/* The number in front of any unit; `*rest` (may be NULL) is the text behind it. */
static double item_number(const char *text, const char *item, char rest[LINE]) {
    char value[LINE];
    const char *unit;
    double v;
    if (!item_value(text, item, value) || !scaletext_split(value, &v, &unit)) return MISSING;
    if (rest) snprintf(rest, LINE, "%s", unit);
    return v;
}

static int item_is_on(const char *text, const char *item) {
    char value[LINE];
    return item_value(text, item, value) && (!strcasecmp(value, "On") || !strcasecmp(value, "Yes"));
}

/* Line k of the nameless block of numbers that precedes the pairs. */
static double leading_number(const char *text, int k) {
    char line[LINE];
    double v = MISSING;
    for (int i = 0; i <= k; i++) {
        text = keytext_line(text, line);
        if (!text || !scaletext_number(line, &v)) return MISSING;
    }
    return v;
}

static void item_facts(const char *text, picture *p) {
    char value[LINE], clock[LINE], unit[LINE] = "";
    facts *f = &p->facts;
    double v = item_number(text, "AP_MAG", unit);
    if (v > 0.0) f->magnification = v * (unit[0] == 'K' || unit[0] == 'k' ? 1e3 : 1.0);
    v = item_number(text, "AP_ACTUALKV", unit);
    if (!(v > 0.0)) v = item_number(text, "AP_MANUALKV", unit);
    if (v > 0.0) f->voltage_V = v * (unit[0] == 'k' ? 1e3 : 1.0);
    v = item_length(text, "AP_WD");
    if (!(v > 0.0)) v = item_length(text, "AP_FREE_WD");
    if (v > 0.0) f->working_distance_mm = v / 1e6;
    v = item_number(text, "AP_STAGE_AT_T", NULL);
    if (isfinite(v)) {
        f->tilt_known = 1;
        f->tilt_deg = v;
    }
    f->tilt_in_pixels = item_is_on(text, "DP_TILT_CORRECTION");
    f->turned = item_is_on(text, "DP_SCAN_ROT") && fabs(item_number(text, "AP_SCANROTATION", NULL)) > 0.5;
    if (item_value(text, "DP_DETECTOR_CHANNEL", value) || item_value(text, "DP_DETECTOR_TYPE", value))
        picture_set_text(f->detector, sizeof f->detector, value);
    if (item_value(text, "AP_DATE", value))
        instrument_time(value, item_value(text, "AP_TIME", clock) ? clock : NULL, 1, p);
}

/* What the digits of the item imply: half a step of the last one, uniform. */
static double item_u_rel(const char *text, const char *item) {
    char value[LINE];
    return item_value(text, item, value) ? scaletext_u_rel(value) : MISSING;
}

void tag_34118_read(const char *text, size_t nx, picture *p) {
    static const char name[] = "tag 34118";
    static const char *const digits[] = { "AP_IMAGE_PIXEL_SIZE", "AP_WIDTH", "", "AP_PIXEL_SIZE" };
    char value[LINE], a[NUMBER_TEXT], b[NUMBER_TEXT];
    double width = (double)nx, display = 1024.0 / width, store = width;
    if (item_value(text, "DP_IMAGE_STORE", value) && sscanf(value, "%lf", &store) == 1 && !(store >= 1.0))
        store = width;
    const double from[] = { item_length(text, "AP_IMAGE_PIXEL_SIZE") * store / width,
                            item_length(text, "AP_WIDTH") / width, leading_number(text, 3) * 1e9 * display,
                            item_length(text, "AP_PIXEL_SIZE") * display };
    int best = -1;
    for (int k = 0; k < 4; k++) {
        if (!(from[k] > 0.0)) continue;
        if (best < 0)
            best = k;
        else if (k < 3 && fabs(from[k] / from[best] - 1.0) > 0.002 && fabs(store - width) < 0.5)
            note_add(p->note,
                     "%s: its own keys disagree, %s and %s nm per pixel; was the picture resized or cropped?",
                     name, number_text(from[best], 5, a), number_text(from[k], 5, b));
    }
    if (best >= 0)
        scales_add_u(&p->scales, SCALE_TAG, name, from[best], from[best], item_u_rel(text, digits[best]));
    if (fabs(store - width) > 0.5)
        note_add(p->note, "%s: stored %s pixels wide, now %s; the pixel size was scaled.", name,
                 number_text(store, 6, a), number_text(width, 6, b));
    item_facts(text, p);
}

/* ---- sections ---- */

static double above_0(const char *text, const char *section, const char *key) {
    double v = keytext_ini_number(text, section, key);
    return v > 0.0 ? v : MISSING;
}

static void section_facts(const char *text, const char *beam, picture *p) {
    char value[LINE], clock[LINE];
    facts *f = &p->facts;
    double v = above_0(text, "Beam", "HV");
    if (!(v > 0.0)) v = above_0(text, beam, "HV");
    if (v > 0.0) f->voltage_V = v;
    v = above_0(text, "Stage", "WorkingDistance");
    if (!(v > 0.0)) v = above_0(text, beam, "WD");
    if (v > 0.0) f->working_distance_mm = v * 1e3;
    v = keytext_ini_number(text, "Stage", "StageT");
    if (!isfinite(v)) v = keytext_ini_number(text, beam, "StageTa");
    if (isfinite(v)) {
        f->tilt_known = 1;
        f->tilt_deg = v * 180.0 / PI;
    }
    f->tilt_in_pixels = keytext_ini(text, beam, "TiltCorrectionIsOn", value) && !strcasecmp(value, "yes");
    v = keytext_ini_number(text, "Beam", "ScanRotation");
    /* Seen along another beam the stage's tilt is not the view's. */
    f->turned = fabs(v) > 0.01 || (beam[0] && strcasecmp(beam, "EBeam") != 0);
    if (keytext_ini(text, "Detectors", "Name", value)) {
        char mode[LINE], both[2 * LINE + 2];
        snprintf(both, sizeof both, "%s%s%s", value, keytext_ini(text, "Detectors", "Mode", mode) ? " " : "",
                 keytext_ini(text, "Detectors", "Mode", mode) ? mode : "");
        picture_set_text(f->detector, sizeof f->detector, both);
    }
    if (keytext_ini(text, "Private*", "TimeOfCreation", value)) {
        const char *blank = strchr(value, ' ');
        instrument_time(value, blank ? blank + 1 : NULL, 1, p);
    } else if (keytext_ini(text, "User", "Date", value))
        instrument_time(value, keytext_ini(text, "User", "Time", clock) ? clock : NULL, 0, p);
}

void tag_34682_read(const char *text, size_t nx, size_t ny, picture *p) {
    static const char name[] = "tag 34682";
    char scan[LINE] = "", beam[LINE] = "", a[NUMBER_TEXT], b[NUMBER_TEXT];
    double columns = above_0(text, "Image", "ResolutionX"), rows = above_0(text, "Image", "ResolutionY");
    (void)keytext_ini(text, "Beam", "Scan", scan);
    (void)keytext_ini(text, "Beam", "Beam", beam);
    double x = above_0(text, "Scan", "PixelWidth"), y = above_0(text, "Scan", "PixelHeight");
    double field = above_0(text, "Scan", "HorFieldsize"), u_rel = keytext_ini_u_rel(text, "Scan", "PixelWidth");
    if (!(x > 0.0)) x = above_0(text, scan, "PixelWidth"), y = above_0(text, scan, "PixelHeight");
    if (!(field > 0.0)) field = above_0(text, scan, "HorFieldsize");
    if (x * columns > 0.0 && fabs(x * columns / field - 1.0) > 0.001)
        note_add(p->note,
                 "%s: its own keys disagree, %s and %s nm per pixel; was the picture resized or cropped?",
                 name, number_text(x * 1e9, 5, a), number_text(field / columns * 1e9, 5, b));
    if (!(x > 0.0)) x = above_0(text, beam, "HFW") / columns, y = above_0(text, beam, "VFW") / rows;
    if (!(x > 0.0)) x = field / columns, y = above_0(text, "Scan", "VerFieldsize") / rows;
    double resized = columns > 0.0 ? columns / (double)nx : 1.0;
    scales_add_u(&p->scales, SCALE_TAG, name, x * 1e9 * resized, y * 1e9 * resized, u_rel);
    if (fabs(resized - 1.0) > 1e-6)
        note_add(p->note, "%s: recorded %s pixels wide, now %s; the pixel size was scaled.", name,
                 number_text(columns, 6, a), number_text((double)nx, 6, b));
    else if (rows < (double)ny && (double)ny - rows < (double)ny / 3.0)
        p->strip_stated = ny - (size_t)rows;
    section_facts(text, beam, p);
}
