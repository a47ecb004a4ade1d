/* `sward history`: the ledger, one row per sample and run, in the order of the etches, and what can be asked of it. */
#include <cjson/cJSON.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include "app/command.h"
#include "app/history_verbs.h"
#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/column.h"
#include "io/file.h"
#include "io/json.h"

#define DEFAULT_LEDGER "sward-out/history.sqlite"
enum { OPT_HISTORY = 1, OPT_SINCE, OPT_LOT, OPT_JSON, OPT_CSV, OPT_RULES, OPT_BASELINE, OPT_CENTRE, OPT_SIGMA, OPT_SUBGROUPS, OPT_MIN, OPT_MAX,
       OPT_TARGET, OPT_REASON, OPT_BY, OPT_AT, OPT_TEXT, OPT_KIND, OPT_FOLDER, OPT_PHASE, OPT_FROM, OPT_TO, OPT_VALUE };

/* clang-format off */
static const struct argp_option history_options[] = {
    { "history",   OPT_HISTORY,   "FILE", 0, "the ledger (default: " DEFAULT_LEDGER ")", 0 },
    { "since",     OPT_SINCE,     "T",    0, "only etches at or after this time (ISO 8601)", 0 },
    { "lot",       OPT_LOT,       "L",    0, "only this lot", 0 },
    { "json",      OPT_JSON,      NULL,   0, "JSON; the list: rows as in samples.csv with run_at and excluded", 0 },
    { "csv",       OPT_CSV,       NULL,   0, "the list as CSV", 0 },
    { "rules",     OPT_RULES,     "LIST", 0, "chart: pattern tests, joined by commas: zone (default, with spread), iso, nelson, limits, none, or beyond, 2of3, 4of5, run7, run8, run9, trend6, trend7, alternate14, calm15, apart8; spread and ewma are charts of their own", 0 },
    { "phase",     OPT_PHASE,     "COLUMN", 0, "column of the sheet whose values are recipes: another value is another phase (default recipe)", 0 },
    { "baseline",  OPT_BASELINE,  "N",    0, "chart: the first N etches of a phase set its limits, 0 = all (default 20)", 0 },
    { "baseline-from", OPT_FROM,  "T",    0, "chart: instead, the etches at or after this time (ISO 8601) set them", 0 },
    { "baseline-to",   OPT_TO,    "T",    0, "chart: and those up to this time", 0 },
    { "centre",    OPT_CENTRE,    "V",    0, "chart: centre line, instead of the baseline's", 0 },
    { "sigma",     OPT_SIGMA,     "V",    0, "chart: standard deviation, instead of the baseline's", 0 },
    { "subgroups", OPT_SUBGROUPS, NULL,   0, "chart: the samples of an etch are a subgroup; limits from the scatter inside the etches", 0 },
    { "min",       OPT_MIN,       "V",    0, "chart: least value of the target, for capability", 0 },
    { "max",       OPT_MAX,       "V",    0, "chart: largest value of the target, for capability", 0 },
    { "target",    OPT_TARGET,    "V",    0, "setting: the value to reach", 0 },
    { "value",     OPT_VALUE,     "V",    0, "setting: a setting, to say what is expected there", 0 },
    { "reason",    OPT_REASON,    "TEXT", 0, "exclude, include: why", 0 },
    { "by",        OPT_BY,        "INITIALS", 0, "exclude, include, note: who", 0 },
    { "at",        OPT_AT,        "TIME", 0, "note: when it happened; exclude, include: the time of etching, where a sample has several", 0 },
    { "text",      OPT_TEXT,      "TEXT", 0, "note: what happened", 0 },
    { "kind",      OPT_KIND,      "KIND", 0, "note: change (default; starts a new phase of every chart) or remark", 0 },
    { "folder",    OPT_FOLDER,    "DIR",  0, "verify: where the micrographs are now (default: where they were)", 0 },
    { 0 } };
/* clang-format on */

typedef struct {
    const char *path, *since, *lot, *rules;
    const char *reason, *by, *at, *text, *kind, *folder, *from, *to;
    const char *words[4]; /* the verb and what follows */
    size_t n_words;
    history_question ask;
    int json, csv;
} request;

static void number_option(const char *name, const char *arg, double *out, struct argp_state *state) {
    if (!number_parse(arg, out)) argp_error(state, "--%s: '%s' is no number", name, arg);
}

static void chart_option(int key, const char *arg, history_question *ask, struct argp_state *state) {
    double v = 0.0;
    switch (key) {
    case OPT_BASELINE:
        number_option("baseline", arg, &v, state);
        if (v < 0.0 || v > 1e6) argp_error(state, "--baseline: '%s' is no number of etches", arg);
        ask->control.options.baseline = (size_t)v;
        break;
    case OPT_CENTRE:
        number_option("centre", arg, &ask->control.options.centre, state);
        break;
    case OPT_SIGMA:
        number_option("sigma", arg, &ask->control.options.sigma, state);
        break;
    case OPT_MIN:
        number_option("min", arg, &ask->control.min, state);
        break;
    case OPT_MAX:
        number_option("max", arg, &ask->control.max, state);
        break;
    case OPT_TARGET:
        number_option("target", arg, &ask->target, state);
        break;
    case OPT_VALUE:
        number_option("value", arg, &ask->value, state);
        break;
    default:
        ask->control.subgroups = 1;
        break;
    }
}

static error_t history_option(int key, char *arg, struct argp_state *state) {
    request *q = state->input;
    switch (key) {
    case OPT_HISTORY: q->path = arg; break;
    case OPT_SINCE: q->since = arg; break;
    case OPT_LOT: q->lot = arg; break;
    case OPT_RULES: q->rules = arg; break;
    case OPT_REASON: q->reason = arg; break;
    case OPT_BY: q->by = arg; break;
    case OPT_AT: q->at = arg; break;
    case OPT_TEXT: q->text = arg; break;
    case OPT_KIND: q->kind = arg; break;
    case OPT_FOLDER: q->folder = arg; break;
    case OPT_PHASE: q->ask.control.phase_by = arg; break;
    case OPT_FROM: q->from = arg; break;
    case OPT_TO: q->to = arg; break;
    case OPT_JSON:
        q->json = 1;
        q->csv = 0;
        break;
    case OPT_CSV:
        q->csv = 1;
        q->json = 0;
        break;
    case OPT_BASELINE:
    case OPT_CENTRE:
    case OPT_SIGMA:
    case OPT_MIN:
    case OPT_MAX:
    case OPT_TARGET:
    case OPT_VALUE:
    case OPT_SUBGROUPS:
        chart_option(key, arg, &q->ask, state);
        break;
    case ARGP_KEY_ARG:
        if (q->n_words == 4) argp_error(state, "too many words: '%s'", arg);
        else q->words[q->n_words++] = arg;
        break;
    default:
        return ARGP_ERR_UNKNOWN;
    }
    return 0;
}

const struct argp history_argp = {
    history_options,
    history_option,
    "\nchart QUANTITY\nchange A B [QUANTITY]\nsetting COLUMN [QUANTITY]\nexclude SAMPLE\ninclude SAMPLE\nnote\nnotes\nverify DIR",
    "The ledger of every sample measured so far, one row per sample and run. Without a verb: the list.\v"
    "chart draws the control chart of a column of samples.csv over the etches: limits from the first etches of each phase, "
    "alarms in words, drift per etch and per day, and Ppk when the target is named. A note of kind change and another value of "
    "the sheet's column recipe start a new phase. change compares two lots or recipes (Welch): is the difference real? setting "
    "puts a straight line through a numeric column of the sheet and says which setting brings the quantity to --target, never "
    "outside the data. exclude takes an etch out of all of these with a reason and initials, include takes it back; nothing is "
    "ever deleted. note records what happened to the process, notes lists it. verify computes the digests of the micrographs "
    "behind the results in DIR again and exits 3 when one is gone or differs. QUANTITY is spacing_nm where not said.",
    NULL,
    NULL,
    NULL
};

/* The rows as a table: every key of any row_json is a column, in the order of first appearance, run_at and
 * excluded behind etched_at. Used for CSV only; JSON passes the stored objects through. */
typedef struct {
    char **names; /* [n], room for more */
    size_t n, room;
} name_list;

typedef struct {
    const char **cells; /* [n columns], NULL where the row lacks it */
    cJSON *object;      /* owns the text */
    char *numbers;      /* [n columns][NUMBER_TEXT] */
} csv_row;

static size_t name_index(const name_list *l, const char *name) {
    size_t i = 0;
    while (i < l->n && strcmp(l->names[i], name) != 0) i++;
    return i;
}

static status name_add(name_list *l, const char *name, error *e) {
    if (name_index(l, name) < l->n) return ST_OK;
    if (l->n == l->room) {
        char **grown = mem_grow(l->names, l->room + 64, sizeof *grown);
        if (!grown) return NO_MEMORY(e, "the history");
        l->names = grown;
        l->room += 64;
    }
    l->names[l->n] = mem_text(name);
    return l->names[l->n++] ? ST_OK : NO_MEMORY(e, "the history");
}

static status collect(const history_list *l, csv_row *rows, name_list *names, error *e) {
    status st = name_add(names, "sample", e);
    if (st == ST_OK) st = name_add(names, "etched_at", e);
    if (st == ST_OK) st = name_add(names, "run_at", e);
    if (st == ST_OK) st = name_add(names, "excluded", e);
    for (size_t i = 0; i < l->n && st == ST_OK; i++) {
        const cJSON *child;
        rows[i].object = cJSON_Parse(l->rows[i].row_json);
        if (!rows[i].object)
            return fail(e, ST_IO, "the ledger holds a damaged row of the sample '%s'", l->rows[i].sample);
        cJSON_ArrayForEach(child, rows[i].object) if (st == ST_OK) st = name_add(names, child->string, e);
    }
    return st;
}

static status fill(const history_row *r, const name_list *names, csv_row *row, error *e) {
    const cJSON *child;
    row->cells = mem_array(names->n, sizeof *row->cells);
    row->numbers = mem_array(names->n, NUMBER_TEXT);
    if (!row->cells || !row->numbers) return NO_MEMORY(e, "the history");
    cJSON_ArrayForEach(child, row->object) {
        size_t k = name_index(names, child->string);
        if (cJSON_IsString(child))
            row->cells[k] = child->valuestring;
        else if (cJSON_IsNumber(child))
            row->cells[k] = number_text(child->valuedouble, 15, row->numbers + k * NUMBER_TEXT);
    }
    row->cells[name_index(names, "sample")] = r->sample;
    row->cells[name_index(names, "etched_at")] = r->etched_at;
    row->cells[name_index(names, "run_at")] = r->run_at;
    row->cells[name_index(names, "excluded")] = r->excluded;
    return ST_OK;
}

static const char *csv_cell_of(const void *row, size_t k) { return ((const csv_row *)row)->cells[k]; }

static status print_csv(const history_list *l, textbuf *out, error *e) {
    name_list names = { 0 };
    csv_row *rows = mem_array(l->n, sizeof *rows);
    status st = rows ? collect(l, rows, &names, e) : NO_MEMORY(e, "the history");
    for (size_t i = 0; i < l->n && st == ST_OK; i++) st = fill(&l->rows[i], &names, &rows[i], e);
    if (st == ST_OK) {
        table_view view = { NULL,    0,          rows, l->n, sizeof *rows, (const char *const *)names.names,
                            names.n, csv_cell_of };
        table_to_csv(&view, out);
    }
    for (size_t i = 0; rows && i < l->n; i++) {
        cJSON_Delete(rows[i].object);
        free(rows[i].cells);
        free(rows[i].numbers);
    }
    for (size_t k = 0; k < names.n; k++) free(names.names[k]);
    free(names.names);
    free(rows);
    return st;
}

/* The stored objects, byte for byte, with run_at and excluded in front. */
static void print_json(const history_list *l, textbuf *out) {
    text_add(out, "[");
    for (size_t i = 0; i < l->n; i++) {
        const char *body = l->rows[i].row_json + strspn(l->rows[i].row_json, " \t\r\n");
        text_addf(out, "%s{\"run_at\": ", i ? ",\n  " : "\n  ");
        json_string(out, l->rows[i].run_at);
        text_add(out, ", \"excluded\": ");
        json_string(out, l->rows[i].excluded[0] ? l->rows[i].excluded : NULL);
        if (*body == '{') body++;
        text_addf(out, "%s%s", body[strspn(body, " ")] == '}' ? "" : ", ", body);
    }
    text_add(out, "\n]\n");
}

/* A column of the table for people: as wide as its widest cell. */
static size_t width_of(const char *header, size_t longest) {
    size_t n = strlen(header);
    return n > longest ? n : longest;
}

static void print_text(const history_list *l, textbuf *out) {
    char a[NUMBER_TEXT], b[NUMBER_TEXT], c[NUMBER_TEXT], d[NUMBER_TEXT], f[NUMBER_TEXT];
    size_t sample = 0, lot = 0;
    for (size_t i = 0; i < l->n; i++) {
        sample = width_of(l->rows[i].sample, sample);
        lot = width_of(l->rows[i].lot, lot);
    }
    sample = width_of("sample", sample);
    lot = width_of("lot", lot);
    text_addf(out, "%-20s  %-*s  %-*s  %11s  %6s  %13s  %9s  %6s  %-12s  %s\n", "etched_at", (int)sample,
              "sample", (int)lot, "lot", "spacing/nm", "+-", "density/um-2", "D50/nm", "R/%", "verdict",
              "run_at");
    for (size_t i = 0; i < l->n; i++) {
        const history_row *r = &l->rows[i];
        text_addf(out, "%-20s  %-*s  %-*s  %11s  %6s  %13s  %9s  %6s  %-12s  %s%s%s\n", r->etched_at, (int)sample,
                  r->sample, (int)lot, r->lot, number_text(r->spacing_nm, 5, a),
                  number_text(r->spacing_nm_u, 3, b), number_text(r->density_per_um2, 5, c),
                  number_text(r->size_d50_nm, 5, d), number_percent(r->weighted_reflectance, 4, f),
                  r->verdict, r->run_at, r->excluded[0] ? "  excluded: " : "", r->excluded);
    }
    text_addf(out, "%zu %s\n", l->n, l->n == 1 ? "row" : "rows");
}

static void print_notes(const history_notes *l, textbuf *out) {
    for (size_t i = 0; i < l->n; i++) {
        const history_note *n = &l->notes[i];
        text_addf(out, "%-25s  %-6s  %s%s%s%s\n", n->at, n->kind, n->text, n->initials[0] ? " (" : "", n->initials,
                  n->initials[0] ? ")" : "");
    }
    text_addf(out, "%zu %s\n", l->n, l->n == 1 ? "note" : "notes");
}

/* ---- verbs ---- */

typedef enum { VERB_LIST, VERB_CHART, VERB_CHANGE, VERB_SETTING, VERB_EXCLUDE, VERB_INCLUDE, VERB_NOTE, VERB_NOTES, VERB_VERIFY, VERBS } verb;
static const struct {
    const char *name;
    size_t least, most; /* words behind it */
    int writes;
    const char *form;
} verbs[VERBS] = { { "", 0, 0, 0, "" },
                   { "chart", 0, 1, 0, "chart QUANTITY" },
                   { "change", 2, 3, 0, "change A B [QUANTITY]" },
                   { "setting", 1, 2, 0, "setting COLUMN [QUANTITY]" },
                   { "exclude", 1, 1, 1, "exclude SAMPLE --reason TEXT --by INITIALS" },
                   { "include", 1, 1, 1, "include SAMPLE --reason TEXT --by INITIALS" },
                   { "note", 0, 0, 1, "note --at TIME --text TEXT" },
                   { "notes", 0, 0, 0, "notes" },
                   { "verify", 1, 1, 0, "verify DIR" } };

static status find_verb(const request *q, verb *out, error *e) {
    const char *names[VERBS];
    *out = VERB_LIST;
    if (!q->n_words) return ST_OK;
    for (int i = 0; i < VERBS; i++) names[i] = verbs[i].name;
    for (int i = 1; i < VERBS; i++)
        if (!strcmp(q->words[0], names[i])) *out = (verb)i;
    if (*out == VERB_LIST) {
        const char *near = json_nearest(q->words[0], names + 1, VERBS - 1);
        return fail(e, ST_BAD_INPUT, "'%s' is no verb%s%s%s; the ledger is named with --history", q->words[0],
                    near ? ", did you mean '" : "", near ? near : "", near ? "'?" : "");
    }
    size_t behind = q->n_words - 1;
    return behind >= verbs[*out].least && behind <= verbs[*out].most
               ? ST_OK
               : fail(e, ST_BAD_INPUT, "say 'sward history %s'", verbs[*out].form);
}

static void utc_now(char out[32]) {
    time_t t = time(NULL);
    struct tm parts;
    out[0] = '\0';
    if (gmtime_r(&t, &parts)) strftime(out, 32, "%Y-%m-%dT%H:%M:%SZ", &parts);
}

static status write_verb(history *h, verb v, const request *q, textbuf *out, error *e) {
    char now[32];
    utc_now(now);
    if (v == VERB_NOTE) {
        history_note n = { .at = q->at ? q->at : now, .text = q->text, .kind = q->kind ? q->kind : "change", .initials = q->by };
        status st = history_note_add(h, &n, e);
        if (st == ST_OK) text_addf(out, "noted at %s (%s): %s\n", n.at, n.kind, n.text);
        return st;
    }
    status st = history_exclude(h, q->words[1], q->at, v == VERB_EXCLUDE, q->reason, q->by, now, e);
    if (st == ST_OK)
        text_addf(out, "%s is %s charts and comparisons; its rows stay in the ledger\n", q->words[1],
                  v == VERB_EXCLUDE ? "excluded from" : "back in");
    return st;
}

static status list_verb(const request *q, const history_list *rows, textbuf *out, error *e) {
    if (q->json) print_json(rows, out);
    else if (q->csv) return print_csv(rows, out, e);
    else print_text(rows, out);
    return ST_OK;
}

static status read_verb(history *h, verb v, request *q, textbuf *out, error *e) {
    history_list rows = { 0 };
    history_notes notes = { 0 };
    const char *last = q->n_words ? q->words[q->n_words - 1] : "";
    control_question *c = &q->ask.control;
    status st = q->rules ? chart_rules_parse(q->rules, &c->options.rules, e) : ST_OK;
    if (st == ST_OK && q->from) st = history_day(h, q->from, "baseline-from", &c->baseline_from, e);
    if (st == ST_OK && q->to) st = history_day(h, q->to, "baseline-to", &c->baseline_to, e);
    if (st == ST_OK) st = history_read(h, q->since, q->lot, &rows, e);
    if (st == ST_OK) st = history_notes_read(h, &notes, e);
    c->rows = &rows;
    c->notes = &notes;
    q->ask.json = q->json;
    c->quantity = q->n_words == verbs[v].most + 1 ? last : "spacing_nm";
    if (st != ST_OK) goto done;
    switch (v) {
    case VERB_CHART: st = history_chart(&q->ask, out, e); break;
    case VERB_CHANGE: st = history_change(&q->ask, q->words[1], q->words[2], out, e); break;
    case VERB_SETTING: st = history_setting(&q->ask, q->words[1], out, e); break;
    case VERB_NOTES: print_notes(&notes, out); break;
    default: st = list_verb(q, &rows, out, e); break;
    }
done:
    history_list_free(&rows);
    history_notes_free(&notes);
    return st;
}

static int verify(const request *q) {
    textbuf out = { 0 };
    error e = { ST_OK, "" };
    size_t unlike = 0;
    if (history_verify(q->words[1], q->folder, &out, &unlike, &e) != ST_OK) {
        text_free(&out);
        return command_failed("history", &e);
    }
    int code = command_print("history", &out);
    return code == EXIT_DONE && unlike ? EXIT_PARTIAL : code;
}

int cmd_history(int argc, char **argv) {
    request q = { .path = DEFAULT_LEDGER,
                  .ask = { .control = control_defaults(NULL, NULL), .target = MISSING, .value = MISSING } };
    history *h = NULL;
    textbuf out = { 0 };
    error e = { ST_OK, "" };
    verb v = VERB_LIST;
    argp_parse(&history_argp, argc, argv, 0, NULL, &q);
    status st = find_verb(&q, &v, &e);
    if (st == ST_OK && v == VERB_VERIFY) return verify(&q);
    if (st == ST_OK && !file_exists(q.path))
        st = fail(&e, ST_BAD_INPUT,
                  "there is no ledger '%s' yet; 'sward run' starts one, or name another with --history", q.path);
    if (st == ST_OK) st = history_open(q.path, !verbs[v].writes, &h, &e);
    if (st == ST_OK) st = verbs[v].writes ? write_verb(h, v, &q, &out, &e) : read_verb(h, v, &q, &out, &e);
    history_close(h);
    if (st == ST_OK) return command_print("history", &out);
    text_free(&out);
    return command_failed("history", &e);
}
