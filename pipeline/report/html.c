/* Escaping follows the HTML standard's list for text and quoted attributes. UTF-8 is checked against RFC 3629 (shortest
 * form, no surrogates), so that a hostile file name cannot break the page. */
#include "report/html.h"

#include <stdlib.h>
#include <string.h>

#include "base/number.h"

/* Length of the valid UTF-8 sequence at s, 0 if there is none. */
static size_t utf8_length(const unsigned char *s) {
    if (s[0] < 0x80) return 1;
    size_t n = s[0] >= 0xf0 ? 4 : s[0] >= 0xe0 ? 3 : 2;
    if (s[0] < 0xc2 || s[0] > 0xf4) return 0;
    for (size_t i = 1; i < n; i++)
        if ((s[i] & 0xc0) != 0x80) return 0;
    if (s[0] == 0xe0 && s[1] < 0xa0) return 0;
    if (s[0] == 0xed && s[1] > 0x9f) return 0;
    if (s[0] == 0xf0 && s[1] < 0x90) return 0;
    if (s[0] == 0xf4 && s[1] > 0x8f) return 0;
    return n;
}

static const char *entity(unsigned char c) {
    switch (c) {
    case '&':
        return "&amp;";
    case '<':
        return "&lt;";
    case '>':
        return "&gt;";
    case '"':
        return "&quot;";
    case '\'':
        return "&#39;";
    default:
        return (c < 0x20 && c != '\n' && c != '\t') || c == 0x7f ? "\xef\xbf\xbd" : NULL;
    }
}

void html_text(textbuf *out, const char *s) {
    if (!s) return;
    for (const unsigned char *p = (const unsigned char *)s; *p;) {
        const char *replaced = entity(*p);
        size_t n = replaced ? 1 : utf8_length(p);
        if (replaced)
            text_add(out, replaced);
        else if (n)
            text_add_n(out, (const char *)p, n);
        else
            text_add(out, "\xef\xbf\xbd");
        p += n ? n : 1;
    }
}

void text_safe(textbuf *out, const char *s) {
    for (const unsigned char *p = (const unsigned char *)(s ? s : ""); *p;) {
        size_t n = utf8_length(p);
        if (*p == '\n' || *p == '\t') text_add(out, " ");
        else if (!n || *p < 0x20 || *p == 0x7f) text_add(out, "\xef\xbf\xbd");
        else text_add_n(out, (const char *)p, n);
        p += n ? n : 1;
    }
}

void html_href(textbuf *out, const char *path) {
    static const char plain[] = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789-._~/";
    if (!path) return;
    text_add(out, "./");
    for (const unsigned char *p = (const unsigned char *)path; *p; p++) {
        if (strchr(plain, *p))
            text_add_n(out, (const char *)p, 1);
        else
            text_addf(out, "%%%02X", (unsigned)*p);
    }
}

size_t html_fit(const char *s, size_t letters) {
    size_t i = 0;
    for (size_t seen = 0; s[i] && seen < letters; seen++) {
        size_t n = utf8_length((const unsigned char *)s + i);
        i += n ? n : 1;
    }
    return i;
}

const column *column_find(const column *columns, size_t n, const char *name) {
    for (size_t i = 0; i < n; i++)
        if (!strcmp(columns[i].name, name)) return &columns[i];
    return NULL;
}

#define EN_DASH "\xe2\x80\x93"

void html_cell(textbuf *out, const column *c, const void *row) {
    char buffer[NUMBER_TEXT];
    const char *cell = column_cell(c, row, buffer);
    if (cell && *cell)
        html_text(out, cell);
    else
        text_add(out, EN_DASH);
}

/* The number a cell shows, so that what is derived from it agrees with what is printed. */
static int shown_number(const column *c, const void *row, double *v) {
    char buffer[NUMBER_TEXT];
    return c && number_parse(column_cell(c, row, buffer), v);
}

/* The cell of the tables in the attribute, what is left of it by rounding as the text. */
static void add_data(textbuf *out, const column *c, const void *row, int percent, const char *shown) {
    char cell[NUMBER_TEXT];
    text_addf(out, "<data%s value=\"%s\">%s</data>", percent ? " class=\"percent\"" : "", column_cell(c, row, cell), shown);
}

void html_number(textbuf *out, const column *c, const void *row, int percent, int digits) {
    char text[NUMBER_TEXT];
    double v;
    if (!shown_number(c, row, &v)) {
        text_add(out, EN_DASH);
        return;
    }
    if (c->kind == COL_COUNT) digits = 15;
    else if (digits > c->digits) digits = c->digits;
    if (digits == 2) { /* what an interval leaves: "0.30", not "0.3" */
        double shown = percent ? 100.0 * v : v;
        number_places(shown, number_places_of(shown, digits), text);
    } else {
        (void)(percent ? number_percent(v, digits, text) : number_text(v, digits, text));
    }
    add_data(out, c, row, percent, text);
}

void html_value(textbuf *out, const column *c, const column *twin, const void *row, int percent) {
    enum { OF_UNCERTAINTY = 2, WITHOUT = 4 };
    char text[NUMBER_TEXT];
    double v, u, scale = percent ? 100.0 : 1.0;
    if (!shown_number(c, row, &v) || !shown_number(twin, row, &u) || !(u > 0.0)) {
        html_number(out, c, row, percent, WITHOUT);
        return;
    }
    double U = 2.0 * u * scale;
    int places = number_places_of(U, OF_UNCERTAINTY);
    add_data(out, c, row, percent, number_places(v * scale, places, text));
    text_addf(out, " <span class=\"u\">\xc2\xb1 %s</span>", number_places(U, places, text));
}

void html_badge(textbuf *out, const char *word) {
    static const struct {
        const char *word, *class_name, *sign, *shown;
    } badge[] = {
        { "conforms", "good", "\xe2\x9c\x93", "conforms" },
        { "fails", "bad", "\xe2\x9c\x95", "fails" },
        { "undecided", "open", "?", "undecided" },
        { "no_target", "none", "\xe2\x97\x8b", "no target" },
        { "not_measured", "none", "\xe2\x80\x93", "not measured" },
        { "ok", "good", "\xe2\x9c\x93", "used" },
        { "excluded", "open", "!", "excluded" },
        { "unreadable", "bad", "\xe2\x9c\x95", "unreadable" },
    };
    for (size_t i = 0; i < sizeof badge / sizeof badge[0]; i++)
        if (word && !strcmp(badge[i].word, word)) {
            text_addf(out, "<span class=\"badge %s\"><span aria-hidden=\"true\">%s</span> %s</span>",
                      badge[i].class_name, badge[i].sign, badge[i].shown);
            return;
        }
    text_add(out, "<span class=\"badge none\">");
    html_text(out, word && *word ? word : EN_DASH);
    text_add(out, "</span>");
}

void text_base64(textbuf *out, const uint8_t *bytes, size_t n) {
    static const char letter[] = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";
    for (size_t i = 0; i < n; i += 3) {
        size_t left = n - i;
        uint32_t v = (uint32_t)bytes[i] << 16 | (left > 1 ? (uint32_t)bytes[i + 1] << 8 : 0) |
                     (left > 2 ? (uint32_t)bytes[i + 2] : 0);
        char group[4] = { letter[v >> 18 & 63], letter[v >> 12 & 63], left > 1 ? letter[v >> 6 & 63] : '=',
                          left > 2 ? letter[v & 63] : '=' };
        text_add_n(out, group, 4);
    }
}
