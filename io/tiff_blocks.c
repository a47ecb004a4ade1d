/* Instrument blocks in private TIFF tags, told by tag number: 34118 (pairs of lines: item, then `Label =
 * value unit`) and 34682 (INI sections, SI units). The layouts are no published standard; what is read here
 * was seen in files.
 *
 * 34118: the key that looks right, and the numbers before the first pair, refer to a display 1024 pixels
 * wide, not to the stored picture; only `AP_IMAGE_PIXEL_SIZE` and the field width do. 34682: metres per
 * pixel; the strip is appended below the rows that `ResolutionY` counts. Magnification is never used. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "base/number.h"
#include "io/scaletext_priv.h"
#include "io/tiff_tags_priv.h"

enum { LINE = 256 };

/* Copies the line at `p`, trimmed, and returns the start of the next one; NULL at the end of the text. */
static const char *take_line(const char *p, char line[LINE]) {
    if (!*p) return NULL;
    size_t n = strcspn(p, "\r\n"), from = 0, to = n;
    while (from < to && (p[from] == ' ' || p[from] == '\t')) from++;
    while (to > from && (p[to - 1] == ' ' || p[to - 1] == '\t')) to--;
    size_t length = to - from < LINE - 1 ? to - from : LINE - 1;
    memcpy(line, p + from, length);
    line[length] = '\0';
    p += n;
    if (*p == '\r') p++;
    if (*p == '\n') p++;
    return p;
}

/* The text behind the first '=' or ':' of the line that follows line `item`; 0: there is none. */
static int item_value(const char *text, const char *item, char value[LINE]) {
    char line[LINE];
    for (const char *p = text; (p = take_line(p, line)) != NULL;) {
        if (strcmp(line, item) != 0) continue;
        if (!take_line(p, line)) return 0;
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
    return item_value(text, item, value) && scaletext_length(value, &nm) && nm > 0.0 ? nm : (double)NAN;
}

/* Line k of the nameless block of numbers that precedes the pairs. */
static double leading_number(const char *text, int k) {
    char line[LINE];
    double v = (double)NAN;
    for (int i = 0; i <= k; i++) {
        text = take_line(text, line);
        if (!text || !scaletext_number(line, &v)) return (double)NAN;
    }
    return v;
}

static void item_time(const char *text, picture *p) {
    static const char *const months[] = { "Jan", "Feb", "Mar", "Apr", "May", "Jun",
                                          "Jul", "Aug", "Sep", "Oct", "Nov", "Dec" };
    char date[LINE], clock[LINE], name[4] = "";
    int y, d, h = 0, mi = 0, s = 0;
    if (!item_value(text, "AP_DATE", date) || sscanf(date, "%2d %3s %4d", &d, name, &y) != 3) return;
    if (item_value(text, "AP_TIME", clock)) (void)sscanf(clock, "%2d:%2d:%2d", &h, &mi, &s);
    for (int m = 0; m < 12; m++)
        if (!strcasecmp(name, months[m])) picture_set_time(p, y, m + 1, d, h, mi, s);
}

void tag_34118_read(const char *text, size_t nx, picture *p) {
    static const char name[] = "tag 34118";
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
    if (best >= 0) scales_add(&p->scales, SCALE_TAG, name, from[best], from[best]);
    if (fabs(store - width) > 0.5)
        note_add(p->note, "%s: stored %s pixels wide, now %s; the pixel size was scaled.", name,
                 number_text(store, 6, a), number_text(width, 6, b));
    item_time(text, p);
}

/* The value of `key` in the first section called `section` (a trailing '*' matches any ending). 0: absent or
 * empty. */
static int ini_value(const char *text, const char *section, const char *key, char value[LINE]) {
    char line[LINE];
    int inside = 0;
    size_t n = strlen(section), any = n && section[n - 1] == '*';
    for (const char *p = text; (p = take_line(p, line)) != NULL;) {
        size_t length = strlen(line);
        if (line[0] == '[' && length >= 2 && line[length - 1] == ']') {
            line[length - 1] = '\0';
            inside = any ? !strncasecmp(line + 1, section, n - 1) : !strcasecmp(line + 1, section);
            continue;
        }
        char *sep = strchr(line, '=');
        if (!inside || !sep) continue;
        size_t k = (size_t)(sep - line);
        while (k && line[k - 1] == ' ') k--;
        if (k != strlen(key) || strncasecmp(line, key, k) != 0) continue;
        snprintf(value, LINE, "%s", sep + 1 + strspn(sep + 1, " \t"));
        return value[0] != '\0';
    }
    return 0;
}

static double ini_number(const char *text, const char *section, const char *key) {
    char value[LINE];
    double v;
    return ini_value(text, section, key, value) && scaletext_number(value, &v) && v > 0.0 ? v : (double)NAN;
}

static void ini_time(const char *text, picture *p) {
    char date[LINE], clock[LINE], half = ' ';
    int y, mo, d, h = 0, mi = 0, s = 0;
    if (ini_value(text, "Private*", "TimeOfCreation", date) &&
        sscanf(date, "%2d.%2d.%4d %2d:%2d:%2d", &d, &mo, &y, &h, &mi, &s) == 6) {
        picture_set_time(p, y, mo, d, h, mi, s);
        return;
    }
    if (!ini_value(text, "User", "Date", date) || sscanf(date, "%2d/%2d/%4d", &mo, &d, &y) != 3) return;
    if (ini_value(text, "User", "Time", clock) && sscanf(clock, "%2d:%2d:%2d %c", &h, &mi, &s, &half) == 4)
        h = half == 'P' || half == 'p' ? h % 12 + 12 : h % 12;
    picture_set_time(p, y, mo, d, h, mi, s);
}

void tag_34682_read(const char *text, size_t nx, size_t ny, picture *p) {
    static const char name[] = "tag 34682";
    char scan[LINE] = "", beam[LINE] = "", a[NUMBER_TEXT], b[NUMBER_TEXT];
    double columns = ini_number(text, "Image", "ResolutionX"),
           rows = ini_number(text, "Image", "ResolutionY");
    (void)ini_value(text, "Beam", "Scan", scan);
    (void)ini_value(text, "Beam", "Beam", beam);
    double x = ini_number(text, "Scan", "PixelWidth"), y = ini_number(text, "Scan", "PixelHeight");
    if (!(x > 0.0)) x = ini_number(text, scan, "PixelWidth"), y = ini_number(text, scan, "PixelHeight");
    if (!(x > 0.0)) x = ini_number(text, beam, "HFW") / columns, y = ini_number(text, beam, "VFW") / rows;
    double resized = columns > 0.0 ? columns / (double)nx : 1.0;
    scales_add(&p->scales, SCALE_TAG, name, x * 1e9 * resized, y * 1e9 * resized);
    if (fabs(resized - 1.0) > 1e-6)
        note_add(p->note, "%s: recorded %s pixels wide, now %s; the pixel size was scaled.", name,
                 number_text(columns, 6, a), number_text((double)nx, 6, b));
    else if (rows < (double)ny && (double)ny - rows < (double)ny / 3.0)
        p->strip_stated = ny - (size_t)rows;
    ini_time(text, p);
}
