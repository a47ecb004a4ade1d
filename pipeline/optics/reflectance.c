/* R of a stack over wavelength. Wavelengths go in blocks of LANES; for each block the angles and
 * polarizations asked for become channels. Planar stacks are exact (multilayer.c); textures are cut ever
 * finer until the extrapolated R of every wavelength and channel of the block stands still. A laminate adds
 * two incoherent interfaces on top. */
#include "optics/reflectance.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "base/number.h"
#include "base/quantity.h"
#include "optics/graded.h"
#include "optics/multilayer.h"
#include "optics/quadrature.h"

enum {
    DIFFUSE_ANGLES = 16,
    GROUP_ANGLES = 20, /* of reflectance_angles, at once */
    MAX_CHANNELS = 2 * GROUP_ANGLES,
    LEVELS = 16 /* 1 << 15 is LIMIT_SLABS */
};

/* One block of wavelengths on its way. */
typedef struct {
    const stack *stack;
    size_t n; /* wavelengths in use */
    double wavelength_nm[LANES], k0[LANES];
    mixer mix;   /* eps[0] ambient, [1] substrate, [2..] coatings */
    lanes glass; /* permittivity, laminate only */
    size_t n_channels;
    double sine[MAX_CHANNELS], weight[MAX_CHANNELS];
    channel channel[MAX_CHANNELS];
} block;

/* The levels of refinement of one profile, made when first needed. */
typedef struct {
    slabs level[LEVELS];
    int made;
    size_t finest;
} refinement;

reflect_options reflect_defaults(void) {
    return (reflect_options){ .polarization = POL_MEAN, .tolerance = 1e-6 }; /* normal incidence */
}

static int textured(const stack *s) { return s->profile && s->profile->n > 0; }

static status check(const stack *s, const reflect_options *o, error *e) {
    char text[NUMBER_TEXT];
    if (!o->hemispherical && !(o->angle_deg >= 0.0 && o->angle_deg < 90.0))
        return fail(e, ST_BAD_INPUT, "the angle of incidence is %s degrees, expected 0 to below 90",
                    number_text(o->angle_deg, 6, text));
    if (!(o->tolerance > 0.0))
        return fail(e, ST_BAD_INPUT, "the tolerance of the reflectance has to be above 0");
    if (!s->substrate || (!s->ambient && !s->front.glass) || (s->front.glass && !s->front.encapsulant))
        return fail(e, ST_BAD_INPUT,
                    "the stack needs an ambient (or glass with an encapsulant) and a substrate");
    if (s->front.glass && !(s->front.glass_mm >= 0.0 && s->front.encapsulant_mm >= 0.0))
        return fail(e, ST_BAD_INPUT, "the thickness of glass and encapsulant has to be 0 mm or above");
    if (s->n_coatings > LIMIT_COATINGS)
        return fail(e, ST_BAD_INPUT, "%zu coatings; at most %d are possible", s->n_coatings, LIMIT_COATINGS);
    for (size_t j = 0; j < s->n_coatings; j++)
        if (!s->coatings[j].material || (!textured(s) && !(s->coatings[j].thickness_nm >= 0.0)))
            return fail(e, ST_BAD_INPUT, "coating %zu needs a material and a thickness of 0 nm or above",
                        j + 1);
    if (textured(s) && s->profile->n_coatings > s->n_coatings)
        return fail(e, ST_BAD_INPUT, "the profile has %zu coatings, the stack only %zu",
                    s->profile->n_coatings, s->n_coatings);
    return textured(s) ? profile_check(s->profile, e) : ST_OK;
}

/* Which angles and polarizations, with which weights. At normal incidence s is p. */
static void choose_channels(block *b, const reflect_options *o) {
    double angle[DIFFUSE_ANGLES] = { o->angle_deg * PI / 180.0 }, weight[DIFFUSE_ANGLES] = { 1.0 };
    size_t angles = o->hemispherical ? DIFFUSE_ANGLES : 1;
    if (o->hemispherical) {
        double sum = 0.0;
        quadrature_gauss(angles, angle, weight);
        for (size_t i = 0; i < angles; i++) {
            angle[i] *= 0.5 * PI;
            weight[i] *= 0.5 * PI * sin(2.0 * angle[i]);
            sum += weight[i];
        }
        for (size_t i = 0; i < angles; i++) weight[i] /= sum;
    }
    int both = o->polarization == POL_MEAN && !(angles == 1 && !(angle[0] > 0.0));
    b->n_channels = 0;
    for (size_t i = 0; i < angles; i++)
        for (int p = 0; p < 2; p++) {
            int wanted = both || p == (o->polarization == POL_P);
            if (!wanted) continue;
            b->sine[b->n_channels] = sin(angle[i]);
            b->weight[b->n_channels] = both ? 0.5 * weight[i] : weight[i];
            b->channel[b->n_channels++].p_polarized = p;
        }
}

/* s and p of each angle, apart. */
static void list_channels(block *b, const double *angle_deg, size_t n) {
    b->n_channels = 0;
    for (size_t i = 0; i < n; i++)
        for (int p = 0; p < 2; p++) {
            b->sine[b->n_channels] = sin(angle_deg[i] * PI / 180.0);
            b->channel[b->n_channels++].p_polarized = p;
        }
}

static status fill(lanes *eps, const material *m, const block *b, error *e) {
    for (size_t i = 0; i < b->n; i++) {
        double n, k;
        status st = material_at(m, b->wavelength_nm[i], &n, &k, e);
        if (st) return st;
        eps->re[i] = n * n - k * k;
        eps->im[i] = 2.0 * n * k;
    }
    return ST_OK;
}

static film half_space(const lanes *eps, size_t i) {
    return (film){ .in_plane = lane_get(eps, i), .axis = lane_get(eps, i) };
}

static status load_block(block *b, const stack *s, const double *wavelength_nm, error *e) {
    for (size_t i = 0; i < b->n; i++) {
        b->wavelength_nm[i] = wavelength_nm[i];
        b->k0[i] = 2.0 * PI / wavelength_nm[i];
        if (!(wavelength_nm[i] > 0.0) || !isfinite(wavelength_nm[i]))
            return fail(e, ST_BAD_INPUT, "a wavelength has to be above 0 nm");
    }
    status st = fill(&b->mix.eps[0], s->front.glass ? s->front.encapsulant : s->ambient, b, e);
    if (!st) st = fill(&b->mix.eps[1], s->substrate, b, e);
    for (size_t j = 0; !st && j < s->n_coatings; j++)
        st = fill(&b->mix.eps[2 + j], s->coatings[j].material, b, e);
    if (!st && s->front.glass) st = fill(&b->glass, s->front.glass, b, e);
    for (size_t c = 0; !st && c < b->n_channels; c++)
        for (size_t i = 0; i < b->n; i++) {
            /* Behind flat glass the tangential wave number is that of the air; else the angle is in the
             * ambient. */
            channel *ch = &b->channel[c];
            double index = s->front.glass ? 1.0 : creal(csqrt(lane_get(&b->mix.eps[0], i)));
            ch->s2[i] = index * b->sine[c] * (index * b->sine[c]);
            film ambient = half_space(&b->mix.eps[0], i), floor = half_space(&b->mix.eps[1], i);
            lane_set(&ch->ambient, i, film_half_space(&ambient, ch->s2[i], ch->p_polarized));
            lane_set(&ch->start, i, film_half_space(&floor, ch->s2[i], ch->p_polarized));
        }
    return st;
}

static void planar(block *b) {
    const stack *s = b->stack;
    for (size_t c = 0; c < b->n_channels; c++)
        for (size_t i = 0; i < b->n; i++) {
            film films[LIMIT_COATINGS], ambient = half_space(&b->mix.eps[0], i),
                                        floor = half_space(&b->mix.eps[1], i);
            for (size_t j = 0; j < s->n_coatings; j++) {
                films[j] = half_space(&b->mix.eps[2 + j], i);
                films[j].thickness_nm = s->coatings[j].thickness_nm;
            }
            channel *ch = &b->channel[c];
            ch->R[0][i] = multilayer(b->wavelength_nm[i], ch->s2[i], ch->p_polarized, &ambient, films,
                                     s->n_coatings, &floor, NULL)
                              .R;
        }
}

/* Largest phase of a slab, radian: before it is below 1 the slabs do not resolve the wave, and agreement is
 * chance. */
static double coarseness(const block *b, const slabs *cut) {
    double thick = 0.0, wave = 0.0;
    for (size_t j = 0; j < cut->n; j++) thick = fmax(thick, cut->thickness_nm[j]);
    for (size_t p = 0; p < b->mix.phases; p++)
        for (size_t i = 0; i < b->n; i++)
            wave = fmax(wave, b->k0[i] * sqrt(cabs(lane_get(&b->mix.eps[p], i))));
    return thick * wave;
}

/* Richardson on the walk just made (R[0]) and the one before (R[1]); keeps the result in R[2], returns its
 * largest move. */
static double extrapolate(block *b, int level) {
    double largest = 0.0;
    for (size_t c = 0; c < b->n_channels; c++)
        for (size_t i = 0; i < b->n; i++) {
            channel *ch = &b->channel[c];
            double now = level ? ch->R[0][i] + (ch->R[0][i] - ch->R[1][i]) / 15.0 : ch->R[0][i];
            if (level) largest = fmax(largest, fabs(now - ch->R[2][i]));
            ch->R[1][i] = ch->R[0][i];
            ch->R[2][i] = now;
        }
    return largest;
}

/* Refines until every R of the block stands still; *settled 0 when LIMIT_SLABS came first. */
static status graded(block *b, refinement *ref, double tolerance, int *settled, error *e) {
    const profile *p = b->stack->profile;
    int done = 0;
    mixing_prepare(&b->mix, b->stack->mixing, p->pores, 2 + p->n_coatings, b->n);
    for (int level = 0; level < LEVELS && !done; level++) {
        if (level && 2 * ref->level[level - 1].n > LIMIT_SLABS) break;
        if (level >= ref->made) {
            status st = slabs_make(&ref->level[level], p, level, e);
            if (st) return st;
            ref->made = level + 1;
        }
        const slabs *cut = &ref->level[level];
        graded_walk(cut, &b->mix, b->k0, b->channel, b->n_channels);
        if (cut->n > ref->finest) ref->finest = cut->n;
        double moved = extrapolate(b, level);
        done = level > 1 && moved < tolerance && coarseness(b, cut) < 1.0;
    }
    for (size_t c = 0; c < b->n_channels; c++) /* extrapolation may overshoot 0 or 1 by the tolerance */
        for (size_t i = 0; i < b->n; i++) b->channel[c].R[0][i] = fmin(1.0, fmax(0.0, b->channel[c].R[2][i]));
    *settled = *settled && done;
    return ST_OK;
}

/* Intensities through a thick slab onto what lies below (Stokes 1862): interface r, single passage t. */
static double over(double r, double t, double below) {
    double back = t * t * below;
    return r + (1.0 - r) * (1.0 - r) * back / (1.0 - r * back);
}

static void add_front(block *b) {
    const laminate *f = &b->stack->front;
    const film air = { .in_plane = 1.0, .axis = 1.0 };
    for (size_t c = 0; c < b->n_channels; c++)
        for (size_t i = 0; i < b->n; i++) {
            channel *ch = &b->channel[c];
            film glass = half_space(&b->glass, i), enc = half_space(&b->mix.eps[0], i);
            double w = b->wavelength_nm[i], s2 = ch->s2[i], two_k0_mm = 2.0e6 * b->k0[i];
            double r1 = multilayer(w, s2, ch->p_polarized, &air, NULL, 0, &glass, NULL).R;
            double r2 = multilayer(w, s2, ch->p_polarized, &glass, NULL, 0, &enc, NULL).R;
            double t1 = exp(-two_k0_mm * f->glass_mm * cimag(csqrt(glass.in_plane - s2)));
            double t2 = exp(-two_k0_mm * f->encapsulant_mm * cimag(csqrt(enc.in_plane - s2)));
            ch->R[0][i] = over(r1, t1, over(r2, t2, ch->R[0][i]));
        }
}

/* Leaves R of every channel in its R[0]. */
static status solve_block(block *b, refinement *ref, double tolerance, const double *wavelength_nm, int *settled, error *e) {
    status st = load_block(b, b->stack, wavelength_nm, e);
    if (st) return st;
    if (textured(b->stack))
        st = graded(b, ref, tolerance, settled, e);
    else
        planar(b);
    if (!st && b->stack->front.glass) add_front(b);
    return st;
}

static void add_up(const block *b, double *R) {
    for (size_t i = 0; i < b->n; i++) {
        double sum = 0.0;
        for (size_t c = 0; c < b->n_channels; c++) sum += b->weight[c] * b->channel[c].R[0][i];
        R[i] = sum;
    }
}

static status not_settled(const refinement *ref, error *e) {
    return fail(e, ST_NO_RESULT, "the reflectance of the texture has not settled with %zu slabs", ref->finest);
}

status reflectance(const stack *s, const reflect_options *o, const double *wavelength_nm, size_t n, double *R,
                   size_t *slabs_used, error *e) {
    refinement ref = { .made = 0 };
    int settled = 1;
    status st = check(s, o, e);
    if (st) return st;
    block *b = mem_array(1, sizeof *b);
    if (!b) return NO_MEMORY(e, "a reflectance spectrum");
    b->stack = s;
    choose_channels(b, o);
    for (size_t from = 0; from < n && !st; from += LANES) {
        b->n = n - from < LANES ? n - from : LANES;
        st = solve_block(b, &ref, o->tolerance, wavelength_nm + from, &settled, e);
        if (!st) add_up(b, R + from);
    }
    if (!st && !settled) st = not_settled(&ref, e);
    for (int level = 0; level < ref.made; level++) slabs_free(&ref.level[level]);
    if (slabs_used) *slabs_used = ref.finest;
    free(b);
    return st;
}

status reflectance_angles(const stack *s, const double *angle_deg, size_t n_angles, double tolerance,
                          const double *wavelength_nm, size_t n, double *Rs, double *Rp, error *e) {
    refinement ref = { .made = 0 };
    int settled = 1;
    status st = ST_OK;
    for (size_t a = 0; a < n_angles && !st; a++) {
        reflect_options o = { .angle_deg = angle_deg[a], .tolerance = tolerance };
        st = check(s, &o, e);
    }
    block *b = st ? NULL : mem_array(1, sizeof *b);
    if (!st && !b) st = NO_MEMORY(e, "reflectance spectra");
    if (b) b->stack = s;
    for (size_t first = 0; first < n_angles && !st; first += GROUP_ANGLES) {
        size_t angles = n_angles - first < GROUP_ANGLES ? n_angles - first : GROUP_ANGLES;
        list_channels(b, angle_deg + first, angles);
        for (size_t from = 0; from < n && !st; from += LANES) {
            b->n = n - from < LANES ? n - from : LANES;
            st = solve_block(b, &ref, tolerance, wavelength_nm + from, &settled, e);
            for (size_t c = 0; c < b->n_channels && !st; c++) {
                double *R = c % 2 ? Rp : Rs;
                memcpy(R + (first + c / 2) * n + from, b->channel[c].R[0], b->n * sizeof *R);
            }
        }
    }
    if (!st && !settled) st = not_settled(&ref, e);
    for (int level = 0; level < ref.made; level++) slabs_free(&ref.level[level]);
    free(b);
    return st;
}
