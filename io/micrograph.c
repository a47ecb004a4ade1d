#include "io/micrograph.h"

#include <stdlib.h>

void micrograph_free(micrograph *m) {
    free(m->px);
    *m = (micrograph){ 0 };
}
