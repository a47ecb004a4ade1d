/* report.html: one file that opens anywhere, says first what an engineer asks first, and carries its own pictures, charts
 * and explanations. Nothing is fetched; a security policy in the head forbids it. Without scripts only sorting,
 * filtering and copying are missing. The parts are in page_*.c, in the reader's order. */
#include "report/page.h"

#include <stdlib.h>

#include "io/file.h"
#include "report/html.h"

static void add_head(const results *r, textbuf *out) {
    const char *title = r->title && *r->title ? r->title : "Texture report";
    text_add(
        out,
        "<!doctype html>\n<html lang=\"en\"><head><meta charset=\"utf-8\">\n"
        "<meta name=\"viewport\" content=\"width=device-width,initial-scale=1\">\n"
        "<meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; img-src data:; style-src "
        "'unsafe-inline'; script-src 'unsafe-inline'\">\n<title>");
    html_text(out, title);
    text_add(out, "</title>\n<style>\n");
    for (size_t i = 0; page_style_parts[i]; i++) text_add(out, page_style_parts[i]);
    text_add(out, "</style></head>\n<body>\n<header><h1>");
    html_text(out, title);
    text_add(out,
             "</h1>\n<p class=\"lead\">Texture of etched silicon from top-view micrographs, and the "
             "reflectance predicted "
             "from it.</p>\n<nav aria-label=\"On this page\"><ul><li><a href=\"#verdicts\">Verdict</a></li>"
             "<li><a href=\"#samples\">Samples</a></li><li><a href=\"#series\">Etch series</a></li>"
             "<li><a href=\"#optics\">Reflectance</a></li><li><a href=\"#texture\">Texture</a></li>"
             "<li><a href=\"#micrographs\">Micrographs</a></li><li><a href=\"#budgets\">Uncertainty</a></li>"
             "<li><a href=\"#meaning\">Meaning</a></li><li><a href=\"#inputs\">How it was measured</a></li></ul></nav></header>\n"
             "<main>\n");
}

status report_write(const results *r, const char *out_dir, error *e) {
    textbuf page = { 0 };
    char *path = NULL;
    add_head(r, &page);
    page_verdicts(r, &page);
    page_samples(r, &page);
    page_series(r, &page);
    page_spectra(r, &page);
    page_texture(r, out_dir, &page);
    page_pictures(r, out_dir, &page);
    page_maps(r, &page);
    page_budgets(r, &page);
    page_meaning(r, &page);
    page_inputs(r, &page);
    text_add(&page, "</main>\n<footer>The same figures, to the digit: samples.csv, images.csv, spectra.csv, "
                    "results.json; "
                    "datapackage.json describes every column.</footer>\n<script>\n");
    text_add(&page, page_script);
    text_add(&page, "</script>\n</body></html>\n");
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
