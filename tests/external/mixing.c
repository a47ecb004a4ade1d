/* Mixing rules against tables computed independently from the published formulas (G-50, G-51), and their
 * laws: ends (G-52), duality (G-53, G-54), bounds (G-55), dilute limit (G-56), branch and passivity (G-57),
 * percolation (G-58), three and more phases. */
#include "optics/mixing.h"
#include "optics/bruggeman.h"

#include "base/quantity.h"
#include "check.h"
#include "optics_data.h"

static mixer m;

static double complex mixed(mixing rule, int pores, double complex air, double complex solid, double f) {
    lanes plane, axis;
    lane_set(&m.eps[0], 0, air);
    lane_set(&m.eps[1], 0, solid);
    mixing_prepare(&m, rule, pores, 2, 1);
    mixing_at(&m, &f, NULL, &plane, &axis);
    return lane_get(&plane, 0);
}

static double complex mixed_many(mixing rule, int pores, const double complex *eps, const double *share,
                                 size_t phases) {
    lanes plane, axis;
    for (size_t p = 0; p < phases; p++) lane_set(&m.eps[p], 0, eps[p]);
    mixing_prepare(&m, rule, pores, phases, 1);
    mixing_at(&m, share, NULL, &plane, &axis);
    return lane_get(&plane, 0);
}

static void check_complex(double complex got, double re, double im, double tol, const char *source) {
    CHECK_SOURCE(creal(got), re, tol, source);
    CHECK_SOURCE(cimag(got), im, tol, source);
}

static void silicon_tables(void) {
    static const double share[] = { 0.1, 0.3, 0.5, 0.7, 0.9 };
    /* clang-format off */
    static const struct { double nm; mixing rule; int pores; double eps[10]; } rows[] = {
        { 633, MIX_VOLUME, 0, { 2.400452, 0.012504, 5.201355, 0.037513, 8.002258, 0.062521, 10.803162, 0.08753, 13.604065, 0.112539 } },
        { 633, MIX_BRUGGEMAN_3D, 0, { 1.312864, 0.000721, 2.640764, 0.008393, 5.39241, 0.034066, 9.033025, 0.069321, 12.981748, 0.106367 } },
        { 633, MIX_BRUGGEMAN_2D, 0, { 1.208831, 0.000302, 1.979235, 0.002725, 3.8736, 0.01614, 7.581041, 0.052742, 12.412444, 0.100337 } },
        { 633, MIX_MAXWELL_GARNETT_3D, 0, { 1.269251, 0.000462, 1.984463, 0.00206, 3.100238, 0.005624, 5.083961, 0.01519, 9.592947, 0.052305 } },
        { 633, MIX_MAXWELL_GARNETT_3D, 1, { 1.995725, 0.008642, 4.192182, 0.02784, 6.712336, 0.050095, 9.633435, 0.076196, 13.059429, 0.107226 } },
        { 633, MIX_MAXWELL_GARNETT_2D, 0, { 1.191791, 0.000235, 1.711911, 0.001077, 2.555688, 0.003086, 4.161674, 0.009104, 8.413314, 0.03893 } },
        { 633, MIX_MAXWELL_GARNETT_2D, 1, { 1.783456, 0.00661, 3.605452, 0.022159, 5.871078, 0.041838, 8.764817, 0.067529, 12.589908, 0.102443 } },
        { 633, MIX_LOOYENGA, 0, { 1.507613, 0.002702, 2.985615, 0.012785, 5.206795, 0.030874, 8.322524, 0.05909, 12.484171, 0.099554 } },
        { 350, MIX_VOLUME, 0, { 3.055219, 3.228274, 7.165658, 9.684823, 11.276096, 16.141372, 15.386534, 22.597921, 19.496973, 29.05447 } },
        { 350, MIX_BRUGGEMAN_3D, 0, { 1.392689, 0.042774, 3.586308, 1.344451, 7.369201, 8.309114, 12.691604, 17.783219, 18.555202, 27.443767 } },
        { 350, MIX_BRUGGEMAN_2D, 0, { 1.239622, 0.014165, 2.299848, 0.201596, 5.494, 2.938, 10.520725, 13.114694, 17.681376, 25.84036 } },
        { 350, MIX_MAXWELL_GARNETT_3D, 0, { 1.316877, 0.022242, 2.203222, 0.107218, 3.726453, 0.332584, 6.917473, 1.143844, 16.618484, 7.268262 } },
        { 350, MIX_MAXWELL_GARNETT_3D, 1, { 2.449022, 2.227107, 5.652197, 7.175994, 9.33881, 12.916165, 13.626889, 19.653665, 18.676129, 27.672775 } },
        { 350, MIX_MAXWELL_GARNETT_2D, 0, { 1.215017, 0.010214, 1.821091, 0.049718, 2.880596, 0.157, 5.191743, 0.56328, 13.566186, 4.325745 } },
        { 350, MIX_MAXWELL_GARNETT_2D, 1, { 2.130804, 1.700215, 4.769733, 5.7006, 8.06869, 10.767203, 12.309566, 17.391082, 17.960268, 26.418814 } },
        { 350, MIX_LOOYENGA, 0, { 1.775136, 0.48535, 4.057392, 2.671247, 7.431251, 7.061618, 12.03546, 14.357509, 18.008767, 25.259971 } } };
    /* clang-format on */
    material si = data_material("silicon");
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        double n, k;
        error e = { 0 };
        CHECK(material_at(&si, rows[i].nm, &n, &k, &e) == ST_OK);
        for (size_t j = 0; j < 5; j++)
            check_complex(
                mixed(rows[i].rule, rows[i].pores, 1, complex_of(n * n - k * k, 2 * n * k), share[j]),
                rows[i].eps[2 * j], rows[i].eps[2 * j + 1], 5.1e-7, "silicon in air, independent program");
    }
    material_free(&si);
}

static void published_rows(void) {
    static const char G50A[] = "G-50a published formulas, computed apart";
    /* clang-format off */
    static const struct { double f, ser, mg2, b2, mg2i, mg3, b3, lo, mg3i, par; } real[] = {
        { 0.1, 1.1011236, 1.18556701, 1.20087713, 1.63770053, 1.25714286, 1.29440475, 1.44489684, 1.80526316, 2.125 },
        { 0.3, 1.38028169, 1.6835443, 1.91082924, 3.11686391, 1.93103448, 2.44382102, 2.694703, 3.57865169, 4.375 },
        { 0.5, 1.8490566, 2.47540984, 3.5, 4.9486755, 2.95652174, 4.63419628, 4.51346832, 5.60843373, 6.625 },
        { 0.7, 2.8, 3.93023256, 6.41082924, 7.27631579, 4.70588235, 7.5037577, 7.00792377, 7.95454545, 8.875 },
        { 0.9, 5.76470588, 7.48, 10.2008771, 10.3326087, 8.36363636, 10.6382525, 10.2848004, 10.6971831, 11.125 } };
    static const struct { double n, k, f, b2[2], b3[2], lo[2], mg3[2]; } lossy[] = {
        { 3.882, 0.019, 0.1, { 1.20898849, 0.000353957546 }, { 1.31323957, 0.000844532635 }, { 1.509019, 0.00318098151 }, { 1.26949159, 0.000541155838 } },
        { 3.882, 0.019, 0.5, { 3.882, 0.019 }, { 5.41013196, 0.0401710056 }, { 5.22285847, 0.0363923748 }, { 3.10316794, 0.00659192622 } },
        { 3.882, 0.019, 0.9, { 12.4646389, 0.118366758 }, { 13.0370796, 0.125483314 }, { 12.5359594, 0.117431768 }, { 9.62017345, 0.0615236074 } },
        { 5.57, 0.387, 0.1, { 1.22903528, 0.00274321509 }, { 1.36464745, 0.00760356541 }, { 1.79014416, 0.0643670281 }, { 1.30042922, 0.00427166903 } },
        { 5.57, 0.387, 0.5, { 5.57, 0.387 }, { 9.58387686, 1.11483855 }, { 8.861969, 0.936523305 }, { 3.50540229, 0.05943671 } },
        { 5.57, 0.387, 0.9, { 25.1291401, 3.45168722 }, { 26.4770121, 3.66519155 }, { 24.9905574, 3.36908495 }, { 14.5416196, 0.969041725 } },
        { 5.0, 3.6, 0.1, { 1.2433549, 0.0169081936 }, { 1.40277123, 0.0526915175 }, { 1.69341138, 0.591492746 }, { 1.32270479, 0.0266206536 } },
        { 5.0, 3.6, 0.5, { 5, 3.6 }, { 5.02751217, 9.3079298 }, { 5.63495665, 8.14069423 }, { 3.8066519, 0.4084819 } },
        { 5.0, 3.6, 0.9, { 10.0753549, 28.8169082 }, { 10.4707717, 30.6040502 }, { 10.7093574, 28.3098071 }, { 16.8458862, 9.78431031 } } };
    /* clang-format on */
    for (size_t i = 0; i < sizeof real / sizeof real[0]; i++) {
        double f = real[i].f, tol = 5.1e-8; /* 9 digits, up to 11.125 */
        check_complex(mixed(MIX_MAXWELL_GARNETT_2D, 0, 1, 12.25, f), real[i].mg2, 0, tol, G50A);
        check_complex(mixed(MIX_BRUGGEMAN_2D, 0, 1, 12.25, f), real[i].b2, 0, tol, G50A);
        check_complex(mixed(MIX_MAXWELL_GARNETT_2D, 1, 1, 12.25, f), real[i].mg2i, 0, tol, G50A);
        check_complex(mixed(MIX_MAXWELL_GARNETT_3D, 0, 1, 12.25, f), real[i].mg3, 0, tol, G50A);
        check_complex(mixed(MIX_BRUGGEMAN_3D, 0, 1, 12.25, f), real[i].b3, 0, tol, G50A);
        check_complex(mixed(MIX_LOOYENGA, 0, 1, 12.25, f), real[i].lo, 0, tol, G50A);
        check_complex(mixed(MIX_MAXWELL_GARNETT_3D, 1, 1, 12.25, f), real[i].mg3i, 0, tol, G50A);
        check_complex(mixed(MIX_VOLUME, 0, 1, 12.25, f), real[i].par, 0, tol, G50A);
    }
    for (size_t i = 0; i < sizeof lossy / sizeof lossy[0]; i++) {
        static const char G50[] = "G-50b..d published formulas, computed apart";
        double complex e = complex_of(lossy[i].n, lossy[i].k);
        double f = lossy[i].f, tol = 5.1e-8;
        check_complex(mixed(MIX_BRUGGEMAN_2D, 0, 1, e * e, f), lossy[i].b2[0], lossy[i].b2[1], tol, G50);
        check_complex(mixed(MIX_BRUGGEMAN_3D, 0, 1, e * e, f), lossy[i].b3[0], lossy[i].b3[1], tol, G50);
        check_complex(mixed(MIX_LOOYENGA, 0, 1, e * e, f), lossy[i].lo[0], lossy[i].lo[1], tol, G50);
        check_complex(mixed(MIX_MAXWELL_GARNETT_3D, 0, 1, e * e, f), lossy[i].mg3[0], lossy[i].mg3[1], tol,
                      G50);
    }
}

static const double complex_index[][2] = {
    { 3.5, 0 }, { 3.882, 0.019 }, { 5.57, 0.387 }, { 5.0, 3.6 }, { 1.2, 4.9 }
};
enum { INDICES = 5 };
static double complex eps_of(int i) {
    double complex n = complex_of(complex_index[i][0], complex_index[i][1]);
    return n * n;
}

static void laws(void) {
    for (int i = 0; i < INDICES; i++) {
        double complex solid = eps_of(i), root = complex_of(complex_index[i][0], complex_index[i][1]);
        for (int rule = 0; rule < MIXINGS; rule++)
            for (int pores = 0; pores < 2; pores++) {
                CHECK_SOURCE(cabs(mixed((mixing)rule, pores, 1, solid, 0) - 1), 0, 1e-14, "G-52 no solid");
                CHECK_SOURCE(cabs(mixed((mixing)rule, pores, 1, solid, 1) - solid), 0, 1e-14 * cabs(solid),
                             "G-52 all solid");
            }
        CHECK_SOURCE(cabs(mixed(MIX_BRUGGEMAN_2D, 0, 1, solid, 0.5) - root), 0, 1e-13,
                     "G-53 Dykhne (1970), Keller (1964)");
        for (double f = 0.03; f < 1; f += 0.07) { /* G-54: the phases exchanged at the same share */
            double complex b =
                mixed(MIX_BRUGGEMAN_2D, 0, 1.7, solid, f) * mixed(MIX_BRUGGEMAN_2D, 0, solid, 1.7, f);
            double complex g = mixed(MIX_MAXWELL_GARNETT_2D, 0, 1.7, solid, f) *
                               mixed(MIX_MAXWELL_GARNETT_2D, 0, solid, 1.7, f);
            CHECK_SOURCE(cabs(b / (1.7 * solid) - 1), 0, 1e-12, "G-54 Keller (1964)");
            CHECK_SOURCE(cabs(g / (1.7 * solid) - 1), 0, 1e-12, "G-54 Keller (1964)");
            double complex eps[] = { 1.7, solid };
            double both[] = { 1 - f, f };
            for (int d = 2; d <= 3; d++) {
                double complex e = mixed(d == 2 ? MIX_BRUGGEMAN_2D : MIX_BRUGGEMAN_3D, 0, 1.7, solid, f);
                CHECK_SOURCE(cabs(bruggeman_residual(eps, both, 2, d, e)), 0, 1e-12, "G-51 Bruggeman (1935)");
            }
        }
    }
}

static void bounds(void) {
    unsigned long long seed = 71;
    double slack = 1e-12;
    for (int i = 0; i < 1000; i++) {
        double u[2];
        for (int j = 0; j < 2; j++) {
            seed = seed * 6364136223846793005ULL + 1442695040888963407ULL;
            u[j] = (double)(seed >> 11) / 9007199254740992.0;
        }
        double f = u[0], solid = 1 + 24 * u[1], ser = 1 / (f / solid + 1 - f), par = f * solid + 1 - f;
        double mg2 = creal(mixed(MIX_MAXWELL_GARNETT_2D, 0, 1, solid, f)),
               mg3 = creal(mixed(MIX_MAXWELL_GARNETT_3D, 0, 1, solid, f));
        double mg2i = creal(mixed(MIX_MAXWELL_GARNETT_2D, 1, 1, solid, f)),
               mg3i = creal(mixed(MIX_MAXWELL_GARNETT_3D, 1, 1, solid, f));
        double b2 = creal(mixed(MIX_BRUGGEMAN_2D, 0, 1, solid, f)),
               b3 = creal(mixed(MIX_BRUGGEMAN_3D, 0, 1, solid, f));
        double lo = creal(mixed(MIX_LOOYENGA, 0, 1, solid, f));
        slack = 1e-12 * solid;
        CHECK(ser <= mg3 + slack && mg3 <= b3 + slack && b3 <= mg3i + slack &&
              mg3i <= par + slack); /* G-55 */
        CHECK(mg3 <= lo + slack && lo <= mg3i + slack);
        CHECK(ser <= mg2 + slack && mg2 <= b2 + slack && b2 <= mg2i + slack && mg2i <= par + slack);
    }
}

static void dilute_and_percolating(void) {
    static const char CM[] = "G-56 Clausius-Mossotti";
    double f = 1e-6;
    CHECK_SOURCE((creal(mixed(MIX_BRUGGEMAN_3D, 0, 1, 12.25, f)) - 1) / f, 2.368421053, 1e-5, CM);
    CHECK_SOURCE((creal(mixed(MIX_MAXWELL_GARNETT_3D, 0, 1, 12.25, f)) - 1) / f, 2.368421053, 1e-5, CM);
    CHECK_SOURCE((creal(mixed(MIX_BRUGGEMAN_2D, 0, 1, 12.25, f)) - 1) / f, 1.698113208, 1e-5, CM);
    CHECK_SOURCE((creal(mixed(MIX_MAXWELL_GARNETT_2D, 0, 1, 12.25, f)) - 1) / f, 1.698113208, 1e-5, CM);
    CHECK_SOURCE((creal(mixed(MIX_LOOYENGA, 0, 1, 12.25, f)) - 1) / f, 3 * (cbrt(12.25) - 1), 1e-5, CM);
    static const char L[] = "G-58 Landauer (1952), Kirkpatrick (1973)"; /* printed to two or three digits */
    CHECK_SOURCE(creal(mixed(MIX_BRUGGEMAN_3D, 0, 1, 1e9, 0.32)), 25.0, 1e-3 * 25, L);
    CHECK_SOURCE(creal(mixed(MIX_BRUGGEMAN_3D, 0, 1, 1e9, 0.35)) / 2.5e7, 1.0, 1e-3, L);
    CHECK_SOURCE(creal(mixed(MIX_BRUGGEMAN_2D, 0, 1, 1e9, 0.49)), 50.0, 1e-3 * 50, L);
    CHECK_SOURCE(creal(mixed(MIX_BRUGGEMAN_2D, 0, 1, 1e9, 0.51)) / 2.0e7, 1.0, 1e-3, L);
}

static int ascending(const void *a, const void *b) {
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

/* G-57: Im >= 0 and no jump of a root over f = 0..1, silicon from 300 to 1200 nm and the worst indices. */
static void branch(void) {
    material si = data_material("silicon");
    static double step[1000], sorted[1000];
    for (int w = 0; w <= 18 + INDICES; w++)
        for (int rule = 0; rule < MIXINGS; rule++) {
            double n, k;
            error e = { 0 };
            double complex solid = w > 18 ? eps_of(w - 19) : 0, before = 0;
            if (w > 18 + INDICES - 1) continue;
            if (w <= 18) {
                CHECK(material_at(&si, 300 + 50 * w, &n, &k, &e) == ST_OK);
                solid = complex_of(n * n - k * k, 2 * n * k);
            }
            int passive = 1;
            for (int i = 0; i <= 1000; i++) {
                double complex now = mixed((mixing)rule, 0, 1, solid, i / 1000.0);
                passive = passive && cimag(now) >= 0;
                if (i) step[i - 1] = cabs(now - before);
                before = now;
            }
            CHECK(passive);
            memcpy(sorted, step, sizeof step);
            qsort(sorted, 1000, sizeof sorted[0], ascending);
            double second = 0; /* a jump shows as a step unlike both neighbours */
            for (int i = 1; i + 1 < 1000; i++)
                second = fmax(second, step[i] - fmax(step[i - 1], step[i + 1]));
            CHECK(second < 10 * sorted[500]);
        }
    material_free(&si);
}

/* Three and more phases. */
static double bisected(const double *eps, const double *f, size_t n,
                       int d) { /* real phases: the only positive root */
    double lo = 1e-3, hi = 1e3;
    for (int i = 0; i < 200; i++) {
        double mid = 0.5 * (lo + hi), sum = 0;
        for (size_t p = 0; p < n; p++) sum += f[p] * (eps[p] - mid) / (eps[p] + (d - 1) * mid);
        if (sum > 0)
            lo = mid;
        else
            hi = mid;
    }
    return 0.5 * (lo + hi);
}

/* All roots of the Bruggeman equation of three phases at once (Durand 1960, Kerner 1966) from its cubic; how
 * many lie in the cone of the phases, and which one. */
static int roots_in_cone(const double complex *eps, const double *f, int d, double complex *inside) {
    double complex cubic[4] = { 0 }, root[3] = { 0.4 + 0.9 * complex_of(0, 1), 0, 0 };
    for (int p = 0; p < 3; p++) { /* f_p (e_p - e) times the other two (e_q + (d - 1) e) */
        double complex a = eps[(p + 1) % 3], b = eps[(p + 2) % 3];
        double g = d - 1;
        double complex other[3] = { a * b, g * (a + b), g * g };
        for (int k = 0; k < 3; k++) {
            cubic[k] += f[p] * eps[p] * other[k];
            cubic[k + 1] -= f[p] * other[k];
        }
    }
    double scale = cabs(eps[1]);
    root[1] = root[0] * root[0] * scale, root[2] = root[0] * root[0] * root[0] * scale, root[0] *= scale;
    for (int turn = 0; turn < 500; turn++)
        for (int i = 0; i < 3; i++) {
            double complex value =
                ((cubic[3] * root[i] + cubic[2]) * root[i] + cubic[1]) * root[i] + cubic[0];
            root[i] -= value / (cubic[3] * (root[i] - root[(i + 1) % 3]) * (root[i] - root[(i + 2) % 3]));
        }
    int found = 0;
    for (int i = 0; i < 3; i++) {
        double lo = PI, hi = 0, angle = carg(root[i]);
        for (int p = 0; p < 3; p++) lo = fmin(lo, carg(eps[p])), hi = fmax(hi, carg(eps[p]));
        if (angle < lo - 1e-9 || angle > hi + 1e-9) continue;
        found++;
        *inside = root[i];
    }
    return found;
}

static void many_phases(void) {
    double real[] = { 1, 15, 4, 2.1 }, share[] = { 0.2, 0.3, 0.35, 0.15 };
    double complex eps[4] = { 1, 15, 4, 2.1 };
    CHECK_SOURCE(creal(mixed_many(MIX_BRUGGEMAN_2D, 0, eps, share + 1, 4)), bisected(real, share, 4, 2),
                 1e-11, "the only positive root");
    CHECK_SOURCE(creal(mixed_many(MIX_BRUGGEMAN_3D, 0, eps, share + 1, 4)), bisected(real, share, 4, 3),
                 1e-11, "the only positive root");
    double looyenga = pow(0.2 + 0.3 * cbrt(15) + 0.35 * cbrt(4) + 0.15 * cbrt(2.1), 3);
    CHECK_SOURCE(creal(mixed_many(MIX_LOOYENGA, 0, eps, share + 1, 4)), looyenga, 1e-12, "Looyenga (1965)");
    CHECK_SOURCE(creal(mixed_many(MIX_VOLUME, 0, eps, share + 1, 4)), 0.2 + 4.5 + 1.4 + 0.315, 1e-12,
                 "plain mean");
    unsigned long long seed = 5;
    for (int i = 0; i < INDICES; i++)
        for (int d = 2; d <= 3; d++) {
            mixing b = d == 2 ? MIX_BRUGGEMAN_2D : MIX_BRUGGEMAN_3D;
            mixing g = d == 2 ? MIX_MAXWELL_GARNETT_2D : MIX_MAXWELL_GARNETT_3D;
            for (int round = 0; round < 200; round++) {
                double u[3], f[3];
                for (int j = 0; j < 3; j++) {
                    seed = seed * 6364136223846793005ULL + 1442695040888963407ULL;
                    u[j] = (double)(seed >> 11) / 9007199254740992.0;
                }
                f[1] = u[0], f[2] = (1 - u[0]) * u[1], f[0] = 1 - f[1] - f[2];
                double complex three[] = { 1, eps_of(i), complex_of(4 + 3 * u[2], 0.4 * u[2]) };
                double complex e = mixed_many(b, 0, three, f + 1, 3);
                CHECK_SOURCE(cabs(bruggeman_residual(three, f, 3, d, e)), 0, 1e-12,
                             "Bruggeman (1935), three phases");
                double complex only = 0;
                CHECK(roots_in_cone(three, f, d, &only) == 1);
                CHECK_SOURCE(cabs(e / only - 1), 0, 1e-9,
                             "the one root of the cubic in the cone of the phases");
                CHECK(cimag(e) >= 0 && creal(csqrt(e)) > 0 && cabs(e) <= cabs(three[1]) * (1 + 1e-12));
                /* A coating of the solid's or the ambient's own material is no third phase. */
                double complex same[] = { 1, eps_of(i), eps_of(i) }, bare[] = { 1, eps_of(i), 1 };
                double solid = f[1] + f[2];
                CHECK_SOURCE(cabs(mixed_many(b, 0, same, f + 1, 3) / mixed(b, 0, 1, same[1], solid) - 1), 0,
                             1e-11, "two phases");
                CHECK_SOURCE(cabs(mixed_many(b, 0, bare, f + 1, 3) / mixed(b, 0, 1, same[1], f[1]) - 1), 0,
                             1e-11, "two phases");
                CHECK_SOURCE(cabs(mixed_many(g, 0, same, f + 1, 3) / mixed(g, 0, 1, same[1], solid) - 1), 0,
                             1e-11, "two phases");
                CHECK_SOURCE(cabs(mixed_many(g, 1, bare, f + 1, 3) / mixed(g, 1, 1, same[1], f[1]) - 1), 0,
                             1e-11, "two phases");
            }
        }
    /* Duality with three phases: e1 e3 = e2^2 in equal shares leaves e2 (Dykhne 1970 applied to three
     * phases). */
    for (int i = 0; i < INDICES; i++)
        for (double f = 0.05; f < 0.5; f += 0.06) {
            double complex middle = csqrt(eps_of(i)), three[] = { 1, eps_of(i), middle };
            double part[] = { f, 1 - 2 * f };
            CHECK_SOURCE(cabs(mixed_many(MIX_BRUGGEMAN_2D, 0, three, part, 3) - middle), 0, 1e-12,
                         "duality, three phases");
        }
}

int main(void) {
    silicon_tables();
    published_rows();
    laws();
    bounds();
    dilute_and_percolating();
    branch();
    many_phases();
    return check_done();
}
