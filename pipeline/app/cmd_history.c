/* `sward history`: the ledger, one row per sample and run, in the order of the etches, and what can be asked of it. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include "app/command.h"
#include "app/history_verbs.h"
#include "base/number.h"
#include "base/quantity.h"
#include "io/file.h"
#include "io/json.h"

#define DEFAULT_LEDGER "sward-out/history.sqlite"
enum { OPT_HISTORY = 1, OPT_SINCE, OPT_LOT, OPT_JSON, OPT_CSV, OPT_RULES, OPT_BASELINE, OPT_CENTRE, OPT_SIGMA, OPT_SUBGROUPS, OPT_MIN, OPT_MAX,
       OPT_TARGET, OPT_REASON, OPT_BY, OPT_AT, OPT_TEXT, OPT_KIND, OPT_FOLDER, OPT_PHASE, OPT_FROM, OPT_TO, OPT_VALUE, OPT_UNTIL, OPT_PROTOCOL, OPT_BEFORE, OPT_SUPERSEDED, OPT_YES };

/* clang-format off */
static const struct argp_option history_options[] = {
    { "history",   OPT_HISTORY,   "FILE", 0, "the ledger (default: " DEFAULT_LEDGER ")", 0 },
    { "since",     OPT_SINCE,     "T",    0, "only etches at or after this time (ISO 8601)", 0 },
    { "until",     OPT_UNTIL,     "T",    0, "only etches up to this time", 0 },
    { "lot",       OPT_LOT,       "L",    0, "only this lot", 0 },
    { "protocol",  OPT_PROTOCOL,  "P",    0, "only rows of this protocol, by its name or the beginning of its digest; import: the name for the rows", 0 },
    { "json",      OPT_JSON,      NULL,   0, "JSON; the list: rows as in samples.csv with run_at and excluded", 0 },
    { "csv",       OPT_CSV,       NULL,   0, "the list as CSV", 0 },
    { "rules",     OPT_RULES,     "LIST", 0, "chart: pattern tests, joined by commas: zone (default), iso, nelson, limits, none, or beyond, 2of3, 4of5, run7, run8, run9, trend6, trend7, alternate14, calm15, apart8; spread and ewma are charts of their own", 0 },
    { "phase",     OPT_PHASE,     "COLUMN", 0, "column of the sheet whose values are recipes: another value is another phase (default recipe)", 0 },
    { "baseline",  OPT_BASELINE,  "N",    0, "chart: the first N etches of a phase set its limits, 0 = all (default: its first steady stretch, 20 to 100 etches)", 0 },
    { "baseline-from", OPT_FROM,  "T",    0, "chart: instead, the etches at or after this time (ISO 8601) set them", 0 },
    { "baseline-to",   OPT_TO,    "T",    0, "chart: and those up to this time", 0 },
    { "centre",    OPT_CENTRE,    "V",    0, "chart: centre line, instead of the baseline's", 0 },
    { "sigma",     OPT_SIGMA,     "V",    0, "chart: standard deviation, instead of the baseline's", 0 },
    { "subgroups", OPT_SUBGROUPS, NULL,   0, "chart: the samples of an etch are a subgroup; limits from the scatter inside the etches", 0 },
    { "min",       OPT_MIN,       "V",    0, "chart: least value of the target, for capability", 0 },
    { "max",       OPT_MAX,       "V",    0, "chart: largest value of the target, for capability", 0 },
    { "target",    OPT_TARGET,    "V",    0, "setting: the value to reach", 0 },
    { "value",     OPT_VALUE,     "V",    0, "setting: a setting, to say what is expected there", 0 },
    { "reason",    OPT_REASON,    "TEXT", 0, "exclude, include, prune: why", 0 },
    { "by",        OPT_BY,        "INITIALS", 0, "exclude, include, prune, note: who", 0 },
    { "at",        OPT_AT,        "TIME", 0, "note: when it happened; exclude, include: the time of etching, where a sample has several", 0 },
    { "text",      OPT_TEXT,      "TEXT", 0, "note: what happened", 0 },
    { "kind",      OPT_KIND,      "KIND", 0, "note: change (default; starts a new phase of every chart) or remark", 0 },
    { "folder",    OPT_FOLDER,    "DIR",  0, "verify: where the micrographs are now (default: where they were)", 0 },
    { "before",    OPT_BEFORE,    "T",    0, "prune: rows of etches before this time", 0 },
    { "superseded", OPT_SUPERSEDED, NULL, 0, "prune: rows of which a newer run of the same etch exists", 0 },
    { "yes",       OPT_YES,       NULL,   0, "prune: delete; without it only says what would go", 0 },
    { 0 } };
/* clang-format on */

typedef struct {
    const char *path, *since, *lot, *rules;
    const char *reason, *by, *at, *text, *kind, *folder, *from, *to, *until, *protocol, *before;
    int superseded, yes;
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
        ask->control.first_etches = 1;
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
    case OPT_UNTIL: q->until = arg; break;
    case OPT_PROTOCOL: q->protocol = arg; break;
    case OPT_BEFORE: q->before = arg; break;
    case OPT_SUPERSEDED: q->superseded = 1; break;
    case OPT_YES: q->yes = 1; break;
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
    "\nchart QUANTITY\nchange A B [QUANTITY]\nsetting COLUMN [QUANTITY]\nexclude SAMPLE\ninclude SAMPLE\nnote\nnotes\nverify [DIR]\n"
    "differences [QUANTITY]\nimport FILE.csv\nprune",
    "The ledger of every sample measured so far, one row per sample and run. Without a verb: the list.\v"
    "chart draws the control chart of a column of samples.csv over the etches: limits from the first steady etches of each phase, "
    "what stands out, steps and drifts in words, alarms with the rate of false ones, and Ppk when the target is named. A note of kind change and another value of "
    "the sheet's column recipe (--phase) start a new phase. change compares two lots or recipes (Welch): is the difference real? setting "
    "puts a straight line through a numeric column of the sheet and says which setting brings the quantity to --target, and what "
    "is expected at --value, never outside the data. Both count etches, not positions. exclude takes an etch out of all of these with a reason and initials, include takes it back. "
    "note records what happened to the process, notes lists it. verify computes the digests of the micrographs "
    "behind the ledger, or behind the results in DIR, again and exits 3 when one is gone or differs. differences lists what the last run of an etch changed "
    "against the one before it: another protocol supersedes and keeps the old. import adds rows of a CSV with the columns of samples.csv, marked as imported. prune deletes rows, only "
    "by criteria and with --yes; nothing else ever does. QUANTITY is spacing_nm where not said.\n"
    "Several programs may write at once. On a network share this rests on the locks of that share: where they are not kept, "
    "let one machine write and the others read, or keep the ledger on a local disk.",
    NULL,
    NULL,
    NULL
};

static void print_notes(const history_notes *l, textbuf *out) {
    for (size_t i = 0; i < l->n; i++) {
        const history_note *n = &l->notes[i];
        text_addf(out, "%-25s  %-6s  %s%s%s%s\n", n->at, n->kind, n->text, n->initials[0] ? " (" : "", n->initials,
                  n->initials[0] ? ")" : "");
    }
    text_addf(out, "%zu %s\n", l->n, l->n == 1 ? "note" : "notes");
}

static void print_notes_json(const history_notes *l, textbuf *out) {
    text_add(out, "[");
    for (size_t i = 0; i < l->n; i++) {
        const history_note *n = &l->notes[i];
        const char *const members[][2] = { { "at", n->at }, { "kind", n->kind }, { "text", n->text }, { "initials", n->initials } };
        for (size_t k = 0; k < 4; k++) {
            text_addf(out, "%s\"%s\": ", k ? ", " : i ? ",\n  {" : "\n  {", members[k][0]);
            json_string(out, members[k][1]);
        }
        text_add(out, "}");
    }
    text_add(out, "\n]\n");
}

/* ---- verbs ---- */

typedef enum { VERB_LIST, VERB_CHART, VERB_CHANGE, VERB_SETTING, VERB_EXCLUDE, VERB_INCLUDE, VERB_NOTE, VERB_NOTES, VERB_VERIFY, VERB_DIFFERENCES, VERB_IMPORT, VERB_PRUNE, VERBS } verb;
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
                   { "verify", 0, 1, 0, "verify [DIR]" },
                   { "differences", 0, 1, 0, "differences [QUANTITY]" },
                   { "import", 1, 1, 1, "import FILE.csv" },
                   { "prune", 0, 0, 1, "prune --before T --reason TEXT --by INITIALS --yes" } };

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

static status prune(history *h, const request *q, const char *now, textbuf *out, error *e) {
    history_prunable which = { q->before, q->lot, q->protocol, q->superseded };
    size_t n = 0;
    status st = history_prune(h, &which, q->reason, q->by, now, q->yes, &n, e);
    if (st != ST_OK) return st;
    text_addf(out, "%zu %s %s", n, n == 1 ? "row" : "rows", q->yes ? "deleted; this is recorded with reason and initials\n" : "would go; ");
    if (!q->yes) text_add(out, "nothing was deleted, --yes with --reason and --by does it\n");
    return ST_OK;
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
    if (v == VERB_IMPORT) return history_import(h, q->words[1], q->protocol, now, out, e);
    if (v == VERB_PRUNE) return prune(h, q, now, out, e);
    status st = history_exclude(h, q->words[1], q->at, v == VERB_EXCLUDE, q->reason, q->by, now, e);
    if (st == ST_OK)
        text_addf(out, "%s is %s charts and comparisons; its rows stay in the ledger\n", q->words[1],
                  v == VERB_EXCLUDE ? "excluded from" : "back in");
    return st;
}

static status read_verb(history *h, verb v, request *q, textbuf *out, error *e) {
    history_list rows = { 0 };
    history_notes notes = { 0 };
    const char *last = q->n_words ? q->words[q->n_words - 1] : "";
    control_question *c = &q->ask.control;
    status st = q->rules ? chart_rules_parse(q->rules, &c->options.rules, e) : ST_OK;
    if (st == ST_OK && q->from) st = history_day(h, q->from, "baseline-from", &c->baseline_from, e);
    if (st == ST_OK && q->to) st = history_day(h, q->to, "baseline-to", &c->baseline_to, e);
    if (st == ST_OK) {
        int heads = v == VERB_NOTES || (v == VERB_LIST && !q->json && !q->csv);
        st = history_select(h, &(history_filter){ q->since, q->until, q->lot, q->protocol, heads }, &rows, e);
    }
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
    case VERB_NOTES:
        if (q->json) print_notes_json(&notes, out);
        else print_notes(&notes, out);
        break;
    case VERB_DIFFERENCES: st = history_differences(&q->ask, out, e); break;
    default: st = history_print(&rows, q->json ? FORM_JSON : q->csv ? FORM_CSV : FORM_TEXT, out, e); break;
    }
done:
    history_list_free(&rows);
    history_notes_free(&notes);
    return st;
}

/* Of a run's results, or without DIR of everything the ledger knows. */
static status verify(history *h, const request *q, textbuf *out, size_t *unlike, error *e) {
    history_filter f = { q->since, q->until, q->lot, q->protocol, 0 };
    return q->n_words > 1 ? history_verify(q->words[1], q->folder, out, unlike, e)
                          : history_verify_ledger(h, &f, q->folder, out, unlike, e);
}

int cmd_history(int argc, char **argv) {
    request q = { .path = DEFAULT_LEDGER,
                  .ask = { .control = control_defaults(NULL, NULL), .target = MISSING, .value = MISSING } };
    history *h = NULL;
    textbuf out = { 0 };
    error e = { ST_OK, "" };
    verb v = VERB_LIST;
    argp_parse(&history_argp, argc, argv, 0, NULL, &q);
    size_t unlike = 0;
    status st = find_verb(&q, &v, &e);
    int of_results = st == ST_OK && v == VERB_VERIFY && q.n_words > 1; /* needs no ledger */
    if (st == ST_OK && !of_results && v != VERB_IMPORT && !file_exists(q.path))
        st = fail(&e, ST_BAD_INPUT, "there is no ledger '%s' yet; 'sward run' starts one, or name another with --history", q.path);
    if (st == ST_OK && !of_results) st = history_open(q.path, !verbs[v].writes, &h, &e);
    if (st == ST_OK && v == VERB_VERIFY) st = verify(h, &q, &out, &unlike, &e);
    else if (st == ST_OK) st = verbs[v].writes ? write_verb(h, v, &q, &out, &e) : read_verb(h, v, &q, &out, &e);
    history_close(h);
    if (st == ST_OK) {
        int code = command_print("history", &out);
        return code == EXIT_DONE && unlike ? EXIT_PARTIAL : code;
    }
    text_free(&out);
    return command_failed("history", &e);
}
