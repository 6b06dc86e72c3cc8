#include "num/elliptic.h"

#include <math.h>

void lstub__elliptic(double m1, double *k, double *e)
{
    double a = 1.0, b, c, sum, power = 0.5;
    int step;

    if (!(m1 >= 0.0 && m1 <= 1.0)) { *k = *e = NAN; return; }
    if (m1 == 0.0) { *k = INFINITY; *e = 1.0; return; }
    b = sqrt(m1);
    sum = 0.5 * (1.0 - m1);                     /* sum of 2^(n-1) c_n^2 */
    for (step = 0; step < 60 && fabs(a - b) > 1e-16 * a; step++) {
        double mean = 0.5 * (a + b);
        c = 0.5 * (a - b);
        b = sqrt(a * b);
        a = mean;
        power *= 2.0;
        sum += power * c * c;
    }
    *k = 1.57079632679489661923 / a;
    *e = *k * (1.0 - sum);
}
