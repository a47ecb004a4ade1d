/* A year of etches made by a script with known events, through the ledger: two recipes by turns, a quiet half, a drift that ends with
 * a step at a chamber clean, one outlier. What happened has to be found and said, and the quiet part has to be as quiet as the
 * chart promises. Wafers of an etch share its level and have a noise of their own. */
#include <cjson/cJSON.h>
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <unistd.h>

#include "app/control.h"
#include "app/history_verbs.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "io/file.h"
#include "noise.h"

enum { ETCHES = 250, WAFERS = 3, QUIET = 120, DRIFT_END = 190, OUTLIER = 57, SEEDS = 12, HOURS = 32 };
#define SD_ETCH 4.0
#define SD_WAFER 3.0
#define DRIFT 0.4 /* nm per etch */

static char folder[200], path[300], ledger[300];

/* Etch i is of recipe B where i % 5 > 2. One etch every 32 hours. */
static int is_b(int i) { return i % 5 > 2; }

static void write_year(uint64_t seed, textbuf *t) {
    uint64_t state = seed;
    text_add(t, "sample,lot,wafer,etched_at,spacing_nm,spacing_nm_u,weighted_reflectance,recipe,etch_s\n");
    for (int i = 0; i < ETCHES; i++) {
        double level = (is_b(i) ? 420.0 : 350.0) + SD_ETCH * noise_normal(&state);
        if (i >= QUIET && i < DRIFT_END) level += DRIFT * (i - QUIET);
        if (i == OUTLIER) level += 40.0;
        int hour = i * HOURS, day = hour / 24, month = day / 28;
        for (int w = 0; w < WAFERS; w++) {
            double v = level + SD_WAFER * noise_normal(&state);
            text_addf(t, "E%03d-%d,L%d,%d,2026-%02d-%02dT%02d:00:00Z,%.2f,6,%.5f,%s,%d\n", i, w, i / 10, w, month + 1, day % 28 + 1,
                      hour % 24, v, 0.02 + (v - 350.0) * 1e-5, is_b(i) ? "B" : "A", 180);
        }
    }
}

static void fill(uint64_t seed, int noted) {
    error e = { ST_OK, "" };
    textbuf t = { 0 }, said = { 0 };
    history *h = NULL;
    write_year(seed, &t);
    CHECK(text_check(&t, "year", &e) == ST_OK && file_write(path, t.s, t.n, &e) == ST_OK);
    unlink(ledger);
    CHECK(history_open(ledger, 0, &h, &e) == ST_OK);
    CHECK(history_import(h, path, NULL, "2027-01-01T00:00:00Z", &said, &e) == ST_OK && said.s && strstr(said.s, "750 of 750"));
    int hour = DRIFT_END * HOURS - 5, day = hour / 24;
    char at[32];
    snprintf(at, sizeof at, "2026-%02d-%02dT%02d:00:00Z", day / 28 + 1, day % 28 + 1, hour % 24);
    history_note note = { .at = at, .text = "chamber clean", .kind = "change", .initials = "KL" };
    if (noted) CHECK(history_note_add(h, &note, &e) == ST_OK);
    if (e.text[0]) printf("%s\n", e.text);
    history_close(h);
    text_free(&t);
    text_free(&said);
}

/* What the seeds gave in all. */
static struct {
    size_t quiet_points, quiet_alarms, outliers, false_outliers, drifts, false_drifts, steps, false_steps;
    double stated; /* expected alarms in the quiet points */
} total;

static void look(const control *c, int noted) {
    for (size_t k = 0; k < c->c.n_phases; k++) {
        const findings *f = &c->phases[k].found;
        for (size_t i = 0; i < f->n_outliers; i++)
            if (f->outliers[i].at == OUTLIER) total.outliers++;
            else total.false_outliers++;
        for (size_t i = 0; i <= f->n_breaks; i++) {
            const finding_stretch *s = &f->stretches[i];
            if (!s->drift.n || !sentence_drifts(&s->drift)) continue;
            if (s->last > QUIET + 20 && s->first < DRIFT_END) total.drifts += s->drift.slope > 0.0;
            else total.false_drifts++;
        }
        for (size_t i = 0; i < f->n_breaks; i++) {
            const finding_break *b = &f->breaks[i];
            if (b->kind != BREAK_STEP) continue;
            if (b->before < DRIFT_END + 8 && b->at > DRIFT_END - 8 && b->size < -10.0) total.steps++;
            else if (b->at < QUIET) total.false_steps++;
        }
        if (noted && c->phases[k].since.n_a && c->phases[k].since.hi < 0.0) total.steps++;
    }
    for (int i = 0; i < QUIET; i++) {
        const chart_point *p = &c->c.points[i];
        if (i == OUTLIER) continue;
        total.quiet_points++;
        total.quiet_alarms += p->alarms != 0;
        total.stated += 1.0 / c->false_alarms;
    }
}

static int holds(const textbuf *t, const char *words) {
    int there = t->s && strstr(t->s, words) != NULL;
    if (!there) printf("'%s' is not in:\n%.600s\n", words, t->s ? t->s : "(nothing)");
    return there;
}

static double number_of(const cJSON *object, const char *name) {
    const cJSON *v = cJSON_GetObjectItem(object, name);
    return cJSON_IsNumber(v) ? v->valuedouble : MISSING;
}

/* What the page and other programs read: the newest 100 points with the numbers of all. */
static void reads(const control *c, int noted) {
    textbuf t = { 0 };
    control_json(c, 100, &t);
    cJSON *root = t.s ? cJSON_Parse(t.s) : NULL;
    const cJSON *points = cJSON_GetObjectItem(root, "points"), *phases = cJSON_GetObjectItem(root, "phases"),
                *notes = cJSON_GetObjectItem(root, "notes"), *found = cJSON_GetObjectItem(root, "findings"), *f;
    CHECK(cJSON_GetArraySize(points) == 100 && fabs(number_of(root, "points_left_out") - 150.0) < 0.5);
    CHECK(fabs(number_of(cJSON_GetArrayItem(points, 0), "number") - 151.0) < 0.5 && isfinite(number_of(cJSON_GetArrayItem(points, 99), "high")));
    CHECK_NEAR(number_of(cJSON_GetArrayItem(points, 99), "u"), 6.0, 1e-9);
    CHECK(cJSON_GetArraySize(phases) == (noted ? 4 : 2) && cJSON_GetArraySize(notes) == noted);
    const cJSON *first = cJSON_GetArrayItem(phases, 0), *of = cJSON_GetObjectItem(first, "baseline_of");
    CHECK(cJSON_IsString(of) && !strcmp(of->valuestring, "steady"));
    CHECK_NEAR(number_of(first, "high") - number_of(first, "centre"), 3.0 * number_of(first, "sigma"), 1e-4);
    if (noted) CHECK(fabs(number_of(cJSON_GetArrayItem(notes, 0), "before") - (DRIFT_END + 1.0)) < 0.5);
    size_t outliers = 0, changes = 0;
    cJSON_ArrayForEach(f, found) {
        const char *kind = cJSON_GetObjectItem(f, "kind")->valuestring;
        outliers += !strcmp(kind, "outlier") && fabs(number_of(f, "from") - (OUTLIER + 1.0)) < 0.5;
        changes += !strcmp(kind, "change") && number_of(f, "size") < 0.0;
        CHECK(cJSON_IsString(cJSON_GetObjectItem(f, "sentence")));
    }
    CHECK(outliers == 1 && changes == (noted ? 2 : 0));
    CHECK(number_of(root, "false_alarm_length") > 30.0 && fabs(number_of(root, "false_alarm_length_known") - 91.75) < 0.01);
    CHECK(cJSON_GetArraySize(cJSON_GetObjectItem(root, "sentences")) > 5 && cJSON_GetArraySize(cJSON_GetObjectItem(root, "tests")) == 4);
    cJSON_Delete(root);
    text_free(&t);
}

static void one_year(uint64_t seed, int noted, int speak) {
    error e = { ST_OK, "" };
    history *h = NULL;
    history_list rows = { 0 };
    history_notes notes = { 0 };
    control c = { 0 };
    textbuf t = { 0 };
    fill(seed, noted);
    CHECK(history_open(ledger, 1, &h, &e) == ST_OK && history_read(h, NULL, NULL, &rows, &e) == ST_OK);
    CHECK(history_notes_read(h, &notes, &e) == ST_OK && rows.n == (size_t)ETCHES * WAFERS);
    control_question q = control_defaults(&rows, &notes);
    CHECK(control_make(&q, &c, &e) == ST_OK && c.s.n == ETCHES);
    if (c.s.n == ETCHES) {
        CHECK(c.c.n_phases == (noted ? 4 : 2)); /* two recipes, before and after the clean */
        CHECK_NEAR(c.s.etches[0].sd, SD_WAFER, 3.0 * SD_WAFER);
        look(&c, noted);
        if (speak) reads(&c, noted);
    }
    if (speak) {
        control_findings(&c, 0, &t);
        control_alarms(&c, &t);
        CHECK(holds(&t, "recipe A: spacing of 2026-03-21T00:00:00Z stands out: "));
        CHECK(holds(&t, noted ? "after 'chamber clean' spacing stepped by -" : "spacing steps by -"));
        CHECK(holds(&t, " drifted by +") && holds(&t, " per etch "));
        CHECK(holds(&t, "ALARM: 2026-03-21T00:00:00Z") && holds(&t, "gives one false alarm in about "));
    }
    control_free(&c);
    text_free(&t);
    history_list_free(&rows);
    history_notes_free(&notes);
    history_close(h);
}

int main(void) {
    const char *tmp = getenv("TMPDIR");
    snprintf(folder, sizeof folder, "%s/sward-year-XXXXXX", tmp ? tmp : "/tmp");
    CHECK(mkdtemp(folder) != NULL);
    snprintf(path, sizeof path, "%s/year.csv", folder);
    snprintf(ledger, sizeof ledger, "%s/h.sqlite", folder);
    for (uint64_t seed = 1; seed <= SEEDS; seed++) one_year(seed, seed % 2 == 0, seed < 3);
    printf("quiet: %zu alarms in %zu points, %.1f stated; outliers %zu (%zu false), drifts %zu (%zu), steps %zu (%zu)\n", total.quiet_alarms,
           total.quiet_points, total.stated, total.outliers, total.false_outliers, total.drifts, total.false_drifts, total.steps,
           total.false_steps);
    CHECK(total.outliers == SEEDS && total.false_outliers <= 1);
    CHECK(total.drifts >= SEEDS && total.false_drifts <= SEEDS / 4);
    CHECK(total.steps >= SEEDS && total.false_steps <= 1);
    CHECK((double)total.quiet_alarms <= total.stated + 3.0 * sqrt(total.stated)); /* Poisson */
    unlink(path);
    unlink(ledger);
    CHECK(rmdir(folder) == 0);
    return check_done();
}
