/* The sun and the facts of the trade: spectrum and current (F-01..F-04), polished and coated silicon
 * (F-05..F-08, reference table), two bounces (F-09), windows of a textured wafer (F-20..F-24), diffraction
 * orders (F-26). */
#include "base/quantity.h"
#include "check.h"
#include "optics/trust.h"
#include "optics_data.h"

static material air, si, schinke, nitride, two;
static sun light;
static const char TABLE[] = "ASTM G173-03 with Green (2008), computed independently";

static double weighted(const stack *s, double deg, double lo, double hi, double step) {
    reflect_options o = reflect_defaults();
    o.angle_deg = deg;
    return data_weighted(s, &o, &light, lo, hi, step);
}

static void spectrum(void) {
    static const struct {
        double lo, hi, mA;
    } current[] = { { 300, 1200, 46.456 },
                    { 300, 1100, 43.518 },
                    { 300, 1000, 38.061 },
                    { 350, 1150, 44.227 },
                    { 400, 1000, 36.708 } };
    error e = { 0 };
    double mA = 0, sum = 0, visible = 0, total = 0;
    for (size_t i = 0; i < sizeof current / sizeof current[0]; i++) {
        CHECK(sun_current(&light, current[i].lo, current[i].hi, &mA, &e) == ST_OK);
        CHECK_SOURCE(mA, current[i].mA, 5.1e-4, "F-03 photon current, SI 2019");
    }
    CHECK(sun_current(&light, 300, 1200, &mA, &e) == ST_OK);
    CHECK_SOURCE(mA, 46.4562, 5.1e-5, TABLE);
    CHECK(sun_current(&light, 400, 1100, &mA, &e) == ST_OK);
    CHECK_SOURCE(mA, 42.1651, 5.1e-5, TABLE);
    for (size_t i = 1; i < light.n; i++) {
        double w = light.wavelength_nm[i], before = light.wavelength_nm[i - 1];
        double part = 0.5 * (light.irradiance[i] + light.irradiance[i - 1]) * (w - before);
        if (before >= 300 && w <= 1200) sum += part;
        if (before >= 400 && w <= 1000) visible += part;
        total += part;
    }
    CHECK_SOURCE(sum, 836.09, 0.01, "F-02 ASTM G173-03");
    CHECK_SOURCE(visible, 693.86, 0.01, "F-02 ASTM G173-03");
    CHECK(total > 880 && total < 1000.4); /* F-01 is 1000.37 up to 4000 nm; this table ends at 1460 nm */
    /* F-04 through the public call: a flat 1 W m-2 nm-1 from 1239.84... - 1 to + 1 nm carries 2 W/m2 of 1 eV
     * photons. */
    double eV = 1239.841984332, w[] = { eV - 1, eV, eV + 1 }, flat[] = { 1, 1, 1 };
    sun one = { 0 };
    CHECK(sun_make(&one, "", 3, w, flat, &e) == ST_OK);
    CHECK(sun_current(&one, eV - 1, eV + 1, &mA, &e) == ST_OK);
    CHECK_SOURCE(mA, 0.2, 1e-12, "F-04 h c/q, SI 2019");
    sun_free(&one);
}

static void polished_and_coated(void) {
    layer coat = { &two, 75 };
    stack bare = { .ambient = &air, .substrate = &si };
    stack coated = { .ambient = &air, .substrate = &si, .coatings = &coat, .n_coatings = 1 };
    static const struct {
        double step, bare, coated;
    } grids[] = { { 1, 0.349843, 0.095549 },
                  { 5, 0.349844, 0.095556 },
                  { 10, 0.349848, 0.095580 },
                  { 25, 0.349897, 0.095753 } };
    for (size_t i = 0; i < 4; i++) {
        CHECK_SOURCE(weighted(&bare, 0, 300, 1200, grids[i].step), grids[i].bare, 1e-6, TABLE);
        CHECK_SOURCE(weighted(&coated, 0, 300, 1200, grids[i].step), grids[i].coated, 1e-6, TABLE);
    }
    CHECK_SOURCE(weighted(&bare, 0, 300, 1100, 1), 0.352409, 1e-6, TABLE);
    CHECK_SOURCE(weighted(&coated, 0, 300, 1100, 1), 0.090062, 1e-6, TABLE);
    CHECK_SOURCE(weighted(&bare, 0, 400, 1100, 1), 0.345927, 1e-6, TABLE);
    CHECK_SOURCE(weighted(&coated, 0, 400, 1100, 1), 0.077089, 1e-6, TABLE);
    /* The rest of the table is on the 5 nm grid (0.095556, not 0.095549, at 75 nm). */
    static const struct {
        double nm, R;
    } thick[] = { { 60, 0.123654 }, { 65, 0.109984 }, { 70, 0.100710 },
                  { 80, 0.094081 }, { 85, 0.095757 }, { 90, 0.100011 } };
    for (size_t i = 0; i < sizeof thick / sizeof thick[0]; i++) {
        coat.thickness_nm = thick[i].nm;
        CHECK_SOURCE(weighted(&coated, 0, 300, 1200, 5), thick[i].R, 1e-6, TABLE);
    }
    coat.thickness_nm = 75;
    reflect_options diffuse = reflect_defaults();
    diffuse.hemispherical = 1;
    CHECK_SOURCE(data_weighted(&bare, &diffuse, &light, 300, 1200, 5), 0.358576, 1e-6, TABLE);
    CHECK_SOURCE(data_weighted(&coated, &diffuse, &light, 300, 1200, 5), 0.157381, 1e-6, TABLE);
    material dense = data_constant(1.5, 0);
    bare.ambient = coated.ambient = &dense;
    CHECK_SOURCE(weighted(&bare, 0, 300, 1200, 5), 0.198549, 1e-6, TABLE);
    CHECK_SOURCE(weighted(&coated, 0, 300, 1200, 5), 0.075256, 1e-6, TABLE);
    material_free(&dense);
}

static void trade(void) {
    stack bare = { .ambient = &air, .substrate = &si }, other = { .ambient = &air, .substrate = &schinke };
    layer coat = { &nitride, 75 };
    stack coated = { .ambient = &air, .substrate = &si, .coatings = &coat, .n_coatings = 1 };
    CHECK_SOURCE(weighted(&bare, 0, 300, 1200, 1), 0.34984, 5e-6, "F-05 Green (2008)");
    CHECK_SOURCE(weighted(&other, 0, 300, 1200, 1), 0.34929, 5e-6, "F-05 Schinke et al. (2015)");
    static const struct {
        double deg, R;
    } oblique[] = { { 30, 0.34973 }, { 45, 0.34935 }, { 60, 0.35040 }, { 70, 0.36137 }, { 80, 0.43298 } };
    for (size_t i = 0; i < 5; i++)
        CHECK_SOURCE(weighted(&bare, oblique[i].deg, 300, 1200, 1), oblique[i].R, 6e-6, "F-06");
    static const struct { double deg, R; } film[] = { { 0, 0.10028 }, { 45, 0.11636 }, { 60, 0.16446 } };
    for (size_t i = 0; i < 3; i++)
        CHECK_SOURCE(weighted(&coated, film[i].deg, 300, 1200, 1), film[i].R, 6e-6, "F-07");
    double least = 1, at = 0;
    for (double w = 500; w <= 800; w++) {
        double R = data_R(&coated, w, 0, POL_MEAN);
        if (R < least) least = R, at = w;
    }
    CHECK_SOURCE(at, 626, 2, "F-07 minimum of the coating");
    static const double thickness[] = { 0.12001, 0.10943, 0.10301, 0.10028, 0.10067, 0.10355, 0.10832 };
    for (int i = 0; i < 7; i++) {
        coat.thickness_nm = 60 + 5 * i;
        CHECK_SOURCE(weighted(&coated, 0, 300, 1200, 1), thickness[i], 6e-6, "F-08");
    }
    double last = 1.0; /* F-27: nearer to the optimum is darker, never below 0 */
    for (double nm = 0.0; nm <= 75.0; nm += 5.0) {
        coat.thickness_nm = nm;
        double R = weighted(&coated, 0, 300, 1200, 5);
        CHECK(R > 0.0 && R < last);
        last = R;
    }
    coat.thickness_nm = 75;
    CHECK_SOURCE(weighted(&bare, 0, 300, 1000, 1), 0.35780, 6e-6, "polished, 300-1000 nm");
    double window = weighted(&bare, 0, 300, 1200, 1), coated_window = weighted(&coated, 0, 300, 1200, 1);
    CHECK(window > 0.30 && window < 0.36);               /* F-20 */
    CHECK(coated_window > 0.08 && coated_window < 0.12); /* F-21 */
    for (double w = 400; w <= 1100; w += 10) {
        double R = data_R(&bare, w, 0, POL_MEAN);
        CHECK(R > 0.31 && R < 0.49); /* F-20 */
    }
}

/* F-09: two flat bounces in 54.7356 degree pyramids, s and p followed separately. */
static double two_bounces(const stack *s, double nm) {
    double sum = 0;
    for (polarization p = POL_S; p <= POL_P; p++)
        sum += data_R(s, nm, 54.7356, p) * data_R(s, nm, 15.7932, p);
    return 0.5 * sum;
}

static void pyramids(void) {
    static const char CG[] = "F-09 geometry of Campbell, Green (1987) J. Appl. Phys. 62, 243";
    material m = data_constant(3.882, 0.019);
    layer coat = { &nitride, 75 };
    stack one = { .ambient = &air, .substrate = &m }, bare = { .ambient = &air, .substrate = &si };
    stack coated = { .ambient = &air, .substrate = &si, .coatings = &coat, .n_coatings = 1 };
    CHECK_SOURCE(two_bounces(&one, 633), 0.1239068, 1e-6, CG);
    static double w[901], R[901], C[901];
    error e = { 0 };
    double mean = 0;
    for (int i = 0; i <= 900; i++) {
        w[i] = 300 + i;
        R[i] = two_bounces(&bare, w[i]);
        C[i] = two_bounces(&coated, w[i]);
    }
    CHECK(sun_weighted(&light, w, R, 901, 300, 1200, &mean, &e) == ST_OK);
    CHECK_SOURCE(mean, 0.12703, 6e-6, CG);
    CHECK(sun_weighted(&light, w, C, 901, 300, 1200, &mean, &e) == ST_OK);
    CHECK_SOURCE(mean, 0.02262, 6e-6, CG);
    material_free(&m);
}

/* R of a texture weighted over a band, largest single R in it. */
static double texture(double power, double height, double deg, double lo, double hi, double *largest) {
    static double w[901], R[901];
    profile p = data_profile(height, 801, data_power, &power);
    stack s = { .ambient = &air, .substrate = &si, .profile = &p };
    reflect_options o = reflect_defaults();
    error e = { 0 };
    double mean = (double)NAN;
    size_t n = (size_t)lround(hi - lo) + 1;
    o.angle_deg = deg;
    for (size_t i = 0; i < n; i++) w[i] = lo + (double)i;
    if (reflectance(&s, &o, w, n, R, NULL, &e) || sun_weighted(&light, w, R, n, lo, hi, &mean, &e))
        printf("%s\n", e.text);
    *largest = 0;
    for (size_t i = 0; i < n; i++) *largest = fmax(*largest, R[i]);
    profile_free(&p);
    return mean;
}

static void windows(void) {
    static const double tall[] = { 300, 350, 400 }, cone[] = { 0.00229, 0.00161, 0.00099 },
                        bowl[] = { 0.00461, 0.00330, 0.00266 };
    double most, largest = 0;
    for (int i = 0; i < 3; i++) {
        CHECK_SOURCE(texture(2, tall[i], 0, 400, 700, &most), cone[i], 1.5e-5, "F-22 (200 slabs, +-1e-5)");
        largest = fmax(largest, most);
        CHECK_SOURCE(texture(1, tall[i], 0, 400, 700, &most), bowl[i], 1.5e-5, "F-22 (200 slabs, +-1e-5)");
    }
    /* 0.0033 is stated as the largest single wavelength over the three cones */
    CHECK_SOURCE(largest, 0.0033, 0.6e-4 + 1e-5, "F-22");
    static const struct {
        double deg, visible, whole;
    } oblique[] = {
        { 45, 0.0119, 0.0299 }, { 50, 0.0190, 0.0413 }, { 60, 0.0503, 0.0846 }, { 70, 0.136, 0.185 }
    };
    for (int i = 0; i < 4; i++) {
        double digit = oblique[i].visible > 0.1 ? 5.1e-4 : 6e-5;
        CHECK_SOURCE(texture(2, 350, oblique[i].deg, 400, 700, &most), oblique[i].visible, digit, "F-23");
        CHECK_SOURCE(texture(2, 350, oblique[i].deg, 300, 1200, &most), oblique[i].whole, digit, "F-23");
    }
    static const double height[] = { 100, 150, 200, 250, 300, 350, 400, 500 };
    static const double R[] = { 0.231, 0.143, 0.0797, 0.0402, 0.0183, 0.0076, 0.0030, 0.0010 };
    double before = 1;
    for (int i = 0; i < 8; i++) {
        double got = texture(2, height[i], 0, 300, 1200, &most);
        CHECK_SOURCE(got, R[i], R[i] > 0.1 ? 5.1e-4 : 6e-5, "F-24");
        CHECK(got < before);
        if (i == 0) CHECK(got > 0.1003); /* shorter than a coating's worth */
        before = got;
    }
    CHECK_SOURCE(texture(2, 1e-3, 0, 300, 1200, &most), 0.34984, 6e-6, "F-24, height to 0 is F-05");
    CHECK(texture(2, 350, 0, 300, 1200, &most) <
          0.1003); /* G-63: graded beats the best single layer over a broad band */
}

static void orders(void) {
    double n, k;
    error e = { 0 };
    CHECK(material_at(&si, 1070, &n, &k, &e) == ST_OK);
    CHECK(trust_orders(350, 302.5, 0, 1, n) == ORDERS_IN_AMBIENT); /* F-26: reflected orders below 303 nm */
    CHECK(trust_orders(350, 303.5, 0, 1, n) == ORDERS_IN_SUBSTRATE);
    CHECK(trust_orders(350, 517, 45, 1, n) == ORDERS_IN_AMBIENT); /* below 517 nm at 45 degrees (517.4) */
    CHECK(trust_orders(350, 518, 45, 1, n) == ORDERS_IN_SUBSTRATE);
    CHECK(trust_orders(350, 1069, 0, 1, 3.54) ==
          ORDERS_IN_SUBSTRATE); /* up to about 1070 nm in silicon, n = 3.54 */
    CHECK(trust_orders(350, 1075, 0, 1, 3.54) == ORDERS_NONE);
    static const struct {
        double pitch, air;
    } below[] = { { 300, 100 }, { 400, 100 }, { 600, 84 }, { 800, 58 }, { 1000, 33 } };
    for (int i = 0; i < 5;
         i++) { /* photons with p/wl < 1.1547, counted on a 25 nm grid: half a step is 1.4 % */
        order_shares o;
        CHECK(trust_shares(below[i].pitch, 0, 1, &si, &light, 300, 1200, &o, &e) == ST_OK);
        CHECK_SOURCE(100 * (1 - o.in_ambient), below[i].air, 1.5,
                     "share of photons below the opening of orders in air");
        CHECK_NEAR(o.none + o.in_substrate + o.in_ambient, 1.0, 1e-12);
    }
}

int main(void) {
    air = data_constant(1, 0), two = data_constant(2, 0);
    si = data_material("silicon"), schinke = data_material("silicon-schinke-2015"),
    nitride = data_material("nitride");
    light = data_sun();
    spectrum();
    polished_and_coated();
    trade();
    pyramids();
    windows();
    orders();
    material_free(&air), material_free(&si), material_free(&schinke), material_free(&nitride),
        material_free(&two);
    sun_free(&light);
    return check_done();
}
