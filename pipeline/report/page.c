/* report.html: one file that opens anywhere, says first what an engineer asks first, and carries its own pictures, charts
 * and explanations. Nothing is fetched, and a security policy in the head forbids it: two scripts may run, named by their
 * digests (Content Security Policy Level 3), so that nothing a file name smuggles in ever could. Without scripts the page is
 * complete: tables, verdicts, pictures and a static drawing of each chart. The parts are in page_*.c, in the reader's order. */
#include "report/page.h"

#include <stdlib.h>

#include "io/file.h"
#include "report/embedded.h"
#include "report/html.h"

enum { MANY = 60 }; /* samples: beyond it the browser lays out only what is in sight */

/* 'sha256-...' of a script, as the policy wants it. */
static void add_digest(textbuf *out, const unsigned char *script, size_t n) {
    static const char hex[] = "0123456789abcdef";
    char text[65];
    uint8_t digest[32] = { 0 };
    sha256_hex(script, n, text);
    for (size_t i = 0; i < 64; i++)
        for (unsigned v = 0; v < 16; v++)
            if (hex[v] == text[i]) digest[i / 2] = (uint8_t)(digest[i / 2] * 16 + v);
    text_add(out, " 'sha256-");
    text_base64(out, digest, sizeof digest);
    text_add(out, "'");
}

static void add_bytes(textbuf *out, const unsigned char *bytes, size_t n) { text_add_n(out, (const char *)bytes, n); }

static void add_script(textbuf *out, const unsigned char *script, size_t n) {
    text_add(out, "<script>");
    add_bytes(out, script, n);
    text_add(out, "</script>\n");
}

static void add_head(const results *r, textbuf *out) {
    const char *title = r->title && *r->title ? r->title : "Texture report";
    text_add(out, "<!doctype html>\n<html lang=\"en\"><head><meta charset=\"utf-8\">\n"
                  "<meta name=\"viewport\" content=\"width=device-width,initial-scale=1\">\n"
                  "<meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; base-uri 'none'; form-action 'none'; "
                  "img-src data:; style-src 'unsafe-inline'; script-src");
    add_digest(out, chart_js, chart_js_bytes);
    add_digest(out, page_js, page_js_bytes);
    text_add(out, "\">\n<title>");
    html_text(out, title);
    text_add(out, "</title>\n<style>\n");
    add_bytes(out, page_css, page_css_bytes);
    text_add(out, "</style></head>\n<body>\n<header><h1>");
    html_text(out, title);
    text_add(out,
             "</h1>\n<p class=\"lead\">Texture of etched silicon from top-view micrographs, and the "
             "reflectance predicted "
             "from it.</p>\n<nav aria-label=\"On this page\"><ul><li><a href=\"#verdicts\">Verdict</a></li>"
             "<li><a href=\"#samples\">Samples</a></li><li><a href=\"#series\">Etch series</a></li>"
             "<li><a href=\"#optics\">Reflectance</a></li><li><a href=\"#window\">Process window</a></li><li><a href=\"#texture\">Texture</a></li>"
             "<li><a href=\"#micrographs\">Micrographs</a></li><li><a href=\"#budgets\">Uncertainty</a></li>"
             "<li><a href=\"#meaning\">Meaning</a></li><li><a href=\"#inputs\">How it was measured</a></li></ul></nav></header>\n");
    text_add(out, r->n_samples > MANY ? "<main class=\"many-samples\">\n" : "<main>\n");
}

status report_write(const results *r, const char *out_dir, error *e) {
    textbuf page = { 0 };
    char *path = NULL;
    add_head(r, &page);
    page_verdicts(r, &page);
    page_samples(r, &page);
    page_series(r, &page);
    page_spectra(r, &page);
    page_window(r, &page);
    page_texture(r, out_dir, &page);
    page_pictures(r, out_dir, &page);
    page_maps(r, &page);
    page_budgets(r, &page);
    page_meaning(r, &page);
    page_inputs(r, &page);
    text_add(&page, "</main>\n<footer>The same figures, to the digit: samples.csv, images.csv, spectra.csv, "
                    "results.json; "
                    "datapackage.json describes every column.\n<details><summary>Charts are drawn by Chart.js (MIT licence)</summary><pre tabindex=\"0\">");
    add_bytes(&page, chart_js_licence_txt, chart_js_licence_txt_bytes);
    text_add(&page, "</pre></details></footer>\n");
    add_script(&page, chart_js, chart_js_bytes);
    add_script(&page, page_js, page_js_bytes);
    text_add(&page, "</body></html>\n");
    status st = text_check(&page, "report.html", e);
    if (!st) {
        path = path_join(out_dir, "report.html");
        st = path ? file_write(path, page.s, page.n, e)
                  : fail(e, ST_NO_MEMORY, "not enough memory for report.html");
    }
    free(path);
    text_free(&page);
    return st;
}
