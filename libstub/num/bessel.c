#include "num/bessel.h"

#include <math.h>

/*
** Trapezoidal rule on K0(x) = integral of exp(-x cosh t) over t > 0 (DLMF 10.32.9). The integrand is entire and falls
** doubly exponentially, so the error is exp(-pi^2/h + x) for small x and that of a Gaussian for large x: below 1e-15
** with the steps here.
*/
double lstub__k0_scaled(double x)
{
    double h = x > 6.0 ? 0.6 / sqrt(x) : 0.24;
    double sum = 0.5, term = 1.0;
    for (int i = 1; term > 1e-17; i++) {
        double s = sinh(0.5 * h * i);
        term = exp(-2.0 * x * s * s);
        sum += term;
    }
    return h * sum;
}
