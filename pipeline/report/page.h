/* The parts of report.html, each appended to the page; private to this room. Failure is remembered in `out`. */
#ifndef SWARD_REPORT_PAGE_H
#define SWARD_REPORT_PAGE_H
#include "report/plot.h"
#include "report/results.h"

/* In the order of the page. */
void page_verdicts(const results *r, textbuf *out); /* the run's verdict, its reasons, what to do next */
void page_samples(const results *r, textbuf *out);  /* one line a sample, with pictures of value and target */
void page_series(const results *r, textbuf *out);   /* spacing and reflectance over the etches */
void page_maps(const results *r, textbuf *out);     /* spacing over the wafer, where positions are known */
void page_spectra(const results *r, textbuf *out);  /* optics table, one chart per sample */
void page_window(const results *r, textbuf *out);   /* where the samples lie between heights and spacings */
void page_texture(const results *r, const char *out_dir, textbuf *out); /* sizes, autocorrelation, all texture numbers */
void page_pictures(const results *r, const char *out_dir, textbuf *out); /* overlays, status, reasons */
void page_budgets(const results *r, textbuf *out); /* where the uncertainty comes from */
void page_meaning(const results *r, textbuf *out); /* what the numbers mean, flags, validity */
void page_inputs(const results *r, textbuf *out);  /* methods with their sources, and the manifest */

/* Parts of those: what fails and the list of advice inside the verdict, control charts, reflectance against the angle, the charts inside the texture. */
void page_cases(const results *r, textbuf *out);
void page_advice(const results *r, textbuf *out);
/* The picture of micrograph i in layers; 0 when the run left none, then nothing is added. */
int page_layers_add(const results *r, size_t i, const char *out_dir, size_t width, textbuf *out);
void page_control(const results *r, textbuf *out);
void page_angles(const results *r, textbuf *out);
void page_profiles(const results *r, const char *out_dir, textbuf *out);

/* Column name + suffix of the sample table, or NULL. */
const column *page_sample_column(const char *name, const char *suffix);
/* 0 fails, 1 undecided, 2 not measured, 3 the rest. */
enum { PAGE_URGENCIES = 4 };
int page_urgency(const sample_row *s);
/* Indices of the samples that the page shows in detail, ascending; the caller frees them. NULL: no memory, remembered in `out`. */
size_t *page_pick(const results *r, size_t *n, textbuf *out);
/* Says so where they are not all. */
void page_pick_note(const results *r, size_t n, const char *what, const char *where, textbuf *out);
/* The number of that column of a sample as the table prints it; NAN: none. */
double page_sample_number(const sample_row *s, const char *name, const char *suffix);
/* How a quantity stands to the limit nearest to it. lo and hi: its 95 % interval, or twice the uncertainty. */
typedef struct {
    size_t target;
    double value, lo, hi, limit;
} page_miss;
int page_find_miss(const results *r, const sample_row *s, size_t target, page_miss *out); /* 0: no value, or no limit */
/* Value with U (k = 2), or with its 95 % interval where the table has one, and its unit. */
void page_sample_value(textbuf *out, const sample_row *s, const char *name);
/* "280 to 420 nm" of target k. */
void page_range(textbuf *out, const results *r, size_t k);
/* "Spacing 468.07 +- 40 nm is above the limit 420 nm", for the words fails and undecided. */
void page_reason(textbuf *out, const results *r, size_t sample, size_t target, const char *word);
/* The further members of a row in results.json as an object, which the caller deletes; NULL where there are none. */
struct cJSON *page_members(const char *json);
/* The judgement of a quantity in those members, or NULL. */
const struct cJSON *page_judgement(const struct cJSON *sample, const char *name);

/* A flag as a person writes it: "no pixel size". */
void page_flag_name(textbuf *out, int bit);
/* A flag or reason cell: known words with their meaning, anything else as it is. */
void page_flags(textbuf *out, const char *words);

/* The mark of a point by the word of its verdict. */
plot_mark page_mark(const char *verdict);

/* Quantities that the page shows in percent. */
int page_percent(const char *column_name);
/* "Spacing" for "spacing_nm"; the column name itself where there is no better word. */
const char *page_quantity(const char *column_name);
/* The text of the extra column `name` of a sample, or NULL. */
const char *page_extra(const results *r, const sample_row *s, const char *name);

#endif
