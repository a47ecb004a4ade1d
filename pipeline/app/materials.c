/* Materials, the sun and measured profiles from CSV files, and the optical set-up a protocol asks for. A
 * known material is a file of the materials folder; its comment lines "name:", "title:", "source:" describe
 * it. The room optics reads no file, so everything it needs is loaded here. */
#include "app/materials.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "app/command.h"
#include "app/protocol_keys.h"
#include "base/limits.h"
#include "base/mem.h"
#include "base/number.h"
#include "io/file.h"
#include "io/json.h"
#include "io/table.h"

#define SUN_FILE "am15g.csv"
enum { EXE_PATH = 4096 };

status materials_folder(char **out, error *e) {
    static const char *const beside[] = { "materials", "../share/sward/materials" };
    char exe[EXE_PATH];
    const char *named = getenv("SWARD_MATERIALS");
    char *found = NULL;
    if (named && named[0]) {
        if (!folder_exists(named))
            return fail(e, ST_IO, "SWARD_MATERIALS names '%.200s', which is no folder", named);
        found = mem_text(named);
    } else {
        ssize_t n = readlink("/proc/self/exe", exe, sizeof exe - 1);
        char *slash;
        exe[n > 0 ? n : 0] = '\0';
        slash = strrchr(exe, '/');
        if (slash) *slash = '\0';
        for (size_t i = 0; slash && !found && i < sizeof beside / sizeof beside[0]; i++) {
            found = path_join(exe, beside[i]);
            if (!found) return NO_MEMORY(e, "a path");
            if (folder_exists(found)) break;
            free(found);
            found = NULL;
        }
        if (!found)
            return fail(
                e, ST_IO,
                "no folder with the optical materials beside the program (%.200s); set SWARD_MATERIALS to it",
                exe);
    }
    if (!found) return NO_MEMORY(e, "a path");
    *out = found;
    return ST_OK;
}

/* The text behind "key:" in the comment lines, "" when there is none. */
static const char *comment_value(const csv *c, const char *key) {
    size_t n = strlen(key);
    for (size_t i = 0; i < c->n_comments; i++) {
        const char *s = c->comments[i];
        if (strncmp(s, key, n) == 0 && s[n] == ':') return s + n + 1 + strspn(s + n + 1, " ");
    }
    return "";
}

static status material_from_csv(const char *path, const char *name, material *out, error *e) {
    csv c = { 0 };
    double *v = NULL;
    status st = input_wanted(path, e);
    if (st == ST_OK) st = csv_read(path, &c, e);
    if (st != ST_OK) goto done;
    v = mem_array(c.n_rows, 3 * sizeof *v);
    if (!v) {
        st = NO_MEMORY(e, "a material");
        goto done;
    }
    st = csv_numbers(&c, "wavelength_nm", path, v, e);
    if (st == ST_OK) st = csv_numbers(&c, "n", path, v + c.n_rows, e);
    if (st == ST_OK && csv_column(&c, "k") >= 0) st = csv_numbers(&c, "k", path, v + 2 * c.n_rows, e);
    if (st != ST_OK) goto done;
    const char *source = comment_value(&c, "source");
    st = material_make(out, name, source[0] ? source : path, c.n_rows, v, v + c.n_rows, v + 2 * c.n_rows, e);
    if (st != ST_OK) st = fail_within(e, st, path);
done:
    free(v);
    csv_free(&c);
    return st;
}

static int is_csv(const char *name) {
    size_t n = strlen(name);
    return n > 4 && strcmp(name + n - 4, ".csv") == 0;
}

static int is_material_file(const char *relative) {
    return is_csv(relative) && !strchr(relative, '/') && strcmp(relative, SUN_FILE) != 0;
}

/* Every known material, blank-separated, and the nearest to `name`. */
static status unknown_material(const char *folder, const char *name, error *e) {
    file_list files = { 0 };
    textbuf known = { 0 };
    status st = folder_walk(folder, is_material_file, &files, e);
    if (st != ST_OK) return st;
    for (size_t i = 0; i < files.n; i++) {
        files.paths[i][strlen(files.paths[i]) - 4] = '\0';
        text_addf(&known, " %s", files.paths[i]);
    }
    const char *near = json_nearest(name, (const char *const *)files.paths, files.n);
    st = fail(
        e, ST_BAD_INPUT,
        "unknown material '%.60s'%s%s%s; known are air%.250s, a CSV with wavelength_nm, n and k, or an index "
        "such as 2 or 2+0.1i",
        name, near ? ", did you mean '" : "", near ? near : "", near ? "'?" : "", known.s ? known.s : "");
    text_free(&known);
    file_list_free(&files);
    return st;
}

/* "2", "2.09", "2.09+0.01i"; 1 when the text is one. */
static int index_parse(const char *s, double *n, double *k) {
    char real[32], imaginary[32];
    size_t length = strlen(s);
    *k = 0.0;
    if (number_parse(s, n)) return 1;
    const char *plus = NULL; /* the last one that is no sign of an exponent */
    for (const char *q = s; *q; q++)
        if (*q == '+' && q > s && q[-1] != 'e' && q[-1] != 'E') plus = q;
    if (!plus || length < 4 || s[length - 1] != 'i' || length >= sizeof real) return 0;
    snprintf(real, sizeof real, "%.*s", (int)(plus - s), s);
    snprintf(imaginary, sizeof imaginary, "%.*s", (int)(s + length - 1 - (plus + 1)), plus + 1);
    return number_parse(real, n) && number_parse(imaginary, k);
}

status material_load(const char *name, material *out, error *e) {
    double n, k;
    char *folder = NULL, *path = NULL, file[80];
    if (strcmp(name, "air") == 0) return material_constant(out, 1.0, 0.0, e);
    if (index_parse(name, &n, &k)) {
        status st = material_constant(out, n, k, e);
        return st == ST_OK ? st : fail_within(e, st, name);
    }
    if (material_is_path(name)) return material_from_csv(name, name, out, e);
    status st = materials_folder(&folder, e);
    if (st != ST_OK) return st;
    if (strlen(name) + 5 <= sizeof file) {
        snprintf(file, sizeof file, "%s.csv", name);
        path = path_join(folder, file);
        if (!path) st = NO_MEMORY(e, "a path");
    }
    if (st == ST_OK && path && is_material_file(file) && file_exists(path))
        st = material_from_csv(path, name, out, e);
    else if (st == ST_OK)
        st = unknown_material(folder, name, e);
    free(path);
    free(folder);
    return st;
}

static status list_one(const char *folder, const char *file, textbuf *out, error *e) {
    csv c = { 0 };
    char lo[NUMBER_TEXT] = "", hi[NUMBER_TEXT] = "";
    double *nm = NULL;
    char *path = path_join(folder, file);
    status st = path ? csv_read(path, &c, e) : NO_MEMORY(e, "a path");
    if (st == ST_OK) {
        nm = mem_array(c.n_rows, sizeof *nm);
        st = nm ? csv_numbers(&c, "wavelength_nm", path, nm, e) : NO_MEMORY(e, "a material");
    }
    if (st == ST_OK && c.n_rows) {
        number_text(nm[0], 6, lo);
        number_text(nm[c.n_rows - 1], 6, hi);
        text_addf(out, "%-24.*s %s; %s to %s nm\n%-24s %s\n", (int)(strlen(file) - 4), file,
                  comment_value(&c, "title"), lo, hi, "", comment_value(&c, "source"));
    }
    free(nm);
    free(path);
    csv_free(&c);
    return st;
}

status materials_list(textbuf *out, error *e) {
    char *folder = NULL;
    file_list files = { 0 };
    status st = materials_folder(&folder, e);
    if (st == ST_OK) st = folder_walk(folder, is_material_file, &files, e);
    if (st == ST_OK) text_addf(out, "%-24s index 1 at every wavelength\n", "air");
    for (size_t i = 0; i < files.n && st == ST_OK; i++) st = list_one(folder, files.paths[i], out, e);
    if (st == ST_OK)
        text_add(out, "Beside these: a path to a CSV with wavelength_nm, n and k, or a constant index such "
                      "as 2 or 2+0.1i.\n");
    file_list_free(&files);
    free(folder);
    return st;
}

/* AM1.5G, or the table at `own`. */
static status sun_load(const char *own, sun *out, error *e) {
    char *folder = NULL, *path = NULL;
    double *v = NULL;
    csv c = { 0 };
    status st = own ? input_wanted(own, e) : materials_folder(&folder, e);
    if (st != ST_OK) goto done;
    path = own ? mem_text(own) : path_join(folder, SUN_FILE);
    st = path ? csv_read(path, &c, e) : NO_MEMORY(e, "a path");
    if (st != ST_OK) goto done;
    v = mem_array(c.n_rows, 2 * sizeof *v);
    if (!v) {
        st = NO_MEMORY(e, "the sun");
        goto done;
    }
    st = csv_numbers(&c, "wavelength_nm", path, v, e);
    if (st == ST_OK) st = csv_numbers(&c, "irradiance_W_m2_nm", path, v + c.n_rows, e);
    if (st == ST_OK) {
        st = sun_make(out, comment_value(&c, "source"), c.n_rows, v, v + c.n_rows, e);
        if (st != ST_OK) st = fail_within(e, st, path);
    }
done:
    free(v);
    csv_free(&c);
    free(path);
    free(folder);
    return st;
}

/* Depths ascending (two equal ones make a step), shares 0..1; the first row becomes depth 0. */
static status profile_check(const csv *c, const char *path, double *depth, const double *solid, error *e) {
    char one[NUMBER_TEXT], two[NUMBER_TEXT];
    size_t n = c->n_rows;
    for (size_t i = 0; i < n; i++) {
        if (!(solid[i] >= 0.0 && solid[i] <= 1.0))
            return fail(e, ST_BAD_INPUT,
                        "%s line %zu, solid_fraction: found %s, expected a share from 0 to 1", path,
                        c->lines[i], number_text(solid[i], 6, one));
        if (i && !(depth[i] >= depth[i - 1]))
            return fail(
                e, ST_BAD_INPUT,
                "%s line %zu, depth_nm: found %s after %s, expected depths in ascending order, from the "
                "tips down",
                path, c->lines[i], number_text(depth[i], 6, one), number_text(depth[i - 1], 6, two));
    }
    if (n < 2 || !(depth[n - 1] > depth[0]))
        return fail(e, ST_BAD_INPUT, "%s: a profile needs at least two different depths", path);
    double top = depth[0];
    for (size_t i = 0; i < n; i++) depth[i] -= top;
    return ST_OK;
}

status profile_read(const char *path, profile *out, error *e) {
    csv c = { 0 };
    profile p = { 0 };
    status st = input_wanted(path, e);
    if (st == ST_OK) st = csv_read(path, &c, e);
    if (st != ST_OK) goto done;
    p.depth_nm = mem_array(c.n_rows, sizeof *p.depth_nm);
    p.solid = mem_array(c.n_rows, sizeof *p.solid);
    if (!p.depth_nm || !p.solid) {
        st = NO_MEMORY(e, "a profile");
        goto done;
    }
    p.n = c.n_rows;
    st = csv_numbers(&c, "depth_nm", path, p.depth_nm, e);
    if (st == ST_OK) st = csv_numbers(&c, "solid_fraction", path, p.solid, e);
    if (st == ST_OK) st = profile_check(&c, path, p.depth_nm, p.solid, e);
    if (st != ST_OK) goto done;
    *out = p;
    p = (profile){ 0 };
done:
    profile_free(&p);
    csv_free(&c);
    return st;
}

/* Reflectance in an absorbing medium has no meaning of its own; a trace, as tables of clear media hold, does no harm. */
static status clear_enough(const protocol *p, const material *m, error *e) {
    char k[NUMBER_TEXT];
    for (size_t i = 0; i < m->n; i++) {
        int counts = m->n == 1 || (m->wavelength_nm[i] >= p->band_lo_nm && m->wavelength_nm[i] <= p->band_hi_nm);
        if (counts && m->index_k[i] > 1e-3)
            return fail(e, ST_BAD_INPUT, "the ambient %s absorbs (k = %s): light cannot come from far away in it; take a clear medium",
                        m->name, number_text(m->index_k[i], 3, k));
    }
    return ST_OK;
}

static status load_all(const protocol *p, setup *s, error *e) {
    int laminated = strcmp(p->ambient, "laminate") == 0;
    status st = material_load(laminated ? "air" : p->ambient, &s->ambient, e);
    if (st == ST_OK) st = clear_enough(p, &s->ambient, e);
    if (st == ST_OK) st = material_load("air", &s->air, e);
    if (st == ST_OK) st = material_load(p->substrate, &s->substrate, e);
    if (st == ST_OK) st = material_load("nitride", &s->nitride, e);
    if (st == ST_OK && laminated) st = material_load("glass", &s->glass, e);
    if (st == ST_OK && laminated) st = material_load("encapsulant", &s->encapsulant, e);
    for (size_t i = 0; i < p->n_coatings && st == ST_OK; i++)
        st = material_load(p->coatings[i].material, &s->coating[i], e);
    if (st == ST_OK) st = sun_load(p->sun, &s->sun, e);
    if (st == ST_OK && p->profile) st = profile_read(p->profile, &s->measured, e);
    if (st == ST_OK && p->calibration) st = linkfile_read(p->calibration, &s->calibrated, e);
    if (st == ST_OK) st = linkfile_fits(&s->calibrated, p, e);
    return st;
}

/* Every table must reach over the band, the sun's too: found here once instead of in the middle of a run. */
static status check_band(const protocol *p, const setup *s, error *e) {
    const material *all[5 + LIMIT_COATINGS] = { &s->substrate, &s->ambient, &s->nitride, &s->glass,
                                                &s->encapsulant };
    double n, k, ignored;
    for (size_t i = 0; i < p->n_coatings; i++) all[5 + i] = &s->coating[i];
    for (size_t i = 0; i < 5 + p->n_coatings; i++) {
        if (!all[i]->n) continue;
        status st = material_at(all[i], p->band_lo_nm, &n, &k, e);
        if (st == ST_OK) st = material_at(all[i], p->band_hi_nm, &n, &k, e);
        if (st != ST_OK) return st;
    }
    return sun_current(&s->sun, p->band_lo_nm, p->band_hi_nm, &ignored, e);
}

/* Everything is loaded; the pointers of `optics` now go to their places. */
static void wire(const protocol *p, setup *s) {
    for (size_t i = 0; i < p->n_coatings; i++)
        s->layers[i] = (layer){ .material = &s->coating[i], .thickness_nm = p->coatings[i].thickness_nm };
    optics_setup *o = &s->optics;
    o->ambient = &s->ambient;
    o->substrate = &s->substrate;
    o->air = &s->air;
    o->nitride = &s->nitride;
    if (s->glass.n) o->front = (laminate){ &s->glass, p->glass_mm, &s->encapsulant, p->encapsulant_mm };
    o->coatings = s->layers;
    o->n_coatings = p->n_coatings;
    o->mixing = p->mixing;
    o->model = p->model;
    o->facet_angle_deg = p->facet_angle_deg;
    o->reflect = reflect_defaults();
    o->reflect.angle_deg = p->angle_deg;
    o->reflect.polarization = p->polarization;
    o->reflect.hemispherical = p->hemispherical;
    s->sun.weight = p->weight;
    o->sun = &s->sun;
    o->rear = p->rear;
    o->band_lo_nm = p->band_lo_nm;
    o->band_hi_nm = p->band_hi_nm;
    o->step_nm = p->step_nm;
}

status setup_make(const protocol *p, setup *out, error *e) {
    *out = (setup){ 0 };
    if (p->profile && p->n_coatings)
        return fail(
            e, ST_BAD_INPUT,
            "a measured profile says nothing of where a coating lies; take the coatings out, or give height "
            "and shape instead of the profile");
    status st = load_all(p, out, e);
    if (st == ST_OK) st = check_band(p, out, e);
    if (st == ST_OK)
        wire(p, out);
    else
        setup_free(out);
    return st;
}

void setup_free(setup *s) {
    material *owned[] = { &s->ambient, &s->substrate, &s->air, &s->nitride, &s->glass, &s->encapsulant };
    for (size_t i = 0; i < sizeof owned / sizeof owned[0]; i++) material_free(owned[i]);
    for (size_t i = 0; i < LIMIT_COATINGS; i++) material_free(&s->coating[i]);
    sun_free(&s->sun);
    profile_free(&s->measured);
    linkfile_free(&s->calibrated);
    *s = (setup){ 0 };
}

static void numbers_text(textbuf *out, const char *name, const double *v, size_t n) {
    char number[NUMBER_TEXT];
    text_addf(out, "%s=", name);
    for (size_t i = 0; i < n; i++) text_addf(out, "%s,", number_text(v[i], 17, number));
    text_add(out, "\n");
}

static void material_lines(textbuf *out, const char *role, const material *m) {
    if (!m->n) return;
    text_addf(out, "%s\n", role);
    numbers_text(out, "wavelength_nm", m->wavelength_nm, m->n);
    numbers_text(out, "n", m->index_n, m->n);
    numbers_text(out, "k", m->index_k, m->n);
}

void setup_text(const setup *s, textbuf *out) {
    material_lines(out, "ambient", &s->ambient);
    material_lines(out, "substrate", &s->substrate);
    material_lines(out, "nitride", &s->nitride);
    material_lines(out, "glass", &s->glass);
    material_lines(out, "encapsulant", &s->encapsulant);
    for (size_t i = 0; i < s->optics.n_coatings; i++) material_lines(out, "coating", &s->coating[i]);
    numbers_text(out, "sun_nm", s->sun.wavelength_nm, s->sun.n);
    numbers_text(out, "sun", s->sun.irradiance, s->sun.n);
    numbers_text(out, "depth_nm", s->measured.depth_nm, s->measured.n);
    numbers_text(out, "solid", s->measured.solid, s->measured.n);
    linkfile_text(&s->calibrated, out);
}
