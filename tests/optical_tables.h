/* The tables of pipeline/optics/materials for tests of optics and link: straight reading, no checks of form. */
#ifndef SWARD_TESTS_OPTICAL_TABLES_H
#define SWARD_TESTS_OPTICAL_TABLES_H
#include <stdio.h>
#include <string.h>

#include "optics/material.h"
#include "optics/sun.h"

enum { TABLE_ROWS = 4000 };

/* Up to three columns of a table; returns the rows. */
static inline size_t table_read(const char *name, double (*column)[TABLE_ROWS]) {
    char path[600], line[200];
    snprintf(path, sizeof path, "%s/%s.csv", SWARD_MATERIALS, name);
    FILE *f = fopen(path, "r");
    size_t n = 0;
    while (f && n < TABLE_ROWS && fgets(line, sizeof line, f)) {
        if (strchr("0123456789", line[0]) == NULL) continue;
        column[2][n] = 0.0;
        n += sscanf(line, "%lf,%lf,%lf", &column[0][n], &column[1][n], &column[2][n]) >= 2;
    }
    if (f) fclose(f);
    return n;
}

static inline int table_material(const char *name, material *m) {
    static double column[3][TABLE_ROWS];
    size_t n = table_read(name, column);
    error e = { 0 };
    return n && material_make(m, name, "a test", n, column[0], column[1], column[2], &e) == ST_OK;
}

static inline int table_sun(sun *s) {
    static double column[3][TABLE_ROWS];
    size_t n = table_read("am15g", column);
    error e = { 0 };
    return n && sun_make(s, "a test", n, column[0], column[1], &e) == ST_OK;
}
#endif
