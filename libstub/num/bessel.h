/* Modified Bessel function K of order 0, real argument. */
#ifndef LSTUB_BESSEL_H
#define LSTUB_BESSEL_H

/* exp(x) K0(x) for x > 0, to 1e-14 relative over 1e-6 <= x <= 1e6. */
double lstub__k0_scaled(double x);

#endif
