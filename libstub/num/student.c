/* Sums: Abramowitz, Stegun, Handbook of Mathematical Functions, 26.7.3, 26.7.4 (t) and 26.4.4, 26.4.5 (chi squared). */
#include "num/student.h"

#include "base/base.h"
#include "num/root.h"

#include <math.h>

typedef struct wanted {
    double p;
    int32_t dof;
} wanted;

/* Probability of |t| < sqrt(dof) tan(angle), less the one wanted. */
static double within(double angle, const void *context)
{
    const wanted *w = context;
    double c2 = cos(angle) * cos(angle), term = w->dof % 2 ? cos(angle) : 1.0, sum = 0.0;
    for (int32_t k = w->dof % 2 ? 3 : 2; k <= w->dof; k += 2) {      /* term: of cos^(k-2) */
        sum += term;
        term *= c2 * (k - 1) / k;
        if (term < 1e-18 * sum)
            break;
    }
    sum *= sin(angle);
    return (w->dof % 2 ? (angle + sum) * 2.0 / LSTUB_PI : sum) - w->p;
}

static double normal_within(double x, const void *context)
{
    return erf(x / sqrt(2.0)) - *(const double *)context;
}

double lstub__student_within(double p, int32_t dof)
{
    wanted w = {p, dof};
    if (dof == 0)
        return lstub__root(normal_within, &p, 0.0, 40.0, 1e-14);
    return sqrt((double)dof) * tan(lstub__root(within, &w, 0.0, 0.5 * LSTUB_PI, 4e-15));
}

double lstub__chi2_above(double x, int32_t dof)
{
    double half = 0.5 * x, odd = dof % 2, sum = odd > 0.0 ? erfc(sqrt(half)) : 0.0;
    if (x <= 0.0)
        return 1.0;
    /* Terms exp(-half) half^a/Gamma(a + 1), a = 0, 1 .. or 1/2, 3/2 ..: as logarithms, which do not overflow. */
    double term = odd > 0.0 ? 0.5 * log(half) - 0.5 * log(LSTUB_PI) + log(2.0) - half : -half;
    for (int32_t k = odd > 0.0 ? 3 : 2; k <= dof; k += 2) {
        sum += exp(term);
        term += log(half / (0.5 * k));
    }
    return fmin(sum, 1.0);
}
