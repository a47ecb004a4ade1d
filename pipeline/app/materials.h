/* Materials from files and the optical set-up a protocol asks for. */
#ifndef SWARD_APP_MATERIALS_H
#define SWARD_APP_MATERIALS_H
#include "app/linkfile.h"
#include "link/predict.h"

/* Where the tables lie: $SWARD_MATERIALS, else `materials` beside the executable, else
 * ../share/sward/materials from it (the executable's real place: links to it work). Caller frees. err ST_IO
 * none of them exists */
status materials_folder(char **out, error *e);

/* By name ("silicon"), by a path to a CSV (wavelength_nm, n, k), or a number ("2", "2.09+0.01i").
 *   err  ST_BAD_INPUT unknown name (the known ones are listed), bad CSV (with its line), no such file; ST_IO;
 * ST_NO_MEMORY */
status material_load(const char *name, material *out, error *e);

/* Every known material: name, title, range, source, one per line for a person. */
status materials_list(textbuf *out, error *e);

/* depth_nm, solid_fraction: depth ascending from 0, shares 0..1. err ST_BAD_INPUT with the line */
status profile_read(const char *path, profile *out, error *e);

/* Owns everything behind `optics`. Holds pointers into itself: never copy or move it. */
typedef struct {
    material ambient, substrate, air, nitride, glass, encapsulant, coating[LIMIT_COATINGS];
    layer layers[LIMIT_COATINGS];
    sun sun;
    profile measured;    /* n = 0: none */
    linkfile calibrated; /* link.n_samples = 0: none */
    optics_setup optics; /* ready for predict() */
} setup;                 /* {0} = empty */

/*   err  as material_load, profile_read, linkfile_read, linkfile_fits; ST_BAD_INPUT a band outside a material's table, coatings on a
 *        measured profile */
status setup_make(const protocol *p, setup *out, error *e);
void setup_free(setup *s);

/* The numbers behind the names (nodes of every material, of the sun, of the measured profile), for
 * fingerprints. */
void setup_text(const setup *s, textbuf *out);

#endif
