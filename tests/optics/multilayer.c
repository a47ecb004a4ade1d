/* The fields that multilayer() hands out: continuous through every film by the film's own matrix, right at
 * the ends. Figures: tests/external/multilayer.c. */
#include "optics/multilayer.h"

#include "base/quantity.h"
#include "check.h"
#include "optics/lanes.h"

int main(void) {
    film air = { 1, 1, 0 }, sub = { complex_of(15, 0.2), complex_of(15, 0.2), 0 };
    film films[] = { { complex_of(4, 0.1), complex_of(6, 0.2), 83 },
                     { 1, 1, 140 },
                     { complex_of(-9, 1.3), complex_of(-9, 1.3), 21 } };
    double k0 = 2 * PI / 523;
    double complex im = complex_of(0, 1);
    for (int p = 0; p < 2; p++)
        for (double deg = 0; deg < 90; deg += 12.7) {
            double s2 = sin(deg * PI / 180) * sin(deg * PI / 180);
            double complex field[8], top = film_half_space(&air, s2, p);
            powers w = multilayer(523, s2, p, &air, films, 3, &sub, field);
            for (int j = 0; j < 3; j++) {
                double complex a = film_a(&films[j], s2, p), b = film_b(&films[j], p), kappa = csqrt(a * b);
                double complex c = ccos(kappa * k0 * films[j].thickness_nm),
                               s = csin(kappa * k0 * films[j].thickness_nm);
                double complex F = c * field[2 * j] + im * b / kappa * s * field[2 * j + 1];
                double complex G = c * field[2 * j + 1] + im * a / kappa * s * field[2 * j];
                CHECK_NEAR(cabs(F - field[2 * j + 2]), 0, 1e-10 * cabs(F));
                CHECK_NEAR(cabs(G - field[2 * j + 3]), 0, 1e-10 * cabs(G));
            }
            double complex r = field[0] - 1; /* unit incident F, so F = 1 + r and G = X (1 - r) */
            CHECK_NEAR(cabs(field[1] - top * (1 - r)), 0, 1e-12 * cabs(top));
            CHECK_NEAR(cabs(r) * cabs(r), w.R, 1e-13);
            CHECK_NEAR(cabs(field[7] / field[6] - film_half_space(&sub, s2, p)), 0, 1e-12);
            CHECK(w.R > 0 && w.R < 1 && w.T > 0 && w.R + w.T < 1);
        }
    /* Grazing on the critical angle of a gap: kappa = 0 is a removable 0/0. */
    film dense = { 2.25, 2.25, 0 }, gap = { 1, 1, 300 };
    powers at = multilayer(600, 1, 0, &dense, &gap, 1, &dense, NULL),
           near = multilayer(600, 1 + 1e-9, 0, &dense, &gap, 1, &dense, NULL);
    CHECK(isfinite(at.R) && isfinite(at.T));
    CHECK_NEAR(at.R, near.R, 1e-8);
    CHECK_NEAR(at.R + at.T, 1, 1e-12);
    /* Nothing between equal half-spaces. */
    CHECK_NEAR(multilayer(600, 0.3, 1, &dense, NULL, 0, &dense, NULL).R, 0, 1e-30);
    CHECK_NEAR(multilayer(600, 0.3, 1, &dense, NULL, 0, &dense, NULL).T, 1, 1e-15);
    return check_done();
}
