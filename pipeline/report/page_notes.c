/* The end of the page: what the numbers mean and where they stop being true (the column table's own words), what the
 * prediction leaves out, where everything came from, and the warning that belongs to any advice about an etch. */
#include <cjson/cJSON.h>
#include <string.h>

#include "base/flags.h"
#include "base/number.h"
#include "report/html.h"
#include "report/page.h"

static int has_word(const char *text, const char *word) {
    size_t n = strlen(word);
    for (const char *p = text; p && (p = strstr(p, word)); p += n)
        if ((p == text || p[-1] == ' ') && (!p[n] || p[n] == ' ')) return 1;
    return 0;
}

static int flag_occurs(const results *r, const char *word) {
    for (size_t i = 0; i < r->n_images; i++)
        if (has_word(r->images[i].flags, word) || has_word(r->images[i].reason, word)) return 1;
    for (size_t i = 0; i < r->n_samples; i++)
        if (has_word(r->samples[i].flags, word)) return 1;
    return 0;
}

static void add_flag_list(const results *r, textbuf *out) {
    int n = 0;
    for (int bit = 0; bit < FLAG_COUNT; bit++) {
        if (!flag_occurs(r, flag_word(bit))) continue;
        if (!n++)
            text_add(out, "<h3>Remarks and reasons on this page</h3>\n<div class=\"scroll\" "
                          "tabindex=\"0\" role=\"region\" aria-label=\"Remarks and reasons\"><table><thead><tr>"
                          "<th scope=\"col\">Word</th><th scope=\"col\">Meaning</th></tr></thead><tbody>\n");
        text_add(out, "<tr><th scope=\"row\">");
        page_flag_name(out, bit);
        text_addf(out, "<br><code>%s</code></th><td>", flag_word(bit));
        html_text(out, flag_meaning(bit));
        text_add(out, "</td></tr>\n");
    }
    if (n) text_add(out, "</tbody></table></div>\n");
}

/* Twins of a quantity need no line of their own: the text above the table says what _u is. */
static int is_twin(const column *c, size_t i) {
    size_t n = i ? strlen(c[i - 1].name) : 0;
    return n && !strncmp(c[i].name, c[i - 1].name, n) && !strcmp(c[i].name + n, "_u");
}

static void add_columns(const column *c, size_t n, const char *heading, textbuf *out) {
    text_addf(
        out,
        "<h3>%s</h3>\n<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"%s\"><table><thead><tr><th scope=\"col\">Column</th>"
        "<th scope=\"col\">Unit</th><th scope=\"col\">Meaning, and where it stops being "
        "true</th></tr></thead>"
        "<tbody>\n",
        heading, heading);
    for (size_t i = 0; i < n; i++) {
        if (is_twin(c, i)) continue;
        text_addf(out, "<tr><th scope=\"row\"><code>%s</code></th><td>", c[i].name);
        html_text(out, c[i].unit[0] ? c[i].unit : c[i].kind == COL_COUNT ? "count" : "text");
        text_add(out, "</td><td>");
        html_text(out, c[i].help);
        text_add(out, "</td></tr>\n");
    }
    text_add(out, "</tbody></table></div>\n");
}

void page_meaning(const results *r, textbuf *out) {
    text_add(
        out,
        "<section id=\"validity\"><h2>What the prediction leaves out</h2>\n"
        "<p><strong>Front surface only.</strong> Beyond about 1000 nm silicon lets light through to the rear "
        "and "
        "back out; a sphere measures that light as reflectance, these figures leave it out. Compare with a "
        "measurement over 300 to 1000 nm, total (diffuse and specular) reflectance.</p>\n"
        "<p><strong>Height is not in a top view.</strong> Below the diffraction limit height rules "
        "reflectance and "
        "spacing rules whether the model holds. The column <em>Height from</em> says whether the height was "
        "measured; if not, the reflectance is a scenario.</p>\n"
        "<p><strong>Graded index.</strong> The texture is taken as a layer whose index changes with depth. "
        "That is "
        "true for light that cannot resolve the features; the sub-wavelength share says for how much of the "
        "light. "
        "Where the texture is too coarse no figure is given.</p>\n"
        "<p><strong>Area is not recombination.</strong> A larger surface costs voltage only as far as it is "
        "badly "
        "passivated; the area ratio says nothing about that.</p></section>\n"
        "<section id=\"meaning\"><h2>What the numbers mean</h2>\n<p>Every measured quantity has a twin with "
        "<code>_u</code>: its combined standard uncertainty (JCGM 100) as an estimate of the mean of the "
        "etch's "
        "texture. This page prints twice that, U (k = 2).</p>\n");
    add_flag_list(r, out);
    add_columns(sample_columns, n_sample_columns, "Per sample (samples.csv)", out);
    add_columns(image_columns, n_image_columns, "Per micrograph (images.csv)", out);
    text_add(out, "</section>\n"
                  "<section class=\"caution\" id=\"caution\"><h2>Before an etch is changed</h2>\n<p>Numbers "
                  "on this page may "
                  "suggest another time, gas or bath. Wet etchants (HF above all), plasma gases and silane "
                  "can kill. Local "
                  "codes, safety data sheets and licensed practice decide what may be done; this program "
                  "advises, a person "
                  "decides.</p></section>\n");
}

static void add_node(textbuf *out, const cJSON *node);

static void add_scalar(textbuf *out, const cJSON *node) {
    char number[NUMBER_TEXT];
    if (cJSON_IsString(node))
        html_text(out, node->valuestring);
    else if (cJSON_IsNumber(node))
        text_add(out, number_text(node->valuedouble, 15, number));
    else
        text_add(out, cJSON_IsTrue(node) ? "yes" : cJSON_IsFalse(node) ? "no" : "\xe2\x80\x93");
}

/* An array of objects: one row each, the members of the first one as columns. */
static void add_rows(textbuf *out, const cJSON *list) {
    const cJSON *row, *head;
    text_add(out, "<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"");
    html_text(out, list->string ? list->string : "list");
    text_add(out, "\"><table><thead><tr>");
    cJSON_ArrayForEach(head, list->child) {
        text_add(out, "<th scope=\"col\">");
        html_text(out, head->string);
        text_add(out, "</th>");
    }
    text_add(out, "</tr></thead><tbody>\n");
    cJSON_ArrayForEach(row, list) {
        text_add(out, "<tr>");
        cJSON_ArrayForEach(head, list->child) {
            const cJSON *cell = cJSON_GetObjectItemCaseSensitive(row, head->string);
            text_add(out, "<td>");
            if (cell) add_node(out, cell);
            text_add(out, "</td>");
        }
        text_add(out, "</tr>\n");
    }
    text_add(out, "</tbody></table></div>\n");
}

/* Nesting is bounded by the parser (LIMIT_JSON_DEPTH of what wrote it, CJSON_NESTING_LIMIT here). */
static void add_node(textbuf *out, const cJSON *node) {
    const cJSON *child;
    if (cJSON_IsArray(node) && cJSON_IsObject(node->child)) {
        add_rows(out, node);
    } else if (cJSON_IsArray(node)) {
        cJSON_ArrayForEach(child, node) {
            if (child != node->child) text_add(out, ", ");
            add_node(out, child);
        }
    } else if (cJSON_IsObject(node)) {
        text_add(out, "<dl>\n");
        cJSON_ArrayForEach(child, node) {
            text_add(out, "<dt>");
            html_text(out, child->string);
            text_add(out, "</dt><dd>");
            add_node(out, child);
            text_add(out, "</dd>\n");
        }
        text_add(out, "</dl>\n");
    } else {
        add_scalar(out, node);
    }
}

static void add_methods(textbuf *out) {
    static const char *const method[][2] = {
        { "Uncertainty", "JCGM 100:2008, parts combined as variances; U = 2 u" },
        { "Verdicts", "ISO 14253-1 (decision rule), JCGM 106:2012 (conformance probability 95 % per limit)" },
        { "Sizes", "equivalent circular diameter of watershed cells (Meyer 1991; Vincent, Soille 1991, IEEE Trans. Pattern "
                   "Anal. 13:583); border weighting ISO 13322-1" },
        { "Order", "Clark, Evans 1954, Ecology 35:445, edge correction of Donnelly 1978; nearest neighbours after Hanisch 1984" },
        { "Autocorrelation length, texture aspect", "ISO 25178-2, applied to brightness, not to heights" },
        { "Solid share against depth", "Bruggeman 1935, Ann. Phys. 416:636, in two dimensions" },
        { "Layer stack", "characteristic matrix (Abeles 1950)" },
        { "Steep coarse facets", "geometric optics, Campbell, Green 1987, J. Appl. Phys. 62:243" },
    };
    text_add(out, "<h3>Methods</h3>\n<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"Methods and their "
                  "sources\"><table><thead><tr><th scope=\"col\">What</th><th scope=\"col\">Method and source</th></tr></thead>"
                  "<tbody>\n");
    for (size_t i = 0; i < sizeof method / sizeof method[0]; i++)
        text_addf(out, "<tr><th scope=\"row\">%s</th><td>%s</td></tr>\n", method[i][0], method[i][1]);
    text_add(out, "</tbody></table></div>\n<h3>Program, protocol, inputs</h3>\n");
}

void page_inputs(const results *r, textbuf *out) {
    if (!r->manifest_json) return;
    cJSON *manifest = cJSON_Parse(r->manifest_json);
    text_add(out,
             "<section id=\"inputs\" class=\"inputs\"><h2>How it was measured</h2>\n<p "
             "class=\"lead\">Methods with their sources, program, "
             "protocol and the SHA-256 of every input: the same inputs give the same digits again.</p>\n");
    add_methods(out);
    if (manifest) {
        cJSON_DeleteItemFromObjectCaseSensitive(manifest, "flags"); /* the list stands above */
        add_node(out, manifest);
    } else {
        text_add(out, "<pre>");
        html_text(out, r->manifest_json);
        text_add(out, "</pre>\n");
    }
    text_add(out, "</section>\n");
    cJSON_Delete(manifest);
}
