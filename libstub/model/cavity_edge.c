/*
** Planes that end: a rectangle of edges around the barrel, bare (magnetic walls) or shorted (electric walls).
**
** What comes back to (x, y) of a wave K0(kappa rho) from (xs, ys) is the rectangle's Green function less K0 itself. With
** g_m = sqrt((m pi/A)^2 + kappa^2), phi_m = cos (sin) m pi x/A, a sum over the guide between the walls of x,
**
**     (2 pi/A) sum c_m phi_m(x) phi_m(xs) [ e^(-g_m |y - ys|) + what the walls of y send back ]/(2 g_m),  c_0 = 1, c_m = 2.
**
** The second part converges by itself; from the first its static part, a logarithm (Kummer), is taken with K0, so that both may
** be at one place, and the rest falls as 1/m^3. Waves of vias and barrels of order 1 and 2 do not feel the edges: these are many radii
** away. Source: image and mode sums of the rectangle, e.g. Collin, Field Theory of Guided Waves, ch. 2.
*/
#include "model/cavity_model.h"
#include "num/bessel.h"

#define EULER 0.57721566490153286061
#define ENOUGH 3e-8         /* of what is left out, about */
#define NOTHING 36.0        /* e^-36: not seen beside 1 */
#define MOST 20000

/* ln(1 - 2 q cos t + q^2), q = e^-s: near s = t = 0 as ln(s^2 + t^2) and what is left of it. */
static double log_term(double s, double t)
{
    double a = -expm1(-s), b = sin(0.5 * t);

    return log(a * a + 4.0 * exp(-s) * b * b);
}

/* K0(kappa d) + ln(pi d/A), or its limit at d = 0. */
static cplx less_direct(cplx kappa, double d, double a)
{
    cplx i0, k0;

    if (d < 1e-9 * a) {
        cplx l = cplx_log(cplx_scale(kappa, a / (2.0 * LSTUB_PI)));
        return cplx_of(-l.re - EULER, -l.im);
    }
    if (cplx_abs(kappa) * d > 600.0) return cplx_of(log(LSTUB_PI * d / a), 0.0);
    lstub__bessel_zik0(cplx_scale(kappa, d), &i0, &k0);
    return cplx_of(k0.re + log(LSTUB_PI * d / a), k0.im);
}

cplx cav_edge(const lstub__cav_returns *r, cplx kappa, double x, double y, double xs, double ys)
{
    double a = r->edge[0] + r->edge[1], b = r->edge[2] + r->edge[3], u = (x + r->edge[0]) * LSTUB_PI / a, v = (xs + r->edge[0]) * LSTUB_PI / a;
    double gap = fabs(y - ys), low = (y < ys ? y : ys) + r->edge[2], high = r->edge[3] - (y > ys ? y : ys), sign = r->shorted ? -1.0 : 1.0;
    double d = hypot(x - xs, y - ys), same = log_term(LSTUB_PI * gap / a, u - v), image = log_term(LSTUB_PI * gap / a, u + v);
    cplx sum, k2 = cplx_mul(kappa, kappa);
    int m;

    if (d < 1e-9 * a) same = 0.0;
    else same -= 2.0 * log(LSTUB_PI * d / a);
    /* static part of all m >= 1 less K0: both in terms of ln(pi d/A) */
    sum = cplx_scale(less_direct(kappa, d, a), -1.0);
    sum.re -= 0.5 * (same + sign * image);
    for (m = r->shorted ? 1 : 0; m < MOST; m++) {
        double beta = m * LSTUB_PI / a, f = (m > 0 ? 2.0 : 1.0) * (r->shorted ? sin(m * u) * sin(m * v) : cos(m * u) * cos(m * v));
        cplx g = cplx_sqrt(cplx_of(beta * beta + k2.re, k2.im)), e2, back, direct, term;
        back = cplx_of(0.0, 0.0);
        if (g.re * (2.0 * fmin(low, high) + gap) < NOTHING) {
            /* of the walls of y: (e^-2g low + e^-2g high) sign + ..., over 1 - e^-2gB */
            e2 = cplx_exp(cplx_scale(g, -2.0 * b));
            back = cplx_add(cplx_exp(cplx_scale(g, -(2.0 * low + gap))), cplx_exp(cplx_scale(g, -(2.0 * high + gap))));
            back = cplx_scale(back, sign);
            back = cplx_add(back, cplx_exp(cplx_scale(g, gap - 2.0 * b)));
            back = cplx_add(back, cplx_mul(e2, cplx_exp(cplx_scale(g, -gap))));
            back = cplx_div(back, cplx_sub(cplx_of(1.0, 0.0), e2));
        }
        direct = gap > 0.0 ? cplx_exp(cplx_scale(g, -gap)) : cplx_of(1.0, 0.0);
        term = cplx_div(cplx_add(direct, back), cplx_scale(g, 2.0));
        if (m > 0) term.re -= (gap > 0.0 ? exp(-beta * gap) : 1.0) / (2.0 * beta);
        sum = cplx_add(sum, cplx_scale(term, f * 2.0 * LSTUB_PI / a));
        if (m > 4 && cplx_abs(term) * 2.0 * LSTUB_PI / a * m < ENOUGH && beta * beta > 4.0 * cplx_abs(k2)) break;
    }
    return sum;
}
