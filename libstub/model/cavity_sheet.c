/*
** The self term of a tap. On the face where a trace leaves its current flows as a uniform sheet from the pad's rim to the face's
** outer rim X, and on as a radial wave between the planes; the real trace carries its own inductance. With h_u, h_l to the planes
** above and below, what is taken off is
**
**     h_u h_l/(h_u + h_l) [ jw mu0/(2 pi) ln(X/r) + eta0/(2 pi X sqrt(eps)) (K0 + Gamma I0)(K1 - Gamma I1)^-1 (kappa X) ],
**
** Gamma a matrix for two barrels, each the other's partner. Without a plane on one side the other's h is left.
*/
#include "model/cavity_cascade.h"

static void answer(state *w, const cav_slab *s, cplx *gamma)
{
    int i;

    for (i = 0; i < 4; i++) gamma[i] = cplx_of(0.0, 0.0);
    if (s->outer == LSTUB__CAV_RING) {
        const cav_echo *echo = cav_echo_of(w, s);
        for (i = 0; i < 4; i++) gamma[i] = echo->gamma[i];
    } else if (s->outer == LSTUB__CAV_WALL) {
        cplx i0, k0;
        lstub__bessel_zik0(cplx_scale(w->kappa[s->medium], s->r_out), &i0, &k0);
        gamma[0] = cplx_neg(cplx_div(k0, i0));
    }
}

/* (K0 + Gamma I0)(K1 - Gamma I1)^-1 at kappa x; two: matrices. */
static void wave_impedance(cplx kappa, double x, const cplx *gamma, int two, cplx *out)
{
    lstub__zik b;
    cplx e = cplx_exp(cplx_scale(kappa, 2.0 * x)), up[4], down[4], det;
    int i, n = two ? 4 : 1;

    lstub__bessel_zik(cplx_scale(kappa, x), &b);
    for (i = 0; i < n; i++) {
        cplx g = cplx_mul(gamma[i], e);
        up[i] = cplx_mul(g, b.i0);
        down[i] = cplx_neg(cplx_mul(g, b.i1));
        if (i == 0 || i == 3) {
            up[i] = cplx_add(up[i], b.k0);
            down[i] = cplx_add(down[i], b.k1);
        }
    }
    if (!two) {
        out[0] = cplx_div(up[0], down[0]);
        return;
    }
    det = cplx_inv(cplx_fms(cplx_mul(down[0], down[3]), down[1], down[2]));
    out[0] = cplx_mul(det, cplx_fms(cplx_mul(up[0], down[3]), up[1], down[2]));
    out[1] = cplx_mul(det, cplx_fms(cplx_mul(up[1], down[0]), up[0], down[1]));
    out[2] = cplx_mul(det, cplx_fms(cplx_mul(up[2], down[3]), up[3], down[2]));
    out[3] = cplx_mul(det, cplx_fms(cplx_mul(up[3], down[0]), up[2], down[1]));
}

/* z: as ports_of has them, feeds first, then the traces of each barrel. */
void cav_take_sheets(state *w, int feeds, int ports, cplx *z)
{
    const lstub__cavity *m = w->m;
    int b, p, i, j;

    for (b = 0; b < m->barrels; b++)
        for (i = 0; i < m->taps[b]; i++) {
            const cav_tap *t = &m->tap[b][i];
            const cav_slab *s = &m->slab[b * m->slabs + t->slab];
            cplx gamma[4], wave[4], unit = cplx_div(cplx_of(LSTUB_ETA0 / (2.0 * LSTUB_PI * t->rim_out), 0.0), cplx_sqrt(w->eps[s->medium]));
            int row = feeds + (b == 0 ? 0 : m->taps[0]) + i;
            answer(w, s, gamma);
            wave_impedance(w->kappa[s->medium], t->rim_out, gamma, m->barrels > 1, wave);
            for (p = 0; p < m->barrels; p++) {
                for (j = 0; j < m->taps[p]; j++) if (fabs(m->tap[p][j].depth - t->depth) < 1e-9) break;
                if (j == m->taps[p]) continue;          /* the other barrel's trace leaves elsewhere */
                int column = feeds + (p == 0 ? 0 : m->taps[0]) + j;
                cplx off = cplx_mul(unit, m->barrels > 1 ? wave[2 * b + p] : wave[0]);
                if (p == b) off.im += w->k0 * LSTUB_ETA0 / (2.0 * LSTUB_PI) * log(t->rim_out / t->rim_in);
                z[row * ports + column] = cplx_sub(z[row * ports + column], cplx_scale(off, t->height));
            }
        }
}
