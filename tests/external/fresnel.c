/* Single interfaces against published formulas and 40-digit values: G-01..G-07, Brewster and total
 * reflection, silicon by angle, incoherent plates (G-18), diffuse light (G-19, G-20), the uniaxial half-space
 * (G-21). */
#include "base/quantity.h"
#include "check.h"
#include "optics/multilayer.h"
#include "optics_data.h"

static const char BORN_WOLF[] = "Born & Wolf, Principles of Optics, section 1.5 (40-digit evaluation)";
static const char GREEN[] =
    "Fresnel on Green (2008) Sol. Energy Mater. Sol. Cells 92, 1305, computed independently";

static void interfaces(void) {
    /* clang-format off */
    static const struct { const char *id; double n, k, s[4], p[4]; } rows[] = { /* 0, 45, 60, 80 deg */
        { "G-01", 1.5, 0.0, { 0.04, 0.0920133630455, 0.176571488083, 0.53859490575 }, { 0.04, 0.00846645897895, 0.00180193752159, 0.236813803633 } },
        { "G-02", 3.5, 0.0, { 0.308641975309, 0.432942960935, 0.552060228727, 0.81302360397 }, { 0.308641975309, 0.187439607423, 0.0825316779345, 0.0503875872661 } },
        { "G-03", 3.882, 0.019, { 0.348501538855, 0.472540700629, 0.587657357596, 0.83101741803 }, { 0.348501538855, 0.22329471375, 0.109812855415, 0.0319085798474 } },
        { "G-04", 5.57, 0.387, { 0.48562460445, 0.599226050529, 0.695860066813, 0.881543155573 }, { 0.48562460445, 0.359071859632, 0.228807761692, 0.00118642648502 } },
        { "G-05", 5.0, 3.6, { 0.591503267974, 0.690063097388, 0.769356939317, 0.91299495194 }, { 0.591503267974, 0.476187078377, 0.352564285791, 0.10100442233 } },
    };
    /* clang-format on */
    static const double angle[] = { 0.0, 45.0, 60.0, 80.0 };
    material air = data_constant(1.0, 0.0);
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        material m = data_constant(rows[i].n, rows[i].k);
        stack s = { .ambient = &air, .substrate = &m };
        for (size_t a = 0; a < 4; a++) {
            double Rs = data_R(&s, 600.0, angle[a], POL_S), Rp = data_R(&s, 600.0, angle[a], POL_P);
            CHECK_SOURCE(Rs, rows[i].s[a], 1e-11, rows[i].id);
            CHECK_SOURCE(Rp, rows[i].p[a], 1e-11, rows[i].id);
            CHECK_SOURCE(data_R(&s, 600.0, angle[a], POL_MEAN), 0.5 * (rows[i].s[a] + rows[i].p[a]), 1e-11,
                         rows[i].id);
            if (angle[a] > 44.0 && angle[a] < 46.0)
                CHECK_SOURCE(Rp, Rs * Rs, 1e-14, "p = s^2 at 45 degrees, Born & Wolf 1.5");
        }
        material_free(&m);
    }
    material_free(&air);
}

/* The angle of least Rp, by golden section. */
static double least_p(const stack *s, double nm, double lo, double hi) {
    double g = 0.5 * (sqrt(5.0) - 1.0);
    for (int i = 0; i < 60; i++) {
        double a = hi - g * (hi - lo), b = lo + g * (hi - lo);
        if (data_R(s, nm, a, POL_P) < data_R(s, nm, b, POL_P))
            hi = b;
        else
            lo = a;
    }
    return 0.5 * (lo + hi);
}

static void brewster_and_total_reflection(void) {
    material air = data_constant(1.0, 0.0), glass = data_constant(1.5, 0.0), dense = data_constant(3.5, 0.0);
    material real_si = data_constant(3.882, 0.0), si = data_material("silicon");
    layer gap = { &air, 100.0 };
    stack up = { .ambient = &air, .substrate = &glass }, down = { .ambient = &glass, .substrate = &air };
    stack high = { .ambient = &air, .substrate = &dense }, wafer = { .ambient = &air, .substrate = &si };
    stack g06 = { .ambient = &air, .substrate = &real_si };
    stack gapped = { .ambient = &glass, .substrate = &glass, .coatings = &gap, .n_coatings = 1 };
    /* Printed to 8 decimals of a degree: Rp there is below (1e-8 rad)^2. The exact angle gives rounding
     * alone. */
    CHECK_SOURCE(data_R(&up, 633.0, atan(1.5) * 180.0 / PI, POL_P), 0.0, 1e-28,
                 "G-06 Brewster, Born & Wolf 1.5");
    CHECK_SOURCE(data_R(&g06, 633.0, atan(3.882) * 180.0 / PI, POL_P), 0.0, 1e-28,
                 "G-06 Brewster, Born & Wolf 1.5");
    CHECK_SOURCE(atan(1.5) * 180.0 / PI, 56.309932474, 1e-9, "G-06");
    CHECK_SOURCE(atan(3.882) * 180.0 / PI, 75.5547060047, 1e-9, "G-06");
    CHECK_SOURCE(least_p(&up, 633.0, 50.0, 60.0), 56.30993247, 1e-6, "Brewster, 1 to 1.5");
    CHECK_SOURCE(data_R(&up, 633.0, 56.30993247, POL_S), 0.14792899, 5e-9, BORN_WOLF);
    CHECK_SOURCE(data_R(&high, 633.0, 74.05460410, POL_P), 0.0, 1e-18, BORN_WOLF);
    CHECK_SOURCE(data_R(&high, 633.0, 74.05460410, POL_S), 0.72089712, 5e-9, BORN_WOLF);
    CHECK_SOURCE(data_R(&down, 633.0, 33.69006753, POL_P), 0.0, 1e-18, BORN_WOLF);
    CHECK_SOURCE(data_R(&down, 633.0, 33.69006753, POL_S), 0.14792899, 5e-9, BORN_WOLF);
    for (double angle = 45.0; angle < 89.0; angle += 5.0) {
        CHECK_SOURCE(data_R(&down, 633.0, angle, POL_S), 1.0, 1e-12, "G-07 total reflection");
        CHECK_SOURCE(data_R(&down, 633.0, angle, POL_P), 1.0, 1e-12, "G-07 total reflection");
    }
    CHECK(data_R(&down, 633.0, 41.81, POL_S) < 1.0 - 1e-3); /* critical angle 41.8103148958 */
    CHECK_SOURCE(data_R(&down, 633.0, 41.8103148959, POL_S), 1.0, 1e-12, "G-07 critical angle");
    CHECK_SOURCE(data_R(&gapped, 633.0, 50.0, POL_P), 0.27436084, 5e-9,
                 "frustrated total reflection, closed form");
    CHECK_SOURCE(data_R(&gapped, 633.0, 50.0, POL_S), 0.31479937, 5e-9,
                 "frustrated total reflection, closed form");
    CHECK_SOURCE(least_p(&wafer, 633.0, 70.0, 80.0), 75.52480, 5e-5, "pseudo-Brewster angle of silicon");
    CHECK_SOURCE(data_R(&wafer, 633.0, 75.52480, POL_P), 3.7812e-6, 5e-11,
                 "pseudo-Brewster angle of silicon");
    material_free(&air), material_free(&glass), material_free(&dense), material_free(&real_si),
        material_free(&si);
}

static void silicon(void) {
    static const struct {
        double nm, R;
    } normal[] = { { 300, 0.62892901 }, { 350, 0.56743461 }, { 400, 0.48762403 },   { 500, 0.38719270 },
                   { 600, 0.35420416 }, { 633, 0.34766567 }, { 632.8, 0.34770143 }, { 700, 0.33743469 },
                   { 800, 0.32740517 }, { 900, 0.32096390 }, { 1000, 0.31646778 },  { 1100, 0.31322530 },
                   { 1200, 0.31083092 } };
    static const struct {
        double deg, s, p;
    } oblique[] = { { 0, 0.34766567, 0.34766567 },  { 30, 0.39948661, 0.29560028 },
                    { 45, 0.47172530, 0.22252476 }, { 60, 0.58693388, 0.10920576 },
                    { 70, 0.69415634, 0.02389476 }, { 75, 0.75849713, 0.00030413 },
                    { 80, 0.83065919, 0.03225723 }, { 85, 0.91105940, 0.23250556 } };
    material air = data_constant(1.0, 0.0), si = data_material("silicon");
    stack s = { .ambient = &air, .substrate = &si };
    double n, k;
    error e = { 0 };
    CHECK(material_at(&si, 632.8, &n, &k, &e) == ST_OK);
    CHECK_SOURCE(n, 3.873960, 5e-7, GREEN);
    CHECK_SOURCE(k, 0.016161, 5e-7, GREEN);
    for (size_t i = 0; i < sizeof normal / sizeof normal[0]; i++)
        CHECK_SOURCE(data_R(&s, normal[i].nm, 0.0, POL_MEAN), normal[i].R, 5.1e-9, GREEN);
    for (size_t i = 0; i < sizeof oblique / sizeof oblique[0]; i++) {
        CHECK_SOURCE(data_R(&s, 633.0, oblique[i].deg, POL_S), oblique[i].s, 5.1e-9, GREEN);
        CHECK_SOURCE(data_R(&s, 633.0, oblique[i].deg, POL_P), oblique[i].p, 5.1e-9, GREEN);
    }
    CHECK_SOURCE(data_R(&s, 633.0, 45.0, POL_MEAN), 0.34712503, 5.1e-9, GREEN);
    CHECK_SOURCE(data_R(&s, 633.0, 85.0, POL_MEAN), 0.57178248, 5.1e-9, GREEN);
    material_free(&air), material_free(&si);
}

static void plates(void) {
    static const char STOKES[] = "G-18 Stokes (1862) Proc. R. Soc. 11, 545";
    material air = data_constant(1.0, 0.0), glass = data_constant(1.5, 0.0), si = data_constant(3.882, 0.019);
    stack plate = { .front = { &glass, 3.2, &air, 0.45 }, .substrate = &air };
    CHECK_SOURCE(data_R(&plate, 600.0, 0.0, POL_MEAN), 1.0 / 13.0, 1e-12, STOKES);
    double r1 = 0.04, r2 = 0.348501538855, want = r1 + (1 - r1) * (1 - r1) * r2 / (1 - r1 * r2);
    stack backed = { .front = { &glass, 3.2, &glass, 0.45 }, .substrate = &si };
    double inner = data_R(&(stack){ .ambient = &glass, .substrate = &si }, 600.0, 0.0, POL_MEAN);
    want = r1 + (1 - r1) * (1 - r1) * inner / (1 - r1 * inner);
    CHECK_SOURCE(data_R(&backed, 600.0, 0.0, POL_MEAN), want, 1e-12, STOKES);
    /* The same at 60 degrees in air: 35.26 inside, s and p each for itself. */
    double inside = asin(sin(60.0 * PI / 180.0) / 1.5) * 180.0 / PI;
    stack face = { .ambient = &air, .substrate = &glass }, below = { .ambient = &glass, .substrate = &si };
    for (polarization p = POL_S; p <= POL_P; p++) {
        r1 = data_R(&face, 600.0, 60.0, p), r2 = data_R(&below, 600.0, inside, p);
        want = r1 + (1 - r1) * (1 - r1) * r2 / (1 - r1 * r2);
        CHECK_SOURCE(data_R(&backed, 600.0, 60.0, p), want, 1e-12, STOKES);
    }
    /* Absorbing glass: a passage of 3.2 mm costs exp(-4 pi k d/wavelength). */
    material grey = data_constant(1.5, 1e-5);
    stack dim = { .front = { &grey, 3.2, &grey, 0.45 }, .substrate = &si };
    double t = exp(-4.0 * PI * 1e-5 * 3.65e6 / 600.0);
    want = 0.04 + 0.96 * 0.96 * t * t * inner / (1 - 0.04 * t * t * inner);
    CHECK_SOURCE(data_R(&dim, 600.0, 0.0, POL_MEAN), want, 1e-6, STOKES);
    material_free(&air), material_free(&glass), material_free(&si), material_free(&grey);
}

static double diffuse(const stack *s, double nm) {
    reflect_options o = reflect_defaults();
    error e = { 0 };
    double R = (double)NAN;
    o.hemispherical = 1;
    CHECK(reflectance(s, &o, &nm, 1, &R, NULL, &e) == ST_OK);
    return R;
}

static void diffuse_light(void) {
    static const char WALSH[] =
        "G-19 Walsh (1926), Duntley (1942) closed form; Judd (1942) J. Res. NBS 29, 329";
    static const struct {
        double n, R;
    } rows[] = { { 1.5, 0.0917779593424 }, { 4.0 / 3.0, 0.0664584803817 }, { 3.5, 0.32420574801 } };
    material air = data_constant(1.0, 0.0), si = data_constant(3.882, 0.019),
             nitride = data_constant(2.0, 0.0);
    for (size_t i = 0; i < 3; i++) {
        material m = data_constant(rows[i].n, 0.0);
        stack s = { .ambient = &air, .substrate = &m };
        CHECK_SOURCE(diffuse(&s, 600.0), rows[i].R, 1e-8, WALSH);
        material_free(&m);
    }
    layer coat = { &nitride, 75.0 };
    stack bare = { .ambient = &air, .substrate = &si };
    stack coated = { .ambient = &air, .substrate = &si, .coatings = &coat, .n_coatings = 1 };
    CHECK_SOURCE(diffuse(&bare, 633.0), 0.357093444245, 1e-8, "G-20 diffuse light on silicon");
    CHECK_SOURCE(diffuse(&coated, 633.0), 0.0809301663506, 1e-8, "G-20 diffuse light on coated silicon");
    material_free(&air), material_free(&si), material_free(&nitride);
}

static void uniaxial_half_space(void) {
    static const char LEKNER[] = "G-21 uniaxial half-space, Lekner (1991) (from memory)";
    static const struct {
        double o, e, brewster, s[3], p[3];
    } rows[] = { { 4.0,
                   6.25,
                   62.1144331639,
                   { 0.111111111111, 0.203776612387, 0.456203364505 },
                   { 0.111111111111, 0.036760253274, 0.022690899926 } },
                 { 3.0,
                   8.0,
                   56.5178420530,
                   { 0.071796769724, 0.145898033750, 0.383587015122 },
                   { 0.071796769724, 0.013680371388, 0.052187951838 } } };
    static const double angle[] = { 0.0, 45.0, 70.0 };
    film air = { 1.0, 1.0, 0.0 };
    for (size_t i = 0; i < 2; i++) {
        film m = { rows[i].o, rows[i].e, 0.0 };
        for (size_t a = 0; a < 3; a++) {
            double s2 = pow(sin(angle[a] * PI / 180.0), 2);
            CHECK_SOURCE(multilayer(600.0, s2, 0, &air, NULL, 0, &m, NULL).R, rows[i].s[a], 1e-11, LEKNER);
            CHECK_SOURCE(multilayer(600.0, s2, 1, &air, NULL, 0, &m, NULL).R, rows[i].p[a], 1e-11, LEKNER);
        }
        double tan2 = rows[i].e * (rows[i].o - 1.0) / (rows[i].e - 1.0);
        CHECK_SOURCE(atan(sqrt(tan2)) * 180.0 / PI, rows[i].brewster, 1e-9, LEKNER);
        CHECK_SOURCE(multilayer(600.0, tan2 / (1.0 + tan2), 1, &air, NULL, 0, &m, NULL).R, 0.0, 1e-25,
                     LEKNER);
    }
}

int main(void) {
    interfaces();
    brewster_and_total_reflection();
    silicon();
    plates();
    diffuse_light();
    uniaxial_half_space();
    return check_done();
}
