/*
** One frequency of a ladder: a chain of scalars, from the end upwards. A slab has the capacitances T, B, C of its faces' shapes
** and, in series with their voltages U, the loop of mode 0,
**
**     Y <- T + (U_top^2 M - 2 C U_top U_bottom - C^2 z)/(z M + U_bottom^2),   M = Y + B,  z = -h k0^2/R,
**
** R = kappa a (K1 + Q I1)/(K0 - Q I0)(kappa a), the radial admittance of the plate pair seen from the barrel.
*/
#include "model/ladder_model.h"
#include "model/cavity_model.h"
#include "num/bessel.h"

typedef struct state {
    const lstub__ladder *l;
    const cplx *eps;
    double k0;
    int    known[LADDER_LOOPS];
    cplx   loop[LADDER_LOOPS];      /* 1/R */
} state;

static cplx radial(const lstub__ladder *l, unsigned vias, cplx eps, double k0)
{
    cplx kappa = cplx_sqrt(eps), q = cplx_of(0.0, 0.0), za;
    lstub__zik a, g;

    kappa = cplx_of(-k0 * kappa.im, k0 * kappa.re);
    za = cplx_scale(kappa, l->radius);
    lstub__bessel_zik(za, &a);
    if (l->outer == LSTUB__CAV_WALL) {
        lstub__bessel_zik(cplx_scale(kappa, l->wall), &g);
        q = cplx_mul(cplx_div(g.k0, g.i0), cplx_exp(cplx_scale(kappa, -2.0 * (l->wall - l->radius))));
    } else if (l->outer == LSTUB__CAV_RING) {
        cav_echo echo;
        cav_ring(&l->returns, vias, 0, l->radius, kappa, 0, &echo);
        q = cplx_mul(cplx_neg(echo.gamma[0]), cplx_exp(cplx_scale(za, 2.0)));
    }
    return cplx_div(cplx_fms(a.k0, q, a.i0), cplx_mul(za, cplx_fma(a.k1, q, a.i1)));
}

static cplx loop_of(state *w, int i)
{
    const ladder_loop *loop = &w->l->loop[i];

    if (!w->known[i]) {
        w->loop[i] = radial(w->l, loop->vias, w->eps[loop->medium], w->k0);
        w->known[i] = 1;
    }
    return w->loop[i];
}

/* e (c[0] + u c[1]), eu = e u */
static cplx linear(const double c[2], cplx e, cplx eu) { return cplx_of(e.re * c[0] + eu.re * c[1], e.im * c[0] + eu.im * c[1]); }

/* 1 - u c[0] + u^2 c[1] */
static cplx wave(const double c[2], cplx u, cplx uu)
{
    return cplx_of(1.0 - u.re * c[0] + uu.re * c[1], uu.im * c[1] - u.im * c[0]);
}

static cplx below(state *w)
{
    const lstub__ladder *l = w->l;
    cplx y = cplx_of(0.0, 0.0);
    int i;

    for (i = 0; i < l->ends; i++) {
        const ladder_end *s = &l->end[i];
        cplx e = w->eps[s->medium], u = cplx_scale(e, w->k0 * w->k0), c = cplx_of(s->c[1], 0.0);

        if (s->loop >= 0) c = cplx_add(c, cplx_scale(loop_of(w, s->loop), s->c[2]));
        c = cplx_mul(c, u);
        c.re += s->c[0];
        y = cplx_fma(y, c, e);
    }
    return y;
}

static cplx climb(state *w, const ladder_step *s, cplx y)
{
    double k2 = w->k0 * w->k0;
    cplx e = w->eps[s->medium], u = cplx_scale(e, k2), eu = cplx_mul(e, u), uu = cplx_mul(u, u), m, z, top, bottom, c, d, n;

    z = cplx_of(s->log0 + u.re * s->log1, u.im * s->log1);
    if (s->loop >= 0) z = cplx_add(z, loop_of(w, s->loop));
    z = cplx_scale(z, -s->h * k2);
    m = cplx_add(y, linear(s->b, e, eu));
    c = linear(s->c, e, eu);
    top = wave(s->top, u, uu);
    bottom = wave(s->bottom, u, uu);
    d = cplx_fma(cplx_mul(bottom, bottom), z, m);
    n = cplx_fms(cplx_mul(cplx_mul(top, top), m), c, cplx_add(cplx_mul(c, z), cplx_scale(cplx_mul(top, bottom), 2.0)));
    return cplx_add(linear(s->t, e, eu), cplx_mul(n, cplx_inv(d)));
}

cplx lstub__ladder_zin(const lstub__ladder *l, double freq, const cplx *eps)
{
    double w = 2.0 * LSTUB_PI * freq;
    state s;
    cplx y;
    int i;

    s.l = l;
    s.eps = eps;
    s.k0 = w / LSTUB_C0;
    for (i = 0; i < l->loops; i++) s.known[i] = 0;
    y = below(&s);
    for (i = l->steps - 1; i >= 0; i--) y = climb(&s, &l->step[i], y);
    y = cplx_add(y, cplx_scale(eps[l->feed_medium], l->feed));
    if (y.im > 0.0) y.im = 0.0;             /* the series are short: where they would have the stub give power, far up, it gives none */
    return cplx_scale(cplx_inv(cplx_of(-y.im, y.re)), 1.0 / (2.0 * LSTUB_PI * w * LSTUB_EPS0));
}
