/* The parts of report.html, each appended to the page; private to this room. Failure is remembered in `out`. */
#ifndef SWARD_REPORT_PAGE_H
#define SWARD_REPORT_PAGE_H
#include "report/results.h"

extern const char *const page_style_parts[]; /* the style sheet, NULL behind the last part */
extern const char page_script[];             /* sorting of tables; the page is complete without it */

void page_verdicts(const results *r, textbuf *out); /* headline, verdict per sample and target */
void page_series(const results *r, textbuf *out);   /* spacing and reflectance over the etches */
void page_maps(const results *r, textbuf *out);     /* spacing over the wafer, where positions are known */
void page_spectra(const results *r, textbuf *out);  /* optics table, one chart per sample */
void page_texture(const results *r, textbuf *out);  /* all texture numbers of the samples */
void page_pictures(const results *r, const char *out_dir, textbuf *out); /* overlays, status, reasons */
void page_meaning(const results *r, textbuf *out); /* what the numbers mean, flags, validity */
void page_inputs(const results *r, textbuf *out);  /* the manifest */

/* A flag or reason cell: known words with their meaning, anything else as it is. */
void page_flags(textbuf *out, const char *words);

/* Quantities that the page shows in percent. */
int page_percent(const char *column_name);
/* "Spacing" for "spacing_nm"; the column name itself where there is no better word. */
const char *page_quantity(const char *column_name);
/* The text of the extra column `name` of a sample, or NULL. */
const char *page_extra(const results *r, const sample_row *s, const char *name);

#endif
