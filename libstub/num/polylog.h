/* Polylogarithms that sum the high radial modes in closed form. */
#ifndef LSTUB_POLYLOG_H
#define LSTUB_POLYLOG_H

/*
** li[k] = Li_(3+k)(e^-c) = sum over n >= 1 of e^(-n c)/n^(3+k), k = 0 .. 3, for c >= 0, to 1e-14 relative.
** Source  the sum itself for c >= 0.8; below, the expansion about c = 0,
**         Li_s(e^-c) = sum_(k /= s-1) zeta(s-k) (-c)^k/k! + (-c)^(s-1)/(s-1)! (H_(s-1) - ln c)   (DLMF 25.12.12).
*/
void lstub__polylog(double c, double li[4]);

#endif
