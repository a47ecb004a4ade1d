/* Which samples a page of many shows in detail: all up to a number that opens quickly, beyond it those that need a look first. */
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "report/page.h"

enum { ALL_UP_TO = 60, ELSE = 24 };

int page_urgency(const sample_row *s) {
    static const char *const order[] = { "fails", "undecided", "not_measured" };
    for (int k = 0; k < 3; k++)
        if (s->verdict && !strcmp(s->verdict, order[k])) return k;
    return PAGE_URGENCIES - 1;
}

size_t *page_pick(const results *r, size_t *n, textbuf *out) {
    size_t *picked = mem_array(r->n_samples, sizeof *picked), room = r->n_samples <= ALL_UP_TO ? r->n_samples : ELSE, rest[PAGE_URGENCIES] = { 0 };
    *n = 0;
    if (!picked) {
        out->failed = 1;
        return NULL;
    }
    for (size_t i = 0; i < r->n_samples; i++) rest[page_urgency(&r->samples[i])]++;
    for (int k = 0; k < PAGE_URGENCIES; k++) { /* how many of each kind there is room for */
        if (rest[k] > room) rest[k] = room;
        room -= rest[k];
    }
    for (size_t i = 0; i < r->n_samples; i++) {
        size_t *left = &rest[page_urgency(&r->samples[i])];
        if (!*left) continue;
        --*left;
        picked[(*n)++] = i;
    }
    return picked;
}

void page_pick_note(const results *r, size_t n, const char *what, const char *where, textbuf *out) {
    if (n < r->n_samples)
        text_addf(out, "<p class=\"small\">%zu of %zu samples are shown here, those that need a look first: %s of all of them %s.</p>\n", n,
                  r->n_samples, what, where);
}
