/* Any valid options: a prediction is refused with a sentence, or every R lies in 0..1 and within its own interval, the
 * weighted value, current and references agree with the spectrum, and nothing is NaN. */
#include <stdlib.h>

#include "base/quantity.h"
#include "bare_silicon.h"
#include "check.h"
#include "link/predict.h"
#include "link/trials.h"

static uint64_t state = 20261201;
static double uniform(void) {
    state = state * 6364136223846793005u + 1442695040888963407u;
    return (double)(state >> 11) * 0x1p-53;
}
static double between(double lo, double hi) { return lo + (hi - lo) * uniform(); }
static double ratio(double lo, double hi) { return lo * pow(hi / lo, uniform()); }
static int one_in(int n) { return (int)(uniform() * n) == 0; }

typedef struct {
    optics_setup o;
    surface_input in;
    layer films[2];
    material cover;
} random_case;

static void draw_surface(random_case *c) {
    link_options *l = &c->in.link;
    *l = link_defaults();
    c->in.spacing_nm = (quantity){ ratio(40.0, 9000.0), one_in(2) ? between(0.0, 60.0) : 0.0, 1 };
    c->in.height_nm = (quantity){ one_in(12) ? 0.0 : ratio(5.0, 2500.0), one_in(2) ? between(0.0, 300.0) : 0.0, 1 };
    c->in.pores = one_in(4);
    l->exponent = ratio(0.2, 5.0);
    l->exponent_u = one_in(3) ? between(0.0, 1.0) : 0.0;
    l->shape_open = one_in(4);
    if (one_in(3)) l->flat_top = between(0.0, 0.95);
    else if (one_in(3)) l->tip_radius_nm = ratio(0.1, 30.0);
    if (one_in(3)) l->flat_top_u = l->tip_radius_nm > 0.0 ? 0.0 : between(0.0, 0.5);
    if (one_in(3)) l->coverage = uniform();
    if (one_in(3)) l->coverage_u = between(0.0, 0.4);
    if (one_in(4)) l->height_spread = between(0.0, 1.0);
    l->lognormal = one_in(2);
    l->level_at_tips = one_in(2);
}

static void draw_light(random_case *c) {
    static const double angles[] = { 0.0, 0.0, 8.0, 45.0, 70.0, 85.0, 88.0, 89.0, 89.9 };
    optics_setup *o = &c->o;
    *o = setup();
    o->band_lo_nm = between(300.0, 600.0);
    o->band_hi_nm = between(700.0, 1200.0);
    o->step_nm = 40.0;
    o->mixing = (mixing)(uniform() * MIXINGS);
    o->reflect.tolerance = 1e-4;
    o->reflect.angle_deg = angles[(size_t)(uniform() * 9.0)];
    o->reflect.polarization = (polarization)(uniform() * 3.0);
    o->reflect.hemispherical = one_in(10);
    if (one_in(4)) o->ambient = &c->cover;
    if (one_in(5)) o->rear = (rear_side){ ratio(1.0, 500.0), one_in(2) ? uniform() : MISSING, one_in(2) };
    o->coatings = c->films;
    o->n_coatings = (size_t)(uniform() * 5.0) % 3;
    for (size_t i = 0; i < 2; i++) c->films[i] = (layer){ i ? &nitride : &c->cover, one_in(5) ? 0.0 : ratio(0.5, 150.0) };
    o->model = one_in(6) ? OPTICS_FACETS : OPTICS_AUTO;
    o->facet_angle_deg = one_in(4) ? between(1.0, 89.0) : 0.0;
}

static int sound(const prediction *p) {
    int ok = p->polished >= 0.0 && p->polished <= 1.0 && p->coated >= 0.0 && p->coated <= 1.0;
    if (p->refused) return ok && p->note[0] && isnan(p->weighted);
    ok = ok && p->weighted >= 0.0 && p->weighted <= 1.0 && p->current_loss_mA_cm2 >= 0.0;
    int bare = isnan(p->weighted_lo); /* facets that are not large against the waves have no interval */
    ok = ok && (bare ? isnan(p->weighted_hi) && !strcmp(p->model, "facets")
                     : p->weighted_lo >= 0.0 && p->weighted_lo <= p->weighted && p->weighted <= p->weighted_hi && p->weighted_hi <= 1.0);
    for (size_t i = 0; i < p->n; i++) {
        ok = ok && p->R[i] >= 0.0 && p->R[i] <= 1.0;
        ok = ok && (bare || (p->R_lo[i] >= 0.0 && p->R_lo[i] <= p->R[i] && p->R[i] <= p->R_hi[i] && p->R_hi[i] <= 1.0));
    }
    const double parts[] = { p->u_height, p->u_shape, p->u_tip, p->u_spread, p->u_coverage, p->u_spacing, p->u_mixing, p->u_model };
    for (size_t i = 0; i < sizeof parts / sizeof parts[0]; i++) ok = ok && parts[i] >= 0.0 && parts[i] <= 1.0;
    return ok;
}

int main(void) {
    error e = { 0 };
    random_case c = { 0 };
    size_t said = 0, refused = 0, settled = 0;
    CHECK(table_material("silicon", &silicon) && table_material("nitride", &nitride) && table_sun(&am15g) &&
          material_constant(&air, 1.0, 0.0, &e) == ST_OK && material_constant(&c.cover, 1.4, 0.0, &e) == ST_OK);
    for (int i = 0; i < 80; i++) {
        prediction p = { 0 };
        e = (error){ 0 };
        draw_surface(&c);
        draw_light(&c);
        if (c.in.height_nm.value * c.in.link.exponent > 2000.0) c.in.link.exponent = 1.0; /* such need thousands of slabs */
        status st = predict(&c.in, &c.o, &p, &e);
        int ok = st == ST_OK ? sound(&p) : e.text[0] && (st == ST_BAD_INPUT || st == ST_NO_RESULT);
        check_true(ok, e.text[0] ? e.text : p.note, __FILE__, i);
        if (!ok)
            printf("case %d: %d, h %g p %g q %g angle %g: R %g (%g to %g) %s\n", i, (int)st, c.in.height_nm.value,
                   c.in.spacing_nm.value, c.in.link.exponent, c.o.reflect.angle_deg, p.weighted, p.weighted_lo, p.weighted_hi, p.model);
        settled += st == ST_OK;
        said += st != ST_OK;
        refused += p.refused != 0;
        prediction_free(&p);
    }
    printf("%zu predictions, %zu of them refused, %zu failures with a sentence\n", settled, refused, said);
    CHECK(settled - refused > 40 && said < 12);
    material *all[] = { &silicon, &nitride, &air, &c.cover };
    for (size_t i = 0; i < sizeof all / sizeof all[0]; i++) material_free(all[i]);
    sun_free(&am15g);
    return check_done();
}
