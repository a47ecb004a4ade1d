/* The ledger's rows as series. Numbers come out of the stored rows, so that every column that was ever written can be
 * charted, the carried-along ones too (they are text there; a text that is a number counts as one). */
#include "app/series.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/rowtext.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "base/text.h"
#include "io/json.h"
#include "report/rows.h"

void series_free(series *s) {
    for (size_t k = 0; s->phases && k < s->n_phases; k++) {
        free(s->phases[k].recipe);
        free(s->phases[k].why);
    }
    free(s->phases);
    free(s->etches);
    free(s->unit);
    *s = (series){ 0 };
}

/* A later row of the same etch follows: rows come in order of time, sample, run. */
static int superseded(const history_list *l, size_t i) {
    const history_row *r = &l->rows[i];
    return i + 1 < l->n && !strcmp(l->rows[i + 1].sample, r->sample) && !strcmp(l->rows[i + 1].etched_at, r->etched_at);
}

/* ---- one row ---- */

/* What is looked for in every row, and what the last one gave. */
typedef struct {
    const char *quantity, *setting, *phase_by, *only;
    char *quantity_u, *quantity_lo, *quantity_hi; /* owned */
    char *recipe;                                 /* owned; of the row at hand, NULL: it names none */
    char *last_recipe;                            /* owned; of the last row that named one */
    const char *change;                           /* text of the note that opened the epoch; NULL: none yet */
    double value, u, lo, hi, x;
    int from_file; /* the time of etching is that of the files */
    int knows_quantity, knows_setting;
    size_t room_phases;
} wanted;

static char *with_tail(const char *name, const char *tail) {
    textbuf t = { 0 };
    text_addf(&t, "%s%s", name, tail);
    if (t.failed) text_free(&t);
    return t.s;
}

static int flagged_from_file(const row_member *m) {
    static const char word[] = "time_from_file";
    for (size_t i = 0; i + sizeof word - 1 <= m->value_n; i++)
        if (!memcmp(m->value + i, word, sizeof word - 1)) return 1;
    return 0;
}

static status read_row(const history_row *r, wanted *w, error *e) {
    const char *at = r->row_json;
    row_member m;
    int more;
    free(w->recipe);
    w->recipe = NULL;
    w->value = w->u = w->lo = w->hi = w->x = MISSING;
    w->from_file = 0;
    while ((more = row_next(&at, &m)) == 1) {
        if (row_named(&m, w->quantity)) w->value = row_number(&m);
        if (row_named(&m, w->quantity_u)) w->u = row_number(&m);
        if (row_named(&m, w->quantity_lo)) w->lo = row_number(&m);
        if (row_named(&m, w->quantity_hi)) w->hi = row_number(&m);
        if (w->setting && row_named(&m, w->setting)) w->x = row_number(&m);
        if (row_named(&m, "flags")) w->from_file = flagged_from_file(&m);
        if (m.kind != MEMBER_OTHER && m.value_n && !w->recipe && row_named_like(&m, w->phase_by) && !(w->recipe = row_text(&m)))
            return NO_MEMORY(e, "a series");
    }
    if (more < 0) return fail(e, ST_IO, "the ledger holds a damaged row of the sample '%s'", r->sample);
    if (!isfinite(w->u)) w->u = (w->hi - w->lo) / (2.0 * 1.959963984540054); /* lo..hi is a 95 % interval */
    return ST_OK;
}

/* ---- etches and phases ---- */

/* The etch this row is one more sample of, or NULL. Rows of one time lie side by side. */
static etch *same_etch(series *s, const history_row *r, const wanted *w) {
    for (size_t i = s->n; i-- > 0;) {
        etch *x = &s->etches[i];
        int same_time = r->etched_at[0] && !strcmp(x->row->etched_at, r->etched_at);
        int same_wafer = w->from_file && r->wafer[0] && !strcmp(x->row->wafer, r->wafer) && !strcmp(x->row->lot, r->lot);
        if (!same_time && !same_wafer) return NULL;
        if (!w->recipe || !strcmp(s->phases[x->phase].recipe, w->recipe)) return x;
    }
    return NULL;
}

static int was_seen(const series *s, const char *recipe) {
    for (size_t k = 0; k < s->n_phases; k++)
        if (!strcmp(s->phases[k].recipe, recipe)) return 1;
    return 0;
}

/* A recipe that is known from before a change starts anew because of the change, a new one because it is new. */
static status add_phase(series *s, wanted *w, size_t epoch, error *e) {
    if (s->n_phases == w->room_phases) {
        size_t room = w->room_phases ? 2 * w->room_phases : 8;
        series_phase *grown = mem_grow(s->phases, room, sizeof *grown);
        if (!grown) return NO_MEMORY(e, "a series");
        s->phases = grown;
        w->room_phases = room;
    }
    const char *recipe = w->last_recipe ? w->last_recipe : "";
    textbuf why = { 0 };
    int is_new = s->n_phases && recipe[0] && !was_seen(s, recipe), changed = s->n_phases && w->change;
    if (changed) text_add(&why, w->change);
    if (is_new) text_addf(&why, "%s%s %s", changed ? ", " : "", w->phase_by, recipe);
    status st = text_check(&why, "a series", e);
    series_phase p = { mem_text(recipe), why.s, epoch, s->n, s->n };
    if (st == ST_OK && !p.recipe) st = NO_MEMORY(e, "a series");
    if (st == ST_OK) s->phases[s->n_phases++] = p;
    else {
        free(p.recipe);
        text_free(&why);
    }
    return st;
}

/* The phase of the etch that comes next; *note: how many notes lie behind. */
static status find_phase(series *s, wanted *w, const history_row *r, const history_notes *notes, size_t *note, size_t *out, error *e) {
    const char *recipe;
    int changed = 0;
    size_t epoch = s->n ? s->phases[s->etches[s->n - 1].phase].epoch : 0;
    for (; *note < notes->n && notes->notes[*note].day <= r->day; ++*note)
        if (!strcmp(notes->notes[*note].kind, "change")) {
            changed = s->n > 0;
            if (changed) w->change = notes->notes[*note].text; /* the last of several speaks */
        }
    if (w->recipe) {
        free(w->last_recipe);
        w->last_recipe = mem_text(w->recipe);
        if (!w->last_recipe) return NO_MEMORY(e, "a series");
    }
    recipe = w->last_recipe ? w->last_recipe : "";
    epoch += (size_t)changed;
    for (size_t k = s->n_phases; k-- > 0 && s->phases[k].epoch == epoch;)
        if (!strcmp(s->phases[k].recipe, recipe)) {
            *out = k;
            return ST_OK;
        }
    *out = s->n_phases;
    return add_phase(s, w, epoch, e);
}

/* One more sample of an etch, after Welford (1962); sd and u hold sums of squares until `settle`. */
static void add_value(etch *x, double v, double u) {
    double off = x->n ? v - x->value : 0.0;
    x->n++;
    x->value = x->n == 1 ? v : x->value + off / (double)x->n;
    x->sd += off * (v - x->value);
    x->u += u * u;
}

static void settle(series *s) {
    for (size_t i = 0; i < s->n; i++) {
        etch *x = &s->etches[i];
        x->sd = x->n > 1 ? sqrt(x->sd / ((double)x->n - 1.0)) : MISSING;
        x->u = x->n ? sqrt(x->u / (double)x->n) : MISSING;
        s->phases[x->phase].last = i;
    }
}

static status take(const history_row *r, const history_notes *notes, size_t *note, wanted *w, series *s, error *e) {
    status st = read_row(r, w, e);
    if (st != ST_OK) return st;
    if (w->only && strcmp(r->lot, w->only) != 0 && !(w->recipe && !strcmp(w->recipe, w->only))) return ST_OK;
    etch *x = same_etch(s, r, w);
    int counts = !r->excluded[0] && isfinite(w->value);
    w->knows_quantity |= isfinite(w->value);
    w->knows_setting |= isfinite(w->x);
    if (x) {
        if (x->row->etched_at[0]) x->label = x->row->etched_at;
        if (counts && x->n) s->n_joined++;
    } else {
        size_t phase = 0;
        st = find_phase(s, w, r, notes, note, &phase, e);
        if (st != ST_OK) return st;
        x = &s->etches[s->n++];
        *x = (etch){ .row = r, .value = MISSING, .setting = MISSING, .label = r->sample, .phase = phase };
    }
    if (r->excluded[0]) s->n_excluded++;
    else if (isnan(w->value)) s->n_missing++;
    else add_value(x, w->value, w->u);
    if (isfinite(w->x) && counts) {
        x->n_setting++;
        x->setting = x->n_setting == 1 ? w->x : x->setting + (w->x - x->setting) / (double)x->n_setting;
    }
    return ST_OK;
}

/* The names of the newest row: what a misspelt one may have meant. */
static status unknown(const history_list *l, const char *name, error *e) {
    char *names[256];
    size_t n = 0;
    row_member m;
    const char *at = l->n ? l->rows[l->n - 1].row_json : "";
    while (n < 256 && row_next(&at, &m) == 1) {
        names[n] = mem_text_n(m.name, m.name_n);
        n += names[n] != NULL;
    }
    const char *near = json_nearest(name, (const char *const *)names, n);
    status st = fail(e, ST_BAD_INPUT, "no etch of the history has a number '%s'%s%s%s; 'sward history --csv' shows the columns",
                     name, near ? ", did you mean '" : "", near ? near : "", near ? "'?" : "");
    for (size_t i = 0; i < n; i++) free(names[i]);
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

status series_make(const history_list *l, const history_notes *notes, const series_question *q, series *out, error *e) {
    series s = { 0 };
    wanted w = { .quantity = q->quantity, .setting = q->setting, .phase_by = q->phase_by ? q->phase_by : SERIES_RECIPE,
                 .only = q->only };
    size_t note = 0;
    s.etches = mem_array(l->n, sizeof *s.etches);
    w.quantity_u = with_tail(q->quantity, "_u");
    w.quantity_lo = with_tail(q->quantity, "_lo");
    w.quantity_hi = with_tail(q->quantity, "_hi");
    int complete = s.etches && w.quantity_u && w.quantity_lo && w.quantity_hi;
    status st = complete ? add_unit(q->quantity, &s, e) : NO_MEMORY(e, "a series");
    for (size_t i = 0; st == ST_OK && i < l->n; i++)
        if (!superseded(l, i)) st = take(&l->rows[i], notes, &note, &w, &s, e);
    if (st == ST_OK && !w.knows_quantity && !(q->only && !s.n)) st = unknown(l, q->quantity, e);
    if (st == ST_OK && q->setting && !w.knows_setting) st = unknown(l, q->setting, e);
    char *owned[] = { w.quantity_u, w.quantity_lo, w.quantity_hi, w.recipe, w.last_recipe };
    for (size_t i = 0; i < sizeof owned / sizeof owned[0]; i++) free(owned[i]);
    settle(&s);
    if (st == ST_OK) *out = s;
    else series_free(&s);
    return st;
}

size_t series_of_phase(const series *s, size_t phase, double *value, size_t *at) {
    size_t n = 0;
    for (size_t i = s->phases[phase].first; i <= s->phases[phase].last; i++) {
        if (s->etches[i].phase != phase) continue;
        value[n] = s->etches[i].value;
        at[n++] = i;
    }
    return n;
}

sentence_subject series_subject(const series *s, const char *name, double min, double max) {
    return (sentence_subject){ name, s->unit, s->digits, min, max };
}
