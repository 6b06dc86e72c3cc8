#include "num/polylog.h"

#include <math.h>

#define TERMS 20      /* (0.8/2 pi)^20 = 1e-18 */

/* zeta(s), s = 6 down to 3 - TERMS: entry k is zeta(6 - k); the pole at s = 1 (k = 5) is never read. */
static const double zeta[TERMS + 6] = {
    1.0173430619844491397, 1.0369277551433699263, 1.0823232337111381915, 1.2020569031595942854,
    1.6449340668482264365, 0.0, -0.5, -1.0 / 12.0, 0.0, 1.0 / 120.0, 0.0, -1.0 / 252.0, 0.0, 1.0 / 240.0, 0.0,
    -1.0 / 132.0, 0.0, 691.0 / 32760.0, 0.0, -1.0 / 12.0, 0.0, 3617.0 / 8160.0, 0.0, -43867.0 / 14364.0, 0.0,
    174611.0 / 6600.0
};

static void by_series(double c, double li[4])
{
    static const double harmonic[4] = { 1.5, 11.0 / 6.0, 25.0 / 12.0, 137.0 / 60.0 };   /* H_2 .. H_5 */
    double log_c = c > 0.0 ? log(c) : 0.0, power = 1.0;       /* (-c)^k / k! */
    int k, s;

    for (s = 0; s < 4; s++) li[s] = 0.0;
    for (k = 0; k < TERMS; k++) {
        for (s = 0; s < 4; s++) {
            if (k == s + 2) li[s] += power * (harmonic[s] - log_c);
            else li[s] += power * zeta[3 - s + k];
        }
        power *= -c / (k + 1);
        if (power == 0.0) break;
    }
}

void lstub__polylog(double c, double li[4])
{
    double step, e;
    int n, s;

    if (c < 0.8) { by_series(c, li); return; }
    for (s = 0; s < 4; s++) li[s] = 0.0;
    step = e = exp(-c);
    for (n = 1; n < 60 && e > 1e-17 * step; n++) {
        double inverse = 1.0 / n, term = e * inverse * inverse * inverse;
        for (s = 0; s < 4; s++) { li[s] += term; term *= inverse; }
        e *= step;
    }
}
