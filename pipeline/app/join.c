/* Pooling: figures in nm are weighted with their features; what varies from field to field averages out, the method's
 * and the pixel size's parts are common to a sitting and do not (JCGM 100, correlated inputs). */
#include "app/join.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "app/cache.h"
#include "app/planning.h"
#include "base/mem.h"
#include "base/number.h"
#include "io/file.h"
#include "io/json.h"
#include "judge/history.h"
#include "metrics/plan.h"
#include "metrics/pool.h"

void sample_group_free(sample_group *g) {
    char *owned[] = { g->name, g->lot, g->wafer, g->position };
    for (size_t i = 0; i < sizeof owned / sizeof owned[0]; i++) free(owned[i]);
    free(g->members);
    *g = (sample_group){ 0 };
}

void joined_free(joined *j) {
    sample_row_free(&j->row);
    free(j->json);
    free(j->files);
    prediction_free(&j->prediction);
    *j = (joined){ 0 };
}

static int fit(const examined *x) { return x->readable && !x->reasons; }

/* Whether member i counts: fit, and not the same bytes as a fit one before it in this sample. */
static int enters(const sample_group *g, const examined *all, size_t i) {
    const examined *x = &all[g->members[i]];
    if (!fit(x)) return 0;
    if (!(x->flags & FLAG(DUPLICATE))) return 1;
    for (size_t k = 0; k < i; k++) {
        const examined *before = &all[g->members[k]];
        if (fit(before) && !strcmp(before->hash, x->hash)) return 0;
    }
    return 1;
}

static status pool(const sample_group *g, const examined *all, figure out[QUANTITIES], flags *seen, size_t *n_used,
                   error *e) {
    measured *m = mem_array(g->n_members, sizeof *m);
    double *weight = mem_array(g->n_members, sizeof *weight);
    status st = m && weight ? ST_OK : NO_MEMORY(e, "a sample");
    for (int q = 0; st == ST_OK && q < QUANTITIES; q++) {
        size_t n = 0;
        double u_px_rel = 0.0, count_u_rel = 0.0, features = 0.0;
        for (size_t i = 0; i < g->n_members; i++) {
            const examined *x = &all[g->members[i]];
            if (!enters(g, all, i)) continue;
            m[n] = x->figures[q].m;
            weight[n++] = (double)x->row.n_features;
            features += (double)x->row.n_features;
            count_u_rel += x->count_u_rel * (double)x->row.n_features;
            if (x->px_u_rel > u_px_rel) u_px_rel = x->px_u_rel;
            *seen |= x->flags;
        }
        *n_used = n;
        pooled joint;
        pool_parts(m, weight, n, &joint); /* nowhere measured: stays missing */
        out[q] = (figure){ .m = joint.m, .u_within = joint.within, .u_between = joint.between,
                           .dof_sampling = joint.dof, .micrographs = joint.micrographs };
        figure_detection(&out[q], q, features > 0.0 ? count_u_rel / features : 0.0);
        out[q].u_px = fabs(quantity_table[q].power * out[q].m.value) * u_px_rel;
    }
    free(weight);
    free(m);
    return st;
}

/* "anisotropy": is a stretch of the sample's micrographs the texture's, or the imaging's? */
static status anisotropy_json(const sample_group *g, const examined *all, textbuf *out, error *e) {
    const double clear_z = 3.0, disagree_p = 0.01;
    measured *m = mem_array(2 * g->n_members, sizeof *m), *angle = m ? m + g->n_members : NULL;
    if (!m) return NO_MEMORY(e, "a sample");
    size_t n = 0;
    for (size_t i = 0; i < g->n_members; i++) {
        if (!enters(g, all, i)) continue;
        m[n] = all[g->members[i]].figures[QUANTITY_STRETCH].m;
        angle[n++] = all[g->members[i]].figures[QUANTITY_ANGLE].m;
    }
    pooled_stretch s;
    pool_stretch(m, angle, n, &s);
    free(m);
    const char *found = s.micrographs < 2 ? "unknown" : s.p < disagree_p ? "imaging" : s.z > clear_z ? "texture" : "none";
    text_addf(out, "\"anisotropy\": {\"found\": \"%s\", \"stretch\": ", found);
    json_number(out, s.stretch, 4);
    text_add(out, ", \"angle_deg\": ");
    json_number(out, s.angle_deg, 4);
    text_add(out, ", \"z\": ");
    json_number(out, s.z, 3);
    text_add(out, ", \"agreement_p\": ");
    json_number(out, s.p, 3);
    text_addf(out, ", \"micrographs\": %zu}", s.micrographs);
    return ST_OK;
}

static status set_texts(sample_row *r, const sample_group *g, error *e) {
    r->sample = mem_text(g->name);
    r->lot = mem_text(g->lot ? g->lot : "");
    r->wafer = mem_text(g->wafer ? g->wafer : "");
    r->position = mem_text(g->position ? g->position : "");
    r->etched_at = mem_text(g->etched_at);
    return r->sample && r->lot && r->wafer && r->position && r->etched_at ? ST_OK : NO_MEMORY(e, "a sample");
}

static void set_figures(sample_row *r, const figure *f, const figure *spacing) {
    for (int q = 0; q < QUANTITIES; q++) {
        if (quantity_table[q].in_sample == NOT_IN_SAMPLE) continue;
        double *v = (double *)(void *)((char *)r + quantity_table[q].in_sample);
        v[0] = f[q].m.value;
        v[1] = figure_u(&f[q]);
    }
    r->spacing_nm = spacing->m.value;
    r->spacing_nm_u = figure_u(spacing);
}

static void clear_prediction(sample_row *r) {
    double *missing[] = { &r->height_nm, &r->height_nm_u, &r->aspect, &r->area_ratio, &r->weighted_reflectance,
                          &r->weighted_reflectance_lo, &r->weighted_reflectance_hi, &r->current_loss_mA_cm2,
                          &r->polished_reflectance, &r->coated_reflectance, &r->subwavelength_share };
    for (size_t i = 0; i < sizeof missing / sizeof missing[0]; i++) *missing[i] = MISSING;
}

/* Areas of all cells of the used micrographs, only wanted when heights follow the size of the cell. */
static status gather_cells(const sample_group *g, const examined *all, double **areas, size_t *n, error *e) {
    size_t total = 0;
    for (size_t i = 0; i < g->n_members; i++) total += all[g->members[i]].n_cells;
    *areas = mem_array(total, sizeof **areas);
    if (!*areas) return NO_MEMORY(e, "the cells of a sample");
    for (size_t i = 0; i < g->n_members; i++) {
        const examined *x = &all[g->members[i]];
        if (!enters(g, all, i)) continue;
        memcpy(*areas + *n, x->cell_area_nm2, x->n_cells * sizeof **areas);
        *n += x->n_cells;
    }
    return ST_OK;
}

/* Everything predict() is given; the basis stands for the set-up and for the link, calibrated or not. */
static status prediction_key(const surface_input *in, const char *basis, char key[65], error *e) {
    textbuf t = { 0 };
    char cells[65] = "";
    if (in->n_cells) sha256_hex(in->cell_area_nm2, in->n_cells * sizeof *in->cell_area_nm2, cells);
    cache_layout_text(&t);
    text_addf(&t, "%s|%.17g|%.17g|%zu|%.17g|%.17g|%d|%s|", basis, in->spacing_nm.value, in->spacing_nm.u, in->spacing_nm.n,
              in->height_nm.value, in->height_nm.u, in->pores, cells);
    status st = text_check(&t, "a key", e);
    if (st == ST_OK) sha256_hex(t.s, t.n, key);
    text_free(&t);
    return st;
}

/* predict(), or what it said to the same question before. */
static status predict_or_recall(const surface_input *in, const join_options *o, prediction *out, error *e) {
    char key[65];
    if (!o->cache) return predict(in, &o->setup->optics, out, e);
    status st = prediction_key(in, o->basis, key, e);
    if (st != ST_OK || (!o->fresh && cache_get_prediction(o->cache, key, out))) return st;
    st = predict(in, &o->setup->optics, out, e);
    return st == ST_OK ? cache_put_prediction(o->cache, key, out, e) : st;
}

static status link_and_predict(const sample_group *g, const examined *all, const join_options *o, const figure *spacing,
                               joined *out, flags *f, error *e) {
    sample_row *r = &out->row;
    const protocol *p = o->protocol;
    const setup *s = o->setup;
    surface_input in = { .link = p->link, .measured = s->measured.n ? &s->measured : NULL };
    double *areas = NULL;
    height_source source = HEIGHT_DEFAULT;
    const calibration *c = s->calibrated.link.n_samples && !in.measured ? &s->calibrated.link : NULL;
    in.spacing_nm = (quantity){ spacing->m.value, figure_u(spacing), spacing->m.n };
    for (size_t i = 0; i < g->n_members; i++)
        if (enters(g, all, i)) in.pores = all[g->members[i]].relief == RELIEF_PORE;

    status st = calibrated_height(c, g->height_nm, &in.link, in.spacing_nm, &in.height_nm, &source, e);
    if (st == ST_OK && fabs(in.link.height_by_size) > 0.0) {
        st = gather_cells(g, all, &areas, &in.n_cells, e);
        in.cell_area_nm2 = areas;
    }
    if (st == ST_OK) st = predict_or_recall(&in, o, &out->prediction, e);
    free(areas);
    if (st != ST_OK) return fail_within(e, st, g->name);
    if (c) {
        calibration_apply(c, source == HEIGHT_CALIBRATED, in.spacing_nm, in.pores,
                          linkfile_age_days(&s->calibrated, g->etched_at), &out->prediction);
        if (calibration_outside(c, in.spacing_nm, in.pores)) *f |= FLAG(OUTSIDE_CALIBRATION);
    }

    const prediction *d = &out->prediction;
    r->height_nm = in.height_nm.value;
    r->height_nm_u = in.height_nm.u;
    r->height_source = mem_text(height_source_name(source));
    r->optics_model = mem_text(d->model);
    r->aspect = d->aspect;
    r->area_ratio = d->area_ratio;
    r->weighted_reflectance = d->weighted;
    r->weighted_reflectance_lo = d->weighted_lo;
    r->weighted_reflectance_hi = d->weighted_hi;
    r->current_loss_mA_cm2 = d->current_loss_mA_cm2;
    r->polished_reflectance = d->polished;
    r->coated_reflectance = d->coated;
    r->subwavelength_share = d->shares.none;
    if (height_is_assumed(source)) *f |= FLAG(HEIGHT_ASSUMED);
    if (d->refused) *f |= FLAG(BEYOND_MODEL);
    else if (d->shares.in_ambient > 0.0 && strcmp(d->model, "graded") == 0) *f |= FLAG(DIFFRACTS);
    return r->height_source && r->optics_model ? ST_OK : NO_MEMORY(e, "a sample");
}

/* The reading of a target's quantity: by column name, with the parts that vary from run to run apart. */
static reading read_quantity(const sample_row *r, const char *name, const figure *f, const figure *spacing,
                             const prediction *d) {
    reading out = { MISSING, MISSING, MISSING, MISSING, MISSING, "", 5 };
    for (size_t c = 0; c < n_sample_columns; c++) {
        const column *col = &sample_columns[c];
        if (col->kind == COL_TEXT || strcmp(col->name, name)) continue;
        const char *base = (const char *)r + col->offset;
        out.unit = !strcmp(col->unit, "1") ? "" : col->unit;
        out.digits = col->digits ? col->digits : 6;
        out.value = col->kind == COL_NUMBER ? *(const double *)(const void *)base
                                            : (double)*(const long *)(const void *)base;
        if (col->kind != COL_NUMBER) out.u = out.u_repeat = 0.0; /* a count */
        size_t n = strlen(name);
        if (c + 1 < n_sample_columns && !strncmp(sample_columns[c + 1].name, name, n) &&
            !strcmp(sample_columns[c + 1].name + n, "_u"))
            out.u = *(const double *)(const void *)((const char *)r + sample_columns[c + 1].offset);
        if (!strcmp(name, "spacing_nm")) out.u_repeat = spacing->m.u_sampling;
        for (int q = 0; q < QUANTITIES; q++)
            if (quantity_table[q].in_sample == col->offset) out.u_repeat = f[q].m.u_sampling;
        if (!strcmp(name, "weighted_reflectance")) {
            out.lo = r->weighted_reflectance_lo;
            out.hi = r->weighted_reflectance_hi;
            out.u = (out.hi - out.lo) / 4.0;
            out.u_repeat = d->u_height;
        }
        break;
    }
    return out;
}

/* The reading of a target on a column of the sheet: its cell, and the column beside it that ends in _u. */
static reading read_sheet(const sample_group *g, const target *t) {
    reading out = { MISSING, MISSING, MISSING, MISSING, MISSING, "", 6 };
    if (g->extra && t->sheet_at && !number_parse(g->extra[t->sheet_at - 1], &out.value)) out.value = MISSING;
    if (g->extra && t->sheet_u_at && !number_parse(g->extra[t->sheet_u_at - 1], &out.u)) out.u = MISSING;
    out.u_repeat = out.u;
    return out;
}

static int is_predicted(const char *name) {
    static const char *const names[] = { "weighted_reflectance", "weighted_reflectance_lo", "weighted_reflectance_hi",
                                         "current_loss_mA_cm2", "area_ratio", "aspect", "subwavelength_share", "height_nm" };
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++)
        if (!strcmp(name, names[i])) return 1;
    return 0;
}

/* What would settle an undecided verdict: more micrographs, and how many, or what else. */
static long advise(const target *t, const reading *r, const figure *f, const figure *spacing, textbuf *advice) {
    if (t->of_sheet) {
        text_add(advice, isfinite(r->u) ? "more micrographs cannot settle it: it comes from the sheet; measure it again, with a smaller uncertainty"
                                        : "give its standard uncertainty in a column of the sheet named like it with _u behind");
        return PLAN_NEVER;
    }
    if (is_predicted(t->quantity)) {
        text_add(advice, "more micrographs hardly settle it: its uncertainty is that of height, shape and model; measure the height on a "
                         "cross-section, or the reflectance itself");
        return PLAN_NEVER;
    }
    return plan_verdict(t, f, spacing, advice);
}

static status judge_sample(const sample_group *g, const protocol *p, const figure *f, const figure *spacing, joined *out, textbuf *members,
                           error *e) {
    sample_row *r = &out->row;
    textbuf reasons = { 0 };
    verdict *all = mem_array(p->n_targets, sizeof *all);
    status st = all ? ST_OK : NO_MEMORY(e, "the verdicts");
    text_add(members, "\"judgements\": [");
    for (size_t i = 0; st == ST_OK && i < p->n_targets; i++) {
        const target *t = &p->targets[i];
        reading reading_i = t->of_sheet ? read_sheet(g, t) : read_quantity(r, t->quantity, f, spacing, &out->prediction);
        judgement j;
        judge(t, &reading_i, &j);
        all[i] = j.verdict;
        r->extra[i] = mem_text(verdict_word(j.verdict));
        if (!r->extra[i]) st = NO_MEMORY(e, "a verdict");
        textbuf advice = { 0 };
        long more = j.verdict == VERDICT_UNDECIDED ? advise(t, &reading_i, f, spacing, &advice) : PLAN_NEVER;
        if (text_check(&advice, "a plan", e) != ST_OK) st = ST_NO_MEMORY;
        text_addf(&reasons, "%s%s%s%s", i ? "; " : "", j.sentence, advice.n ? ": " : "", advice.n ? advice.s : "");
        text_addf(members, "%s{\"quantity\": ", i ? ", " : "");
        json_string(members, t->quantity);
        text_addf(members, ", \"rule\": \"%s\", \"at_least\": ", decision_word(t->rule));
        json_number(members, t->rule == DECIDE_SIMPLE ? MISSING : t->rule == DECIDE_PROBABILITY ? t->at_least : 0.95, 6);
        text_addf(members, ", \"verdict\": \"%s\", \"conformance_probability\": ", verdict_word(j.verdict));
        json_number(members, j.conformance_probability, 4);
        text_add(members, ", \"sentence\": ");
        json_string(members, j.sentence);
        text_add(members, ", \"advice\": ");
        json_string(members, advice.n ? advice.s : NULL);
        text_add(members, ", \"more_micrographs\": ");
        json_number(members, more > 0 && more < PLAN_MOST ? (double)more : MISSING, 6);
        text_add(members, "}");
        text_free(&advice);
    }
    text_add(members, "]");
    if (st == ST_OK) {
        out->verdict = p->n_targets ? verdict_worst(all, p->n_targets) : VERDICT_NO_TARGET;
        r->verdict = mem_text(verdict_word(out->verdict));
        r->verdict_reasons = mem_text(reasons.s ? reasons.s : "");
        if (!r->verdict || !r->verdict_reasons) st = NO_MEMORY(e, "a verdict");
    }
    if (st == ST_OK) st = text_check(&reasons, "the verdicts", e);
    text_free(&reasons);
    free(all);
    return st;
}

static void prediction_json(const prediction *d, textbuf *members) {
    const struct { const char *name; double v; } numbers[] = {
        { "orders_none", d->shares.none },           { "orders_in_silicon", d->shares.in_substrate },
        { "orders_in_air", d->shares.in_ambient },   { "u_height", d->u_height },
        { "u_shape", d->u_shape },                   { "u_tip", d->u_tip },
        { "u_coverage", d->u_coverage },             { "u_spread", d->u_spread },
        { "u_spacing", d->u_spacing },
        { "u_mixing", d->u_mixing },                 { "u_model", d->u_model },
        { "model_bias", d->model_bias },
    };
    text_add(members, "\"prediction\": {");
    for (size_t i = 0; i < sizeof numbers / sizeof numbers[0]; i++) {
        text_addf(members, "\"%s\": ", numbers[i].name);
        json_number(members, numbers[i].v, 4);
        text_add(members, ", ");
    }
    text_addf(members, "\"slabs\": %zu, \"note\": ", d->slabs);
    json_string(members, d->note);
    text_add(members, "}");
}

static status fingerprint(const sample_group *g, const examined *all, size_t n_extra, const char *basis, char out[65], error *e) {
    textbuf t = { 0 };
    text_addf(&t, "%s|%s|%s|%.17g|%.17g", basis, g->name, g->etched_at, g->height_nm.value, g->height_nm.u);
    for (size_t k = 0; g->extra && k < n_extra; k++) text_addf(&t, "|%s", g->extra[k]); /* the history keeps these too */
    for (size_t i = 0; i < g->n_members; i++) {
        const examined *x = &all[g->members[i]];
        text_addf(&t, "|%s|%d|%.17g", x->hash, enters(g, all, i), x->row.px_nm);
    }
    status st = text_check(&t, "a fingerprint", e);
    if (st == ST_OK) sha256_hex(t.s, t.n, out);
    text_free(&t);
    return st;
}

/* What the history keeps of the micrographs. */
static status note_files(const sample_group *g, const examined *all, joined *out, error *e) {
    out->files = mem_array(g->n_members, sizeof *out->files);
    if (!out->files) return NO_MEMORY(e, "a sample");
    for (size_t i = 0; i < g->n_members; i++) {
        const examined *x = &all[g->members[i]];
        out->files[out->n_files++] = (history_micrograph){ .file = x->row.file, .sha256 = x->hash, .px_source = x->row.px_source,
                                                           .px_nm = x->row.px_nm, .used = enters(g, all, i) };
    }
    return ST_OK;
}

status join_sample(const sample_group *g, const examined *all, const join_options *o, joined *out, error *e) {
    const protocol *p = o->protocol;
    size_t n_extra = o->n_extra;
    figure f[QUANTITIES];
    flags seen = 0;
    size_t n_used = 0;
    char words[1024];
    textbuf members = { 0 };
    joined made = { 0 };
    sample_row *r = &made.row;
    clear_prediction(r);
    r->n_images = (long)g->n_members;

    status st = pool(g, all, f, &seen, &n_used, e);
    figure spacing = f[p->spacing == SPACING_DENSITY ? QUANTITY_HEX : QUANTITY_ACF];
    if (st == ST_OK) st = set_texts(r, g, e);
    r->n_extra = p->n_targets + n_extra;
    r->extra = mem_array(r->n_extra, sizeof *r->extra);
    if (st == ST_OK && !r->extra) st = NO_MEMORY(e, "a sample");
    for (size_t k = 0; st == ST_OK && k < n_extra; k++) {
        r->extra[p->n_targets + k] = mem_text(g->extra ? g->extra[k] : "");
        if (!r->extra[p->n_targets + k]) st = NO_MEMORY(e, "a sample");
    }
    if (st != ST_OK) goto done;
    r->n_used = (long)n_used;
    set_figures(r, f, &spacing);
    seen &= ~(FLAG(DUPLICATE) | FLAG(MANY_PAGES) | FLAG(COLOUR));
    if (n_used == 1) seen |= FLAG(ONE_MICROGRAPH);
    if (g->time_from_file) seen |= FLAG(TIME_FROM_FILE);

    /* A measured profile predicts without any spacing; everything else needs one. */
    if (n_used && (isfinite(spacing.m.value) || o->setup->measured.n)) {
        error why = { 0 };
        st = link_and_predict(g, all, o, &spacing, &made, &seen, &why);
        if (st == ST_OK) {
            prediction_json(&made.prediction, &members);
        } else if (st == ST_BAD_INPUT || st == ST_NO_RESULT) { /* one sample's trouble does not end the run */
            made.failed = 1;
            st = ST_OK;
            text_add(&members, "\"prediction\": null, \"prediction_error\": ");
            json_string(&members, why.text);
        } else {
            fail(e, st, "%s", why.text);
        }
    } else {
        text_add(&members, "\"prediction\": null");
    }
    text_add(&members, ", ");
    if (st == ST_OK) {
        figures_json(f, &members);
        text_add(&members, ", ");
        plan_json(p, f, &spacing, &members);
        text_add(&members, ", ");
        st = anisotropy_json(g, all, &members, e);
        text_add(&members, ", ");
    }
    if (st == ST_OK) {
        st = judge_sample(g, p, f, &spacing, &made, &members, e);
    }
    if (st == ST_OK) st = note_files(g, all, &made, e);
    if (st == ST_OK) st = fingerprint(g, all, n_extra, o->basis, made.fingerprint, e);
    if (st == ST_OK) {
        r->flags = mem_text(flags_text(seen, words, sizeof words));
        if (!r->height_source) r->height_source = mem_text("");
        if (!r->optics_model) r->optics_model = mem_text("");
        if (!r->flags || !r->height_source || !r->optics_model) st = NO_MEMORY(e, "a sample");
    }
    if (st == ST_OK) st = text_check(&members, "a sample", e);
    if (st == ST_OK) {
        made.json = members.s;
        members = (textbuf){ 0 };
        *out = made;
        made = (joined){ 0 };
    }
done:
    text_free(&members);
    joined_free(&made);
    return st;
}
