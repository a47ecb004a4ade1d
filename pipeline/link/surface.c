/* Where the height comes from, the options' ranges, and the true area of the surface.
 *
 * Area: solid of revolution on the circle of the hexagonal cell's area (foot radius a, a^2 = F R^2, R^2 = sqrt(3)/2
 * spacing^2 / pi), its flank r(w) = a (w/H)^(1/q) from the real top down. In units of the foot's area the flank has
 *   cone (q = 1):  (1 - v0) sqrt(1 + (H/a)^2);     else:  integral over v = v0..1 of sqrt(1 + (q H/a)^2 v^(q-1)),
 * v = (r/a)^2 (elementary geometry); a flat top adds its own share v0, a round tip the cap of its ball, 2 rho d / a^2.
 * The free floor 1 - F counts once.
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
                           .exponent = 1.0, .coverage = 1.0 }; /* everything else 0 */
}

const double shape_alternatives[SHAPE_ALTERNATIVES] = { 1.0, 1.5, 2.0 };

status link_check(double height_nm, const link_options *o, error *e) {
    if (!(height_nm >= 0.0) || !isfinite(height_nm))
        return fail(e, ST_BAD_INPUT, "height_nm: found %g, expected a height of 0 nm or more", height_nm);
    if (!(o->exponent >= EXPONENT_MIN && o->exponent <= EXPONENT_MAX))
        return fail(e, ST_BAD_INPUT, "shape: found the exponent %g, expected a number above 0 (0.05 to 20; 1 is the "
                                     "cone, 2 the paraboloid)",
                    o->exponent);
    if (!(o->flat_top >= 0.0 && o->flat_top <= FLAT_TOP_MAX))
        return fail(e, ST_BAD_INPUT, "flat_top: found %g, expected a share of the foot from 0 to 0.95", o->flat_top);
    if (!(o->tip_radius_nm >= 0.0) || !isfinite(o->tip_radius_nm))
        return fail(e, ST_BAD_INPUT, "tip_radius_nm: found %g, expected a radius of 0 nm or more", o->tip_radius_nm);
    if (o->flat_top > 0.0 && o->tip_radius_nm > 0.0)
        return fail(e, ST_BAD_INPUT, "a tip is flat or round: give flat_top or tip_radius_nm, not both");
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

/* Area over the foot's: flank, flat top or cap. Simpson in t = sqrt(v) takes the cusp at v = 0 away. */
static double lateral(const solid *f) {
    enum { STEPS = 2000 };
    double full = f->height_nm + f->apex_nm, foot2 = f->cell_radius_nm * f->cell_radius_nm * f->coverage, q = f->exponent;
    double from = solid_share(f, f->cap_depth_nm) / f->coverage, c = q * q * full * full / foot2, sum = 0.0;
    double top = f->cap_depth_nm > 0.0 ? 2.0 * f->cap_radius_nm * f->cap_depth_nm / foot2 : from;
    if (fabs(q - 1.0) < 1e-12) return top + (1.0 - from) * sqrt(1.0 + c);
    for (int i = 0; i <= STEPS; i++) {
        double t = sqrt(from) + (1.0 - sqrt(from)) * (double)i / STEPS, ti = t > 0.0 ? t : 1e-12;
        double y = 2.0 * ti * sqrt(1.0 + c * pow(ti, 2.0 * q - 2.0));
        sum += y * (i == 0 || i == STEPS ? 1.0 : i % 2 ? 4.0 : 2.0);
    }
    return top + (1.0 - sqrt(from)) * sum / (3.0 * STEPS);
}

double link_area_ratio(double height_nm, double spacing_nm, const link_options *o) {
    height_classes c;
    error ignored = { 0 };
    int fits = 1;
    if (!(spacing_nm > 0.0) || link_check(height_nm, o, &ignored) != ST_OK) return MISSING;
    if (!(height_nm > 0.0) || !(o->coverage > 0.0)) return 1.0;
    if (heights_make(height_nm, NULL, 0, o, HEIGHT_CLASSES, &c, &ignored) != ST_OK) return MISSING;
    double cell = sqrt(sqrt(3.0) / 2.0 * spacing_nm * spacing_nm / PI), sum = 0.0;
    solid_make(height_nm, cell, o, &fits);
    if (!fits) return MISSING;
    for (size_t i = 0; i < c.n; i++) {
        solid f = solid_make(c.height_nm[i], cell, o, NULL);
        sum += c.weight[i] * lateral(&f);
    }
    return 1.0 - o->coverage + o->coverage * sum;
}
