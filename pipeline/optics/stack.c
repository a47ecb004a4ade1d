/* Names of the choices in a stack, and what frees a profile. */
#include "optics/stack.h"

#include <stdlib.h>
#include <string.h>

void profile_free(profile *p) {
    free(p->depth_nm);
    free(p->solid);
    for (size_t j = 0; j < LIMIT_COATINGS; j++) free(p->coating[j]);
    *p = (profile){ 0 };
}

static const char *const mixing_names[MIXINGS] = { "bruggeman-2d",       "maxwell-garnett-2d", "bruggeman-3d",
                                                   "maxwell-garnett-3d", "looyenga",           "volume" };

const char *mixing_name(mixing m) { return mixing_names[m]; }

int mixing_from_name(const char *name, mixing *m) {
    for (int i = 0; i < MIXINGS; i++)
        if (!strcmp(name, mixing_names[i])) {
            *m = (mixing)i;
            return 1;
        }
    return 0;
}

const char *polarization_name(polarization p) {
    static const char *const names[] = { "mean", "s", "p" };
    return names[p];
}
