/* The only stage that holds a micrograph's pixels; everything it needs of them is done before they are freed, so that
 * memory is bounded by the number of workers. */
#include "app/examine.h"

#include <stdlib.h>
#include <string.h>

#include "app/cache.h"
#include "base/limits.h"
#include "base/mem.h"
#include "base/quantity.h"
#include "io/file.h"
#include "io/json.h"
#include "io/load.h"
#include "io/png_write.h"
#include "metrics/sizedist.h"
#include "metrics/uncertainty.h"
#include "report/layers.h"
#include "report/overlay.h"
#include "report/results.h"

void examined_free(examined *x) {
    image_row_free(&x->row);
    free(x->detail);
    free(x->json);
    free(x->overlay);
    free(x->cell_area_nm2);
    *x = (examined){ 0 };
}

static void missing_row(image_row *r) {
    r->px_nm = r->px_u_rel = r->clipped_share = MISSING;
    r->width_px = r->height_px = r->strip_px = r->bit_depth = r->n_features = -1;
    for (int q = 0; q < QUANTITIES; q++) {
        double *v = (double *)(void *)((char *)r + quantity_table[q].in_image);
        v[0] = v[1] = MISSING;
    }
}

/* What the outcome depends on: the bytes, what the user and the files beside say of them, the measuring protocol, the names
 * of the outputs. */
static status cache_key(const char *path, const char *relative, const char *stem, const char *hash, const load_options *l,
                        const protocol *p, char key[65], error *e) {
    textbuf t = { 0 };
    const scale_standard *k = l->standard;
    cache_layout_text(&t);
    text_addf(&t, "%s|%s|%s|%.17g|%.17g|%.17g|%d|%zu|%zu|%.17g|%.17g|%.17g|", hash, relative, stem, l->px_nm_option, l->px_nm_sheet,
              l->bar_nm, l->correct_tilt, l->page, l->max_pixels, p->px_u_rel, p->window_lo_nm, p->window_hi_nm);
    if (k)
        text_addf(&t, "%s|%s|%.17g|%.17g|%.17g|%.17g|%.17g|%zu", k->name, k->date, k->px_x_nm, k->px_y_nm, k->u_rel,
                  k->nominal_px_nm, k->magnification, k->width_px);
    text_add(&t, "|");
    sidecar_text(path, &t);
    protocol_measuring_text(p, &t);
    status st = text_check(&t, "a key", e);
    if (st == ST_OK) sha256_hex(t.s, t.n, key);
    text_free(&t);
    return st;
}

static void features_text(const texture *t, double px_nm, textbuf *out, int *no_memory) {
    feature_row *rows = mem_array(t->n_found, sizeof *rows);
    if (!rows) {
        *no_memory = 1;
        return;
    }
    for (size_t i = 0; i < t->n_found; i++) {
        const feature *f = &t->features[i];
        rows[i] = (feature_row){ .feature = (long)i + 1,
                                 .x_px = f->x,
                                 .y_px = f->y,
                                 .x_nm = f->x * px_nm,
                                 .y_nm = f->y * px_nm,
                                 .cell_ecd_nm = f->cell_ecd_px * px_nm,
                                 .top_ecd_nm = f->top_ecd_px * px_nm,
                                 .feret_max_nm = f->feret_max_px * px_nm,
                                 .feret_min_nm = f->feret_min_px * px_nm,
                                 .aspect_ratio = f->feret_min_px / f->feret_max_px,
                                 .perimeter_nm = f->perimeter_px * px_nm,
                                 .circularity = sqrt(4.0 * PI * f->cell_area_px2) / f->perimeter_px,
                                 .nn_nm = f->nn_px * px_nm,
                                 .border_weight = f->weight,
                                 .n_neighbours = f->n_neighbours,
                                 .in_guard = f->in_guard };
    }
    features_csv(rows, t->n_found, out);
    free(rows);
}

/* How a unit in px prints, and by how much its numbers are multiplied. */
typedef struct {
    char *text;
    double scale;
} unit;

static unit unit_of(const char *px_unit, double px_nm) {
    static char px[] = "px", per_px[] = "1/px", px2[] = "px2", nm[] = "nm", per_nm[] = "1/nm", per_um[] = "1/um", nm2[] = "nm2",
                one[] = "1";
    int known = isfinite(px_nm);
    if (!strcmp(px_unit, "px")) return known ? (unit){ nm, px_nm } : (unit){ px, 1.0 };
    if (!strcmp(px_unit, "px2")) return known ? (unit){ nm2, px_nm * px_nm } : (unit){ px2, 1.0 };
    if (!strcmp(px_unit, "1/px")) return known ? (unit){ per_um, 1e3 / px_nm } : (unit){ per_px, 1.0 };
    if (!strcmp(px_unit, "density")) return known ? (unit){ per_nm, 1.0 / px_nm } : (unit){ per_px, 1.0 };
    return (unit){ one, 1.0 };
}

enum { DENSITY_POINTS = 101, HISTOGRAM_BINS = 200 };

/* Curves of the texture, then density and histogram of its sizes. */
static status profile_rows(const texture *t, double px_nm, profile_row *rows, size_t *n) {
    static char names[][20] = { "acf", "acf_curvature", "psd", "psd_curvature", "pair_correlation", "ripley_l" };
    static char density_name[] = "size_density", histogram_name[] = "size_histogram";
    double x[HISTOGRAM_BINS], y[HISTOGRAM_BINS];
    size_t bins = 0;
    size_summary s = { 0 };
    for (size_t c = 0; c < t->n_curves; c++) {
        const curve *from = &t->curves[c];
        unit ux = unit_of(from->x_unit, px_nm), uy = unit_of(from->y_unit, px_nm);
        size_t name = 0;
        while (name + 1 < sizeof names / sizeof names[0] && strcmp(names[name], from->name)) name++;
        for (size_t i = 0; i < from->n; i++)
            rows[(*n)++] = (profile_row){ names[name], from->points[i].x * ux.scale, ux.text, from->points[i].y * uy.scale, uy.text };
    }
    unit ux = unit_of("px", px_nm), uy = unit_of("density", px_nm);
    status st = size_summarise(t, &s, NULL);
    if (st == ST_OK) st = size_density(t, &s, x, y, DENSITY_POINTS, NULL);
    for (size_t i = 0; st == ST_OK && s.bandwidth > 0.0 && i < DENSITY_POINTS; i++)
        rows[(*n)++] = (profile_row){ density_name, x[i] * ux.scale, ux.text, y[i] * uy.scale, uy.text };
    if (st == ST_OK) st = size_histogram(t, &s, x, y, HISTOGRAM_BINS, &bins, NULL);
    for (size_t i = 0; st == ST_OK && i < bins; i++)
        rows[(*n)++] = (profile_row){ histogram_name, x[i] * ux.scale, ux.text, y[i] * uy.scale, uy.text };
    return st;
}

/* A curve over px turns into one over nm (or 1/um) where the pixel size is known. */
static void profiles_text(const texture *t, double px_nm, textbuf *out, int *no_memory) {
    size_t n = DENSITY_POINTS + HISTOGRAM_BINS, used = 0;
    for (size_t c = 0; c < t->n_curves; c++) n += t->curves[c].n;
    profile_row *rows = mem_array(n, sizeof *rows);
    if (rows && profile_rows(t, px_nm, rows, &used) == ST_OK)
        profiles_csv(rows, used, out);
    else
        *no_memory = 1;
    free(rows);
}

static const struct {
    const char *folder, *ending;
} outputs[OUTPUTS] = { { "overlays", ".png" }, { "layers", ".png" }, { "features", ".csv" }, { "profiles", ".csv" } };

/* "overlays/sub/name.png"; caller frees. */
static status output_name(int which, const char *stem, char **relative, error *e) {
    textbuf t = { 0 };
    text_addf(&t, "%s/%s%s", outputs[which].folder, stem, outputs[which].ending);
    *relative = t.s;
    return text_check(&t, "a path", e);
}

/* Into the staging folder. */
static status write_output(const stage *s, int which, const char *stem, const void *bytes, size_t n, char mark[17], error *e) {
    char *relative = NULL, *path = NULL;
    status st = output_name(which, stem, &relative, e);
    if (st == ST_OK && !(path = path_join(s->folder, relative))) st = NO_MEMORY(e, "a path");
    if (st == ST_OK) st = folder_make_parents(path, e);
    if (st == ST_OK) st = file_write(path, bytes, n, e);
    if (st == ST_OK) quick_mark(bytes, n, mark);
    free(path);
    free(relative);
    return st;
}

static status write_table(const stage *s, int which, const char *stem, const texture *t, double px_nm,
                          void (*fill)(const texture *, double, textbuf *, int *), char mark[17], error *e) {
    textbuf body = { 0 };
    int no_memory = 0;
    fill(t, px_nm, &body, &no_memory);
    status st = no_memory ? NO_MEMORY(e, outputs[which].folder) : text_check(&body, outputs[which].folder, e);
    if (st == ST_OK) st = write_output(s, which, stem, body.s ? body.s : "", body.n, mark, e);
    text_free(&body);
    return st;
}

static status write_overlay(const stage *s, const char *stem, const micrograph *m, const texture *t, char mark[17], error *e) {
    overlay_picture picture = { 0 };
    uint8_t *bytes = NULL;
    size_t n = 0;
    status st = overlay_draw(m, t, &picture, e);
    png_format format = { picture.nx, picture.ny, 1, 8, isfinite(m->px_nm) ? m->px_nm : 0.0 };
    if (st == ST_OK) st = png_encode_palette(picture.index, picture.palette, &format, &bytes, &n, e);
    if (st == ST_OK) st = write_output(s, OUTPUT_OVERLAY, stem, bytes, n, mark, e);
    free(bytes);
    overlay_free(&picture);
    return st;
}

static status write_layers(const stage *s, const char *stem, const micrograph *m, const texture *t, char mark[17], error *e) {
    uint8_t *bytes = NULL;
    size_t n = 0;
    status st = layers_encode(m, t, &bytes, &n, e);
    if (st == ST_OK) st = write_output(s, OUTPUT_LAYERS, stem, bytes, n, mark, e);
    free(bytes);
    return st;
}

static int has_mark(const char *path, const char *mark) {
    char *bytes = NULL, found[17];
    size_t n = 0;
    if (file_read(path, LIMIT_FILE_BYTES, &bytes, &n, NULL) != ST_OK) return 0;
    quick_mark(bytes, n, found);
    free(bytes);
    return !strcmp(found, mark);
}

status examine_adopt(const stage *s, const char *dir, const char *stem, const examined *x, error *e) {
    status st = ST_OK;
    for (int i = 0; st == ST_OK && i < OUTPUTS; i++) {
        char *relative = NULL, *path = NULL;
        st = output_name(i, stem, &relative, e);
        if (st == ST_OK && !(path = path_join(dir, relative))) st = NO_MEMORY(e, "a path");
        if (st == ST_OK && !has_mark(path, x->outputs[i])) st = fail(e, ST_IO, "%s: is gone or was changed by another program", path);
        if (st == ST_OK) st = stage_adopt(s, dir, relative, e);
        free(path);
        free(relative);
    }
    return st;
}

static status fill_row(examined *x, const micrograph *m, const texture *t, double px_u_rel, error *e) {
    image_row *r = &x->row;
    r->px_nm = m->px_nm;
    r->px_u_rel = isfinite(m->px_nm) ? px_u_rel : MISSING;
    r->width_px = (long)m->file_nx;
    r->height_px = (long)m->file_ny;
    r->strip_px = (long)m->strip_rows;
    r->bit_depth = m->bit_depth;
    r->n_features = (long)t->n_features;
    r->clipped_share = t->clipped_share;
    r->px_source = mem_text(m->px_source);
    r->relief = mem_text(t->relief == RELIEF_PORE ? "pore" : t->relief == RELIEF_HILLOCK ? "hillock" : "");
    if (!r->px_source || !r->relief) return NO_MEMORY(e, "a row");
    for (int q = 0; q < QUANTITIES; q++) {
        x->figures[q] = figure_in_nm(texture_figure(t, q), quantity_table[q].power, m->px_nm, px_u_rel);
        x->figures[q].dof_sampling = field_dof((double)t->n_features);
        figure_detection(&x->figures[q], q, t->count_u_rel);
        double *v = (double *)(void *)((char *)r + quantity_table[q].in_image);
        v[0] = x->figures[q].m.value;
        v[1] = figure_u(&x->figures[q]);
    }
    x->readable = 1;
    x->relief = t->relief;
    x->px_u_rel = px_u_rel;
    x->count_u_rel = t->count_u_rel;
    x->reasons = t->reasons;
    x->flags = t->flags | m->flags;
    if (!isfinite(m->px_nm)) x->reasons |= FLAG(NO_PIXEL_SIZE);
    memcpy(x->hash, m->hash, sizeof x->hash);
    memcpy(x->acquired_at, m->acquired_at, sizeof x->acquired_at);

    x->cell_area_nm2 = mem_array(t->n_found, sizeof *x->cell_area_nm2);
    if (!x->cell_area_nm2) return NO_MEMORY(e, "the cells");
    for (size_t i = 0; i < t->n_found; i++)
        if (t->features[i].weight > 0.0)
            x->cell_area_nm2[x->n_cells++] = t->features[i].cell_area_px2 * m->px_nm * m->px_nm;
    return ST_OK;
}

/* "sizes": moment means, area weighting, fit, shape, order; lengths in nm, null without a pixel size. */
static status sizes_json(const texture *t, double px_nm, textbuf *j, error *e) {
    size_summary s;
    status st = size_summarise(t, &s, e);
    if (st != ST_OK) return st;
    const struct {
        const char *name;
        double v;
    } members[] = { { "mean_1_0_nm", s.d10 * px_nm },
                    { "mean_2_0_nm", s.d20 * px_nm },
                    { "mean_3_0_nm", s.d30 * px_nm },
                    { "mean_2_1_nm", s.d21 * px_nm },
                    { "mean_3_2_nm", s.d32 * px_nm },
                    { "mean_4_3_nm", s.d43 * px_nm },
                    { "area_d10_nm", s.area_d10 * px_nm },
                    { "area_d50_nm", s.area_d50 * px_nm },
                    { "area_d90_nm", s.area_d90 * px_nm },
                    { "span", s.span },
                    { "lognormal_median_nm", s.lognormal_median * px_nm },
                    { "lognormal_gsd", s.lognormal_gsd },
                    { "lognormal_a2", s.a2 },
                    { "density_bandwidth_nm", s.bandwidth * px_nm },
                    { "histogram_bin_nm", s.bin * px_nm },
                    { "circularity", s.circularity },
                    { "aspect_ratio", s.aspect_ratio },
                    { "feret_min_nm", s.feret_min * px_nm },
                    { "feret_max_nm", s.feret_max * px_nm },
                    { "psi6", s.psi6 } };
    text_addf(j, "\"sizes\": {\"n\": %zu", s.n);
    for (size_t i = 0; i < sizeof members / sizeof members[0]; i++) {
        text_addf(j, ", \"%s\": ", members[i].name);
        json_number(j, members[i].v, 5);
    }
    text_add(j, ", \"neighbour_shares\": [");
    for (int k = 0; k < NEIGHBOUR_BINS; k++) {
        text_addf(j, "%s", k ? ", " : "");
        json_number(j, s.neighbours[k], 4);
    }
    text_add(j, "]}");
    return ST_OK;
}

static status fill_json(examined *x, const micrograph *m, const texture *t, error *e) {
    textbuf j = { 0 };
    double px = m->px_nm;
    text_add(&j, "\"detail\": ");
    json_string(&j, m->note);
    text_addf(&j, ", \"sha256\": \"%s\", ", m->hash);
    micrograph_facts_json(m, &j);
    text_add(&j, ", ");
    figures_json(x->figures, &j);
    text_add(&j, ", ");
    texture_px_json(t, &j);
    const struct {
        const char *name;
        double v;
        int digits;
    } members[] = { { "ring_z", t->ring_z, 4 },
                    { "second_spacing_nm", t->second_spacing_px * px, 5 },
                    { "smear_nm", t->smear_px * px, 4 },
                    { "smear_angle_deg", t->smear_angle_deg, 4 },
                    { "smear_z", t->smear_z, 3 },
                    { "pair_correlation_ring_nm", t->pair_ring_px * px, 5 },
                    { "pair_correlation_ring_height", t->pair_ring_height, 4 },
                    { "relief_skewness", t->relief_skew, 4 },
                    { "lognormal_anderson_darling", t->lognormal_ad, 4 } };
    for (size_t i = 0; i < sizeof members / sizeof members[0]; i++) {
        text_addf(&j, ", \"%s\": ", members[i].name);
        json_number(&j, members[i].v, members[i].digits);
    }
    text_add(&j, ", ");
    status st = sizes_json(t, px, &j, e);
    if (x->overlay) {
        text_add(&j, ", \"overlay\": ");
        json_string(&j, x->overlay);
    }
    x->json = j.s;
    x->detail = mem_text(m->note);
    if (!x->detail) return NO_MEMORY(e, "a row");
    return st == ST_OK ? text_check(&j, "a row", e) : st;
}

/* A file without a plane: the sentence is the reason. */
static status unreadable(examined *x, const error *why, error *e) {
    textbuf j = { 0 };
    x->row.reason = mem_text(why->text);
    x->detail = mem_text(why->text);
    text_add(&j, "\"detail\": ");
    json_string(&j, why->text);
    x->json = j.s;
    if (!x->row.reason || !x->detail) return NO_MEMORY(e, "a row");
    return text_check(&j, "a row", e);
}

load_options examine_loading(const examine_options *o, double sheet_px_nm, double sheet_bar_nm) {
    const protocol *p = o->protocol;
    load_options load = load_defaults();
    double pixels = 1e6 * p->max_megapixels, fit = 1e6 * p->max_memory_mb / LIMIT_BYTES_PER_PIXEL;
    load.px_nm_option = o->px_nm_option;
    load.px_nm_sheet = sheet_px_nm;
    load.bar_nm = isfinite(sheet_bar_nm) ? sheet_bar_nm : o->bar_nm_option;
    load.standard = o->standard;
    load.correct_tilt = !o->keep_tilt && !p->keep_tilt;
    load.page = isfinite(p->page) ? (size_t)p->page : 0;
    load.max_pixels = (size_t)(fit < pixels ? fit : pixels);
    load.max_bytes = (size_t)(1e6 * p->max_file_mb);
    return load;
}

int examine_keeps_out(const protocol *p, double px_nm) {
    return px_nm < p->window_lo_nm || px_nm > p->window_hi_nm;
}

/* Decodes, measures, fills the row and writes the outputs. A micrograph that cannot be measured is `unreadable`. */
static status measure(const char *bytes, size_t n, const char *path, const char *stem, const load_options *load,
                      const examine_options *o, examined *out, error *e) {
    micrograph m = { 0 };
    texture t = { 0 };
    error why = { 0 };
    status st = load_bytes((const uint8_t *)bytes, n, path, load, &m, &why);
    int kept_out = st == ST_OK && examine_keeps_out(o->protocol, m.px_nm);
    const stage *s = kept_out ? NULL : o->stage;
    if (kept_out) {
        t = texture_empty();
        t.clipped_share = m.clipped_low + m.clipped_high;
        t.reasons = FLAG(PX_WINDOW);
    } else if (st == ST_OK) {
        plane p = { m.px, m.nx, m.ny, m.bit_depth, m.clipped_low, m.clipped_high, m.masked };
        st = measure_plane(&p, &o->protocol->measure, &t, &why);
    }
    if (st != ST_OK) {
        st = unreadable(out, &why, e);
        goto done;
    }
    if (s) st = output_name(OUTPUT_OVERLAY, stem, &out->overlay, e);
    if (st == ST_OK)
        st = fill_row(out, &m, &t, isfinite(o->protocol->px_u_rel) ? o->protocol->px_u_rel : m.px_u_rel, e);
    if (st == ST_OK) st = fill_json(out, &m, &t, e);
    if (kept_out) out->row.n_features = -1;
    if (st == ST_OK && s) st = write_overlay(s, stem, &m, &t, out->outputs[OUTPUT_OVERLAY], e);
    if (st == ST_OK && s) st = write_layers(s, stem, &m, &t, out->outputs[OUTPUT_LAYERS], e);
    if (st == ST_OK && s) st = write_table(s, OUTPUT_FEATURES, stem, &t, m.px_nm, features_text, out->outputs[OUTPUT_FEATURES], e);
    if (st == ST_OK && s) st = write_table(s, OUTPUT_PROFILES, stem, &t, m.px_nm, profiles_text, out->outputs[OUTPUT_PROFILES], e);
done:
    texture_free(&t);
    micrograph_free(&m);
    return st;
}

status examine(const char *path, const char *relative, const char *stem, double sheet_px_nm, double sheet_bar_nm,
               const examine_options *o, examined *out, error *e) {
    char *bytes = NULL, *cache = NULL, hash[65], key[65] = "";
    size_t n = 0;
    error why = { 0 };
    load_options load = examine_loading(o, sheet_px_nm, sheet_bar_nm);

    missing_row(&out->row);
    out->row.file = mem_text(relative);
    status st = out->row.file ? ST_OK : NO_MEMORY(e, "a row");
    if (st == ST_OK && file_read(path, load.max_bytes, &bytes, &n, &why) != ST_OK) {
        st = unreadable(out, &why, e);
        goto done;
    }
    if (st == ST_OK && o->stage) {
        sha256_hex(bytes, n, hash);
        cache = path_join(o->stage->out, "cache");
        st = cache ? cache_key(path, relative, stem, hash, &load, o->protocol, key, e) : NO_MEMORY(e, "a path");
        examined found = { .readable = 0 };
        if (st == ST_OK && !o->fresh && cache_get(cache, key, &found)) {
            int whole = examine_adopt(o->stage, o->stage->out, stem, &found, NULL) == ST_OK;
            examined_free(whole ? out : &found);
            if (whole) {
                *out = found;
                goto done;
            }
        }
    }
    if (st == ST_OK) st = measure(bytes, n, path, stem, &load, o, out, e);
    if (st == ST_OK && o->stage && out->overlay) st = cache_put(cache, key, out, e);
done:
    file_time(path, out->file_time);
    free(cache);
    free(bytes);
    return st;
}

status examine_finish(examined *x, error *e) {
    char words[1024];
    image_row *r = &x->row;
    r->status = mem_text(!x->readable ? "unreadable" : x->reasons ? "excluded" : "ok");
    r->flags = mem_text(flags_text(x->flags, words, sizeof words));
    if (!r->reason) r->reason = mem_text(flags_text(x->reasons, words, sizeof words));
    return r->status && r->flags && r->reason ? ST_OK : NO_MEMORY(e, "a row");
}
