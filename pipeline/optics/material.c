/* Optical constants of one material: nodes copied and checked once, then n and k linear in wavelength between
 * them. Nothing is extrapolated: a wavelength outside the table is an error the user can act on. A material
 * of one node is a constant index at every wavelength. The tables themselves lie in materials/ as CSV. */
#include "optics/material.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"

void material_free(material *m) {
    free(m->name);
    free(m->source);
    free(m->wavelength_nm);
    free(m->index_n);
    free(m->index_k);
    *m = (material){ 0 };
}

static status check_node(const char *name, size_t i, const double *w, const double *n, const double *k,
                         error *e) {
    char at[NUMBER_TEXT], before[NUMBER_TEXT];
    number_text(w[i], 7, at);
    if (!isfinite(w[i]) || w[i] <= 0.0)
        return fail(e, ST_BAD_INPUT, "%s: wavelength %zu of the table is '%s', expected nm above 0", name,
                    i + 1, at);
    if (i && w[i] <= w[i - 1])
        return fail(e, ST_BAD_INPUT, "%s: wavelengths have to ascend, but %s nm follows %s nm", name, at,
                    number_text(w[i - 1], 7, before));
    if (!isfinite(n[i]) || n[i] <= 0.0)
        return fail(e, ST_BAD_INPUT, "%s: n at %s nm has to be a number above 0", name, at);
    if (!isfinite(k[i]) || k[i] < 0.0)
        return fail(e, ST_BAD_INPUT, "%s: k at %s nm has to be a number, 0 or above", name, at);
    return ST_OK;
}

status material_make(material *m, const char *name, const char *source, size_t n, const double *wavelength_nm,
                     const double *index_n, const double *index_k, error *e) {
    if (!n) return fail(e, ST_BAD_INPUT, "%s: the table of optical constants is empty", name);
    for (size_t i = 0; i < n; i++) {
        status st = check_node(name, i, wavelength_nm, index_n, index_k, e);
        if (st) return st;
    }
    material a = { .name = mem_text(name),
                   .source = mem_text(source ? source : ""),
                   .n = n,
                   .wavelength_nm = mem_array(n, sizeof(double)),
                   .index_n = mem_array(n, sizeof(double)),
                   .index_k = mem_array(n, sizeof(double)) };
    if (!a.name || !a.source || !a.wavelength_nm || !a.index_n || !a.index_k) {
        material_free(&a);
        return NO_MEMORY(e, "optical constants");
    }
    memcpy(a.wavelength_nm, wavelength_nm, n * sizeof(double));
    memcpy(a.index_n, index_n, n * sizeof(double));
    memcpy(a.index_k, index_k, n * sizeof(double));
    *m = a;
    return ST_OK;
}

status material_constant(material *m, double n, double k, error *e) {
    char name[2 * NUMBER_TEXT + 8] = "n=", part[NUMBER_TEXT];
    const double anywhere_nm = 1.0; /* one node means every wavelength; its place is never read */
    size_t used = 2;
    for (const char *s = number_text(n, 6, part); *s && used < sizeof name - 1;) name[used++] = *s++;
    if (k > 0.0) {
        for (const char *s = ",k="; *s && used < sizeof name - 1;) name[used++] = *s++;
        for (const char *s = number_text(k, 6, part); *s && used < sizeof name - 1;) name[used++] = *s++;
    }
    name[used] = '\0';
    return material_make(m, name, "constant index", 1, &anywhere_nm, &n, &k, e);
}

status material_copy(material *m, const material *from, error *e) {
    if (!from->n) {
        *m = (material){ 0 };
        return ST_OK;
    }
    return material_make(m, from->name, from->source, from->n, from->wavelength_nm, from->index_n,
                         from->index_k, e);
}

status material_at(const material *m, double wavelength_nm, double *n, double *k, error *e) {
    if (m->n == 1) {
        *n = m->index_n[0];
        *k = m->index_k[0];
        return ST_OK;
    }
    const double *w = m->wavelength_nm;
    if (!m->n || !(wavelength_nm >= w[0] && wavelength_nm <= w[m->n - 1])) {
        char lo[NUMBER_TEXT], hi[NUMBER_TEXT], at[NUMBER_TEXT];
        if (!m->n) return fail(e, ST_BAD_INPUT, "a material has no optical constants");
        return fail(e, ST_BAD_INPUT,
                    "%s is tabled from %s to %s nm, %s nm was asked for; choose a band inside", m->name,
                    number_text(w[0], 7, lo), number_text(w[m->n - 1], 7, hi),
                    number_text(wavelength_nm, 7, at));
    }
    size_t lo = 0, hi = m->n - 1; /* w[lo] <= wavelength <= w[hi] */
    while (hi - lo > 1) {
        size_t mid = lo + (hi - lo) / 2;
        if (w[mid] <= wavelength_nm)
            lo = mid;
        else
            hi = mid;
    }
    double t = (wavelength_nm - w[lo]) / (w[hi] - w[lo]);
    *n = (1.0 - t) * m->index_n[lo] + t * m->index_n[hi]; /* exact at both nodes */
    *k = (1.0 - t) * m->index_k[lo] + t * m->index_k[hi];
    return ST_OK;
}
