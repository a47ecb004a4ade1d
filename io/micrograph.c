#include "io/micrograph.h"

#include <math.h>
#include <stdlib.h>

#include "base/number.h"
#include "io/json.h"

void micrograph_free(micrograph *m) {
    free(m->px);
    free(m->strip);
    free(m->masked);
    *m = (micrograph){ 0 };
}

static void add_number(textbuf *out, const char *name, double v, int known, int digits) {
    text_addf(out, ", \"%s\": ", name);
    json_number(out, known ? v : (double)NAN, digits);
}

static void add_text(textbuf *out, const char *name, const char *text) {
    text_addf(out, ", \"%s\": ", name);
    json_string(out, text[0] ? text : NULL);
}

void micrograph_facts_json(const micrograph *m, textbuf *out) {
    const facts *f = &m->facts;
    text_add(out, "\"sources\": [");
    for (size_t i = 0; i < m->n_statements; i++) {
        const px_statement *s = &m->statements[i];
        text_add(out, i ? ", {\"source\": " : "{\"source\": ");
        json_string(out, s->source);
        add_number(out, "px_nm", s->x_nm, 1, 7);
        if (fabs(s->y_nm / s->x_nm - 1.0) > 1e-6) add_number(out, "px_y_nm", s->y_nm, 1, 7);
        text_add(out, "}");
    }
    text_add(out, "], \"facts\": {\"acquired_at\": ");
    json_string(out, m->acquired_at[0] ? m->acquired_at : NULL);
    add_number(out, "magnification", f->magnification, f->magnification > 0.0, 6);
    add_number(out, "voltage_V", f->voltage_V, f->voltage_V > 0.0, 6);
    add_number(out, "working_distance_mm", f->working_distance_mm, f->working_distance_mm > 0.0, 5);
    add_number(out, "tilt_deg", f->tilt_deg, f->tilt_known, 4);
    text_addf(out, ", \"tilt_corrected_by_instrument\": %s",
              !f->tilt_known      ? "null"
              : f->tilt_in_pixels ? "true"
                                  : "false");
    add_text(out, "detector", f->detector);
    add_text(out, "software", f->software);
    add_text(out, "compression", m->compression);
    add_number(out, "y_stretch", m->y_stretch, 1, 6);
    text_addf(out, ", \"pages\": %zu}", m->pages);
}
