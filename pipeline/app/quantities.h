/* The one place where px become nm: which member of a texture feeds which column, and how it scales. */
#ifndef SWARD_APP_QUANTITIES_H
#define SWARD_APP_QUANTITIES_H
#include "metrics/budget.h"
#include "metrics/texture.h"
#include "report/rows.h"

typedef struct {
    const char *name;      /* column of images.csv: spacing_acf_nm */
    const char *px_name;   /* the same in px: spacing_acf_px; NULL when it has no length in it */
    size_t in_texture;     /* offset of the `measured` */
    size_t in_image;       /* offset of the value in image_row; its _u follows directly */
    size_t in_sample;      /* offset in sample_row, or NOT_IN_SAMPLE */
    int power;             /* of the length: 1 nm, -2 per area (given per um2), 0 none */
    double by_count;       /* relative change per relative change of the number of features: its detection part */
} quantity_map;

#define NOT_IN_SAMPLE ((size_t)-1)
enum { QUANTITY_ACF, QUANTITY_PSD, QUANTITY_NN, QUANTITY_HEX, QUANTITY_DENSITY, QUANTITY_STRETCH = 15, QUANTITY_ANGLE, QUANTITIES = 19 };
extern const quantity_map quantity_table[QUANTITIES];

/* A figure of one micrograph or sample with the parts of its uncertainty, in output units. */
typedef struct {
    measured m;
    double u_px;   /* part of the pixel size, common to a sitting */
    double u_within, u_between; /* parts of m.u_sampling; between NAN for one micrograph */
    double dof_sampling;        /* degrees of freedom of m.u_sampling */
    double u_detection;         /* part of m.u_method: features missed or invented */
    size_t micrographs;
} figure;

enum { FIGURE_PARTS = 4 }; /* sampling, detection, definition, pixel size */

const measured *texture_figure(const texture *t, int q);

/* Length power applied; u_px from the relative uncertainty of the pixel size. px_nm NAN: all missing where power != 0. */
figure figure_in_nm(const measured *m, int power, double px_nm, double px_u_rel);

/* What the detector adds to quantity q when it knows the number of features to count_u_rel; never more than u_method. */
void figure_detection(figure *f, int q, double count_u_rel);

/* JCGM 100: root sum of squares of the parts. NAN when the value is missing. */
double figure_u(const figure *f);

/* Combined u, its degrees of freedom and the coverage factor of a 95 % interval. How well the parts are known: sampling by
 * dof_sampling; detection and definition to a fifth (their figures come from some dozens of renders), the pixel size to a tenth. */
budget_total figure_total(const figure *f);

/* "name": {..} for every quantity that is there: combined^2 = sampling^2 + method^2 + pixel_size^2, where sampling is the larger
 * of within and between (samples only), method^2 = detection^2 + definition^2; dof, k and lo, hi for 95 %; n. */
void figures_json(const figure *f, textbuf *out);
/* "spacing_acf_px": .., "spacing_acf_px_u": .. for every quantity with a length in it. */
void texture_px_json(const texture *t, textbuf *out);

#endif
