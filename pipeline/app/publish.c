#include "app/publish.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include "app/manifest.h"
#include "app/scenarios.h"
#include "app/summary.h"
#include "app/wafers.h"
#include "base/limits.h"
#include "base/mem.h"
#include "base/number.h"
#include "io/file.h"
#include "io/json.h"
#include "io/memo.h"
#include "report/results.h"

/* The arrays that `results` borrows. */
typedef struct {
    image_row *images;
    const char **image_json, **overlays, **overlay_marks, **stems;
    sample_row *samples;
    const char **sample_json, **extra_names;
    char **verdict_names;
    size_t n_extra;
    spectrum_row *spectra;
    size_t n_spectra;
    const char **target_quantity;
    double *target_min, *target_max;
    double *reference_nm, *polished, *coated;
    double *x_mm, *y_mm; /* [n_groups] */
    size_t n_reference;
    char *cache;
    textbuf manifest, summary, note, wafers, window, angles;
} material_for;

static void material_free_all(material_for *m, size_t n_targets) {
    free(m->images);
    free(m->image_json);
    free(m->overlays);
    free(m->overlay_marks);
    free(m->cache);
    free(m->stems);
    free(m->samples);
    free(m->sample_json);
    free(m->extra_names);
    for (size_t i = 0; m->verdict_names && i < n_targets; i++) free(m->verdict_names[i]);
    free(m->verdict_names);
    free(m->spectra);
    free(m->target_quantity);
    free(m->target_min);
    free(m->target_max);
    free(m->reference_nm);
    free(m->polished);
    free(m->coated);
    free(m->x_mm);
    free(m->y_mm);
    text_free(&m->manifest);
    text_free(&m->summary);
    text_free(&m->note);
    text_free(&m->wafers);
    text_free(&m->window);
    text_free(&m->angles);
}

static status gather_rows(const publication *p, material_for *m, error *e) {
    size_t n = p->folder->n, k = p->n_groups;
    m->images = mem_array(n, sizeof *m->images);
    m->image_json = mem_array(n, sizeof *m->image_json);
    m->overlays = mem_array(n, sizeof *m->overlays);
    m->overlay_marks = mem_array(n, sizeof *m->overlay_marks);
    m->stems = mem_array(n, sizeof *m->stems);
    m->cache = path_join(p->stage->out, "cache");
    m->samples = mem_array(k, sizeof *m->samples);
    m->sample_json = mem_array(k, sizeof *m->sample_json);
    if (!m->images || !m->image_json || !m->overlays || !m->overlay_marks || !m->cache || !m->stems || !m->samples || !m->sample_json)
        return NO_MEMORY(e, "the results");
    for (size_t i = 0; i < n; i++) { /* shallow copies: the rows stay with their owners */
        m->images[i] = p->images[i].row;
        m->image_json[i] = p->images[i].json;
        m->overlays[i] = p->images[i].overlay;
        m->overlay_marks[i] = p->images[i].outputs[OUTPUT_OVERLAY];
        m->stems[i] = p->images[i].readable ? p->folder->stems[i] : NULL;
    }
    for (size_t i = 0; i < k; i++) {
        m->samples[i] = p->samples[i].row;
        m->sample_json[i] = p->samples[i].json;
    }
    return ST_OK;
}

static const named_place *place_of(const protocol *p, const char *position) {
    for (size_t i = 0; position && i < p->n_places; i++)
        if (!strcmp(p->places[i].position, position)) return &p->places[i];
    return NULL;
}

/* Places on the wafer, from the first micrograph of the sample whose sheet row says one, else from its position's name. */
static status gather_places(const publication *p, material_for *m, error *e) {
    m->x_mm = mem_array(p->n_groups, sizeof(double));
    m->y_mm = mem_array(p->n_groups, sizeof(double));
    if (!m->x_mm || !m->y_mm) return NO_MEMORY(e, "the places on the wafer");
    for (size_t k = 0; k < p->n_groups; k++) {
        m->x_mm[k] = m->y_mm[k] = MISSING;
        for (size_t i = 0; i < p->groups[k].n_members && !isfinite(m->x_mm[k]); i++) {
            const sheet_row *row = p->folder->rows[p->groups[k].members[i]];
            if (!row || !isfinite(row->y_mm)) continue;
            m->x_mm[k] = row->x_mm;
            m->y_mm[k] = row->y_mm;
        }
        const named_place *named = isfinite(m->x_mm[k]) ? NULL : place_of(p->protocol, p->groups[k].position);
        if (named) {
            m->x_mm[k] = named->x_mm;
            m->y_mm[k] = named->y_mm;
        }
    }
    return ST_OK;
}

static status gather_targets(const publication *p, material_for *m, error *e) {
    size_t n = p->protocol->n_targets, extra = p->folder->sheet.n_extra;
    m->target_quantity = mem_array(n, sizeof *m->target_quantity);
    m->target_min = mem_array(n, sizeof *m->target_min);
    m->target_max = mem_array(n, sizeof *m->target_max);
    m->verdict_names = mem_array(n, sizeof *m->verdict_names);
    m->extra_names = mem_array(n + extra, sizeof *m->extra_names);
    if (!m->target_quantity || !m->target_min || !m->target_max || !m->verdict_names || !m->extra_names)
        return NO_MEMORY(e, "the targets");
    for (size_t i = 0; i < n; i++) {
        const target *t = &p->protocol->targets[i];
        textbuf name = { 0 };
        m->target_quantity[i] = t->quantity;
        m->target_min[i] = t->min;
        m->target_max[i] = t->max;
        text_addf(&name, "verdict_%s", t->quantity);
        if (text_check(&name, "the targets", e) != ST_OK) return ST_NO_MEMORY;
        m->extra_names[i] = m->verdict_names[i] = name.s;
    }
    for (size_t i = 0; i < extra; i++) m->extra_names[n + i] = p->folder->sheet.extra_names[i];
    m->n_extra = n + extra;
    return ST_OK;
}

static status gather_spectra(const publication *p, material_for *m, error *e) {
    static char mean[] = "mean", s[] = "s", pp[] = "p", diffuse[] = "diffuse";
    char *pol = p->protocol->hemispherical           ? diffuse
                : p->protocol->polarization == POL_S ? s
                : p->protocol->polarization == POL_P ? pp
                                                     : mean;
    double angle = p->protocol->hemispherical ? MISSING : p->protocol->angle_deg;
    for (size_t k = 0; k < p->n_groups; k++) m->n_spectra += p->samples[k].prediction.n;
    m->spectra = mem_array(m->n_spectra, sizeof *m->spectra);
    if (!m->spectra) return NO_MEMORY(e, "the spectra");
    size_t at = 0;
    for (size_t k = 0; k < p->n_groups; k++) {
        const prediction *d = &p->samples[k].prediction;
        for (size_t i = 0; i < d->n; i++)
            m->spectra[at++] = (spectrum_row){ p->samples[k].row.sample, d->wavelength_nm[i], angle, pol, d->R[i],
                                               d->R_lo[i],               d->R_hi[i] };
    }
    return ST_OK;
}

/* The flat references as spectra, for the page's chart. */
static status gather_references(const publication *p, material_for *m, error *e) {
    const optics_setup *o = &p->setup->optics;
    size_t n = (size_t)((o->band_hi_nm - o->band_lo_nm) / 5.0) + 1;
    m->reference_nm = mem_array(n, sizeof(double));
    m->polished = mem_array(n, sizeof(double));
    m->coated = mem_array(n, sizeof(double));
    if (!m->reference_nm || !m->polished || !m->coated) return NO_MEMORY(e, "the references");
    for (size_t i = 0; i < n; i++) m->reference_nm[i] = o->band_lo_nm + 5.0 * (double)i;
    layer nitride = { o->nitride, 75.0 };
    stack flat = { .ambient = o->ambient, .front = o->front, .substrate = o->substrate, .mixing = o->mixing };
    stack film = flat;
    film.coatings = &nitride;
    film.n_coatings = 1;
    m->n_reference = n;
    status st = reflectance(&flat, &o->reflect, m->reference_nm, n, m->polished, NULL, e);
    return st == ST_OK ? reflectance(&film, &o->reflect, m->reference_nm, n, m->coated, NULL, e) : st;
}

/* All a scenario may read: the rows, which relief, and by the basis protocol and materials. */
static status scenario_key(const publication *p, const material_for *m, int as_pores, char key[65], error *e) {
    textbuf t = { 0 };
    text_addf(&t, "%s|%d|", p->basis, as_pores);
    for (size_t k = 0; k < p->n_groups; k++) {
        const char *row = (const char *)&m->samples[k];
        for (size_t c = 0; c < n_sample_columns; c++) {
            const column *col = &sample_columns[c];
            if (col->kind == COL_NUMBER) text_add_n(&t, row + col->offset, sizeof(double));
        }
        text_addf(&t, "|%s|%s|", m->samples[k].sample, m->samples[k].verdict);
    }
    status st = text_check(&t, "a key", e);
    if (st == ST_OK) sha256_hex(t.s, t.n, key);
    text_free(&t);
    return st;
}

static int recall_scenario(const char *cache, const char *key, const char *kind, textbuf *out) {
    char *bytes = NULL;
    size_t n = 0;
    if (!memo_get(cache, key, kind, &bytes, &n)) return 0;
    text_add_n(out, bytes, n);
    free(bytes);
    return 1;
}

/* Pores or hillocks, as most of the measured micrographs. Both maps are many predictions: remembered like those of samples. */
static status gather_scenarios(const publication *p, material_for *m, error *e) {
    static const char window[] = "window-1", angles[] = "angles-1";
    size_t pores = 0, seen = 0;
    char key[65];
    for (size_t i = 0; i < p->folder->n; i++) {
        seen += (size_t)p->images[i].readable;
        pores += p->images[i].readable && p->images[i].relief == RELIEF_PORE;
    }
    int as_pores = 2 * pores > seen, fresh = p->options->fresh;
    status st = scenario_key(p, m, as_pores, key, e);
    if (st == ST_OK && (fresh || !recall_scenario(m->cache, key, window, &m->window))) {
        st = scenarios_window(m->samples, p->n_groups, as_pores, p->protocol, p->setup, &m->window, e);
        if (st == ST_OK) st = memo_put(m->cache, key, window, &m->window, e);
    }
    if (st == ST_OK && (fresh || !recall_scenario(m->cache, key, angles, &m->angles))) {
        st = scenarios_angles(m->samples, p->n_groups, as_pores, p->protocol, p->setup, &m->angles, e);
        if (st == ST_OK) st = memo_put(m->cache, key, angles, &m->angles, e);
    }
    return st;
}

static void add_member(textbuf *t, const char *name, const char *value) {
    text_addf(t, "\"%s\": ", name);
    json_string(t, value);
}

static status write_run_json(const publication *p, error *e) {
    struct timespec now;
    textbuf t = { 0 };
    clock_gettime(CLOCK_MONOTONIC, &now);
    double total = (double)now.tv_sec + 1e-9 * (double)now.tv_nsec - p->started;
    text_add(&t, "{");
    add_member(&t, "run_at", p->run_at);
    text_add(&t, ", ");
    add_member(&t, "folder", p->folder->root);
    text_add(&t, ", ");
    add_member(&t, "protocol_file", p->protocol->path);
    text_add(&t, ", ");
    add_member(&t, "history", p->ledger->path);
    text_addf(&t, ", \"history_added\": %zu, \"jobs\": %d", p->ledger->added, p->options->jobs);
    static const char *const names[] = { "prepare_s", "measure_s", "predict_s" };
    for (size_t i = 0; i < 3; i++) {
        text_addf(&t, ", \"%s\": ", names[i]);
        json_number(&t, p->seconds[i], 4);
    }
    text_add(&t, ", \"total_s\": ");
    json_number(&t, total, 4);
    text_add(&t, "}\n");
    status st = text_check(&t, "run.json", e);
    char *path = path_join(p->stage->folder, "run.json");
    if (!path) st = NO_MEMORY(e, "a path");
    if (st == ST_OK) st = file_write(path, t.s, t.n, e);
    free(path);
    text_free(&t);
    return st;
}

static status write_all(const publication *p, material_for *m, error *e) {
    results r = { .images = m->images, .n_images = p->folder->n, .image_json = m->image_json,
                  .samples = m->samples, .n_samples = p->n_groups, .sample_json = m->sample_json,
                  .sample_extra = m->extra_names, .n_sample_extra = m->n_extra,
                  .spectra = m->spectra, .n_spectra = m->n_spectra,
                  .manifest_json = m->manifest.s, .wafers_json = m->wafers.s, .series_json = p->ledger->series,
                  .window_json = m->window.s, .angles_json = m->angles.s, .summary = m->summary.s, .title = p->protocol->name,
                  .target_quantity = m->target_quantity, .target_min = m->target_min, .target_max = m->target_max,
                  .n_targets = p->protocol->n_targets, .history_json = p->ledger->json,
                  .reference_wavelength_nm = m->reference_nm, .polished_R = m->polished, .coated_R = m->coated,
                  .n_reference = m->n_reference, .overlay_paths = m->overlays,
                  .overlay_marks = m->overlay_marks, .picture_cache = m->cache, .history_note = m->note.s,
                  .image_stems = m->stems,
                  .sample_x_mm = m->x_mm, .sample_y_mm = m->y_mm };
    status st = results_write(&r, p->stage->folder, e);
    if (st == ST_OK && p->page) st = report_write(&r, p->stage->folder, e);
    return st;
}

static status print_results(const publication *p, error *e) {
    char *path = path_join(p->stage->out, "results.json"), *bytes = NULL;
    size_t n = 0;
    status st = path ? file_read(path, LIMIT_FILE_BYTES, &bytes, &n, e) : NO_MEMORY(e, "a path");
    if (st == ST_OK) fwrite(bytes, 1, n, stdout); /* main checks stdout */
    free(bytes);
    free(path);
    return st;
}

static status print_outcome(const publication *p, const material_for *m, error *e) {
    textbuf coloured = { 0 };
    if (p->options->json) return print_results(p, e);
    if (p->options->quiet) return ST_OK;
    if (colour_wanted()) summary_colour(m->summary.s, &coloured);
    fputs(coloured.s && !coloured.failed ? coloured.s : m->summary.s, stdout);
    text_free(&coloured);
    fprintf(stdout, "%s%s\n", p->ledger->process ? p->ledger->process : "", m->note.s);
    if (p->page) fprintf(stdout, "Report: %s/report.html\n", p->stage->out);
    else fprintf(stdout, "Tables: %s\n", p->stage->out);
    return ST_OK;
}

status publish(const publication *p, error *e) {
    material_for m = { 0 };
    status st = gather_rows(p, &m, e);
    if (st == ST_OK) st = gather_places(p, &m, e);
    if (st == ST_OK) st = gather_targets(p, &m, e);
    if (st == ST_OK) st = gather_spectra(p, &m, e);
    if (st == ST_OK) st = gather_references(p, &m, e);
    if (st == ST_OK) st = gather_scenarios(p, &m, e);
    if (st == ST_OK) {
        manifest_json(p, &m.manifest);
        summary_text(p, &m.summary);
        st = wafers_describe(m.samples, m.x_mm, m.y_mm, p->n_groups, &m.wafers, &m.summary, e);
        if (p->ledger->stays_with_output)
            text_add(&m.note, "The history lies with this output (history.sqlite); name one place for it in the protocol "
                              "(\"history\") or with --history so that later runs add to it.");
        else
            text_add(&m.note, "The history is kept where the protocol or --history says.");
        if (st == ST_OK) st = text_check(&m.manifest, "the manifest", e);
    }
    if (st == ST_OK) st = text_check(&m.summary, "the summary", e);
    if (st == ST_OK) st = write_all(p, &m, e);
    if (st == ST_OK) st = write_run_json(p, e);
    if (st == ST_OK) st = stage_commit(p->stage, e);
    if (st == ST_OK) st = print_outcome(p, &m, e);
    material_free_all(&m, p->protocol->n_targets);
    return st;
}
