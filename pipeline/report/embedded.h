/* Files that the build puts into the program as they are (.cmake/embed.cmake); the page carries them. */
#ifndef SWARD_REPORT_EMBEDDED_H
#define SWARD_REPORT_EMBEDDED_H
#include <stddef.h>

extern const unsigned char page_css[], page_js[]; /* report/page.css, page.js: ours */
extern const size_t page_css_bytes, page_js_bytes;
extern const unsigned char chart_js[], chart_js_licence_txt[]; /* Chart.js as its authors ship it, and the licence that goes with it */
extern const size_t chart_js_bytes, chart_js_licence_txt_bytes;

#endif
