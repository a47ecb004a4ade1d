/* Lengths as people type them on the command line. */
#ifndef SWARD_APP_LENGTH_H
#define SWARD_APP_LENGTH_H

/* "5um", "500 nm", "0.5 mm": 1 and *nm, above 0; else 0. A number without a unit is refused: 5 of what? */
int length_parse(const char *text, double *nm);

#endif
