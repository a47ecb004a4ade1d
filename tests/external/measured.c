/* Predictions against measured textures of the literature: orientation, not proof. Rows without any geometry that could be
 * put into a model are left out: a maskless etch down to 10 %, a review's lowest 3.9 %, textures under gold, a texture within
 * the nitride whose thickness left is not stated, nickel-etched planes of which only the gain by a coating serves. Publications rarely give height, shape
 * and reflectance of one sample, so each row is used only for what it can carry: a bound, a bracket of two idealised
 * surfaces, a trend, a baseline, or "the model must not claim this". In the source strings "read" means that the figure
 * was read in the publication or its abstract; "from memory" means just that, and is never to be quoted as measured. */
#include <stdlib.h>

#include "base/quantity.h"
#include "check.h"
#include "link/predict.h"
#include "optical_tables.h"

static material silicon, air, nitride, alumina, two, fluoride, cover, porous, glass, encapsulant;
static sun am15g;

static optics_setup setup(double lo, double hi) {
    return (optics_setup){ .ambient = &air,
                           .substrate = &silicon,
                           .air = &air,
                           .nitride = &nitride,
                           .mixing = MIX_BRUGGEMAN_2D,
                           .reflect = reflect_defaults(),
                           .sun = &am15g,
                           .band_lo_nm = lo,
                           .band_hi_nm = hi,
                           .step_nm = 5.0,
                           .model = OPTICS_AUTO };
}
static surface_input shape(double height, double spacing, double exponent) {
    surface_input in = { .spacing_nm = { spacing, 0.0, 1 },
                         .height_nm = { height, 0.0, 1 },
                         .link = link_defaults() };
    in.link.exponent = exponent;
    return in;
}
static prediction ask(const surface_input *in, const optics_setup *o) {
    error e = { 0 };
    prediction p = { 0 };
    CHECK(predict(in, o, &p, &e) == ST_OK);
    return p;
}

typedef struct {
    double mean, largest, weighted, lo, hi;
    int refused;
} figures; /* %, mean not weighted */
static figures of(surface_input in, optics_setup o) {
    prediction p = ask(&in, &o);
    figures f = { .weighted = 100.0 * p.weighted,
                  .lo = 100.0 * p.weighted_lo,
                  .hi = 100.0 * p.weighted_hi,
                  .refused = p.refused };
    for (size_t i = 0; i < p.n; i++) {
        f.largest = fmax(f.largest, 100.0 * p.R[i]);
        f.mean += 100.0 * p.R[i] / (double)p.n;
    }
    prediction_free(&p);
    return f;
}
static void between(double low, double measured, double high, const char *source) {
    CHECK_SOURCE(measured, 0.5 * (low + high), 0.5 * (high - low), source); /* lies in low..high */
}

/* Flat silicon, bare and coated: the published averages lie between those over 400-1000 and 300-1000 nm, the range and the
 * weight of their mean not being stated. */
static void baselines(void) {
    layer one = { &two, 69.1 }, both[2] = { { &fluoride, 56.0 }, { &two, 69.1 } };
    optics_setup red = setup(400.0, 1000.0), blue = setup(300.0, 1000.0);
    surface_input flat = shape(0.0, 300.0, 1.0);
    between(of(flat, red).mean, 35.61, of(flat, blue).mean,
            "Sahoo et al. (2009) Nanoscale Res. Lett., table 1: bare, read");
    red.coatings = blue.coatings = &one;
    red.n_coatings = blue.n_coatings = 1;
    between(of(flat, red).mean, 11.22, of(flat, blue).mean,
            "Sahoo et al. (2009): 69.1 nm silicon nitride, read");
    red.coatings = blue.coatings = both;
    red.n_coatings = blue.n_coatings = 2;
    between(of(flat, red).mean, 7.64, of(flat, blue).mean,
            "Sahoo et al. (2009): 56 nm MgF2 on 69.1 nm nitride, read");
    CHECK_SOURCE(of(flat, setup(300.0, 1200.0)).weighted, 35.0, 1.0,
                 "polished silicon, photon weighted, from memory");
}

/* Wires of one thickness lie between a flat-topped layer (share 0.45) and a smooth grade: uneven tops grade them. */
static void wires(void) {
    static const struct {
        double length, lo, hi, R;
        const char *source;
    } rows[] = {
        { 600.0, 400.0, 1000.0, 5.0,
          "Hsu et al. (2012) Int. J. Photoenergy, 197514: etched wires of 600 nm, grain A, read" },
        { 600.0, 400.0, 1000.0, 4.0, "Hsu et al. (2012): the same wafer, grain B, read" },
        { 2000.0, 300.0, 1000.0, 4.0,
          "Srivastava et al. (2010) Sol. Energy Mater. Sol. Cells 94, 1506: below 4 %, 2 um of wires, from memory" },
        { 1000.0, 300.0, 1100.0, 2.0,
          "Ding et al. (2014) Curr. Nanosci. 10, 402: filling 0.45, pitch 110 nm, read; length not stated" },
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        double depth[2] = { 0.0, rows[i].length }, share[2] = { 0.45, 0.45 };
        profile layer_of = { .n = 2, .depth_nm = depth, .solid = share };
        optics_setup o = setup(rows[i].lo, rows[i].hi);
        surface_input uniform = shape(0.0, 110.0, 1.0), grade = shape(rows[i].length, 110.0, 2.0);
        uniform.measured = &layer_of;
        between(of(grade, o).mean, rows[i].R, of(uniform, o).mean, rows[i].source);
    }
}

/* Other graded and porous layers, by profiles of their own. */
static void layers(void) {
    double depth[2] = { 0.0, 1000.0 }, share[2] = { 0.0, 1.0 };
    profile grade = { .n = 2, .depth_nm = depth, .solid = share };
    surface_input in = shape(0.0, 60.0, 1.0);
    in.measured = &grade;
    between(0.0, of(in, setup(357.0, 1400.0)).largest, 5.0,
            "Ma et al. (2006) Appl. Phys. Lett. 88, 171907: graded porous multilayer below 5 % over 357-3333 nm, read; here a "
            "straight grade of 1 um over the tables' range");
    in = shape(500.0, 60.0, 2.0);
    in.pores = 1;
    between(0.0, of(in, setup(300.0, 1200.0)).weighted, 3.0,
            "Yuan et al. (2009) Appl. Phys. Lett. 95, 123501: density-graded pores below 3 % of the sun, read; depth 500 nm from memory");
    /* a porous film without any grading: a quarter wave at 620 nm of the index between air and silicon */
    layer film = { &porous, 79.0 };
    optics_setup o = setup(550.0, 700.0);
    o.coatings = &film;
    o.n_coatings = 1;
    between(0.0, of(shape(0.0, 300.0, 1.0), o).mean, 2.0,
            "Schirone et al. (1997) Solid State Phenomena 54, 59: porous film below 2 % over 550-700 nm, read; thickness not stated");
}

/* Upper bounds of needle fields: the model keeps them too. Largest: at every wavelength of the range. */
static void bounds(void) {
    static const struct {
        double height, spacing, exponent, lo, hi, bound;
        int largest;
        const char *source;
    } rows[] = {
        { 800.0, 200.0, 1.0, 300.0, 1000.0, 0.7, 1,
          "Ortega et al. (2015) Prog. Photovolt.: below 0.7 %, read; height and spacing from memory" },
        { 350.0, 100.0, 1.0, 400.0, 800.0, 2.6, 1,
          "Kanamori et al. (2001) Appl. Phys. Lett. 78, 142: from memory, 1.6 +- 1" },
        { 1600.0, 140.0, 1.0, 300.0, 1000.0, 1.8, 1,
          "Huang et al. (2007) Nat. Nanotechnol. 2, 770: from memory, 1.0 +- 0.8" },
        { 500.0, 100.0, 1.0, 400.0, 1000.0, 5.0, 0,
          "Yoo et al. (2006) Sol. Energy Mater. Sol. Cells 90, 3085: from memory" },
        { 1800.0, 300.0, 1.0, 400.0, 950.0, 1.0, 0,
          "Nguyen et al. (2013) J. Appl. Phys. 113, 194903: from memory" },
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        figures f =
            of(shape(rows[i].height, rows[i].spacing, rows[i].exponent), setup(rows[i].lo, rows[i].hi));
        between(0.0, rows[i].largest ? f.largest : f.mean, rows[i].bound, rows[i].source);
        printf("%4.0f nm at %3.0f nm: %.2f %% (bound %.1f)\n", rows[i].height, rows[i].spacing,
               rows[i].largest ? f.largest : f.mean, rows[i].bound);
    }
    layer film = { &alumina, 20.0 };
    optics_setup o = setup(300.0, 1000.0);
    o.coatings = &film;
    o.n_coatings = 1;
    between(0.0, of(shape(800.0, 200.0, 1.0), o).largest, 0.7, "Ortega et al. (2015): with 20 nm of alumina");
}

static void trends(void) {
    /* flat ground between the features lets the index jump and reflects more; an encapsulant on top reflects less */
    optics_setup o = setup(450.0, 800.0);
    surface_input full = shape(300.0, 300.0, 1.0), gaps = full;
    gaps.link.coverage = 0.8;
    double bare = of(full, o).mean;
    CHECK(of(gaps, o).mean > 1.5 * bare);
    o.ambient = &cover;
    between(0.0, of(full, o).mean / bare, 0.63,
            "hydrogen-etched pyramids under n = 1.4: 4.3/6.8 = 0.63 with the cover's own face "
            "and flat gaps in it, read (authors not shown); without both it must be less");
    /* a coating helps a dark texture by little: 0.84 points measured, against 25 on flat silicon */
    layer film = { &alumina, 75.0 };
    optics_setup plain = setup(400.0, 800.0), coated = plain;
    coated.coatings = &film;
    coated.n_coatings = 1;
    surface_input texture = shape(250.0, 200.0, 1.0), flat = shape(0.0, 200.0, 1.0);
    double gain = of(texture, plain).mean - of(texture, coated).mean;
    double flat_gain = of(flat, plain).mean - of(flat, coated).mean;
    CHECK(fabs(gain) < 3.0 && flat_gain > 15.0);
    /* grade depth: R falls as exp(-8 d / wavelength) */
    static const double law[3] = { 9.3, 1.2, 0.33 }, depth[3] = { 100.0, 250.0, 350.0 };
    for (int i = 0; i < 3; i++) {
        prediction p;
        surface_input in = shape(depth[i], 60.0, 2.0);
        optics_setup at = setup(595.0, 605.0);
        p = ask(&in, &at);
        CHECK_SOURCE(log(100.0 * p.R[1] / law[i]), 0.0, log(2.0),
                     "Branz et al. (2009) Appl. Phys. Lett. 94, 231121: depth law, abstract read; 600 nm");
        prediction_free(&p);
    }
}

/* Two scales and large facets: what the graded index must not claim. */
static void validity(void) {
    /* 100 nm of porous layer on pyramids reflected below 2 %; on flat silicon the same layer must come out far higher */
    optics_setup o = setup(350.0, 1000.0);
    CHECK(of(shape(100.0, 60.0, 2.0), o).weighted > 10.0 && of(shape(100.0, 60.0, 1.0), o).weighted > 10.0);
    o = setup(300.0, 1000.0);
    surface_input pyramids = shape(4000.0 * 0.7071, 4000.0, 1.0);
    figures f = of(pyramids, o);
    between(f.lo, 11.5, f.hi, "alkaline random pyramids, bare: 10 to 13 %, textbook value from memory");
    between(f.lo, 10.4, f.hi,
            "Chen et al. (2019) Solar Energy 186, 392: inverted pyramids, traced 10.11 to 10.64 %, read");
    printf("pyramids 300-1000 nm: %.2f %% (%.2f to %.2f)\n", f.weighted, f.lo, f.hi);
    layer film = { &nitride, 75.0 };
    o.coatings = &film;
    o.n_coatings = 1;
    f = of(pyramids, o);
    between(1.5, f.weighted, 3.5,
            "alkaline random pyramids with 75 nm nitride: 2.5 +- 1 %, textbook value from memory");
    prediction q = ask(&pyramids, &o);
    double least = 1.0;
    for (size_t i = 0; i < q.n; i++) least = fmin(least, q.R[i]);
    prediction_free(&q);
    between(0.0, 100.0 * least, 0.33, "Schneider et al. (2016) Sci. Rep.: inverted pyramids under nitride, lowest 0.33 %, read");
    o = setup(300.0, 1000.0);
    f = of(pyramids, o);
    between(f.lo, 12.0, f.hi, "Schneider et al. (2016) Sci. Rep.: inverted pyramids, bare, as low as 12 %, read");
    /* behind glass, from straight on to diffuse: a year outdoors lies between, and no texture passes the glass's face */
    o = setup(350.0, 1100.0);
    o.coatings = &film;
    o.n_coatings = 1;
    o.front = (laminate){ &glass, 3.2, &encapsulant, 0.45 };
    double upright = of(pyramids, o).weighted;
    surface_input grass = shape(500.0, 300.0, 1.0);
    double dark = of(grass, o).weighted;
    o.reflect.hemispherical = 1;
    printf("behind glass: pyramids %.2f to %.2f %%, grass %.2f to %.2f %%\n", upright, of(pyramids, o).weighted, dark, of(grass, o).weighted);
    between(upright, 10.6, of(pyramids, o).weighted + 1.0,
            "Southampton year of an encapsulated cell with coated random pyramids (2023): 10.6 %, read (authors not shown)");
    between(dark, 7.6, of(grass, o).weighted + 1.0,
            "the same year, black silicon on pyramids: 7.6 %, read");
    CHECK(dark > 4.0);
    o = setup(300.0, 1000.0);
    o.model = OPTICS_GRADED;
    CHECK(of(pyramids, o).refused);
    /* 500 nm apart: orders run in air, a specular figure says nothing of the total; the note has to say so */
    surface_input nipples = shape(800.0, 500.0, 1.0);
    o = setup(350.0, 850.0);
    prediction p = ask(&nipples, &o);
    CHECK(p.shares.in_ambient > 0.02 && strstr(p.note, "diffracted out again"));
    prediction_free(&p);
}

int main(void) {
    error e = { 0 };
    CHECK(table_material("silicon", &silicon) && table_material("nitride", &nitride) &&
          table_material("alumina", &alumina) && table_sun(&am15g) &&
          material_constant(&air, 1.0, 0.0, &e) == ST_OK && material_constant(&two, 2.0, 0.0, &e) == ST_OK &&
          material_constant(&fluoride, 1.38, 0.0, &e) == ST_OK &&
          material_constant(&cover, 1.4, 0.0, &e) == ST_OK && material_constant(&porous, 1.96, 0.0, &e) == ST_OK &&
          table_material("glass", &glass) && table_material("encapsulant", &encapsulant));
    baselines();
    wires();
    layers();
    bounds();
    trends();
    validity();
    material *all[] = { &silicon, &air, &nitride, &alumina, &two, &fluoride, &cover, &porous, &glass, &encapsulant };
    for (size_t i = 0; i < sizeof all / sizeof all[0]; i++) material_free(all[i]);
    sun_free(&am15g);
    return check_done();
}
