/* The ledger's rows as series. Numbers come out of the stored rows, so that every column that was ever written can be
 * charted, the carried-along ones too (they are text there; a text that is a number counts as one). */
#include "app/series.h"

#include <cjson/cJSON.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/json.h"
#include "report/rows.h"

void series_free(series *s) {
    for (size_t i = 0; s->phases && i < s->n; i++) free(s->phases[i]);
    free(s->phases);
    free(s->etches);
    free(s->unit);
    *s = (series){ 0 };
}

static double number_in(const cJSON *row, const char *name) {
    const cJSON *c = name ? cJSON_GetObjectItemCaseSensitive(row, name) : NULL;
    double v = MISSING;
    if (cJSON_IsNumber(c)) return c->valuedouble;
    if (cJSON_IsString(c) && number_parse(c->valuestring, &v)) return v;
    return MISSING;
}

static const char *text_in(const cJSON *row, const char *name) {
    const cJSON *c = cJSON_GetObjectItemCaseSensitive(row, name);
    return cJSON_IsString(c) ? c->valuestring : "";
}

/* A later row of the same etch follows: rows come in order of time, sample, run. */
static int superseded(const history_list *l, size_t i) {
    const history_row *r = &l->rows[i];
    return i + 1 < l->n && !strcmp(l->rows[i + 1].sample, r->sample) && !strcmp(l->rows[i + 1].etched_at, r->etched_at);
}

/* Why a phase starts at the newest etch of the series, or NULL. The last of several notes speaks. */
static status find_phase(series *s, const history_notes *notes, const char *recipe, const char *before, error *e) {
    textbuf t = { 0 };
    size_t i = s->n - 1;
    if (i == 0) return ST_OK;
    for (size_t k = notes->n; k-- > 0;) {
        const history_note *note = &notes->notes[k];
        if (strcmp(note->kind, "change") != 0 || note->day > s->etches[i].row->day || note->day <= s->etches[i - 1].row->day)
            continue;
        text_add(&t, note->text);
        break;
    }
    if (!t.n && recipe[0] && before[0] && strcmp(recipe, before) != 0) text_addf(&t, "recipe %s", recipe);
    status st = text_check(&t, "a series", e);
    if (st == ST_OK) s->etches[i].phase = s->phases[i] = t.s;
    else text_free(&t);
    return st;
}

typedef struct {
    const char *quantity, *setting;
    int apart;
    char *recipe; /* of the last etch that named one */
    int knows_quantity, knows_setting;
} wanted;

/* One more sample of an etch, after Welford (1962); sd holds the sum of squares until `settle`. */
static void add_value(etch *x, double v) {
    if (!isfinite(v)) return;
    double off = x->n ? v - x->value : 0.0;
    x->n++;
    x->value = x->n == 1 ? v : x->value + off / (double)x->n;
    x->sd += off * (v - x->value);
}

static void settle(series *s) {
    for (size_t i = 0; i < s->n; i++) {
        etch *x = &s->etches[i];
        x->sd = x->n > 1 ? sqrt(x->sd / ((double)x->n - 1.0)) : MISSING;
    }
}

static status take(const history_row *r, const history_notes *notes, wanted *w, series *s, error *e) {
    cJSON *row = cJSON_Parse(r->row_json);
    if (!row) return fail(e, ST_IO, "the ledger holds a damaged row of the sample '%s'", r->sample);
    double value = number_in(row, w->quantity), setting = number_in(row, w->setting);
    const char *recipe = text_in(row, "recipe");
    etch *x = s->n ? &s->etches[s->n - 1] : NULL;
    int joins = !w->apart && x && r->etched_at[0] && !strcmp(x->row->etched_at, r->etched_at);
    status st = ST_OK;
    w->knows_quantity |= isfinite(value);
    w->knows_setting |= isfinite(setting);
    if (joins) x->label = r->etched_at;
    else {
        x = &s->etches[s->n++];
        *x = (etch){ .row = r, .value = MISSING, .setting = setting, .label = r->sample };
        st = find_phase(s, notes, recipe, w->recipe ? w->recipe : "", e);
    }
    if (r->excluded[0]) s->n_excluded++;
    else if (isnan(value)) s->n_missing++;
    else add_value(x, value);
    if (st == ST_OK && recipe[0]) {
        free(w->recipe);
        w->recipe = mem_text(recipe);
        if (!w->recipe) st = NO_MEMORY(e, "a series");
    }
    cJSON_Delete(row);
    return st;
}

/* The names of the newest row: what a misspelt one may have meant. */
static status unknown(const history_list *l, const char *name, error *e) {
    cJSON *row = l->n ? cJSON_Parse(l->rows[l->n - 1].row_json) : NULL;
    const char *names[256];
    size_t n = 0;
    const cJSON *c;
    cJSON_ArrayForEach(c, row) if (n < 256) names[n++] = c->string;
    const char *near = json_nearest(name, names, n);
    status st = fail(e, ST_BAD_INPUT, "no etch of the history has a number '%s'%s%s%s; 'sward history --csv' shows the columns",
                     name, near ? ", did you mean '" : "", near ? near : "", near ? "'?" : "");
    cJSON_Delete(row);
    return st;
}

static status add_unit(const char *name, series *s, error *e) {
    const char *unit = "";
    s->digits = 5;
    for (size_t i = 0; i < n_sample_columns; i++)
        if (!strcmp(sample_columns[i].name, name) && sample_columns[i].kind == COL_NUMBER) {
            if (strcmp(sample_columns[i].unit, "1") != 0) unit = sample_columns[i].unit;
            s->digits = sample_columns[i].digits;
        }
    s->unit = mem_text(unit);
    return s->unit ? ST_OK : NO_MEMORY(e, "a series");
}

status series_make(const history_list *l, const history_notes *notes, const char *name, const char *setting, int apart,
                   series *out, error *e) {
    series s = { 0 };
    wanted w = { name, setting, apart, NULL, 0, 0 };
    s.etches = mem_array(l->n, sizeof *s.etches);
    s.phases = mem_array(l->n, sizeof *s.phases);
    status st = s.etches && s.phases ? add_unit(name, &s, e) : NO_MEMORY(e, "a series");
    for (size_t i = 0; st == ST_OK && i < l->n; i++)
        if (!superseded(l, i)) st = take(&l->rows[i], notes, &w, &s, e);
    if (st == ST_OK && !w.knows_quantity) st = unknown(l, name, e);
    if (st == ST_OK && setting && !w.knows_setting) st = unknown(l, setting, e);
    free(w.recipe);
    settle(&s);
    if (st == ST_OK) *out = s;
    else series_free(&s);
    return st;
}

size_t series_values(const series *s, size_t first, double *value, double *index, double *day) {
    size_t n = 0;
    for (size_t i = first; i < s->n; i++) {
        if (!isfinite(s->etches[i].value)) continue;
        if (value) value[n] = s->etches[i].value;
        if (index) index[n] = (double)n;
        if (day) day[n] = s->etches[i].row->day;
        n++;
    }
    return n;
}

size_t series_last_phase(const series *s) {
    size_t i = s->n ? s->n - 1 : 0;
    while (i > 0 && !s->etches[i].phase) i--;
    return i;
}

sentence_subject series_subject(const series *s, const char *name, double min, double max) {
    return (sentence_subject){ name, s->unit, s->digits, min, max };
}
