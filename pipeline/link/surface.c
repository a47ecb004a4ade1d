/* Where the height comes from, the options' ranges, and the true area of the surface.
 *
 * Area: solid of revolution r(u) = r0 u^(1/q), u = depth below the tip / height, on the circle of the hexagonal
 * cell's area (r0^2 = F R^2, R^2 = sqrt(3)/2 spacing^2 / pi). Lateral area over base area is
 *   cone (q = 1):  sqrt(1 + (h/r0)^2);     else:  integral over w = 0..1 of sqrt(1 + (q h/r0)^2 w^(q-1)),
 * w = (r/r0)^2 (elementary geometry). The free floor 1 - F counts once.
 * What this file does not do: it measures nothing; a top view does not show height. */
#include "link/surface.h"

#include <math.h>

#include "link/surface_priv.h"

const char *height_source_name(height_source s) {
    static const char names[][12] = { "sheet", "calibrated", "protocol", "aspect", "default" };
    return names[s];
}

int height_is_assumed(height_source s) { return s >= HEIGHT_PROTOCOL; }

link_options link_defaults(void) {
    return (link_options){ .height_nm = MISSING, .height_nm_u = MISSING, .aspect = MISSING, .aspect_u = MISSING,
                           .exponent = 1.0, .exponent_u = 0.0, .height_spread = 0.0, .height_by_size = 0.0,
                           .level_at_tips = 0, .coverage = 1.0 };
}

status link_check(double height_nm, const link_options *o, error *e) {
    if (!(height_nm >= 0.0) || !isfinite(height_nm))
        return fail(e, ST_BAD_INPUT, "height_nm: found %g, expected a height of 0 nm or more", height_nm);
    if (!(o->exponent >= EXPONENT_MIN && o->exponent <= EXPONENT_MAX))
        return fail(e, ST_BAD_INPUT, "shape: found the exponent %g, expected a number above 0 (0.05 to 20; 1 is the "
                                     "cone, 2 the paraboloid)",
                    o->exponent);
    if (!(o->coverage >= 0.0 && o->coverage <= 1.0))
        return fail(e, ST_BAD_INPUT, "coverage: found %g, expected a share from 0 to 1", o->coverage);
    if (!(o->height_spread >= 0.0 && o->height_spread <= 1.0))
        return fail(e, ST_BAD_INPUT, "height_spread: found %g, expected a relative spread from 0 to 1",
                    o->height_spread);
    if (!(fabs(o->height_by_size) <= 5.0))
        return fail(e, ST_BAD_INPUT, "height_by_size: found %g, expected a power from -5 to 5", o->height_by_size);
    return ST_OK;
}

static double product_u(double a, double a_u, double b, double b_u) { return hypot(a * b_u, b * a_u); }

status link_height(quantity sheet, const link_options *o, quantity spacing_nm, quantity *height_nm, height_source *src,
                   error *e) {
    if (isfinite(sheet.value)) {
        if (sheet.value < 0.0)
            return fail(e, ST_BAD_INPUT, "height_nm: the sample sheet gives %g nm, expected 0 or more", sheet.value);
        *height_nm = sheet;
        *src = HEIGHT_SHEET;
        return ST_OK;
    }
    if (isfinite(o->height_nm)) {
        if (o->height_nm < 0.0)
            return fail(e, ST_BAD_INPUT, "link height_nm: found %g, expected 0 or more", o->height_nm);
        *height_nm = (quantity){ o->height_nm, o->height_nm_u, 1 };
        *src = HEIGHT_PROTOCOL;
        return ST_OK;
    }
    int said = isfinite(o->aspect);
    if (said && !(o->aspect >= 0.0))
        return fail(e, ST_BAD_INPUT, "link aspect: found %g, expected 0 or more", o->aspect);
    if (!(spacing_nm.value > 0.0))
        return fail(e, ST_NO_RESULT, "there is no height and no spacing to derive one from; give height_nm in the "
                                     "sample sheet or the protocol");
    double aspect = said ? o->aspect : 1.0, aspect_u = said ? o->aspect_u : 0.3;
    double u = isfinite(spacing_nm.u) ? spacing_nm.u : 0.0;
    *height_nm = (quantity){ aspect * spacing_nm.value, product_u(aspect, aspect_u, spacing_nm.value, u), 1 };
    *src = said ? HEIGHT_ASPECT : HEIGHT_DEFAULT;
    return ST_OK;
}

/* Lateral area / base area for height over base radius `a`. Simpson in t = sqrt(w) takes the cusp at w = 0 away. */
static double lateral(double a, double q) {
    if (fabs(q - 1.0) < 1e-12) return sqrt(1.0 + a * a);
    enum { STEPS = 2000 };
    double sum = 0.0, c = q * q * a * a;
    for (int i = 0; i <= STEPS; i++) {
        double t = (double)i / STEPS, ti = t > 0.0 ? t : 1e-12;
        double y = 2.0 * ti * sqrt(1.0 + c * pow(ti, 2.0 * q - 2.0));
        sum += y * (i == 0 || i == STEPS ? 1.0 : i % 2 ? 4.0 : 2.0);
    }
    return sum / (3.0 * STEPS);
}

double link_area_ratio(double height_nm, double spacing_nm, const link_options *o) {
    height_classes c;
    error ignored = { 0 };
    if (!(spacing_nm > 0.0) || link_check(height_nm, o, &ignored) != ST_OK) return MISSING;
    if (!(height_nm > 0.0) || !(o->coverage > 0.0)) return 1.0;
    if (heights_make(height_nm, NULL, 0, o, HEIGHT_CLASSES, &c, &ignored) != ST_OK) return MISSING;
    double base = sqrt(o->coverage * sqrt(3.0) / 2.0 * spacing_nm * spacing_nm / PI), sum = 0.0;
    for (size_t i = 0; i < c.n; i++) sum += c.weight[i] * lateral(c.height_nm[i] / base, o->exponent);
    return 1.0 - o->coverage + o->coverage * sum;
}
