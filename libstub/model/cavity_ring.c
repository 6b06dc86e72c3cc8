/*
** Return vias and a partner barrel, in one complex number per dielectric and frequency.
**
** The barrel sends K0(kappa rho), a partner the same with its sign. Via j answers with c_jp K_|p|(kappa rho_j) e^(j p phi_j); E_z = 0 on each via, order by
** order (Graf's addition theorem), gives a linear system. The answer at the barrel is Gamma I0(kappa rho). Orders beyond
** 0 are needed: with p = 0 alone the notch is 1 to 2 % low.
*/
#include "model/cavity_model.h"
#include "num/bessel.h"
#include "num/dense.h"

#include <stdlib.h>

#define ORDERS   2                  /* |p| for a few vias, one less for many */
#define FEW      4
#define UNKNOWNS ((2 * (ORDERS - 1) + 1) * LSTUB__CAV_VIAS)    /* more than a FEW with all orders */

/* e^(j p theta) of the direction (dx, dy), any sign of p. */
static cplx turn(double dx, double dy, int p)
{
    double d = hypot(dx, dy);
    cplx one = cplx_of(dx / d, (p < 0 ? -dy : dy) / d), out = cplx_of(1.0, 0.0);

    for (p = abs(p); p > 0; p--) out = cplx_mul(out, one);
    return out;
}

/* K and I of orders 0 .. top at a via's own rim, as the ratio K/I, unscaled. */
static void rim_ratio(cplx kappa, double radius, int top, cplx *ratio)
{
    cplx k[ORDERS + 2], i[ORDERS + 2], e2 = cplx_exp(cplx_scale(kappa, -2.0 * radius));
    int q;

    lstub__bessel_zkn(cplx_scale(kappa, radius), top + 1, k);
    lstub__bessel_zin(cplx_scale(kappa, radius), top + 1, i);
    for (q = 0; q <= top; q++) ratio[q] = cplx_mul(cplx_div(k[q], i[q]), e2);
}

/* K of orders 0 .. n at a distance, unscaled. */
static void waves(cplx kappa, double d, int n, cplx *k)
{
    cplx decay = cplx_exp(cplx_scale(kappa, -d));
    int q;

    lstub__bessel_zkn(cplx_scale(kappa, d), n, k);
    for (q = 0; q <= n; q++) k[q] = cplx_mul(k[q], decay);
}

/* What a source at distance (dx, dy) from a via, seen from the source, sends into its order q, with the sign of the
** right-hand side. */
static cplx sent(const cplx *k, double dx, double dy, int q)
{
    return cplx_scale(cplx_mul(k[abs(q)], turn(dx, dy, -q)), q & 1 ? 1.0 : -1.0);
}

/*
** Vias evenly spread about the barrel: via i answers as via 0 does, turned, c_ip = c_p e^(-j p phi_i), so that there are
** as many unknowns as orders.
*/
static cplx even_ring(const lstub__cav_returns *r, cplx kappa)
{
    const int top = ORDERS, width = 2 * ORDERS + 1;
    const lstub__cav_via *v = r->via;
    cplx a[(2 * ORDERS + 1) * (2 * ORDERS + 1)], b[2 * ORDERS + 1], k[2 * ORDERS + 1], ratio[ORDERS + 1];
    cplx gamma = cplx_of(0.0, 0.0);
    double s = v->x;
    int i, p, q;

    rim_ratio(kappa, v->radius, top, ratio);
    for (q = -top; q <= top; q++)
        for (p = -top; p <= top; p++) a[(q + top) * width + p + top] = p == q ? ratio[abs(q)] : cplx_of(0.0, 0.0);
    for (i = 1; i < r->even; i++) {
        double phi = 2.0 * LSTUB_PI * i / r->even, x = s * cos(phi), y = s * sin(phi), dx = s - x, dy = -y;
        waves(kappa, hypot(dx, dy), 2 * top, k);
        for (q = -top; q <= top; q++)
            for (p = -top; p <= top; p++) {
                cplx *at = &a[(q + top) * width + p + top];
                cplx t = cplx_mul(cplx_mul(k[abs(p - q)], turn(dx, dy, p - q)), turn(x, y, -p));
                *at = cplx_add(*at, cplx_scale(t, q & 1 ? -1.0 : 1.0));
            }
    }
    waves(kappa, s, top, k);
    for (q = -top; q <= top; q++) b[q + top] = sent(k, s, 0.0, q);
    if (lstub__zsolve(a, width, width, b, 1, 1) != 0) return cplx_of(NAN, NAN);
    for (p = -top; p <= top; p++) gamma = cplx_fma(gamma, cplx_mul(k[abs(p)], turn(-s, 0.0, p)), b[p + top]);
    return cplx_scale(gamma, r->even);
}

cplx cav_ring(const lstub__cav_returns *r, cplx kappa)
{
    int vias = r->vias, top = vias <= FEW ? ORDERS : ORDERS - 1, width = 2 * top + 1, n = vias * width, i, j, p, q;
    cplx a[UNKNOWNS * UNKNOWNS], b[UNKNOWNS], back[UNKNOWNS], k[2 * ORDERS + 1], ratio[ORDERS + 1], gamma = cplx_of(0.0, 0.0);
    const lstub__cav_via *via = r->via;

    if (r->even > 0) return even_ring(r, kappa);
    if (r->pitch > 0.0) {
        waves(kappa, r->pitch, 1, k);
        gamma = cplx_scale(k[0], r->sign);
    }
    for (j = 0; j < vias; j++) {
        const lstub__cav_via *v = &via[j];

        rim_ratio(kappa, v->radius, top, ratio);
        waves(kappa, hypot(v->x, v->y), top + 1, k);
        for (q = -top; q <= top; q++) {
            int row = j * width + q + top;
            for (p = 0; p < n; p++) a[row * n + p] = cplx_of(0.0, 0.0);
            a[row * n + row] = ratio[abs(q)];
            b[row] = sent(k, v->x, v->y, q);
            back[row] = cplx_mul(k[abs(q)], turn(-v->x, -v->y, q));
        }
        if (r->pitch > 0.0) {
            double dx = v->x - r->pitch;
            waves(kappa, hypot(dx, v->y), top + 1, k);
            for (q = -top; q <= top; q++)
                b[j * width + q + top] = cplx_add(b[j * width + q + top], cplx_scale(sent(k, dx, v->y, q), r->sign));
        }
    }
    for (j = 0; j < vias; j++) {
        for (i = 0; i < j; i++) {
            double dx = via[j].x - via[i].x, dy = via[j].y - via[i].y;

            waves(kappa, hypot(dx, dy), 2 * top, k);
            for (q = -top; q <= top; q++) {
                for (p = -top; p <= top; p++) {
                    cplx there = cplx_mul(k[abs(p - q)], turn(dx, dy, p - q)), here = cplx_mul(k[abs(p - q)], turn(-dx, -dy, p - q));
                    double sign = q & 1 ? -1.0 : 1.0;
                    a[(j * width + q + top) * n + i * width + p + top] = cplx_scale(there, sign);
                    a[(i * width + q + top) * n + j * width + p + top] = cplx_scale(here, sign);
                }
            }
        }
    }
    if (vias > 0 && lstub__zsolve(a, n, n, b, 1, 1) != 0) return cplx_of(NAN, NAN);
    for (p = 0; p < n; p++) gamma = cplx_fma(gamma, back[p], b[p]);
    return gamma;
}
