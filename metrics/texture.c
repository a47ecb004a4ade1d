#include "metrics/texture.h"

#include <stdlib.h>

void texture_drop_cells(texture *t) {
    free(t->cells);
    t->cells = NULL;
}

void texture_free(texture *t) {
    texture_drop_cells(t);
    free(t->features);
    for (size_t i = 0; i < t->n_curves; i++) free(t->curves[i].points);
    *t = (texture){ 0 };
}
