/*
** The closed-form ladder: the second tier, for sweeps. Every cavity a uniform line whose inductance is the radial wave of
** the plate pair, its capacitance a fitted cell.
*/
#ifndef LSTUB_LADDER_H
#define LSTUB_LADDER_H

#include "model/cavity.h"

/*
** Input impedance at the lower face of copper[0]. Returns NaN for what it does not know (see lstub__ladder_valid).
** Accuracy of the first notch: see LADDER_ERROR and LADDER_WIDE in branch.c.
*/
cplx lstub__ladder_zin(const lstub__cav_barrel *barrel, double freq, const cplx *eps);
/* 1: within the stated range; 0: outside it (drilled, not longer than 0.5 mm, planes more than 0.35 mm apart, wide pads). */
int      lstub__ladder_valid(const lstub__cav_barrel *barrel);

#endif
