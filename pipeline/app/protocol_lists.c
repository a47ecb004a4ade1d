/* The lists of a protocol that people write for their own line: targets, half-widths wanted, places on the wafer, pattern tests of
 * the charts. Reading and checking as in protocol.c. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "app/planning.h"
#include "app/protocol_priv.h"
#include "base/limits.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "judge/chart.h"
#include "report/rows.h"

static void targets_free(protocol *p) {
    for (size_t i = 0; i < p->n_targets; i++) free(p->targets[i].quantity);
    free(p->targets);
    p->targets = NULL;
    p->n_targets = 0;
}

static void goals_free(protocol *p) {
    for (size_t i = 0; i < p->n_goals; i++) free(p->goals[i].quantity);
    free(p->goals);
    p->goals = NULL;
    p->n_goals = 0;
}

static void places_free(protocol *p) {
    for (size_t i = 0; i < p->n_places; i++) free(p->places[i].position);
    free(p->places);
    p->places = NULL;
    p->n_places = 0;
}

void protocol_lists_free(protocol *p) {
    targets_free(p);
    goals_free(p);
    places_free(p);
}

/* A target stands on a measured figure of samples.csv or on a column of the sheet. A name that is nearly one of the first is taken
 * for a slip unless the target says "sheet"; the others are looked up when the sheet is known. */
static status target_column(const reader *r, const cJSON *node, target *t) {
    const char **words = mem_array(n_sample_columns, sizeof *words);
    size_t n = 0;
    int known = 0, is_text = 0;
    char near[120];
    if (!words) return NO_MEMORY(r->e, "the protocol");
    for (size_t i = 0; i < n_sample_columns; i++) {
        int same = !strcmp(sample_columns[i].name, node->string);
        is_text |= same && sample_columns[i].kind == COL_TEXT;
        if (sample_columns[i].kind == COL_TEXT) continue;
        words[n++] = sample_columns[i].name;
        known |= same;
    }
    reader_hint(node->string, words, n, near, sizeof near);
    free(words);
    if (known && !t->of_sheet) return ST_OK;
    if (t->of_sheet || (!is_text && !near[0])) {
        t->of_sheet = 1;
        return ST_OK;
    }
    return fail(r->e, ST_BAD_INPUT, "%s line %zu: targets: '%.60s' is no quantity of samples.csv%s%s", r->what, reader_line(r, node),
                node->string, near, is_text ? "; a target needs a column of numbers"
                                            : " If it is a column of the sample sheet, say \"sheet\": true in the target");
}

static status read_decision(const reader *r, const cJSON *child, const char *where, target *t) {
    static const char *const words[] = { "guard", "simple", "probability" }; /* decision */
    for (int i = 0; i < 3 && cJSON_IsString(child); i++)
        if (!strcmp(child->valuestring, words[i])) {
            t->rule = (decision)i;
            return ST_OK;
        }
    return reader_wrong(r, reader_line(r, child), where, child,
                        "the rule \"guard\" (guard band, the default), \"simple\" or \"probability\"");
}

static status read_target_part(const reader *r, const cJSON *child, const char *where, target *t) {
    static const char *const words[] = { "min", "max", "error", "rule", "at_least", "sheet" };
    size_t line = reader_line(r, child);
    const char *name = child->string;
    if (!strcmp(name, "min") || !strcmp(name, "max")) {
        if (cJSON_IsNull(child)) return ST_OK;
        if (!cJSON_IsNumber(child) || !isfinite(child->valuedouble)) return reader_wrong(r, line, where, child, "a number as limit");
        *(name[1] == 'i' ? &t->min : &t->max) = child->valuedouble;
        return ST_OK;
    }
    if (!strcmp(name, "rule")) return read_decision(r, child, where, t);
    if (!strcmp(name, "at_least")) {
        if (!cJSON_IsNumber(child) || !(child->valuedouble > 0.5 && child->valuedouble < 1.0))
            return reader_wrong(r, line, where, child, "a probability above 0.5 and below 1");
        t->at_least = child->valuedouble;
        return ST_OK;
    }
    if (!strcmp(name, "sheet")) {
        if (!cJSON_IsBool(child)) return reader_wrong(r, line, where, child, "true or false");
        t->of_sheet = cJSON_IsTrue(child) ? 1 : 0;
        return ST_OK;
    }
    if (strcmp(name, "error") != 0) return reader_unknown(r, child, where, words, sizeof words / sizeof words[0]);
    if (cJSON_IsString(child) && !strcmp(child->valuestring, "repeat")) t->error = ERROR_REPEAT;
    else if (cJSON_IsString(child) && !strcmp(child->valuestring, "full")) t->error = ERROR_FULL;
    else return reader_wrong(r, line, where, child, "\"full\" or \"repeat\"");
    return ST_OK;
}

static status read_target(const reader *r, const cJSON *node, target *t) {
    const cJSON *child;
    char where[120];
    snprintf(where, sizeof where, "targets.%.60s", node->string);
    if (!cJSON_IsObject(node)) return reader_wrong(r, reader_line(r, node), where, node, "{ \"min\": ..., \"max\": ... }");
    *t = target_defaults();
    cJSON_ArrayForEach(child, node) {
        status st = read_target_part(r, child, where, t);
        if (st != ST_OK) return st;
    }
    status st = target_column(r, node, t);
    if (st != ST_OK) return st;
    if (isnan(t->min) && isnan(t->max)) return reader_wrong(r, reader_line(r, node), where, node, "\"min\", \"max\" or both");
    if (t->min > t->max) return reader_wrong(r, reader_line(r, node), where, node, "min below max");
    t->quantity = mem_text(node->string);
    return t->quantity ? ST_OK : NO_MEMORY(r->e, "the targets");
}

status read_targets(const reader *r, const cJSON *node, const protocol_key *k) {
    const cJSON *child;
    if (!cJSON_IsObject(node)) return reader_wrong_value(r, node, k);
    targets_free(r->p);
    r->p->targets = mem_array((size_t)cJSON_GetArraySize(node), sizeof *r->p->targets);
    if (!r->p->targets) return NO_MEMORY(r->e, "the targets");
    cJSON_ArrayForEach(child, node) {
        status st = read_target(r, child, &r->p->targets[r->p->n_targets]);
        if (st != ST_OK) return st;
        r->p->n_targets++;
    }
    return ST_OK;
}

status read_goals(const reader *r, const cJSON *node, const protocol_key *k) {
    const cJSON *child;
    if (!cJSON_IsObject(node)) return reader_wrong_value(r, node, k);
    goals_free(r->p);
    r->p->goals = mem_array((size_t)cJSON_GetArraySize(node), sizeof *r->p->goals);
    if (!r->p->goals) return NO_MEMORY(r->e, "the plan");
    cJSON_ArrayForEach(child, node) {
        char where[120];
        snprintf(where, sizeof where, "plan.half_width.%.60s", child->string);
        if (!planned_quantity(child->string))
            return fail(r->e, ST_BAD_INPUT, "%s line %zu: %s is no quantity that micrographs give; take spacing_nm, density_per_um2, size_d50_nm or another of images.csv",
                        r->what, reader_line(r, child), where);
        if (!cJSON_IsNumber(child) || !(child->valuedouble > 0.0) || !isfinite(child->valuedouble))
            return reader_wrong(r, reader_line(r, child), where, child, "a half-width above 0");
        width_goal *g = &r->p->goals[r->p->n_goals];
        *g = (width_goal){ mem_text(child->string), child->valuedouble };
        if (!g->quantity) return NO_MEMORY(r->e, "the plan");
        r->p->n_goals++;
    }
    return ST_OK;
}

/* "positions": { "C": [0, 0], "E": [0, 70] } */
status read_places(const reader *r, const cJSON *node, const protocol_key *k) {
    const cJSON *child;
    if (!cJSON_IsObject(node)) return reader_wrong_value(r, node, k);
    places_free(r->p);
    r->p->places = mem_array((size_t)cJSON_GetArraySize(node), sizeof *r->p->places);
    if (!r->p->places) return NO_MEMORY(r->e, "the positions");
    cJSON_ArrayForEach(child, node) {
        char where[120];
        const cJSON *x = cJSON_GetArrayItem(child, 0), *y = cJSON_GetArrayItem(child, 1);
        snprintf(where, sizeof where, "samples.positions.%.60s", child->string);
        int good = cJSON_IsArray(child) && cJSON_GetArraySize(child) == 2 && cJSON_IsNumber(x) && cJSON_IsNumber(y) &&
                   fabs(x->valuedouble) <= 1e3 && fabs(y->valuedouble) <= 1e3;
        if (!good) return reader_wrong(r, reader_line(r, child), where, child, "[x, y] in mm from the middle of the wafer");
        named_place *p = &r->p->places[r->p->n_places];
        *p = (named_place){ mem_text(child->string), x->valuedouble, y->valuedouble };
        if (!p->position) return NO_MEMORY(r->e, "the positions");
        r->p->n_places++;
    }
    return ST_OK;
}

status read_rules(const reader *r, const cJSON *node, const protocol_key *k) {
    unsigned rules;
    error why = { ST_OK, "" };
    if (!cJSON_IsString(node)) return reader_wrong_value(r, node, k);
    if (chart_rules_parse(node->valuestring, &rules, &why) != ST_OK)
        return fail(r->e, ST_BAD_INPUT, "%s line %zu, charts.%s", r->what, reader_line(r, node), why.text);
    char *text = mem_text(node->valuestring);
    if (!text) return NO_MEMORY(r->e, "the protocol");
    free(r->p->chart_rules);
    r->p->chart_rules = text;
    return ST_OK;
}

status protocol_meet_sheet(protocol *p, char *const *names, size_t n, error *e) {
    for (size_t i = 0; i < p->n_targets; i++) {
        target *t = &p->targets[i];
        if (!t->of_sheet) continue;
        size_t name = strlen(t->quantity);
        t->sheet_at = t->sheet_u_at = 0;
        for (size_t k = 0; k < n; k++) {
            if (!strcmp(names[k], t->quantity)) t->sheet_at = k + 1;
            if (!strncmp(names[k], t->quantity, name) && !strcmp(names[k] + name, "_u")) t->sheet_u_at = k + 1;
        }
        if (t->sheet_at) continue;
        const char *near = json_nearest(t->quantity, (const char *const *)names, n);
        return fail(e, ST_BAD_INPUT, "targets: '%.60s' is neither a quantity of samples.csv nor a column of the sample sheet%s%s%s",
                    t->quantity, near ? ", did you mean '" : "", near ? near : "", near ? "'?" : "");
    }
    return ST_OK;
}
