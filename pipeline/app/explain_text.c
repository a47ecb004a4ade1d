/* The account of explain.c as lines for a person: a heading, then aligned facts. */
#include <math.h>
#include <string.h>

#include "app/explain.h"
#include "app/runfile.h"
#include "base/flags.h"
#include "base/number.h"
#include "io/json.h"

enum { LABEL = 18, WIDTH = 100 };

/* Wrapped at blanks; control characters of names as '?'. */
static void add_wrapped(textbuf *out, const char *text, int indent) {
    int at = indent;
    for (const char *p = text; *p;) {
        size_t n = strcspn(p, " ");
        if (at > indent) {
            int fits = at + 1 + (int)n <= WIDTH;
            if (fits) text_add(out, " ");
            else text_addf(out, "\n%*s", indent, "");
            at = fits ? at + 1 : indent;
        }
        textbuf word = { 0 };
        text_add_n(&word, p, n);
        if (word.s) text_add_plain(out, word.s);
        if (word.failed) out->failed = 1;
        text_free(&word);
        at += (int)n;
        p += n;
        while (*p == ' ') p++;
    }
    text_add(out, "\n");
}

static void line(textbuf *out, const char *label, const char *text) {
    if (!text || !*text) return;
    text_addf(out, "  %-*s", LABEL, label);
    add_wrapped(out, text, LABEL + 2);
}

static void flag_meanings(textbuf *out, const char *label, const char *words) {
    for (const char *p = words; *p;) {
        size_t n = strcspn(p, " ");
        for (int bit = 0; bit < FLAG_COUNT; bit++) {
            if (strlen(flag_word(bit)) != n || strncmp(flag_word(bit), p, n)) continue;
            textbuf t = { 0 };
            text_addf(&t, "%s: %s", flag_word(bit), flag_meaning(bit));
            line(out, label, t.s);
            text_free(&t);
            label = "";
        }
        p += n;
        while (*p == ' ') p++;
    }
}

static void number_line(textbuf *out, const char *label, double value, int digits, const char *unit, const char *more) {
    char number[NUMBER_TEXT];
    textbuf t = { 0 };
    if (!isfinite(value)) return;
    text_addf(&t, "%s%s%s%s", number_text(value, digits, number), *unit ? " " : "", unit, more);
    line(out, label, t.s);
    text_free(&t);
}

static void value_text(const cJSON *q, textbuf *out) {
    const char *unit = json_member_text(q, "unit");
    double value = json_member_number(q, "value"), u = json_member_number(q, "u"), lo = json_member_number(q, "lo"), hi = json_member_number(q, "hi");
    char a[NUMBER_TEXT], b[NUMBER_TEXT];
    textbuf more = { 0 };
    if (!strcmp(unit, "1")) unit = "";
    if (isfinite(u)) text_addf(&more, " +- %s (standard uncertainty)", number_text(u, 3, a));
    if (isfinite(lo)) text_addf(&more, ", 95 %% interval %s to %s", number_text(lo, 5, a), number_text(hi, 5, b));
    if (isfinite(value)) number_line(out, "value", value, 6, unit, more.s ? more.s : "");
    else line(out, "value", "not measured; reasons and flags below say why");
    text_free(&more);
}

static void parts_text(const cJSON *q, textbuf *out) {
    const cJSON *parts = cJSON_GetObjectItemCaseSensitive(q, "uncertainty"), *p;
    const char *label = "uncertainty";
    cJSON_ArrayForEach(p, parts) {
        char u[NUMBER_TEXT], share[NUMBER_TEXT];
        double s = json_member_number(p, "share");
        if (!(s > 0.0)) continue;
        textbuf t = { 0 };
        text_addf(&t, "%s, %s %%: %s", number_text(json_member_number(p, "u"), 3, u), number_text(floor(100.0 * s + 0.5), 3, share),
                  json_member_text(p, "part"));
        line(out, label, t.s);
        text_free(&t);
        label = "";
    }
    if (cJSON_GetArraySize(parts) > 0) line(out, "", "(standard uncertainty of each part, and its share of the squared whole)");
}

static void target_text(const cJSON *q, textbuf *out) {
    static const char *const rules[][2] = { { "guard", "guard band of 1.645 standard uncertainties inside each limit (ISO 14253-1)" },
                                            { "simple", "the value alone, its uncertainty not counted (simple acceptance)" },
                                            { "probability", "probability of conforming at least as stated (JCGM 106)" } };
    const cJSON *t = cJSON_GetObjectItemCaseSensitive(q, "target");
    if (!t) return;
    if (!cJSON_IsObject(t)) {
        line(out, "target", "none in the protocol");
        return;
    }
    line(out, "target", json_member_text(t, "sentence"));
    for (size_t i = 0; i < sizeof rules / sizeof rules[0]; i++)
        if (!strcmp(rules[i][0], json_member_text(t, "rule"))) line(out, "decision rule", rules[i][1]);
    line(out, "verdict", json_member_text(t, "verdict"));
    line(out, "advice", json_member_text(t, "advice"));
}

static void micrograph_text(const cJSON *m, textbuf *out) {
    char number[NUMBER_TEXT], u[NUMBER_TEXT];
    textbuf t = { 0 };
    text_add(out, "  ");
    text_add_plain(out, json_member_text(m, "file"));
    text_addf(out, "\n");
    line(out, "  SHA-256", json_member_text(m, "sha256"));
    text_addf(&t, "%s", !strcmp(json_member_text(m, "status"), "ok") ? "used" : json_member_text(m, "status"));
    if (json_member_text(m, "reason")[0]) text_addf(&t, ": %s", json_member_text(m, "reason"));
    line(out, "  status", t.s);
    text_free(&t);
    flag_meanings(out, "  why", json_member_text(m, "reason"));
    flag_meanings(out, "  remarks", json_member_text(m, "flags"));
    line(out, "  noted", json_member_text(m, "detail"));
    if (isfinite(json_member_number(m, "px_nm"))) {
        text_addf(&t, "%s nm, from %s, relative standard uncertainty %s", number_text(json_member_number(m, "px_nm"), 6, number),
                  json_member_text(m, "px_source"), number_text(json_member_number(m, "px_u_rel"), 3, u));
        line(out, "  pixel size", t.s);
        text_free(&t);
    }
    if (isfinite(json_member_number(m, "features_found"))) {
        text_addf(&t, "%.0f found; %.0f cut by the frame enter no size; %.0f outside the guard frame do not count for the density",
                  json_member_number(m, "features_found"), json_member_number(m, "features_cut_by_the_frame"),
                  json_member_number(m, "features_outside_the_guard_frame"));
        line(out, "  features", t.s);
        text_free(&t);
    }
}

static void link_text(const cJSON *account, textbuf *out) {
    static const char *const origins[][2] = { { "sheet", "measured, from the sample sheet" },
                                              { "calibrated", "from the link calibrated on measured reflectance" },
                                              { "protocol", "assumed: the protocol states it" },
                                              { "aspect", "assumed: the protocol states height / spacing" },
                                              { "default", "assumed: height / spacing 1.0 +- 0.3, nobody stated any" } };
    const cJSON *l = cJSON_GetObjectItemCaseSensitive(account, "link"), *c = cJSON_GetObjectItemCaseSensitive(l, "calibration");
    char u[NUMBER_TEXT];
    textbuf more = { 0 };
    text_add(out, "\nHeight and optics (a top view shows no height)\n");
    if (isfinite(json_member_number(l, "height_nm_u"))) text_addf(&more, " +- %s", number_text(json_member_number(l, "height_nm_u"), 3, u));
    number_line(out, "height", json_member_number(l, "height_nm"), 5, "nm", more.s ? more.s : "");
    text_free(&more);
    for (size_t i = 0; i < sizeof origins / sizeof origins[0]; i++)
        if (!strcmp(origins[i][0], json_member_text(l, "height_source"))) line(out, "its source", origins[i][1]);
    if (cJSON_IsObject(c)) {
        text_addf(&more, "%s of %s, %.0f samples, SHA-256 %s", json_member_text(c, "file"), json_member_text(c, "made_at"), json_member_number(c, "samples"),
                  json_member_text(c, "sha256"));
        line(out, "calibration", more.s);
        text_free(&more);
    }
    line(out, "optical model", json_member_text(l, "optics_model"));
    line(out, "mixing rule", json_member_text(l, "mixing"));
    line(out, "", json_member_text(l, "note"));
}

static void made_text(const cJSON *account, textbuf *out) {
    const cJSON *m = cJSON_GetObjectItemCaseSensitive(account, "manifest"), *k = cJSON_GetObjectItemCaseSensitive(m, "scale_standard"), *x;
    textbuf t = { 0 };
    text_add(out, "\nMade by\n");
    text_addf(&t, "%s %s", json_member_text(m, "program"), json_member_text(m, "version"));
    line(out, "program", t.s);
    text_free(&t);
    line(out, "protocol", json_member_text(m, "protocol"));
    line(out, "its SHA-256", json_member_text(m, "protocol_sha256"));
    line(out, "run at", json_member_text(m, "run_at"));
    line(out, "micrographs in", json_member_text(m, "folder"));
    line(out, "excluded by hand", json_member_text(m, "excluded"));
    if (cJSON_IsObject(k)) {
        text_addf(&t, "%s of %s", json_member_text(k, "name"), json_member_text(k, "date"));
        line(out, "length standard", t.s);
        text_free(&t);
    } else if (k) {
        line(out, "length standard", "none: the pixel sizes are the instrument's own word");
    }
    cJSON_ArrayForEach(x, cJSON_GetObjectItemCaseSensitive(m, "materials")) line(out, json_member_text(x, "role"), json_member_text(x, "source"));
    line(out, "noted", json_member_text(m, "warnings"));
    line(out, "", json_member_text(account, "note"));
}

void explain_text(const cJSON *account, textbuf *out) {
    const cJSON *x;
    char used[NUMBER_TEXT], all[NUMBER_TEXT];
    text_add(out, "Sample ");
    text_add_plain(out, json_member_text(account, "sample"));
    text_addf(out, ": %s of %s micrographs used\n", number_text(json_member_number(account, "n_used"), 6, used),
              number_text(json_member_number(account, "n_images"), 6, all));
    line(out, "lot", json_member_text(account, "lot"));
    line(out, "wafer", json_member_text(account, "wafer"));
    line(out, "position", json_member_text(account, "position"));
    line(out, "etched at", json_member_text(account, "etched_at"));
    line(out, "verdict", json_member_text(account, "verdict"));
    line(out, "its reasons", json_member_text(account, "verdict_reasons"));
    flag_meanings(out, "remarks", json_member_text(account, "flags"));
    cJSON_ArrayForEach(x, cJSON_GetObjectItemCaseSensitive(account, "quantities")) {
        text_addf(out, "\n%s\n", json_member_text(x, "quantity"));
        value_text(x, out);
        line(out, "what it is", json_member_text(x, "definition"));
        line(out, "published in", json_member_text(x, "source"));
        parts_text(x, out);
        target_text(x, out);
    }
    if (cJSON_GetArraySize(cJSON_GetObjectItemCaseSensitive(account, "micrographs")) > 0) text_add(out, "\nMicrographs\n");
    cJSON_ArrayForEach(x, cJSON_GetObjectItemCaseSensitive(account, "micrographs")) micrograph_text(x, out);
    link_text(account, out);
    made_text(account, out);
}
