/* Names on the command line and back; freeing a profile. */
#include "optics/stack.h"

#include <stdlib.h>

#include "check.h"

int main(void) {
    static const char *const names[] = { "bruggeman-2d",       "maxwell-garnett-2d", "bruggeman-3d",
                                         "maxwell-garnett-3d", "looyenga",           "volume" };
    for (int i = 0; i < MIXINGS; i++) {
        mixing m = MIX_VOLUME;
        CHECK(!strcmp(mixing_name((mixing)i), names[i]));
        CHECK(mixing_from_name(names[i], &m) && (int)m == i);
    }
    mixing kept = MIX_LOOYENGA;
    CHECK(!mixing_from_name("Bruggeman", &kept) && kept == MIX_LOOYENGA);
    CHECK(!mixing_from_name("", &kept));
    CHECK(!strcmp(polarization_name(POL_MEAN), "mean") && !strcmp(polarization_name(POL_S), "s") &&
          !strcmp(polarization_name(POL_P), "p"));
    profile p = { .n = 2,
                  .depth_nm = malloc(16),
                  .solid = malloc(16),
                  .coating = { malloc(16) },
                  .n_coatings = 1,
                  .pores = 1 };
    profile_free(&p);
    CHECK(!p.n && !p.depth_nm && !p.solid && !p.coating[0] && !p.n_coatings && !p.pores);
    profile_free(&p); /* {0} is fine */
    return check_done();
}
