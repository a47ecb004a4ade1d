/* Spectra as spectrometers write them: a preamble of any length, then a header, then numbers, in the dialect of the
 * country the instrument stands in. Everything that was recognised rather than said stands in the note.
 * What this file does not do: guess between two readings that both make sense; it refuses and says so. */
#include "app/spectrum_file.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/command.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/text.h"

static const double UM_BELOW = 10.0, PERCENT_ABOVE = 1.5, SHARE_MOST = 1.05, LEAST = -0.02;
static const double NM_LO = 100.0, NM_HI = 20000.0, APART = 0.05;
enum { MAX_COLUMNS = 64, CELL = 64 };

typedef struct {
    const char *s;
    size_t n, line;
} text_line;

typedef struct {
    double nm, R;
    size_t line;
} row;

typedef struct {
    const char *what;
    text_line *lines;      /* of the file, blank ones and comments left out */
    size_t n_lines, first; /* first line of numbers */
    char separator;        /* ';' '\t' ',' or ' ' */
    size_t at_wavelength, at_R;
    int percent, um, decimal_comma, by_name;
    row *rows;
    size_t n, missing; /* missing: lines without a reflectance */
} reader;

/* ---- lines and cells ---- */

static int is_blank(char c) { return c == ' ' || c == '\t'; }

static text_line trimmed(text_line l) {
    while (l.n && is_blank(*l.s)) l.s++, l.n--;
    while (l.n && is_blank(l.s[l.n - 1])) l.n--;
    return l;
}

static status split_lines(reader *r, const char *bytes, size_t n, error *e) {
    size_t room = 1, line = 1;
    if (memchr(bytes, '\0', n))
        return fail(e, ST_BAD_INPUT,
                    "%s: holds zero bytes; save it as plain text (UTF-8), not as UTF-16 or a binary "
                    "format",
                    r->what);
    for (size_t i = 0; i < n; i++) room += bytes[i] == '\n' || bytes[i] == '\r';
    r->lines = mem_array(room, sizeof *r->lines);
    if (!r->lines) return NO_MEMORY(e, "a spectrum");
    if (n >= 3 && memcmp(bytes, "\xef\xbb\xbf", 3) == 0) bytes += 3, n -= 3;
    for (size_t i = 0; i < n; line++) {
        size_t k = i;
        while (k < n && bytes[k] != '\n' && bytes[k] != '\r') k++;
        text_line l = trimmed((text_line){ bytes + i, k - i, line });
        if (l.n && *l.s != '#') r->lines[r->n_lines++] = l;
        i = k + 1;
        if (k + 1 < n && bytes[k] == '\r' && bytes[k + 1] == '\n') i++;
    }
    return ST_OK;
}

/* The k-th cell, quotes and blanks around it taken off; 0 when there is none. */
static int cell_at(const text_line *l, char separator, size_t k, text_line *out) {
    size_t i = 0;
    for (size_t cell = 0;; cell++) {
        size_t end = i;
        while (end < l->n && (separator == ' ' ? !is_blank(l->s[end]) : l->s[end] != separator)) end++;
        if (cell == k) {
            *out = trimmed((text_line){ l->s + i, end - i, l->line });
            if (out->n > 1 && *out->s == '"' && out->s[out->n - 1] == '"') {
                out->s++;
                out->n -= 2;
                *out = trimmed(*out);
            }
            return 1;
        }
        if (end >= l->n) return 0;
        i = end + 1;
        while (separator == ' ' && i < l->n && is_blank(l->s[i])) i++;
    }
}

static size_t count_cells(const text_line *l, char separator) {
    text_line ignored;
    size_t n = 0;
    while (n < MAX_COLUMNS && cell_at(l, separator, n, &ignored)) n++;
    while (n && cell_at(l, separator, n - 1, &ignored) && !ignored.n) n--; /* separators left at the end */
    return n;
}

/* One number; a decimal comma is understood where the comma does not separate. *percent: it ends in %. */
static int cell_number(const text_line *c, char separator, double *out, int *percent, int *comma) {
    char text[CELL];
    size_t n = c->n;
    *percent = n && c->s[n - 1] == '%';
    if (*percent) n--;
    if (!n || n >= sizeof text) return 0;
    for (size_t i = 0; i < n; i++) {
        int is_comma = c->s[i] == ',' && separator != ',';
        text[i] = c->s[i];
        if (is_comma) text[i] = '.', *comma = 1;
    }
    text[n] = '\0';
    return number_parse(text, out);
}

static void lower_case(const text_line *c, char out[CELL]) {
    size_t n = c->n < CELL - 1 ? c->n : CELL - 1;
    for (size_t i = 0; i < n; i++) out[i] = (char)tolower((unsigned char)c->s[i]);
    out[n] = '\0';
}

/* What instruments write where they have no value. */
static int is_no_value(const text_line *c) {
    static const char *const words[] = { "", "-", "--", "---", "nan", "-nan", "na", "n/a", "#n/a", "null", "inf", "-inf" };
    char name[CELL];
    lower_case(c, name);
    for (size_t i = 0; i < sizeof words / sizeof words[0]; i++)
        if (!strcmp(name, words[i])) return 1;
    return 0;
}

/* ---- dialect ---- */

static int begins_with_number(const text_line *l) {
    size_t i = *l->s == '"';
    i += i < l->n && (l->s[i] == '-' || l->s[i] == '+');
    if (!(i < l->n && (isdigit((unsigned char)l->s[i]) || l->s[i] == '.'))) return 0;
    while (i < l->n && (isdigit((unsigned char)l->s[i]) || strchr(".,eE+-%\"", l->s[i]))) i++;
    if (i >= l->n) return 1;
    text_line rest = { l->s + i, 0, l->line };
    while (i + rest.n < l->n && l->s[i + rest.n] != ',') rest.n++;
    return is_blank(l->s[i]) || l->s[i] == ';' || (l->s[i - 1] == ',' && is_no_value(&rest));
}

/* Numbers from here on: a line that begins with one, as do the line behind it (or the end). Dates and serial numbers of a
 * preamble stand alone. */
static size_t find_numbers(const reader *r) {
    for (size_t i = 0; i < r->n_lines; i++)
        if (begins_with_number(&r->lines[i]) && (i + 1 >= r->n_lines || begins_with_number(&r->lines[i + 1])))
            return i;
    return r->n_lines;
}

static status find_separator(reader *r, error *e) {
    size_t semicolons = 0, tabs = 0, commas = 0, points = 0, blanks = 0, most = 0;
    for (size_t i = r->first; i < r->n_lines; i++) {
        const text_line *l = &r->lines[i];
        int gap = 0, bare = 0; /* a blank between numbers without a comma before it */
        for (size_t k = 0; k < l->n; k++) {
            semicolons += l->s[k] == ';';
            tabs += l->s[k] == '\t';
            commas += l->s[k] == ',';
            points += l->s[k] == '.';
            if (l->s[k] == ' ' && k && l->s[k - 1] != ' ') gap = 1, bare = l->s[k - 1] != ',';
        }
        blanks += (size_t)(gap && bare);
    }
    r->separator = semicolons ? ';' : tabs ? '\t' : blanks == r->n_lines - r->first ? ' ' : ',';
    for (size_t i = r->first; i < r->n_lines; i++) {
        size_t n = count_cells(&r->lines[i], r->separator);
        if (n > most) most = n;
    }
    if (r->separator == ',' && commas && !points && most > 2)
        return fail(e, ST_BAD_INPUT,
                    "%s line %zu: '%.*s' can be read with commas between numbers or within them; save it "
                    "with semicolons or tabs between columns, or with decimal points",
                    r->what, r->lines[r->first].line,
                    r->lines[r->first].n < 60 ? (int)r->lines[r->first].n : 60, r->lines[r->first].s);
    return ST_OK;
}

/* ---- header ---- */

static int speaks_of(const char *name, const char *const *words, size_t n) {
    for (size_t i = 0; i < n; i++)
        if (strstr(name, words[i])) return 1;
    return 0;
}
#define SPEAKS(name, words) speaks_of(name, words, sizeof(words) / sizeof((words)[0]))

static int is_wavelength(const char *name) {
    static const char *const words[] = { "wavelength", "lambda", "wellenl", "longueur", "longitud", "nm" };
    return SPEAKS(name, words);
}
static int is_reflectance(const char *name) {
    static const char *const words[] = { "flect", "flex", "%r", "r%" };
    return SPEAKS(name, words) || (name[0] == 'r' && (!name[1] || strchr("( [_/", name[1])));
}
static int is_micrometre(const char *name) {
    static const char *const words[] = { "(um",       "[um",       "_um",   " um",   "/um",
                                         "\xc2\xb5m", "\xce\xbcm", "micro", "micron" };
    return SPEAKS(name, words) || strcmp(name, "um") == 0;
}
static int is_other_axis(const char *name) {
    static const char *const words[] = { "cm-1", "cm^-1", "1/cm", "wavenumber", "wave number",
                                         "(ev",  "[ev",   "_ev",  "energy",     "thz" };
    return SPEAKS(name, words);
}
static int is_other_quantity(const char *name) {
    static const char *const words[] = { "transm", "absor", "%t", "counts", "intensity", "raw" };
    return SPEAKS(name, words);
}

/* Which two columns, from the last line before the numbers; without names the first two of two. */
static status find_columns(reader *r, error *e) {
    text_line c;
    char name[CELL];
    long wavelength = -1, refl = -1;
    size_t n = count_cells(&r->lines[r->first], r->separator);
    const text_line *header = r->first > 0 ? &r->lines[r->first - 1] : NULL;
    r->at_R = 1;
    for (size_t k = 0; header && k < MAX_COLUMNS && cell_at(header, r->separator, k, &c); k++) {
        lower_case(&c, name);
        if (is_reflectance(name) && !is_other_quantity(name)) {
            if (refl >= 0)
                return fail(e, ST_BAD_INPUT,
                            "%s line %zu: two columns speak of reflectance; keep one of them", r->what,
                            header->line);
            refl = (long)k;
        } else if (is_wavelength(name) && wavelength < 0) {
            wavelength = (long)k;
        }
    }
    if (n < 2)
        return fail(e, ST_BAD_INPUT, "%s line %zu: one number alone, expected a wavelength and a reflectance",
                    r->what, r->lines[r->first].line);
    r->by_name = refl >= 0;
    if (wavelength >= 0) r->at_wavelength = (size_t)wavelength;
    if (refl >= 0) r->at_R = (size_t)refl;
    if (refl < 0 && n > 2)
        return fail(e, ST_BAD_INPUT,
                    "%s: %zu columns and none is named reflectance; name it in the header, as "
                    "wavelength_nm and reflectance",
                    r->what, n);
    if (refl < 0 && wavelength > 0) r->at_R = 0;
    if (r->at_R == r->at_wavelength)
        return fail(e, ST_BAD_INPUT,
                    "%s: one column serves for wavelength and reflectance; name both in the header", r->what);
    if (header && cell_at(header, r->separator, r->at_wavelength, &c)) {
        lower_case(&c, name);
        r->um = is_micrometre(name);
        if (is_other_axis(name))
            return fail(e, ST_BAD_INPUT, "%s line %zu: the axis is '%.30s', expected wavelengths in nm",
                        r->what, header->line, name);
    }
    if (header && cell_at(header, r->separator, r->at_R, &c)) {
        lower_case(&c, name);
        r->percent = strchr(name, '%') != NULL || strstr(name, "percent") != NULL;
        if (is_other_quantity(name) && !r->by_name)
            return fail(e, ST_BAD_INPUT, "%s line %zu: the column is '%.30s', expected a reflectance",
                        r->what, header->line, name);
    }
    return ST_OK;
}

/* ---- rows ---- */

static status read_rows(reader *r, error *e) {
    r->rows = mem_array(r->n_lines - r->first, sizeof *r->rows);
    if (!r->rows) return NO_MEMORY(e, "a spectrum");
    for (size_t i = r->first; i < r->n_lines; i++) {
        const text_line *l = &r->lines[i];
        row *to = &r->rows[r->n++];
        to->line = l->line;
        const struct {
            size_t column;
            double *to;
            const char *noun;
        } wanted[] = {
            { r->at_wavelength, &to->nm, "wavelength" },
            { r->at_R, &to->R, "reflectance" },
        };
        for (size_t k = 0; k < 2; k++) {
            text_line c = { "", 0, l->line };
            int percent = 0, found = cell_at(l, r->separator, wanted[k].column, &c);
            if (found && k && is_no_value(&c)) {
                r->missing++;
                r->n--;
                break;
            }
            if (!found || !cell_number(&c, r->separator, wanted[k].to, &percent, &r->decimal_comma))
                return fail(e, ST_BAD_INPUT, "%s line %zu: found '%.*s', expected a %s", r->what, l->line,
                            c.n < 40 ? (int)c.n : 40, c.s, wanted[k].noun);
            if (percent) r->percent = 1;
        }
    }
    return ST_OK;
}

static status to_units(reader *r, error *e) {
    char a[NUMBER_TEXT];
    double longest = 0.0, most = -(double)INFINITY;
    for (size_t i = 0; i < r->n; i++) {
        longest = fmax(longest, r->rows[i].nm);
        most = fmax(most, r->rows[i].R);
    }
    if (longest < UM_BELOW) r->um = 1;
    if (most > PERCENT_ABOVE) r->percent = 1;
    if (!r->percent && most > SHARE_MOST)
        return fail(e, ST_BAD_INPUT,
                    "%s: the largest reflectance is %s: too much for a share, little for percent; write "
                    "%% into the header if it is percent",
                    r->what, number_text(most, 4, a));
    for (size_t i = 0; i < r->n; i++) {
        row *p = &r->rows[i];
        double nm = p->nm * (r->um ? 1000.0 : 1.0), R = p->R / (r->percent ? 100.0 : 1.0);
        if (!(nm >= NM_LO && nm <= NM_HI))
            return fail(e, ST_BAD_INPUT,
                        "%s line %zu: found the wavelength %s, expected 100 to 20000 nm, or all of them "
                        "in um",
                        r->what, p->line, number_text(p->nm, 8, a));
        if (!(R >= LEAST && R <= SHARE_MOST))
            return fail(e, ST_BAD_INPUT, "%s line %zu: found the reflectance %s, expected 0 to %s", r->what,
                        p->line, number_text(p->R, 8, a), r->percent ? "100 percent" : "1");
        p->nm = nm;
        p->R = R;
    }
    return ST_OK;
}

static int by_wavelength(const void *a, const void *b) {
    const row *x = a, *y = b;
    if (x->nm < y->nm || x->nm > y->nm) return x->nm < y->nm ? -1 : 1;
    return (x->line > y->line) - (x->line < y->line);
}

/* Ascending, equal wavelengths averaged, into *out; how many were averaged into *merged. */
static status to_spectrum(reader *r, spectrum *out, size_t *merged, error *e) {
    char a[NUMBER_TEXT];
    qsort(r->rows, r->n, sizeof *r->rows, by_wavelength);
    out->wavelength_nm = mem_array(r->n, sizeof *out->wavelength_nm);
    out->R = mem_array(r->n, sizeof *out->R);
    if (!out->wavelength_nm || !out->R) return NO_MEMORY(e, "a spectrum");
    for (size_t i = 0; i < r->n;) {
        size_t k = i;
        double sum = 0.0;
        for (; k < r->n && r->rows[k].nm <= r->rows[i].nm; k++) {
            if (fabs(r->rows[k].R - r->rows[i].R) > APART)
                return fail(e, ST_BAD_INPUT,
                            "%s lines %zu and %zu give different reflectances for %s nm: two spectra in "
                            "one file?",
                            r->what, r->rows[i].line, r->rows[k].line, number_text(r->rows[i].nm, 8, a));
            sum += r->rows[k].R;
        }
        out->wavelength_nm[out->n] = r->rows[i].nm;
        out->R[out->n++] = sum / (double)(k - i);
        *merged += k - i - 1;
        i = k;
    }
    if (out->n < 2) return fail(e, ST_BAD_INPUT, "%s: a single wavelength is no spectrum", r->what);
    return ST_OK;
}

static void describe(const reader *r, int descending, size_t merged, spectrum *out) {
    textbuf t = { 0 };
    const struct {
        int on;
        const char *word;
    } said[] = {
        { r->percent, "percent" },
        { r->um, "um" },
        { r->decimal_comma, "decimal comma" },
        { descending, "descending" },
    };
    for (size_t i = 0; i < sizeof said / sizeof said[0]; i++)
        if (said[i].on) text_addf(&t, "%s%s", t.n ? ", " : "", said[i].word);
    if (r->missing)
        text_addf(&t, "%s%zu without a value left out", t.n ? ", " : "", r->missing);
    if (merged)
        text_addf(&t, "%s%zu %s averaged", t.n ? ", " : "", merged, merged == 1 ? "duplicate" : "duplicates");
    if (!r->percent && out->n) {
        double mean = 0.0;
        for (size_t i = 0; i < out->n; i++) mean += out->R[i] / (double)out->n;
        if (mean > 0.6) text_addf(&t, "%sread as shares: is it percent?", t.n ? ", " : "");
    }
    snprintf(out->note, sizeof out->note, "%s", t.s && !t.failed ? t.s : "");
    text_free(&t);
}

status spectrum_parse(const char *bytes, size_t n, const char *what, spectrum *out, error *e) {
    reader r = { .what = what };
    spectrum made = { 0 };
    size_t merged = 0;
    int descending = 0;
    *out = (spectrum){ 0 };
    status st = split_lines(&r, bytes, n, e);
    if (st == ST_OK) {
        r.first = find_numbers(&r);
        if (r.first == r.n_lines)
            st = fail(e, ST_BAD_INPUT,
                      "%s: no line begins with a number; expected wavelength and reflectance", what);
    }
    if (st == ST_OK) st = find_separator(&r, e);
    if (st == ST_OK) st = find_columns(&r, e);
    if (st == ST_OK) st = read_rows(&r, e);
    if (st == ST_OK) st = to_units(&r, e);
    if (st == ST_OK) {
        descending = r.n > 1 && r.rows[0].nm > r.rows[r.n - 1].nm;
        st = to_spectrum(&r, &made, &merged, e);
    }
    if (st == ST_OK) {
        describe(&r, descending, merged, &made);
        *out = made;
        made = (spectrum){ 0 };
    }
    spectrum_free(&made);
    free(r.lines);
    free(r.rows);
    return st;
}

status spectrum_read(const char *path, spectrum *out, error *e) {
    char *bytes = NULL;
    size_t n = 0;
    *out = (spectrum){ 0 };
    status st = input_read(path, &bytes, &n, e);
    if (st != ST_OK) return st;
    st = spectrum_parse(bytes, n, path, out, e);
    free(bytes);
    return st;
}

void spectrum_free(spectrum *s) {
    free(s->wavelength_nm);
    free(s->R);
    *s = (spectrum){ 0 };
}
