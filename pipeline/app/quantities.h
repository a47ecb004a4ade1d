/* The one place where px become nm: which member of a texture feeds which column, and how it scales. */
#ifndef SWARD_APP_QUANTITIES_H
#define SWARD_APP_QUANTITIES_H
#include "metrics/texture.h"
#include "report/rows.h"

typedef struct {
    const char *name;      /* column of images.csv: spacing_acf_nm */
    const char *px_name;   /* the same in px: spacing_acf_px; NULL when it has no length in it */
    size_t in_texture;     /* offset of the `measured` */
    size_t in_image;       /* offset of the value in image_row; its _u follows directly */
    size_t in_sample;      /* offset in sample_row, or NOT_IN_SAMPLE */
    int power;             /* of the length: 1 nm, -2 per area (given per um2), 0 none */
} quantity_map;

#define NOT_IN_SAMPLE ((size_t)-1)
enum { QUANTITY_ACF, QUANTITY_PSD, QUANTITY_NN, QUANTITY_HEX, QUANTITY_DENSITY, QUANTITIES = 19 };
extern const quantity_map quantity_table[QUANTITIES];

/* A figure of one micrograph or sample with the parts of its uncertainty, in output units. */
typedef struct {
    measured m;
    double u_px;   /* part of the pixel size, common to a sitting */
} figure;

const measured *texture_figure(const texture *t, int q);

/* Length power applied; u_px from the relative uncertainty of the pixel size. px_nm NAN: all missing where power != 0. */
figure figure_in_nm(const measured *m, int power, double px_nm, double px_u_rel);

/* JCGM 100: root sum of squares of the parts. NAN when the value is missing. */
double figure_u(const figure *f);

/* "name": {"sampling": .., "method": .., "pixel_size": .., "combined": .., "n": ..} for every quantity that is there. */
void figures_json(const figure *f, textbuf *out);
/* "spacing_acf_px": .., "spacing_acf_px_u": .. for every quantity with a length in it. */
void texture_px_json(const texture *t, textbuf *out);

#endif
