/* Stacks of plane layers against 40-digit values and identities: quarter waves (G-10, G-11, G-17), nitride on
 * silicon (G-12), two absorbing layers (G-13), thick absorbers (G-14, G-15), frustrated total reflection
 * (G-16), uniaxial code on isotropic layers (G-22), energy and reciprocity (G-23), closed forms of one layer.
 */
#include "optics/multilayer.h"

#include "base/quantity.h"
#include "check.h"
#include "optics/lanes.h"
#include "optics_data.h"

#define IM complex_of(0.0, 1.0)

static const char MATRIX[] = "characteristic matrix at 40 digits";
static const double angle3[] = { 0.0, 45.0, 60.0 };
static double sine2(double deg) { return sin(deg * PI / 180.0) * sin(deg * PI / 180.0); }
static double complex index2(double n, double k) { return (n + k * IM) * (n + k * IM); }
static film of_index(double n, double k, double nm) { return (film){ index2(n, k), index2(n, k), nm }; }

static void quarter_waves(void) {
    film air = of_index(1, 0, 0), glass = of_index(1.52, 0, 0), mgf = of_index(1.38, 0, 550.0 / 4 / 1.38);
    static const double s[] = { 0.0126007902146, 0.0400477184418, 0.100818426939 };
    static const double p[] = { 0.0126007902146, 0.00135573929348, 0.00604933794797 };
    for (int a = 0; a < 3; a++) {
        powers ps = multilayer(550, sine2(angle3[a]), 0, &air, &mgf, 1, &glass, NULL);
        powers pp = multilayer(550, sine2(angle3[a]), 1, &air, &mgf, 1, &glass, NULL);
        CHECK_SOURCE(ps.R, s[a], 1e-11, "G-10, G-11 Born & Wolf 1.6, 40 digits");
        CHECK_SOURCE(pp.R, p[a], 1e-11, "G-10, G-11 Born & Wolf 1.6, 40 digits");
        CHECK_NEAR(ps.R + ps.T, 1.0, 1e-12);
        CHECK_NEAR(pp.R + pp.T, 1.0, 1e-12);
    }
    static const double stacks[] = { 0.306470358655, 0.672153337121, 0.872431695368, 0.954086816208,
                                     0.98393848685 };
    film pile[9];
    for (int N = 0; N <= 4; N++) {
        for (int j = 0; j <= 2 * N; j++) {
            double n = j % 2 ? 1.35 : 2.3;
            pile[j] = of_index(n, 0, 600.0 / 4 / n);
        }
        CHECK_SOURCE(multilayer(600, 0, 0, &air, pile, (size_t)(2 * N + 1), &glass, NULL).R, stacks[N], 1e-11,
                     "G-17 Born & Wolf 1.6.5");
    }
    for (double ns = 1.3; ns < 5.0; ns += 0.37) {
        film sub = of_index(ns, 0, 0), ar = of_index(sqrt(ns), 0, 600.0 / 4 / sqrt(ns));
        CHECK_SOURCE(multilayer(600, 0, 0, &air, &ar, 1, &sub, NULL).R, 0.0, 1e-14,
                     "n = sqrt(ns), quarter wave");
    }
}

static void nitride_on_silicon(void) {
    film air = of_index(1, 0, 0), si = of_index(3.882, 0.019, 0), sin75 = of_index(2, 0, 75);
    static const double s633[] = { 0.00349608030244, 0.0417334474598, 0.124713226709 };
    static const double p633[] = { 0.00349608030244, 0.018058005975, 0.0585548635672 };
    static const double s600[] = { 0.00022993488183, 0.0247879642866, 0.0956781559101 };
    static const double p600[] = { 0.00022993488183, 0.0125216100931, 0.0570069471684 };
    for (int a = 0; a < 3; a++) {
        double q = sine2(angle3[a]);
        CHECK_SOURCE(multilayer(633, q, 0, &air, &sin75, 1, &si, NULL).R, s633[a], 1e-10 * s633[a], "G-12");
        CHECK_SOURCE(multilayer(633, q, 1, &air, &sin75, 1, &si, NULL).R, p633[a], 1e-10 * p633[a], "G-12");
        CHECK_SOURCE(multilayer(600, q, 0, &air, &sin75, 1, &si, NULL).R, s600[a], 1e-10 * s600[a], "G-12");
        CHECK_SOURCE(multilayer(600, q, 1, &air, &sin75, 1, &si, NULL).R, p600[a], 1e-10 * p600[a], "G-12");
    }
    /* The tabled silicon, through the public call. */
    static const struct {
        double nm, R;
    } rows[] = { { 300, 0.62892901 }, { 400, 0.33800894 }, { 500, 0.05994321 }, { 600, 0.00006341 },
                 { 700, 0.02494565 }, { 900, 0.10706834 }, { 1200, 0.18537374 } };
    static const char ONE[] = "75 nm, n = 2.0 on silicon (Green 2008), closed form of one layer";
    material vacuum = data_constant(1, 0), green = data_material("silicon"), two = data_constant(2, 0);
    layer coat = { &two, 75.0 };
    stack st = { .ambient = &vacuum, .substrate = &green, .coatings = &coat, .n_coatings = 1 };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++)
        CHECK_SOURCE(data_R(&st, rows[i].nm, 0, POL_MEAN), rows[i].R, 5.1e-9, ONE);
    CHECK_SOURCE(data_R(&st, 600, 45, POL_S), 0.02312500, 5.1e-9, ONE);
    CHECK_SOURCE(data_R(&st, 600, 45, POL_P), 0.01404348, 5.1e-9, ONE);
    stack bare = { .ambient = &vacuum, .substrate = &green };
    CHECK_NEAR(data_R(&st, 300, 0, POL_MEAN), data_R(&bare, 300, 0, POL_MEAN),
               1e-14); /* a half wave is absent */
    film real = of_index(3.94, 0, 0);
    CHECK_SOURCE(multilayer(600, 0, 0, &air, &sin75, 1, &real, NULL).R, pow((3.94 - 4) / (3.94 + 4), 2),
                 1e-14, ONE);
    material_free(&vacuum), material_free(&green), material_free(&two);
}

static void absorbing(void) {
    film air = of_index(1, 0, 0), blue = of_index(5.57, 0.387, 0);
    film two[] = { of_index(1.46, 0, 100), of_index(2.1, 0.005, 60) };
    static const double Rs[] = { 0.0535171813907, 0.134228043111, 0.272341583183 };
    static const double Rp[] = { 0.0535171813907, 0.110980635052, 0.105703602047 };
    static const double Ts[] = { 0.930995307298, 0.850423594274, 0.714223048124 };
    static const double Tp[] = { 0.930995307298, 0.874869760868, 0.880227210339 };
    film thick = of_index(1.5, 1.0, 2000), half = of_index(3.5, 0, 0), metal = of_index(5.0, 3.6, 1e6);
    static const double g14s[] = { 0.172413793103, 0.293946641017, 0.424207106378 };
    static const double g14p[] = { 0.172413793103, 0.0864046277654, 0.0593746570314 };
    static const double g05s[] = { 0.591503267974, 0.690063097388, 0.769356939317 };
    static const double g05p[] = { 0.591503267974, 0.476187078377, 0.352564285791 };
    film dense = of_index(1.5, 0, 0), gap = of_index(1, 0, 100);
    static const double g16s[] = { 0.135720210661, 0.36922518672, 0.608702072003 };
    static const double g16p[] = { 0.135720210661, 0.186100587713, 0.762723724468 };
    for (int a = 0; a < 3; a++) {
        double q = sine2(angle3[a]);
        for (int p = 0; p < 2; p++) {
            powers w = multilayer(400, q, p, &air, two, 2, &blue, NULL);
            CHECK_SOURCE(w.R, p ? Rp[a] : Rs[a], 1e-10, "G-13 40 digits");
            CHECK_SOURCE(w.T, p ? Tp[a] : Ts[a], 1e-10, "G-13 40 digits");
            w = multilayer(500, q, p, &air, &thick, 1, &half, NULL);
            CHECK_SOURCE(w.R, p ? g14p[a] : g14s[a], 1e-10, "G-14 40 digits");
            w = multilayer(300, q, p, &air, &metal, 1, &half, NULL);
            CHECK_SOURCE(w.R, p ? g05p[a] : g05s[a], 1e-10, "G-15 1 mm of absorber is a half-space");
            CHECK_SOURCE(w.T, 0.0, 1e-300, "G-15");
            w = multilayer(500, 2.25 * q, p, &dense, &gap, 1, &dense, NULL);
            CHECK_SOURCE(w.R, p ? g16p[a] : g16s[a], 1e-11, "G-16 40 digits");
            CHECK_NEAR(w.R + w.T, 1.0, 1e-11);
        }
    }
    film film50 = of_index(4.2, 0.3, 50), sub = of_index(1.5, 0, 0);
    powers n0 = multilayer(550, 0, 0, &air, &film50, 1, &sub, NULL);
    powers s60 = multilayer(550, 0.75, 0, &air, &film50, 1, &sub, NULL);
    powers p60 = multilayer(550, 0.75, 1, &air, &film50, 1, &sub, NULL);
    CHECK_SOURCE(n0.R, 0.46439980, 5.1e-9, MATRIX);
    CHECK_SOURCE(n0.T, 0.35266640, 5.1e-9, MATRIX);
    CHECK_SOURCE(s60.R, 0.71064343, 5.1e-9, MATRIX);
    CHECK_SOURCE(s60.T, 0.18146240, 5.1e-9, MATRIX);
    CHECK_SOURCE(p60.R, 0.22447715, 5.1e-9, MATRIX);
    CHECK_SOURCE(p60.T, 0.52211062, 5.1e-9, MATRIX);
    film uni = { 4, 6, 120 }, on = of_index(3.5, 0, 0);
    CHECK_SOURCE(multilayer(633, 0.75, 0, &air, &uni, 1, &on, NULL).R, 0.30713057, 5.1e-9,
                 "uniaxial film, closed form");
    CHECK_SOURCE(multilayer(633, 0.75, 1, &air, &uni, 1, &on, NULL).R, 0.06278040, 5.1e-9,
                 "uniaxial film, closed form");
}

/* Numbers in 0..1 from a fixed start (64-bit linear congruence, Knuth). */
static double next_random(unsigned long long *state) {
    *state = *state * 6364136223846793005ULL + 1442695040888963407ULL;
    return (double)(*state >> 11) / 9007199254740992.0;
}

/* Power absorbed in one film from Im(eps)|E|^2, Gauss-Legendre over depth; F, G at its top. In units in which
 * the flux is Re(conj(F) G). */
static double absorbed(const film *f, double k0, double s2, int p, double complex F, double complex G) {
    static const double node[] = { 0.1834346424956498, 0.5255324099163290, 0.7966664774136267,
                                   0.9602898564975363 };
    static const double weight[] = { 0.3626837833783620, 0.3137066458778873, 0.2223810344533745,
                                     0.1012285362903763 };
    enum { PARTS = 40 };
    double sum = 0.0, part = f->thickness_nm / PARTS;
    double complex a = film_a(f, s2, p), b = film_b(f, p), kappa = csqrt(a * b);
    for (int j = 0; j < PARTS; j++)
        for (int i = 0; i < 8; i++) {
            double z = part * (j + 0.5 * (1.0 + (i % 2 ? node[i / 2] : -node[i / 2])));
            double complex c = ccos(kappa * k0 * z), s = csin(kappa * k0 * z) * IM;
            double complex Fz = c * F + b / kappa * s * G, Gz = c * G + a / kappa * s * F;
            double across = cabs(p ? Gz : Fz), along = p ? sqrt(s2) * cabs(Fz / f->axis) : 0.0;
            sum += 0.5 * part * weight[i / 2] *
                   (cimag(f->in_plane) * across * across + cimag(f->axis) * along * along);
        }
    return k0 * sum;
}

static void identities(void) {
    unsigned long long seed = 20240917;
    static const double angles[] = { 0.0, 35.0, 70.0, 89.0 };
    for (int round = 0; round < 40; round++) {
        film air = of_index(1, 0, 0), sub = of_index(1.3 + 3 * next_random(&seed), 0, 0), films[12],
             turned[12];
        int lossless = round % 2;
        for (int j = 0; j < 12; j++) {
            double loss = lossless ? 0.0 : next_random(&seed);
            films[j].in_plane = 1.0 + 11.0 * next_random(&seed) + loss * IM;
            films[j].axis = 1.0 + 11.0 * next_random(&seed) + 0.5 * loss * IM;
            films[j].thickness_nm = 10.0 + 90.0 * next_random(&seed);
        }
        for (int j = 0; j < 12; j++) turned[j] = films[11 - j];
        for (int a = 0; a < 4; a++)
            for (int p = 0; p < 2; p++) {
                double s2 = sine2(angles[a]), sum, A = 0.0;
                double complex field[26], X = film_half_space(&air, s2, p);
                powers w = multilayer(500, s2, p, &air, films, 12, &sub, field);
                for (int j = 0; j < 12; j++)
                    A += absorbed(&films[j], 2 * PI / 500, s2, p, field[2 * j], field[2 * j + 1]);
                sum = w.R + w.T + A / creal(X);
                CHECK(w.R >= 0.0 && w.R <= 1.0 + 1e-12 && w.T >= 0.0 && A >= 0.0);
                CHECK_SOURCE(sum, 1.0, 1e-9, "G-23 energy: R + T + integral of Im(eps)|E|^2");
                if (lossless) CHECK_SOURCE(w.R + w.T, 1.0, 1e-11, "G-23 energy");
                CHECK_SOURCE(multilayer(500, s2, p, &sub, turned, 12, &air, NULL).T, w.T, 1e-11,
                             "G-23 reciprocity");
            }
    }
}

/* G-22: the in-plane and axial values are used apart; equal ones must give the isotropic answer, here by the
 * closed form of one film with Fresnel coefficients. */
static void uniaxial_equals_isotropic(void) {
    film air = of_index(1, 0, 0), si = of_index(3.882, 0.019, 0), nitride = of_index(2, 0, 75);
    for (double deg = 0; deg < 89; deg += 7) {
        double s2 = sine2(deg);
        double complex k0 = csqrt(1 - s2), k1 = csqrt(nitride.in_plane - s2), k2 = csqrt(si.in_plane - s2);
        for (int p = 0; p < 2; p++) {
            double complex e1 = p ? nitride.in_plane : 1, e2 = p ? si.in_plane : 1;
            double complex r1 = (k0 - k1 / e1) / (k0 + k1 / e1),
                           r2 = (k1 / e1 - k2 / e2) / (k1 / e1 + k2 / e2);
            double complex twice = cexp(2 * IM * k1 * (2 * PI / 633) * 75);
            double want = pow(cabs((r1 + r2 * twice) / (1 + r1 * r2 * twice)), 2);
            CHECK_SOURCE(multilayer(633, s2, p, &air, &nitride, 1, &si, NULL).R, want, 1e-13,
                         "G-22, Airy's formula");
        }
    }
}

int main(void) {
    quarter_waves();
    nitride_on_silicon();
    absorbing();
    identities();
    uniaxial_equals_isotropic();
    return check_done();
}
