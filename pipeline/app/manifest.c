#include "app/manifest.h"

#include <fftw3.h>
#include <string.h>

#include "io/file.h"
#include "io/json.h"
#include "io/libraries.h"
#include "judge/history.h"

static void add_text(textbuf *t, const char *name, const char *value) {
    text_addf(t, "\"%s\": ", name);
    json_string(t, value);
}

static void add_number(textbuf *t, const char *name, double value, int digits) {
    text_addf(t, "\"%s\": ", name);
    json_number(t, value, digits);
}

static void digest(const textbuf *of, char out[65], textbuf *t) {
    if (of->failed) t->failed = 1;
    sha256_hex(of->s ? of->s : "", of->n, out);
}

/* The first line of what a library calls itself. */
static void add_library(textbuf *t, const char *separator, const char *name, const char *version) {
    textbuf line = { 0 };
    text_addf(t, "%s\"%s\": ", separator, name);
    text_add_n(&line, version, strcspn(version, "\n"));
    json_string(t, line.s);
    text_free(&line);
}

static void add_libraries(textbuf *t) {
    library files[IO_LIBRARIES];
    io_libraries(files);
    text_add(t, "\"libraries\": {");
    add_library(t, "", "FFTW", fftwf_version);
    for (size_t i = 0; i < IO_LIBRARIES; i++) add_library(t, ", ", files[i].name, files[i].version);
    add_library(t, ", ", "SQLite", history_engine());
    text_add(t, "}");
}

static void add_material(textbuf *t, const char *separator, const char *role, const char *name, const char *source, const double *const columns[3],
                         size_t n) {
    textbuf nodes = { 0 };
    char hash[65];
    for (size_t i = 0; i < n; i++)
        for (size_t k = 0; k < 3; k++)
            if (columns[k]) text_addf(&nodes, "%.17g,", columns[k][i]);
    digest(&nodes, hash, t);
    text_free(&nodes);
    text_addf(t, "%s{\"role\": \"%s\", ", separator, role);
    add_text(t, "name", name);
    text_add(t, ", ");
    add_text(t, "source", source);
    text_addf(t, ", \"sha256\": \"%s\"}", hash);
}

static void add_optical(textbuf *t, const char *separator, const char *role, const material *m) {
    const double *columns[3] = { m->wavelength_nm, m->index_n, m->index_k };
    if (m->n) add_material(t, separator, role, m->name, m->source, columns, m->n);
}

static void add_materials(const setup *s, textbuf *t) {
    const double *irradiance[3] = { s->sun.wavelength_nm, s->sun.irradiance, NULL };
    text_add(t, "\"materials\": [");
    add_material(t, "", "sun", "", s->sun.source, irradiance, s->sun.n);
    add_optical(t, ", ", "substrate", &s->substrate);
    add_optical(t, ", ", "ambient", &s->ambient);
    add_optical(t, ", ", "glass", &s->glass);
    add_optical(t, ", ", "encapsulant", &s->encapsulant);
    add_optical(t, ", ", "reference film", &s->nitride);
    for (size_t i = 0; i < s->optics.n_coatings; i++) add_optical(t, ", ", "coating", &s->coating[i]);
    text_add(t, "]");
}

/* Options of the command that change numbers. */
static void add_options(const publication *p, textbuf *t) {
    text_add(t, "\"options\": {");
    add_number(t, "px_nm", p->options->px_nm, 9);
    text_add(t, ", ");
    add_number(t, "bar_nm", p->options->bar_nm, 9);
    text_addf(t, ", \"keep_tilt\": %s}, \"scale_standard\": ", p->options->keep_tilt ? "true" : "false");
    if (!p->standard) {
        text_add(t, "null");
        return;
    }
    text_add(t, "{");
    add_text(t, "name", p->standard->name);
    text_add(t, ", ");
    add_text(t, "date", p->standard->date);
    text_add(t, ", ");
    add_number(t, "px_x_nm", p->standard->px_x_nm, 9);
    text_add(t, ", ");
    add_number(t, "px_y_nm", p->standard->px_y_nm, 9);
    text_add(t, ", ");
    add_number(t, "u_rel", p->standard->u_rel, 3);
    text_add(t, "}");
}

/* The calibrated link, by the file's last name and what stands in it. */
static void add_calibration(const publication *p, textbuf *t) {
    const linkfile *l = &p->setup->calibrated;
    textbuf full = { 0 };
    char hash[65];
    text_add(t, "\"calibration\": ");
    if (!l->link.n_samples || !p->protocol->calibration) {
        text_add(t, "null");
        return;
    }
    const char *slash = strrchr(p->protocol->calibration, '/');
    linkfile_text(l, &full);
    digest(&full, hash, t);
    text_free(&full);
    text_add(t, "{");
    add_text(t, "file", slash ? slash + 1 : p->protocol->calibration);
    text_add(t, ", ");
    add_text(t, "made_at", l->made_at);
    text_addf(t, ", \"samples\": %zu, \"sha256\": \"%s\"}", (size_t)l->link.n_samples, hash);
}

static void add_inputs(const publication *p, textbuf *t) {
    text_add(t, "\"inputs\": [");
    for (size_t i = 0; i < p->folder->n; i++) {
        text_addf(t, "%s{", i ? ", " : "");
        add_text(t, "file", p->images[i].row.file);
        text_add(t, ", ");
        add_text(t, "sha256", p->images[i].hash[0] ? p->images[i].hash : NULL);
        text_add(t, "}");
    }
    text_add(t, "]");
}

void manifest_json(const publication *p, textbuf *t) {
    textbuf full = { 0 };
    char hash[65];
    protocol_full_text(p->protocol, &full);
    digest(&full, hash, t);
    text_free(&full);
    text_add(t, "{\"program\": \"sward\", ");
    add_text(t, "version", SWARD_VERSION);
    text_add(t, ", ");
    add_libraries(t);
    text_add(t, ", ");
    add_text(t, "protocol", p->protocol->name);
    text_addf(t, ", \"protocol_sha256\": \"%s\", \"basis_sha256\": \"%s\", \"spacing\": \"%s\", ", hash, p->basis,
              p->protocol->spacing == SPACING_DENSITY ? "density" : "autocorrelation");
    text_add(t, "\"band_nm\": [");
    json_number(t, p->protocol->band_lo_nm, 6);
    text_add(t, ", ");
    json_number(t, p->protocol->band_hi_nm, 6);
    text_addf(t, "], \"mixing\": \"%s\", ", mixing_name(p->protocol->mixing));
    add_text(t, "ambient", p->protocol->ambient);
    text_add(t, ", ");
    add_text(t, "silicon", p->setup->substrate.source);
    text_add(t, ", ");
    add_text(t, "sun", p->setup->sun.source);
    text_add(t, ", ");
    add_materials(p->setup, t);
    text_add(t, ", ");
    add_calibration(p, t);
    text_add(t, ", ");
    add_options(p, t);
    text_add(t, ", ");
    add_inputs(p, t);
    text_addf(t, ", \"files_that_are_no_pictures\": %zu, ", p->folder->n_other);
    add_text(t, "warnings", p->folder->warnings.s ? p->folder->warnings.s : "");
    text_add(t, "}");
}
