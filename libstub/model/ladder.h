/*
** The ladder: the second tier, for sweeps. The same slabs and openings as the cavity model, but every opening carries one
** field shape, the static one of the barrel as a whole, so that a frequency is a chain of scalars: a slab is the radial
** wave of mode 0 in series with that voltage, and fixed capacitances.
*/
#ifndef LSTUB_LADDER_H
#define LSTUB_LADDER_H

#include "model/cavity.h"

typedef struct lstub__ladder lstub__ladder;

/* 0, or as lstub__cavity_compile: -1 no memory, -2 beyond what the arrays hold. Taps, a partner in the same cascade and the
** axial flux are not looked at. */
int    lstub__ladder_make(const lstub__cav_barrel *barrel, void *(*allocate)(void *, size_t), void (*release)(void *, void *),
                          void *user, lstub__ladder **out);
void   lstub__ladder_free(lstub__ladder *ladder);           /* null is allowed */
size_t lstub__ladder_bytes(const lstub__ladder *ladder);

/* 1: the first notch is within LADDER_ERROR of branch.c; else LADDER_WIDE: a space between planes higher than half the stub, a stub
** below half a millimetre that no wall closes, an end just below a pad, planes with edges, a slot around a pair without return vias. */
int    lstub__ladder_valid(const lstub__cav_barrel *barrel);

/* Input impedance at the lower face of copper[0]. */
cplx   lstub__ladder_zin(const lstub__ladder *ladder, double freq, const cplx *eps);

#endif
