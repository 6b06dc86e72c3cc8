/*
** From one description of a network to another. All of them are special cases of voltages and currents at the ports as
** linear functions of p free numbers x, V = v x, I = i x: S has x = incident waves, Z currents, Y voltages, ABCD (V2, -I2).
** Whatever is wanted is then a quotient of two sums of v and i. Nothing but the result itself need exist.
*/
#ifndef LSTUB_IMAGE_H
#define LSTUB_IMAGE_H

#include "network/network.h"

typedef struct lstub__image {
    cplx   v[LSTUB__PORTS2], i[LSTUB__PORTS2];
    double size_v[LSTUB__PORTS2], size_i[LSTUB__PORTS2];     /* of the terms they were summed from */
} lstub__image;

/* From power waves: V = (z* + z S) a/sqrt(Re z), I = (1 - S) a/sqrt(Re z). */
void lstub__image_of_waves(const cplx *s, int p, const cplx *z, lstub__image *m);
/* And back: a = (V + z I)/(2 sqrt(Re z)), b = (V - z* I)/(2 sqrt(Re z)), S = b/a. Returns the condition. */
double lstub__waves_of_image(const lstub__image *m, int p, const cplx *z, cplx *s);

#endif
