/* How far a graded-index prediction can be trusted: diffraction orders and the error of the model against rigorous
 * calculations (tables over p/wavelength and h/wavelength). */
#ifndef SWARD_OPTICS_TRUST_H
#define SWARD_OPTICS_TRUST_H
#include <stddef.h>

#include "base/status.h"
#include "optics/material.h"
#include "optics/sun.h"

/* Standard uncertainty and mean error (graded index minus rigorous), absolute R, of one wavelength, before capping.
 * spacing_nm is the hexagonal mean spacing. Table, interpolation and clamping as documented in the .c. */
void trust_model(double spacing_nm, double height_nm, double wavelength_nm, double *u, double *bias);

/* The same for the reflectance weighted with AM1.5G photons over 300..1200 nm, bare silicon in air, normal incidence:
 * what has to be added to the graded index (2-D Bruggeman) to meet the rigorous value of a hexagonal lattice, and the
 * standard uncertainty of that by reading between the nodes. Absolute R.
 *   in   exponent of the shape family, 1 cone, 2 paraboloid; held there outside */
void trust_weighted(double spacing_nm, double height_nm, double exponent, double *shift, double *u);

typedef enum { ORDERS_NONE, ORDERS_IN_SUBSTRATE, ORDERS_IN_AMBIENT } order_class;
/* Hexagonal pattern, spatial frequency q = 1/(sqrt(3)/2 spacing): which side carries propagating orders.
 * ambient_n 1 for air. */
order_class trust_orders(double spacing_nm, double wavelength_nm, double angle_deg, double ambient_n,
                         double substrate_n);

/* Shares of the weighted photons by class; they sum to 1. */
typedef struct { double none, in_substrate, in_ambient; } order_shares;
status trust_shares(double spacing_nm, double angle_deg, double ambient_n, const material *substrate, const sun *s,
                    double lo_nm, double hi_nm, order_shares *out, error *e);

#endif
