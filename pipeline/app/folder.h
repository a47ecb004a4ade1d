/* What a folder holds: micrographs in output order, their sheet rows, and the samples they form. */
#ifndef SWARD_APP_FOLDER_H
#define SWARD_APP_FOLDER_H
#include "app/batch.h"
#include "app/samplesheet.h"
#include "io/file.h"

typedef struct {
    char *root;
    char **paths;          /* [n] to open */
    char **relative;       /* [n] below root; sheet order first, then natural order */
    char **stems;          /* [n] unique names of output files */
    const sheet_row **rows; /* [n] of the sheet, or NULL */
    size_t n;
    size_t n_other;        /* files that are no pictures */
    file_list left;        /* its left: everything that was left alone, with the reason */
    sheet sheet;
    textbuf warnings;      /* lines: rows of the sheet without a file, micrographs that are still being written ... */
} folder;                  /* {0} = empty */

/* 1 when the name is one of a picture, also of a kind that is not read. */
int folder_is_picture(const char *relative);

/* Walks, reads the sheet (NULL: root/samples.csv if there), orders. Files that are still being written are left alone: those `admit`
 * refuses; NULL: those that change while we look.
 *   err ST_IO no such folder; ST_BAD_INPUT a bad sheet; ST_NO_MEMORY */
status folder_open(const char *root, const char *sheet_path, int (*admit)(void *context, const char *relative), void *context,
                   folder *out, error *e);
/* The same for n pictures (byte order) and n_other other files that are known already; nothing but the sheet is read. */
status folder_listed(const char *root, char **names, size_t n, size_t n_other, const char *sheet_path, folder *out, error *e);
void folder_close(folder *f);

/* Groups the micrographs into samples in order of first appearance.
 *   out  groups[*n] owned (sample_group_free each, then free); names of the samples into all[i].row.sample
 *   err  ST_BAD_INPUT; ST_NO_MEMORY */
status folder_samples(const folder *f, const protocol *p, examined *all, sample_group **groups, size_t *n, error *e);

#endif
