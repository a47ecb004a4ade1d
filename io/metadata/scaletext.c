/* A pixel size written for people: the generic forms that sidecars, descriptions and text chunks share.
 * Numbers are read in the C locale by hand-checked grammar; a decimal comma is accepted when no point is
 * there; a value without a unit is refused, because 5.58 of what? No form of magnification is ever turned
 * into a scale. */
#include "io/metadata/scaletext_priv.h"

#include <cjson/cJSON.h>
#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/number.h"
#include "io/json.h"

enum { MAX_LINES = 100000, LINE_ROOM = 512, KEY_ROOM = 40 };

int scaletext_number(const char *s, double *out) {
    char text[64];
    size_t n = 0;
    int points = 0, commas = 0;
    for (; *s; s++) {
        if (n + 1 == sizeof text) return 0;
        points += *s == '.';
        commas += *s == ',';
        text[n++] = *s == ',' ? '.' : *s;
    }
    text[n] = '\0';
    if (points + commas > 1) return 0; /* 1,234.5 is ambiguous */
    return number_parse(text, out);
}

/* nm per unit. The micro sign as the encodings in use write it: Latin-1, UTF-8 (both code points), UTF-8
 * taken for Latin-1 and saved again, code page 437, Shift-JIS, GBK, and escapes. Case matters: Mm is not mm.
 */
static const struct {
    const char *text;
    double nm;
} units[] = {
    { "nm", 1.0 },        { "um", 1e3 },
    { "\xb5m", 1e3 },     { "\xc2\xb5m", 1e3 },
    { "\xce\xbcm", 1e3 }, { "\xc3\x82\xc2\xb5m", 1e3 },
    { "\xe6m", 1e3 },     { "\x83\xcam", 1e3 },
    { "\xa6\xccm", 1e3 }, { "\\u00B5m", 1e3 },
    { "\\u00b5m", 1e3 },  { "&#181;m", 1e3 },
    { "&#xb5;m", 1e3 },   { "&#xB5;m", 1e3 },
    { "&micro;m", 1e3 },  { "mcm", 1e3 },
    { "pm", 1e-3 },       { "fm", 1e-6 },
    { "mm", 1e6 },        { "cm", 1e7 },
    { "m", 1e9 },         { "in", 2.54e7 },
    { "A", 0.1 },         { "\xc5", 0.1 },
    { "\xc3\x85", 0.1 },  { "\xe2\x84\xab", 0.1 },
};
static const struct {
    const char *word;
    double nm;
} unit_words[] = {
    { "nanometer", 1.0 },  { "nanometers", 1.0 },  { "nanometre", 1.0 },  { "nanometres", 1.0 },
    { "micron", 1e3 },     { "microns", 1e3 },     { "micrometer", 1e3 }, { "micrometers", 1e3 },
    { "micrometre", 1e3 }, { "micrometres", 1e3 }, { "millimeter", 1e6 }, { "millimetre", 1e6 },
    { "meter", 1e9 },      { "metre", 1e9 },       { "inch", 2.54e7 },    { "angstrom", 0.1 },
    { "picometer", 1e-3 }, { "picometre", 1e-3 },
};

static int equal_letters(const char *a, const char *b) {
    for (; *a && *b; a++, b++)
        if (tolower((unsigned char)*a) != tolower((unsigned char)*b)) return 0;
    return *a == *b;
}

/* Copies s without blanks at its ends; 0: too long. */
static int copy_trimmed(const char *s, size_t n, char *to, size_t room) {
    while (n && isspace((unsigned char)*s)) s++, n--;
    while (n && isspace((unsigned char)s[n - 1])) n--;
    if (n + 1 > room) return 0;
    memcpy(to, s, n);
    to[n] = '\0';
    return 1;
}

double scaletext_unit(const char *s) {
    char text[32];
    if (!copy_trimmed(s, strlen(s), text, sizeof text)) return 0.0;
    for (size_t i = 0; i < sizeof units / sizeof units[0]; i++)
        if (!strcmp(text, units[i].text)) return units[i].nm;
    for (size_t i = 0; i < sizeof unit_words / sizeof unit_words[0]; i++)
        if (equal_letters(text, unit_words[i].word)) return unit_words[i].nm;
    return 0.0;
}

int scaletext_split(const char *s, double *value, const char **rest) {
    while (isspace((unsigned char)*s)) s++;
    size_t n = strspn(s, "+-0123456789.,");
    if (n && (s[n] == 'e' || s[n] == 'E') && strspn(s + n + 1, "+-0123456789"))
        n += 1 + strspn(s + n + 1, "+-0123456789");
    char text[64];
    if (!copy_trimmed(s, n, text, sizeof text) || !scaletext_number(text, value)) return 0;
    s += n;
    while (isspace((unsigned char)*s)) s++;
    *rest = s;
    return 1;
}

double scaletext_u_rel(const char *s) {
    double value;
    const char *rest;
    if (!scaletext_split(s, &value, &rest) || !(fabs(value) > 0.0)) return (double)NAN;
    const char *number = s + strcspn(s, "0123456789.,");
    size_t n = strspn(number, "0123456789.,");
    if (!memchr(number, '.', n) && !memchr(number, ',', n)) return (double)NAN;
    int behind = 0, seen = 0;
    for (size_t i = 0; i < n; i++)
        if (number[i] == '.' || number[i] == ',')
            seen = 1;
        else
            behind += seen;
    double mantissa = 0.0;
    char text[64];
    if (copy_trimmed(number, n, text, sizeof text)) (void)scaletext_number(text, &mantissa);
    return mantissa > 0.0 ? 0.5 * pow(10.0, -behind) / sqrt(3.0) / mantissa : (double)NAN;
}

int scaletext_length(const char *s, double *nm) {
    double value;
    const char *rest;
    if (!scaletext_split(s, &value, &rest)) return 0;
    double unit = scaletext_unit(rest);
    *nm = value * unit;
    return unit > 0.0;
}

typedef enum { KEY_NONE, KEY_BOTH, KEY_X, KEY_Y, KEY_SCALE } key_kind;

/* Keys without case, blanks, '_' and '-'. `unit`: nm per unit when the key itself names it, else 0. */
static key_kind know_key(const char *s, size_t n, double *unit) {
    static const struct {
        const char *key;
        key_kind kind;
        double unit;
    } keys[] = {
        { "pixelsize", KEY_BOTH, 0.0 },     { "imagepixelsize", KEY_BOTH, 0.0 },
        { "pixelwidth", KEY_X, 0.0 },       { "pixelheight", KEY_Y, 0.0 },
        { "nmperpixel", KEY_BOTH, 1.0 },    { "nmperpx", KEY_BOTH, 1.0 },
        { "nm/px", KEY_BOTH, 1.0 },         { "nm/pixel", KEY_BOTH, 1.0 },
        { "pxnm", KEY_BOTH, 1.0 },          { "pixelsizenm", KEY_BOTH, 1.0 },
        { "pixelwidthnm", KEY_X, 1.0 },     { "pixelheightnm", KEY_Y, 1.0 },
        { "pixelsize(nm)", KEY_BOTH, 1.0 }, { "pixelsize[nm]", KEY_BOTH, 1.0 },
        { "umperpixel", KEY_BOTH, 1e3 },    { "um/px", KEY_BOTH, 1e3 },
        { "um/pixel", KEY_BOTH, 1e3 },      { "pxum", KEY_BOTH, 1e3 },
        { "pixelsizeum", KEY_BOTH, 1e3 },   { "pixelsize(um)", KEY_BOTH, 1e3 },
        { "pixelsize[um]", KEY_BOTH, 1e3 }, { "scale", KEY_SCALE, 0.0 },
        { "pixelsizex", KEY_X, 0.0 },       { "pixelsizey", KEY_Y, 0.0 },
    };
    char key[KEY_ROOM];
    size_t k = 0;
    for (size_t i = 0; i < n; i++) {
        if (isspace((unsigned char)s[i]) || s[i] == '_' || s[i] == '-') continue;
        if (k + 1 == sizeof key) return KEY_NONE;
        key[k++] = (char)tolower((unsigned char)s[i]);
    }
    key[k] = '\0';
    for (size_t i = 0; i < sizeof keys / sizeof keys[0]; i++)
        if (!strcmp(key, keys[i].key)) {
            *unit = keys[i].unit;
            return keys[i].kind;
        }
    return KEY_NONE;
}

/* "nm/px" -> 1, "nm/pixel" -> 1; "px/um" -> *inverse, 1e3; 0: no such ratio. */
static double ratio_unit(const char *s, int *inverse) {
    char text[64];
    if (!copy_trimmed(s, strlen(s), text, sizeof text)) return 0.0;
    char *slash = strchr(text, '/');
    if (!slash) return 0.0;
    *slash = '\0';
    char first[64], second[64];
    (void)copy_trimmed(text, strlen(text), first, sizeof first);
    (void)copy_trimmed(slash + 1, strlen(slash + 1), second, sizeof second);
    *inverse = equal_letters(first, "px") || equal_letters(first, "pixel") || equal_letters(first, "pixels");
    const char *pixel = *inverse ? first : second, *length = *inverse ? second : first;
    if (!equal_letters(pixel, "px") && !equal_letters(pixel, "pixel") && !equal_letters(pixel, "pixels"))
        return 0.0;
    return scaletext_unit(length);
}

/* nm per pixel of a value, or 0 with `*unitless` when it is a number without a unit. */
static double value_nm(const char *text, double key_unit, key_kind kind, int *unitless) {
    double value;
    const char *rest;
    int inverse = 0;
    if (!scaletext_split(text, &value, &rest) || !(value > 0.0)) return 0.0;
    double ratio = ratio_unit(rest, &inverse);
    if (ratio > 0.0) return inverse ? ratio / value : ratio * value;
    double unit = kind == KEY_SCALE ? 0.0 : scaletext_unit(rest);
    if (unit > 0.0) return value * unit;
    if (*rest) return 0.0; /* some other unit, such as px */
    if (kind != KEY_SCALE && key_unit > 0.0) return value * key_unit;
    *unitless = 1;
    return 0.0;
}

typedef struct {
    double both, x, y;
    double u_rel; /* by the digits of the first; NAN: they do not say */
} found_sizes;

static void read_line(const char *line, const char *where, found_sizes *f, scales *s) {
    size_t n = strcspn(line, "=:");
    double unit = 0.0;
    int unitless = 0;
    if (!line[n]) return;
    key_kind kind = know_key(line, n, &unit);
    if (kind == KEY_NONE) return;
    double nm = value_nm(line + n + 1, unit, kind, &unitless);
    if (unitless)
        note_add(s->note, "%s: '%.60s' has no unit and was not used; write it as 'px_nm = VALUE'.", where,
                 line);
    double *slot = kind == KEY_X ? &f->x : kind == KEY_Y ? &f->y : &f->both;
    if (!(nm > 0.0) || *slot > 0.0) return; /* the first of a key wins */
    *slot = nm;
    if (kind != KEY_Y || !(f->x > 0.0)) f->u_rel = scaletext_u_rel(line + n + 1);
}

static int add_found(const found_sizes *f, scale_rank rank, const char *name, scales *s) {
    size_t before = s->n;
    if (f->both > 0.0)
        scales_add_u(s, rank, name, f->both, f->both, f->u_rel);
    else if (f->x > 0.0)
        scales_add_u(s, rank, name, f->x, f->y > 0.0 ? f->y : f->x, f->u_rel);
    else
        scales_add_u(s, rank, name, f->y, f->y, f->u_rel);
    return s->n > before;
}

int scaletext_lines(const char *text, scale_rank rank, const char *name, const char *where, scales *s) {
    found_sizes f = { .u_rel = (double)NAN };
    for (int line = 0; *text && line < MAX_LINES; line++) {
        size_t n = strcspn(text, "\r\n");
        char copy[LINE_ROOM];
        if (copy_trimmed(text, n, copy, sizeof copy) && copy[0] != '#' && copy[0] != ';')
            read_line(copy, where, &f, s);
        text += n;
        while (*text == '\r' || *text == '\n') text++;
    }
    return add_found(&f, rank, name, s);
}

static double number_of(const cJSON *object, const char *key) {
    const cJSON *node = cJSON_GetObjectItemCaseSensitive(object, key);
    if (cJSON_IsNumber(node)) return node->valuedouble;
    double v;
    if (cJSON_IsString(node) && scaletext_number(node->valuestring, &v)) return v;
    return (double)NAN;
}

/* The keys that are known, in one object. */
static int size_in_object(const cJSON *o, found_sizes *f) {
    double nm = number_of(o, "px_nm"), um = number_of(o, "PixelSizeUm"), hfw = number_of(o, "hfw");
    const cJSON *size = cJSON_GetObjectItemCaseSensitive(o, "pixel_size");
    const cJSON *resolution = cJSON_GetObjectItemCaseSensitive(o, "resolution");
    if (nm > 0.0)
        f->both = nm;
    else if (cJSON_IsObject(size) && number_of(size, "x") > 0.0) {
        f->x = number_of(size, "x") * 1e9;
        f->y = number_of(size, "y") * 1e9;
    } else if (um > 0.0)
        f->both = um * 1e3;
    else if (hfw > 0.0 && cJSON_IsArray(resolution)) {
        const cJSON *width = cJSON_GetArrayItem(resolution, 0);
        if (cJSON_IsNumber(width) && width->valuedouble >= 1.0) f->both = hfw * 1e9 / width->valuedouble;
    }
    return f->both > 0.0 || f->x > 0.0;
}

int scaletext_json(const char *text, size_t n, scale_rank rank, const char *name, const char *where,
                   scales *s) {
    json j = { 0 };
    error e = { 0 };
    if (json_parse(text, n, where, &j, &e) != ST_OK) {
        if (rank == SCALE_SIDECAR) note_add(s->note, "%.200s.", e.text);
        return 0;
    }
    found_sizes f = { .u_rel = (double)NAN };
    int found = size_in_object(j.root, &f);
    for (const cJSON *child = j.root->child; child && !found; child = child->next)
        if (cJSON_IsObject(child)) found = size_in_object(child, &f);
    json_free(&j);
    return found && add_found(&f, rank, name, s);
}

void scaletext_keyword(const char *keyword, const char *text, scales *s) {
    double unit = 0.0;
    key_kind kind = know_key(keyword, strlen(keyword), &unit);
    const char *first = text + strspn(text, " \t\r\n");
    if (kind == KEY_BOTH || kind == KEY_X) {
        int unitless = 0;
        double nm = value_nm(text, unit, kind, &unitless);
        if (nm > 0.0) scales_add_u(s, SCALE_DESCRIPTION, "description", nm, nm, scaletext_u_rel(text));
    } else if (*first == '{')
        (void)scaletext_json(first, strlen(first), SCALE_DESCRIPTION, "description", "description", s);
    else if (!strcmp(keyword, "Description") || !strcmp(keyword, "Comment"))
        (void)scaletext_lines(text, SCALE_DESCRIPTION, "description", "description", s);
}
