/* What to do next, in plain words: for every micrograph that was not used the remedy of its reason, for every missed or
 * undecided target what its own uncertainty budget suggests, and for an assumed height the one measurement that matters
 * most. Advice about the measurement, never a recipe for the process. */
#include <cjson/cJSON.h>
#include <stdlib.h>
#include <string.h>

#include "base/flags.h"
#include "base/mem.h"
#include "report/html.h"
#include "report/page.h"

static const struct {
    int bit;
    const char *todo;
} remedy[] = {
    { FLAG_BIT_NO_PIXEL_SIZE, "give the pixel size (px_nm in samples.csv, or --px) and run again; nothing needs to be re-taken" },
    { FLAG_BIT_FEW_PIXELS, "re-take at a higher magnification, at least 10 px per spacing" },
    { FLAG_BIT_FEW_FEATURES, "re-take at a lower magnification, 15 to 30 spacings across" },
    { FLAG_BIT_NO_RING, "look at the picture: another spot or a focus problem? Re-take; if it looks the same, the texture has no spacing" },
    { FLAG_BIT_BLURRED, "refocus and correct the astigmatism, then re-take" },
    { FLAG_BIT_CLIPPED, "lower the contrast or shift the brightness, then re-take" },
    { FLAG_BIT_NOISY, "scan slower or average more frames, then re-take" },
    { FLAG_BIT_STREAKS, "charging: lower the voltage or scan faster with averaging, then re-take" },
    { FLAG_BIT_DRIFT, "wait until the stage is still, then re-take" },
    { FLAG_BIT_TILTED, "take the view from straight above, or say the tilt" },
    { FLAG_BIT_FEATURELESS, "the field shows nothing: check detector and spot, then re-take" },
};
enum { REMEDIES = sizeof remedy / sizeof remedy[0], MOST = 12 };

static int has_word(const char *text, const char *word) {
    size_t n = strlen(word);
    for (const char *p = text; p && (p = strstr(p, word)); p += n)
        if ((p == text || p[-1] == ' ') && (!p[n] || p[n] == ' ')) return 1;
    return 0;
}

static const char *remedy_of(const image_row *m) {
    for (size_t k = 0; k < REMEDIES; k++)
        if (has_word(m->reason, flag_word(remedy[k].bit))) return remedy[k].todo;
    return m->status && !strcmp(m->status, "unreadable") ? "the file cannot be read: save or copy it again" : NULL;
}

static void advise_pictures(const results *r, size_t *n, textbuf *out) {
    size_t more = 0;
    for (size_t i = 0; i < r->n_images; i++) {
        const image_row *m = &r->images[i];
        const char *todo = m->status && strcmp(m->status, "ok") ? remedy_of(m) : NULL;
        if (!todo) continue;
        if (*n >= MOST) {
            more++;
            continue;
        }
        ++*n;
        text_addf(out, "<li><a href=\"#micrograph-%zu\">", i + 1);
        html_text(out, m->file);
        text_add(out, "</a> was not used (");
        if (m->reason && *m->reason) page_flags(out, m->reason);
        else html_text(out, m->status);
        text_addf(out, "): %s.</li>\n", todo);
    }
    if (more) text_addf(out, "<li>%zu more micrographs were not used; their cards below say what helps.</li>\n", more);
}

/* What would decide target k of sample i, as its judgement says; NULL where it is decided. The caller frees it. */
static char *open_question(const results *r, size_t i, size_t k, textbuf *out) {
    textbuf name = { 0 };
    text_addf(&name, "verdict_%s", r->target_quantity[k]);
    const char *word = name.failed ? NULL : page_extra(r, &r->samples[i], name.s);
    int is_open = word && !strcmp(word, "undecided");
    text_free(&name);
    if (!is_open) return NULL;
    cJSON *o = page_members(r->sample_json ? r->sample_json[i] : NULL);
    const cJSON *advice = cJSON_GetObjectItemCaseSensitive(page_judgement(o, r->target_quantity[k]), "advice");
    char *answer = mem_text(cJSON_IsString(advice) && *advice->valuestring ? advice->valuestring : "its uncertainty reaches over the limit");
    if (!answer) out->failed = 1;
    cJSON_Delete(o);
    return answer;
}

static void add_link(const results *r, size_t i, textbuf *out) {
    text_addf(out, "<a href=\"#sample-%zu\">", i + 1);
    html_text(out, r->samples[i].sample);
    text_add(out, "</a>");
}

/* One line a sample while they are few; samples with the same open question share a line beyond that. */
static void advise_target(const results *r, size_t k, size_t *n, textbuf *out) {
    enum { EACH = 3, NAMED = 6 };
    char **answers = mem_array(r->n_samples, sizeof *answers);
    if (!answers) {
        out->failed = 1;
        return;
    }
    for (size_t i = 0; i < r->n_samples; i++) answers[i] = open_question(r, i, k, out);
    for (size_t i = 0; i < r->n_samples; i++) {
        size_t same = 0, told = 0;
        char *answer = answers[i];
        for (size_t q = i; answer && q < r->n_samples; q++) same += answers[q] && !strcmp(answers[q], answer);
        for (size_t q = i; same && q < r->n_samples; q++) {
            if (!answers[q] || strcmp(answers[q], answer)) continue;
            if (q != i) free(answers[q]);
            answers[q] = NULL;
            if (same > EACH && told >= NAMED) continue;
            if (same <= EACH || !told) text_add(out, "<li>");
            else text_add(out, ", ");
            told++;
            add_link(r, q, out);
            if (same > EACH) continue;
            text_add(out, " is undecided: ");
            page_reason(out, r, q, k, "undecided");
            text_addf(out, "; %s.</li>\n", answer);
        }
        if (same > NAMED) text_addf(out, " and %zu more", same - NAMED);
        if (same > EACH) text_addf(out, " are undecided on %s, not clear of its limits: %s.</li>\n", page_quantity(r->target_quantity[k]), answer);
        *n += same > EACH ? 1 : same;
        free(answer);
    }
    free(answers);
}

void page_advice(const results *r, textbuf *out) {
    textbuf list = { 0 };
    size_t n = 0, assumed = 0;
    for (size_t k = 0; k < r->n_targets; k++) advise_target(r, k, &n, &list);
    for (size_t i = 0; i < r->n_samples; i++) assumed += (size_t)has_word(r->samples[i].flags, flag_word(FLAG_BIT_HEIGHT_ASSUMED));
    advise_pictures(r, &n, &list);
    if (assumed)
        text_addf(&list, "<li>%zu of %zu samples rest on an assumed height: one cross-section (height_nm and height_nm_u in "
                         "samples.csv) turns their reflectance from a scenario into a prediction.</li>\n", assumed, r->n_samples);
    if (!r->n_targets && r->n_samples)
        text_add(&list, "<li>Name targets in protocol.json to get verdicts.</li>\n");
    if (list.failed) out->failed = 1;
    if (list.n) {
        text_add(out, "<h2 class=\"quiet\">What to do next</h2>\n<ul class=\"todo\">\n");
        text_add_n(out, list.s, list.n);
        text_add(out, "</ul>\n");
    }
    text_free(&list);
}
