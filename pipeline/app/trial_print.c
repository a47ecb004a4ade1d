/* Prints the Monte Carlo of a prediction; inputs in the order of what they contribute. */
#include "app/trial_print.h"

#include <math.h>

#include "base/number.h"
#include "io/json.h"

enum { DIGITS = 5 };

/* Inputs by falling sd. */
static void rank(const distribution *d, int order[INPUTS]) {
    for (int i = 0; i < INPUTS; i++) {
        int at = i;
        for (; at > 0 && d->sd_of[order[at - 1]] < d->sd_of[i]; at--) order[at] = order[at - 1];
        order[at] = i;
    }
}

static void member(textbuf *out, const char *before, const char *name, double v) {
    text_addf(out, "%s\"%s\": ", before, name);
    json_number(out, v, DIGITS);
}

void trials_json(const distribution *d, const trial_options *t, textbuf *out) {
    int order[INPUTS];
    rank(d, order);
    text_add(out, "  \"monte_carlo\": {");
    member(out, "", "median", d->median);
    member(out, ", ", "mean", d->mean);
    member(out, ", ", "sd", d->sd);
    member(out, ", ", "lo", d->lo);
    member(out, ", ", "hi", d->hi);
    text_addf(out, ", \"trials\": %zu, \"seed\": %llu, \"settled\": %s", d->trials,
              (unsigned long long)t->seed, d->settled ? "true" : "false");
    member(out, ", ", "tolerance", d->tolerance);
    text_add(out, ",\n    \"budget\": [");
    for (int i = 0; i < INPUTS; i++) {
        text_addf(out, "%s{\"input\": \"%s\"", i ? ", " : "", input_name((input_kind)order[i]));
        member(out, ", ", "sd", d->sd_of[order[i]]);
        text_add(out, "}");
    }
    text_add(out, "],\n    \"spectrum\": [");
    for (size_t i = 0; i < d->n; i++) {
        member(out, i ? ",\n      {" : "\n      {", "wavelength_nm", d->wavelength_nm[i]);
        member(out, ", ", "reflectance_lo", d->R_lo[i]);
        member(out, ", ", "reflectance_hi", d->R_hi[i]);
        text_add(out, "}");
    }
    text_add(out, "\n    ]},\n");
}

void trials_text(const distribution *d, const trial_options *t, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT];
    int order[INPUTS];
    rank(d, order);
    text_addf(out, "\nMonte Carlo (JCGM 101)   median %s %%, 95 %% of the trials from %s to %s %%\n",
              number_percent(d->median, 4, a), number_percent(d->lo, 4, b), number_percent(d->hi, 4, c));
    text_addf(out, "                         %zu trials, seed %llu, ends within %s %%%s\n", d->trials,
              (unsigned long long)t->seed, number_percent(d->tolerance, 2, a),
              d->settled ? "" : " not reached");
    text_add(out, "What contributes         ");
    for (int i = 0, shown = 0; i < INPUTS; i++)
        if (d->sd_of[order[i]] > 1e-6)
            text_addf(out, "%s%s +- %s %%", shown++ ? ", " : "", input_name((input_kind)order[i]),
                      number_percent(d->sd_of[order[i]], 2, a));
    text_add(out, "\n");
}
