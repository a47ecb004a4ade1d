/* The public call: order of wavelengths, polarizations, hemisphere, laminate, tolerance, properties, each
 * refusal. Figures: tests/external/{fresnel,multilayer,graded,sun}.c. */
#include "optics/reflectance.h"

#include "base/mem.h"
#include "base/quantity.h"
#include "check.h"
#include "optics_data.h"

static material air, si, glass, eva, nitride;
static const double cone = 2;

static void any_order(void) { /* each wavelength by itself, in any order, in blocks of any size: same value */
    profile p = data_profile(260, 301, data_power, &cone);
    stack s = { .ambient = &air, .substrate = &si, .profile = &p };
    reflect_options o = reflect_defaults();
    error e = { 0 };
    static double w[150], R[150];
    size_t used = 0;
    o.angle_deg = 41;
    for (int i = 0; i < 150; i++) w[i] = 300 + 6 * ((i * 67) % 150);
    CHECK(reflectance(&s, &o, w, 150, R, &used, &e) == ST_OK && used >= 32 && used <= LIMIT_SLABS);
    for (int i = 0; i < 150; i += 13) {
        double one = 0;
        CHECK(reflectance(&s, &o, &w[i], 1, &one, NULL, &e) == ST_OK);
        CHECK_NEAR(one, R[i], 1e-6); /* the tolerance: a block refines as its hardest wavelength needs */
    }
    CHECK(reflectance(&s, &o, w, 0, R, NULL, &e) == ST_OK);
    profile_free(&p);
}

static void polarizations(void) {
    profile p = data_profile(260, 301, data_power, &cone);
    layer film = { &nitride, 60 };
    stack stacks[] = { { .ambient = &air, .substrate = &si, .profile = &p },
                       { .ambient = &air, .substrate = &si, .coatings = &film, .n_coatings = 1 },
                       { .front = { &glass, 3.2, &eva, 0.45 }, .substrate = &si, .profile = &p } };
    for (int i = 0; i < 3; i++) {
        CHECK_NEAR(data_R(&stacks[i], 600, 0, POL_S), data_R(&stacks[i], 600, 0, POL_P), 1e-14);
        CHECK_NEAR(data_R(&stacks[i], 600, 0, POL_MEAN), data_R(&stacks[i], 600, 0, POL_P), 1e-14);
        double s = data_R(&stacks[i], 600, 55, POL_S), q = data_R(&stacks[i], 600, 55, POL_P);
        CHECK_NEAR(data_R(&stacks[i], 600, 55, POL_MEAN), 0.5 * (s + q), 1e-6);
        CHECK(fabs(s - q) > 1e-3);
        CHECK(data_R(&stacks[i], 600, 89.9, POL_S) > 0.9); /* grazing: all comes back */
    }
    profile_free(&p);
}

/* Diffuse light is the integral of R sin 2theta: here by Simpson over 180 steps. */
static void hemisphere(void) {
    profile p = data_profile(260, 301, data_power, &cone);
    stack s = { .ambient = &air, .substrate = &si, .profile = &p };
    reflect_options o = reflect_defaults();
    error e = { 0 };
    double nm = 700, R = 0, sum = 0;
    o.hemispherical = 1;
    o.angle_deg = 400; /* ignored */
    CHECK(reflectance(&s, &o, &nm, 1, &R, NULL, &e) == ST_OK);
    for (int i = 0; i < 180; i++)
        sum += (i % 2 ? 4 : 2) * data_R(&s, nm, 0.5 * i, POL_MEAN) * sin(i * PI / 180);
    CHECK_NEAR(R, sum * 0.5 * PI / 180 / 3, 1e-5); /* both ends carry no weight */
    o.polarization = POL_S;
    double s_only = 0, p_only = 0;
    CHECK(reflectance(&s, &o, &nm, 1, &s_only, NULL, &e) == ST_OK);
    o.polarization = POL_P;
    CHECK(reflectance(&s, &o, &nm, 1, &p_only, NULL, &e) == ST_OK);
    CHECK_NEAR(R, 0.5 * (s_only + p_only), 1e-6);
    profile_free(&p);
}

/* Steps at both ends: a texture that is one even film equals that film. */
/* Many angles at once: the same values as one by one, in more than one group, planar and through glass too. */
static void many_angles(void) {
    enum { ANGLES = 23, N = 70 };
    double angle[ANGLES], nm[N], Rs[ANGLES * N], Rp[ANGLES * N], one[N];
    error e = { 0 };
    profile p = data_profile(300, 301, data_power, &cone);
    for (int i = 0; i < ANGLES; i++) angle[i] = 4.0 * i + (i == ANGLES - 1 ? 1.5 : 0.0);
    for (int i = 0; i < N; i++) nm[i] = 400 + 9.0 * i;
    for (int kind = 0; kind < 3; kind++) {
        stack s = { .ambient = &air, .substrate = &si, .profile = kind ? &p : NULL };
        if (kind == 2) s.front = (laminate){ &glass, 3.2, &eva, 0.45 };
        CHECK(reflectance_angles(&s, angle, ANGLES, 1e-6, nm, N, Rs, Rp, &e) == ST_OK);
        for (int a = 0; a < ANGLES; a += 2)
            for (int pol = POL_S; pol <= POL_P; pol++) {
                reflect_options o = reflect_defaults();
                o.angle_deg = angle[a];
                o.polarization = (polarization)pol;
                CHECK(reflectance(&s, &o, nm, N, one, NULL, &e) == ST_OK);
                for (int i = 0; i < N; i++) CHECK_NEAR((pol == POL_S ? Rs : Rp)[a * N + i], one[i], 3e-6);
            }
    }
    angle[3] = 90.0;
    stack s = { .ambient = &air, .substrate = &si, .profile = &p };
    CHECK_FAILS(reflectance_angles(&s, angle, ANGLES, 1e-6, nm, N, Rs, Rp, &e), ST_BAD_INPUT, e, "0 to below 90");
    angle[3] = 12.0;
    for (size_t i = 1; i <= 3; i++) {
        mem_fail_after(i);
        CHECK_FAILS(reflectance_angles(&s, angle, ANGLES, 1e-6, nm, N, Rs, Rp, &e), ST_NO_MEMORY, e, "memory");
    }
    mem_fail_after(0);
    profile_free(&p);
}

static void steps(void) {
    double z[] = { 0, 0, 90, 90, 90 }, f[] = { 0, 0.4, 0.4, 0.7, 0.7 };
    profile p = { .n = 5, .depth_nm = z, .solid = f };
    material a = data_constant(1.3, 0), b = data_constant(3.5, 0),
             mid = data_constant(sqrt(0.4 * 12.25 + 0.6 * 1.69), 0);
    layer film = { &mid, 90 };
    stack graded = { .ambient = &a, .substrate = &b, .profile = &p, .mixing = MIX_VOLUME };
    stack planar = { .ambient = &a, .substrate = &b, .coatings = &film, .n_coatings = 1 };
    CHECK_NEAR(data_R(&graded, 620, 50, POL_P), data_R(&planar, 620, 50, POL_P), 1e-7);
    CHECK_NEAR(data_R(&graded, 620, 0, POL_MEAN), data_R(&planar, 620, 0, POL_MEAN), 1e-7);
    material_free(&a), material_free(&b), material_free(&mid);
}

/* A planar film written as a coating share of a profile: the three-phase path meets the exact film. */
static void coating_as_profile(void) {
    double z[] = { 0, 75 }, none[] = { 0, 0 }, full[] = { 1, 1 };
    profile p = { .n = 2, .depth_nm = z, .solid = none, .coating = { full }, .n_coatings = 1 };
    layer film = { &nitride, 75 };
    for (int rule = 0; rule < MIXINGS; rule++) {
        stack shares = { .ambient = &air,
                         .substrate = &si,
                         .coatings = &film,
                         .n_coatings = 1,
                         .profile = &p,
                         .mixing = (mixing)rule };
        stack planar = { .ambient = &air, .substrate = &si, .coatings = &film, .n_coatings = 1 };
        CHECK_NEAR(data_R(&shares, 500, 37, POL_P), data_R(&planar, 500, 37, POL_P), 1e-7);
        CHECK_NEAR(data_R(&shares, 500, 37, POL_S), data_R(&planar, 500, 37, POL_S), 1e-7);
    }
}

/* The laminate by hand: the texture inside the encapsulant at the refracted angle, then two incoherent
 * interfaces. */
static void laminate_by_hand(void) {
    profile p = data_profile(260, 301, data_power, &cone);
    material clear = data_constant(1.5, 0), dense = data_constant(1.48, 0);
    stack s = { .front = { &clear, 3.2, &dense, 0.45 }, .substrate = &si, .profile = &p };
    stack inner = { .ambient = &dense, .substrate = &si, .profile = &p };
    stack face = { .ambient = &air, .substrate = &clear }, joint = { .ambient = &clear, .substrate = &dense };
    for (double deg = 0; deg < 85; deg += 21)
        for (polarization q = POL_S; q <= POL_P; q++) {
            double sine = sin(deg * PI / 180), in_glass = asin(sine / 1.5) * 180 / PI,
                   in_eva = asin(sine / 1.48) * 180 / PI;
            double r1 = data_R(&face, 640, deg, q), r2 = data_R(&joint, 640, in_glass, q),
                   t = data_R(&inner, 640, in_eva, q);
            double below = r2 + (1 - r2) * (1 - r2) * t / (1 - r2 * t);
            CHECK_NEAR(data_R(&s, 640, deg, q), r1 + (1 - r1) * (1 - r1) * below / (1 - r1 * below), 2e-6);
        }
    /* Absorption only takes away, and in the ultraviolet the encapsulant hides the silicon. */
    stack real = { .front = { &glass, 3.2, &eva, 0.45 }, .substrate = &si };
    stack thin = { .front = { &glass, 0, &eva, 0 }, .substrate = &si };
    CHECK(data_R(&real, 320, 0, POL_MEAN) < 0.05);
    for (double nm = 300; nm <= 1200; nm += 50)
        CHECK(data_R(&real, nm, 30, POL_MEAN) <= data_R(&thin, nm, 30, POL_MEAN));
    profile_free(&p);
    material_free(&clear), material_free(&dense);
}

static void properties(void) {
    double before = 1;
    for (double h = 1; h < 3000; h *= 2.7) {
        profile p = data_profile(h, 301, data_power, &cone);
        for (int rule = 0; rule < MIXINGS; rule++)
            for (int pores = 0; pores < 2; pores++) {
                stack s = { .ambient = &air, .substrate = &si, .profile = &p, .mixing = (mixing)rule };
                p.pores = pores;
                double R = data_R(&s, 350, 65, POL_MEAN);
                CHECK(R >= 0 && R <= 1);
            }
        stack s = { .ambient = &air, .substrate = &si, .profile = &p };
        double R = data_R(&s, 1000, 0, POL_MEAN);
        CHECK(R < before + 2e-3);
        before = R;
        profile_free(&p);
    }
    /* A tighter tolerance moves R by no more than the looser one promised. */
    profile p = data_profile(300, 301, data_power, &cone);
    stack s = { .ambient = &air, .substrate = &si, .profile = &p, .mixing = MIX_MAXWELL_GARNETT_2D };
    reflect_options o = reflect_defaults();
    error e = { 0 };
    double nm[] = { 300, 365, 500, 900 }, loose[4], tight[4];
    size_t few = 0, many = 0;
    o.tolerance = 1e-4;
    CHECK(reflectance(&s, &o, nm, 4, loose, &few, &e) == ST_OK);
    o.tolerance = 1e-9;
    CHECK(reflectance(&s, &o, nm, 4, tight, &many, &e) == ST_OK);
    CHECK(few < many);
    for (int i = 0; i < 4; i++) CHECK_NEAR(loose[i], tight[i], 1e-4);
    o.tolerance = 1e-40; /* cannot be met: the best values come back with a word about it */
    CHECK_FAILS(reflectance(&s, &o, nm, 4, loose, &many, &e), ST_NO_RESULT, e, "has not settled with");
    for (int i = 0; i < 4; i++) CHECK_NEAR(loose[i], tight[i], 1e-8);
    CHECK(many <= LIMIT_SLABS);
    profile_free(&p);
}

static void refusals(void) {
    profile p = data_profile(300, 11, data_power, &cone);
    layer film = { &nitride, 75 }, none = { NULL, 75 }, negative = { &nitride, -1 };
    stack s = { .ambient = &air, .substrate = &si, .profile = &p };
    reflect_options o = reflect_defaults();
    error e = { 0 };
    double nm[] = { 500, 249 }, R[2];
    CHECK_FAILS(reflectance(&s, &o, nm, 2, R, NULL, &e), ST_BAD_INPUT, e,
                "silicon is tabled from 250 to 1450 nm, 249 nm was asked for");
    nm[1] = -3;
    CHECK_FAILS(reflectance(&s, &o, nm, 2, R, NULL, &e), ST_BAD_INPUT, e, "above 0 nm");
    o.angle_deg = 90;
    CHECK_FAILS(reflectance(&s, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e,
                "the angle of incidence is 90 degrees");
    o.angle_deg = -1;
    CHECK_FAILS(reflectance(&s, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e, "angle of incidence");
    o = reflect_defaults();
    o.tolerance = 0;
    CHECK_FAILS(reflectance(&s, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e, "tolerance");
    o = reflect_defaults();
    p.solid[4] = 1.2;
    CHECK_FAILS(reflectance(&s, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e, "share outside 0..1");
    p.solid[4] = 0.16;
    stack empty = { .ambient = &air }, open = { .substrate = &si },
          half = { .front = { .glass = &glass }, .substrate = &si };
    CHECK_FAILS(reflectance(&empty, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e, "a substrate");
    CHECK_FAILS(reflectance(&open, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e, "needs an ambient");
    CHECK_FAILS(reflectance(&half, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e, "encapsulant");
    stack front = { .front = { &glass, -1, &eva, 0.45 }, .substrate = &si };
    CHECK_FAILS(reflectance(&front, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e, "0 mm or above");
    stack bad = { .ambient = &air, .substrate = &si, .coatings = &none, .n_coatings = 1 };
    CHECK_FAILS(reflectance(&bad, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e, "coating 1 needs a material");
    bad.coatings = &negative;
    CHECK_FAILS(reflectance(&bad, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e, "0 nm or above");
    bad.coatings = &film;
    bad.n_coatings = LIMIT_COATINGS + 1;
    CHECK_FAILS(reflectance(&bad, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e, "at most");
    p.n_coatings = 1;
    p.coating[0] = calloc(p.n, sizeof(double));
    CHECK_FAILS(reflectance(&s, &o, nm, 1, R, NULL, &e), ST_BAD_INPUT, e,
                "the profile has 1 coatings, the stack only 0");
    p.n_coatings = 0;
    for (size_t i = 1; i <= 7; i++) {
        mem_fail_after(i);
        CHECK_FAILS(reflectance(&s, &o, nm, 1, R, NULL, &e), ST_NO_MEMORY, e, "memory");
    }
    mem_fail_after(0);
    profile_free(&p);
}

int main(void) {
    air = data_constant(1, 0), si = data_material("silicon"), nitride = data_material("nitride");
    glass = data_material("glass"), eva = data_material("encapsulant");
    any_order();
    polarizations();
    hemisphere();
    many_angles();
    steps();
    coating_as_profile();
    laminate_by_hand();
    properties();
    refusals();
    material_free(&air), material_free(&si), material_free(&nitride), material_free(&glass),
        material_free(&eva);
    return check_done();
}
