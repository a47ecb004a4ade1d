/* What is to be rendered: the options of `sward render` and the recipe file share one table of keys, so that a series
 * made by hand can be kept as a file and made again. */
#ifndef SWARD_APP_RENDER_RECIPE_H
#define SWARD_APP_RENDER_RECIPE_H
#include <stddef.h>

#include "app/render.h"
#include "base/status.h"
#include "base/text.h"

typedef struct {
    char *file;  /* relative to the output folder; its ending decides PNG or TIFF; owned */
    char *label; /* of the strip; NULL: none; owned */
    render_options options; /* options.label is set when the picture is made */
} recipe_image;

typedef struct {
    recipe_image *images; /* [n] owned */
    size_t n;
} recipe;

/* Sets one key from its text, as given on the command line or in a recipe.
 *   err  ST_BAD_INPUT unknown key (with the nearest), a value that cannot be read; ST_NO_MEMORY */
status recipe_set(recipe_image *image, const char *key, const char *value, error *e);

/* Reads {"about": "...", "defaults": {...}, "images": [{"file": "...", ...}]}. Without a seed of its own an image takes
 * the seed of the defaults plus its place in the list.
 *   own  caller frees with recipe_free; out untouched on failure
 *   err  as input_read; ST_BAD_INPUT with the line: not JSON, unknown key (with the nearest), a value that cannot be read, no file
 *        name, a file name twice, one that leaves the output folder or does not end in .png, .tif or .tiff; no images */
status recipe_read(const char *path, recipe *out, error *e);
void recipe_free(recipe *r);

/* A plain relative path that ends in .png, .tif or .tiff. */
status recipe_check_file(const char *file, error *e);
int recipe_file_is_tiff(const char *file);

/* Every key of the image but its file as a JSON object that a recipe could hold, `indent` blanks before each line. */
void recipe_options_to_json(const recipe_image *image, int indent, textbuf *out);

#endif
