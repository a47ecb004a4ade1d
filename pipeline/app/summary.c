#include "app/summary.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "base/number.h"

static void spacing_cell(const sample_row *r, char *out, size_t size) {
    char v[NUMBER_TEXT], u[NUMBER_TEXT];
    if (isfinite(r->spacing_nm))
        snprintf(out, size, "%s +- %s nm", number_text(r->spacing_nm, 4, v), number_text(2.0 * r->spacing_nm_u, 2, u));
    else
        snprintf(out, size, "-");
}

static void reflectance_cell(const sample_row *r, char *out, size_t size) {
    char v[NUMBER_TEXT], lo[NUMBER_TEXT], hi[NUMBER_TEXT];
    if (isfinite(r->weighted_reflectance))
        snprintf(out, size, "%s %% (%s to %s)", number_percent(r->weighted_reflectance, 3, v),
                 number_percent(r->weighted_reflectance_lo, 2, lo), number_percent(r->weighted_reflectance_hi, 2, hi));
    else
        snprintf(out, size, "-");
}

static void one_sample(const publication *p, size_t k, int width, textbuf *out) {
    const sample_row *r = &p->samples[k].row;
    char spacing[64], R[96];
    spacing_cell(r, spacing, sizeof spacing);
    reflectance_cell(r, R, sizeof R);
    size_t before = out->n;
    text_add(out, "  ");
    text_add_plain(out, r->sample);
    int pad = width + 2 - (int)(out->n - before);
    text_addf(out, "%*s  %-20s  %-28s  %s\n", pad > 0 ? pad : 0, "", spacing, R, r->verdict);
}

static void unusable(const publication *p, textbuf *out) {
    for (size_t i = 0; i < p->folder->n; i++) {
        const examined *x = &p->images[i];
        if (x->readable && !x->reasons) continue;
        text_add(out, "  ");
        text_add_plain(out, x->row.file);
        text_addf(out, ": %s (", x->row.status);
        text_add_plain(out, x->row.reason);
        text_add(out, ")\n");
    }
}

/* How the verdicts were decided, quantities of one rule together. */
static void rules(const protocol *p, textbuf *out) {
    for (size_t i = 0; i < p->n_targets; i++) {
        textbuf rule = { 0 }, names = { 0 };
        int first = 1;
        target_rule_text(&p->targets[i], &rule);
        for (size_t k = 0; k < p->n_targets; k++) {
            textbuf other = { 0 };
            target_rule_text(&p->targets[k], &other);
            int same = rule.s && other.s && !strcmp(rule.s, other.s);
            if (same && k < i) first = 0; /* said with the earlier one */
            if (same) text_addf(&names, "%s%s", names.n ? ", " : "", p->targets[k].quantity);
            text_free(&other);
        }
        if (first && rule.s && names.s) text_addf(out, "Decided by %s: %s.\n", rule.s, names.s);
        text_free(&rule);
        text_free(&names);
    }
}

void summary_text(const publication *p, textbuf *out) {
    size_t counts[5] = { 0 }, ok = 0, excluded = 0;
    int width = 6;
    for (size_t i = 0; i < p->folder->n; i++) {
        if (!p->images[i].readable) continue;
        if (p->images[i].reasons) excluded++;
        else ok++;
    }
    for (size_t k = 0; k < p->n_groups; k++) {
        int n = (int)strlen(p->samples[k].row.sample);
        if (n > width && n < 40) width = n;
        counts[p->samples[k].verdict]++;
    }
    text_addf(out, "%zu micrographs: %zu measured, %zu excluded, %zu unreadable. %zu samples", p->folder->n, ok, excluded,
              p->folder->n - ok - excluded, p->n_groups);
    if (p->protocol->n_targets)
        text_addf(out, ": %zu conform, %zu fail, %zu undecided, %zu not measured.\n", counts[VERDICT_CONFORMS],
                  counts[VERDICT_FAILS], counts[VERDICT_UNDECIDED], counts[VERDICT_NOT_MEASURED]);
    else
        text_add(out, ". No targets: name them in the protocol to get verdicts.\n");
    text_addf(out, "  %-*s  %-20s  %-28s  %s\n", width, "sample", "spacing (k = 2)", "weighted reflectance (95 %)", "verdict");
    for (size_t k = 0; k < p->n_groups; k++) one_sample(p, k, width, out);
    rules(p->protocol, out);
    if (p->ledger->process) text_addf(out, "The process, by the history:\n%s", p->ledger->process);
    if (ok < p->folder->n) {
        text_add(out, "Not used:\n");
        unusable(p, out);
    }
    if (p->folder->n_other) text_addf(out, "%zu other files are no pictures.\n", p->folder->n_other);
    if (p->folder->warnings.n) text_addf(out, "Noted:\n%s", p->folder->warnings.s);
}

int colour_wanted(void) {
    const char *no = getenv("NO_COLOR"), *term = getenv("TERM");
    return isatty(STDOUT_FILENO) && !(no && *no) && term && strcmp(term, "dumb") != 0;
}

void summary_colour(const char *summary, textbuf *out) {
    static const char *const colour[][2] = { { "  conforms", "32" }, { "  fails", "1;31" }, { "  undecided", "33" } };
    for (const char *line = summary; *line;) {
        size_t n = strcspn(line, "\n"), k = 0, word = 0;
        for (; k < sizeof colour / sizeof colour[0]; k++) {
            word = strlen(colour[k][0]);
            if (n > word && !strncmp(line + n - word, colour[k][0], word)) break;
        }
        if (k < sizeof colour / sizeof colour[0]) {
            text_add_n(out, line, n - word);
            text_addf(out, "  \033[%sm%s\033[0m", colour[k][1], colour[k][0] + 2);
        } else {
            text_add_n(out, line, n);
        }
        if (line[n]) text_add(out, "\n");
        line += n + (line[n] != '\0');
    }
}
