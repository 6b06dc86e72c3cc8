/*
** Bessel functions of order 0 and 1 of a real or complex argument, higher orders by recurrence.
**
** Scaled functions are what the models use: with Re z >= 0,  ie = e^-z I(z),  ke = e^z K(z)  (the whole complex
** exponential), so that nothing overflows and products such as I(x) K(y) keep e^-(y-x) alone.
**
** Range     real: 1e-300 <= x <= 1e15 (J, Y: 1e-150 to 1e5); complex: 1e-150 <= |z| <= 1e5, Re z >= 0 and, away from the real axis, the
**           imaginary axis included. Outside: NaN.
** Accuracy  1e-13 relative or better (orders beyond 1: |z| <= 1e4); near a zero of J, Y or of I on the imaginary axis relative to the
**           neighbouring maximum.
** Sources   ascending series (Abramowitz and Stegun 9.6.10-13), Chebyshev series computed with mpmath for the real
**           argument, continued fractions of Steed and Temme (Temme, J. Comput. Phys. 19, 1975) and the Wronskian
**           I0 K1 + I1 K0 = 1/z for the middle of the complex plane, Hankel's expansion (A&S 9.7) far out.
*/
#ifndef LSTUB_BESSEL_H
#define LSTUB_BESSEL_H

#include "num/cplx.h"

typedef struct lstub__ik  { double i0, i1, k0, k1; } lstub__ik;           /* scaled, real argument    */
typedef struct lstub__zik { cplx i0, i1, k0, k1; } lstub__zik;        /* scaled, complex argument */

void lstub__bessel_ik(double x, lstub__ik *out);
void lstub__bessel_ik0(double x, double *i0, double *k0);     /* order 0 alone: what mode sums need      */
void lstub__bessel_zik(cplx z, lstub__zik *out);
void lstub__bessel_zik0(cplx z, cplx *i0, cplx *k0);    /* order 0, not scaled: |Re z| < 700      */

/* J0, J1, Y0, Y1 of a real x > 0, and of a complex z, Im z <= 0 < |z| (waves that decay with exp(+jwt)):
** H^(2)_n(z) = (2 j^(n+1)/pi) K_n(j z). The complex ones are plain, so |Im z| < 700. */
typedef struct lstub__jy  { double j0, j1, y0, y1; } lstub__jy;
typedef struct lstub__zjy { cplx j0, j1, y0, y1, h0, h1; } lstub__zjy;   /* h: H^(2) */

void lstub__bessel_jy(double x, lstub__jy *out);
void lstub__bessel_zjy(cplx z, lstub__zjy *out);

/* Orders 0 .. n, scaled as above: K by upward, I by downward recurrence. n >= 1. */
void lstub__bessel_zkn(cplx z, int n, cplx *ke);
void lstub__bessel_zin(cplx z, int n, cplx *ie);

#endif
