/* Instrument texts that stand beside a picture or in a chunked tag: [MAIN] and [SEM] sections (metres,
 * degrees, strip rows), [SemImageFile] (nanometres), lines of $CM_ and $$SM_ keys (micrometres, a scale bar).
 * None is a published standard; the forms are as seen in files or as open readers know them. A magnification
 * is a fact and a coarse check, never a scale: the field width at magnification 1 differs between makers. */
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

/* Field widths at magnification 1 that occur, mm, with room on both sides. */
static const double least_field_mm = 90.0, most_field_mm = 135.0, absurd = 100.0;

static double above_0(const char *text, const char *section, const char *key) {
    double v = keytext_ini_number(text, section, key);
    return v > 0.0 ? v : MISSING;
}

static void note_resized(picture *p, const char *name, double recorded, size_t nx) {
    char a[NUMBER_TEXT];
    if (fabs(recorded / (double)nx - 1.0) > 1e-6)
        note_add(p->note, "%s: recorded %s pixels wide, now %zu; the pixel size was scaled.", name,
                 number_text(recorded, 6, a), nx);
}

static void state_strip(picture *p, double rows, size_t ny) {
    if (rows > 0.0 && rows < (double)ny / 3.0) p->strip_stated = (size_t)rows;
}

static void state_tilt(picture *p, double degrees) {
    if (!isfinite(degrees)) return;
    p->facts.tilt_known = 1;
    p->facts.tilt_deg = degrees;
}

void main_block_read(const char *text, scale_rank rank, const char *name, size_t nx, size_t ny, picture *p) {
    char value[LINE], clock[LINE];
    facts *f = &p->facts;
    (void)nx;
    double x = above_0(text, "MAIN", "PixelSizeX"), y = above_0(text, "MAIN", "PixelSizeY");
    scales_add_u(&p->scales, rank, name, x * 1e9, y * 1e9, keytext_ini_u_rel(text, "MAIN", "PixelSizeX"));
    state_strip(p, above_0(text, "MAIN", "ImageStripSize"), ny);
    if (above_0(text, "MAIN", "ViewFieldsCountX") > 1.0 || above_0(text, "MAIN", "ViewFieldsCountY") > 1.0)
        note_add(p->note, "%s: the picture is stitched of several fields.", name);
    double v = above_0(text, "SEM", "HV");
    if (!(v > 0.0)) v = above_0(text, "SEM", "AcceleratorVoltage");
    if (v > 0.0) f->voltage_V = v;
    v = above_0(text, "SEM", "WD");
    if (v > 0.0) f->working_distance_mm = v * 1e3;
    v = above_0(text, "MAIN", "Magnification");
    if (v > 0.0) f->magnification = v;
    state_tilt(p, keytext_ini_number(text, "SEM", "StageTilt"));
    f->tilt_in_pixels = fabs(keytext_ini_number(text, "SEM", "TiltCorrection")) > 0.0;
    f->turned = fabs(keytext_ini_number(text, "SEM", "ScanRotation")) > 0.5;
    if (keytext_ini(text, "SEM", "Detector", value)) picture_set_text(f->detector, sizeof f->detector, value);
    if (keytext_ini(text, "MAIN", "Date", value))
        instrument_time(value, keytext_ini(text, "MAIN", "Time", clock) ? clock : NULL, 1, p);
}

const char *instrument_bare_name(const char *path) {
    const char *end = path + strlen(path);
    while (end > path && end[-1] != '/' && end[-1] != '\\') end--;
    return end;
}

/* A pixel size against the magnification beside it: 0 when it cannot be true. */
static int fits_magnification(double px_nm, double columns, double magnification, picture *p) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    double field_mm = px_nm * columns * magnification / 1e6;
    if (!isfinite(field_mm) || (field_mm >= least_field_mm && field_mm <= most_field_mm)) return 1;
    int used = field_mm >= least_field_mm / absurd && field_mm <= most_field_mm * absurd;
    note_add(p->note, "The sidecar's pixel size %s nm does not fit its magnification %s%s.",
             number_text(px_nm, 5, a), number_text(magnification, 5, b),
             used ? "" : " at all and was not used");
    return used;
}

void sem_image_file_read(const char *text, const char *image, size_t nx, size_t ny, picture *p) {
    char value[LINE], clock[LINE];
    const char *rest;
    double columns = MISSING, rows = MISSING, v;
    facts *f = &p->facts;
    if (keytext_ini(text, NULL, "ImageName", value) &&
        strcasecmp(instrument_bare_name(value), instrument_bare_name(image)) != 0)
        note_add(p->note, "The sidecar names another picture, %.60s; it was used all the same.",
                 instrument_bare_name(value));
    if (keytext_ini(text, NULL, "DataSize", value)) {
        double w, h;
        if (sscanf(value, "%lfx%lf", &w, &h) == 2 && w >= 1.0 && h >= 1.0) columns = w, rows = h;
    }
    v = keytext_ini_number(text, NULL, "Magnification");
    if (v > 0.0) f->magnification = v;
    double px = above_0(text, NULL, "PixelSize");
    if (px > 0.0 && fits_magnification(px, isfinite(columns) ? columns : (double)nx, v, p)) {
        double resized = isfinite(columns) ? columns / (double)nx : 1.0;
        scales_add_u(&p->scales, SCALE_SIDECAR, "sidecar", px * resized, px * resized,
                     keytext_ini_u_rel(text, NULL, "PixelSize"));
        note_resized(p, "sidecar", resized * (double)nx, nx);
    }
    if (fabs(columns - (double)nx) < 0.5 && rows < (double)ny) state_strip(p, (double)ny - rows, ny);
    if (keytext_ini(text, NULL, "AcceleratingVoltage", value) && scaletext_split(value, &v, &rest) && v > 0.0)
        f->voltage_V = v * (rest[0] == 'k' ? 1e3 : 1.0);
    if (keytext_ini(text, NULL, "WorkingDistance", value) && scaletext_split(value, &v, &rest) && v > 0.0) {
        double unit = scaletext_unit(rest);
        f->working_distance_mm = v * (unit > 0.0 ? unit : 1e3) / 1e6; /* micrometres without a word */
    }
    v = keytext_ini_number(text, NULL, "StagePositionT");
    if (isfinite(v)) state_tilt(p, v / 1000.0);
    if (keytext_ini(text, NULL, "SignalName", value))
        picture_set_text(f->detector, sizeof f->detector, value);
    if (keytext_ini(text, NULL, "Date", value))
        instrument_time(value, keytext_ini(text, NULL, "Time", clock) ? clock : NULL, 0, p);
}

static double dollar_number(const char *text, const char *key) {
    char value[LINE];
    const char *rest;
    double v;
    return keytext_dollar(text, key, value) && scaletext_split(value, &v, &rest) ? v : MISSING;
}

/* Width of the field in nm: "1.067mm 0.800mm", or "1.067 0.800mm" where the last unit serves both. */
static double field_of_view_nm(const char *text) {
    char value[LINE];
    const char *rest;
    double v, nm;
    if (!keytext_dollar(text, "CM_FIELD_OF_VIEW", value) || !scaletext_split(value, &v, &rest))
        return MISSING;
    size_t n = strcspn(rest, " \t");
    char unit[32];
    snprintf(unit, sizeof unit, "%.*s", (int)(n < 31 ? n : 31), rest);
    if (n && scaletext_unit(unit) > 0.0) return v * scaletext_unit(unit);
    double second;
    if (!scaletext_split(rest, &second, &rest) || !((nm = scaletext_unit(rest)) > 0.0)) return MISSING;
    return v * nm;
}

static void dollar_facts(const char *text, picture *p) {
    char value[LINE], clock[LINE];
    facts *f = &p->facts;
    double v = dollar_number(text, "CM_MAG"), tilt;
    if (v > 0.0) f->magnification = v;
    v = dollar_number(text, "CM_ACCEL_VOLT");
    if (v > 0.0) f->voltage_V = v * 1e3;
    v = dollar_number(text, "SM_WD");
    if (v > 0.0) f->working_distance_mm = v;
    if (keytext_dollar(text, "CM_STAGE_POS", value) && sscanf(value, "%*f %*f %*f %*f %lf", &tilt) == 1)
        state_tilt(p, tilt);
    f->turned = fabs(dollar_number(text, "SM_SCAN_ROTATION")) > 0.5;
    if (keytext_dollar(text, "CM_DETECTOR", value) || keytext_dollar(text, "CM_SIGNAL", value))
        picture_set_text(f->detector, sizeof f->detector, value);
    if (keytext_dollar(text, "CM_DATE", value))
        instrument_time(value, keytext_dollar(text, "CM_TIME", clock) ? clock : NULL, 1, p);
}

void dollar_block_read(const char *text, size_t nx, picture *p) {
    char value[LINE];
    double columns = dollar_number(text, "CM_FULL_SIZE"), px = dollar_number(text, "CM_PIXEL_SIZE") * 1e3,
           marker;
    double bar = dollar_number(text, "SM_MICRON_BAR"), u_rel = MISSING;
    if (!(columns >= 1.0)) columns = (double)nx;
    if (!(px > 0.0)) px = field_of_view_nm(text) / columns;
    if (!(px > 0.0) && bar >= 1.0 && keytext_dollar(text, "SM_MICRON_MARKER", value) &&
        scaletext_length(value, &marker)) {
        px = marker / bar;
        u_rel = 0.5 / sqrt(3.0) / bar; /* whole pixels: half a pixel each way, uniform */
    }
    double resized = columns / (double)nx;
    if (px > 0.0) {
        scales_add_u(&p->scales, SCALE_SIDECAR, "sidecar", px * resized, px * resized, u_rel);
        note_resized(p, "sidecar", columns, nx);
    }
    dollar_facts(text, p);
}
