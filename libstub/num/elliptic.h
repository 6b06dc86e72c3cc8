/* Complete elliptic integrals of the parameter m = k^2. */
#ifndef LSTUB_ELLIPTIC_H
#define LSTUB_ELLIPTIC_H

/*
** First and second kind, K(m) and E(m), 0 <= m <= 1; outside NaN. K(1) is infinite. Better than 2e-15 relative
** for m1 >= 1e-16, 1e-14 below. `m1` is 1 - m, given by the caller who knows it without cancellation.
** Source  arithmetic-geometric mean, Abramowitz and Stegun 17.6.
*/
void lstub__elliptic(double m1, double *k, double *e);

#endif
