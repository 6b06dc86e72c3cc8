/* Materials checked, with their defaults in place, and the wideband model ready to evaluate. */
#ifndef LSTUB_MATERIAL_H
#define LSTUB_MATERIAL_H

#include "base/base.h"
#include "num/cplx.h"

/* eps(f) = constant + slope * lambda(f), lambda = ln((f2 + jf)/(f1 + jf)) the same for all materials: mixtures stay
** of this form. Through-plane. */
typedef struct lstub__wideband {
    double constant, slope;
} lstub__wideband;

/* Copies a dielectric (or conductor), puts defaults in place of zeros, checks. */
int32_t lstub__dielectric_take(lstub_dielectric *ours, const lstub_dielectric *theirs, lstub_error *err);
int32_t lstub__conductor_take(lstub_conductor *ours, const lstub_conductor *theirs, lstub_error *err);

lstub__wideband lstub__wideband_of(const lstub_dielectric *dielectric);
cplx lstub__wideband_lambda(double f);
/* Frequency above which the real part is below 1, HUGE_VAL if none: no medium is like that. */
double lstub__wideband_top(lstub__wideband w);
cplx lstub__wideband_at(lstub__wideband w, cplx lambda);

#endif
