/* Light from any direction, through a laminate or not, on a field of square pyramids: every class of rays (rays.h) carries
 * its polarization from facet to facet as a Jones vector (the planes of incidence turn), the facets reflect as flat coated
 * silicon, classes add as intensities. Azimuths: the mean over four in an eighth of the circle, which symmetry repeats.
 *   Behind glass (flat front, intensities as in reflectance.c): light comes refracted, leaves each class in its own
 * direction, and what the glass throws back (beyond the critical angle all of it) meets the pyramids again, where it is
 * taken to fare as on first arrival: R = r1 + (1 - r1) t E / (1 - B), E what leaves, B what comes back, of what arrives.
 * The refracted angle is that of the middle of the band: the encapsulant disperses by 0.02 in its index.
 * What this file does not do: what rays.c does not; interference between facets. */
#include <complex.h>
#include <math.h>
#include <stdlib.h>

#include "base/mem.h"
#include "base/quantity.h"
#include "optics/facets.h"
#include "optics/lanes.h"
#include "optics/multilayer.h"
#include "optics/quadrature.h"
#include "optics/rays.h"

enum { AZIMUTHS = 4, ACROSS = 24, SKY = 8, ANGLES_MOST = 256 };
static const double EIGHTH = 45.0; /* degrees */

/* One class made ready: which Fresnel values, how the polarization turns between. */
typedef struct {
    size_t n;
    size_t at[RAY_BOUNCES];     /* index of the incidence in `sine2` */
    double turn[RAY_BOUNCES][4]; /* (s, p) before bounce k from (s, p) after the one before: rows of 2 x 2 */
    double share, out2;         /* out2: sin^2 of the direction it leaves in */
} ray_path;

typedef struct {
    ray_path *paths; /* [n] owned */
    size_t n, n_sine2;
    double sine2[ANGLES_MOST], in2; /* sin^2 of the incidences on facets; of the beam on the wafer */
} beam;

/* Optics of one wavelength. */
typedef struct {
    double wavelength_nm;
    film ambient, films[LIMIT_COATINGS], substrate, glass, air;
    double complex rs[ANGLES_MOST], rp[ANGLES_MOST];
} facet_optics;

/* ---- geometry ---- */

static direction cross(const direction *a, const direction *b) {
    return (direction){ { a->v[1] * b->v[2] - a->v[2] * b->v[1], a->v[2] * b->v[0] - a->v[0] * b->v[2],
                          a->v[0] * b->v[1] - a->v[1] * b->v[0] } };
}

/* s for light along d on a plane: perpendicular to both; on vertical incidence `else_s`. */
static direction s_axis(const direction *d, const direction *normal, const direction *else_s) {
    direction s = cross(d, normal);
    double length = sqrt(dot(&s, &s));
    if (length < 1e-9) return *else_s;
    for (int i = 0; i < 3; i++) s.v[i] /= length;
    return s;
}

static size_t incidence(beam *b, double sine2) {
    for (size_t i = 0; i < b->n_sine2; i++)
        if (fabs(b->sine2[i] - sine2) < 1e-9) return i;
    if (b->n_sine2 == ANGLES_MOST) return ANGLES_MOST - 1; /* some ten are the rule */
    b->sine2[b->n_sine2] = sine2;
    return b->n_sine2++;
}

static void path_make(const ray_class *c, const ray_beam *rays, const facet_field *f, double phi_deg, beam *b, ray_path *p) {
    direction up = { { 0.0, 0.0, 1.0 } }, d = rays->in;
    direction level = { { -sin(phi_deg * PI / 180.0), cos(phi_deg * PI / 180.0), 0.0 } };
    direction s = s_axis(&d, &up, &level), q = cross(&s, &d); /* the polarizations of the beam: s, p = s x d */
    p->n = c->n < f->bounces_most ? c->n : f->bounces_most;
    p->share = c->share;
    for (size_t k = 0; k < p->n; k++) {
        direction normal = facet_normal(c->facet[k], f->angle_deg), sk = s_axis(&d, &normal, &s), pk = cross(&sk, &d);
        double cosine = dot(&d, &normal);
        p->at[k] = incidence(b, fmax(0.0, 1.0 - cosine * cosine));
        p->turn[k][0] = dot(&s, &sk);
        p->turn[k][1] = dot(&q, &sk);
        p->turn[k][2] = dot(&s, &pk);
        p->turn[k][3] = dot(&q, &pk);
        d = reflected(&d, &normal);
        s = sk;
        q = cross(&s, &d);
    }
    p->out2 = fmin(1.0, d.v[0] * d.v[0] + d.v[1] * d.v[1]);
}

static status beam_make(const facet_field *f, double theta_deg, double phi_deg, beam *b, error *e) {
    ray_beam rays = { 0 };
    double sine = sin(theta_deg * PI / 180.0);
    *b = (beam){ .in2 = sine * sine };
    status st = rays_trace(f->angle_deg, theta_deg, phi_deg, ACROSS, &rays, e);
    if (st == ST_OK) {
        b->paths = mem_array(rays.n, sizeof *b->paths);
        if (!b->paths) st = NO_MEMORY(e, "the rays between facets");
    }
    for (size_t c = 0; c < rays.n && st == ST_OK; c++) path_make(&rays.classes[c], &rays, f, phi_deg, b, &b->paths[b->n++]);
    ray_beam_free(&rays);
    return st;
}

/* ---- light ---- */

static status film_of(const material *m, double wavelength_nm, film *out, error *e) {
    double n, k;
    status st = material_at(m, wavelength_nm, &n, &k, e);
    if (st == ST_OK) out->in_plane = out->axis = complex_of(n * n - k * k, 2.0 * n * k);
    return st;
}

static status optics_at(const stack *s, double wavelength_nm, facet_optics *o, error *e) {
    *o = (facet_optics){ .wavelength_nm = wavelength_nm, .air = { .in_plane = 1.0, .axis = 1.0 } };
    status st = film_of(s->front.glass ? s->front.encapsulant : s->ambient, wavelength_nm, &o->ambient, e);
    if (st == ST_OK) st = film_of(s->substrate, wavelength_nm, &o->substrate, e);
    if (st == ST_OK && s->front.glass) st = film_of(s->front.glass, wavelength_nm, &o->glass, e);
    for (size_t j = 0; j < s->n_coatings && st == ST_OK; j++) {
        st = film_of(s->coatings[j].material, wavelength_nm, &o->films[j], e);
        o->films[j].thickness_nm = s->coatings[j].thickness_nm;
    }
    return st;
}

static void fresnel(const stack *s, const beam *b, facet_optics *o) {
    double complex field[2 * (LIMIT_COATINGS + 1)];
    double ambient = creal(o->ambient.in_plane);
    for (size_t i = 0; i < b->n_sine2; i++)
        for (int p = 0; p < 2; p++) {
            multilayer(o->wavelength_nm, ambient * b->sine2[i], p, &o->ambient, o->films, s->n_coatings, &o->substrate, field);
            (p ? o->rp : o->rs)[i] = field[0] - 1.0; /* of the field along s: E for s, H for p */
        }
}

/* Power that a class reflects of unit s or p light. */
static double path_power(const ray_path *p, const facet_optics *o, double goes_on, int p_polarized) {
    double complex s = p_polarized ? 0.0 : 1.0, q = p_polarized ? 1.0 : 0.0;
    for (size_t k = 0; k < p->n; k++) {
        const double *t = p->turn[k];
        double complex sk = t[0] * s + t[1] * q, pk = t[2] * s + t[3] * q;
        s = o->rs[p->at[k]] * sk;
        q = o->rp[p->at[k]] * pk;
    }
    double power = creal(s * conj(s)) + creal(q * conj(q));
    if (!(goes_on > 0.0) || !p->n) return power;
    size_t last = p->at[p->n - 1];
    double more = 0.5 * (creal(o->rs[last] * conj(o->rs[last])) + creal(o->rp[last] * conj(o->rp[last])));
    return power * (1.0 - goes_on + goes_on * more);
}

/* R and single passage of glass and encapsulant at a tangential wave number; p 0, 1, or 2 for the mean. */
static void front(const stack *s, const facet_optics *o, double s2, int polarized, double *r, double *t) {
    double k = 4.0 * PI / o->wavelength_nm * 1e6, faces[2] = { 0.0, 0.0 };
    for (int p = 0; p < 2; p++) {
        double r1 = multilayer(o->wavelength_nm, s2, p, &o->glass, NULL, 0, &o->air, NULL).R;
        double r2 = multilayer(o->wavelength_nm, s2, p, &o->ambient, NULL, 0, &o->glass, NULL).R;
        faces[p] = r1 + (1.0 - r1) * (1.0 - r1) * r2 / (1.0 - r1 * r2); /* two faces, intensities */
    }
    *r = polarized < 2 ? faces[polarized] : 0.5 * (faces[0] + faces[1]);
    *t = exp(-k * (s->front.glass_mm * cimag(csqrt(o->glass.in_plane - s2)) +
                   s->front.encapsulant_mm * cimag(csqrt(o->ambient.in_plane - s2))));
}

static double beam_power(const stack *s, const beam *b, const facet_optics *o, double goes_on, int p_polarized) {
    double leaves = 0.0, back = 0.0, r, t, ambient = creal(o->ambient.in_plane);
    for (size_t c = 0; c < b->n; c++) {
        double power = b->paths[c].share * path_power(&b->paths[c], o, goes_on, p_polarized);
        if (!s->front.glass) {
            leaves += power;
            continue;
        }
        front(s, o, ambient * b->paths[c].out2, 2, &r, &t);
        leaves += power * t * (1.0 - r);
        back += power * t * r * t;
    }
    if (!s->front.glass) return leaves;
    front(s, o, ambient * b->in2, p_polarized, &r, &t);
    return r + (1.0 - r) * t * leaves / (1.0 - back);
}

/* ---- all directions ---- */

/* Adds weight times the beam's R at every wavelength. */
static status add_beam(const stack *s, const beam *b, const facet_field *f, polarization pol, double weight,
                       const double *wavelength_nm, size_t n, double *R, error *e) {
    facet_optics *o = mem_array(1, sizeof *o);
    status st = o ? ST_OK : NO_MEMORY(e, "the reflectance of facets");
    for (size_t i = 0; i < n && st == ST_OK; i++) {
        st = optics_at(s, wavelength_nm[i], o, e);
        if (st != ST_OK) break;
        fresnel(s, b, o);
        double rs = pol == POL_P ? 0.0 : beam_power(s, b, o, f->goes_on, 0), rp = pol == POL_S ? 0.0 : beam_power(s, b, o, f->goes_on, 1);
        R[i] += weight * (pol == POL_MEAN ? 0.5 * (rs + rp) : rs + rp);
    }
    free(o);
    return st;
}

/* Angle at the pyramids of light from theta outside. */
static status inner_angle(const stack *s, double theta_deg, double middle_nm, double *inner, error *e) {
    double n = 1.0, k;
    *inner = theta_deg;
    if (!s->front.glass) return ST_OK;
    status st = material_at(s->front.encapsulant, middle_nm, &n, &k, e);
    if (st == ST_OK) *inner = asin(fmin(1.0, sin(theta_deg * PI / 180.0) / n)) * 180.0 / PI;
    return st;
}

status facets_field_reflectance(const stack *s, const facet_field *f, const reflect_options *light, const double *wavelength_nm,
                                size_t n, double *R, error *e) {
    double angle[SKY] = { light->angle_deg }, weight[SKY] = { 1.0 }, sum = 0.0, inner = 0.0;
    size_t angles = light->hemispherical ? SKY : 1;
    status st = n ? ST_OK : fail(e, ST_BAD_INPUT, "no wavelength to reflect");
    if (light->hemispherical) {
        quadrature_gauss(SKY, angle, weight);
        for (size_t i = 0; i < SKY; i++) {
            weight[i] *= sin(PI * angle[i]); /* sin 2 theta over 0..90 degrees */
            angle[i] *= 90.0;
            sum += weight[i];
        }
        for (size_t i = 0; i < SKY; i++) weight[i] /= sum;
    }
    for (size_t i = 0; i < n; i++) R[i] = 0.0;
    for (size_t a = 0; a < angles && st == ST_OK; a++) {
        st = inner_angle(s, angle[a], n ? wavelength_nm[n / 2] : 0.0, &inner, e);
        for (int k = 0; k < AZIMUTHS && st == ST_OK; k++) {
            beam b = { 0 };
            st = beam_make(f, inner, EIGHTH * (k + 0.5) / AZIMUTHS, &b, e);
            if (st == ST_OK) st = add_beam(s, &b, f, light->polarization, weight[a] / AZIMUTHS, wavelength_nm, n, R, e);
            free(b.paths);
        }
    }
    return st;
}
